// Package facing holds spacing by what faces what against outlines that GEOS merges (shapely 1.8.5 of Debian 12, in facing.py): whole
// layouts go through the program's packages, and the number of shapes and of near pairs must be the judge's. The judge computes in
// floating point and says where that leaves a doubt; such layouts are counted and left out.
package facing

import (
	"bytes"
	"context"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"maskpair/decompose"
	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// layout is a question to the judge. Lengths are database units.
type layout struct {
	Figures  [][][2]int32 `json:"figures"`
	Other    int          `json:"other"`
	Side     int          `json:"side"`
	TipSide  int          `json:"tip_side"`
	Tip      int          `json:"tip"`
	Corner   int          `json:"corner"`
	TipWidth int          `json:"tip_width"`
	Wide     [][2]int     `json:"wide"`
}

// verdict is an answer.
type verdict struct {
	Shapes, Pairs int64
	Open          bool
}

// draw makes a layout of wires, plates and, if wanted, slanted figures.
func draw(rng *rand.Rand, slanted bool) *layout {
	s := func() int { return 6 + rng.IntN(12) }
	l := &layout{Other: s(), Side: s(), TipSide: s(), Tip: s(), Corner: s(), TipWidth: 4 + rng.IntN(12), Wide: [][2]int{}}
	for range 20 + rng.IntN(40) {
		x, y := rng.Int32N(240), rng.Int32N(240)
		w, h := 4+rng.Int32N(8), 10+rng.Int32N(70)
		switch rng.IntN(5) {
		case 0, 1:
			w, h = h, w
		case 2:
			w, h = 6+rng.Int32N(30), 6+rng.Int32N(30)
		}
		l.Figures = append(l.Figures, [][2]int32{{x, y}, {x + w, y}, {x + w, y + h}, {x, y + h}})
		if slanted && rng.IntN(4) == 0 {
			x, y = x+rng.Int32N(w+1), y+rng.Int32N(h+1)
			ux, uy, vx, vy := 3+rng.Int32N(30), rng.Int32N(10), rng.Int32N(10), 3+rng.Int32N(30)
			if ux*vy != uy*vx { // the judge would join what a line touches; a figure without area is none
				l.Figures = append(l.Figures, [][2]int32{{x, y}, {x + ux, y + uy}, {x + vx, y + vy}})
			}
		}
	}
	if !slanted && rng.IntN(2) == 0 {
		l.Wide = append(l.Wide, [2]int{8 + rng.IntN(24), s()})
	}
	return l
}

// deck is the rules as a deck for layer 1/0.
func (l *layout) deck() string {
	var b strings.Builder
	fmt.Fprintf(&b, "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = %d\n", l.Other)
	fmt.Fprintf(&b, "[layer.spacing]\nside_to_side = %d\ntip_to_side = %d\ntip_to_tip = %d\ncorner_to_corner = %d\ntip_width = %d\n", l.Side, l.TipSide, l.Tip, l.Corner, l.TipWidth)
	for _, w := range l.Wide {
		fmt.Fprintf(&b, "wide = [{ width = %d, spacing = %d }]\n", w[0], w[1])
	}
	return b.String()
}

// run gives what the program counts.
func run(t *testing.T, l *layout) *decompose.LayerResult {
	t.Helper()
	var stream bytes.Buffer
	w := gds.NewWriter(&stream, gds.WriterOptions{LibName: "facing", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
	w.BeginStructure("top")
	for _, f := range l.Figures {
		var points []gds.Point
		for _, p := range f {
			points = append(points, gds.Point{X: p[0], Y: p[1]})
		}
		w.Boundary(gds.LayerType{Layer: 1}, points)
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	d, err := decompose.ParseDeck("deck.toml", []byte(l.deck()))
	if err != nil {
		t.Fatal(err)
	}
	want, err := d.Interest()
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(stream.Bytes()), int64(stream.Len()), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	rules, err := d.Resolve(lib.DBU)
	if err != nil {
		t.Fatal(err)
	}
	r, err := decompose.New(lib, rules, decompose.Options{Jobs: 2})
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	res, err := r.Decompose(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return &res.Layers[0]
}

func TestNearPairsOnOutlinesMergedByGEOS(t *testing.T) {
	outside.Packages(t, "python3-shapely")
	for _, c := range []struct {
		name    string
		slanted bool
		layouts int
	}{{"rectangles", false, 200}, {"slanted", true, 200}} {
		t.Run(c.name, func(t *testing.T) {
			rng := rand.New(rand.NewPCG(6, uint64(c.layouts)))
			var layouts []*layout
			for range c.layouts {
				layouts = append(layouts, draw(rng, c.slanted))
			}
			verdicts := outside.Ask[[]*layout, []verdict](t, "facing.py", layouts)
			open, pairs := 0, int64(0)
			for i, l := range layouts {
				got := run(t, l)
				if got.Shapes != verdicts[i].Shapes {
					t.Fatalf("layout %d: %d shapes, the judge has %d\n%+v", i, got.Shapes, verdicts[i].Shapes, *l)
				}
				if verdicts[i].Open {
					open++
					continue
				}
				pairs += got.NearPairs
				if got.NearPairs != verdicts[i].Pairs {
					t.Fatalf("layout %d: %d near pairs, the judge has %d\n%+v\n%s", i, got.NearPairs, verdicts[i].Pairs, *l, l.deck())
				}
			}
			if open > c.layouts/10 || pairs < 500 {
				t.Errorf("%d of %d layouts in doubt, %d pairs compared", open, c.layouts, pairs)
			}
			t.Logf("%d near pairs, %d layouts in doubt", pairs, open)
		})
	}
}
