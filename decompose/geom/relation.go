package geom

// This file compares figures band by band.
//
// Why bands are enough: let two figures be nearer than s. If their boundaries have points nearer than s to each other, each
// lies on an edge listed in a band whose box holds it; the boxes of these bands are nearer than s, and comparing all their
// edges finds it. If the boundaries do not meet, and still the figures touch, a whole connected part of one boundary lies
// in the filled area of the other figure, so the point kept of that part does; it lies in a box of either figure, and the
// two bands find it. Conversely edges belong to their figures, so no pair of bands says more than is true.

// BandRelation compares band i of p with band j of q, each as placed. The relation of the polygons is the greatest over
// the pairs of bands whose boxes touch or are nearer than the spacing s. A distance of exactly s is Far.
func BandRelation(p *Polygon, i int, pp Placement, q *Polygon, j int, qp Placement, s int64) Relation {
	// All happens in the frame of p's edges. That moves figures without stretching them, so differences of points are as
	// small as in the plane.
	there := p.frame(pp).Inverse().After(q.frame(qp))
	pb, qb := &p.bands[i], &q.bands[j]
	pbox, qbox := p.swap(pb.Box), there.ApplyRect(q.swap(qb.Box))
	reach := min(max(s, 1), spacingCap) // nothing at this distance or beyond matters
	if apart(pbox, qbox, reach) {
		return Far
	}
	best := Far
	for _, k := range p.lists[pb.first:pb.end] {
		e := &p.edges[k]
		ebox := Rect{min(e.a.X, e.b.X), e.a.Y, max(e.a.X, e.b.X), e.b.Y}
		if apart(ebox, qbox, reach) {
			continue
		}
		for _, l := range q.lists[qb.first:qb.end] {
			f := &q.edges[l]
			c, d := there.Apply(f.a), there.Apply(f.b)
			best = max(best, SegmentsRelation(e.a, e.b, c, d, s))
			if best == Touch {
				return Touch
			}
		}
	}
	if !pbox.Meets(qbox) {
		return best
	}
	for _, w := range q.within[qb.firstIn:qb.afterIn] {
		if w = there.Apply(w); pbox.Contains(w) && p.holds(i, w) {
			return Touch
		}
	}
	if pb.firstIn < pb.afterIn {
		back := there.Inverse()
		for _, w := range p.within[pb.firstIn:pb.afterIn] {
			if qbox.Contains(w) && q.holds(j, back.Apply(w)) {
				return Touch
			}
		}
	}
	return best
}

// BandRectRelation compares band i of p as placed with a rectangle of the plane, which may be a line or a point. The
// relation of polygon and rectangle is the greatest over the bands.
func BandRectRelation(p *Polygon, i int, pp Placement, r Rect, s int64) Relation {
	band := &p.bands[i]
	box := p.swap(band.Box)
	r = p.frame(pp).Inverse().ApplyRect(r)
	reach := min(max(s, 1), spacingCap)
	if apart(box, r, reach) {
		return Far
	}
	corners := [4]Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}}
	best := Far
	for _, k := range p.lists[band.first:band.end] {
		e := &p.edges[k]
		if apart(Rect{min(e.a.X, e.b.X), e.a.Y, max(e.a.X, e.b.X), e.b.Y}, r, reach) {
			continue
		}
		if r.Contains(e.a) || r.Contains(e.b) {
			return Touch
		}
		for n, c := range corners {
			best = max(best, SegmentsRelation(e.a, e.b, c, corners[(n+1)%4], s))
			if best == Touch {
				return Touch
			}
		}
	}
	if box.Contains(corners[0]) && p.holds(i, corners[0]) {
		return Touch
	}
	return best
}

// apart tells whether two boxes are at least reach from each other, 1 <= reach <= spacingCap.
func apart(a, b Rect, reach int64) bool {
	dx, dy := RectGap(a, b)
	return dx|dy != 0 && !shorter(dx, dy, reach)
}
