package cli

import (
	"context"
	"encoding/hex"
	"fmt"
	"io"

	"maskpair/anchor"
	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/gds"
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

// runDecompose is the way through the house: index, shapes, orders, masks, output.
func runDecompose(ctx context.Context, o *Options, w *work) (*report.Report, error) {
	want, err := o.Deck.Interest()
	if err != nil {
		return nil, err
	}
	w.clock.Stage("read")
	in, err := gds.Open(o.Input, w.out != nil, w.in)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	var early func() (*gds.Library, error)
	if o.Baseline != "" {
		early = beside(func() (*gds.Library, error) { return readBaseline(o.Baseline, o.Deck) })
	}
	lib, err := in.Index(want, func(done int64) { w.clock.Progress(done, in.Given()) })
	if err != nil {
		return nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	w.clock.Work("read", "bytes", lib.Bytes)
	w.clock.Work("read", "figures", int64(len(lib.Figures)))
	w.clock.Work("read", "references", int64(len(lib.Refs)))
	rules, err := o.Deck.Resolve(lib.DBU)
	if err != nil {
		return nil, err
	}
	file, err := o.ParseAnchors(rules)
	if err != nil {
		return nil, err
	}
	opt := decompose.Options{Jobs: o.Jobs, Memory: o.Memory, Top: o.Top, Stage: w.clock.Stage, Progress: w.clock.Count, Work: w.clock.Work}
	if o.Page != "" {
		opt.Drawings = report.PageCards
	}
	run, err := decompose.New(lib, rules, opt)
	if err != nil {
		return nil, ofLayout(o.Input, err)
	}
	defer run.Close()
	if early != nil {
		base, err := early()
		if err != nil {
			return nil, err
		}
		if err := run.Remember(o.Baseline, base); err != nil {
			return nil, err
		}
		run.Freeze([2]bool{o.Freeze&FreezeA != 0, o.Freeze&FreezeB != 0})
	}
	result, err := run.Decompose(ctx, &anchor.Sources{File: file})
	if err != nil {
		return nil, ofLayout(o.Input, err)
	}
	if w.out != nil {
		out := &metered{w: w.out}
		if err := run.Write(ctx, out, in.ReaderAt(), func(done int64) { w.clock.Progress(done, lib.Bytes) }); err != nil {
			return nil, err
		}
		if err := in.Changed(); err != nil {
			return nil, err
		}
		w.clock.Work("write", "bytes", out.bytes)
	}
	sum, bytes := in.Sum()
	return &report.Report{
		Input:    report.Input{SHA256: hex.EncodeToString(sum[:]), Bytes: bytes, DBU: lib.DBU, Tops: result.Tops},
		Rules:    rules,
		Result:   result,
		Warnings: run.Warnings,
		Run:      report.Run{Estimate: run.Estimate()},
	}, nil
}

// ofLayout names the layout in an error that its content is to blame for. An error that is wrapped names its file already.
func ofLayout(name string, err error) error {
	switch err.(type) {
	case *decompose.InputError, *decompose.LimitError:
		if name == "-" {
			name = "standard input"
		}
		return fmt.Errorf("%s: %w", name, err)
	}
	return err
}

// metered counts what is written.
type metered struct {
	w     io.Writer
	bytes int64
}

func (m *metered) Write(p []byte) (int, error) {
	n, err := m.w.Write(p)
	m.bytes += int64(n)
	return n, err
}

// readBaseline indexes an earlier result.
func readBaseline(path string, deck *decompose.Deck) (*gds.Library, error) {
	want, err := deck.BaselineInterest()
	if err != nil {
		return nil, err
	}
	in, err := gds.OpenUnsummed(path)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	return in.Index(want, nil)
}

// beside runs work at once and gives a function that waits for what it comes to.
func beside[T any](work func() (T, error)) func() (T, error) {
	type outcome struct {
		value T
		err   error
	}
	done := make(chan outcome, 1)
	go func() {
		defer func() {
			if p := recover(); p != nil {
				done <- outcome{err: &panicError{fmt.Sprint(p)}}
			}
		}()
		v, err := work()
		done <- outcome{v, err}
	}()
	return func() (T, error) {
		o := <-done
		return o.value, o.err
	}
}
