package facing

import (
	"math"
	"math/bits"

	"maskpair/decompose/geom"
)

// This file compares two shapes: edges that face each other, and corners.

// Approach is a place where two shapes come near, as a rule sees it.
type Approach struct {
	Rule       Rule
	Spacing    int64         // that the rule asks for
	A, B       [2]geom.Point // the edges, by their ends; of a corner or a slanted place both are the point where it is nearest
	From, To   geom.Point    // where A and B are nearest; in the middle of what faces. Rounded where a slanted edge takes part
	DistanceSq float64       // squared distance; exact but for the rounding to a float where no slanted edge takes part, else to 15 digits
	Lacks      int64         // by how much the distance, rounded down, is less than the spacing
}

// Near tells whether two shapes are near under the rules.
func (r *Rules) Near(a, b *Shape) bool {
	if a.rect && b.rect {
		return r.NearRects(a.box, b.box)
	}
	j := judge{r: r, a: a, b: b}
	j.run()
	return j.found
}

// Nearest gives the place that lacks most of its spacing, and whether the shapes are near at all. Of several places the one with the
// least distance counts, then the one with the least From and To (by x, then y), then the first rule.
func (r *Rules) Nearest(a, b *Shape) (Approach, bool) {
	j := judge{r: r, a: a, b: b, all: true}
	j.run()
	return j.best, j.found
}

// NearRects is Near for two single rectangles with area that do not touch.
func (r *Rules) NearRects(a, b geom.Rect) bool {
	dx, dy := max(b.X1-a.X2, a.X1-b.X2), max(b.Y1-a.Y2, a.Y1-b.Y2) // below 0: they overlap by more than 0 in projection
	if dx >= 0 && dy >= 0 {
		return shorter(dx, dy, r.CornerToCorner)
	}
	gap, lengthA, lengthB := dx, a.Y2-a.Y1, b.Y2-b.Y1
	if dx < 0 {
		gap, lengthA, lengthB = dy, a.X2-a.X1, b.X2-b.X1
	}
	if _, spacing := r.ofKinds(r.isTip(lengthA), r.isTip(lengthB)); gap < spacing {
		return true
	}
	for _, w := range r.Wide {
		if gap < w.Spacing && (min(a.X2-a.X1, a.Y2-a.Y1) >= w.Width || min(b.X2-b.X1, b.Y2-b.Y1) >= w.Width) {
			return true
		}
	}
	return false
}

// shorter tells whether the vector (dx, dy) is shorter than s, 0 <= s < 2^32. Past the first test squares are below 2^64.
func shorter(dx, dy, s int64) bool {
	if dx >= s || dy >= s {
		return false
	}
	sum, carry := bits.Add64(uint64(dx)*uint64(dx), uint64(dy)*uint64(dy), 0)
	return carry == 0 && sum < uint64(s)*uint64(s)
}

// judge compares two shapes.
type judge struct {
	r     *Rules
	a, b  *Shape
	all   bool // look for the place that lacks most, else for any
	found bool
	best  Approach
	swap  bool // places are found with the shapes exchanged
}

func (j *judge) done() bool { return j.found && !j.all }

// run looks at the edges of the one shape that are within reach of the other's box, and for each of them at what is within reach of it.
func (j *judge) run() {
	reach := j.r.Reach()
	box := grown(j.b.box, reach)
	if !j.a.box.Meets(box) {
		return
	}
	var listA, listB [64]*edge
	if len(j.b.edges) < len(j.a.edges) {
		j.a, j.b, j.swap = j.b, j.a, true
		box = grown(j.b.box, reach)
	}
	fromA := j.a.within(listA[:0], box)
	if len(j.b.nodes) == 0 {
		fromB := j.b.within(listB[:0], grown(j.a.box, reach))
		for _, e := range fromA {
			for _, f := range fromB {
				if j.edges(e, f); j.done() {
					return
				}
			}
		}
	} else {
		for _, e := range fromA {
			for _, f := range j.b.within(listB[:0], grown(e.box(), reach)) {
				if j.edges(e, f); j.done() {
					return
				}
			}
		}
	}
	if len(j.a.corners)+len(j.b.corners)+len(j.a.points)+len(j.b.points) > 0 {
		j.others()
	}
}

// edges judges an edge of a with one of b.
func (j *judge) edges(e, f *edge) {
	if e.side != f.side.opposite() {
		return
	}
	gap := f.at - e.at
	if e.side >= left {
		gap = -gap
	}
	if gap < 0 {
		return
	}
	low, high := max(e.low, f.low), min(e.high, f.high)
	overlap := low < high
	if low == high && e.lowShare|e.highShare|f.lowShare|f.highShare != 0 {
		from, to := j.common(e, f)
		overlap = from.less(to)
	}
	if overlap {
		j.facing(e, f, gap)
	} else if e.side.upright() {
		j.squares(e, f, gap)
	}
}

// common gives where the projections of two edges overlap.
func (j *judge) common(e, f *edge) (from, to place) {
	return maxPlace(j.a.lowEnd(e), j.b.lowEnd(f)), minPlace(j.a.highEnd(e), j.b.highEnd(f))
}

// facing judges two edges that face each other.
func (j *judge) facing(e, f *edge, gap int64) {
	if gap == 0 {
		return // they touch, which shapes do not
	}
	rule, spacing := j.r.ofKinds(e.tip(j.r), f.tip(j.r))
	if gap >= spacing || j.all {
		for _, w := range j.r.Wide {
			if w.Spacing <= spacing || gap >= w.Spacing {
				continue
			}
			from, to := j.common(e, f)
			if j.a.holdsSquare(e, from, to, w.Width) || j.b.holdsSquare(f, from, to, w.Width) {
				rule, spacing = WidePart, w.Spacing
			}
		}
	}
	if gap >= spacing {
		return
	}
	j.found = true
	if !j.all {
		return
	}
	from, to := j.common(e, f)
	mid := from.whole + (to.whole-from.whole)/2
	p, q := geom.Point{X: e.at, Y: mid}, geom.Point{X: f.at, Y: mid}
	if !e.side.upright() {
		p, q = turned(p), turned(q)
	}
	j.offer(Approach{Rule: rule, Spacing: spacing, A: e.segment(), B: f.segment(), From: p, To: q, DistanceSq: float64(gap) * float64(gap), Lacks: spacing - gap})
}

// squares judges the corners of two upright edges that face each other without overlap.
func (j *judge) squares(e, f *edge, dx int64) {
	var y1, y2 int64
	switch {
	case f.low >= e.high && e.ends&highSquare != 0 && f.ends&lowSquare != 0:
		y1, y2 = e.high, f.low
	case e.low >= f.high && e.ends&lowSquare != 0 && f.ends&highSquare != 0:
		y1, y2 = e.low, f.high
	default:
		return
	}
	dy := max(y1-y2, y2-y1)
	if dx|dy == 0 || !shorter(dx, dy, j.r.CornerToCorner) {
		return
	}
	j.found = true
	if !j.all {
		return
	}
	p, q := geom.Point{X: e.at, Y: y1}, geom.Point{X: f.at, Y: y2}
	sq := uint64(dx)*uint64(dx) + uint64(dy)*uint64(dy)
	j.offer(Approach{Rule: CornerToCorner, Spacing: j.r.CornerToCorner, A: [2]geom.Point{p, p}, B: [2]geom.Point{q, q}, From: p, To: q,
		DistanceSq: float64(sq), Lacks: j.r.CornerToCorner - root(sq)})
}

// root is the square root, rounded down.
func root(v uint64) int64 {
	r := uint64(math.Sqrt(float64(v)))
	for r > math.MaxUint32 || r*r > v {
		r--
	}
	for r < math.MaxUint32 && (r+1)*(r+1) <= v {
		r++
	}
	return int64(r)
}

// offer takes a place if it is better to tell than the best so far.
func (j *judge) offer(p Approach) {
	if j.swap {
		p.A, p.B, p.From, p.To = p.B, p.A, p.To, p.From
	}
	b := &j.best
	if b.Spacing == 0 || p.Worse(b) {
		*b = p
	}
}

// Worse tells whether p is the one of two places to tell: it lacks more, or as Nearest says.
func (p *Approach) Worse(q *Approach) bool {
	switch {
	case p.Lacks != q.Lacks:
		return p.Lacks > q.Lacks
	case p.DistanceSq != q.DistanceSq:
		return p.DistanceSq < q.DistanceSq
	}
	if c := comparePoints(p.From, q.From); c != 0 {
		return c < 0
	}
	if c := comparePoints(p.To, q.To); c != 0 {
		return c < 0
	}
	return p.Rule < q.Rule
}

func comparePoints(p, q geom.Point) int {
	if c := compare(p.X, q.X); c != 0 {
		return c
	}
	return compare(p.Y, q.Y)
}
