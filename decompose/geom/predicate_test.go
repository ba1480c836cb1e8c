package geom

import (
	"math/big"
	"math/rand/v2"
	"testing"
)

// rat is a point with rational coordinates: the slow twin of Point.
type rat struct{ x, y *big.Rat }

func ratOf(p Point) rat {
	return rat{new(big.Rat).SetInt64(p.X), new(big.Rat).SetInt64(p.Y)}
}

func (p rat) minus(q rat) rat {
	return rat{new(big.Rat).Sub(p.x, q.x), new(big.Rat).Sub(p.y, q.y)}
}

// at is p + t*v.
func (p rat) at(t *big.Rat, v rat) rat {
	x, y := new(big.Rat).Mul(t, v.x), new(big.Rat).Mul(t, v.y)
	return rat{x.Add(x, p.x), y.Add(y, p.y)}
}

func ratCross(u, v rat) *big.Rat {
	a, b := new(big.Rat).Mul(u.x, v.y), new(big.Rat).Mul(u.y, v.x)
	return a.Sub(a, b)
}

func ratDot(u, v rat) *big.Rat {
	a, b := new(big.Rat).Mul(u.x, v.x), new(big.Rat).Mul(u.y, v.y)
	return a.Add(a, b)
}

// ratPointSegment is the squared distance of p from the segment ab: the foot of the perpendicular, held between the ends.
func ratPointSegment(p, a, b rat) *big.Rat {
	u, v := b.minus(a), p.minus(a)
	n, t := ratDot(u, u), ratDot(u, v)
	if n.Sign() > 0 && t.Sign() > 0 {
		if t.Cmp(n) >= 0 {
			v = p.minus(b)
		} else {
			v = p.minus(a.at(t.Quo(t, n), u))
		}
	}
	return ratDot(v, v)
}

// ratSegments is the squared distance of two segments, with the meeting point found by solving for it.
func ratSegments(a, b, c, d rat) *big.Rat {
	u, v, w := b.minus(a), d.minus(c), c.minus(a)
	if den := ratCross(u, v); den.Sign() != 0 {
		s, t := ratCross(w, v), ratCross(w, u)
		s.Quo(s, den)
		t.Quo(t, den)
		one := big.NewRat(1, 1)
		if s.Sign() >= 0 && s.Cmp(one) <= 0 && t.Sign() >= 0 && t.Cmp(one) <= 0 {
			return new(big.Rat)
		}
	}
	best := ratPointSegment(a, c, d)
	for _, other := range []*big.Rat{ratPointSegment(b, c, d), ratPointSegment(c, a, b), ratPointSegment(d, a, b)} {
		if other.Cmp(best) < 0 {
			best = other
		}
	}
	return best
}

func relationOf(distanceSq *big.Rat, s int64) Relation {
	switch {
	case distanceSq.Sign() == 0:
		return Touch
	case s > 0 && distanceSq.Cmp(new(big.Rat).SetInt(new(big.Int).Mul(big.NewInt(s), big.NewInt(s)))) < 0:
		return Near
	}
	return Far
}

// randomNumber is small, or near an end of the plane, or anything.
func randomNumber(rng *rand.Rand) int64 {
	switch rng.IntN(4) {
	case 0:
		return rng.Int64N(9) - 4
	case 1:
		return Limit - rng.Int64N(3)
	case 2:
		return -Limit + rng.Int64N(3)
	}
	return rng.Int64N(2*Limit+1) - Limit
}

func TestOrientAgainstBig(t *testing.T) {
	rng := rand.New(rand.NewPCG(13, 14))
	for range 20000 {
		var p [3]Point
		for i := range p {
			p[i] = Point{randomNumber(rng), randomNumber(rng)}
		}
		if rng.IntN(3) == 0 { // nearly on a line: b halfway between a and c, or one off
			p[1] = Point{(p[0].X + p[2].X) / 2, (p[0].Y+p[2].Y)/2 + rng.Int64N(2)}
		}
		a, b, c := ratOf(p[0]), ratOf(p[1]), ratOf(p[2])
		want := ratCross(b.minus(a), c.minus(a)).Sign()
		if got := Orient(p[0], p[1], p[2]); got != want {
			t.Fatalf("Orient%v = %d, want %d", p, got, want)
		}
		if got := Orient(p[1], p[0], p[2]); got != -want {
			t.Fatalf("Orient of %v with the first two exchanged = %d, want %d", p, got, -want)
		}
	}
}

func TestSegmentsRelationAgainstBig(t *testing.T) {
	rng := rand.New(rand.NewPCG(15, 16))
	seen := map[Relation]int{}
	for n := range 20000 {
		var p [4]Point
		for i := range p {
			p[i] = Point{randomNumber(rng), randomNumber(rng)}
		}
		switch n % 4 {
		case 0: // crowded
			for i := range p {
				p[i] = Point{rng.Int64N(7), rng.Int64N(7)}
			}
		case 1: // long and close to parallel
			p[2], p[3] = Point{p[0].X + rng.Int64N(5), p[0].Y - rng.Int64N(5)}, Point{p[1].X - rng.Int64N(5), p[1].Y + rng.Int64N(5)}
		case 2: // an end close to the middle of the other
			p[2] = Point{(p[0].X+p[1].X)/2 + rng.Int64N(3), (p[0].Y + p[1].Y) / 2}
		}
		distance := ratSegments(ratOf(p[0]), ratOf(p[1]), ratOf(p[2]), ratOf(p[3]))
		// the spacing at which the answer changes, and its neighbours
		root := new(big.Int).Sqrt(new(big.Int).Quo(distance.Num(), distance.Denom())).Int64()
		for _, s := range []int64{0, 1, root - 1, root, root + 1, root + 2, 1 << 31, 1<<31 + 1, 1 << 40} {
			want := relationOf(distance, s)
			seen[want]++
			for _, order := range [][4]int{{0, 1, 2, 3}, {1, 0, 2, 3}, {2, 3, 0, 1}, {3, 2, 1, 0}} {
				if got := SegmentsRelation(p[order[0]], p[order[1]], p[order[2]], p[order[3]], s); got != want {
					t.Fatalf("%v order %v spacing %d: %d, want %d", p, order, s, got, want)
				}
			}
			if got := SegmentsMeet(p[0], p[1], p[2], p[3]); got != (distance.Sign() == 0) {
				t.Fatalf("SegmentsMeet%v = %v", p, got)
			}
		}
	}
	for r := Far; r <= Touch; r++ {
		if seen[r] < 1000 {
			t.Errorf("relation %d came only %d times", r, seen[r])
		}
	}
}

// A distance of exactly the spacing is far enough, one unit less is not: Pythagorean triples give whole distances at an
// angle, here from a corner, and from the middle of a slanted edge.
func TestSpacingIsFarEnough(t *testing.T) {
	for _, triple := range [][3]int64{{3, 4, 5}, {5, 12, 13}, {20, 21, 29}, {0, 1, 1}} {
		for _, scale := range []int64{1, 1000, 1 << 20, 1 << 28} {
			dx, dy, s := triple[0]*scale, triple[1]*scale, triple[2]*scale
			for turn := range uint8(8) {
				for _, at := range []Placement{{turn, 0, 0}, {turn, Limit - 1<<33, Limit - 1<<33}, {turn, -Limit + 1<<33, -Limit + 1<<33}} {
					if scale == 1<<28 && at.X != 0 {
						continue
					}
					// a edge through the origin, at a right angle to (dx, dy), and a point beside its middle
					a, b := at.Apply(Point{-dy, dx}), at.Apply(Point{dy, -dx})
					corner, far := at.Apply(Point{dx, dy}), at.Apply(Point{2 * dx, 2 * dy})
					origin := at.Apply(Point{})
					for _, c := range []struct {
						name    string
						a, b    Point
						spacing int64
						want    Relation
					}{
						{"corner to corner", origin, origin, s, Far},
						{"corner to corner", origin, origin, s - 1, Far},
						{"corner to corner", origin, origin, s + 1, Near},
						{"corner to edge", a, b, s, Far},
						{"corner to edge", a, b, s - 1, Far},
						{"corner to edge", a, b, s + 1, Near},
					} {
						if got := SegmentsRelation(c.a, c.b, corner, far, c.spacing); got != c.want {
							t.Errorf("%v * %d %v, %s, spacing %d: %d, want %d", triple, scale, at, c.name, c.spacing, got, c.want)
						}
					}
				}
			}
		}
	}
}

func TestRectsRelation(t *testing.T) {
	rng := rand.New(rand.NewPCG(17, 18))
	for range 20000 {
		side := []int64{8, 100, 1 << 31}[rng.IntN(3)]
		number := func() int64 { return rng.Int64N(2*side) - side }
		rect := func() Rect {
			x1, x2, y1, y2 := number(), number(), number(), number()
			return Rect{min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)}
		}
		a, b := rect(), rect()
		dx, dy := RectGap(a, b)
		sq := new(big.Int).Add(new(big.Int).Mul(big.NewInt(dx), big.NewInt(dx)), new(big.Int).Mul(big.NewInt(dy), big.NewInt(dy)))
		root := new(big.Int).Sqrt(sq).Int64()
		for _, s := range []int64{1, root, root + 1} {
			s = min(s, 1<<31)
			want := relationOf(new(big.Rat).SetInt(sq), s)
			narrow := func(r Rect) Rect32 { return Rect32{int32(r.X1), int32(r.Y1), int32(r.X2), int32(r.Y2)} }
			if got := RectsRelation(a, b, s); got != want {
				t.Fatalf("%v %v spacing %d: %d, want %d", a, b, s, got, want)
			}
			if got := Rects32Relation(narrow(b), narrow(a), s); got != want {
				t.Fatalf("%v %v spacing %d, lean: %d, want %d", b, a, s, got, want)
			}
		}
	}
}

func BenchmarkSegmentsRelation(b *testing.B) {
	for b.Loop() {
		SegmentsRelation(Point{0, 0}, Point{300, 400}, Point{30, -20}, Point{500, 380}, 60)
	}
}

func BenchmarkSegmentsRelationLong(b *testing.B) {
	for b.Loop() {
		SegmentsRelation(Point{0, 0}, Point{3 << 32, 4 << 32}, Point{30, -20}, Point{5 << 32, 38 << 29}, 60)
	}
}

func BenchmarkRects32Relation(b *testing.B) {
	p, q := Rect32{0, 0, 100, 20}, Rect32{110, 25, 200, 50}
	n := 0
	for b.Loop() {
		n += int(Rects32Relation(p, q, 36))
	}
}
