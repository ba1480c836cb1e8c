package cli

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"time"

	"github.com/urfave/cli/v2"

	"maskpair/decompose"
	"maskpair/gds"
)

// This file is the command demo: an invented layout with deck and anchors in a folder, decomposed at once, so that a person
// can look at each file and change it. The layout has what usual ones have: an array that alternates, a cell whose masks are
// anchored, and one place that two masks cannot do.

const demoFolder = "maskpair-demo"

const demoDeck = `# Two masks for the wires of the demo layout.
unit = "nm"

[[layer]]
name = "wire"
drawn = "10/0"
mask_a = "10/1"
mask_b = "10/2"
same_mask_spacing = 40     # the wires are drawn 20 nm apart

[layer.stitch]
min_overlap = 20
min_piece = 40
apply = false              # true: the knot is cut where that resolves it

[marks]
unresolved = "90/0"        # what stays unresolved is marked on these layers
cycle = "90/1"
`

const demoAnchors = `# The outer wires of the amplifier carry a matched pair: both must be printed by mask A.
[[anchor]]
layer = "wire"
mask = "A"
at = [10, 100]
cell = "amplifier"
name = "left of the pair"

[[anchor]]
layer = "wire"
mask = "A"
at = [90, 100]
cell = "amplifier"
name = "right of the pair"
`

func demoCommand(con *console, s steps) *cli.Command {
	return &cli.Command{
		Name:      "demo",
		Usage:     "write a small layout with deck and anchors to a folder, and decompose it",
		UsageText: "maskpair demo [DIR]",
		Description: "Makes the folder DIR (default " + demoFolder + ") with an invented layout, its rule deck and anchor file, and runs\n" +
			"decompose on them. One place of the layout cannot be done on two masks: the summary names it, and the way out.\n" +
			"Exit status: 0 done; 2 the folder holds something already; 4 it could not be written.",
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Action: func(c *cli.Context) error {
			if c.Args().Len() > 1 {
				return usagef("%q is one folder too many; give one", c.Args().Get(1))
			}
			dir := demoFolder
			if c.Args().Present() {
				dir = c.Args().First()
			}
			return demo(c.Context, dir, con, s)
		},
	}
}

// demo writes the input files and decomposes them.
func demo(ctx context.Context, dir string, con *console, s steps) error {
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if err := os.Mkdir(dir, 0o777); err != nil {
			return &writeError{dir, reason(err)}
		}
	case err != nil:
		return usagef("%s: %v; give a folder that is new or empty", dir, reason(err))
	case len(entries) > 0:
		return usagef("%s: holds something already; give a folder that is new or empty", dir)
	}
	path := func(name string) string { return filepath.Join(dir, name) }
	o := &Options{
		Input:    path("layout.gds"),
		DeckPath: path("deck.toml"),
		Anchors:  path("anchors.toml"),
		Output:   path("masks.gds"),
		Report:   path("report.json"),
		Jobs:     runtime.GOMAXPROCS(0),
		anchors:  []byte(demoAnchors),
	}
	if o.Deck, err = decompose.ParseDeck(o.DeckPath, []byte(demoDeck)); err != nil {
		return err
	}
	if err := writeDemo(ctx, o); err != nil {
		return err
	}
	r, err := decomposeTo(ctx, o, con, s)
	if err != nil {
		return err
	}
	command := fmt.Sprintf("%s decompose %s --deck %s --anchors %s --output %s --report %s --force", program, o.Input, o.DeckPath, o.Anchors, o.Output, o.Report)
	lines := []string{"The files are in " + dir + ". This was", "   " + command}
	if r.UnresolvedPairs() > 0 {
		lines = append(lines, "and its exit status is 1, since something is unresolved. Set apply = true in "+o.DeckPath+" and run it again.")
	}
	if _, err := fmt.Fprintln(con.out, strings.Join(append(lines, caution), "\n")); err != nil {
		return &writeError{"standard output", err}
	}
	return nil
}

// writeDemo writes layout, deck and anchor file.
func writeDemo(ctx context.Context, o *Options) error {
	var files outputs
	defer files.discard()
	for _, f := range []struct {
		path  string
		write func(io.Writer) error
	}{
		{o.DeckPath, text(demoDeck)},
		{o.Anchors, text(demoAnchors)},
		{o.Input, writeDemoLayout},
	} {
		out, err := files.add("demo", f.path, false, nil, nil)
		if err != nil {
			return err
		}
		if err := out.begin(ctx); err != nil {
			return err
		}
		if err := f.write(out); err != nil {
			return err
		}
	}
	return files.settle(ctx)
}

// text gives a function that writes s.
func text(s string) func(io.Writer) error {
	return func(w io.Writer) error {
		_, err := io.WriteString(w, s)
		return err
	}
}

// writeDemoLayout writes the demo layout; one database unit is a nanometre.
func writeDemoLayout(dst io.Writer) error {
	wire := gds.LayerType{Layer: 10, Type: 0}
	buffered := bufio.NewWriter(dst)
	w := gds.NewWriter(buffered, gds.WriterOptions{
		LibName: "DEMO", UserUnit: 1e-3, DBU: 1e-9,
		Time: time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC),
	})
	cell := func(name string, wires ...gds.Rect) {
		w.BeginStructure(name)
		for _, r := range wires {
			w.Rectangle(wire, r)
		}
		w.EndStructure()
	}
	cell("line", gds.Rect{X1: 0, Y1: 0, X2: 20, Y2: 400})
	cell("amplifier",
		gds.Rect{X1: 0, Y1: 0, X2: 20, Y2: 200},
		gds.Rect{X1: 40, Y1: 0, X2: 60, Y2: 200},
		gds.Rect{X1: 80, Y1: 0, X2: 100, Y2: 200})
	cell("knot", // five wires in a ring, each 20 nm from the next: an odd cycle, which a cut of the long one opens
		gds.Rect{X1: 0, Y1: 0, X2: 600, Y2: 20},
		gds.Rect{X1: 0, Y1: 40, X2: 100, Y2: 60},
		gds.Rect{X1: 60, Y1: 80, X2: 290, Y2: 100},
		gds.Rect{X1: 310, Y1: 80, X2: 540, Y2: 100},
		gds.Rect{X1: 500, Y1: 40, X2: 600, Y2: 60})
	w.BeginStructure("demo")
	none := gds.Strans{}
	w.ARef("line", none, 16, 2, gds.Point{}, gds.Point{X: 16 * 40}, gds.Point{Y: 2 * 500})
	w.SRef("amplifier", none, gds.Point{X: 900})
	w.SRef("amplifier", gds.Strans{Angle: 90}, gds.Point{X: 1400})
	w.SRef("amplifier", gds.Strans{Mirror: true}, gds.Point{X: 900, Y: 800})
	w.SRef("knot", none, gds.Point{Y: 1200})
	w.EndStructure()
	if err := w.Close(); err != nil {
		return err
	}
	return buffered.Flush()
}
