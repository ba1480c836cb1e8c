package main

import (
	"bytes"
	"context"
	"io"
	"testing"

	"maskpair/anchor"
	"maskpair/decompose"
	"maskpair/gds"
	"maskpair/testdata/layouts"
)

// This file holds the growth of the work against that of the layouts, by what the program counts and not by the clock.

// worked runs all stages on a layout and gives what they counted, by stage, and the flat figures.
func worked(t *testing.T, name string, figures int64) (work map[string]int64, flat int64) {
	t.Helper()
	l, err := layouts.New(name, figures, 1)
	if err != nil {
		t.Fatal(err)
	}
	var stream bytes.Buffer
	counts, err := l.Write(&stream)
	if err != nil {
		t.Fatal(err)
	}
	deck, err := decompose.ParseDeck("deck", []byte(l.Deck()))
	if err != nil {
		t.Fatal(err)
	}
	want, err := deck.Interest()
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(stream.Bytes()), int64(stream.Len()), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	rules, err := deck.Resolve(lib.DBU)
	if err != nil {
		t.Fatal(err)
	}
	work = map[string]int64{}
	// One worker: others lose races now and then, and do a few things twice.
	run, err := decompose.New(lib, rules, decompose.Options{Jobs: 1, Work: func(stage, _ string, n int64) { work[stage] += n }})
	if err != nil {
		t.Fatal(err)
	}
	defer run.Close()
	result, err := run.Decompose(context.Background(), &anchor.Sources{})
	if err != nil {
		t.Fatal(err)
	}
	if got := result.Layers[0].Figures; got != counts.Figures {
		t.Fatalf("%s: %d figures, drawn were %d", name, got, counts.Figures)
	}
	if err := run.Write(context.Background(), io.Discard, bytes.NewReader(stream.Bytes()), nil); err != nil {
		t.Fatal(err)
	}
	return work, counts.Figures
}

// The exponent by which work may grow with the figures: nearly in proportion, with room for sorting and for what layouts of two sizes
// differ in by chance.
const mostGrowth = 1.15

func TestWorkGrowsWithTheLayout(t *testing.T) {
	for _, c := range []struct {
		name         string
		small, large int64
	}{
		{"flat", 3e4, 3e5}, {"cells", 6e4, 6e5}, {"strips", 6e3, 6e4}, {"rail", 1e5, 1e6}, {"nested", 1e5, 1e6}, {"snake", 3e4, 3e5}, {"grid", 3e4, 3e5},
		{"combs", 5e4, 5e5}, {"ring", 3e4, 3e5}, {"tops", 1e4, 1e5}, {"deep", 3e4, 3e5}, {"wide", 3e4, 3e5}, {"marked", 3e4, 3e5},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			before, from := worked(t, c.name, c.small)
			after, to := worked(t, c.name, c.large)
			if after["pairs"] == 0 || after["flatten"] == 0 {
				t.Fatalf("nothing was counted: %v", after)
			}
			for stage, n := range after {
				if n < to/4 { // what is that small begins with chance
					continue
				}
				e, ok := exponent([]float64{float64(from), float64(to)}, []float64{float64(before[stage]), float64(n)})
				if !ok || e > mostGrowth {
					t.Errorf("%s: %d for %d figures, %d for %d: as the figures to the power of %.2f", stage, before[stage], from, n, to, e)
				}
			}
		})
	}
}
