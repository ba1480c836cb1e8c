package geom

import (
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"
)

type drawn struct {
	outline []Point
	fill    Fill
}

// ratUnionArea is the slow twin: all edges cut where they meet any other, and the pieces with covered area on one side
// alone, that side on the left, summed by the shoelace formula. Coincident pieces count once. Coordinates up to about 20.
func ratUnionArea(figures []drawn) *big.Rat {
	type segment struct{ a, b rat }
	var all []segment
	for _, f := range figures {
		for i, p := range f.outline {
			if q := f.outline[(i+1)%len(f.outline)]; p != q {
				all = append(all, segment{ratOf(p), ratOf(q)})
			}
		}
	}
	covered := func(p rat) bool {
		return slices.ContainsFunc(figures, func(f drawn) bool { return ratFilled(f.outline, f.fill, p) })
	}
	one := big.NewRat(1, 1)
	seen := map[string]bool{}
	sum := new(big.Rat)
	for _, e := range all {
		u := e.b.minus(e.a)
		cuts := []*big.Rat{new(big.Rat), one}
		for _, f := range all {
			v, w := f.b.minus(f.a), f.a.minus(e.a)
			if den := ratCross(u, v); den.Sign() != 0 {
				t, s := ratCross(w, v), ratCross(w, u)
				if s.Quo(s, den); s.Sign() >= 0 && s.Cmp(one) <= 0 {
					cuts = append(cuts, t.Quo(t, den))
				}
			} else if ratCross(u, w).Sign() == 0 {
				for _, p := range []rat{f.a, f.b} {
					t := ratDot(u, p.minus(e.a))
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
			from, to := e.a.at(cuts[k-1], u), e.a.at(cuts[k], u)
			mid := from.at(big.NewRat(1, 2), to.minus(from))
			tiny := big.NewRat(1, 1e12)
			left := covered(mid.at(tiny, rat{new(big.Rat).Neg(u.y), u.x}))
			right := covered(mid.at(tiny, rat{u.y, new(big.Rat).Neg(u.x)}))
			if left == right {
				continue
			}
			if right {
				from, to = to, from
			}
			key := from.x.String() + from.y.String() + to.x.String() + to.y.String()
			if !seen[key] {
				seen[key] = true
				sum.Add(sum, ratCross(from, to))
			}
		}
	}
	return sum.Quo(sum, big.NewRat(2, 1))
}

func rectOutline(r Rect) []Point {
	return []Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}}
}

func TestUnionAreaPolygonsAgainstFractions(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 32))
	for range 600 {
		size := 3 + rng.Int64N(12)
		var figures []drawn
		var parts Parts
		for range 1 + rng.IntN(3) {
			f := drawn{crowdedOutline(rng, 2+rng.IntN(5), size), Fill(rng.IntN(2))}
			at := randomPlacement(rng, 4)
			parts.Polygons = append(parts.Polygons, Placed{NewPolygon(f.outline, f.fill), at})
			figures = append(figures, drawn{placedPoints(at, f.outline), f.fill})
			if rng.IntN(4) == 0 { // the same again
				parts.Polygons = append(parts.Polygons, parts.Polygons[0])
			}
		}
		for _, r := range randomRects(rng, rng.IntN(4), size) {
			parts.Rects = append(parts.Rects, r)
			if r.X1 < r.X2 && r.Y1 < r.Y2 {
				figures = append(figures, drawn{rectOutline(r), EvenOdd})
			}
		}
		want, _ := ratUnionArea(figures).Float64()
		if got := UnionAreaPolygons(parts); math.Abs(got-want) > 1e-12*want {
			t.Fatalf("%v: area %v, want %v", figures, got, want)
		}
	}
}

// Areas that are known: by the shoelace formula, and by taking away what overlaps.
func TestAreaOfKnownFigures(t *testing.T) {
	const l = Limit
	disc := ring(64, 1000, 0)[:65]
	var disc2 float64
	for i := range disc[1:] {
		disc2 += float64(disc[i].X*disc[i+1].Y - disc[i+1].X*disc[i].Y)
	}
	star := []Point{{0, 0}, {4, 6}, {8, 0}, {0, 4}, {8, 4}}
	starArea, _ := ratUnionArea([]drawn{{star, NonZero}}).Float64()
	place := func(p *Polygon, at ...Placement) Parts {
		var out Parts
		for _, t := range at {
			out.Polygons = append(out.Polygons, Placed{p, t})
		}
		return out
	}
	triangle := NewPolygon([]Point{{0, 0}, {12, 0}, {0, 12}}, EvenOdd)
	round := NewPolygon(disc, EvenOdd)
	for _, c := range []struct {
		name  string
		parts Parts
		want  float64
	}{
		{"nothing", Parts{}, 0},
		{"a triangle", place(triangle, Placement{}), 72},
		{"two that make a square", place(triangle, Placement{}, Placement{2, 12, 12}), 144},
		{"twice the same", place(triangle, Placement{}, Placement{}), 72},
		{"two that overlap in a triangle of legs 6", place(triangle, Placement{}, Placement{0, 6, 0}), 144 - 18},
		{"a figure of eight", place(NewPolygon([]Point{{0, 0}, {10, 10}, {10, 0}, {0, 10}}, EvenOdd), Placement{}), 50},
		{"a pentagram, non-zero", place(NewPolygon(star, NonZero), Placement{}), starArea},
		{"a disc", place(round, Placement{}), disc2 / 2},
		{"discs side by side, far away", place(round, Placement{3, l - 5000, 5000 - l}, Placement{6, l - 2000, 5000 - l}), disc2},
		{"a rectangle inside a disc", Parts{[]Rect{{-10, -10, 10, 10}}, place(round, Placement{}).Polygons}, disc2 / 2},
		{"a disc inside a rectangle", Parts{[]Rect{{-2000, -2000, 2000, 2000}}, place(round, Placement{}).Polygons}, 16e6},
		{"half a disc covered", Parts{[]Rect{{-2000, -2000, 0, 2000}}, place(round, Placement{}).Polygons}, 8e6 + disc2/4},
		{"half the plane", place(NewPolygon([]Point{{-l, -l}, {l, -l}, {-l, l}}, EvenOdd), Placement{}), 2 * l * l},
		{"a sliver across the plane", place(NewPolygon([]Point{{-l, -l}, {l, l}, {l, l - 1}}, EvenOdd), Placement{}), l},
		{"a sliver across the plane, nearly level", place(NewPolygon([]Point{{-l, 0}, {l, 1}, {l, 2}}, EvenOdd), Placement{}), l},
		{"slivers that cross at a small angle", place(NewPolygon([]Point{{-l, -1}, {l, 1}, {l, 0}, {-l, 0}}, EvenOdd), Placement{}), l},
	} {
		if got := UnionAreaPolygons(c.parts); math.Abs(got-c.want) > 1e-12*c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
		// the same again, which takes the scan also for what is measured at once alone
		c.parts.Polygons = append(c.parts.Polygons, c.parts.Polygons...)
		if got := UnionAreaPolygons(c.parts); math.Abs(got-c.want) > 1e-12*c.want {
			t.Errorf("%s, twice: %v, want %v", c.name, got, c.want)
		}
	}
	if got := round.Area(); math.Abs(got-disc2/2) > 1e-12*got {
		t.Errorf("Area of the disc: %v, want %v", got, disc2/2)
	}
}

// Turning all parts together does not change the area, whatever crosses.
func TestUnionAreaPolygonsKeepsSymmetry(t *testing.T) {
	rng := rand.New(rand.NewPCG(33, 34))
	for range 100 {
		var first float64
		var outlines [][]Point
		for range 6 {
			outlines = append(outlines, randomOutline(rng, 3+rng.IntN(8), 3000))
		}
		rects := randomRects(rng, 5, 3000)
		for turn := range uint8(8) {
			at := Placement{turn, 1 << 33, -1 << 33}
			var parts Parts
			for i, o := range outlines {
				parts.Polygons = append(parts.Polygons, Placed{NewPolygon(o, Fill(i%2)), at})
			}
			for _, r := range rects {
				parts.Rects = append(parts.Rects, at.ApplyRect(r))
			}
			got := UnionAreaPolygons(parts)
			if turn == 0 {
				first = got
			} else if math.Abs(got-first) > 1e-12*first {
				t.Fatalf("%v %v turn %d: %v, want %v", outlines, rects, turn, got, first)
			}
		}
	}
}

func BenchmarkAreaOctagon(b *testing.B) {
	p := NewPolygon(ring(8, 100, 0)[:9], EvenOdd)
	b.ReportAllocs()
	for b.Loop() {
		p.Area()
	}
}

func BenchmarkUnionAreaPolygons1000(b *testing.B) {
	rng := rand.New(rand.NewPCG(35, 36))
	p := NewPolygon(ring(8, 100, 0)[:9], EvenOdd)
	var parts Parts
	for range 1000 {
		parts.Polygons = append(parts.Polygons, Placed{p, Placement{0, rng.Int64N(6000), rng.Int64N(6000)}})
	}
	parts.Rects = randomRects(rng, 30, 6000)
	b.ReportAllocs()
	for b.Loop() {
		UnionAreaPolygons(parts)
	}
}
