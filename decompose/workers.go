package decompose

import (
	"sync/atomic"

	"golang.org/x/sync/errgroup"
)

// This file runs work on several workers, where that needs no context and cannot fail.

// each runs work for 0 to n-1 at once and waits for all.
func each(n int, work func(int)) {
	if n == 1 {
		work(0)
		return
	}
	var g errgroup.Group
	for w := range n {
		g.Go(func() error { work(w); return nil })
	}
	// The work returns no error.
	_ = g.Wait()
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
