package cli

import (
	"context"
	"errors"
	"fmt"

	"github.com/urfave/cli/v2"

	"maskpair/decompose"
	"maskpair/gds"
)

// This file turns errors into exit statuses, and nothing else does.

// Exit statuses.
const (
	statusDone       = 0 // done, nothing unresolved but what is waived
	statusUnresolved = 1 // done and written, but something is unresolved
	statusUsage      = 2 // the command line, deck or anchor file is wrong
	statusInput      = 3 // the input is no stream that can be processed
	statusOutput     = 4 // it could not write, or was interrupted
)

// usageError is a fault of the command line.
type usageError struct{ msg string }

func (e *usageError) Error() string { return e.msg }

func usagef(format string, args ...any) error { return &usageError{fmt.Sprintf(format, args...)} }

// writeError is a failure to write an output.
type writeError struct {
	name string // as on the command line
	err  error
}

func (e *writeError) Error() string {
	return fmt.Sprintf("%s: cannot be written: %v", e.name, e.err)
}

func (e *writeError) Unwrap() error { return e.err }

// errInterrupted says that a signal ended the work.
var errInterrupted = errors.New("interrupted; nothing new was written")

// statusOf gives the exit status of an error. What is not known to be the fault of the user's files or of writing came up
// while the layout was read.
func statusOf(err error) int {
	var (
		usage *usageError
		deck  *decompose.DeckError
		order *decompose.OrderError
		write *writeError
		exit  cli.ExitCoder
	)
	switch {
	case err == nil:
		return statusDone
	case errors.Is(err, errInterrupted), errors.Is(err, context.Canceled), errors.Is(err, context.DeadlineExceeded), errors.Is(err, gds.ErrSpool), errors.As(err, &write):
		return statusOutput
	case errors.As(err, &usage), errors.As(err, &deck), errors.As(err, &order), errors.As(err, &exit):
		return statusUsage
	}
	return statusInput
}
