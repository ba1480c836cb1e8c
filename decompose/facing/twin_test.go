package facing

import (
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/decompose/geom"
)

// The slow twin: outlines by cutting all edges at all crossings and asking on which side of each piece there is a figure, and then all
// pairs of edges and corners, in exact fractions and straight from the definition. It shares no code with the package.

type frac = *big.Rat

func num(v int64) frac            { return big.NewRat(v, 1) }
func plus(a, b frac) frac         { return new(big.Rat).Add(a, b) }
func minus(a, b frac) frac        { return new(big.Rat).Sub(a, b) }
func times(a, b frac) frac        { return new(big.Rat).Mul(a, b) }
func over(a, b frac) frac         { return new(big.Rat).Quo(a, b) }
func lower(a, b frac) bool        { return a.Cmp(b) < 0 }
func smaller(a, b frac) frac      { return pick(lower(a, b), a, b) }
func greater(a, b frac) frac      { return pick(lower(a, b), b, a) }
func pick(c bool, a, b frac) frac { return map[bool]frac{true: a, false: b}[c] }

type spot struct{ x, y frac }

func (p spot) plus(q spot) spot    { return spot{plus(p.x, q.x), plus(p.y, q.y)} }
func (p spot) minus(q spot) spot   { return spot{minus(p.x, q.x), minus(p.y, q.y)} }
func (p spot) scaled(f frac) spot  { return spot{times(p.x, f), times(p.y, f)} }
func (p spot) cross(q spot) frac   { return minus(times(p.x, q.y), times(p.y, q.x)) }
func (p spot) dot(q spot) frac     { return plus(times(p.x, q.x), times(p.y, q.y)) }
func (p spot) same(q spot) bool    { return p.x.Cmp(q.x) == 0 && p.y.Cmp(q.y) == 0 }
func (p spot) name() string        { return p.x.RatString() + "," + p.y.RatString() }
func (p spot) angle() float64      { x, _ := p.x.Float64(); y, _ := p.y.Float64(); return math.Atan2(y, x) }
func (p spot) axisParallel() bool  { return p.x.Sign() == 0 || p.y.Sign() == 0 }
func (p spot) along(up bool) frac  { return pick(up, p.y, p.x) }
func (p spot) across(up bool) frac { return pick(up, p.x, p.y) }

// twinFigure is a closed outline, filled even-odd.
type twinFigure []geom.Point

func (f twinFigure) spots() []spot {
	var out []spot
	for _, p := range f {
		out = append(out, spot{num(p.X), num(p.Y)})
	}
	return out
}

// holds tells whether a figure holds a point that is on no edge.
func (f twinFigure) holds(p spot) bool {
	in := false
	c := f.spots()
	for i, a := range c {
		b := c[(i+1)%len(c)]
		if lower(p.y, a.y) != lower(p.y, b.y) {
			x := plus(a.x, over(times(minus(p.y, a.y), minus(b.x, a.x)), minus(b.y, a.y)))
			in = in != lower(p.x, x)
		}
	}
	return in
}

// twinEdge is an edge of an outline, filled on its left; fromAngle and toAngle compare the filled angles at its ends with 180 degrees.
type twinEdge struct {
	a, b                 spot
	fromAngle, toAngle   int
	fromSquare, toSquare bool
}

func (e twinEdge) way() spot { return e.b.minus(e.a) }

// twinWedge is a filled angle of at most 180 degrees at a point of the outline, between an edge that goes out and one that comes in.
type twinWedge struct {
	at, out, in spot // in as seen from the point
	square      bool
	straight    bool
}

type twinShape struct {
	figures []twinFigure
	edges   []twinEdge
	wedges  []twinWedge
}

func (s *twinShape) holds(p spot) bool {
	return slices.ContainsFunc(s.figures, func(f twinFigure) bool { return f.holds(p) })
}

var tiny = big.NewRat(1, 1_000_000_000_000)

func newTwin(figures []twinFigure) *twinShape {
	s := &twinShape{figures: figures}
	type segment struct{ a, b spot }
	var all []segment
	for _, f := range figures {
		c := f.spots()
		for i := range c {
			if next := c[(i+1)%len(c)]; !c[i].same(next) {
				all = append(all, segment{c[i], next})
			}
		}
	}
	pieces := map[string]segment{}
	for _, e := range all {
		way := e.b.minus(e.a)
		cuts := []frac{num(0), num(1)}
		cut := func(p spot) {
			if t := over(p.minus(e.a).dot(way), way.dot(way)); t.Sign() > 0 && lower(t, num(1)) {
				cuts = append(cuts, t)
			}
		}
		for _, f := range all {
			g := f.b.minus(f.a)
			if den := way.cross(g); den.Sign() != 0 {
				t, u := over(f.a.minus(e.a).cross(g), den), over(f.a.minus(e.a).cross(way), den)
				if u.Sign() >= 0 && !lower(num(1), u) {
					cut(e.a.plus(way.scaled(t)))
				}
			} else if way.cross(f.a.minus(e.a)).Sign() == 0 {
				cut(f.a)
				cut(f.b)
			}
		}
		slices.SortFunc(cuts, func(p, q frac) int { return p.Cmp(q) })
		for i := 1; i < len(cuts); i++ {
			if cuts[i].Cmp(cuts[i-1]) == 0 {
				continue
			}
			p, q := e.a.plus(way.scaled(cuts[i-1])), e.a.plus(way.scaled(cuts[i]))
			mid := p.plus(q).scaled(big.NewRat(1, 2))
			side := spot{times(way.y, num(-1)), way.x}.scaled(tiny)
			l, r := s.holds(mid.plus(side)), s.holds(mid.minus(side))
			if l && !r {
				pieces[p.name()+" "+q.name()] = segment{p, q}
			} else if r && !l {
				pieces[q.name()+" "+p.name()] = segment{q, p}
			}
		}
	}
	// The filled angles at each point: from a piece that goes out counter-clockwise to one that comes in.
	type end struct {
		piece string
		out   bool
		away  spot
	}
	at := map[string][]end{}
	point := map[string]spot{}
	for name, p := range pieces {
		at[p.a.name()] = append(at[p.a.name()], end{name, true, p.b.minus(p.a)})
		at[p.b.name()] = append(at[p.b.name()], end{name, false, p.a.minus(p.b)})
		point[p.a.name()], point[p.b.name()] = p.a, p.b
	}
	next, before := map[string]string{}, map[string]string{}
	fromAngle, toAngle := map[string]int{}, map[string]int{}
	square := map[string]bool{} // by piece that comes in
	for v, ends := range at {
		slices.SortFunc(ends, func(p, q end) int {
			switch a, b := p.away.angle(), q.away.angle(); {
			case a < b:
				return -1
			case a > b:
				return 1
			}
			return 0
		})
		for i, out := range ends {
			if !out.out {
				continue
			}
			in := ends[(i+1)%len(ends)]
			if in.out {
				panic("two edges go out of one point side by side")
			}
			cross, dot := out.away.cross(in.away), out.away.dot(in.away)
			angle := -cross.Sign() // below 180 degrees: -1
			if cross.Sign() == 0 && dot.Sign() > 0 {
				angle = 1
			}
			next[in.piece], before[out.piece] = out.piece, in.piece
			toAngle[in.piece], fromAngle[out.piece] = angle, angle
			square[in.piece] = angle < 0 && dot.Sign() == 0 && out.away.axisParallel()
			if angle <= 0 {
				s.wedges = append(s.wedges, twinWedge{point[v], out.away, in.away, square[in.piece], angle == 0})
			}
		}
	}
	for name, p := range pieces {
		if fromAngle[name] == 0 && before[name] != "" {
			continue
		}
		last := name
		for toAngle[last] == 0 && next[last] != "" {
			last = next[last]
		}
		s.edges = append(s.edges, twinEdge{p.a, pieces[last].b, fromAngle[name], toAngle[last], square[before[name]], square[last]})
	}
	return s
}

// touches tells whether two shapes have a point in common.
func (s *twinShape) touches(t *twinShape) bool {
	for _, e := range s.edges {
		for _, f := range t.edges {
			if distanceSq(e.a, f.a, f.b).Sign() == 0 || distanceSq(f.a, e.a, e.b).Sign() == 0 {
				return true
			}
			w, g := e.way(), f.way()
			if den := w.cross(g); den.Sign() != 0 {
				p, u := over(f.a.minus(e.a).cross(g), den), over(f.a.minus(e.a).cross(w), den)
				if p.Sign() >= 0 && u.Sign() >= 0 && !lower(num(1), p) && !lower(num(1), u) {
					return true
				}
			}
		}
	}
	inside := func(s, t *twinShape) bool {
		for _, e := range s.edges {
			if t.holds(e.a.plus(e.way().scaled(big.NewRat(1, 2)))) {
				return true
			}
		}
		return false
	}
	return inside(s, t) || inside(t, s)
}

func distanceSq(p, a, b spot) frac {
	w := b.minus(a)
	part := over(p.minus(a).dot(w), w.dot(w))
	part = greater(num(0), smaller(num(1), part))
	d := p.minus(a.plus(w.scaled(part)))
	return d.dot(d)
}

// twinPlace is a place where two shapes come near.
type twinPlace struct {
	rule     Rule
	spacing  int64
	distance frac // squared
}

// places gives all places of two shapes at which some rule asks for more than there is.
func places(r *Rules, s, t *twinShape) []twinPlace {
	var out []twinPlace
	keep := func(rule Rule, spacing int64, sq frac) {
		if lower(sq, num(spacing*spacing)) {
			out = append(out, twinPlace{rule, spacing, sq})
		}
	}
	type pair struct {
		e, f     twinEdge
		from, to frac
		up       bool
	}
	var facing []pair
	for _, e := range s.edges {
		for _, f := range t.edges {
			w, g := e.way(), f.way()
			if !w.axisParallel() || !g.axisParallel() || w.cross(g).Sign() != 0 || w.dot(g).Sign() > 0 {
				continue
			}
			up := w.x.Sign() == 0
			outward := spot{w.y, times(w.x, num(-1))}
			if f.a.minus(e.a).dot(outward).Sign() <= 0 {
				continue
			}
			from := greater(smaller(e.a.along(up), e.b.along(up)), smaller(f.a.along(up), f.b.along(up)))
			to := smaller(greater(e.a.along(up), e.b.along(up)), greater(f.a.along(up), f.b.along(up)))
			if !lower(from, to) {
				continue
			}
			facing = append(facing, pair{e, f, from, to, up})
			gap := minus(e.a.across(up), f.a.across(up))
			tips := 0
			for _, x := range [2]twinEdge{e, f} {
				if x.fromAngle < 0 && x.toAngle < 0 && !lower(num(r.TipWidth*r.TipWidth), x.way().dot(x.way())) {
					tips++
				}
			}
			rule := [3]Rule{SideToSide, TipToSide, TipToTip}[tips]
			spacing := [3]int64{r.SideToSide, r.TipToSide, r.TipToTip}[tips]
			for _, w := range r.Wide {
				if w.Spacing > spacing && (s.squareFits(e, from, to, w.Width) || t.squareFits(f, from, to, w.Width)) {
					rule, spacing = WidePart, w.Spacing
				}
			}
			keep(rule, spacing, times(gap, gap))
		}
	}
	// shared tells whether two points belong to what two edges have in common where they face each other.
	on := func(p spot, e twinEdge) bool { return distanceSq(p, e.a, e.b).Sign() == 0 }
	shared := func(p, q spot) bool {
		return slices.ContainsFunc(facing, func(x pair) bool {
			return on(p, x.e) && on(q, x.f) && p.along(x.up).Cmp(q.along(x.up)) == 0
		})
	}
	nearest := func(s *twinShape, w twinWedge, q spot) bool {
		v := q.minus(w.at)
		if v.dot(w.out).Sign() > 0 || v.dot(w.in).Sign() > 0 {
			return false
		}
		return !w.straight || v.cross(w.out).Sign() > 0 // the outside is on the right of what goes out
	}
	for _, w := range s.wedges {
		for _, x := range t.wedges {
			if !nearest(s, w, x.at) || !nearest(t, x, w.at) || shared(w.at, x.at) || axisStraight(w) || axisStraight(x) {
				continue
			}
			d := w.at.minus(x.at)
			if w.square && x.square {
				keep(CornerToCorner, r.CornerToCorner, d.dot(d))
			} else {
				keep(Other, r.Other, d.dot(d))
			}
		}
	}
	cornerAndEdge := func(w twinWedge, s *twinShape, f twinEdge, t *twinShape, swapped bool) {
		g := f.way()
		part := over(w.at.minus(f.a).dot(g), g.dot(g))
		if part.Sign() <= 0 || !lower(part, num(1)) || g.cross(w.at.minus(f.a)).Sign() >= 0 || axisStraight(w) {
			return
		}
		q := f.a.plus(g.scaled(part))
		if !nearest(s, w, q) || !swapped && shared(w.at, q) || swapped && shared(q, w.at) {
			return
		}
		d := w.at.minus(q)
		keep(Other, r.Other, d.dot(d))
	}
	for _, w := range s.wedges {
		for _, f := range t.edges {
			cornerAndEdge(w, s, f, t, false)
		}
	}
	for _, w := range t.wedges {
		for _, f := range s.edges {
			cornerAndEdge(w, t, f, s, true)
		}
	}
	return out
}

// axisStraight tells of points within an axis-parallel edge.
func axisStraight(w twinWedge) bool { return w.straight && w.out.axisParallel() }

// squareFits tries squares at all places at which one can be stuck, and between them.
func (s *twinShape) squareFits(e twinEdge, from, to frac, width int64) bool {
	up := e.way().x.Sign() == 0
	line := e.a.across(up)
	inward := spot{times(e.way().y, num(-1)), e.way().x}.across(up)
	deep := plus(line, num(width*int64(inward.Sign())))
	low, high := smaller(line, deep), greater(line, deep)
	stops := []frac{from, to}
	for _, f := range s.edges {
		for _, p := range [2]spot{f.a, f.b} {
			stops = append(stops, p.along(up))
		}
		w := f.way()
		if w.across(up).Sign() != 0 {
			for _, l := range [2]frac{low, high} {
				stops = append(stops, plus(f.a.along(up), over(times(minus(l, f.a.across(up)), w.along(up)), w.across(up))))
			}
		}
	}
	var tries []frac
	for _, v := range stops {
		tries = append(tries, v, minus(v, num(width)))
	}
	slices.SortFunc(tries, func(p, q frac) int { return p.Cmp(q) })
	for i := len(tries) - 1; i > 0; i-- {
		tries = append(tries, times(plus(tries[i], tries[i-1]), big.NewRat(1, 2)))
	}
	for _, u := range tries {
		v := plus(u, num(width))
		if lower(u, to) && lower(from, v) && s.full(u, v, low, high, up) {
			return true
		}
	}
	return false
}

// full tells whether a box lies in the shape: no edge crosses its inside, and its middle is filled.
func (s *twinShape) full(u, v, low, high frac, up bool) bool {
	for _, f := range s.edges {
		// the part of the edge that is in the open box, as an interval of the way along it
		from, to := num(0), num(1)
		for _, side := range []struct{ at, way, low, high frac }{
			{f.a.along(up), f.way().along(up), u, v}, {f.a.across(up), f.way().across(up), low, high},
		} {
			if side.way.Sign() == 0 {
				if !lower(side.low, side.at) || !lower(side.at, side.high) {
					from = to
				}
				continue
			}
			p, q := over(minus(side.low, side.at), side.way), over(minus(side.high, side.at), side.way)
			from, to = greater(from, smaller(p, q)), smaller(to, greater(p, q))
		}
		if lower(from, to) {
			return false
		}
	}
	mid := spot{times(plus(u, v), big.NewRat(1, 2)), times(plus(low, high), big.NewRat(1, 2))}
	if up {
		mid.x, mid.y = mid.y, mid.x
	}
	return s.holds(mid)
}

// randomFigures gives some figures in a square of a width: boxes, or triangles and quadrangles as well.
func randomFigures(rng *rand.Rand, n int, x, y, width int64, slanted bool) []twinFigure {
	at := func() geom.Point { return geom.Point{X: x + rng.Int64N(width+1), Y: y + rng.Int64N(width+1)} }
	var out []twinFigure
	for len(out) < n {
		p, q := at(), at()
		if p.X == q.X || p.Y == q.Y {
			continue
		}
		f := twinFigure{p, {X: q.X, Y: p.Y}, q, {X: p.X, Y: q.Y}}
		if slanted && rng.IntN(2) == 0 {
			f = twinFigure{at(), at(), at()}
			if rng.IntN(3) == 0 {
				f = append(f, at())
			}
			if !geom.NewPolygon(f, geom.EvenOdd).HasArea() || geom.IsManhattan(f) {
				continue
			}
		}
		out = append(out, f)
	}
	return out
}

func partsOf(figures []twinFigure) geom.Parts {
	var p geom.Parts
	for _, f := range figures {
		if geom.IsManhattan(f) {
			p.Rects = append(p.Rects, geom.BoxOf(f))
		} else {
			p.Polygons = append(p.Polygons, geom.Placed{Polygon: geom.NewPolygon(f, geom.EvenOdd)})
		}
	}
	return p
}

func TestAgainstTwin(t *testing.T) {
	for _, c := range []struct {
		name          string
		slanted       bool
		trials, width int64
	}{{"rectangles", false, 1200, 14}, {"slanted", true, 700, 12}} {
		t.Run(c.name, func(t *testing.T) {
			rng := rand.New(rand.NewPCG(6, uint64(c.width)))
			nears, byRule := 0, map[Rule]int{}
			for trial := int64(0); trial < c.trials; {
				figA := randomFigures(rng, 1+rng.IntN(3), 0, 0, c.width, c.slanted)
				figB := randomFigures(rng, 1+rng.IntN(3), rng.Int64N(2*c.width)-c.width/2, rng.Int64N(2*c.width)-c.width/2, c.width, c.slanted)
				a, b := newTwin(figA), newTwin(figB)
				if a.touches(b) {
					continue
				}
				trial++
				s := func() int64 { return 1 + rng.Int64N(9) }
				r := &Rules{Other: s(), SideToSide: s(), TipToSide: s(), TipToTip: s(), CornerToCorner: s(), TipWidth: rng.Int64N(9)}
				for range rng.IntN(3) {
					r.Wide = append(r.Wide, Wide{1 + rng.Int64N(8), s()})
				}
				pa, pb := partsOf(figA), partsOf(figB)
				turn := turns[rng.IntN(len(turns))]
				sa, sb := shapeOf(turn.of(pa)), shapeOf(turn.of(pb))
				want := places(r, a, b)
				where := fmt.Sprintf("trial %d: %+v\n%v\n%v\n", trial, *r, figA, figB)
				if near := r.Near(sa, sb); near != (len(want) > 0) {
					t.Fatalf("%sNear = %v, the twin has %v", where, near, want)
				}
				got, found := r.Nearest(sa, sb)
				if found != (len(want) > 0) {
					t.Fatalf("%sNearest finds %v, the twin has %v", where, found, want)
				}
				if !found {
					continue
				}
				nears++
				lacks := int64(0)
				for _, p := range want {
					lacks = max(lacks, p.lacks())
				}
				if !slices.ContainsFunc(want, func(p twinPlace) bool {
					sq, _ := p.distance.Float64()
					return p.lacks() == lacks && p.rule == got.Rule && p.spacing == got.Spacing && math.Abs(sq-got.DistanceSq) < 1e-6
				}) || got.Lacks != lacks {
					t.Fatalf("%sNearest gives %+v, the twin has %v", where, got, want)
				}
				byRule[got.Rule]++
			}
			for rule := range Rule(len(ruleKeys)) {
				if byRule[rule] == 0 && (rule != Other || c.slanted) {
					t.Errorf("no pair was told by %s", rule)
				}
			}
			t.Logf("%d of %d near: %v", nears, c.trials, byRule)
		})
	}
}

func (p twinPlace) lacks() int64 {
	have := int64(0)
	for !lower(p.distance, num((have+1)*(have+1))) {
		have++
	}
	return p.spacing - have
}

func (p twinPlace) String() string {
	return fmt.Sprintf("{%s %d: %s}", p.rule, p.spacing, p.distance.RatString())
}
