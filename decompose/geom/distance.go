package geom

import (
	"cmp"
	"math"
	"slices"
)

// This file finds where two shapes come nearest, for reports. It decides nothing: near or far is settled by the exact
// relations. Two trees of boxes are walked together, nearest boxes first, past all that is farther than the best so far.

// Closest gives points of a and b that come nearest, and their squared distance.
//
// The points are rounded to whole units where slanted edges take part. Where rectangles face each other, they lie in the
// middle of what faces. Of several places the one with the least from, then to (by x, then y) is given, so the answer does
// not depend on the order of the parts. The distance is exact but for the rounding to a float where only rectangles take
// part, else good to 15 digits; it is 0 where a and b touch. If a or b has no parts the distance is infinite.
func Closest(a, b Parts) (from, to Point, distanceSq float64) {
	s := search{distance: math.Inf(1)}
	if len(a.Polygons)+len(b.Polygons) == 0 && len(a.Rects)*len(b.Rects) <= fewPairs {
		for _, p := range a.Rects {
			for _, q := range b.Rects {
				s.rects(p, q)
			}
		}
		return s.from, s.to, s.distance
	}
	s.a.add(a)
	s.b.add(b)
	if len(s.a.items) > 0 && len(s.b.items) > 0 {
		s.a.build(0, len(s.a.items))
		s.b.build(0, len(s.b.items))
		s.nodes(0, 0)
	}
	return s.from, s.to, s.distance
}

// fewPairs is up to how many pairs of rectangles are all compared: trees would cost more.
const fewPairs = 64

// part is a rectangle, or a band of a placed polygon.
type part struct {
	box  Rect
	poly *Polygon // nil: a rectangle
	band int32
	at   Placement
}

// node covers items[first:end]; an inner node has its left child next to it.
type node struct {
	box        Rect
	first, end int32
	right      int32 // 0: a leaf
}

type tree struct {
	items []part
	nodes []node
}

func (t *tree) add(parts Parts) {
	for _, r := range parts.Rects {
		t.items = append(t.items, part{box: r})
	}
	for _, p := range parts.Polygons {
		for i, b := range p.Polygon.bands {
			t.items = append(t.items, part{p.At.ApplyRect(b.Box), p.Polygon, int32(i), p.At})
		}
	}
}

const leafItems = 4

func (t *tree) build(first, end int) {
	box := t.items[first].box
	for _, it := range t.items[first+1 : end] {
		box = box.Union(it.box)
	}
	k := len(t.nodes)
	t.nodes = append(t.nodes, node{box, int32(first), int32(end), 0})
	if end-first <= leafItems {
		return
	}
	tall := box.Y2-box.Y1 > box.X2-box.X1
	slices.SortFunc(t.items[first:end], func(a, b part) int {
		if tall {
			return cmp.Compare(a.box.Y1+a.box.Y2, b.box.Y1+b.box.Y2)
		}
		return cmp.Compare(a.box.X1+a.box.X2, b.box.X1+b.box.X2)
	})
	mid := (first + end) / 2
	t.build(first, mid)
	t.nodes[k].right = int32(len(t.nodes))
	t.build(mid, end)
}

type search struct {
	a, b     tree
	from, to Point
	distance float64
}

// gapSq is the squared distance of two boxes; exact up to the rounding, for each gap is below 2^36.
func gapSq(a, b Rect) float64 {
	dx, dy := RectGap(a, b)
	return mul(dx, dx).add(mul(dy, dy)).float()
}

func (s *search) nodes(i, j int32) {
	p, q := &s.a.nodes[i], &s.b.nodes[j]
	if gapSq(p.box, q.box) > s.distance {
		return
	}
	if p.right == 0 && q.right == 0 {
		for k := p.first; k < p.end; k++ {
			for l := q.first; l < q.end; l++ {
				s.parts(&s.a.items[k], &s.b.items[l])
			}
		}
		return
	}
	// Open the larger one, and go to its nearer child first.
	if q.right == 0 || p.right != 0 && p.end-p.first >= q.end-q.first {
		near, far := i+1, p.right
		if gapSq(s.a.nodes[far].box, q.box) < gapSq(s.a.nodes[near].box, q.box) {
			near, far = far, near
		}
		s.nodes(near, j)
		s.nodes(far, j)
		return
	}
	near, far := j+1, q.right
	if gapSq(p.box, s.b.nodes[far].box) < gapSq(p.box, s.b.nodes[near].box) {
		near, far = far, near
	}
	s.nodes(i, near)
	s.nodes(i, far)
}

// offer takes a pair of points if it is better than the best.
func (s *search) offer(from, to Point, distance float64) {
	if distance > s.distance {
		return
	}
	if distance < s.distance || cmp.Or(sideways(from, s.from), sideways(to, s.to)) < 0 {
		s.from, s.to, s.distance = from, to, distance
	}
}

func sideways(p, q Point) int {
	return cmp.Or(cmp.Compare(p.X, q.X), cmp.Compare(p.Y, q.Y))
}

// rects offers the nearest points of two rectangles.
func (s *search) rects(p, q Rect) {
	if distance := gapSq(p, q); distance <= s.distance {
		fx, tx := facing(p.X1, p.X2, q.X1, q.X2)
		fy, ty := facing(p.Y1, p.Y2, q.Y1, q.Y2)
		s.offer(Point{fx, fy}, Point{tx, ty}, distance)
	}
}

func (s *search) parts(p, q *part) {
	if p.poly == nil && q.poly == nil {
		s.rects(p.box, q.box)
		return
	}
	if gapSq(p.box, q.box) > s.distance {
		return
	}
	p.segments(func(a, b Point) {
		if gapSq(boxOfSegment(a, b), q.box) > s.distance {
			return
		}
		q.segments(func(c, d Point) {
			if gapSq(boxOfSegment(a, b), boxOfSegment(c, d)) <= s.distance {
				s.segments(a, b, c, d)
			}
		})
	})
	if s.distance > 0 && p.box.Meets(q.box) {
		q.within(func(w Point) {
			if p.contains(w) {
				s.offer(w, w, 0)
			}
		})
		p.within(func(w Point) {
			if q.contains(w) {
				s.offer(w, w, 0)
			}
		})
	}
}

// facing gives the nearest numbers of two intervals; the middle of what they have in common, if they meet.
func facing(a1, a2, b1, b2 int64) (from, to int64) {
	switch {
	case a2 < b1:
		return a2, b1
	case b2 < a1:
		return a1, b2
	}
	mid := (max(a1, b1) + min(a2, b2)) >> 1
	return mid, mid
}

func boxOfSegment(a, b Point) Rect {
	return Rect{min(a.X, b.X), min(a.Y, b.Y), max(a.X, b.X), max(a.Y, b.Y)}
}

// segments gives the edges of a part, in the plane.
func (p *part) segments(yield func(a, b Point)) {
	if p.poly == nil {
		c := [4]Point{{p.box.X1, p.box.Y1}, {p.box.X2, p.box.Y1}, {p.box.X2, p.box.Y2}, {p.box.X1, p.box.Y2}}
		for i := range c {
			yield(c[i], c[(i+1)%4])
		}
		return
	}
	at, band := p.poly.frame(p.at), &p.poly.bands[p.band]
	for _, k := range p.poly.lists[band.first:band.end] {
		e := &p.poly.edges[k]
		yield(at.Apply(e.a), at.Apply(e.b))
	}
}

// within gives points of the part such that one lies in the other figure if the figures overlap and no edges meet.
func (p *part) within(yield func(w Point)) {
	if p.poly == nil {
		yield(Point{p.box.X1, p.box.Y1})
		return
	}
	at, band := p.poly.frame(p.at), &p.poly.bands[p.band]
	for _, w := range p.poly.within[band.firstIn:band.afterIn] {
		yield(at.Apply(w))
	}
}

func (p *part) contains(w Point) bool {
	return p.box.Contains(w) && (p.poly == nil || p.poly.holds(int(p.band), p.poly.frame(p.at).Inverse().Apply(w)))
}

// segments offers the nearest points of the segments ab (of shape a) and cd (of shape b).
func (s *search) segments(a, b, c, d Point) {
	if SegmentsMeet(a, b, c, d) {
		m := meetingPoint(a, b, c, d)
		s.offer(m, m, 0)
		return
	}
	for _, p := range [2]Point{a, b} {
		foot, distance := nearest(p, c, d)
		s.offer(p, foot, distance)
	}
	for _, p := range [2]Point{c, d} {
		foot, distance := nearest(p, a, b)
		s.offer(foot, p, distance)
	}
}

// nearest gives the point of the segment ab that is nearest to p, rounded, and the squared distance.
func nearest(p, a, b Point) (Point, float64) {
	ux, uy, vx, vy := b.X-a.X, b.Y-a.Y, p.X-a.X, p.Y-a.Y
	n, t := mul(ux, ux).add(mul(uy, uy)), mul(ux, vx).add(mul(uy, vy))
	switch {
	case t.sign() <= 0:
		return a, mul(vx, vx).add(mul(vy, vy)).float()
	case t.sub(n).sign() >= 0:
		wx, wy := p.X-b.X, p.Y-b.Y
		return b, mul(wx, wx).add(mul(wy, wy)).float()
	}
	c := mul(ux, vy).sub(mul(uy, vx)).float()
	share := t.float() / n.float()
	return partway(a, ux, uy, share), c / n.float() * c
}

// meetingPoint gives a common point of two segments that meet, rounded.
func meetingPoint(a, b, c, d Point) Point {
	ux, uy, vx, vy := b.X-a.X, b.Y-a.Y, d.X-c.X, d.Y-c.Y
	den := mul(ux, vy).sub(mul(uy, vx))
	if den.sign() == 0 { // on one line: an end of one lies on the other
		for _, p := range [2]Point{c, d} {
			if SegmentsMeet(a, b, p, p) {
				return p
			}
		}
		return a
	}
	wx, wy := c.X-a.X, c.Y-a.Y
	return partway(a, ux, uy, mul(wx, vy).sub(mul(wy, vx)).float()/den.float())
}

// partway is a + share*(ux, uy), rounded.
func partway(a Point, ux, uy int64, share float64) Point {
	return Point{a.X + int64(math.Round(share*float64(ux))), a.Y + int64(math.Round(share*float64(uy)))}
}
