package decompose

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// A wire of 200 is drawn as two figures that meet in the middle, and cut there: the pieces are [0, 105] on one mask and [95, 200] on the
// other. Each figure is then whole on one mask, and has a part of 5 on the other, which comes first. A figure within the overlap is whole
// on both, on one of them in halves.
func TestThePartOfAFigureComesBeforeTheWhole(t *testing.T) {
	onA, onB := gds.LayerType{Layer: 1, Type: 1}, gds.LayerType{Layer: 1, Type: 2}
	l := &layout{rules: &LayerRules{MaskA: onA, MaskB: onB}, flat: &flat{forms: &forms{grid: grid{scale: 1}}}}
	shape := &cutShape{held: [2][]geom.Rect{{{X1: 0, Y1: 0, X2: 105, Y2: 20}}, {{X1: 95, Y1: 0, X2: 200, Y2: 20}}}}
	box := func(layer gds.LayerType, x1, x2 int32) gds.Piece {
		return gds.Piece{Layer: layer, Points: []gds.Point{{X: x1}, {X: x2}, {X: x2, Y: 20}, {X: x1, Y: 20}}}
	}
	for _, c := range []struct {
		figure geom.Rect
		mask   uint8 // of the first piece
		want   []gds.Piece
	}{
		{geom.Rect{X1: 0, Y1: 0, X2: 100, Y2: 20}, 0, []gds.Piece{box(onB, 95, 100), box(onA, 0, 100)}},
		{geom.Rect{X1: 0, Y1: 0, X2: 100, Y2: 20}, 1, []gds.Piece{box(onA, 95, 100), box(onB, 0, 100)}},
		{geom.Rect{X1: 100, Y1: 0, X2: 200, Y2: 20}, 0, []gds.Piece{box(onA, 100, 105), box(onB, 100, 200)}},
		{geom.Rect{X1: 97, Y1: 0, X2: 103, Y2: 20}, 0, []gds.Piece{box(onA, 97, 100), box(onA, 100, 103), box(onB, 97, 103)}},
		{geom.Rect{X1: 97, Y1: 0, X2: 103, Y2: 20}, 1, []gds.Piece{box(onA, 97, 100), box(onA, 100, 103), box(onB, 97, 103)}},
		{geom.Rect{X1: 0, Y1: 0, X2: 200, Y2: 20}, 0, []gds.Piece{box(onA, 0, 105), box(onB, 95, 200)}},
	} {
		cuts := &cuts{byKey: map[string]int32{}}
		k := cuts.figure(l, shape, []geom.Rect{c.figure}, placement{}, c.mask)
		if k < 0 {
			t.Fatalf("%v is not cut", c.figure)
		}
		if d := cmp.Diff(c.want, cuts.forms[k].pieces); d != "" {
			t.Errorf("%v, first piece on mask %d (-want +got):\n%s", c.figure, c.mask, d)
		}
	}
}

// A figure with two arms, one of which reaches into an overlap and no farther: the piece there is covered by the other mask, so it
// must not stand last.
func TestTheLastPieceAddsSomething(t *testing.T) {
	onA, onB := gds.LayerType{Layer: 1, Type: 1}, gds.LayerType{Layer: 1, Type: 2}
	on := [2][]geom.Rect{
		{{X1: 0, Y1: 0, X2: 60, Y2: 10}, {X1: 50, Y1: 10, X2: 60, Y2: 40}},
		{{X1: 0, Y1: 0, X2: 10, Y2: 40}, {X1: 50, Y1: 30, X2: 60, Y2: 40}},
	}
	for _, swap := range []bool{false, true} {
		masks, layers := on, [2]gds.LayerType{onA, onB}
		if swap {
			masks[0], masks[1] = on[1], on[0]
		}
		pieces := readable(masks, layers)
		if len(pieces) != 3 {
			t.Fatalf("%d pieces, want 3", len(pieces))
		}
		var covered []geom.Rect
		seen := map[gds.LayerType]bool{}
		for _, p := range pieces[:2] {
			seen[p.Layer] = true
			var cutter geom.Cutter
			var outline []geom.Point
			for _, q := range p.Points {
				outline = append(outline, geom.Point{X: int64(q.X), Y: int64(q.Y)})
			}
			covered, _ = cutter.Rectangles(covered, outline, geom.EvenOdd)
		}
		var areas geom.AreaScratch
		all := areas.UnionArea(append(append([]geom.Rect{}, on[0]...), on[1]...))
		if len(seen) == 2 && areas.UnionArea(covered) == all {
			t.Errorf("swapped %v: the first two pieces cover all: %+v", swap, pieces)
		}
	}
}
