package main

import (
	"bufio"
	"compress/gzip"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"maskpair/testdata/layouts"
)

// This file goes through the layouts: draw, measure, print, remove.

// subject is a layout in a file.
type subject struct {
	name   string
	in     string // path
	deck   string // path
	counts layouts.Counts
}

// finding is what was measured on a subject.
type finding struct {
	subject
	one, many run // by one worker, by several
	again     run // with a baseline; no time: not run
	sha256sum float64
	copying   float64
	slowpath  float64 // 0: not run
	output    int64   // bytes
}

func measure(o *options) error {
	if len(o.layouts) == 0 && !o.open {
		return nil
	}
	dir, err := os.MkdirTemp(o.dir, "maskpair-bench-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	p, err := build(dir)
	if err != nil {
		return err
	}
	var all []finding
	look := func(s subject) error {
		f, err := p.examine(s, o)
		if err != nil {
			return fmt.Errorf("%s of %d figures: %w", s.name, s.counts.Figures, err)
		}
		printStages(os.Stdout, &f, o.jobs)
		all = append(all, f)
		return nil
	}
	for _, name := range o.layouts {
		for _, n := range o.figures {
			s, err := invented(dir, name, n, o.seed)
			if err != nil {
				return err
			}
			if err := look(s); err != nil {
				return err
			}
			os.Remove(s.in)
		}
	}
	if o.open {
		for _, l := range openLayouts() {
			s, err := l.unpack(dir)
			if err != nil {
				return err
			}
			if err := look(s); err != nil {
				return err
			}
			os.Remove(s.in)
		}
	}
	printOverview(os.Stdout, all, o.jobs)
	printGrowth(os.Stdout, all)
	return nil
}

// invented draws a layout to a file.
func invented(dir, name string, figures int64, seed uint64) (subject, error) {
	l, err := layouts.New(name, figures, seed)
	if err != nil {
		return subject{}, err
	}
	s := subject{name: name, in: filepath.Join(dir, "in.gds"), deck: filepath.Join(dir, "deck.toml")}
	f, err := os.Create(s.in)
	if err != nil {
		return s, err
	}
	defer f.Close()
	w := bufio.NewWriterSize(f, 1<<20)
	if s.counts, err = l.Write(w); err != nil {
		return s, err
	}
	if err := w.Flush(); err != nil {
		return s, err
	}
	if err := f.Sync(); err != nil {
		return s, err
	}
	return s, os.WriteFile(s.deck, []byte(l.Deck()), 0o666)
}

// openLayout is one of the layouts in testdata/open with a layer and a spacing in nm.
type openLayout struct {
	file, layer string
	spacing     int
}

func openLayouts() []openLayout {
	return []openLayout{{"asap7_srambank_128b", "18", 54}, {"asap7_srambank_128b", "19", 36}}
}

// unpack writes the layout and a deck. Nothing was counted: the program's own counts are taken.
func (l openLayout) unpack(dir string) (subject, error) {
	s := subject{name: fmt.Sprintf("%s %s/0", l.file, l.layer), in: filepath.Join(dir, "in.gds"), deck: filepath.Join(dir, "deck.toml")}
	s.counts.Figures, s.counts.Shapes = layouts.Unknown, layouts.Unknown
	packed, err := os.Open(filepath.Join("testdata", "open", l.file+".gds.gz"))
	if err != nil {
		return s, err
	}
	defer packed.Close()
	z, err := gzip.NewReader(packed)
	if err != nil {
		return s, err
	}
	out, err := os.Create(s.in)
	if err != nil {
		return s, err
	}
	defer out.Close()
	if s.counts.Bytes, err = io.Copy(out, z); err != nil {
		return s, err
	}
	if err := out.Sync(); err != nil {
		return s, err
	}
	deck := fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"wire\"\ndrawn = \"%s/0\"\nmask_a = \"%s/1\"\nmask_b = \"%s/2\"\nsame_mask_spacing = %d\n",
		l.layer, l.layer, l.layer, l.spacing)
	return s, os.WriteFile(s.deck, []byte(deck), 0o666)
}
