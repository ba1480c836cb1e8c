package decompose

import (
	"fmt"
	"sync/atomic"

	"golang.org/x/sync/errgroup"
)

// This file runs work on several workers. A panic of one comes back to whoever waits for it, as it would without workers.

// Fault is a panic in a worker: a fault of the program itself.
type Fault struct{ Msg string }

func (e *Fault) Error() string { return e.Msg }

// safely gives work whose panics are errors.
func safely(work func() error) func() error {
	return func() (err error) {
		defer func() {
			if p := recover(); p != nil {
				err = &Fault{fmt.Sprint(p)}
			}
		}()
		return work()
	}
}

// each runs work for 0 to n-1 at once and waits for all.
func each(n int, work func(int)) {
	if n == 1 {
		work(0)
		return
	}
	var g errgroup.Group
	for w := range n {
		g.Go(safely(func() error { work(w); return nil }))
	}
	if err := g.Wait(); err != nil {
		panic(err) // the work returns no error, so one of the workers did
	}
}

// inTurn runs work for 0 to n-1 on some workers, each taking the next when it is done; work is told which worker it is.
func inTurn(workers, n int, work func(worker, i int)) {
	var next atomic.Int64
	each(min(workers, n), func(worker int) {
		for i := next.Add(1) - 1; i < int64(n); i = next.Add(1) - 1 {
			work(worker, int(i))
		}
	})
}

// atOnce does different work side by side, as far as there are workers.
func atOnce(workers int, work ...func()) {
	inTurn(workers, len(work), func(_, i int) { work[i]() })
}
