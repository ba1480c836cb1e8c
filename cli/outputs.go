package cli

import (
	"context"
	"io"
)

// This file settles the outputs of one command together: all are on the disk before the first is put in place, and the
// layout comes last, so that whoever sees it sees the rest.

// outputs are what a command writes.
type outputs struct {
	list []*output // reports first, the layout last
}

// add plans one more output; an empty path is none, and gives nil.
func (s *outputs) add(role, path string, force bool, inputs []named, stdout io.Writer) (*output, error) {
	if path == "" {
		return nil, nil
	}
	o, err := planOutput(role, path, force, inputs, stdout)
	if err != nil {
		return nil, err
	}
	for _, other := range s.list {
		if clash(o, other) {
			return nil, usagef("%s %s: is also %s %s; give each its own file", role, path, other.role, other.name)
		}
	}
	s.list = append(s.list, o)
	return o, nil
}

// begin makes the temporary files.
func (s *outputs) begin(ctx context.Context) error {
	for _, o := range s.list {
		if err := o.begin(ctx); err != nil {
			return err
		}
	}
	return nil
}

// settle puts all in place, or nothing.
func (s *outputs) settle(ctx context.Context) error {
	for _, o := range s.list {
		if err := await(ctx, o.finish); err != nil {
			return err
		}
	}
	for _, o := range s.list { // what can fail or hang, before what hardly can
		if o.place == "" {
			if err := await(ctx, o.settle); err != nil {
				return err
			}
		}
	}
	if ctx.Err() != nil {
		return errInterrupted
	}
	for i, o := range s.list {
		if o.place == "" {
			continue
		}
		if err := o.settle(); err != nil {
			for _, done := range s.list[:i] {
				done.withdraw()
			}
			return err
		}
	}
	return nil
}

// discard removes what is still temporary.
func (s *outputs) discard() {
	for _, o := range s.list {
		if o.temp != nil {
			o.discard()
		}
	}
}

// failure gives the first failure to write, if there was one.
func (s *outputs) failure() error {
	for _, o := range s.list {
		if err := o.failure(); err != nil {
			return err
		}
	}
	return nil
}
