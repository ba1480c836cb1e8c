package decompose

import (
	"bytes"
	"context"
	"math"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/gds"
)

// drawnResult decomposes a layout on layer 10/0 with a spacing and asks for drawings.
func drawnResult(t *testing.T, spacing float64, draw func(w *gds.Writer)) *LayerResult {
	t.Helper()
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{})
	draw(w)
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	d, err := ParseDeck("deck.toml", []byte(oneLayer(10, spacing)))
	if err != nil {
		t.Fatal(err)
	}
	want, err := d.Interest()
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(out.Bytes()), int64(out.Len()), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	rules, err := d.Resolve(lib.DBU)
	if err != nil {
		t.Fatal(err)
	}
	run, err := New(lib, rules, Options{Jobs: 1, Drawings: 10})
	if err != nil {
		t.Fatal(err)
	}
	defer run.Close()
	res, err := run.Decompose(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return &res.Layers[0]
}

var drawnLayer = gds.LayerType{Layer: 10}

// A triangle of an L, a slanted figure and a rectangle, once alone and once turned; a long rail beside it. Everything in half units,
// by hand from the drawing.
func TestDrawing(t *testing.T) {
	l := drawnResult(t, 30, func(w *gds.Writer) {
		w.BeginStructure("knot")
		w.Boundary(drawnLayer, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}, {X: 100, Y: 10}, {X: 10, Y: 10}, {X: 10, Y: 100}, {X: 0, Y: 100}}) // L
		w.Boundary(drawnLayer, []gds.Point{{X: 30, Y: 60}, {X: 60, Y: 60}, {X: 30, Y: 90}})                                                 // 20 from the L's upright arm
		w.Rectangle(drawnLayer, gds.Rect{X1: 30, Y1: 30, X2: 90, Y2: 40})                                                                   // 20 from either
		w.EndStructure()
		w.BeginStructure("top")
		w.SRef("knot", gds.Strans{}, gds.Point{})
		w.SRef("knot", gds.Strans{Angle: 90}, gds.Point{X: 5000})
		w.Rectangle(drawnLayer, gds.Rect{X1: -20000, Y1: -50, X2: 20000, Y2: -45}) // 45 below: no near pair
		w.EndStructure()
	})
	groups := l.Groups()
	if len(groups) != 1 || len(groups[0].Members) != 2 || l.Drawing == nil {
		t.Fatalf("groups %v, drawing %v: want one kind, twice, and a drawing", groups, l.Drawing)
	}
	shown := groups[0].Shown
	p := l.Drawing.Pictures[shown]
	if p == nil || len(l.Drawing.Pictures) != 1 {
		t.Fatalf("pictures %v", l.Drawing.Pictures)
	}
	u := &l.Unresolved[shown]
	if len(p.Links) != 3 {
		t.Fatalf("%d links in a cycle of three", len(p.Links))
	}
	for i, k := range p.Links {
		if k.From != i+1 || k.To != (i+1)%3+1 || !k.Known || k.DistanceSq != 400 {
			t.Errorf("link %d: %+v, want a gap of 20", i, k)
		}
		if dx, dy := k.At.X-k.Other.X, k.At.Y-k.Other.Y; dx*dx+dy*dy != 1600 { // half units
			t.Errorf("link %d runs from %v to %v", i, k.At, k.Other)
		}
	}
	steps := 0
	for _, s := range p.Shapes {
		if s.Step == 0 {
			t.Errorf("a shape that is in no cycle is near: %+v", s)
			continue
		}
		steps++
		if s.Box != u.Cycle[s.Step-1].Box || s.Mask != u.Cycle[s.Step-1].Mask || !s.Member || s.Cut {
			t.Errorf("step %d is %v on %v, the cycle has %+v", s.Step, s.Box, s.Mask, u.Cycle[s.Step-1])
		}
		area := 0.0
		for _, rings := range s.Outlines {
			for _, ring := range rings {
				area += shoelace(ring)
			}
		}
		// Square half units: the L has 100*10 + 10*90 = 1900 units, the triangle 450, the rectangle 600.
		if !slices.Contains([]float64{4 * 1900, 4 * 450, 4 * 600}, math.Abs(area)) {
			t.Errorf("step %d has an outline of area %g", s.Step, area)
		}
	}
	if steps != 3 {
		t.Errorf("%d steps are drawn", steps)
	}
	if len(l.Drawing.Maps) != 1 {
		t.Fatalf("%d maps for one top", len(l.Drawing.Maps))
	}
	m := &l.Drawing.Maps[0]
	if want := (Box{-40000, -100, 40000, 200}); m.Box != want || m.Top != "top" {
		t.Errorf("map of %s over %v, want %v", m.Top, m.Box, want)
	}
	var onA, onB float64
	unresolved := 0
	for _, tile := range m.Tiles {
		onA, onB, unresolved = onA+tile.A, onB+tile.B, unresolved+tile.Unresolved
	}
	if math.Abs(onA-l.AreaA) > 1e-6*l.AreaA || math.Abs(onB-l.AreaB) > 1e-6*l.AreaB || int64(unresolved) != l.UnresolvedPairs {
		t.Errorf("the tiles add up to %g, %g and %d pairs; the layer has %g, %g and %d", onA, onB, unresolved, l.AreaA, l.AreaB, l.UnresolvedPairs)
	}
}

// shoelace gives the signed area of a ring.
func shoelace(ring []Spot) float64 {
	sum := int64(0)
	for i := range ring {
		a, b := ring[i], ring[(i+1)%len(ring)]
		sum += a.X*b.Y - b.X*a.Y
	}
	return float64(sum) / 2
}

// Shapes with one box: two L that embrace each other cannot be told apart by it, yet each step is the right one.
func TestDrawingOfEqualBoxes(t *testing.T) {
	l := drawnResult(t, 30, func(w *gds.Writer) {
		w.BeginStructure("top")
		w.Boundary(drawnLayer, []gds.Point{{X: 0, Y: 0}, {X: 200, Y: 0}, {X: 200, Y: 10}, {X: 10, Y: 10}, {X: 10, Y: 200}, {X: 0, Y: 200}})
		w.Boundary(drawnLayer, []gds.Point{{X: 0, Y: 210}, {X: 0, Y: 220}, {X: 220, Y: 220}, {X: 220, Y: 0}, {X: 210, Y: 0}, {X: 210, Y: 210}})
		w.Rectangle(drawnLayer, gds.Rect{X1: 0, Y1: 0, X2: 0 + 1, Y2: 1}) // within the first
		w.Rectangle(drawnLayer, gds.Rect{X1: 30, Y1: 30, X2: 190, Y2: 190})
		w.EndStructure()
	})
	groups := l.Groups()
	if len(groups) != 1 {
		t.Fatalf("groups %v", groups)
	}
	p := l.Drawing.Pictures[groups[0].Shown]
	for _, k := range p.Links {
		if !k.Known || k.DistanceSq >= 900 || k.DistanceSq <= 0 {
			t.Errorf("link %+v is no near pair", k)
		}
	}
	if len(p.Links) != 3 {
		t.Errorf("%d links", len(p.Links))
	}
}

// Of a cycle of 101 bars in a ring only those around the unresolved pair are drawn.
func TestDrawingOfLongCycle(t *testing.T) {
	const n = 50
	l := drawnResult(t, 30, func(w *gds.Writer) {
		w.BeginStructure("top")
		for i := range int32(n) { // there and back, 20 apart, rows 100 apart
			w.Rectangle(drawnLayer, gds.Rect{X1: 120 * i, X2: 120*i + 100, Y1: 0, Y2: 10})
			w.Rectangle(drawnLayer, gds.Rect{X1: 120 * i, X2: 120*i + 100, Y1: 100, Y2: 110})
		}
		w.Rectangle(drawnLayer, gds.Rect{X1: 40, X2: 50, Y1: 30, Y2: 80})
		w.Rectangle(drawnLayer, gds.Rect{X1: 120*(n-1) + 40, X2: 120*(n-1) + 50, Y1: 30, Y2: 45})
		w.Rectangle(drawnLayer, gds.Rect{X1: 120*(n-1) + 40, X2: 120*(n-1) + 50, Y1: 65, Y2: 80})
		w.EndStructure()
	})
	groups := l.Groups()
	if len(groups) != 1 {
		t.Fatalf("groups %v", groups)
	}
	u := &l.Unresolved[groups[0].Shown]
	if len(u.Cycle) != 2*n+3 {
		t.Fatalf("the cycle has %d shapes, want %d", len(u.Cycle), 2*n+3)
	}
	p := l.Drawing.Pictures[groups[0].Shown]
	drawn := 0
	for _, s := range p.Shapes {
		if s.Step > 0 {
			drawn++
		}
	}
	if drawn != stepsDrawn {
		t.Errorf("%d steps are drawn, want %d", drawn, stepsDrawn)
	}
	shown := false
	for _, k := range p.Links {
		a, b := u.Cycle[k.From-1], u.Cycle[k.To-1]
		shown = shown || k.Known && a.Mask == b.Mask
	}
	if !shown {
		t.Error("the unresolved pair is not drawn")
	}
}

func TestGroups(t *testing.T) {
	pair := []Pair{{}}
	l := &LayerResult{Unresolved: []Unresolved{
		{Group: 4}, {Group: 7, Pairs: pair}, {Group: 4, Pairs: pair}, {Group: 9, Pairs: []Pair{{}, {}, {}}}, {Group: 7, Pairs: pair, Repair: pair}, {Group: 7},
	}}
	want := []Group{{Members: []int{3}, Shown: 3, Pairs: 3}, {Members: []int{1, 4, 5}, Shown: 4, Pairs: 2}, {Members: []int{0, 2}, Shown: 2, Pairs: 1}}
	if diff := cmp.Diff(want, l.Groups()); diff != "" {
		t.Error(diff)
	}
}

func TestTileMap(t *testing.T) {
	m := &TileMap{Box: Box{-100, 0, 100, 100}}
	m.lay(1 << 20)
	if m.NX != mostTiles || m.NY != mostTiles/2 || len(m.Tiles) != m.NX*m.NY {
		t.Errorf("%d by %d tiles", m.NX, m.NY)
	}
	m = &TileMap{Box: Box{-100, 0, 100, 100}}
	m.lay(1)
	if m.NX != leastTiles || m.NY != leastTiles/2 {
		t.Errorf("%d by %d tiles of a small layout", m.NX, m.NY)
	}
	// Tiles are 20 by 20: a bar over one and a half of them gives two thirds to the first.
	m.spread(Box{-100, 0, -70, 20}, 30, 60)
	for i, want := range []Tile{{A: 20, B: 40}, {A: 10, B: 20}, {}} {
		if diff := cmp.Diff(want, m.Tiles[i]); diff != "" {
			t.Errorf("tile %d: %s", i, diff)
		}
	}
	for _, c := range []struct {
		at   Spot
		x, y int
	}{{Spot{-100, 0}, 0, 0}, {Spot{100, 100}, 9, 4}, {Spot{0, 50}, 5, 2}, {Spot{-500, 900}, 0, 4}} {
		if m.At(c.at) != &m.Tiles[c.y*m.NX+c.x] {
			t.Errorf("%v is not in tile %d, %d", c.at, c.x, c.y)
		}
	}
	point := &TileMap{Box: Box{5, 5, 5, 5}}
	point.lay(1)
	point.spread(Box{5, 5, 5, 5}, 1, 1)
	if len(point.Tiles) != 1 || point.At(Spot{}) != &point.Tiles[0] {
		t.Errorf("a map without extent has %d tiles", len(point.Tiles))
	}
}
