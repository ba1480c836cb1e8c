package cli

import (
	"bufio"
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"

	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/gds"
)

// This file checks a deck by itself: decompose with --deck and no layout says in words what each rule means, and what in the deck
// contradicts itself or changes nothing.

// onlyDeck tells whether a command line asks for the deck alone.
func onlyDeck(c *cli.Context) bool {
	return c.Args().Len() == 0 && c.String("deck") != "" && !slices.ContainsFunc(c.LocalFlagNames(), func(n string) bool { return n != "deck" })
}

// runDeckCheck reads a deck and prints what it means.
func runDeckCheck(path string, con *console) error {
	text, err := readText("deck", path)
	if err != nil {
		return err
	}
	d, err := decompose.ParseDeck(path, text)
	if err != nil {
		return err
	}
	return checkDeck(con.out, d)
}

// checkDeck prints what a deck means.
func checkDeck(out io.Writer, d *decompose.Deck) error {
	w := &deckWords{w: bufio.NewWriter(out), deck: d}
	layers := "1 layer"
	if n := len(d.Layers); n != 1 {
		layers = fmt.Sprintf("%d layers", n)
	}
	w.line("%s: %s, lengths in %s", d.File, layers, d.Unit)
	for i := range d.Layers {
		w.line("")
		w.layer(&d.Layers[i])
	}
	w.marks()
	w.line("")
	remarks := d.Remarks()
	for _, r := range remarks {
		where := d.File
		if r.Line > 0 {
			where = fmt.Sprintf("%s:%d", d.File, r.Line)
		}
		w.line("%s: warning: %s: %s", where, r.Key, r.Text)
	}
	if len(remarks) == 0 {
		w.line("No rules contradict each other.")
	}
	if err := w.w.Flush(); err != nil {
		return &writeError{"standard output", err}
	}
	return nil
}

type deckWords struct {
	w    *bufio.Writer
	deck *decompose.Deck
}

func (w *deckWords) line(format string, args ...any) {
	w.w.WriteString(strings.TrimRight(fmt.Sprintf(format, args...), " "))
	w.w.WriteByte('\n')
}

func (w *deckWords) length(l decompose.Length) string { return l.Text() + " " + w.deck.Unit }

func layerNames(layers ...gds.LayerType) string {
	var out []string
	for _, l := range layers {
		out = append(out, fmt.Sprintf("%d/%d", l.Layer, l.Type))
	}
	return strings.Join(out, ", ")
}

func (w *deckWords) layer(d *decompose.DeckLayer) {
	w.line("%s: what is drawn on %s goes on mask A (%s) or mask B (%s)", report.Text(d.Name), layerNames(d.Drawn...), layerNames(d.MaskA), layerNames(d.MaskB))
	w.line("  Two shapes that are nearer than this must be on opposite masks; exactly this is far enough:")
	w.spacings(d)
	if d.AnyMask.Given {
		w.line("  Two shapes nearer than %s are wrong whatever the masks: decompose warns and lists them, verify finds a fault.", w.length(d.AnyMask))
	}
	if d.SameShapeReport {
		w.line("  Notches and gaps inside one shape below %s are listed: no mask can help there.", w.length(d.SameMask))
	}
	w.orders(d)
	w.stitches(d)
	if d.KeepDrawn {
		w.line("  Each drawn figure stays, followed by its copy on the mask.")
	}
}

// spacings lists the rules by what faces what, with where each number comes from.
func (w *deckWords) spacings(d *decompose.DeckLayer) {
	f := d.Spacing
	if f == nil {
		report.WriteTable(w.w, [][]string{{"  any two", w.length(d.SameMask), "same_mask_spacing"}}, "lrl")
		return
	}
	var table [][]string
	add := func(what, key string, l decompose.Length, means string) {
		if !l.Given {
			l, key = d.SameMask, "same_mask_spacing"
		}
		table = append(table, []string{"  " + what, w.length(l), key, means})
	}
	if f.TipWidth.Given {
		add("side to side", "side_to_side", f.SideToSide, "edges that face each other, along more than 0")
		add("tip to side", "tip_to_side", f.TipToSide, fmt.Sprintf("a tip is an edge of at most %s between two convex corners", w.length(f.TipWidth)))
		add("tip to tip", "tip_to_tip", f.TipToTip, "")
	} else {
		add("side to side", "side_to_side", f.SideToSide, "edges that face each other, along more than 0; without tip_width nothing is a tip")
	}
	add("corner to corner", "corner_to_corner", f.CornerToCorner, "convex corners diagonal to each other, or in line")
	add("slanted", "same_mask_spacing", d.SameMask, "where a slanted edge is nearest")
	for _, wide := range f.Wide {
		add("wide", "wide", wide.Spacing, fmt.Sprintf("beside a part where a square of %s fits, if that is more", w.length(wide.Width)))
	}
	report.WriteTable(w.w, table, "lrll")
}

// orders says what is held on its mask.
func (w *deckWords) orders(d *decompose.DeckLayer) {
	if d.Redo {
		w.line("  Figures already on mask A or B count as drawn.")
	} else {
		w.line("  Figures already on mask A or B stay there.")
	}
	for _, m := range []struct {
		layer *gds.LayerType
		mask  string
	}{{d.AnchorA, "A"}, {d.AnchorB, "B"}} {
		if m.layer != nil {
			w.line("  What a figure on %s touches goes on mask %s.", layerNames(*m.layer), m.mask)
		}
	}
	if d.AnchorLabel != nil {
		w.line("  A text A or B on %s puts the shape under it on that mask.", layerNames(*d.AnchorLabel))
	}
}

func (w *deckWords) stitches(d *decompose.DeckLayer) {
	t := d.Stitch
	if t == nil {
		w.line("  Shapes are not cut.")
		return
	}
	what := "Where shapes could be cut is reported; nothing is cut"
	if t.Apply {
		what = "The least set of cuts is made where that leaves fewer pairs"
	}
	pieces := ""
	if t.MinPiece.Given {
		pieces = fmt.Sprintf(", no piece is shorter than %s", w.length(t.MinPiece))
	}
	w.line("  %s: pieces overlap by %s%s.", what, w.length(t.MinOverlap), pieces)
	if len(t.KeepOut) > 0 {
		w.line("  No overlap touches a figure on %s.", layerNames(t.KeepOut...))
	}
}

func (w *deckWords) marks() {
	m := &w.deck.Marks
	var table [][]string
	for _, k := range []struct {
		layer *gds.LayerType
		what  string
	}{
		{m.Unresolved, "the gap of each pair that stays on one mask"}, {m.Cycle, "the shapes of the smallest odd cycle"}, {m.Stitch, "overlaps of cuts"},
		{m.Moved, "shapes that left their mask of the baseline"}, {m.AnyMask, "gaps below any_mask_spacing"},
	} {
		if k.layer != nil {
			table = append(table, []string{"  " + layerNames(*k.layer), k.what})
		}
	}
	if len(table) == 0 {
		return
	}
	w.line("")
	w.line("Marks in the top structures of the output; what is on these layers in the input is %s:", map[bool]string{true: "dropped", false: "an error"}[m.Replace])
	report.WriteTable(w.w, table, "ll")
}
