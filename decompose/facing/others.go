package facing

import (
	"math"

	"maskpair/decompose/geom"
)

// This file judges the places where outlines come nearest and a slanted edge takes part.
//
// Two outlines that do not meet come nearest, among all neighbouring points, where a corner of one looks at an edge or a corner of the
// other. From a corner, the other point must lie in its cone: no step along either of its edges brings it nearer. Of an edge, the
// point is the foot of the perpendicular, strictly within the edge, and the corner is on its outer side. Corners with a filled angle of
// more than 180 degrees are never nearest. A place that is part of what two axis-parallel edges have in common where they face each
// other is judged by their kinds, not here.

// others judges all such places, and figures without area.
func (j *judge) others() {
	reach := j.r.Other
	cornersA := j.a.cornersIn(grown(j.b.box, reach))
	cornersB := j.b.cornersIn(grown(j.a.box, reach))
	j.cornersAndEdges(j.a, cornersA, j.b)
	j.swap = !j.swap
	j.cornersAndEdges(j.b, cornersB, j.a)
	j.swap = !j.swap
	for i := range cornersA {
		for k := range cornersB {
			if j.twoCorners(&cornersA[i], &cornersB[k]); j.done() {
				return
			}
		}
	}
	j.pointsAndAll(j.a, j.b)
	j.swap = !j.swap
	j.pointsAndAll(j.b, j.a)
	j.swap = !j.swap
}

// cornersIn gives the corners of a shape in a box at which it can be nearest to something.
func (s *Shape) cornersIn(box geom.Rect) []corner {
	var out []corner
	for _, c := range s.corners {
		if box.Contains(c.at) {
			out = append(out, c)
		}
	}
	for _, e := range s.within(nil, box) {
		if !e.side.upright() {
			continue
		}
		// With the filled area on the left, an edge with the outside on its right runs up.
		up := geom.Point{Y: 1}
		inward := geom.Point{X: -1}
		if e.side == left {
			up, inward = geom.Point{Y: -1}, geom.Point{X: 1}
		}
		outward := geom.Point{X: -inward.X}
		first, last := geom.Point{X: e.at, Y: e.low}, geom.Point{X: e.at, Y: e.high}
		square := [2]bool{e.ends&lowSquare != 0, e.ends&highSquare != 0}
		if e.side == left {
			first, last, square[0], square[1] = last, first, square[1], square[0]
		}
		if square[0] && box.Contains(first) {
			out = append(out, corner{first, outward, up, true})
		}
		if square[1] && box.Contains(last) {
			out = append(out, corner{last, up, inward, true})
		}
	}
	return out
}

// looksAt tells whether the cone of a corner holds a direction.
func (c *corner) looksAt(v geom.Point) bool {
	if dotSign(v, c.out) > 0 || dotSign(v, c.in) < 0 {
		return false
	}
	return crossSign(c.in, c.out) != 0 || crossSign(c.out, v) < 0
}

// flat gives the directions in which axis-parallel edges at right angles to v lead away from the corner.
func (c *corner) flat(v geom.Point) []geom.Point {
	var out []geom.Point
	if axisParallel(c.in) && dotSign(v, c.in) == 0 {
		out = append(out, geom.Point{X: -c.in.X, Y: -c.in.Y})
	}
	if axisParallel(c.out) && dotSign(v, c.out) == 0 {
		out = append(out, c.out)
	}
	return out
}

func axisParallel(v geom.Point) bool { return v.X == 0 || v.Y == 0 }

// cornersAndEdges judges corners of one shape with edges of the other, where one of the two is slanted.
func (j *judge) cornersAndEdges(of *Shape, corners []corner, with *Shape) {
	if len(with.slants)+len(of.corners) == 0 {
		return
	}
	for i := range corners {
		c := &corners[i]
		around := grown(geom.Rect{X1: c.at.X, Y1: c.at.Y, X2: c.at.X, Y2: c.at.Y}, j.r.Other)
		for k := range with.slants {
			t := &with.slants[k]
			if j.cornerAndSlant(c, t, around); j.done() {
				return
			}
		}
		if c.square {
			continue
		}
		for _, e := range with.within(nil, around) {
			if j.cornerAndEdge(c, with, e); j.done() {
				return
			}
		}
	}
}

func (j *judge) cornerAndSlant(c *corner, t *slant, around geom.Rect) {
	box := geom.Rect{X1: min(t.a.X, t.b.X), Y1: min(t.a.Y, t.b.Y), X2: max(t.a.X, t.b.X), Y2: max(t.a.Y, t.b.Y)}
	if !around.Meets(box) || geom.Orient(t.a, t.b, c.at) >= 0 {
		return
	}
	if !c.looksAt(geom.Point{X: t.a.Y - t.b.Y, Y: t.b.X - t.a.X}) {
		return
	}
	if foot := geom.Foot(c.at, t.a, t.b); foot.Compare(t.from) <= 0 || foot.Compare(t.to) >= 0 {
		return
	}
	j.slanted(c.at, t.a, t.b)
}

func (j *judge) cornerAndEdge(c *corner, of *Shape, e *edge) {
	gap, at := c.at.X-e.at, c.at.Y
	inward := geom.Point{X: -1}
	if !e.side.upright() {
		gap, at = c.at.Y-e.at, c.at.X
		inward = geom.Point{Y: -1}
	}
	if e.side >= left {
		gap = -gap
		inward = geom.Point{X: -inward.X, Y: -inward.Y}
	}
	if gap <= 0 || !c.looksAt(inward) || len(c.flat(inward)) > 0 {
		return
	}
	if p := whole64(at); !of.lowEnd(e).less(p) || !p.less(of.highEnd(e)) {
		return
	}
	ends := e.segment()
	j.slanted(c.at, ends[0], ends[1])
}

func (j *judge) twoCorners(p, q *corner) {
	if p.square && q.square {
		return
	}
	v := geom.Point{X: q.at.X - p.at.X, Y: q.at.Y - p.at.Y}
	back := geom.Point{X: -v.X, Y: -v.Y}
	if !p.looksAt(v) || !q.looksAt(back) {
		return
	}
	for _, s := range p.flat(v) {
		for _, t := range q.flat(back) {
			if dotSign(s, t) > 0 {
				return // two edges face each other from here on
			}
		}
	}
	j.slanted(p.at, q.at, q.at)
}

// pointsAndAll judges figures without area of one shape with all of the other.
func (j *judge) pointsAndAll(of, with *Shape) {
	for _, p := range of.points {
		for i := range with.edges {
			e := &with.edges[i]
			low, high := e.low, e.high
			if e.lowShare != 0 {
				low++
			}
			if low > high {
				continue
			}
			a, b := geom.Point{X: e.at, Y: low}, geom.Point{X: e.at, Y: high}
			if !e.side.upright() {
				a, b = turned(a), turned(b)
			}
			if j.slanted(p, a, b); j.done() {
				return
			}
		}
		for i := range with.slants {
			if j.slanted(p, with.slants[i].a, with.slants[i].b); j.done() {
				return
			}
		}
		for _, q := range with.points {
			if j.slanted(p, q, q); j.done() {
				return
			}
		}
	}
}

// slanted judges a point of one shape with an edge or a point of the other that is nearest to it.
func (j *judge) slanted(p, a, b geom.Point) {
	if geom.SegmentsRelation(p, p, a, b, j.r.Other) != geom.Near {
		return
	}
	j.found = true
	if !j.all {
		return
	}
	to, distance := nearest(p, a, b)
	have := int64(math.Sqrt(distance))
	for float64(have+1)*float64(have+1) <= distance {
		have++
	}
	j.offer(Approach{Rule: Other, Spacing: j.r.Other, A: [2]geom.Point{p, p}, B: [2]geom.Point{a, b}, From: p, To: to, DistanceSq: distance,
		Lacks: max(j.r.Other-have, 1)})
}

// nearest gives the point of a segment that is nearest to p, rounded, and the squared distance, for a report.
func nearest(p, a, b geom.Point) (geom.Point, float64) {
	ux, uy := float64(b.X-a.X), float64(b.Y-a.Y)
	vx, vy := float64(p.X-a.X), float64(p.Y-a.Y)
	n := ux*ux + uy*uy
	if n == 0 {
		return a, vx*vx + vy*vy
	}
	part := min(max((ux*vx+uy*vy)/n, 0), 1)
	foot := geom.Point{X: a.X + int64(math.Round(part*ux)), Y: a.Y + int64(math.Round(part*uy))}
	if part > 0 && part < 1 {
		cross := ux*vy - uy*vx
		return foot, cross * cross / n
	}
	wx, wy := float64(p.X-foot.X), float64(p.Y-foot.Y)
	return foot, wx*wx + wy*wy
}
