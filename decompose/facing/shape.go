package facing

import "maskpair/decompose/geom"

// This file is the outline of one merged shape, in the pieces that rules look at.

// Shape is the outline of a merged shape. It does not change once made, and any number of goroutines may compare it.
type Shape struct {
	box     geom.Rect
	rect    bool   // a single rectangle: box is all there is
	edges   []edge // axis-parallel
	nodes   []node // boxes over edges, where they are many
	shares  []geom.Fraction
	slants  []slant
	corners []corner     // of a shape with slanted edges: where its outline can be nearest to something
	points  []geom.Point // figures without area, by their corners
}

// Box is the bounding box of the shape.
func (s *Shape) Box() geom.Rect { return s.box }

// side tells on which side of an edge the outside lies.
type side uint8

const (
	right side = iota
	above
	left
	below
)

// upright tells whether edges with the outside on this side run along y.
func (s side) upright() bool { return s&1 == 0 }

// opposite is the side across.
func (s side) opposite() side { return s ^ 2 }

// edge is an axis-parallel edge, as long as can be: upright ones at x = at from y = low to y = high, level ones likewise.
//
// Where a slanted edge cuts it, an end may lie between whole numbers: low and high are rounded down, and what is left of them is in
// Shape.shares.
type edge struct {
	at, low, high       int64
	lowShare, highShare int32 // 1 + index into Shape.shares; 0: a whole number
	side                side
	ends                ends
}

// ends says what an edge ends in.
type ends uint8

const (
	lowConvex  ends = 1 << iota // the filled angle at the end is less than 180 degrees
	highConvex                  //
	lowSquare                   // it is 90 degrees, between axis-parallel edges
	highSquare                  //
)

const allSquare = lowConvex | highConvex | lowSquare | highSquare

// tip tells whether the edge is a tip. Ends in convex corners are whole numbers.
func (e *edge) tip(r *Rules) bool {
	return e.ends&(lowConvex|highConvex) == lowConvex|highConvex && r.isTip(e.high-e.low)
}

// box is the least box on whole numbers that holds the edge.
func (e *edge) box() geom.Rect {
	high := e.high
	if e.highShare != 0 {
		high++
	}
	if e.side.upright() {
		return geom.Rect{X1: e.at, Y1: e.low, X2: e.at, Y2: high}
	}
	return geom.Rect{X1: e.low, Y1: e.at, X2: high, Y2: e.at}
}

// segment gives the ends of the edge, rounded.
func (e *edge) segment() [2]geom.Point {
	b := e.box()
	return [2]geom.Point{{X: b.X1, Y: b.Y1}, {X: b.X2, Y: b.Y2}}
}

// lowEnd and highEnd give the ends of an edge of the shape along its line.
func (s *Shape) lowEnd(e *edge) place  { return s.end(e.low, e.lowShare) }
func (s *Shape) highEnd(e *edge) place { return s.end(e.high, e.highShare) }

func (s *Shape) end(whole int64, of int32) place {
	if of == 0 {
		return whole64(whole)
	}
	return place{whole, true, s.shares[of-1]}
}

// Maker makes shapes. It keeps its scratch memory from call to call; the zero value is ready. One goroutine uses it at a time.
type Maker struct {
	merger  geom.Merger
	outline geom.Outline
	slanted slantedMaker
	tidy    []geom.Rect
}

// Rect makes the shape of a single rectangle with area.
func (m *Maker) Rect(dst *Shape, r geom.Rect) {
	dst.reset()
	dst.box, dst.rect = r, true
	dst.edges = append(dst.edges,
		edge{at: r.X2, low: r.Y1, high: r.Y2, side: right, ends: allSquare}, edge{at: r.Y2, low: r.X1, high: r.X2, side: above, ends: allSquare},
		edge{at: r.X1, low: r.Y1, high: r.Y2, side: left, ends: allSquare}, edge{at: r.Y1, low: r.X1, high: r.X2, side: below, ends: allSquare})
}

// Rects makes the shape that rectangles cover together. dst is overwritten, its memory is used again.
func (m *Maker) Rects(dst *Shape, rects []geom.Rect) {
	if len(rects) == 1 && hasArea(rects[0]) {
		m.Rect(dst, rects[0])
		return
	}
	dst.reset()
	dst.box = boxOf(rects)
	m.merger.Merge(&m.outline, m.joined(rects))
	for i := range m.outline.Loops() {
		loop := m.outline.Loop(i)
		for k := range loop {
			next := k + 1
			if next == len(loop) {
				next = 0
			}
			dst.edges = append(dst.edges, between(&loop[k], &loop[next]))
		}
	}
	dst.addPoints(rects)
	dst.rect = len(dst.edges) == 4 && len(dst.points) == 0 && m.outline.Loops() == 1
	dst.index()
}

// Parts makes the shape that rectangles and polygons cover together.
func (m *Maker) Parts(dst *Shape, parts geom.Parts) {
	if len(parts.Polygons) == 0 {
		m.Rects(dst, parts.Rects)
		return
	}
	dst.reset()
	m.slanted.make(dst, parts)
	dst.addPoints(parts.Rects)
	dst.index()
}

// joined gives fewer rectangles that cover the same, where one goes on where the one before it ends, as rails do that are drawn piece by
// piece.
func (m *Maker) joined(rects []geom.Rect) []geom.Rect {
	m.tidy = m.tidy[:0]
	for _, r := range rects {
		if n := len(m.tidy); n > 0 {
			last := &m.tidy[n-1]
			if last.Y1 == r.Y1 && last.Y2 == r.Y2 && last.X1 <= r.X1 && r.X1 <= last.X2 {
				last.X2 = max(last.X2, r.X2)
				continue
			}
			if last.X1 == r.X1 && last.X2 == r.X2 && last.Y1 <= r.Y1 && r.Y1 <= last.Y2 {
				last.Y2 = max(last.Y2, r.Y2)
				continue
			}
		}
		m.tidy = append(m.tidy, r)
	}
	return m.tidy
}

func (s *Shape) reset() {
	*s = Shape{edges: s.edges[:0], nodes: s.nodes[:0], shares: s.shares[:0], slants: s.slants[:0], corners: s.corners[:0], points: s.points[:0]}
}

// between gives the edge from one corner of a merged outline to the next, the filled area on its left.
func between(p, q *geom.Corner) edge {
	var e edge
	var ahead bool
	switch {
	case p.At.X == q.At.X:
		ahead = p.At.Y < q.At.Y
		e = edge{at: p.At.X, low: min(p.At.Y, q.At.Y), high: max(p.At.Y, q.At.Y), side: left}
		if ahead {
			e.side = right
		}
	default:
		ahead = p.At.X < q.At.X
		e = edge{at: p.At.Y, low: min(p.At.X, q.At.X), high: max(p.At.X, q.At.X), side: above}
		if ahead {
			e.side = below
		}
	}
	low, high := p, q
	if !ahead {
		low, high = q, p
	}
	if low.Convex {
		e.ends |= lowConvex | lowSquare
	}
	if high.Convex {
		e.ends |= highConvex | highSquare
	}
	return e
}

// addPoints keeps the corners of rectangles without area: figures that lost it when they were rounded at their place.
func (s *Shape) addPoints(rects []geom.Rect) {
	for _, r := range rects {
		if hasArea(r) {
			continue
		}
		s.points = append(s.points, geom.Point{X: r.X1, Y: r.Y1})
		if r.X1 != r.X2 || r.Y1 != r.Y2 {
			s.points = append(s.points, geom.Point{X: r.X2, Y: r.Y2})
		}
	}
}

func hasArea(r geom.Rect) bool { return r.X1 < r.X2 && r.Y1 < r.Y2 }

func boxOf(rects []geom.Rect) geom.Rect {
	if len(rects) == 0 {
		return geom.Rect{}
	}
	box := rects[0]
	for _, r := range rects[1:] {
		box = box.Union(r)
	}
	return box
}

// fewEdges are looked at one by one.
const fewEdges = 24

// node covers edges[first:end] of a shape; an inner node has its left child next to it.
type node struct {
	box        geom.Rect
	first, end int32
	right      int32 // 0: a leaf
}

const leafEdges = 6

// index puts boxes around many edges. They come loop by loop and along each loop, so that halves of the row, and halves of those, are
// near to each other as they are.
func (s *Shape) index() {
	if len(s.edges) > fewEdges {
		s.split(0, len(s.edges))
	}
}

func (s *Shape) split(first, end int) geom.Rect {
	k := len(s.nodes)
	s.nodes = append(s.nodes, node{first: int32(first), end: int32(end)})
	var box geom.Rect
	if end-first <= leafEdges {
		box = s.edges[first].box()
		for i := first + 1; i < end; i++ {
			box = box.Union(s.edges[i].box())
		}
	} else {
		mid := (first + end) / 2
		box = s.split(first, mid)
		s.nodes[k].right = int32(len(s.nodes))
		box = box.Union(s.split(mid, end))
	}
	s.nodes[k].box = box
	return box
}

func compare(a, b int64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// within appends the edges whose boxes meet a box.
func (s *Shape) within(dst []*edge, box geom.Rect) []*edge {
	if len(s.nodes) == 0 {
		return appendMeeting(dst, s.edges, box)
	}
	return s.descend(dst, 0, box)
}

func (s *Shape) descend(dst []*edge, k int32, box geom.Rect) []*edge {
	n := &s.nodes[k]
	if !n.box.Meets(box) {
		return dst
	}
	if n.right == 0 {
		return appendMeeting(dst, s.edges[n.first:n.end], box)
	}
	return s.descend(s.descend(dst, k+1, box), n.right, box)
}

func appendMeeting(dst []*edge, edges []edge, box geom.Rect) []*edge {
	for i := range edges {
		if edges[i].box().Meets(box) {
			dst = append(dst, &edges[i])
		}
	}
	return dst
}

// grown is a box with a margin all round.
func grown(r geom.Rect, by int64) geom.Rect {
	return geom.Rect{X1: r.X1 - by, Y1: r.Y1 - by, X2: r.X2 + by, Y2: r.Y2 + by}
}
