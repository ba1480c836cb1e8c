package decompose

import (
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file puts the pieces of a cut figure in an order that can be read back. Who compares an output with its input takes elements in the
// place of a figure until both masks are among them and all of the figure is covered. So that must not come true before the last
// piece, and no piece may stand first that looks like the figure itself, not cut.

// readable gives the pieces of a figure from what is on each mask: rectangles with disjoint interiors, database units of the structure.
func readable(on [2][]geom.Rect, layers [2]gds.LayerType) []gds.Piece {
	var pieces [2][]gds.Piece
	for m := range on {
		pieces[m] = piecesOf(on[m], layers[m])
	}
	for _, m := range [2]int{1, 0} {
		for i, p := range slices.Backward(pieces[m]) {
			if adds(p, on[m^1]) {
				pieces[m] = slices.Delete(pieces[m], i, i+1)
				return append(append(pieces[0], pieces[1]...), p)
			}
		}
	}
	// All of the figure lies in overlaps, so it is whole on both masks. On one of them it comes first, in two halves.
	first := 0
	if len(pieces[1]) > 1 {
		first = 1
	}
	var halved []gds.Piece
	for _, half := range inHalves(on[first]) {
		halved = append(halved, piecesOf(half, layers[first])...)
	}
	return append(halved, pieces[first^1]...)
}

// piecesOf gives the outlines of rectangles as pieces on a layer.
func piecesOf(rects []geom.Rect, layer gds.LayerType) []gds.Piece {
	var cutter geom.Cutter
	var pieces []gds.Piece
	for _, points := range outlinesOf(cutter.Disjoint(nil, rects)) {
		pieces = append(pieces, gds.Piece{Layer: layer, Points: points})
	}
	return pieces
}

// adds tells whether a piece covers anything that the rectangles do not.
func adds(p gds.Piece, rects []geom.Rect) bool {
	var cutter geom.Cutter
	outline := make([]geom.Point, len(p.Points))
	for i, q := range p.Points {
		outline[i] = geom.Point{X: int64(q.X), Y: int64(q.Y)}
	}
	both, _ := cutter.Rectangles(slices.Clone(rects), outline, geom.EvenOdd)
	var areas geom.AreaScratch
	return areas.UnionArea(both) != areas.UnionArea(rects)
}

// inHalves cuts rectangles through the middle of their box, or gives them as they are where all is one unit wide and high.
func inHalves(rects []geom.Rect) [][]geom.Rect {
	box := rects[0]
	for _, r := range rects {
		box = geom.Rect{X1: min(box.X1, r.X1), Y1: min(box.Y1, r.Y1), X2: max(box.X2, r.X2), Y2: max(box.Y2, r.Y2)}
	}
	lower, upper := box, box
	switch {
	case box.X2-box.X1 > 1:
		lower.X2 = (box.X1 + box.X2) >> 1
		upper.X1 = lower.X2
	case box.Y2-box.Y1 > 1:
		lower.Y2 = (box.Y1 + box.Y2) >> 1
		upper.Y1 = lower.Y2
	default:
		return [][]geom.Rect{rects}
	}
	out := make([][]geom.Rect, 2)
	for i, half := range [2]geom.Rect{lower, upper} {
		for _, r := range rects {
			r = geom.Rect{X1: max(r.X1, half.X1), Y1: max(r.Y1, half.Y1), X2: min(r.X2, half.X2), Y2: min(r.Y2, half.Y2)}
			if r.X1 < r.X2 && r.Y1 < r.Y2 {
				out[i] = append(out[i], r)
			}
		}
	}
	return out
}
