package geom

import (
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestClosestByHand(t *testing.T) {
	octagon := NewPolygon([]Point{{10, 0}, {20, 0}, {30, 10}, {30, 20}, {20, 30}, {10, 30}, {0, 20}, {0, 10}}, EvenOdd)
	at := func(x, y int64) Parts { return Parts{Polygons: []Placed{{octagon, Placement{0, x, y}}}} }
	rects := func(r ...Rect) Parts { return Parts{Rects: r} }
	for _, c := range []struct {
		name     string
		a, b     Parts
		from, to Point
		want     float64
	}{
		{"side by side: the middle of what faces", rects(Rect{0, 0, 10, 40}), rects(Rect{15, 20, 30, 60}), Point{10, 30}, Point{15, 30}, 25},
		{"corner to corner", rects(Rect{0, 0, 10, 10}), rects(Rect{13, 14, 30, 60}), Point{10, 10}, Point{13, 14}, 25},
		{"overlapping", rects(Rect{0, 0, 10, 10}), rects(Rect{4, 6, 30, 60}), Point{7, 8}, Point{7, 8}, 0},
		{"the nearest of many", rects(Rect{0, 0, 1, 1}, Rect{0, 50, 1, 51}, Rect{0, 90, 1, 91}), rects(Rect{9, 0, 10, 1}, Rect{7, 50, 8, 51}, Rect{9, 90, 10, 91}), Point{1, 50}, Point{7, 50}, 36},
		{"of equals the least", rects(Rect{0, 50, 1, 51}, Rect{0, 0, 1, 1}), rects(Rect{5, 0, 6, 1}, Rect{5, 50, 6, 51}), Point{1, 0}, Point{5, 0}, 16},
		{"a corner before a slant: 5 sqrt 2", rects(Rect{-10, -10, 0, 0}), at(0, 0), Point{0, 0}, Point{5, 5}, 50},
		{"slants that face, 16 sqrt 2 apart", at(0, 0), at(36, 36), Point{20, 30}, Point{36, 46}, 512},
		{"a rectangle inside", rects(Rect{12, 12, 14, 14}), at(0, 0), Point{12, 12}, Point{12, 12}, 0},
		{"crossing", rects(Rect{-5, 12, 15, 14}), at(0, 0), Point{0, 12}, Point{0, 12}, 0},
	} {
		from, to, got := Closest(c.a, c.b)
		if got != c.want || from != c.from || to != c.to {
			t.Errorf("%s: %v %v %v, want %v %v %v", c.name, from, to, got, c.from, c.to, c.want)
		}
		if _, _, back := Closest(c.b, c.a); back != c.want {
			t.Errorf("%s, exchanged: %v, want %v", c.name, back, c.want)
		}
	}
	if _, _, got := Closest(Parts{}, at(0, 0)); !math.IsInf(got, 1) {
		t.Errorf("nothing is %v away", got)
	}
}

func TestClosestAgainstFractions(t *testing.T) {
	rng := rand.New(rand.NewPCG(37, 38))
	draw := func(shift int64) (Parts, []drawn) {
		var parts Parts
		var figures []drawn
		for range 1 + rng.IntN(4) {
			at := randomPlacement(rng, 3)
			at.X += shift
			if rng.IntN(2) == 0 {
				r := at.ApplyRect(Rect{0, 0, 1 + rng.Int64N(6), 1 + rng.Int64N(6)})
				parts.Rects = append(parts.Rects, r)
				figures = append(figures, drawn{rectOutline(r), EvenOdd})
				continue
			}
			f := drawn{crowdedOutline(rng, 3+rng.IntN(3), 8), Fill(rng.IntN(2))}
			if p := NewPolygon(f.outline, f.fill); p.HasArea() {
				parts.Polygons = append(parts.Polygons, Placed{p, at})
				figures = append(figures, drawn{placedPoints(at, f.outline), f.fill})
			}
		}
		return parts, figures
	}
	apart := 0
	for range 300 {
		a, fa := draw(0)
		b, fb := draw(rng.Int64N(25))
		var want *big.Rat
		for _, f := range fa {
			for _, g := range fb {
				if d, ok := ratDistance(f.outline, f.fill, g.outline, g.fill); ok && (want == nil || d.Cmp(want) < 0) {
					want = d
				}
			}
		}
		if want == nil {
			continue
		}
		w, _ := want.Float64()
		from, to, got := Closest(a, b)
		if math.Abs(got-w) > 1e-14*w {
			t.Fatalf("%v, %v: %v, want %v", fa, fb, got, w)
		}
		if w > 0 {
			apart++
		}
		// the points are rounded by at most half a unit in x and y each
		if d := math.Hypot(float64(from.X-to.X), float64(from.Y-to.Y)); math.Abs(d-math.Sqrt(w)) > math.Sqrt2 {
			t.Fatalf("%v, %v: points %v and %v are %v apart, want about %v", fa, fb, from, to, d, math.Sqrt(w))
		}
	}
	if apart < 100 {
		t.Errorf("only %d pairs apart", apart)
	}
}

// Large shapes, against every pair; the order of the parts changes nothing.
func TestClosestOfManyRectangles(t *testing.T) {
	rng := rand.New(rand.NewPCG(39, 40))
	for range 50 {
		a, b := randomRects(rng, 1+rng.IntN(60), 10000), randomRects(rng, 1+rng.IntN(60), 10000)
		for i := range b {
			b[i].X1, b[i].X2 = b[i].X1+8000, b[i].X2+8000
		}
		for i, r := range a { // small ones, so that few overlap
			a[i].X2, a[i].Y2 = min(r.X2, r.X1+100), min(r.Y2, r.Y1+100)
		}
		want := math.Inf(1)
		for _, r := range a {
			for _, q := range b {
				dx, dy := RectGap(r, q)
				want = min(want, float64(dx*dx+dy*dy))
			}
		}
		from, to, got := Closest(Parts{Rects: a}, Parts{Rects: b})
		if got != want {
			t.Fatalf("%v, want %v", got, want)
		}
		slices.Reverse(a)
		slices.Reverse(b)
		from2, to2, _ := Closest(Parts{Rects: a}, Parts{Rects: b})
		if from != from2 || to != to2 {
			t.Errorf("%v %v, in another order %v %v", from, to, from2, to2)
		}
	}
}

func BenchmarkClosest2000(b *testing.B) {
	rng := rand.New(rand.NewPCG(41, 42))
	p, q := randomRects(rng, 2000, 1000000), randomRects(rng, 2000, 1000000)
	for i := range p {
		p[i].X2, p[i].Y2 = min(p[i].X2, p[i].X1+100), min(p[i].Y2, p[i].Y1+100)
		q[i].X2, q[i].Y2 = min(q[i].X2, q[i].X1+100), min(q[i].Y2, q[i].Y1+100)
	}
	b.ReportAllocs()
	for b.Loop() {
		Closest(Parts{Rects: p}, Parts{Rects: q})
	}
}
