package decompose

import (
	"errors"
	"sync/atomic"
	"testing"
)

func TestEachThingIsDoneOnce(t *testing.T) {
	for _, workers := range []int{1, 2, 5, 100} {
		done := make([]atomic.Int32, 70)
		inTurn(workers, len(done), func(worker, i int) {
			if worker < 0 || worker >= workers {
				t.Errorf("worker %d of %d", worker, workers)
			}
			done[i].Add(1)
		})
		for i := range done {
			if n := done[i].Load(); n != 1 {
				t.Errorf("%d workers: thing %d was done %d times", workers, i, n)
			}
		}
	}
	inTurn(3, 0, func(int, int) { t.Error("there is nothing to be done") })
}

// A panic in a worker can be recovered where the workers are waited for.
func TestPanicsOfWorkersComeBack(t *testing.T) {
	for _, workers := range []int{1, 2, 4} {
		func() {
			defer func() {
				if p := recover(); p == nil {
					t.Errorf("%d workers: no panic", workers)
				}
			}()
			each(workers, func(w int) {
				if w == workers-1 {
					panic("a fault")
				}
			})
		}()
	}
	var fault *Fault
	if err := safely(func() error { var s []int; _ = s[len(s)]; return nil })(); !errors.As(err, &fault) || fault.Msg == "" {
		t.Errorf("the error of an index out of range is %v", err)
	}
	if err := safely(func() error { return errTooManyPairs })(); err != errTooManyPairs {
		t.Errorf("an error became %v", err)
	}
}
