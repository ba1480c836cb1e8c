package twin

import (
	"math"
	"math/big"
	"slices"
)

// This file is the exact geometry: what an outline fills, how far two filled regions are apart, and how much area a set of
// them covers. All numbers are fractions; floats only tell what is too far away to matter.
//
// A region is the closure of what the fill rule fills. Its outline is cut wherever two edges meet; a piece belongs to the
// region where one of its two sides is filled. Pieces with both sides empty (lines drawn there and back) belong to nothing.

// point is an exact point in half database units, with its floats.
type point struct {
	x, y   *big.Rat
	fx, fy float64
}

func exactly(g grid) point {
	return point{new(big.Rat).SetInt64(g.x), new(big.Rat).SetInt64(g.y), float64(g.x), float64(g.y)}
}

func at(x, y *big.Rat) point {
	fx, _ := x.Float64()
	fy, _ := y.Float64()
	return point{x, y, fx, fy}
}

func (p point) same(q point) bool { return p.x.Cmp(q.x) == 0 && p.y.Cmp(q.y) == 0 }

// segment is a straight line from a to b.
type segment struct{ a, b point }

// region is what an outline fills.
type region struct {
	outline   []grid
	nonZero   bool
	low, high grid
	box       bool      // the region is its bounding box
	pieces    []segment // of the outline that belong to the region; see parts
}

// newRegion gives what an outline fills; nil where that is nothing.
func newRegion(outline []grid, nonZero bool) *region {
	outline = slices.Compact(slices.Clone(outline))
	if n := len(outline); n > 1 && outline[0] == outline[n-1] {
		outline = outline[:n-1]
	}
	if len(outline) < 3 {
		return nil
	}
	r := &region{outline: outline, nonZero: nonZero}
	r.low, r.high = box(outline)
	if isBox(outline) {
		r.box = true
	}
	if !r.cut() {
		return nil
	}
	if !r.box {
		// What encloses nothing may reach farther than the region. A corner that is farthest out is one of the outline.
		var corners []grid
		for _, p := range r.pieces {
			corners = append(corners, grid{int64(math.Floor(p.a.fx)), int64(math.Floor(p.a.fy))}, grid{int64(math.Ceil(p.a.fx)), int64(math.Ceil(p.a.fy))},
				grid{int64(math.Floor(p.b.fx)), int64(math.Floor(p.b.fy))}, grid{int64(math.Ceil(p.b.fx)), int64(math.Ceil(p.b.fy))})
		}
		r.low, r.high = box(corners)
	}
	return r
}

// isBox tells whether an outline is a plain rectangle: four corners, edges level and upright in turn.
func isBox(o []grid) bool {
	if len(o) != 4 {
		return false
	}
	level := o[0].y == o[1].y && o[1].x == o[2].x && o[2].y == o[3].y && o[3].x == o[0].x
	upright := o[0].x == o[1].x && o[1].y == o[2].y && o[2].x == o[3].x && o[3].y == o[0].y
	return level || upright
}

// edge gives an edge of the outline.
func (r *region) edge(i int) (a, b grid) { return r.outline[i], r.outline[(i+1)%len(r.outline)] }

// edges gives all edges of the outline.
func (r *region) edges() []segment {
	edges := make([]segment, len(r.outline))
	for i := range edges {
		a, b := r.edge(i)
		edges[i] = segment{exactly(a), exactly(b)}
	}
	return edges
}

// parts gives the pieces; those of a plain rectangle are made once they are asked for.
func (r *region) parts() []segment {
	if r.box && r.pieces == nil {
		r.pieces = r.edges()
	}
	return r.pieces
}

// cut finds the pieces; it tells whether anything is filled at all.
func (r *region) cut() bool {
	if r.box {
		return r.low.x < r.high.x && r.low.y < r.high.y
	}
	edges := r.edges()
	filled := false
	for i, e := range edges {
		cuts := []point{e.a, e.b}
		for j, f := range edges {
			if i != j && roughDistance(e, f) < roughness {
				cuts = append(cuts, meetings(e, f)...)
			}
		}
		byX := e.a.x.Cmp(e.b.x) != 0
		slices.SortFunc(cuts, func(p, q point) int {
			if byX {
				return p.x.Cmp(q.x)
			}
			return p.y.Cmp(q.y)
		})
		cuts = slices.CompactFunc(cuts, point.same)
		for k := 1; k < len(cuts); k++ {
			one, other := r.beside(segment{cuts[k-1], cuts[k]})
			if one || other {
				r.pieces = append(r.pieces, segment{cuts[k-1], cuts[k]})
				filled = filled || one != other
			}
		}
	}
	return filled
}

// fills is the fill rule.
func (r *region) fills(winding int) bool {
	if r.nonZero {
		return winding != 0
	}
	return winding%2 != 0
}

// beside tells whether the two sides of a piece of the outline are filled, just beside its middle.
func (r *region) beside(s segment) (one, other bool) {
	half := big.NewRat(1, 2)
	mx := new(big.Rat).Add(s.a.x, s.b.x)
	my := new(big.Rat).Add(s.a.y, s.b.y)
	m := at(mx.Mul(mx, half), my.Mul(my, half))
	far, on := r.winding(m, s.a.y.Cmp(s.b.y) == 0)
	return r.fills(far), r.fills(far + on)
}

// winding sends a ray from m to the right, or upwards, and adds up the edges that cross it behind m (far) and those that
// cross it in m (on).
func (r *region) winding(m point, upwards bool) (far, on int) {
	mu, mv := m.x, m.y // the ray goes along u
	if upwards {
		mu, mv = m.y, m.x
	}
	for i := range r.outline {
		a, b := r.edge(i)
		au, av, bu, bv := a.x, a.y, b.x, b.y
		if upwards {
			au, av, bu, bv = a.y, a.x, b.y, b.x
		}
		dir := 1
		if av > bv {
			au, av, bu, bv, dir = bu, bv, au, av, -1
		}
		// av <= mv < bv
		if ratCmp(mv, av) < 0 || ratCmp(mv, bv) >= 0 {
			continue
		}
		// u of the edge at mv: au + (mv-av)*(bu-au)/(bv-av)
		t := new(big.Rat).Sub(mv, new(big.Rat).SetInt64(av))
		t.Mul(t, big.NewRat(bu-au, bv-av))
		t.Add(t, new(big.Rat).SetInt64(au))
		switch t.Cmp(mu) {
		case 1:
			far += dir
		case 0:
			on += dir
		}
	}
	return far, on
}

func ratCmp(a *big.Rat, b int64) int { return a.Cmp(new(big.Rat).SetInt64(b)) }

// contains tells whether a point that lies on none of the region's pieces lies in the region.
func (r *region) contains(p point) bool {
	far, _ := r.winding(p, false)
	return r.fills(far)
}

// meetings gives the points that two segments share: none, one, or the ends of a common stretch.
func meetings(e, f segment) []point {
	if max(e.a.fx, e.b.fx)+1 < min(f.a.fx, f.b.fx) || max(f.a.fx, f.b.fx)+1 < min(e.a.fx, e.b.fx) ||
		max(e.a.fy, e.b.fy)+1 < min(f.a.fy, f.b.fy) || max(f.a.fy, f.b.fy)+1 < min(e.a.fy, e.b.fy) {
		return nil
	}
	dx, dy := sub(e.b.x, e.a.x), sub(e.b.y, e.a.y)
	gx, gy := sub(f.b.x, f.a.x), sub(f.b.y, f.a.y)
	wx, wy := sub(f.a.x, e.a.x), sub(f.a.y, e.a.y)
	d := cross(dx, dy, gx, gy)
	if d.Sign() != 0 {
		t := cross(wx, wy, gx, gy)
		u := cross(wx, wy, dx, dy)
		t.Quo(t, d)
		u.Quo(u, d)
		one := big.NewRat(1, 1)
		if t.Sign() < 0 || t.Cmp(one) > 0 || u.Sign() < 0 || u.Cmp(one) > 0 {
			return nil
		}
		x := new(big.Rat).Mul(t, dx)
		y := new(big.Rat).Mul(t, dy)
		return []point{at(x.Add(x, e.a.x), y.Add(y, e.a.y))}
	}
	if cross(dx, dy, wx, wy).Sign() != 0 {
		return nil
	}
	var out []point
	for _, p := range []point{f.a, f.b} {
		if between(p, e) {
			out = append(out, p)
		}
	}
	for _, p := range []point{e.a, e.b} {
		if between(p, f) {
			out = append(out, p)
		}
	}
	return out
}

// between tells whether a point on the line of a segment lies on it.
func between(p point, s segment) bool {
	in := func(v, a, b *big.Rat) bool {
		if a.Cmp(b) > 0 {
			a, b = b, a
		}
		return a.Cmp(v) <= 0 && v.Cmp(b) <= 0
	}
	return in(p.x, s.a.x, s.b.x) && in(p.y, s.a.y, s.b.y)
}

func sub(a, b *big.Rat) *big.Rat { return new(big.Rat).Sub(a, b) }

func cross(ax, ay, bx, by *big.Rat) *big.Rat {
	p, q := new(big.Rat).Mul(ax, by), new(big.Rat).Mul(ay, bx)
	return p.Sub(p, q)
}

// distance gives the square of the distance of two regions where it is below limit squared, in square half units; nil where
// it is not. Regions that touch or overlap have distance 0.
func distance(r, s *region, limit int64) *big.Rat {
	gapX := max(r.low.x-s.high.x, s.low.x-r.high.x, 0)
	gapY := max(r.low.y-s.high.y, s.low.y-r.high.y, 0)
	if gapX >= limit || gapY >= limit {
		return nil
	}
	bound := new(big.Rat).SetInt(new(big.Int).Mul(big.NewInt(limit), big.NewInt(limit)))
	var best *big.Rat
	if r.box && s.box {
		x, y := new(big.Rat).SetInt64(gapX), new(big.Rat).SetInt64(gapY)
		best = dot(x, y, x, y)
	} else {
		best = bound
		// Floats find the pairs that may be the nearest, fractions measure these.
		least := float64(limit)
		for _, e := range r.parts() {
			for _, f := range s.parts() {
				least = min(least, roughDistance(e, f))
			}
		}
		for _, e := range r.parts() {
			for _, f := range s.parts() {
				if roughDistance(e, f) > least+2*roughness {
					continue
				}
				if d := segmentDistance(e, f); d.Cmp(best) < 0 {
					best = d
				}
				if best.Sign() == 0 {
					return best
				}
			}
		}
		if gapX == 0 && gapY == 0 && (inside(r, s) || inside(s, r)) {
			return new(big.Rat)
		}
	}
	if best.Cmp(bound) >= 0 {
		return nil
	}
	return best
}

// inside tells whether any corner of r lies in s. No piece of one meets a piece of the other.
func inside(r, s *region) bool {
	for _, p := range r.parts() {
		if s.contains(p.a) {
			return true
		}
	}
	return false
}

// roughness is more than a distance in floats can be off by. Corners are whole numbers, which floats hold, or crossings, which
// they hold within 2^33 * 2^-53; a cross product, at most 2^68, is off by 2^-52 of that, and is divided by the length of the
// segment.
const roughness = 1e-3

// roughDistance gives the distance of two segments in floats, 0 where they may cross.
func roughDistance(e, f segment) float64 {
	if roughSide(e, f.a)*roughSide(e, f.b) <= 0 && roughSide(f, e.a)*roughSide(f, e.b) <= 0 {
		x := max(min(e.a.fx, e.b.fx)-max(f.a.fx, f.b.fx), min(f.a.fx, f.b.fx)-max(e.a.fx, e.b.fx), 0)
		y := max(min(e.a.fy, e.b.fy)-max(f.a.fy, f.b.fy), min(f.a.fy, f.b.fy)-max(e.a.fy, e.b.fy), 0)
		if x+y < roughness {
			return 0
		}
	}
	return min(roughTo(e.a, f), roughTo(e.b, f), roughTo(f.a, e), roughTo(f.b, e))
}

// roughSide tells on which side of the line of s the point p lies; 0 where floats do not tell.
func roughSide(s segment, p point) float64 {
	dx, dy := s.b.fx-s.a.fx, s.b.fy-s.a.fy
	d := (dx*(p.fy-s.a.fy) - dy*(p.fx-s.a.fx)) / math.Hypot(dx, dy)
	if math.Abs(d) < roughness {
		return 0
	}
	return d
}

// roughTo gives the distance of a point from a segment in floats.
func roughTo(p point, s segment) float64 {
	dx, dy := s.b.fx-s.a.fx, s.b.fy-s.a.fy
	wx, wy := p.fx-s.a.fx, p.fy-s.a.fy
	switch along := wx*dx + wy*dy; {
	case along <= 0:
		return math.Hypot(wx, wy)
	case along >= dx*dx+dy*dy:
		return math.Hypot(p.fx-s.b.fx, p.fy-s.b.fy)
	}
	return math.Abs(dx*wy-dy*wx) / math.Hypot(dx, dy)
}

// segmentDistance gives the square of the distance of two segments.
func segmentDistance(e, f segment) *big.Rat {
	if len(meetings(e, f)) > 0 {
		return new(big.Rat)
	}
	best := pointDistance(e.a, f)
	for _, d := range []*big.Rat{pointDistance(e.b, f), pointDistance(f.a, e), pointDistance(f.b, e)} {
		if d.Cmp(best) < 0 {
			best = d
		}
	}
	return best
}

// pointDistance gives the square of the distance of a point from a segment.
func pointDistance(p point, s segment) *big.Rat {
	dx, dy := sub(s.b.x, s.a.x), sub(s.b.y, s.a.y)
	wx, wy := sub(p.x, s.a.x), sub(p.y, s.a.y)
	length := dot(dx, dy, dx, dy)
	along := dot(wx, wy, dx, dy)
	switch {
	case along.Sign() <= 0:
		return dot(wx, wy, wx, wy)
	case along.Cmp(length) >= 0:
		wx, wy = sub(p.x, s.b.x), sub(p.y, s.b.y)
		return dot(wx, wy, wx, wy)
	}
	c := cross(dx, dy, wx, wy)
	return c.Quo(c.Mul(c, c), length)
}

func dot(ax, ay, bx, by *big.Rat) *big.Rat {
	p, q := new(big.Rat).Mul(ax, bx), new(big.Rat).Mul(ay, by)
	return p.Add(p, q)
}
