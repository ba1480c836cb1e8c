package cli

import (
	"context"
	"os"
	"os/signal"
	"syscall"
)

// This file says what signals do.

// UntilSignal gives a context that ends with the first interrupt or termination signal; a second one ends the process at
// once. Writing to a closed pipe becomes an error like any other.
func UntilSignal() context.Context {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	context.AfterFunc(ctx, stop)
	signal.Ignore(syscall.SIGPIPE)
	return ctx
}
