package facing

import (
	"slices"

	"maskpair/decompose/geom"
)

// This file finds where a shape comes near to itself: notches, and gaps between parts that hang together elsewhere. The places are those
// of the package, within one outline, but only where nothing of the shape itself lies between.

// SelfPlace is a place where a shape is nearer to itself than a spacing.
type SelfPlace struct {
	A, B       [2]geom.Point // the edges, as in Approach
	From, To   geom.Point
	DistanceSq float64
	Notch      bool // the edges are joined by one edge across, the bottom of a notch
}

// NearSelf gives the places where the shape is nearer to itself than a spacing, by From and To.
func (s *Shape) NearSelf(spacing int64) []SelfPlace {
	if s.rect {
		return nil
	}
	n := selfSearch{s: s, spacing: spacing}
	for i := range s.edges {
		e := &s.edges[i]
		if e.side < left {
			n.facing(e)
		}
		if e.side == right {
			n.corners(e)
		}
	}
	if len(s.slants) > 0 {
		n.slanted()
	}
	slices.SortFunc(n.found, func(p, q SelfPlace) int {
		if c := comparePoints(p.From, q.From); c != 0 {
			return c
		}
		return comparePoints(p.To, q.To)
	})
	return n.found
}

type selfSearch struct {
	s       *Shape
	spacing int64
	found   []SelfPlace
	list    []*edge
}

// facing finds the edges that edge e faces, from near to far. Outwards of an edge comes outside, and the next edge there faces back; so
// an edge is seen where no nearer one is.
func (n *selfSearch) facing(e *edge) {
	box := e.box()
	if e.side == right {
		box.X2 += n.spacing
	} else {
		box.Y2 += n.spacing
	}
	n.list = n.list[:0]
	for _, f := range n.s.within(nil, box) {
		if f.side == e.side.opposite() && f.at > e.at && f.at-e.at < n.spacing {
			n.list = append(n.list, f)
		}
	}
	slices.SortFunc(n.list, func(f, g *edge) int {
		if c := compare(f.at, g.at); c != 0 {
			return c
		}
		return compare(f.low, g.low)
	})
	var seen []barrier
	low, high := n.s.lowEnd(e), n.s.highEnd(e)
	for _, f := range n.list {
		from, to := maxPlace(low, n.s.lowEnd(f)), minPlace(high, n.s.highEnd(f))
		if !from.less(to) {
			continue
		}
		parts := leftOver(seen, from, to)
		seen = append(seen, barrier{from, to})
		if len(parts) == 0 {
			continue
		}
		mid := parts[0].from.whole + (parts[0].to.whole-parts[0].from.whole)/2
		p, q := geom.Point{X: e.at, Y: mid}, geom.Point{X: f.at, Y: mid}
		if !e.side.upright() {
			p, q = turned(p), turned(q)
		}
		gap := f.at - e.at
		n.found = append(n.found, SelfPlace{A: e.segment(), B: f.segment(), From: p, To: q, DistanceSq: float64(gap) * float64(gap), Notch: n.notch(e, f)})
	}
}

// leftOver gives the parts of a stretch that no barrier covers.
func leftOver(seen []barrier, from, to place) []barrier {
	parts := []barrier{{from, to}}
	for _, b := range seen {
		var next []barrier
		for _, p := range parts {
			if !b.from.less(p.to) || !p.from.less(b.to) {
				next = append(next, p)
				continue
			}
			if p.from.less(b.from) {
				next = append(next, barrier{p.from, b.from})
			}
			if b.to.less(p.to) {
				next = append(next, barrier{b.to, p.to})
			}
		}
		parts = next
	}
	return parts
}

// notch tells whether one edge across joins two edges that face each other.
func (n *selfSearch) notch(e, f *edge) bool {
	for _, end := range [2]int64{max(e.low, f.low), min(e.high, f.high)} {
		box := geom.Rect{X1: e.at, Y1: end, X2: f.at, Y2: end}
		if !e.side.upright() {
			box = geom.Rect{X1: end, Y1: e.at, X2: end, Y2: f.at}
		}
		for _, g := range n.s.within(nil, box) {
			if g.side.upright() != e.side.upright() && g.at == end && g.low == e.at && g.high == f.at && g.ends == 0 {
				return true
			}
		}
	}
	return false
}

// corners finds the corners that the corners of an edge with the outside on its right look at.
func (n *selfSearch) corners(e *edge) {
	for _, f := range n.s.within(nil, grown(e.box(), n.spacing)) {
		if f.side != left || f.at < e.at {
			continue
		}
		var y1, y2 int64
		switch {
		case f.low >= e.high && e.ends&highSquare != 0 && f.ends&lowSquare != 0:
			y1, y2 = e.high, f.low
		case e.low >= f.high && e.ends&lowSquare != 0 && f.ends&highSquare != 0:
			y1, y2 = e.low, f.high
		default:
			continue
		}
		dx, dy := f.at-e.at, max(y1-y2, y2-y1)
		p, q := geom.Point{X: e.at, Y: y1}, geom.Point{X: f.at, Y: y2}
		if dx|dy == 0 || !shorter(dx, dy, n.spacing) || n.between(p, q, [2]geom.Point{}) {
			continue
		}
		n.found = append(n.found, SelfPlace{A: [2]geom.Point{p, p}, B: [2]geom.Point{q, q}, From: p, To: q, DistanceSq: float64(dx)*float64(dx) + float64(dy)*float64(dy)})
	}
}

// between tells whether an edge of the shape, other than the one on which the way ends, crosses the way between two of its points.
func (n *selfSearch) between(p, q geom.Point, last [2]geom.Point) bool {
	box := geom.Rect{X1: min(p.X, q.X), Y1: min(p.Y, q.Y), X2: max(p.X, q.X), Y2: max(p.Y, q.Y)}
	crosses := func(a, b geom.Point) bool {
		return [2]geom.Point{a, b} != last && geom.SegmentsMeet(p, q, a, b) && !geom.SegmentsMeet(p, p, a, b) && !geom.SegmentsMeet(q, q, a, b)
	}
	for _, g := range n.s.within(nil, box) {
		if ends := g.segment(); crosses(ends[0], ends[1]) {
			return true
		}
	}
	return slices.ContainsFunc(n.s.slants, func(t slant) bool { return crosses(t.a, t.b) })
}

// slanted finds the places where a slanted edge takes part.
func (n *selfSearch) slanted() {
	j := judge{r: &Rules{Other: n.spacing}, a: n.s, b: n.s, all: true}
	keep := func() {
		if j.found && !n.between(j.best.From, j.best.To, j.best.B) {
			b := &j.best
			n.found = append(n.found, SelfPlace{A: b.A, B: b.B, From: b.From, To: b.To, DistanceSq: b.DistanceSq})
		}
		j.found, j.best = false, Approach{}
	}
	corners := n.s.cornersIn(n.s.box)
	for i := range corners {
		c := &corners[i]
		around := grown(geom.Rect{X1: c.at.X, Y1: c.at.Y, X2: c.at.X, Y2: c.at.Y}, n.spacing)
		for k := range n.s.slants {
			j.cornerAndSlant(c, &n.s.slants[k], around)
			keep()
		}
		if !c.square {
			for _, e := range n.s.within(nil, around) {
				j.cornerAndEdge(c, n.s, e)
				keep()
			}
		}
		for k := range i {
			j.twoCorners(&corners[k], c)
			keep()
		}
	}
}
