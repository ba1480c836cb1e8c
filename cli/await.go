package cli

import (
	"context"
	"errors"
	"fmt"
	"time"

	"maskpair/decompose"
)

// This file keeps the promise that an interrupt ends the program within a second, even while a read from a pipe hangs, and
// the promise that no panic reaches a user.

// grace is how long work may take to come back by itself after an interrupt.
const grace = 600 * time.Millisecond

// panicError is a fault of the program itself.
type panicError struct{ value string }

func (e *panicError) Error() string {
	return "a fault in the program itself: " + e.value + "; nothing was written; please report it with the command line"
}

// await runs work and gives its error. When ctx ends, work has a moment to come back; then it is left behind. Work that was
// interrupted gives errInterrupted, whatever it says itself.
func await(ctx context.Context, work func() error) error {
	done := make(chan error, 1)
	go func() {
		defer func() {
			if p := recover(); p != nil {
				done <- &panicError{fmt.Sprint(p)}
			}
		}()
		err := work()
		if fault := (*decompose.Fault)(nil); errors.As(err, &fault) {
			err = &panicError{fault.Msg}
		}
		done <- err
	}()
	select {
	case err := <-done:
		return interrupted(ctx, err)
	case <-ctx.Done():
	}
	late := time.NewTimer(grace)
	defer late.Stop()
	select {
	case err := <-done:
		return interrupted(ctx, err)
	case <-late.C:
		return errInterrupted
	}
}

// interrupted gives errInterrupted in place of an error that came up after the interrupt.
func interrupted(ctx context.Context, err error) error {
	if err != nil && ctx.Err() != nil {
		return errInterrupted
	}
	return err
}
