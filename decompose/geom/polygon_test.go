package geom

import (
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"
)

// ratWind is how often an outline winds around a point that is not on it.
func ratWind(outline []Point, p rat) int {
	wind := 0
	for i, a := range outline {
		b := outline[(i+1)%len(outline)]
		ra, rb := ratOf(a), ratOf(b)
		up := ra.y.Cmp(p.y) <= 0 && rb.y.Cmp(p.y) > 0
		down := rb.y.Cmp(p.y) <= 0 && ra.y.Cmp(p.y) > 0
		if !up && !down {
			continue
		}
		side := ratCross(rb.minus(ra), p.minus(ra)).Sign()
		if up && side > 0 {
			wind++
		} else if down && side < 0 {
			wind--
		}
	}
	return wind
}

func ratFilled(outline []Point, fill Fill, p rat) bool {
	w := ratWind(outline, p)
	if fill == EvenOdd {
		return w%2 != 0
	}
	return w != 0
}

// ratBoundary is the slow twin of boundary: every edge cut at every meeting with another, and each piece kept that has
// filled area on either side. Coordinates up to about 20 keep different pieces more than 1e-6 apart.
func ratBoundary(outline []Point, fill Fill) (pieces [][2]rat) {
	n := len(outline)
	one := big.NewRat(1, 1)
	for i, p := range outline {
		q := outline[(i+1)%n]
		if p == q {
			continue
		}
		a, b := ratOf(p), ratOf(q)
		u := b.minus(a)
		cuts := []*big.Rat{new(big.Rat), one}
		for j, r := range outline {
			c, d := ratOf(r), ratOf(outline[(j+1)%n])
			v, w := d.minus(c), c.minus(a)
			if den := ratCross(u, v); den.Sign() != 0 {
				t, s := ratCross(w, v), ratCross(w, u)
				if s.Quo(s, den); s.Sign() >= 0 && s.Cmp(one) <= 0 {
					cuts = append(cuts, t.Quo(t, den))
				}
			} else if ratCross(u, w).Sign() == 0 {
				for _, e := range []rat{c, d} {
					t := ratDot(u, e.minus(a))
					cuts = append(cuts, t.Quo(t, ratDot(u, u)))
				}
			}
		}
		cuts = slices.DeleteFunc(cuts, func(t *big.Rat) bool { return t.Sign() < 0 || t.Cmp(one) > 0 })
		slices.SortFunc(cuts, (*big.Rat).Cmp)
		for k := 1; k < len(cuts); k++ {
			if cuts[k-1].Cmp(cuts[k]) == 0 {
				continue
			}
			from, to := a.at(cuts[k-1], u), a.at(cuts[k], u)
			mid := from.at(big.NewRat(1, 2), to.minus(from))
			tiny := big.NewRat(1, 1e12)
			left, right := mid.at(tiny, rat{new(big.Rat).Neg(u.y), u.x}), mid.at(tiny, rat{u.y, new(big.Rat).Neg(u.x)})
			if ratFilled(outline, fill, left) || ratFilled(outline, fill, right) {
				pieces = append(pieces, [2]rat{from, to})
			}
		}
	}
	return pieces
}

// ratDistance is the squared distance of two figures; ok is false where one has no area.
func ratDistance(f []Point, ff Fill, g []Point, gf Fill) (distance *big.Rat, ok bool) {
	fp, gp := ratBoundary(f, ff), ratBoundary(g, gf)
	if len(fp) == 0 || len(gp) == 0 {
		return nil, false
	}
	for _, p := range fp {
		for _, q := range gp {
			if d := ratSegments(p[0], p[1], q[0], q[1]); distance == nil || d.Cmp(distance) < 0 {
				distance = d
			}
		}
	}
	if distance.Sign() == 0 {
		return distance, true
	}
	for _, p := range fp {
		if ratFilled(g, gf, p[0]) {
			return new(big.Rat), true
		}
	}
	for _, q := range gp {
		if ratFilled(f, ff, q[0]) {
			return new(big.Rat), true
		}
	}
	return distance, true
}

// relation is the greatest over the pairs of bands whose boxes are nearer than s, as a caller would ask.
func relation(p *Polygon, pp Placement, q *Polygon, qp Placement, s int64) Relation {
	best := Far
	for i, a := range p.Bands() {
		for j, b := range q.Bands() {
			if RectsRelation(pp.ApplyRect(a.Box), qp.ApplyRect(b.Box), s) != Far {
				best = max(best, BandRelation(p, i, pp, q, j, qp, s))
			}
		}
	}
	return best
}

func rectRelation(p *Polygon, pp Placement, r Rect, s int64) Relation {
	best := Far
	for i, a := range p.Bands() {
		if RectsRelation(pp.ApplyRect(a.Box), r, s) != Far {
			best = max(best, BandRectRelation(p, i, pp, r, s))
		}
	}
	return best
}

func randomOutline(rng *rand.Rand, n int, size int64) []Point {
	var out []Point
	for range n {
		out = append(out, Point{rng.Int64N(size), rng.Int64N(size)})
	}
	return out
}

// crowdedOutline also comes back to earlier points, so that edges are drawn twice, or there and back.
func crowdedOutline(rng *rand.Rand, n int, size int64) []Point {
	out := randomOutline(rng, n, size)
	for i := range out {
		if rng.IntN(8) == 0 {
			out = append(out, out[i])
		}
		if rng.IntN(8) == 0 {
			out[i] = out[rng.IntN(n)]
		}
	}
	return out
}

func placedPoints(at Placement, outline []Point) []Point {
	var out []Point
	for _, p := range outline {
		out = append(out, at.Apply(p))
	}
	return out
}

func randomPlacement(rng *rand.Rand, shift int64) Placement {
	return Placement{uint8(rng.IntN(8)), rng.Int64N(2*shift+1) - shift, rng.Int64N(2*shift+1) - shift}
}

// Small crowded outlines: self-crossing, with edges drawn there and back, points on edges, one inside the other.
func TestPolygonRelationAgainstFractions(t *testing.T) {
	rng := rand.New(rand.NewPCG(23, 24))
	seen := map[Relation]int{}
	for range 1200 {
		size := 2 + rng.Int64N(9)
		f, g := crowdedOutline(rng, 2+rng.IntN(6), size), crowdedOutline(rng, 3+rng.IntN(4), 2+rng.Int64N(7))
		ff, gf := Fill(rng.IntN(2)), Fill(rng.IntN(2))
		fp, gp := randomPlacement(rng, 4), randomPlacement(rng, 4)
		p, q := NewPolygon(f, ff), NewPolygon(g, gf)
		distance, ok := ratDistance(placedPoints(fp, f), ff, placedPoints(gp, g), gf)
		if ok != (p.HasArea() && q.HasArea()) {
			t.Fatalf("%v %d: area %v; %v %d: area %v", f, ff, p.HasArea(), g, gf, q.HasArea())
		}
		if !ok {
			continue
		}
		root := new(big.Int).Sqrt(new(big.Int).Quo(distance.Num(), distance.Denom())).Int64()
		for _, s := range []int64{max(root, 1), root + 1, root + 2} {
			want := relationOf(distance, s)
			seen[want]++
			if got := relation(p, fp, q, gp, s); got != want {
				t.Fatalf("%v %d at %v, %v %d at %v, spacing %d: %d, want %d", f, ff, fp, g, gf, gp, s, got, want)
			}
			if got := relation(q, gp, p, fp, s); got != want {
				t.Fatalf("%v %d at %v, %v %d at %v, spacing %d, exchanged: %d, want %d", f, ff, fp, g, gf, gp, s, got, want)
			}
		}
		x, y := rng.Int64N(size+12)-6, rng.Int64N(size+12)-6
		r := Rect{x, y, x + rng.Int64N(4), y + rng.Int64N(4)}
		if r.X1 < r.X2 && r.Y1 < r.Y2 {
			distance, _ = ratDistance(placedPoints(fp, f), ff, []Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}}, EvenOdd)
			for s := int64(1); s < 8; s++ {
				if got, want := rectRelation(p, fp, r, s), relationOf(distance, s); got != want {
					t.Fatalf("%v %d at %v, %v, spacing %d: %d, want %d", f, ff, fp, r, s, got, want)
				}
			}
		}
	}
	for r := Far; r <= Touch; r++ {
		if seen[r] < 200 {
			t.Errorf("relation %d came only %d times", r, seen[r])
		}
	}
}

// ring is a circle of n points with a hole of n more, joined by a keyhole.
func ring(n int, outer, inner float64) []Point {
	var out []Point
	for i := range n + 1 {
		sin, cos := math.Sincos(2 * math.Pi * float64(i%n) / float64(n))
		out = append(out, Point{int64(outer * cos), int64(outer * sin)})
	}
	for i := range n + 1 {
		sin, cos := math.Sincos(-2 * math.Pi * float64(i%n) / float64(n))
		out = append(out, Point{int64(inner * cos), int64(inner * sin)})
	}
	return out
}

// allEdges is the slow twin with every edge against every edge, for outlines whose edges do not overlap.
func allEdges(f []Point, ff Fill, g []Point, gf Fill, s int64) Relation {
	best := Far
	for i, a := range f {
		for j, c := range g {
			best = max(best, SegmentsRelation(a, f[(i+1)%len(f)], c, g[(j+1)%len(g)], s))
		}
	}
	if best == Touch || ratFilled(g, gf, ratOf(f[0])) || ratFilled(f, ff, ratOf(g[0])) {
		return Touch
	}
	return best
}

// Outlines of many points, so that they have many bands.
func TestPolygonRelationAcrossManyBands(t *testing.T) {
	rng := rand.New(rand.NewPCG(25, 26))
	seen := map[Relation]int{}
	star := func(n int, reach int64) []Point {
		var out []Point
		for i := range n {
			sin, cos := math.Sincos(2 * math.Pi * float64(i) / float64(n))
			r := float64(reach) * (0.3 + 0.7*rng.Float64())
			out = append(out, Point{int64(r * cos), int64(r * sin)})
		}
		return out
	}
	wire := func(long, wide int64) []Point { // a slanted one
		x, y := rng.Int64N(long)+long/4, rng.Int64N(long)
		return []Point{{0, 0}, {x, y}, {x - wide, y + wide}, {-wide, wide}}
	}
	for range 3000 {
		draw := func() []Point {
			switch rng.IntN(5) {
			case 0:
				return star(8+rng.IntN(120), 1000)
			case 1:
				return ring(6+rng.IntN(60), 1000, 900)
			case 2:
				return wire(4000, 1+rng.Int64N(30))
			case 3:
				return star(4+rng.IntN(20), 60)
			}
			return randomOutline(rng, 4+rng.IntN(30), 1500)
		}
		f, g := draw(), draw()
		ff, gf := Fill(rng.IntN(2)), Fill(rng.IntN(2))
		fp, gp := randomPlacement(rng, 1200), randomPlacement(rng, 1200)
		s := 1 + rng.Int64N(200)
		want := allEdges(placedPoints(fp, f), ff, placedPoints(gp, g), gf, s)
		seen[want]++
		p, q := NewPolygon(f, ff), NewPolygon(g, gf)
		if got := relation(p, fp, q, gp, s); got != want {
			t.Fatalf("%v %d at %v, %v %d at %v, spacing %d: %d, want %d", f, ff, fp, g, gf, gp, s, got, want)
		}
		x, y := rng.Int64N(2400)-1200, rng.Int64N(2400)-1200
		r := Rect{x, y, x + 1 + rng.Int64N(100), y + 1 + rng.Int64N(100)}
		want = allEdges(placedPoints(fp, f), ff, []Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}}, EvenOdd, s)
		if got := rectRelation(p, fp, r, s); got != want {
			t.Fatalf("%v %d at %v, %v, spacing %d: %d, want %d", f, ff, fp, r, s, got, want)
		}
		spot := at(rng, f, fp)
		want = Far
		if ratOnOrIn(placedPoints(fp, f), ff, spot) {
			want = Touch
		}
		if got := rectRelation(p, fp, Rect{spot.X, spot.Y, spot.X, spot.Y}, 0); got != want {
			t.Fatalf("%v %d at %v, point %v: %d, want %d", f, ff, fp, spot, got, want)
		}
	}
	for r := Far; r <= Touch; r++ {
		if seen[r] < 50 {
			t.Errorf("relation %d came only %d times", r, seen[r])
		}
	}
}

// at is a point near a placed outline, often on it.
func at(rng *rand.Rand, outline []Point, pp Placement) Point {
	p := outline[rng.IntN(len(outline))]
	return pp.Apply(Point{p.X + rng.Int64N(3) - 1, p.Y + rng.Int64N(3) - 1})
}

func ratOnOrIn(outline []Point, fill Fill, p Point) bool {
	for i, a := range outline {
		if SegmentsMeet(a, outline[(i+1)%len(outline)], p, p) {
			return true
		}
	}
	return ratFilled(outline, fill, ratOf(p))
}

func TestPolygonHoles(t *testing.T) {
	// a frame with corners cut, hole by a keyhole
	frame := []Point{{0, 10}, {10, 0}, {90, 0}, {100, 10}, {100, 90}, {90, 100}, {10, 100}, {0, 90},
		{0, 50}, {20, 50}, {20, 80}, {80, 80}, {80, 20}, {20, 20}, {20, 50}, {0, 50}}
	p := NewPolygon(frame, EvenOdd)
	diamond := func(x, y, r int64) *Polygon {
		return NewPolygon([]Point{{x - r, y}, {x, y - r}, {x + r, y}, {x, y + r}}, EvenOdd)
	}
	var here Placement
	for _, c := range []struct {
		name string
		q    *Polygon
		s    int64
		want Relation
	}{
		{"in the hole, 20 from its sides", diamond(50, 50, 10), 20, Far},
		{"in the hole, nearer than 21", diamond(50, 50, 10), 21, Near},
		{"touches the side of the hole", diamond(50, 50, 30), 5, Touch},
		{"inside the filled part", diamond(10, 30, 3), 5, Touch},
		{"on the keyhole, inside", diamond(10, 50, 3), 5, Touch},
		{"around all", diamond(50, 50, 500), 5, Touch},
		{"outside, past the cut corner: (0,0) is 5 sqrt 2 = 7.07 away", diamond(-3, 0, 3), 8, Near},
		{"outside, past the cut corner, spacing 7", diamond(-3, 0, 3), 7, Far},
	} {
		if got := relation(p, here, c.q, here, c.s); got != c.want {
			t.Errorf("%s, spacing %d: %d, want %d", c.name, c.s, got, c.want)
		}
	}
}

// Edges drawn there and back are no part of the figure: a line between two triangles does not touch what lies on it.
func TestPolygonForgetsEmptyEdges(t *testing.T) {
	outline := []Point{{0, 0}, {10, 10}, {0, 20}, {10, 10}, {100, 10}, {110, 0}, {110, 20}, {100, 10}, {10, 10}}
	for _, fill := range []Fill{EvenOdd, NonZero} {
		p := NewPolygon(outline, fill)
		if !p.HasArea() || p.Box() != (Rect{100, 0, 110, 20}) {
			t.Errorf("fill %d: box %v", fill, p.Box())
		}
	}
	dumbbell := []Point{{0, 0}, {10, 10}, {100, 10}, {110, 0}, {110, 20}, {100, 10}, {10, 10}, {0, 20}}
	p := NewPolygon(dumbbell, EvenOdd)
	if got := rectRelation(p, Placement{}, Rect{50, 5, 60, 15}, 40); got != Far {
		t.Errorf("a box on the empty line: %d", got)
	}
	if got := rectRelation(p, Placement{}, Rect{50, 5, 60, 15}, 41); got != Near {
		t.Errorf("a box 40 from either triangle, spacing 41: %d", got)
	}
	for _, empty := range [][]Point{nil, {{1, 1}}, {{0, 0}, {5, 7}}, {{0, 0}, {6, 8}, {3, 4}}, {{0, 0}, {5, 0}, {5, 5}, {0, 0}, {5, 5}, {5, 0}}} {
		if q := NewPolygon(empty, NonZero); q.HasArea() || len(q.Bands()) != 0 {
			t.Errorf("%v has area", empty)
		}
	}
	eight := []Point{{0, 0}, {10, 10}, {10, 0}, {0, 10}} // its signed area cancels
	if q := NewPolygon(eight, EvenOdd); !q.HasArea() || q.Box() != (Rect{0, 0, 10, 10}) {
		t.Errorf("figure of eight: box %v", q.Box())
	}
}

// The edges of a lying triangle, whichever way they are kept, and whatever is drawn besides.
func TestPolygonEdges(t *testing.T) {
	for _, turn := range []uint8{0, 1} {
		at := Placement{Turn: turn}
		p := NewPolygon(placedPoints(at, []Point{{0, 0}, {60, 0}, {90, 0}, {60, 0}, {0, 30}}), EvenOdd)
		got := map[[2]Point]bool{}
		for a, b := range p.Edges {
			got[[2]Point{a, b}] = true
			got[[2]Point{b, a}] = true
		}
		corners := placedPoints(at, []Point{{0, 0}, {60, 0}, {0, 30}})
		for i, c := range corners {
			if !got[[2]Point{c, corners[(i+1)%3]}] {
				t.Errorf("turn %d: no edge from %v: %v", turn, c, got)
			}
		}
		if len(got) != 6 {
			t.Errorf("turn %d: %d edges", turn, len(got)/2)
		}
	}
}

// Bands that are far apart need no edges.
func TestBandsFarApart(t *testing.T) {
	p := NewPolygon(ring(8, 100, 0)[:9], EvenOdd)
	if got := BandRelation(p, 0, Placement{}, p, 0, Placement{X: 300}, 100); got != Far {
		t.Errorf("boxes 100 apart, spacing 100: %d", got)
	}
	if got := BandRectRelation(p, 0, Placement{}, Rect{200, -5, 210, 5}, 100); got != Far {
		t.Errorf("a rectangle 100 apart, spacing 100: %d", got)
	}
	if got := BandRectRelation(p, 0, Placement{}, Rect{200, -5, 210, 5}, 101); got != Near {
		t.Errorf("a rectangle 100 apart, spacing 101: %d", got)
	}
}

// A ring that embraces everything has small boxes, and about as many entries as points.
func TestBandsAreSmall(t *testing.T) {
	for _, c := range []struct {
		name    string
		outline []Point
		bands   int     // at most
		cover   float64 // sum of the areas of the boxes by the area of the box around all, at most
	}{
		{"octagon", ring(8, 100, 0)[:9], 1, 1},
		{"ring of 1000 points", ring(1000, 1e6, 0.98e6), 300, 0.2},
		{"thin ring of 16 points", ring(16, 1e6, 0.99e6), 300, 0.25},
		{"wire at 45 degrees", []Point{{0, 0}, {100000, 100000}, {99900, 100100}, {-100, 100}}, 130, 0.02},
		{"slanted wire, nearly level", []Point{{0, 0}, {100000, 3000}, {100000, 3100}, {0, 100}}, 130, 0.2},
	} {
		p := NewPolygon(c.outline, EvenOdd)
		var sum float64
		for _, b := range p.Bands() {
			sum += float64(b.Box.X2-b.Box.X1) * float64(b.Box.Y2-b.Box.Y1)
		}
		box := p.Box()
		sum /= float64(box.X2-box.X1) * float64(box.Y2-box.Y1)
		if len(p.Bands()) > c.bands || sum > c.cover || len(p.lists) > 20*len(c.outline)+600 {
			t.Errorf("%s: %d bands, %d entries, boxes cover %.3f", c.name, len(p.Bands()), len(p.lists), sum)
		}
	}
}

func TestPolygonAtTheEndsOfThePlane(t *testing.T) {
	const l = Limit
	// two triangles with long sides parallel to a diagonal of the plane, 3-4-5: apart by 5 exactly
	p := NewPolygon([]Point{{-l, 0}, {0, -l}, {-l, -l}}, EvenOdd)
	if got := rectRelation(p, Placement{}, Rect{0, 0, 0, 0}, 1<<33); got != Far { // distance Limit / sqrt 2 = 1.21e10
		t.Errorf("origin, spacing 2^33: %d", got)
	}
	if got := rectRelation(p, Placement{}, Rect{0, 0, 0, 0}, 12147999999+1000001); got != Near {
		t.Errorf("origin, just beyond: %d", got)
	}
	long := []Point{{-l, -l + 7}, {l - 1, l + 6 - 1}, {-l, l}} // along y = x + 7
	other := []Point{{-l, -l}, {l, l}, {l, -l}}                // along y = x
	a, b := NewPolygon(long, EvenOdd), NewPolygon(other, EvenOdd)
	// their distance is 7 / sqrt 2 = 4.95
	for s, want := range map[int64]Relation{4: Far, 5: Near} {
		if got := relation(a, Placement{}, b, Placement{}, s); got != want {
			t.Errorf("sides along the diagonal, spacing %d: %d, want %d", s, got, want)
		}
		if got := relation(b, Placement{}, a, Placement{}, s); got != want {
			t.Errorf("sides along the diagonal, exchanged, spacing %d: %d, want %d", s, got, want)
		}
	}
}

func BenchmarkNewPolygonOctagon(b *testing.B) {
	outline := ring(8, 100, 0)[:9]
	b.ReportAllocs()
	for b.Loop() {
		NewPolygon(outline, EvenOdd)
	}
}

func BenchmarkNewPolygonRing(b *testing.B) {
	outline := ring(1000, 1e6, 0.9e6)
	b.ReportAllocs()
	for b.Loop() {
		NewPolygon(outline, EvenOdd)
	}
}

func BenchmarkBandRelationOctagons(b *testing.B) {
	p := NewPolygon(ring(8, 100, 0)[:9], EvenOdd)
	b.ReportAllocs()
	for b.Loop() {
		BandRelation(p, 0, Placement{}, p, 0, Placement{1, 220, 30}, 36)
	}
}

func BenchmarkBandRectRelation(b *testing.B) {
	p := NewPolygon(ring(8, 100, 0)[:9], EvenOdd)
	b.ReportAllocs()
	for b.Loop() {
		BandRectRelation(p, 0, Placement{1, 220, 30}, Rect{0, 0, 100, 20}, 36)
	}
}
