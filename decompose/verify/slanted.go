package verify

import (
	"math/big"
	"slices"

	"maskpair/decompose/geom"
)

// This file is the rule by what faces what where slanted edges are near. The outline of a piece in a window is found edge by
// edge: an edge of a figure is cut where others meet it, and a part of it is outline exactly where one side of it is filled
// and the other is not. Places on edges are fractions. It is as simple as can be, not fast: slanted edges are rare.
//
// What is no facing of axis-parallel edges and no meeting of square corners is judged where the outlines come nearest, each
// point the nearest of its neighbourhood to the other, by the plain spacing. That is a corner of less than 180 degrees and
// another, or the foot on an edge, such that from a corner no step along its two edges leads nearer. Of the places in which
// two edges face each other the kinds of the edges judge already.

// spot is a place as fractions.
type spot struct{ x, y *big.Rat }

func whole(p geom.Point) spot {
	return spot{new(big.Rat).SetInt64(p.X), new(big.Rat).SetInt64(p.Y)}
}

func (s spot) key() string { return s.x.RatString() + " " + s.y.RatString() }

// dot gives (s - p) * d.
func (s spot) dot(p geom.Point, d geom.Point) *big.Rat {
	x := new(big.Rat).Sub(s.x, new(big.Rat).SetInt64(p.X))
	y := new(big.Rat).Sub(s.y, new(big.Rat).SetInt64(p.Y))
	return x.Add(x.Mul(x, new(big.Rat).SetInt64(d.X)), y.Mul(y, new(big.Rat).SetInt64(d.Y)))
}

func vector(a, b geom.Point) geom.Point { return geom.Point{X: b.X - a.X, Y: b.Y - a.Y} }

// crossSign and dotSign are the signs of the products of two vectors.
func crossSign(u, v geom.Point) int { return geom.Orient(geom.Point{}, u, v) }
func dotSign(u, v geom.Point) int   { return geom.Orient(geom.Point{}, u, geom.Point{X: -v.Y, Y: v.X}) }

func back(v geom.Point) geom.Point { return geom.Point{X: -v.X, Y: -v.Y} }

// strand is a part of the outline of a piece, straight, filled on its left.
type strand struct {
	from, to spot
	a, b     geom.Point // the edge of a figure on which it lies, in its direction
	next     int        // the strand that goes on from it; -1 where that is not known
	turn     int        // there: 1 left (a corner of less than 180 degrees), 0 straight on, -1 right or back
	before   int        // the strand that it goes on from
}

func (s *strand) along() geom.Point { return vector(s.a, s.b) }

// axis gives 0 for a level strand, 1 for an upright one, -1 for a slanted one.
func (s *strand) axis() int {
	switch {
	case s.a.Y == s.b.Y:
		return 0
	case s.a.X == s.b.X:
		return 1
	}
	return -1
}

// side is a side of a figure: an edge of its outline.
type side struct {
	a, b geom.Point
	fig  int
}

// pieceIn is what a piece has in a window: its figures there.
type pieceIn struct {
	window  geom.Rect
	sides   []side
	fills   []geom.Fill
	strands []strand
}

// newPieceIn finds the outline of what some items are parts of.
func newPieceIn(f *flat, window geom.Rect, items []item) *pieceIn {
	o := &pieceIn{window: window}
	var figs []uint32
	for i := range items {
		figs = append(figs, items[i].fig)
	}
	slices.Sort(figs)
	for _, i := range slices.Compact(figs) {
		points, fill := f.points(nil, &f.figs[i])
		points = withoutIdle(points)
		for k, q := range points {
			if p := points[(k+len(points)-1)%len(points)]; p != q {
				o.sides = append(o.sides, side{p, q, len(o.fills)})
			}
		}
		o.fills = append(o.fills, fill)
	}
	seen := map[string]bool{}
	for i := range o.sides {
		o.cut(i, seen)
	}
	o.link()
	return o
}

// cut appends what of a side is outline.
func (o *pieceIn) cut(i int, seen map[string]bool) {
	e := &o.sides[i]
	box := geom.BoxOf([]geom.Point{e.a, e.b})
	if !box.Meets(o.window) {
		return
	}
	d := vector(e.a, e.b)
	length := new(big.Rat).SetInt(new(big.Int).Add(product(d.X, d.X), product(d.Y, d.Y)))
	// Where others meet it, as parts of the way from a to b.
	at := []*big.Rat{new(big.Rat), big.NewRat(1, 1)}
	for k := range o.sides {
		g := &o.sides[k]
		if k == i || !box.Meets(geom.BoxOf([]geom.Point{g.a, g.b})) {
			continue
		}
		if t := partOfWay(e, g); t != nil {
			at = append(at, t)
		}
		for _, p := range [2]geom.Point{g.a, g.b} {
			if geom.Orient(e.a, e.b, p) == 0 {
				t := whole(p).dot(e.a, d)
				at = append(at, t.Quo(t, length))
			}
		}
	}
	slices.SortFunc(at, (*big.Rat).Cmp)
	one := big.NewRat(1, 1)
	at = slices.DeleteFunc(at, func(t *big.Rat) bool { return t.Sign() < 0 || t.Cmp(one) > 0 })
	at = slices.CompactFunc(at, func(s, t *big.Rat) bool { return s.Cmp(t) == 0 })
	for k := 1; k < len(at); k++ {
		middle := new(big.Rat).Add(at[k-1], at[k])
		left, right := o.filledBeside(e, e.on(middle.Quo(middle, big.NewRat(2, 1))))
		s := strand{from: e.on(at[k-1]), to: e.on(at[k]), a: e.a, b: e.b}
		switch {
		case left == right:
			continue
		case right:
			s.from, s.to, s.a, s.b = s.to, s.from, s.b, s.a
		}
		if key := s.from.key() + " " + s.to.key(); !seen[key] {
			seen[key] = true
			o.strands = append(o.strands, s)
		}
	}
}

// on gives the place at a part of the way along a side.
func (e *side) on(t *big.Rat) spot {
	x := new(big.Rat).Mul(t, new(big.Rat).SetInt64(e.b.X-e.a.X))
	y := new(big.Rat).Mul(t, new(big.Rat).SetInt64(e.b.Y-e.a.Y))
	return spot{x.Add(x, new(big.Rat).SetInt64(e.a.X)), y.Add(y, new(big.Rat).SetInt64(e.a.Y))}
}

// partOfWay gives where side g meets side e, as a part of the way along e; nil where it does not, or both lie on one line.
func partOfWay(e, g *side) *big.Rat {
	d, h := vector(e.a, e.b), vector(g.a, g.b)
	det := minus(product(d.X, h.Y), product(d.Y, h.X))
	if det.Sign() == 0 {
		return nil
	}
	w := vector(e.a, g.a)
	t := new(big.Rat).SetFrac(minus(product(w.X, h.Y), product(w.Y, h.X)), det)
	u := new(big.Rat).SetFrac(minus(product(w.X, d.Y), product(w.Y, d.X)), det)
	one := big.NewRat(1, 1)
	if t.Sign() < 0 || t.Cmp(one) > 0 || u.Sign() < 0 || u.Cmp(one) > 0 {
		return nil
	}
	return t
}

// filledBeside says whether the piece is filled just left and just right of a place on a side at which no other side begins,
// ends or crosses. A ray from the place, level or for level sides upright, counts how the figures wind around it.
func (o *pieceIn) filledBeside(e *side, m spot) (left, right bool) {
	level := e.a.Y == e.b.Y
	wind, also := make([]int32, len(o.fills)), make([]int32, len(o.fills))
	for i := range o.sides {
		g := o.sides[i]
		y, x := m.y, m.x
		if level { // x and y exchanged
			g.a, g.b = geom.Point{X: g.a.Y, Y: g.a.X}, geom.Point{X: g.b.Y, Y: g.b.X}
			y, x = x, y
		}
		w := int32(1)
		if g.a.Y > g.b.Y {
			g.a, g.b, w = g.b, g.a, -1
		}
		if g.a.Y == g.b.Y || compareHeight(g.a.Y, y) > 0 || compareHeight(g.b.Y, y) <= 0 {
			continue
		}
		// The side at height y against x.
		at := new(big.Rat).Sub(y, new(big.Rat).SetInt64(g.a.Y))
		at.Mul(at, big.NewRat(g.b.X-g.a.X, g.b.Y-g.a.Y))
		at.Add(at, new(big.Rat).SetInt64(g.a.X))
		switch c := at.Cmp(x); {
		case c < 0:
			wind[g.fig] += w
		case c == 0:
			also[g.fig] += w
		}
	}
	full := func(fig int, w int32) bool {
		if o.fills[fig] == geom.EvenOdd {
			return w&1 != 0
		}
		return w != 0
	}
	lower, upper := false, false // towards lower and towards higher x (y for level sides)
	for i := range wind {
		lower = lower || full(i, wind[i])
		upper = upper || full(i, wind[i]+also[i])
	}
	// Left of a side that runs up is where x is lower; of a level one that runs right, where y is higher.
	up := e.b.Y > e.a.Y
	if level {
		up = e.b.X < e.a.X
	}
	if up {
		return lower, upper
	}
	return upper, lower
}

// link finds what goes on from each strand: of those that begin where it ends, the first one clockwise from the way back. So
// outlines that meet in a point touch there and do not cross.
func (o *pieceIn) link() {
	begin := map[string][]int{}
	for i := range o.strands {
		o.strands[i].next, o.strands[i].before = -1, -1
		key := o.strands[i].from.key()
		begin[key] = append(begin[key], i)
	}
	for i := range o.strands {
		s := &o.strands[i]
		d := s.along()
		for _, k := range begin[s.to.key()] {
			if s.next < 0 || sooner(back(d), o.strands[k].along(), o.strands[s.next].along()) {
				s.next = k
			}
		}
		if s.next < 0 {
			continue
		}
		g := o.strands[s.next].along()
		s.turn = crossSign(d, g)
		if s.turn == 0 && dotSign(d, g) < 0 {
			s.turn = -1
		}
		o.strands[s.next].before = i
	}
}

// sooner says whether u comes before v on the way clockwise from a direction, which itself comes last.
func sooner(from, u, v geom.Point) bool {
	half := func(w geom.Point) int {
		switch c := crossSign(from, w); {
		case c < 0 || c == 0 && dotSign(from, w) < 0:
			return 0 // less than half a turn clockwise, or just that
		case c > 0:
			return 1
		}
		return 2
	}
	if hu, hv := half(u), half(v); hu != hv {
		return hu < hv
	}
	return crossSign(v, u) > 0
}

// stretch is strands that go straight on: an edge of the outline.
type stretch struct {
	from, to spot
	a, b     geom.Point // as in strand
	convex   [2]bool    // at from and to: a corner of less than 180 degrees
	last     int        // its last strand
	first    int
	axis     int
}

// stretches joins strands that go straight on, and gives those that may have a point in a box. All of such a stretch that lies
// in the window is known, and where it leaves the window it is longer than any tip.
func (o *pieceIn) stretches(box geom.Rect) []stretch {
	var out []stretch
	straightIn := func(i int) bool { b := o.strands[i].before; return b >= 0 && o.strands[b].turn == 0 }
	for i := range o.strands {
		if straightIn(i) {
			continue
		}
		s := &o.strands[i]
		st := stretch{from: s.from, a: s.a, b: s.b, first: i, last: i, axis: s.axis()}
		for o.strands[st.last].next >= 0 && o.strands[st.last].turn == 0 {
			st.last = o.strands[st.last].next
		}
		st.to = o.strands[st.last].to
		if b := s.before; b >= 0 {
			st.convex[0] = o.strands[b].turn > 0
		}
		st.convex[1] = o.strands[st.last].next >= 0 && o.strands[st.last].turn > 0
		if meetsBox(st.from, st.to, box) {
			out = append(out, st)
		}
	}
	return out
}

// meetsBox says whether the box around two places meets another.
func meetsBox(u, v spot, box geom.Rect) bool {
	apart := func(a, b *big.Rat, low, high int64) bool {
		return compareHeight(low, a) > 0 && compareHeight(low, b) > 0 || compareHeight(high, a) < 0 && compareHeight(high, b) < 0
	}
	return !apart(u.x, v.x, box.X1, box.X2) && !apart(u.y, v.y, box.Y1, box.Y2)
}

// bend is a corner of less than 180 degrees.
type bend struct {
	at      geom.Point
	in, out geom.Point // directions
	square  bool       // a right angle between axis-parallel edges
}

// bends gives the corners in a box. They are corners of figures: where outlines of two figures cross, the angle is larger.
func (o *pieceIn) bends(box geom.Rect) []bend {
	var out []bend
	for i := range o.strands {
		s := &o.strands[i]
		if s.next < 0 || s.turn <= 0 || !s.to.x.IsInt() || !s.to.y.IsInt() {
			continue
		}
		n := &o.strands[s.next]
		b := bend{at: geom.Point{X: s.to.x.Num().Int64(), Y: s.to.y.Num().Int64()}, in: s.along(), out: n.along(), square: s.axis() >= 0 && n.axis() >= 0}
		if box.Contains(b.at) {
			out = append(out, b)
		}
	}
	return out
}

// sees says whether no step along the edges of a corner leads nearer to what lies in a direction.
func (b *bend) sees(d geom.Point) bool { return dotSign(d, b.in) >= 0 && dotSign(d, b.out) <= 0 }

// slantedNear says whether two pieces of which one has slanted edges are near in a place.
func (r *facing) slantedNear(f *flat, pl *nearPlace) bool {
	p, q := newPieceIn(f, pl.window, pl.p), newPieceIn(f, pl.window, pl.q)
	ps, qs := p.stretches(pl.core), q.stretches(pl.core)
	for i := range ps {
		for k := range qs {
			if r.stretchesNear(p, q, &ps[i], &qs[k]) {
				return true
			}
		}
	}
	pb, qb := p.bends(pl.core), q.bends(pl.core)
	return r.bendsNear(pb, qb) || r.bendsNearStretches(pb, qs, pl.core) || r.bendsNearStretches(qb, ps, pl.core)
}

// span gives the ends of an axis-parallel stretch along its axis, in order, cut at the window, and which way is out.
func (o *pieceIn) span(s *stretch) (from, to *big.Rat, at, out int64) {
	low, high := o.window.X1, o.window.X2
	from, to, at, out = s.from.x, s.to.x, s.a.Y, -1 // level, running right: filled above
	if s.axis == 1 {
		low, high = o.window.Y1, o.window.Y2
		from, to, at, out = s.from.y, s.to.y, s.a.X, 1 // upright, running up: filled to the left
	}
	if from.Cmp(to) > 0 {
		from, to, out = to, from, -out
	}
	if l := new(big.Rat).SetInt64(low); from.Cmp(l) < 0 {
		from = l
	}
	if h := new(big.Rat).SetInt64(high); to.Cmp(h) > 0 {
		to = h
	}
	return from, to, at, out
}

// tipOf says whether a stretch is a tip.
func (r *facing) tipOf(s *stretch) bool {
	if !s.convex[0] || !s.convex[1] {
		return false
	}
	n := new(big.Rat).Sub(s.from.x, s.to.x)
	if s.axis == 1 {
		n.Sub(s.from.y, s.to.y)
	}
	return n.Abs(n).Cmp(new(big.Rat).SetInt64(r.tipWidth)) <= 0
}

// stretchesNear says whether two axis-parallel stretches face each other and are too near.
func (r *facing) stretchesNear(p, q *pieceIn, s, t *stretch) bool {
	if s.axis < 0 || s.axis != t.axis {
		return false
	}
	from, to, at, out := p.span(s)
	from2, to2, at2, out2 := q.span(t)
	gap := (at2 - at) * out
	if out != -out2 || gap <= 0 || gap >= r.most {
		return false
	}
	if from2.Cmp(from) > 0 {
		from = from2
	}
	if to2.Cmp(to) < 0 {
		to = to2
	}
	if from.Cmp(to) >= 0 {
		return false
	}
	if gap < r.ofKinds(r.tipOf(s), r.tipOf(t)) {
		return true
	}
	for _, w := range r.wide {
		if gap < w.spacing && (p.holds(s.axis, at, out, from, to, w.width) || q.holds(s.axis, at2, out2, from, to, w.width)) {
			return true
		}
	}
	return false
}

// holds says whether a square of a width fits in with a side on an edge, along more than 0 of a part of it. Over that part the
// inside is filled; so a square fits where no outline reaches into the strip that it lies in.
func (o *pieceIn) holds(axis int, at, out int64, from, to *big.Rat, width int64) bool {
	inner, outer := at-width, at
	if out < 0 {
		inner, outer = at, at+width
	}
	low, high := o.window.X1, o.window.X2
	if axis == 1 {
		low, high = o.window.Y1, o.window.Y2
	}
	// Stretches of the edge's line from which outlines keep the square; the window ends what is seen.
	type barrier struct{ from, to *big.Rat }
	barriers := []barrier{{new(big.Rat).SetInt64(low), new(big.Rat).SetInt64(low)}, {new(big.Rat).SetInt64(high), new(big.Rat).SetInt64(high)}}
	for i := range o.strands {
		u, v := o.strands[i].from, o.strands[i].to
		if axis == 1 {
			u, v = spot{u.y, u.x}, spot{v.y, v.x}
		}
		if u.y.Cmp(v.y) > 0 {
			u, v = v, u
		}
		if compareHeight(outer, u.y) <= 0 || compareHeight(inner, v.y) >= 0 {
			continue
		}
		a, b := u.x, v.x
		if compareHeight(inner, u.y) > 0 {
			a = crossAt(u, v, inner)
		}
		if compareHeight(outer, v.y) < 0 {
			b = crossAt(u, v, outer)
		}
		if a.Cmp(b) > 0 {
			a, b = b, a
		}
		barriers = append(barriers, barrier{a, b})
	}
	slices.SortFunc(barriers, func(a, b barrier) int { return a.from.Cmp(b.from) })
	reach := barriers[0].to
	for _, b := range barriers[1:] {
		gap := new(big.Rat).Sub(b.from, reach)
		if gap.Cmp(new(big.Rat).SetInt64(width)) >= 0 && reach.Cmp(to) < 0 && b.from.Cmp(from) > 0 {
			return true
		}
		if b.to.Cmp(reach) > 0 {
			reach = b.to
		}
	}
	return false
}

// crossAt gives x at a height between two places.
func crossAt(u, v spot, height int64) *big.Rat {
	x := new(big.Rat).Sub(new(big.Rat).SetInt64(height), u.y)
	x.Quo(x, new(big.Rat).Sub(v.y, u.y))
	x.Mul(x, new(big.Rat).Sub(v.x, u.x))
	return x.Add(x, u.x)
}

// bendsNear judges corners against corners: square ones in each other's outer quarters by their rule, others where they are
// nearest.
func (r *facing) bendsNear(p, q []bend) bool {
	for i := range p {
		for k := range q {
			b, c := &p[i], &q[k]
			d := vector(b.at, c.at)
			if !b.sees(d) || !c.sees(back(d)) {
				continue
			}
			if d.X == 0 && alignedEnds(b, c, 0) || d.Y == 0 && alignedEnds(b, c, 1) {
				continue // the end of what two edges have in common
			}
			limit := r.other
			if b.square && c.square {
				limit = r.corner
			}
			if rectRelation(pointOf(b.at), pointOf(c.at), limit) != geom.Far {
				return true
			}
		}
	}
	return false
}

// alignedEnds says whether edges along an axis end in both corners on one line across it, and lie on the same side of it: they
// face each other from there on.
func alignedEnds(b, c *bend, axis int) bool {
	side := func(b *bend) int64 { // the side to which an edge along the axis leads; 0: none
		for _, v := range [2]geom.Point{back(b.in), b.out} {
			if axis == 0 && v.Y == 0 {
				return sign(v.X)
			}
			if axis == 1 && v.X == 0 {
				return sign(v.Y)
			}
		}
		return 0
	}
	s := side(b)
	return s != 0 && s == side(c)
}

// bendsNearStretches judges corners of one piece against the inside of edges of the other, where one of the two is slanted and
// both places lie in the core.
func (r *facing) bendsNearStretches(bends []bend, stretches []stretch, core geom.Rect) bool {
	for i := range bends {
		b := &bends[i]
		for k := range stretches {
			s := &stretches[k]
			if s.axis >= 0 && (b.square || parallelEnd(b, s.axis)) {
				continue // two edges face each other
			}
			d := vector(s.a, s.b)
			inward := geom.Point{X: -d.Y, Y: d.X} // from the outside of the edge at right angles to it
			if geom.Orient(s.a, s.b, b.at) >= 0 || !b.sees(inward) {
				continue
			}
			// The foot of the corner lies strictly within the edge.
			if s.from.dot(b.at, d).Sign() >= 0 || s.to.dot(b.at, d).Sign() <= 0 {
				continue
			}
			if foot := footOf(b.at, s.a, s.b); nearLine(b.at, s.a, s.b, r.other) && meetsBox(foot, foot, core) {
				return true
			}
		}
	}
	return false
}

// parallelEnd says whether an edge along an axis ends in a corner.
func parallelEnd(b *bend, axis int) bool {
	if axis == 0 {
		return b.in.Y == 0 || b.out.Y == 0
	}
	return b.in.X == 0 || b.out.X == 0
}

// footOf gives the point of the line through a and b that is nearest to p.
func footOf(p, a, b geom.Point) spot {
	d := vector(a, b)
	t := whole(p).dot(a, d)
	t.Quo(t, new(big.Rat).SetInt(new(big.Int).Add(product(d.X, d.X), product(d.Y, d.Y))))
	return (&side{a: a, b: b}).on(t)
}

// nearLine says whether a point is nearer than a spacing to the line through a and b.
func nearLine(p, a, b geom.Point, spacing int64) bool {
	d, w := vector(a, b), vector(a, p)
	cross := minus(product(d.X, w.Y), product(d.Y, w.X))
	cross.Mul(cross, cross)
	limit := new(big.Int).Add(product(d.X, d.X), product(d.Y, d.Y))
	return cross.Cmp(limit.Mul(limit, product(spacing, spacing))) < 0
}
