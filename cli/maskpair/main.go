// Command maskpair puts the drawn figures of a GDSII layout on two exposure masks.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"

	"maskpair/cli"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	context.AfterFunc(ctx, stop)   // a second signal ends the process at once
	signal.Ignore(syscall.SIGPIPE) // writing to a closed pipe is an error like any other
	os.Exit(cli.Run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
