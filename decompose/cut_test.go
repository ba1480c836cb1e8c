package decompose

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// A wire of 200 is drawn as two figures that meet in the middle, and cut there: the pieces are [0, 105] on one mask and [95, 200] on the other. Each figure is then whole on one mask,
// and has a part of 5 on the other, which comes first.
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
