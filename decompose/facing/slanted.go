package facing

import (
	"slices"

	"maskpair/decompose/geom"
)

// This file makes the outline of a shape that has slanted edges.
//
// Each edge of each figure is followed from end to end, just left of it and just right of it, counting how often every figure that is
// near winds around: an edge of a figure changes its count where it crosses. So the edge falls into pieces, at most at the crossings
// and corners of figures on it, and a piece is outline exactly where one side of it is filled and the other is not. Places on the
// edge are exact fractions of the way along it.
//
// Where pieces end in a corner of a figure they are matched, so that the filled angle there is known. Where they end in the crossing of
// two edges, the filled angle is more than 180 degrees: both figures are there, and neither edge ends. Nothing is nearest there.

// slant is a piece of a slanted edge: the part from one place to another of the way from a to b, filled on its left.
type slant struct {
	a, b     geom.Point
	from, to geom.Fraction
}

// corner is a corner of an outline with a filled angle of at most 180 degrees: of the edges that come in and go out the directions, the
// filled area on the left of both.
type corner struct {
	at, in, out geom.Point
	square      bool // 90 degrees between axis-parallel edges
}

// slantedMaker is the scratch memory for outlines with slanted edges.
type slantedMaker struct {
	figures []figure
	lines   []line
	near    []int32 // figures whose boxes meet that of the edge at hand
	wind    [][2]int32
	events  []event
	mates   []mate
	pieces  []outlinePiece
	tips    []pieceEnd
	next    []int32
	joint   []joint
	open    []int32 // figures in the scan, by right side
	meeting [][]int32
}

// figure is one figure of a shape: lines[first:end] are its edges.
type figure struct {
	box        geom.Rect
	first, end int32
	polygon    *geom.Polygon // nil: a rectangle
}

func (f *figure) full(wind int32) bool {
	if f.polygon != nil {
		return f.polygon.Full(wind)
	}
	return wind != 0
}

// line is an edge of a figure; the winding number changes by w across it.
type line struct {
	a, b geom.Point
	w    int32
}

// event is a place on an edge where the winding number of a figure changes, left of the edge and right of it.
type event struct {
	at          geom.Fraction
	figure      int32 // index into near
	left, right int32
	corner      geom.Point
	known       bool // corner is the place
}

// mate is an edge on the same line as another.
type mate struct{ from, to geom.Fraction }

// outlinePiece is a piece of an edge that is outline, filled on its left.
type outlinePiece struct {
	slant
	start, end     geom.Point
	starts, endsIn bool // start and end are known: a corner of a figure
}

func (p *outlinePiece) way() geom.Point { return geom.Point{X: p.b.X - p.a.X, Y: p.b.Y - p.a.Y} }
func (p *outlinePiece) axisParallel() bool {
	return p.a.X == p.b.X || p.a.Y == p.b.Y
}

// pieceEnd is an end of a piece in a known corner.
type pieceEnd struct {
	at    geom.Point
	piece int32
	out   bool
	away  geom.Point // direction of the piece as seen from the corner
}

// joint tells how the piece goes on that comes in.
type joint uint8

const (
	unknown joint = iota
	concave
	straight
	convex
	squareJoint
)

func (m *slantedMaker) make(dst *Shape, parts geom.Parts) {
	m.gather(dst, parts)
	m.meet()
	m.pieces = m.pieces[:0]
	for i := range m.figures {
		for k := m.figures[i].first; k < m.figures[i].end; k++ {
			m.follow(int32(i), k)
		}
	}
	m.match()
	m.assemble(dst)
}

// gather lists the figures and their edges, in the plane.
func (m *slantedMaker) gather(dst *Shape, parts geom.Parts) {
	m.figures, m.lines = m.figures[:0], m.lines[:0]
	for _, r := range parts.Rects {
		if len(m.figures) == 0 {
			dst.box = r
		}
		dst.box = dst.box.Union(r)
		if !hasArea(r) {
			continue
		}
		first := int32(len(m.lines))
		c := [4]geom.Point{{X: r.X1, Y: r.Y1}, {X: r.X2, Y: r.Y1}, {X: r.X2, Y: r.Y2}, {X: r.X1, Y: r.Y2}}
		for k := range c {
			m.lines = append(m.lines, line{c[k], c[(k+1)%4], 1})
		}
		m.figures = append(m.figures, figure{r, first, int32(len(m.lines)), nil})
	}
	for _, p := range parts.Polygons {
		box := p.At.ApplyRect(p.Polygon.Box())
		if len(m.figures) == 0 && len(parts.Rects) == 0 {
			dst.box = box
		}
		dst.box = dst.box.Union(box)
		first := int32(len(m.lines))
		p.Polygon.Winding(func(a, b geom.Point, w int32) bool {
			m.lines = append(m.lines, line{p.At.Apply(a), p.At.Apply(b), w})
			return true
		})
		m.figures = append(m.figures, figure{box, first, int32(len(m.lines)), p.Polygon})
	}
}

// meet finds the figures whose boxes meet.
func (m *slantedMaker) meet() {
	n := len(m.figures)
	order := make([]int32, n)
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(i, k int32) int { return compare(m.figures[i].box.X1, m.figures[k].box.X1) })
	m.meeting = make([][]int32, n)
	m.open = m.open[:0]
	for _, i := range order {
		f := &m.figures[i]
		m.open = slices.DeleteFunc(m.open, func(k int32) bool { return m.figures[k].box.X2 < f.box.X1 })
		for _, k := range m.open {
			if m.figures[k].box.Meets(f.box) {
				m.meeting[i] = append(m.meeting[i], k)
				m.meeting[k] = append(m.meeting[k], i)
			}
		}
		m.open = append(m.open, i)
		m.meeting[i] = append(m.meeting[i], i)
	}
}

// follow cuts an edge of figure i into pieces and keeps those that are outline.
func (m *slantedMaker) follow(i, k int32) {
	e := m.lines[k]
	box := geom.Rect{X1: min(e.a.X, e.b.X), Y1: min(e.a.Y, e.b.Y), X2: max(e.a.X, e.b.X), Y2: max(e.a.Y, e.b.Y)}
	m.near, m.events, m.mates, m.wind = m.near[:0], m.events[:0], m.mates[:0], m.wind[:0]
	for _, j := range m.meeting[i] {
		if m.figures[j].box.Meets(box) {
			m.near = append(m.near, j)
			m.wind = append(m.wind, [2]int32{})
			m.cross(k, e, int32(len(m.near)-1))
		}
	}
	begin, end := geom.WholeFraction(0), geom.WholeFraction(1)
	slices.SortFunc(m.events, func(p, q event) int { return p.at.Compare(q.at) })
	at := 0
	for ; at < len(m.events) && m.events[at].at.Compare(begin) <= 0; at++ {
		m.apply(&m.events[at])
	}
	from := outlinePiece{slant: slant{a: e.a, b: e.b, from: begin}, start: e.a, starts: true}
	for at < len(m.events) && m.events[at].at.Compare(end) < 0 {
		here := m.events[at].at
		m.piece(from, here)
		from.from, from.starts = here, false
		for ; at < len(m.events) && m.events[at].at.Compare(here) == 0; at++ {
			ev := &m.events[at]
			m.apply(ev)
			if ev.known {
				from.start, from.starts = ev.corner, true
			}
		}
		m.endAt(from)
	}
	m.piece(from, end)
	last := from
	last.from, last.start, last.starts = end, e.b, true
	m.endAt(last)
}

func (m *slantedMaker) apply(ev *event) {
	m.wind[ev.figure][0] += ev.left
	m.wind[ev.figure][1] += ev.right
}

// cross finds where the edges of a figure cross edge e, drawn out to a line, just left and just right of it: a corner on the line
// counts as right of what is just left of it, and the other way round.
func (m *slantedMaker) cross(number int32, e line, near int32) {
	f := &m.figures[m.near[near]]
	for k := f.first; k < f.end; k++ {
		g := m.lines[k]
		c, d := geom.Orient(e.a, e.b, g.a), geom.Orient(e.a, e.b, g.b)
		if c == 0 && d == 0 {
			m.alongside(number, k, e, g, near)
			continue
		}
		ev := event{figure: near}
		if (c > 0) != (d > 0) {
			ev.left = turnOf(g.w, d > 0)
		}
		if (c < 0) != (d < 0) {
			ev.right = turnOf(g.w, c < 0)
		}
		if ev.left|ev.right == 0 {
			continue
		}
		ev.at = geom.Crossing(e.a, e.b, g.a, g.b)
		switch {
		case c == 0:
			ev.corner, ev.known = g.a, true
		case d == 0:
			ev.corner, ev.known = g.b, true
		}
		m.events = append(m.events, ev)
	}
}

// turnOf gives the change of a winding number on the way along a line that an edge crosses, to the left of the line or not.
func turnOf(w int32, toLeft bool) int32 {
	if toLeft {
		return -w
	}
	return w
}

// alongside notes an edge on the line of another: the pieces that both have are kept once, with the first of them.
func (m *slantedMaker) alongside(number, k int32, e, g line, near int32) {
	if k == number {
		return
	}
	from, to := geom.Foot(g.a, e.a, e.b), geom.Foot(g.b, e.a, e.b)
	m.events = append(m.events, event{at: from, figure: near, corner: g.a, known: true}, event{at: to, figure: near, corner: g.b, known: true})
	if k > number {
		return
	}
	if from.Compare(to) > 0 {
		from, to = to, from
	}
	m.mates = append(m.mates, mate{from, to})
}

// piece keeps the piece that begins as told and ends at a place, if it is outline. Its end is not known yet.
func (m *slantedMaker) piece(p outlinePiece, to geom.Fraction) {
	var full [2]bool
	for k, j := range m.near {
		for s := range full {
			full[s] = full[s] || m.figures[j].full(m.wind[k][s])
		}
	}
	if full[0] == full[1] || slices.ContainsFunc(m.mates, func(t mate) bool { return t.from.Compare(p.from) <= 0 && t.to.Compare(to) >= 0 }) {
		return
	}
	p.to = to
	if full[1] {
		p.a, p.b, p.from, p.to = p.b, p.a, p.to.Rest(), p.from.Rest()
		p.start, p.starts, p.end, p.endsIn = p.end, p.endsIn, p.start, p.starts
	}
	m.pieces = append(m.pieces, p)
}

// endAt tells the last piece that it ends where the next one begins; where that is no corner of a figure, the two are one.
func (m *slantedMaker) endAt(next outlinePiece) {
	if len(m.pieces) == 0 {
		return
	}
	p := &m.pieces[len(m.pieces)-1]
	switch {
	case p.a == next.a && p.b == next.b && p.to.Compare(next.from) == 0 && !p.endsIn:
		p.end, p.endsIn = next.start, next.starts
	case p.a == next.b && p.b == next.a && p.from.Compare(next.from.Rest()) == 0 && !p.starts:
		p.start, p.starts = next.start, next.starts
	}
}

// match finds, for each piece that ends in a known corner, the one that goes on from it, and the filled angle between them.
func (m *slantedMaker) match() {
	n := len(m.pieces)
	m.next, m.joint, m.tips = m.next[:0], m.joint[:0], m.tips[:0]
	for i := range n {
		p := &m.pieces[i]
		m.next, m.joint = append(m.next, -1), append(m.joint, unknown)
		way := p.way()
		if p.starts {
			m.tips = append(m.tips, pieceEnd{p.start, int32(i), true, way})
		}
		if p.endsIn {
			m.tips = append(m.tips, pieceEnd{p.end, int32(i), false, geom.Point{X: -way.X, Y: -way.Y}})
		}
	}
	slices.SortFunc(m.tips, func(p, q pieceEnd) int { return comparePoints(p.at, q.at) })
	for i := 0; i < len(m.tips); {
		k := i + 1
		for k < len(m.tips) && m.tips[k].at == m.tips[i].at {
			k++
		}
		m.matchAt(m.tips[i:k])
		i = k
	}
}

// matchAt matches the pieces of one corner. Filled is what lies counter-clockwise of a piece that goes out, up to the next that comes in.
func (m *slantedMaker) matchAt(tips []pieceEnd) {
	for _, out := range tips {
		if !out.out {
			continue
		}
		best := -1
		for k, in := range tips {
			if !in.out && (best < 0 || sooner(out.away, in.away, tips[best].away)) {
				best = k
			}
		}
		if best < 0 {
			continue
		}
		in := tips[best]
		m.next[in.piece] = out.piece
		m.joint[in.piece] = jointOf(out.away, in.away, m.pieces[in.piece].axisParallel() && m.pieces[out.piece].axisParallel())
	}
}

// jointOf names the filled angle from one direction counter-clockwise to another.
func jointOf(out, in geom.Point, axisParallel bool) joint {
	switch cross, dot := crossSign(out, in), dotSign(out, in); {
	case cross > 0 && axisParallel:
		return squareJoint
	case cross > 0:
		return convex
	case cross == 0 && dot < 0:
		return straight
	}
	return concave
}

// sooner tells whether p comes before q on the way counter-clockwise from a direction; the direction itself comes last.
func sooner(from, p, q geom.Point) bool {
	hp, hq := half(from, p), half(from, q)
	if hp != hq {
		return hp < hq
	}
	return crossSign(p, q) > 0
}

// half is 0 to less than half a turn from a direction, 1 to less than a full turn, 2 for the direction itself.
func half(from, p geom.Point) int {
	switch cross := crossSign(from, p); {
	case cross > 0:
		return 0
	case cross == 0 && dotSign(from, p) > 0:
		return 2
	}
	return 1
}

// crossSign and dotSign are the signs of the cross and the dot product of two differences of points.
func crossSign(u, v geom.Point) int { return geom.Orient(geom.Point{}, u, v) }
func dotSign(u, v geom.Point) int {
	return geom.Orient(geom.Point{}, u, geom.Point{X: -v.Y, Y: v.X})
}

// assemble makes the shape of the pieces.
func (m *slantedMaker) assemble(dst *Shape) {
	goesOn := make([]bool, len(m.pieces)) // an axis-parallel piece that goes on one before it
	before := make([]joint, len(m.pieces))
	for i := range m.pieces {
		p, next := &m.pieces[i], m.next[i]
		if next < 0 {
			continue
		}
		before[next] = m.joint[i]
		q := &m.pieces[next]
		switch j := m.joint[i]; {
		case j == straight && p.axisParallel():
			goesOn[next] = true
		case j == straight || j == convex:
			dst.corners = append(dst.corners, corner{at: p.end, in: p.way(), out: q.way()})
		}
	}
	for i := range m.pieces {
		p := &m.pieces[i]
		if !p.axisParallel() {
			dst.slants = append(dst.slants, p.slant)
			continue
		}
		if goesOn[i] {
			continue
		}
		last := int32(i)
		for m.joint[last] == straight && m.next[last] >= 0 {
			last = m.next[last]
		}
		dst.addEdge(p, &m.pieces[last], before[i], m.joint[last])
	}
}

// addEdge adds the axis-parallel edge from the start of one piece to the end of another, with the joints at both.
func (s *Shape) addEdge(p, q *outlinePiece, at, to joint) {
	way := p.way()
	upright := way.X == 0
	var e edge
	switch {
	case upright && way.Y > 0:
		e = edge{at: p.a.X, side: right}
	case upright:
		e = edge{at: p.a.X, side: left}
	case way.X > 0:
		e = edge{at: p.a.Y, side: below}
	default:
		e = edge{at: p.a.Y, side: above}
	}
	end := func(r *outlinePiece, part geom.Fraction, known bool, corner geom.Point) place {
		switch {
		case known && upright:
			return whole64(corner.Y)
		case known:
			return whole64(corner.X)
		case upright:
			return along(part, r.a.Y, r.b.Y)
		}
		return along(part, r.a.X, r.b.X)
	}
	low, high := end(p, p.from, p.starts, p.start), end(q, q.to, q.endsIn, q.end)
	if high.less(low) {
		low, high, at, to = high, low, to, at
	}
	e.low, e.lowShare = s.keep(low)
	e.high, e.highShare = s.keep(high)
	if at >= convex {
		e.ends |= lowConvex
	}
	if at == squareJoint {
		e.ends |= lowSquare
	}
	if to >= convex {
		e.ends |= highConvex
	}
	if to == squareJoint {
		e.ends |= highSquare
	}
	s.edges = append(s.edges, e)
}

// keep stores what is left of a place.
func (s *Shape) keep(p place) (whole int64, share int32) {
	if !p.between {
		return p.whole, 0
	}
	s.shares = append(s.shares, p.rest)
	return p.whole, int32(len(s.shares))
}

// across gives the part of an edge's line from which a slanted piece keeps a square: its projection, as far as it lies in the inside of a
// strip along x = inner to outer (upright) or y.
func (t *slant) across(upright bool, inner, outer int64) (barrier, bool) {
	a, b := t.a, t.b
	if !upright {
		a, b = turned(a), turned(b)
	}
	from, to := t.from, t.to
	in := geom.Crossing(a, b, geom.Point{X: inner}, geom.Point{X: inner, Y: 1})
	out := geom.Crossing(a, b, geom.Point{X: outer}, geom.Point{X: outer, Y: 1})
	if in.Compare(out) > 0 {
		in, out = out, in
	}
	if in.Compare(from) > 0 {
		from = in
	}
	if out.Compare(to) < 0 {
		to = out
	}
	if from.Compare(to) >= 0 {
		return barrier{}, false
	}
	p, q := along(from, a.Y, b.Y), along(to, a.Y, b.Y)
	return barrier{minPlace(p, q), maxPlace(p, q)}, true
}

// turned exchanges x and y.
func turned(p geom.Point) geom.Point { return geom.Point{X: p.Y, Y: p.X} }
