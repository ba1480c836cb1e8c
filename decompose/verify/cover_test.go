package verify

import (
	"context"
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/decompose/geom"
)

// coverOf asks whether the outlines cover the first one.
func coverOf(question []geom.Point, others ...[]geom.Point) bool {
	from, by := &flat{}, &flat{}
	add := func(f *flat, points []geom.Point) bool {
		made := newForm(points, geom.EvenOdd)
		if !made.hasArea() {
			return false
		}
		f.forms = append(f.forms, made)
		f.figs = append(f.figs, figure{box: made.box, form: int32(len(f.forms) - 1)})
		return true
	}
	if !add(from, question) {
		return true
	}
	var list []uint32
	for _, o := range others {
		if add(by, o) {
			list = append(list, uint32(len(list)))
		}
	}
	c := cover{ctx: context.Background(), from: from, by: by, questions: []uint32{0}, others: list}
	bare, err := c.bare()
	if err != nil {
		panic(err)
	}
	return len(bare) == 0
}

func outlineOf(xy ...int64) []geom.Point {
	var out []geom.Point
	for i := 0; i < len(xy); i += 2 {
		out = append(out, geom.Point{X: xy[i], Y: xy[i+1]})
	}
	return out
}

// Worked by hand: what is covered exactly, and what is not by one unit or by a sliver.
func TestCoveredByHand(t *testing.T) {
	square := outlineOf(0, 0, 10, 0, 10, 10, 0, 10)
	for _, c := range []struct {
		name     string
		question []geom.Point
		others   [][]geom.Point
		want     bool
	}{
		{"itself", square, [][]geom.Point{square}, true},
		{"nothing", square, nil, false},
		{"two halves", square, [][]geom.Point{outlineOf(0, 0, 5, 0, 5, 10, 0, 10), outlineOf(5, 0, 10, 0, 10, 10, 5, 10)}, true},
		{"a unit short", square, [][]geom.Point{outlineOf(0, 0, 10, 0, 10, 9, 0, 9)}, false},
		{"two triangles", square, [][]geom.Point{outlineOf(0, 0, 10, 0, 10, 10), outlineOf(0, 0, 10, 10, 0, 10)}, true},
		{"two triangles with a sliver between", square, [][]geom.Point{outlineOf(0, 0, 10, 0, 10, 10), outlineOf(0, 1, 9, 10, 0, 10)}, false},
		{"a hexagon in a square", outlineOf(2, 0, 8, 0, 10, 5, 8, 10, 2, 10, 0, 5), [][]geom.Point{square}, true},
		{"a square in a hexagon", square, [][]geom.Point{outlineOf(2, 0, 8, 0, 10, 5, 8, 10, 2, 10, 0, 5)}, false},
		{"a hole", outlineOf(4, 4, 6, 4, 6, 6, 4, 6),
			[][]geom.Point{outlineOf(0, 0, 10, 0, 10, 10, 0, 10, 0, 0, 3, 3, 3, 7, 7, 7, 7, 3, 3, 3)}, false},
		{"beside a hole", outlineOf(1, 0, 9, 0, 9, 3, 1, 3),
			[][]geom.Point{outlineOf(0, 0, 10, 0, 10, 10, 0, 10, 0, 0, 3, 3, 3, 7, 7, 7, 7, 3, 3, 3)}, true},
		// Two slanted strips whose crossing (at 10/3) is on no whole unit.
		{"a crossing on no unit", outlineOf(0, 0, 10, 0, 5, 5), [][]geom.Point{outlineOf(0, 0, 10, 0, 0, 5), outlineOf(0, 0, 10, 0, 10, 5, 5, 5)}, true},
		// 2^33 is as far as half units go.
		{"far out", outlineOf(-1<<33, -1<<33, 1<<33, -1<<33, 1<<33, 1<<33), [][]geom.Point{outlineOf(-1<<33, -1<<33, 1<<33, -1<<33, 1<<33, 1<<33, 1<<33-1, 1<<33)}, true},
		{"far out, a sliver short", outlineOf(-1<<33, -1<<33, 1<<33, -1<<33, 1<<33, 1<<33), [][]geom.Point{outlineOf(-1<<33, -1<<33, 1<<33, -1<<33, 1<<33, 1<<33-1)}, false},
	} {
		if got := coverOf(c.question, c.others...); got != c.want {
			t.Errorf("%s: covered is %v, want %v", c.name, got, c.want)
		}
	}
}

// On outlines with corners on a small grid any uncovered part has an area far above the error of the area that package geom
// measures by another method (double-length floats, 1e-12).
func TestCoveredAgreesWithAreas(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	outline := func() []geom.Point {
		var out []geom.Point
		for range 3 + rng.IntN(5) {
			out = append(out, geom.Point{X: rng.Int64N(9), Y: rng.Int64N(9)})
		}
		return out
	}
	area := func(outlines ...[]geom.Point) float64 {
		var parts geom.Parts
		for _, o := range outlines {
			parts.Polygons = append(parts.Polygons, geom.Placed{Polygon: geom.NewPolygon(o, geom.EvenOdd)})
		}
		return geom.UnionAreaPolygons(parts)
	}
	some := [2]int{}
	for range 800 {
		question := outline()
		var others [][]geom.Point
		for range 1 + rng.IntN(6) {
			others = append(others, outline())
		}
		if rng.IntN(2) == 0 { // more often a yes: the question's own halves among the others
			others = append(others, slices.Concat(question[:2], question[2:]))
		}
		want := area(append(slices.Clone(others), question)...)-area(others...) < 1e-7
		if got := coverOf(question, others...); got != want {
			t.Fatalf("%v by %v: covered is %v, areas say %v", question, others, got, want)
		}
		if want {
			some[1]++
		} else {
			some[0]++
		}
	}
	if min(some[0], some[1]) < 100 {
		t.Errorf("%d not covered, %d covered: the test is one-sided", some[0], some[1])
	}
}

// Manhattan outlines on a small grid: every unit cell is looked at.
func TestCoveredAgreesWithCells(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 8))
	rect := func() geom.Rect {
		x, y := rng.Int64N(10), rng.Int64N(10)
		return geom.Rect{X1: x, Y1: y, X2: x + 1 + rng.Int64N(6), Y2: y + 1 + rng.Int64N(6)}
	}
	yes := 0
	for range 5000 {
		question := rect()
		var others [][]geom.Point
		filled := map[geom.Point]bool{}
		for range 1 + rng.IntN(8) {
			r := rect()
			others = append(others, corners(r))
			for x := r.X1; x < r.X2; x++ {
				for y := r.Y1; y < r.Y2; y++ {
					filled[geom.Point{X: x, Y: y}] = true
				}
			}
		}
		want := true
		for x := question.X1; x < question.X2; x++ {
			for y := question.Y1; y < question.Y2; y++ {
				want = want && filled[geom.Point{X: x, Y: y}]
			}
		}
		if got := coverOf(corners(question), others...); got != want {
			t.Fatalf("%v by %v: covered is %v, want %v", question, others, got, want)
		}
		if want {
			yes++
		}
	}
	if yes < 200 {
		t.Errorf("only %d of 5000 are covered: the test is one-sided", yes)
	}
}

// One outline, begun anywhere, run either way, with idle points, is one canonical outline; another outline is another.
func TestCanonical(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 10))
	for range 3000 {
		var points []geom.Point
		for range 3 + rng.IntN(6) {
			points = append(points, geom.Point{X: 4 * rng.Int64N(6), Y: 4 * rng.Int64N(6)})
		}
		want := canonical(slices.Clone(points))
		again := slices.Clone(points)
		// A repeated point, and one in the middle of an edge.
		k := rng.IntN(len(again))
		again = slices.Insert(again, k, again[k])
		k = rng.IntN(len(again))
		p, q := again[k], again[(k+1)%len(again)]
		again = slices.Insert(again, k+1, geom.Point{X: (p.X + q.X) / 2, Y: (p.Y + q.Y) / 2})
		again = rotate(again, rng.IntN(len(again)))
		if rng.IntN(2) == 0 {
			slices.Reverse(again)
		}
		if got := canonical(again); !slices.Equal(got, want) {
			t.Fatalf("%v becomes %v when drawn another way, else %v", points, got, want)
		}
		// canonical drops idle points only, so area is kept.
		if len(want) > 2 && geom.NewPolygon(want, geom.EvenOdd).Area() != geom.NewPolygon(points, geom.EvenOdd).Area() {
			t.Fatalf("%v becomes %v, of another area", points, want)
		}
	}
	p := outlineOf(0, 0, 8, 0, 8, 8, 0, 8)
	for i := range p {
		q := slices.Clone(p)
		q[i].X++
		if slices.Equal(canonical(slices.Clone(p)), canonical(q)) {
			t.Errorf("corner %d moved by a unit is not told", i)
		}
	}
}
