package decompose

import (
	"bytes"
	"context"
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
	"maskpair/gds"
)

// facingDeck is a deck for layer 1/0 in nanometres, which are database units here, with more lines at its end.
func facingDeck(spacing int, lines string) string {
	return fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = %d\n%s", spacing, lines)
}

// written gives a stream with a database unit of 1 nm.
func written(tb testing.TB, draw func(w *gds.Writer)) []byte {
	tb.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{LibName: "facing", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
	draw(w)
	if err := w.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

var layer1 = gds.LayerType{Layer: 1}

// drawnRects gives a stream of rectangles in one structure.
func drawnRects(tb testing.TB, rects ...gds.Rect) []byte {
	return written(tb, func(w *gds.Writer) {
		w.BeginStructure("top")
		for _, r := range rects {
			w.Rectangle(layer1, r)
		}
		w.EndStructure()
	})
}

func whole(x1, y1, x2, y2 int32) gds.Rect { return gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2} }

// layoutOf builds the layout of a deck's first layer.
func layoutOf(tb testing.TB, stream []byte, deck string, opt Options) *layout {
	tb.Helper()
	run := runOf(tb, stream, deck, opt)
	l, err := newLayout(context.Background(), run.h, run.classes.selectLayer(0), &run.rules.Layers[0], 0, nil, &run.opt)
	if err != nil {
		tb.Fatal(err)
	}
	run.layers = append(run.layers, l)
	return l
}

// judgedOneByOne gives the near pairs of a layout by its own shapes, all pairs of one top held against each other.
func judgedOneByOne(l *layout) [][2]uint32 {
	parts := map[uint32]*geom.Parts{}
	for n := range uint32(l.nodes) {
		parts[n] = &geom.Parts{}
	}
	l.geometryOf(parts)
	shapes := make([]*facing.Shape, l.nodes)
	for n := range shapes {
		shapes[n] = outlineOf(*parts[uint32(n)])
	}
	rules := l.facingRules()
	var out [][2]uint32
	for u := range uint32(l.nodes) {
		for v := u + 1; v < uint32(l.nodes); v++ {
			if l.topOf(u) == l.topOf(v) && !(l.given != nil && l.given.meet[[2]uint32{u, v}]) && rules.Near(shapes[u], shapes[v]) {
				out = append(out, [2]uint32{u, v})
			}
		}
	}
	return out
}

func pairsOf(l *layout) [][2]uint32 {
	var out [][2]uint32
	for u := range uint32(l.nodes) {
		for _, e := range l.near.of(u) {
			out = append(out, [2]uint32{u, e >> 1})
		}
	}
	slices.SortFunc(out, func(a, b [2]uint32) int { return slices.Compare(a[:], b[:]) })
	return out
}

const someRules = "[layer.spacing]\nside_to_side = 9\ntip_to_side = 14\ntip_to_tip = 16\ncorner_to_corner = 11\ntip_width = 8\nwide = [{ width = 20, spacing = 18 }]\n"

// Every pair within reach is judged once, on whole merged outlines: rectangles, shapes of many, slanted ones, half units, several tops, a
// layout wider than a window, and given stitches.
func TestEveryPairIsJudged(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 20))
	scatter := func(w *gds.Writer, n int, slanted, far bool) {
		for i := range n {
			x, y := rng.Int32N(300), rng.Int32N(300)
			if far && i%2 == 0 {
				x += -2147483647
			} else if far {
				x += 2147483000 - 310
			}
			r := whole(x, y, x+4+rng.Int32N(20), y+4+rng.Int32N(20))
			if rng.IntN(3) == 0 {
				r.X2 = r.X1 + 40
			}
			w.Rectangle(layer1, r)
			if slanted && rng.IntN(4) == 0 {
				w.Boundary(layer1, []gds.Point{{X: r.X2, Y: r.Y1}, {X: r.X2 + 9, Y: r.Y1 + 5}, {X: r.X2, Y: r.Y2}})
			}
		}
	}
	for _, c := range []struct {
		name string
		deck string
		draw func(w *gds.Writer)
	}{
		{"rectangles", "", func(w *gds.Writer) {
			w.BeginStructure("top")
			scatter(w, 300, false, false)
			w.EndStructure()
		}},
		{"slanted", "", func(w *gds.Writer) {
			w.BeginStructure("top")
			scatter(w, 150, true, false)
			w.EndStructure()
		}},
		{"half units", "", func(w *gds.Writer) {
			w.BeginStructure("top")
			scatter(w, 100, true, false)
			w.Path(layer1, gds.PathStyle{Width: 7}, []gds.Point{{X: -20, Y: 0}, {X: -20, Y: 200}})
			w.Path(layer1, gds.PathStyle{Width: 5}, []gds.Point{{X: -40, Y: 0}, {X: -40, Y: 200}})
			w.EndStructure()
		}},
		{"two tops and an array", "", func(w *gds.Writer) {
			w.BeginStructure("cell")
			scatter(w, 20, true, false)
			w.EndStructure()
			for _, name := range []string{"one", "two"} {
				w.BeginStructure(name)
				w.ARef("cell", gds.Strans{}, 2, 2, gds.Point{}, gds.Point{X: 620}, gds.Point{Y: 620})
				w.SRef("cell", gds.Strans{Mirror: true, Angle: 90}, gds.Point{X: 900, Y: 100})
				w.EndStructure()
			}
		}},
		{"wider than a window", "", func(w *gds.Writer) {
			w.BeginStructure("top")
			scatter(w, 200, true, true)
			w.Path(layer1, gds.PathStyle{Width: 3}, []gds.Point{{X: 0, Y: -30}, {X: 40, Y: -30}})
			w.EndStructure()
		}},
		{"a given stitch", "[layer.stitch]\nmin_overlap = 4\n", func(w *gds.Writer) {
			w.BeginStructure("top")
			w.Rectangle(gds.LayerType{Layer: 2}, whole(-100, 0, -50, 8))
			w.Rectangle(gds.LayerType{Layer: 3}, whole(-56, 0, -20, 8))
			w.Rectangle(layer1, whole(-100, 20, -80, 28))
			w.Rectangle(layer1, whole(-70, 21, -30, 28))
			scatter(w, 40, false, false)
			w.EndStructure()
		}},
	} {
		t.Run(c.name, func(t *testing.T) {
			stream := written(t, c.draw)
			var first [][2]uint32
			for _, jobs := range []int{1, 4} {
				l := layoutOf(t, stream, facingDeck(12, c.deck+someRules), Options{Jobs: jobs})
				got, want := pairsOf(l), judgedOneByOne(l)
				if d := cmp.Diff(want, got); d != "" {
					t.Fatalf("%d jobs, near pairs (one by one, in the run):\n%s", jobs, d)
				}
				if int64(len(got)) != l.near.pairs || len(got) == 0 {
					t.Errorf("%d pairs are counted as %d", len(got), l.near.pairs)
				}
				plain := layoutOf(t, stream, facingDeck(18, c.deck), Options{Jobs: jobs})
				if len(pairsOf(plain)) <= len(got) {
					t.Errorf("nothing was dropped: %d pairs of %d within the largest spacing", len(got), len(pairsOf(plain)))
				}
				if jobs > 1 && !slices.Equal(first, got) {
					t.Errorf("other pairs with %d jobs", jobs)
				}
				first = got
			}
		})
	}
}

// A deck in which all kinds have one spacing is the plain rule: once left to the sweep, once judged pair by pair because of a wide rule
// that nothing fulfils. 3065 near pairs is what independent scripts count on this library at 36 nm.
func TestEqualRulesAreThePlainRule(t *testing.T) {
	stream := openLayout(t, "asap7_cells_R")
	plain, plainOut := decomposed(t, stream, oneLayer(19, 36), Options{Jobs: 2})
	for name, rules := range map[string]string{
		"left to the sweep": "[layer.spacing]\nside_to_side = 36\ntip_to_tip = 36\ntip_width = 20\n",
		"judged":            "[layer.spacing]\ntip_width = 20\nwide = [{ width = 100000, spacing = 40 }]\n",
	} {
		got, out := decomposed(t, stream, oneLayer(19, 36)+rules, Options{Jobs: 2})
		p, q := &plain.Layers[0], &got.Layers[0]
		if p.NearPairs != q.NearPairs || p.Components != q.Components || p.UnresolvedPairs != q.UnresolvedPairs || p.NearPairs != 3065 {
			t.Errorf("%s: %d near pairs, %d components, %d unresolved; the plain rule has %d, %d, %d", name, q.NearPairs, q.Components, q.UnresolvedPairs,
				p.NearPairs, p.Components, p.UnresolvedPairs)
		}
		if !bytes.Equal(plainOut, out) {
			t.Errorf("%s: other masks than by the plain rule", name)
		}
	}
}

// BenchmarkFacing is the plain rule against rules by what faces what with the same largest spacing.
func BenchmarkFacing(b *testing.B) {
	for _, c := range []struct {
		name, rules string
	}{
		{"plain", ""},
		{"tips", "[layer.spacing]\nside_to_side = 40\ncorner_to_corner = 45\ntip_width = 36\n"},
		{"wide", "[layer.spacing]\nside_to_side = 40\ncorner_to_corner = 45\ntip_width = 36\nwide = [{ width = 50, spacing = 54 }]\n"},
	} {
		for _, layer := range []struct {
			number  int
			spacing float64
		}{{18, 54}, {19, 54}} {
			b.Run(fmt.Sprintf("%d/%s", layer.number, c.name), func(b *testing.B) {
				stream, deck := openLayout(b, "asap7_srambank_128b"), oneLayer(layer.number, layer.spacing)+c.rules
				for b.Loop() {
					decomposed(b, stream, deck, Options{Jobs: 2})
				}
			})
		}
	}
}
