package verify_test

import (
	"bytes"
	"compress/gzip"
	"context"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"maskpair/cli"
	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
)

// This file makes right outputs to be broken: one written by hand, with all that a stream and an output may hold, and those
// that the program makes of random layouts and of an open one.

var (
	drawn19 = gds.LayerType{Layer: 19}
	maskA19 = gds.LayerType{Layer: 19, Type: 1}
	maskB19 = gds.LayerType{Layer: 19, Type: 2}
)

const deckHead = `unit = "nm"
[[layer]]
name = "metal1"
drawn = "19/0"
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
`

// judge verifies an output of m, with or without the drawn layout.
func judge(m *masked, out []byte, drawn bool) (*verify.Result, error) {
	deck, err := decompose.ParseDeck("deck.toml", []byte(m.deck))
	if err != nil {
		return nil, err
	}
	in := verify.Input{Masked: verify.InMemory("out.gds", out), Deck: deck}
	if m.anchors != "" {
		in.AnchorsName, in.Anchors = "anchors.toml", []byte(m.anchors)
	}
	if drawn {
		in.Drawn = verify.InMemory("in.gds", m.drawn)
	}
	return verify.Verify(context.Background(), in)
}

// tell words what does not hold.
func tell(res *verify.Result, err error) string {
	if err != nil {
		return err.Error()
	}
	var out []string
	for _, c := range res.Checks {
		for _, p := range c.Places {
			out = append(out, fmt.Sprintf("%s %s %s: %s", c.Kind, p.Top, p.Structure, p.Text))
		}
	}
	return strings.Join(out, "; ")
}

func rect(x1, y1, x2, y2 int32) gds.Rect { return gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2} }

// rightOutputs gives the outputs.
func rightOutputs(t *testing.T) []masked {
	out := []masked{byHand(t, false), byHand(t, true)}
	out = append(out, random(t, 6)...)
	return append(out, open(t))
}

// byHand writes a layout as drawn and as it comes out: units of two shapes that alternate along rows, so that there is a
// variant and an array is split; paths of odd width, a slanted figure, figures under orders of every form, one that arrived on
// its mask, a wire that is cut, marks, and all kinds of records that pass through.
func byHand(t *testing.T, keepDrawn bool) masked {
	m := masked{name: "by hand", spacing: 36, drawnOn: drawn19, a: maskA19, b: maskB19, cuts: true, keep: keepDrawn}
	m.deck = deckHead + `anchor_a = "19/11"
anchor_label = "19/10"
[layer.stitch]
min_overlap = 10
min_piece = 30
keep_out = ["15/0"]
apply = true
[marks]
unresolved = "230/0"
stitch = "230/2"
`
	if keepDrawn {
		m.name = "by hand, drawn figures kept"
		m.deck = strings.Replace(m.deck, "anchor_a", "keep_drawn = true\nanchor_a", 1)
	}
	m.anchors = `[[anchor]]
layer = "metal1"
mask = "B"
at = [5, 5]
cell = "pin"
[[anchor]]
layer = "metal1"
mask = "B"
box = [-1020, -20, -900, 40]
name = "bias"
[[tie]]
layer = "metal1"
masks = "same"
at = [[2000, 0], [2100, 0]]
[[anchor]]
cell = "pin"
alike = true
[[anchor]]
layer = "metal1"
mask = "A"
box = [2200, 0, 2260, 20]
[[waiver]]
layer = "metal1"
at = [[2200, 0], [2240, 0]]
reason = "measured"
[[anchor]]
layer = "metal1"
mask = "B"
at = [4010, 50]
[[anchor]]
layer = "metal1"
mask = "A"
at = [4190, 50]
`
	write := func(masked bool) []byte {
		var b bytes.Buffer
		w := gds.NewWriter(&b, gds.WriterOptions{})
		// figure writes one figure: as drawn, on its mask, or both.
		figure := func(mask gds.LayerType, write func(layer gds.LayerType)) {
			if !masked || keepDrawn {
				write(drawn19)
			}
			if masked {
				write(mask)
			}
		}
		box := func(mask gds.LayerType, property string, r gds.Rect) {
			figure(mask, func(layer gds.LayerType) {
				if property != "" {
					w.Property(1, property)
				}
				w.Rectangle(layer, r)
			})
		}
		unit := func(name string, first, second gds.LayerType) {
			w.BeginStructure(name)
			box(first, "net", rect(0, 0, 20, 20))
			w.Text(gds.LayerType{Layer: 63}, gds.Point{X: 3, Y: 4}, "unit")
			figure(second, func(layer gds.LayerType) {
				w.Plex(9)
				w.Path(layer, gds.PathStyle{Width: 21}, []gds.Point{{X: 0, Y: 70}, {X: 20, Y: 70}})
			})
			w.Box(gds.LayerType{Layer: 19}, rect(0, 0, 20, 20))
			w.Node(gds.LayerType{Layer: 64}, []gds.Point{{X: 1, Y: 1}, {X: 2, Y: 2}})
			w.EndStructure()
		}
		unit("unit", maskA19, maskB19)
		if masked {
			unit("unit$2", maskB19, maskA19)
		}
		w.BeginStructure("pin")
		box(maskB19, "pinned by a cell", rect(0, 0, 20, 20))
		w.EndStructure()
		w.BeginStructure("via")
		w.Rectangle(gds.LayerType{Layer: 21}, rect(0, 0, 6, 6))
		w.Flags(1)
		w.Path(gds.LayerType{Layer: 22}, gds.PathStyle{Width: 6}, []gds.Point{{X: 0, Y: 3}, {X: 6, Y: 3}})
		w.EndStructure()

		w.BeginStructure("chip")
		second := func(name string) string {
			if masked {
				return name + "$2"
			}
			return name
		}
		w.SRef("unit", gds.Strans{}, gds.Point{X: 0, Y: 0})
		w.Property(4, "instance")
		w.SRef(second("unit"), gds.Strans{}, gds.Point{X: 50, Y: 0})
		w.SRef("unit", gds.Strans{Mirror: true}, gds.Point{X: 100, Y: 20})
		// 40 apart along x, 20 between units: they alternate.
		if masked {
			w.Property(5, "row")
			w.ARef("unit", gds.Strans{}, 3, 2, gds.Point{Y: 300}, gds.Point{X: 240, Y: 300}, gds.Point{Y: 700})
			w.Property(5, "row")
			w.ARef("unit$2", gds.Strans{}, 3, 2, gds.Point{X: 40, Y: 300}, gds.Point{X: 280, Y: 300}, gds.Point{X: 40, Y: 700})
		} else {
			w.Property(5, "row")
			w.ARef("unit", gds.Strans{}, 6, 2, gds.Point{Y: 300}, gds.Point{X: 240, Y: 300}, gds.Point{Y: 700})
		}
		w.ARef("via", gds.Strans{Angle: 90}, 3, 3, gds.Point{X: 500, Y: 500}, gds.Point{X: 530, Y: 500}, gds.Point{X: 500, Y: 530})
		w.SRef("pin", gds.Strans{Angle: 270}, gds.Point{X: 600, Y: 600})
		w.SRef("pin", gds.Strans{Mirror: true, Angle: 90}, gds.Point{X: 700, Y: 600})
		w.SRef("outside", gds.Strans{}, gds.Point{X: 7, Y: 7})
		figure(maskA19, func(layer gds.LayerType) {
			w.Path(layer, gds.PathStyle{Type: 4, Width: 20, Begin: 5, Finish: 3}, []gds.Point{{X: 0, Y: 1000}, {X: 300, Y: 1000}, {X: 400, Y: 1080}})
		})
		figure(maskB19, func(layer gds.LayerType) {
			w.Boundary(layer, []gds.Point{{X: 0, Y: 950}, {X: 300, Y: 950}, {X: 280, Y: 970}, {X: 0, Y: 970}})
		})
		figure(maskA19, func(layer gds.LayerType) {
			w.Path(layer, gds.PathStyle{Width: 20}, []gds.Point{{X: 0, Y: 915}, {X: 200, Y: 915}})
		})
		// Under orders, alone: a marker, a label, a box of the anchor file, a tie.
		box(maskA19, "pinned by a marker", rect(-500, 0, -480, 20))
		w.Rectangle(gds.LayerType{Layer: 19, Type: 11}, rect(-495, 5, -490, 10))
		box(maskB19, "pinned by a label", rect(-600, 0, -580, 20))
		w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: -600, Y: 0}, "B")
		box(maskB19, "pinned by the anchor file", rect(-1000, 0, -980, 20))
		box(maskA19, "pinned by a tie", rect(2000, 0, 2020, 20))
		box(maskA19, "pinned by a tie", rect(2100, 0, 2120, 20))
		// A pair that is pinned to one mask and waived, and a figure that arrived on its mask with one beside it.
		box(maskA19, "", rect(2200, 0, 2220, 20))
		box(maskA19, "", rect(2240, 0, 2260, 20))
		w.Property(1, "arrived on B")
		w.Rectangle(maskB19, rect(3000, 0, 3020, 20))
		box(maskA19, "", rect(3040, 0, 3060, 20))
		// A wire that must be cut: its ends face shapes that are pinned to different masks.
		if !masked || keepDrawn {
			w.Property(6, "cut")
			w.Rectangle(drawn19, rect(4000, 0, 4200, 20))
		}
		if masked {
			w.Property(6, "cut")
			w.Rectangle(maskA19, rect(4000, 0, 4105, 20))
			w.Property(6, "cut")
			w.Rectangle(maskB19, rect(4095, 0, 4200, 20))
		}
		box(maskB19, "", rect(4000, 40, 4020, 60))
		box(maskA19, "", rect(4180, 40, 4200, 60))
		w.Rectangle(gds.LayerType{Layer: 15}, rect(4000, 0, 4010, 10))
		w.Boundary(gds.LayerType{Layer: 31, Type: 4}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}, {X: 50, Y: 90}})
		w.Boundary(drawn19, []gds.Point{{X: 0, Y: 0}, {X: 20, Y: 0}, {X: 0, Y: 0}})
		if masked {
			w.Rectangle(gds.LayerType{Layer: 230, Type: 2}, rect(4095, 0, 4105, 20))
		}
		w.EndStructure()
		w.BeginStructure("second")
		w.SRef("unit", gds.Strans{Magnification: 2}, gds.Point{})
		w.EndStructure()
		if err := w.Close(); err != nil {
			t.Fatal(err)
		}
		return append(b.Bytes(), 0, 0, 0, 0)
	}
	m.drawn, m.out = write(false), write(true)
	return m
}

// decomposed runs the program on a layout. ok is false where it leaves something unresolved.
func decomposed(t *testing.T, deck string, drawn []byte) (out []byte, ok bool) {
	dir := t.TempDir()
	path := func(name string) string { return filepath.Join(dir, name) }
	for name, data := range map[string][]byte{"in.gds": drawn, "deck.toml": []byte(deck)} {
		if err := os.WriteFile(path(name), data, 0o666); err != nil {
			t.Fatal(err)
		}
	}
	var said bytes.Buffer
	status := cli.Run(context.Background(), []string{"decompose", path("in.gds"), "--deck", path("deck.toml"), "--output", path("out.gds"), "--quiet"},
		strings.NewReader(""), io.Discard, &said)
	if status > 1 {
		t.Fatalf("decompose: status %d: %s", status, said.String())
	}
	out, err := os.ReadFile(path("out.gds"))
	if err != nil {
		t.Fatal(err)
	}
	return out, status == 0
}

// random gives outputs of random layouts that two masks can do: cells of rectangles with properties and labels, placed at every
// orientation, and in arrays.
func random(t *testing.T, count int) []masked {
	var out []masked
	for seed := uint64(1); len(out) < count && seed < 200; seed++ {
		rng := rand.New(rand.NewPCG(31, seed))
		drawn := randomLayout(t, rng)
		if masks, ok := decomposed(t, deckHead, drawn); ok {
			out = append(out, masked{name: fmt.Sprintf("random %d", seed), deck: deckHead, drawn: drawn, out: masks, spacing: 36,
				drawnOn: drawn19, a: maskA19, b: maskB19})
		}
	}
	if len(out) < count {
		t.Fatalf("only %d random layouts can be done", len(out))
	}
	return out
}

func randomLayout(t *testing.T, rng *rand.Rand) []byte {
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	cells := 2 + rng.IntN(3)
	for i := range cells {
		w.BeginStructure(fmt.Sprintf("cell%d", i))
		for range 2 + rng.IntN(4) {
			x, y := 30*rng.Int32N(8), 30*rng.Int32N(8)
			if rng.IntN(3) == 0 {
				w.Property(1, fmt.Sprint(rng.IntN(9)))
			}
			switch rng.IntN(5) {
			case 0:
				w.Path(drawn19, gds.PathStyle{Width: 20 + rng.Int32N(2)}, []gds.Point{{X: x, Y: y}, {X: x + 60, Y: y}})
			case 1:
				w.Boundary(drawn19, []gds.Point{{X: x, Y: y}, {X: x + 40, Y: y}, {X: x + 20, Y: y + 30}})
			default:
				w.Rectangle(drawn19, rect(x, y, x+20+20*rng.Int32N(3), y+20))
			}
		}
		w.Box(gds.LayerType{Layer: 63}, rect(0, 0, 10, 10))
		w.Text(gds.LayerType{Layer: 63}, gds.Point{}, "cell")
		w.EndStructure()
	}
	w.BeginStructure("top")
	for range 3 + rng.IntN(5) {
		name := fmt.Sprintf("cell%d", rng.IntN(cells))
		s := gds.Strans{Mirror: rng.IntN(2) == 0, Angle: 90 * float64(rng.IntN(4))}
		at := gds.Point{X: 280 * rng.Int32N(5), Y: 280 * rng.Int32N(5)}
		if rng.IntN(3) == 0 {
			columns, rows := 2+rng.Int32N(4), 1+rng.Int32N(3)
			step := 260 + 10*rng.Int32N(4)
			at.Y += 3000
			w.ARef(name, gds.Strans{}, uint16(columns), uint16(rows), at, gds.Point{X: at.X + columns*step, Y: at.Y}, gds.Point{X: at.X, Y: at.Y + rows*step})
		} else {
			w.SRef(name, s, at)
		}
	}
	w.Rectangle(gds.LayerType{Layer: 7}, rect(0, 0, 99, 99))
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// open gives the output of an open layout (see testdata/open) at a spacing at which two masks do.
func open(t *testing.T) masked {
	m := masked{name: "asap7_cells_R", spacing: 72, drawnOn: gds.LayerType{Layer: 19}, a: maskA19, b: maskB19,
		deck: strings.Replace(deckHead, "= 36", "= 18", 1)} // 72 units of 0.25 nm
	f, err := os.Open("../../testdata/open/asap7_cells_R.gds.gz")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	if m.drawn, err = io.ReadAll(z); err != nil {
		t.Fatal(err)
	}
	out, ok := decomposed(t, m.deck, m.drawn)
	if !ok {
		t.Fatal("the open layout is not done at 18 nm")
	}
	m.out = out
	return m
}
