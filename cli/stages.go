package cli

import (
	"context"
	"errors"
	"io"

	"maskpair/cli/report"
)

// This file wires the packages below together.

// work is what a stage has besides its options.
type work struct {
	in    io.Reader // standard input
	out   io.Writer // takes the layout with its masks; nil where none is asked for. Its errors end up as "cannot be written"
	clock *Clock
}

// decomposeStep reads the layout, decides, and writes the layout with its masks to w.out. Of the report it fills Input,
// Rules, Result and Warnings; the rest is filled by its caller. It gives back soon after ctx ends.
type decomposeStep func(ctx context.Context, o *Options, w *work) (*report.Report, error)

func runDecompose(ctx context.Context, o *Options, w *work) (*report.Report, error) {
	return nil, errors.New("not wired yet")
}
