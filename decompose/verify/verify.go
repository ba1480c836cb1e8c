package verify

import (
	"bytes"
	"context"
	"fmt"
	"io"

	"maskpair/anchor"
	"maskpair/decompose"
	"maskpair/gds"
)

// This file is the way through the package: read the streams, judge layer by layer, compare structure by structure.

// Stream is a layout: it is read once from its start, then at any place. *gds.Input is one, see also InMemory.
type Stream interface {
	Name() string // for messages
	Index(want gds.Interest, progress func(bytes int64)) (*gds.Library, error)
	ReaderAt() io.ReaderAt // once Index is done
}

// Input is what is to be judged.
type Input struct {
	Masked      Stream
	Drawn       Stream // the layout as it was before; nil: not at hand
	Deck        *decompose.Deck
	AnchorsName string // of the anchor file, for messages
	Anchors     []byte // text of the anchor file; nil: none

	Stage    func(name string)     // told which stage begins; may be nil
	Progress func(bytes, of int64) // told how much of a stream was read, of how much (-1 where not known); may be nil
}

// OrderError says that an order finds no shape, that orders contradict each other, or that the deck asks for what is not
// there: the user's files are to blame, not the layout.
type OrderError struct{ Msg string }

// Error gives one line.
func (e *OrderError) Error() string { return e.Msg }

// InputError says that a layout cannot be judged as it is.
type InputError struct{ Msg string }

// Error gives one line.
func (e *InputError) Error() string { return e.Msg }

// Verify judges a masked stream. What does not hold is in the result, not in the error. The error is an *OrderError, a
// *decompose.DeckError (deck or anchor file are wrong), an *InputError or an error of package gds (a layout cannot be
// processed), or that of ctx.
func Verify(ctx context.Context, in Input) (*Result, error) {
	v := &verifier{ctx: ctx, in: in, roles: newRoles(in.Deck)}
	if v.roles == nil {
		return nil, &OrderError{Msg: fmt.Sprintf("%s: names more than %d layers; split the deck", in.Deck.File, mostClasses)}
	}
	return v.run()
}

// verifier is the state of one run.
type verifier struct {
	ctx    context.Context
	in     Input
	roles  *roles
	rules  *decompose.Rules
	file   *anchor.File // nil: none
	masked *layout
	drawn  *layout // nil: not at hand
	orders *orderBook
	res    *Result
}

// layout is a stream that was read.
type layout struct {
	name string
	lib  *gds.Library
	data io.ReaderAt
	tree *tree
}

func (v *verifier) run() (*Result, error) {
	var err error
	if v.masked, err = v.read(v.in.Masked); err != nil {
		return nil, err
	}
	if v.in.Drawn != nil {
		if v.drawn, err = v.read(v.in.Drawn); err != nil {
			return nil, err
		}
	}
	if v.rules, err = v.in.Deck.Resolve(v.masked.lib.DBU); err != nil {
		return nil, err
	}
	if v.in.Anchors != nil {
		if v.file, err = anchor.ParseFile(v.in.AnchorsName, v.in.Anchors, v.rules); err != nil {
			return nil, err
		}
	}
	v.res = &Result{Rules: v.rules, Compared: v.drawn != nil}
	for _, t := range v.masked.tree.tops {
		v.res.Tops = append(v.res.Tops, v.masked.lib.Structures[t].Name)
	}
	v.orders = newOrderBook(v.file)
	for i := range v.rules.Layers {
		v.stage("layer " + v.rules.Layers[i].Name)
		if err := v.layer(i); err != nil {
			return nil, err
		}
	}
	if err := v.orders.complete(v); err != nil {
		return nil, err
	}
	if v.drawn != nil {
		v.stage("compare")
		if err := v.compareStreams(); err != nil {
			return nil, err
		}
	}
	return v.res, v.ctx.Err()
}

// read indexes a stream.
func (v *verifier) read(s Stream) (*layout, error) {
	v.stage("read " + s.Name())
	var progress func(int64)
	if v.in.Progress != nil {
		of := int64(-1)
		if sized, ok := s.(interface{ Given() int64 }); ok {
			of = sized.Given()
		}
		progress = func(bytes int64) { v.in.Progress(bytes, of) }
	}
	lib, err := s.Index(v.roles.interest, progress)
	if err != nil {
		return nil, err
	}
	if err := v.ctx.Err(); err != nil {
		return nil, err
	}
	l := &layout{name: s.Name(), lib: lib, data: s.ReaderAt()}
	if l.tree, err = newTree(lib); err != nil {
		return nil, &InputError{Msg: l.name + ": " + err.Error()}
	}
	return l, nil
}

func (v *verifier) stage(name string) {
	if v.in.Stage != nil {
		v.in.Stage(name)
	}
}

// InMemory gives a stream of bytes that do not change.
func InMemory(name string, data []byte) Stream { return &memory{name, data} }

type memory struct {
	name string
	data []byte
}

func (m *memory) Name() string          { return m.name }
func (m *memory) ReaderAt() io.ReaderAt { return bytes.NewReader(m.data) }

func (m *memory) Index(want gds.Interest, progress func(int64)) (*gds.Library, error) {
	lib, err := gds.Index(bytes.NewReader(m.data), int64(len(m.data)), want, progress)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", m.name, err)
	}
	return lib, nil
}
