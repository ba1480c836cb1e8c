package cli

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strings"

	"github.com/urfave/cli/v2"

	"maskpair/cli/picture"
	"maskpair/cli/report"
	"maskpair/decompose"
)

// This file is the command demo: an invented layout with its deck in a folder, decomposed at once by the way that every layout
// goes, and shown in letters and pictures, so that a person can look at each file and change it.

const demoFolder = "maskpair-demo"

const demoDeck = `# Two masks for the wires of the demo layout.
unit = "nm"                    # of every length below

[[layer]]
name = "wire"
drawn = "10/0"                 # layer/datatype of what is drawn
mask_a = "10/1"                # where it goes
mask_b = "10/2"
same_mask_spacing = 40         # two shapes nearer than this must be on opposite masks; wires are drawn 20 apart

[layer.stitch]                 # a wire may be cut in two pieces that overlap, one on each mask
min_overlap = 20
min_piece = 40
apply = false                  # true: the fewest cuts that help are made

[marks]
unresolved = "90/0"            # a box in each gap that two masks cannot do
stitch = "90/1"                # a box at each place where a cut might help
`

const demoAnchors = `# The outer wires of the amplifier are a matched pair: one mask must print both, in each placement of the cell.
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

const demoHelp = `Makes the folder DIR (default ` + demoFolder + `) with an invented layout and its rule deck, runs decompose on them, and shows
what came out. One kind of place in the layout cannot be done on two masks: the summary names it.

Example:
   maskpair demo

Exit status:
   0  done
   2  the folder holds something already and --force is not given
   4  it could not be written, or was interrupted
`

func demoCommand(con *console, s steps) *cli.Command {
	return &cli.Command{
		Name:            "demo",
		Usage:           "write a small layout and its deck to a folder, decompose it, and show what came out",
		UsageText:       "maskpair demo [DIR]",
		Description:     demoHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Flags: []cli.Flag{
			&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace the files of an earlier demo"},
		},
		Action: func(c *cli.Context) error {
			if c.Args().Len() > 1 {
				return usagef("%q is one folder too many; give one", c.Args().Get(1))
			}
			dir := demoFolder
			if c.Args().Present() {
				dir = c.Args().First()
			}
			return demo(c.Context, dir, c.Bool("force"), con, s)
		},
	}
}

// demoPaths are the places of the files.
type demoPaths struct{ dir, layout, deck, anchors, masks, report, page, drawnPicture, masksPicture string }

func newDemoPaths(dir string) *demoPaths {
	path := func(name string) string { return filepath.Join(dir, name) }
	return &demoPaths{dir, path("layout.gds"), path("deck.toml"), path("anchors.toml"), path("masks.gds"), path("report.json"), path("report.html"),
		path("layout.svg"), path("masks.svg")}
}

// demo writes the input files, decomposes them and shows the result.
func demo(ctx context.Context, dir string, force bool, con *console, s steps) error {
	if err := demoFolderFor(dir, force); err != nil {
		return err
	}
	f := newDemoPaths(dir)
	deck, err := decompose.ParseDeck(f.deck, []byte(demoDeck))
	if err != nil {
		return err
	}
	var layout bytes.Buffer
	if err := writeDemoLayout(&layout); err != nil {
		return err
	}
	scene, err := demoPicture(bytes.NewReader(layout.Bytes()))
	if err != nil {
		return err
	}
	err = writeDemo(ctx, force, []demoFile{
		{f.layout, func(w io.Writer) error { _, err := w.Write(layout.Bytes()); return err }},
		{f.deck, func(w io.Writer) error { _, err := io.WriteString(w, demoDeck); return err }},
		{f.anchors, func(w io.Writer) error { _, err := io.WriteString(w, demoAnchors); return err }},
		{f.drawnPicture, demoSVG(scene, "the demo layout as drawn")},
	})
	if err != nil {
		return err
	}
	o := &Options{Input: f.layout, DeckPath: f.deck, Deck: deck, Anchors: f.anchors, anchors: []byte(demoAnchors), Output: f.masks,
		Report: f.report, Page: f.page, limits: limits{Jobs: runtime.GOMAXPROCS(0)}, Force: force}
	r, err := decomposeTo(ctx, o, con, s)
	if err != nil {
		return err
	}
	masks, err := os.ReadFile(f.masks)
	if err != nil {
		return err
	}
	if scene, err = demoPicture(bytes.NewReader(masks)); err != nil {
		return err
	}
	title := "the demo layout on two masks: A with slanted lines, B with level ones, gaps that stay unresolved in a ring"
	err = writeDemo(ctx, force, []demoFile{{f.masksPicture, demoSVG(scene, title)}})
	if err != nil {
		return err
	}
	if err := demoTell(con.out, f, scene, r); err != nil {
		return &writeError{"standard output", err}
	}
	return nil
}

// demoFolderFor makes the folder, or sees to it that nothing in it is lost.
func demoFolderFor(dir string, force bool) error {
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		if err := os.Mkdir(dir, 0o777); err != nil {
			return &writeError{dir, reason(err)}
		}
	case err != nil:
		return usagef("%s: %v; give a folder that is new or empty", dir, reason(err))
	case len(entries) > 0 && !force:
		return usagef("%s: holds something already; give a folder that is new or empty, or --force to replace the files of an earlier demo", dir)
	}
	return nil
}

// demoSVG draws a picture.
func demoSVG(scene *picture.Scene, title string) func(io.Writer) error {
	return func(w io.Writer) error { return scene.WriteSVG(w, picture.SVG{Title: title, Unit: 20, Scale: 0.7}) }
}

// demoFile is a file to be written.
type demoFile struct {
	path  string
	write func(io.Writer) error
}

// writeDemo writes files, all or none.
func writeDemo(ctx context.Context, force bool, list []demoFile) error {
	var files outputs
	defer files.discard()
	for _, f := range list {
		out, err := files.add("demo", f.path, force, nil, nil)
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

// demoTell shows the masks in letters and says what to look at and what to do next.
func demoTell(w io.Writer, f *demoPaths, scene *picture.Scene, r *report.Report) error {
	var b bytes.Buffer
	fmt.Fprintf(&b, "\nThe layout on its two masks; a character is %d by %d nm:\n\n", demoStepX, demoStepY)
	if err := scene.WriteLetters(&b, demoStepX, demoStepY); err != nil {
		return err
	}
	b.WriteString(`
   lines       alternate; the array of the layout became arrays of double pitch
   pads        have nothing near; they even out the areas of the masks
   amplifiers  have their outer wires on A, as the anchor file orders for every placement of the cell
   gates       come out right in all orientations, rails shared by two rows included
   knots       are rings of five wires, each near the next. Going round, the masks would have to alternate, and five is odd:
               no choice can do it. One gap of each stays, and is marked on layer 90/0. The summary says what would mend it:
               a wider gap, or a stitch, which cuts one wire in two pieces that overlap
`)
	fmt.Fprintf(&b, "\nFiles in %s:\n", f.dir)
	for _, l := range [][2]string{
		{f.layout, "the layout as drawn, on layer 10/0"},
		{f.deck, "its rule deck, with comments"},
		{f.anchors, "the orders: which wires must be on which mask"},
		{f.masks, "the layout with each figure on mask A (10/1) or B (10/2)"},
		{f.report, "all numbers, and each place that is unresolved"},
		{f.page, "the same as a page for a browser"},
		{f.drawnPicture, "pictures of the layout, as drawn"},
		{f.masksPicture, "and on the masks"},
	} {
		fmt.Fprintf(&b, "   %-12s %s\n", filepath.Base(l[0]), l[1])
	}
	fmt.Fprintf(&b, "\nMend the knots: say apply = true in %s, and run\n   %s decompose %s --deck %s --anchors %s --output mended.gds\n", f.deck, program, f.layout, f.deck, f.anchors)
	if n := r.UnresolvedPairs(); n > 0 {
		fmt.Fprintf(&b, "As it is, this ends with status 1, since %d pairs are unresolved. Then with 0.\n", n)
	}
	b.WriteString("\nNext, a layout of your own:\n")
	for _, l := range [][2]string{
		{"survey YOURS.gds", "which layers it has"},
		{"survey YOURS.gds --layer L/D --deck-starter > deck.toml", "a deck to start from: look at its spacing"},
		{"decompose YOURS.gds --deck deck.toml", "can two masks do it? Nothing is written"},
		{"decompose YOURS.gds --deck deck.toml --output masks.gds --report report.json", ""},
		{"verify masks.gds --deck deck.toml --drawn YOURS.gds", "a second opinion, from code of its own"},
	} {
		if l[1] != "" {
			l[1] = "# " + l[1]
		}
		b.WriteString(strings.TrimRight(fmt.Sprintf("   %s %-56s %s", program, l[0], l[1]), " ") + "\n")
	}
	fmt.Fprintf(&b, "\n%s\n", report.Caution)
	_, err := w.Write(b.Bytes())
	return err
}
