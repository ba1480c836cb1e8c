// Command maskpair puts the drawn figures of a GDSII layout on two exposure masks.
package main

import (
	"os"

	"maskpair/cli"
)

func main() {
	os.Exit(cli.Run(cli.UntilSignal(), os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
