package facing

import (
	"slices"

	"maskpair/decompose/geom"
)

// This file finds out whether a shape is wide where an edge of it faces another shape: whether a square of some width fits into the
// shape with a side on the edge, along more than 0 of a stretch of it.
//
// Look at the strip as deep as the width, inwards from the edge. An outline edge that reaches into the strip keeps the square from its
// own projection onto the edge; one across the strip is a barrier of width 0. Between such barriers the strip is full all the way in
// or empty; it is full where it begins at the stretch, because the edge has the shape on its inner side. So the square fits exactly
// where a gap between barriers is at least as long as the width and overlaps the stretch.

// barrier is the part of an edge's line from which a square is kept.
type barrier struct{ from, to place }

// holdsSquare tells whether a square of a width fits along more than 0 of the stretch from one place of an edge to another.
func (s *Shape) holdsSquare(e *edge, from, to place, width int64) bool {
	w, h := s.box.X2-s.box.X1, s.box.Y2-s.box.Y1
	if w < width || h < width {
		return false
	}
	if s.rect {
		return true
	}
	begin := from.plus(-width)
	fits := func(end place) bool {
		return begin.less(to) && from.less(end) && !end.less(begin.plus(width))
	}
	for _, b := range s.sortedBarriers(e, from, to, width) {
		if fits(b.from) {
			return true
		}
		begin = maxPlace(begin, b.to)
	}
	return fits(to.plus(width))
}

// sortedBarriers finds what reaches into the strip along a stretch of an edge and as far on both sides as a square can lie.
func (s *Shape) sortedBarriers(e *edge, from, to place, width int64) []barrier {
	barriers := s.barriers(e, s.strip(e, from, to, width))
	slices.SortFunc(barriers, func(p, q barrier) int {
		switch {
		case p.from.less(q.from):
			return -1
		case q.from.less(p.from):
			return 1
		}
		return 0
	})
	return barriers
}

// strip is the box of where a square could lie, rounded outwards.
func (s *Shape) strip(e *edge, from, to place, width int64) geom.Rect {
	low, high := from.whole-width, to.whole+width
	if to.between {
		high++
	}
	inner, outer := e.at-width, e.at
	if e.side >= left {
		inner, outer = e.at, e.at+width
	}
	if e.side.upright() {
		return geom.Rect{X1: inner, Y1: low, X2: outer, Y2: high}
	}
	return geom.Rect{X1: low, Y1: inner, X2: high, Y2: outer}
}

// barriers finds the edges that reach into the inside of a strip.
func (s *Shape) barriers(e *edge, strip geom.Rect) []barrier {
	inner, outer := strip.X1, strip.X2
	if !e.side.upright() {
		inner, outer = strip.Y1, strip.Y2
	}
	var out []barrier
	var list [32]*edge
	for _, g := range s.within(list[:0], strip) {
		if g.side.upright() == e.side.upright() {
			if inner < g.at && g.at < outer {
				out = append(out, barrier{s.lowEnd(g), s.highEnd(g)})
			}
		} else if s.lowEnd(g).less(whole64(outer)) && whole64(inner).less(s.highEnd(g)) {
			out = append(out, barrier{whole64(g.at), whole64(g.at)})
		}
	}
	for i := range s.slants {
		if b, ok := s.slants[i].across(e.side.upright(), inner, outer); ok {
			out = append(out, b)
		}
	}
	return out
}
