package facing

import "maskpair/decompose/geom"

// This file tells whether a part cut out of a shape is judged as the shape was. A cut makes edges shorter, so that sides become tips, and
// squares that were held by the shape no longer fit. Where nothing is near, that does not matter.

// Keeps tells whether the edges of a part of a shape, cut off at some overlaps, are of the kinds and width that they are of in the whole,
// as far as any of the shapes around faces them within reach. Edges within the overlaps are left out: they are new.
func (r *Rules) Keeps(whole, part *Shape, overlaps []geom.Rect, around []*Shape) bool {
	for i := range part.edges {
		e := &part.edges[i]
		if !inAny(e.box(), overlaps) && !r.keepsEdge(whole, part, e) && r.faced(e, around) {
			return false
		}
	}
	return true
}

func inAny(r geom.Rect, boxes []geom.Rect) bool {
	for _, b := range boxes {
		if b.X1 <= r.X1 && b.Y1 <= r.Y1 && r.X2 <= b.X2 && r.Y2 <= b.Y2 {
			return true
		}
	}
	return false
}

// keepsEdge tells whether an edge of a part is as it was in the whole.
func (r *Rules) keepsEdge(whole, part *Shape, e *edge) bool {
	for _, w := range whole.within(nil, e.box()) {
		if w.side != e.side || w.at != e.at || w.low > e.low || w.high < e.high {
			continue
		}
		if w.tip(r) != e.tip(r) {
			return false
		}
		for _, wide := range r.Wide {
			// The part holds no square that the whole does not. It is enough that each stretch where the whole is wide still is.
			low, high := whole64(e.low), whole64(e.high)
			for _, s := range whole.wideStretches(w, low, high, wide.Width) {
				if s.from.less(s.to) && !part.wideAll(e, s, wide.Width) {
					return false
				}
			}
		}
		return true
	}
	return false
}

// wideStretches gives the parts of an edge along which squares of a width fit.
func (s *Shape) wideStretches(e *edge, from, to place, width int64) []barrier {
	var out []barrier
	begin := from.plus(-width)
	add := func(end place) {
		if begin.less(to) && from.less(end) && !end.less(begin.plus(width)) {
			out = append(out, barrier{maxPlace(begin, from), minPlace(end, to)})
		}
	}
	for _, b := range s.sortedBarriers(e, from, to, width) {
		add(b.from)
		begin = maxPlace(begin, b.to)
	}
	add(to.plus(width))
	return out
}

// wideAll tells whether squares of a width fit all along a stretch.
func (s *Shape) wideAll(e *edge, stretch barrier, width int64) bool {
	for _, t := range s.wideStretches(e, stretch.from, stretch.to, width) {
		if !stretch.from.less(t.from) && !t.to.less(stretch.to) {
			return true
		}
	}
	return false
}

// faced tells whether an edge of any of the shapes faces e within reach.
func (r *Rules) faced(e *edge, shapes []*Shape) bool {
	reach := r.facingReach()
	box := grown(e.box(), reach)
	for _, s := range shapes {
		if !s.box.Meets(box) {
			continue
		}
		for _, f := range s.within(nil, box) {
			gap := f.at - e.at
			if e.side >= left {
				gap = -gap
			}
			if f.side == e.side.opposite() && gap > 0 && gap < reach && f.low < e.high && e.low <= f.high {
				return true
			}
		}
	}
	return false
}
