package geometry

import (
	"math"
	"math/rand/v2"
	"testing"

	sf "github.com/peterstace/simplefeatures/geom"

	"maskpair/decompose/geom"
)

// This file asks the judge how far two figures are apart.

// equal is the difference below which a distance is taken for a whole number. Between figures in the window, squared
// distances are fractions c*c/n with n at most 2*300*300; so a distance that differs from a whole number s differs by at
// least 1/n/(d+s) > 6e-9, and the judge's errors are below 1e-11.
const equal = 1e-9

// frames are the ways in which the package under test gets a pair of figures.
func frames(rng *rand.Rand) (a, b frame) {
	placement := func(reach int64) geom.Placement {
		return geom.Placement{Turn: uint8(rng.IntN(8)), X: rng.Int64N(2*reach+1) - reach, Y: rng.Int64N(2*reach+1) - reach}
	}
	grow, far := int64(1), geom.Point{}
	switch rng.IntN(4) {
	case 1: // a corner of the 32-bit plane
		const end = 1<<31 - 1 - window
		far = geom.Point{X: end * (rng.Int64N(2)*2 - 1), Y: end * (rng.Int64N(2)*2 - 1)}
	case 2: // anywhere the package allows
		const end = 1<<34 - 1 - window
		far = geom.Point{X: rng.Int64N(2*end) - end, Y: rng.Int64N(2*end) - end}
	case 3: // as large as the 32-bit plane in half units, and larger
		grow = 1 << (10 + rng.IntN(16))
	}
	reach := int64(1 << 20)
	if grow == 1 && far == (geom.Point{}) {
		reach = 1 << 33
	}
	manhattan := rng.IntN(4) > 0
	return frame{grow, far, placement(reach), !manhattan}, frame{grow, far, placement(reach), !manhattan}
}

func TestRelationAgainstSimplefeatures(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 1))
	seen := map[geom.Relation]int{}
	whole := 0
	for n := range 8000 {
		a, b := draw(t, rng), draw(t, rng)
		d := judged(t, a, b)
		fa, fb := frames(rng)
		if fa.grow > 1 && rng.IntN(2) == 0 { // small shifts do not matter; none keeps it within the plane
			fa.local, fb.local = geom.Placement{Turn: fa.local.Turn}, geom.Placement{Turn: fb.local.Turn}
		}
		pa, pb := build(t, a, fa), build(t, b, fb)
		near := int64(math.Round(d))
		exact := math.Abs(d-float64(near)) < equal
		if exact && d > 0 {
			whole++
		}
		for _, s := range []int64{near - 1, near, near + 1, int64(math.Ceil(d)), 1 + rng.Int64N(300)} {
			if s <= 0 || pa.poly == nil && pb.poly == nil && s*fa.grow > 1<<31-1 {
				continue // rectangles alone are compared for spacings of up to 2^31
			}
			want := geom.Far
			switch {
			case d == 0:
				want = geom.Touch
			case d < float64(s)-equal:
				want = geom.Near
			}
			got, back := relation(pa, pb, s*fa.grow), relation(pb, pa, s*fa.grow)
			if got != want || back != want {
				t.Fatalf("pair %d, spacing %d: relation %d, turned round %d; the judge's distance %.12g says %d\n%+v\n%+v\nframes %+v %+v", n, s, got, back, d, want, a, b, fa, fb)
			}
			seen[got]++
			if exact && d > 0 && s == near { // one unit of the grown plane more is near, one less is far
				if relation(pa, pb, s*fa.grow+1) != geom.Near || relation(pa, pb, s*fa.grow-1) != geom.Far {
					t.Fatalf("pair %d: one unit beside the distance %d * %d the relation is wrong\n%+v\n%+v", n, s, fa.grow, a, b)
				}
			}
		}
	}
	t.Logf("%v relations (0 far, 1 near, 2 touch); %d pairs whose distance is a whole number", seen, whole)
	if seen[geom.Far] < 3000 || seen[geom.Near] < 3000 || seen[geom.Touch] < 3000 || whole < 300 {
		t.Errorf("the pairs are too one-sided to tell much: %v, %d whole distances", seen, whole)
	}
}

// TestSegmentsAgainstSimplefeatures compares segments, points included, on so small a grid that all special cases are common.
func TestSegmentsAgainstSimplefeatures(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 2))
	line := func(a, b geom.Point) sf.Geometry {
		if a == b {
			return sf.NewPoint(sf.Coordinates{XY: sf.XY{X: float64(a.X), Y: float64(a.Y)}, Type: sf.DimXY}).AsGeometry()
		}
		return sf.NewLineString(sf.NewSequence([]float64{float64(a.X), float64(a.Y), float64(b.X), float64(b.Y)}, sf.DimXY)).AsGeometry()
	}
	for n := range 40000 {
		size := int64(2 + n%40)
		var p, q [4]geom.Point
		grow := int64(1) << rng.IntN(28)
		far := geom.Point{X: rng.Int64N(1<<32) - 1<<31, Y: rng.Int64N(1<<32) - 1<<31}
		for i := range p {
			p[i] = geom.Point{X: rng.Int64N(size), Y: rng.Int64N(size)}
			q[i] = geom.Point{X: p[i].X*grow + far.X, Y: p[i].Y*grow + far.Y}
		}
		u, v := line(p[0], p[1]), line(p[2], p[3])
		d, _ := sf.Distance(u, v)
		if got := geom.SegmentsMeet(q[0], q[1], q[2], q[3]); got != sf.Intersects(u, v) || got != (d == 0) {
			t.Fatalf("segments %v meet: %v; the judge's distance is %g", p, got, d)
		}
		for s := int64(math.Floor(d)); s <= int64(d)+2; s++ {
			want := geom.Far
			switch {
			case d == 0:
				want = geom.Touch
			case d < float64(s)-equal:
				want = geom.Near
			}
			if got := geom.SegmentsRelation(q[0], q[1], q[2], q[3], s*grow); got != want {
				t.Fatalf("segments %v, spacing %d: relation %d; the judge's distance %.12g says %d (grown %d times, at %v)", p, s, got, d, want, grow, far)
			}
		}
	}
}

// TestLargeFiguresAgainstSimplefeatures gives both sides the same figures over the whole 32-bit plane. There the judge's
// cross products are off by up to 2^62*2^-52 = 2^10 and its distances by less than a unit, so answers closer than that are
// not held against it.
func TestLargeFiguresAgainstSimplefeatures(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 3))
	const slack = 64
	compared := 0
	for n := range 1500 {
		a, b := blownUp(t, rng), blownUp(t, rng)
		d := judged(t, a, b)
		fr := frame{grow: 1, local: geom.Placement{Turn: uint8(rng.IntN(8))}}
		pa, pb := build(t, a, fr), build(t, b, fr)
		if d == 0 {
			if got := relation(pa, pb, slack); got == geom.Far {
				t.Fatalf("pair %d is at least %d apart; the judge says that it touches\n%+v\n%+v", n, slack, a, b)
			}
			continue
		}
		compared++
		if got := relation(pa, pb, int64(math.Ceil(d))+slack); got == geom.Far || got == geom.Touch && d > slack {
			t.Fatalf("pair %d: relation %d at the judge's distance %g and a little more\n%+v\n%+v", n, got, d, a, b)
		}
		if s := int64(d) - slack; s > 0 {
			if got := relation(pa, pb, s); got != geom.Far {
				t.Fatalf("pair %d: relation %d at the judge's distance %g less a little\n%+v\n%+v", n, got, d, a, b)
			}
		}
	}
	if compared < 300 {
		t.Errorf("only %d pairs are apart", compared)
	}
}

// blownUp draws a figure and moves each of its points, so that it has no common factor, over the 32-bit plane.
func blownUp(t testing.TB, rng *rand.Rand) figure {
	for {
		k := int64(1) << rng.IntN(23)
		ring := star(rng, geom.Point{X: rng.Int64N(201) - 100, Y: rng.Int64N(201) - 100}, 10, float64(20+rng.IntN(60)))
		at := geom.Point{X: rng.Int64N(1<<31) - 1<<30, Y: rng.Int64N(1<<31) - 1<<30}
		for i, p := range ring {
			ring[i] = geom.Point{X: at.X + p.X*k + rng.Int64N(k), Y: at.Y + p.Y*k + rng.Int64N(k)}
		}
		if p, ok := simple(ring); ok {
			return figure{outline: redrawn(rng, ring), parts: []sf.Polygon{p}}
		}
	}
}

func TestClosestAgainstSimplefeatures(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 4))
	for n := range 3000 {
		a, b := draw(t, rng), draw(t, rng)
		d := judged(t, a, b)
		var pa, pb geom.Parts
		build(t, a, frame{grow: 1}).into(&pa)
		build(t, b, frame{grow: 1}).into(&pb)
		from, to, sq := geom.Closest(pa, pb)
		if math.Abs(sq-d*d) > 1e-9*(1+d*d) {
			t.Fatalf("pair %d: squared distance %.15g, the judge says %.15g\n%+v\n%+v", n, sq, d*d, a, b)
		}
		// The points are rounded to whole units: each lies within a diagonal of a unit of its figure.
		for _, e := range []struct {
			at geom.Point
			f  figure
		}{{from, a}, {to, b}} {
			point := sf.NewPoint(sf.Coordinates{XY: sf.XY{X: float64(e.at.X), Y: float64(e.at.Y)}, Type: sf.DimXY}).AsGeometry()
			best := math.Inf(1)
			for _, p := range e.f.parts {
				off, _ := sf.Distance(point, p.AsGeometry())
				best = min(best, off)
			}
			if best > math.Sqrt2/2+equal {
				t.Fatalf("pair %d: the nearest point %v is %g from its figure\n%+v", n, e.at, best, e.f)
			}
		}
		if d > 0 && math.Abs(math.Hypot(float64(from.X-to.X), float64(from.Y-to.Y))-d) > math.Sqrt2 {
			t.Fatalf("pair %d: nearest points %v and %v, distance %g", n, from, to, d)
		}
	}
}
