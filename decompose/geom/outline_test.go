package geom

import (
	"math/rand/v2"
	"slices"
	"testing"
)

func TestMergeOfKnownShapes(t *testing.T) {
	type corners = []Corner
	for _, c := range []struct {
		name  string
		rects []Rect
		want  []corners
	}{
		{"nothing", nil, nil},
		{"no area", []Rect{{0, 0, 0, 9}}, nil},
		{"square", []Rect{{0, 0, 9, 9}}, []corners{{{Point{0, 0}, true}, {Point{9, 0}, true}, {Point{9, 9}, true}, {Point{0, 9}, true}}}},
		{"two that abut", []Rect{{0, 0, 5, 9}, {5, 0, 9, 9}}, []corners{{{Point{0, 0}, true}, {Point{9, 0}, true}, {Point{9, 9}, true}, {Point{0, 9}, true}}}},
		{"an L", []Rect{{0, 0, 9, 3}, {0, 0, 3, 9}}, []corners{{{Point{0, 0}, true}, {Point{9, 0}, true}, {Point{9, 3}, true}, {Point{3, 3}, false}, {Point{3, 9}, true}, {Point{0, 9}, true}}}},
		{"a frame: the hole runs clockwise", []Rect{{0, 0, 9, 3}, {0, 6, 9, 9}, {0, 0, 3, 9}, {6, 0, 9, 9}}, []corners{
			{{Point{0, 0}, true}, {Point{9, 0}, true}, {Point{9, 9}, true}, {Point{0, 9}, true}},
			{{Point{3, 3}, false}, {Point{3, 6}, false}, {Point{6, 6}, false}, {Point{6, 3}, false}}}},
		{"corner to corner", []Rect{{0, 0, 3, 3}, {3, 3, 6, 6}}, []corners{
			{{Point{0, 0}, true}, {Point{3, 0}, true}, {Point{3, 3}, true}, {Point{0, 3}, true}},
			{{Point{3, 3}, true}, {Point{6, 3}, true}, {Point{6, 6}, true}, {Point{3, 6}, true}}}},
		{"corner to corner, the other way", []Rect{{3, 0, 6, 3}, {0, 3, 3, 6}}, []corners{
			{{Point{3, 0}, true}, {Point{6, 0}, true}, {Point{6, 3}, true}, {Point{3, 3}, true}},
			{{Point{0, 3}, true}, {Point{3, 3}, true}, {Point{3, 6}, true}, {Point{0, 6}, true}}}},
	} {
		got := Merge(c.rects)
		if got.Loops() != len(c.want) {
			t.Errorf("%s: %v", c.name, got)
			continue
		}
		for i, w := range c.want {
			if !slices.Equal(got.Loop(i), w) {
				t.Errorf("%s: loop %d is %v, want %v", c.name, i, got.Loop(i), w)
			}
		}
	}
}

// The loops wind around exactly the covered cells, edges have filled cells on their left and empty ones on their right, and
// corners are what the four cells around them say.
func TestMergeAgainstCells(t *testing.T) {
	rng := rand.New(rand.NewPCG(27, 28))
	var m Merger
	var out Outline
	for range 10000 {
		size := 2 + rng.Int64N(10)
		rects := randomRects(rng, rng.IntN(12), size)
		cover := coverage(rects, size)
		cell := func(x, y int64) bool {
			return x >= 0 && y >= 0 && x < size && y < size && cover[y*size+x] > 0
		}
		m.Merge(&out, rects)
		wind := make([]int, size*size)
		for i := range out.Loops() {
			loop := out.Loop(i)
			var points []Point
			for k, c := range loop {
				before, after := loop[(k+len(loop)-1)%len(loop)].At, loop[(k+1)%len(loop)].At
				p := c.At
				points = append(points, p)
				around := 0
				for _, d := range [4]Point{{0, 0}, {-1, 0}, {0, -1}, {-1, -1}} {
					if cell(p.X+d.X, p.Y+d.Y) {
						around++
					}
				}
				if want := around < 3; c.Convex != want || around == 0 || around == 4 {
					t.Fatalf("%v: corner %v has %d cells around it", rects, c, around)
				}
				if (before.X == p.X) == (after.X == p.X) {
					t.Fatalf("%v: no corner at %v: %v", rects, p, loop)
				}
				for x, y := p.X, p.Y; x != after.X || y != after.Y; x, y = x+sign(after.X-x), y+sign(after.Y-y) {
					left, right := Point{x, y}, Point{x, y - 1} // running right
					switch {
					case after.X < x:
						left, right = Point{x - 1, y - 1}, Point{x - 1, y}
					case after.Y > y:
						left, right = Point{x - 1, y}, Point{x, y}
					case after.Y < y:
						left, right = Point{x, y - 1}, Point{x - 1, y - 1}
					}
					if !cell(left.X, left.Y) || cell(right.X, right.Y) {
						t.Fatalf("%v: edge from %v to %v has not the filled area on its left", rects, p, after)
					}
				}
			}
			for k := range wind {
				wind[k] += windingAt(points, int64(k)%size, int64(k)/size)
			}
		}
		for k, w := range wind {
			want := 0
			if cover[k] > 0 {
				want = 1
			}
			if w != want && w != -want {
				t.Fatalf("%v: loops wind %d times around cell %d, want %d", rects, w, k, want)
			}
		}
	}
}

func BenchmarkMergeFive(b *testing.B) {
	rects := []Rect{{0, 0, 100, 20}, {80, 0, 100, 100}, {0, 80, 100, 100}, {0, 0, 20, 60}, {0, 40, 40, 60}}
	var m Merger
	var out Outline
	b.ReportAllocs()
	for b.Loop() {
		m.Merge(&out, rects)
	}
}

func BenchmarkMerge100000(b *testing.B) {
	rng := rand.New(rand.NewPCG(29, 30))
	var rects []Rect
	for range 100000 {
		x, y := 10*rng.Int64N(2200), 10*rng.Int64N(2200)
		rects = append(rects, Rect{x, y, x + 20 + 10*rng.Int64N(9), y + 20 + 10*rng.Int64N(9)})
	}
	var m Merger
	var out Outline
	b.ReportAllocs()
	for b.Loop() {
		m.Merge(&out, rects)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(len(rects)), "ns/rect")
}
