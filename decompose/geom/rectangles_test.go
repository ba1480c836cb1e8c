package geom

import (
	"math/rand/v2"
	"slices"
	"testing"
)

// windingAt counts, cell by cell and edge by edge, how an outline winds around the point (x+1/2, y+1/2).
func windingAt(outline []Point, x, y int64) int {
	w := 0
	for i, p := range outline {
		q := outline[(i+1)%len(outline)]
		if p.X != q.X || p.X > x {
			continue
		}
		if p.Y <= y && q.Y > y {
			w--
		} else if q.Y <= y && p.Y > y {
			w++
		}
	}
	return w
}

func filled(outline []Point, fill Fill, x, y int64) bool {
	w := windingAt(outline, x, y)
	if fill == EvenOdd {
		return w%2 != 0
	}
	return w != 0
}

// randomManhattan makes an outline of 2n points in [0, size)^2, with repeated and collinear points and either first step.
func randomManhattan(rng *rand.Rand, n int, size int64) []Point {
	var out []Point
	p := Point{rng.Int64N(size), rng.Int64N(size)}
	first := p
	for range n {
		p.X = rng.Int64N(size)
		out = append(out, p)
		if rng.IntN(5) == 0 {
			out = append(out, p)
		}
		p.Y = rng.Int64N(size)
		out = append(out, p)
	}
	out = append(out, Point{first.X, p.Y}, first)
	if rng.IntN(2) == 0 {
		for i := range out {
			out[i].X, out[i].Y = out[i].Y, out[i].X
		}
	}
	return out
}

// coverage counts how many rectangles cover each unit cell.
func coverage(rects []Rect, size int64) []int {
	n := make([]int, size*size)
	for _, r := range rects {
		for y := r.Y1; y < r.Y2; y++ {
			for x := r.X1; x < r.X2; x++ {
				n[y*size+x]++
			}
		}
	}
	return n
}

func TestRectanglesCoverExactlyTheFill(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	var c Cutter
	for range 20000 {
		size := 2 + rng.Int64N(9)
		outline := randomManhattan(rng, 1+rng.IntN(9), size)
		for _, fill := range []Fill{EvenOdd, NonZero} {
			rects, ok := c.Rectangles(nil, outline, fill)
			if !ok {
				t.Fatalf("%v is Manhattan", outline)
			}
			cover := coverage(rects, size)
			for y := range size {
				for x := range size {
					want := 0
					if filled(outline, fill, x, y) {
						want = 1
					}
					if got := cover[y*size+x]; got != want {
						t.Fatalf("%v fill %d: cell %d,%d covered %d times, want %d: %v", outline, fill, x, y, got, want, rects)
					}
				}
			}
			for _, r := range rects {
				if r.X1 >= r.X2 || r.Y1 >= r.Y2 {
					t.Fatalf("%v: %v has no area", outline, r)
				}
			}
		}
	}
}

// The same figure comes out of any start, direction and repetition of its points.
func TestRectanglesForgetHowTheOutlineIsWritten(t *testing.T) {
	tee := []Point{{0, 0}, {30, 0}, {30, 10}, {20, 10}, {20, 40}, {10, 40}, {10, 10}, {0, 10}}
	want := []Rect{{0, 0, 30, 10}, {10, 10, 20, 40}}
	for start := range tee {
		for _, reversed := range []bool{false, true} {
			out := append(slices.Clone(tee[start:]), tee[:start]...)
			out = append(out, out[0], out[0])
			if reversed {
				slices.Reverse(out)
			}
			got, ok := Rectangles(nil, out, EvenOdd)
			slices.SortFunc(got, func(a, b Rect) int { return int(a.Y1 - b.Y1) })
			if !ok || !slices.Equal(got, want) {
				t.Errorf("start %d, reversed %v: %v, want %v", start, reversed, got, want)
			}
		}
	}
}

func TestRectanglesOfKnownFigures(t *testing.T) {
	for _, c := range []struct {
		name    string
		outline []Point
		fill    Fill
		count   int
		ok      bool
	}{
		{"square", []Point{{0, 0}, {0, 9}, {9, 9}, {9, 0}}, EvenOdd, 1, true},
		{"square at the ends of the plane", []Point{{-Limit, -Limit}, {-Limit, Limit}, {Limit, Limit}, {Limit, -Limit}, {-Limit, -Limit}}, EvenOdd, 1, true},
		{"square with points on its sides", []Point{{0, 0}, {0, 4}, {0, 9}, {9, 9}, {9, 0}, {3, 0}}, EvenOdd, 1, true},
		{"square twice around, even-odd", []Point{{0, 0}, {9, 0}, {9, 9}, {0, 9}, {0, 0}, {9, 0}, {9, 9}, {0, 9}}, EvenOdd, 0, true},
		{"square twice around, non-zero", []Point{{0, 0}, {9, 0}, {9, 9}, {0, 9}, {0, 0}, {9, 0}, {9, 9}, {0, 9}}, NonZero, 1, true},
		{"lying tee: two slabs, cut the right way", []Point{{0, 0}, {0, 30}, {10, 30}, {10, 20}, {40, 20}, {40, 10}, {10, 10}, {10, 0}}, EvenOdd, 2, true},
		{"frame by a keyhole", []Point{{0, 0}, {30, 0}, {30, 30}, {0, 30}, {0, 10}, {10, 10}, {10, 20}, {20, 20}, {20, 10}, {0, 10}}, EvenOdd, 4, true},
		{"line there and back", []Point{{0, 0}, {9, 0}, {9, 5}, {9, 0}}, EvenOdd, 0, true},
		{"one point", []Point{{3, 3}}, EvenOdd, 0, true},
		{"nothing", nil, EvenOdd, 0, true},
		{"slanted", []Point{{0, 0}, {9, 0}, {9, 9}}, EvenOdd, 0, false},
		{"slanted closing edge", []Point{{0, 0}, {9, 0}, {9, 9}, {4, 9}}, EvenOdd, 0, false},
	} {
		got, ok := Rectangles([]Rect{{1, 2, 3, 4}}, c.outline, c.fill)
		if ok != c.ok || len(got) != 1+c.count || got[0] != (Rect{1, 2, 3, 4}) {
			t.Errorf("%s: %v %v, want %d rectangles, %v", c.name, got, ok, c.count, c.ok)
		}
		if IsManhattan(c.outline) != c.ok {
			t.Errorf("%s: IsManhattan is %v", c.name, !c.ok)
		}
	}
}

func TestDisjointCoversTheUnion(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	var c Cutter
	for range 5000 {
		size := 2 + rng.Int64N(12)
		rects := randomRects(rng, rng.IntN(8), size)
		got := coverage(c.Disjoint(nil, rects), size)
		for i, n := range coverage(rects, size) {
			if got[i] != min(n, 1) {
				t.Fatalf("%v: cell %d covered %d times, want %d", rects, i, got[i], min(n, 1))
			}
		}
	}
}

// randomRects makes rectangles in [0, size]^2, some without area.
func randomRects(rng *rand.Rand, n int, size int64) []Rect {
	var out []Rect
	for range n {
		x1, x2, y1, y2 := rng.Int64N(size), rng.Int64N(size+1), rng.Int64N(size), rng.Int64N(size+1)
		out = append(out, Rect{min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)})
	}
	return out
}

// meander is the outline of a comb with n teeth, each of another height and with another foot.
func meander(n int) []Point {
	var out []Point
	for i := range int64(n) {
		h := 1000 + i*7919%997
		out = append(out, Point{20 * i, -(i % 13)}, Point{20 * i, h}, Point{20*i + 10, h}, Point{20*i + 10, -((i + 1) % 13)})
	}
	end := 20 * int64(n)
	return append(out, Point{end, -int64(n % 13)}, Point{end, -100}, Point{0, -100})
}

func TestRectanglesOfALongMeander(t *testing.T) {
	outline := meander(20000)
	got, ok := Rectangles(nil, outline, EvenOdd)
	var area int64
	for _, r := range got {
		area += (r.X2 - r.X1) * (r.Y2 - r.Y1)
	}
	var twice int64
	for i, p := range outline {
		q := outline[(i+1)%len(outline)]
		twice += p.X*q.Y - q.X*p.Y
	}
	if !ok || 2*area != max(twice, -twice) {
		t.Errorf("area %d, by the shoelace formula %d/2", area, twice)
	}
	if len(got) > 2*20000+2 {
		t.Errorf("%d rectangles for 20000 runs", len(got))
	}
}

func FuzzRectangles(f *testing.F) {
	f.Add([]byte{0, 0, 5, 0, 5, 5, 0, 5})
	f.Add([]byte{0, 0, 9, 3, 2, 7, 5, 1, 8, 8})
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > 200 {
			return
		}
		const size = 16
		var outline []Point
		for i := 0; i+1 < len(data); i += 2 {
			x, y := int64(data[i]%size), int64(data[i+1]%size)
			if len(outline) > 0 {
				outline = append(outline, Point{x, outline[len(outline)-1].Y})
			}
			outline = append(outline, Point{x, y})
		}
		if len(outline) > 0 {
			outline = append(outline, Point{outline[0].X, outline[len(outline)-1].Y})
		}
		for _, fill := range []Fill{EvenOdd, NonZero} {
			rects, ok := Rectangles(nil, outline, fill)
			if !ok {
				t.Fatal("not taken for Manhattan")
			}
			for i, n := range coverage(rects, size) {
				if (n == 1) != filled(outline, fill, int64(i%size), int64(i/size)) || n > 1 {
					t.Fatalf("%v fill %d: cell %d covered %d times", outline, fill, i, n)
				}
			}
		}
	})
}

func BenchmarkRectanglesL(b *testing.B) {
	outline := []Point{{0, 0}, {30, 0}, {30, 10}, {10, 10}, {10, 40}, {0, 40}}
	var c Cutter
	var dst []Rect
	b.ReportAllocs()
	for b.Loop() {
		dst, _ = c.Rectangles(dst[:0], outline, EvenOdd)
	}
}

func BenchmarkRectanglesMeander(b *testing.B) {
	outline := meander(100000)
	var c Cutter
	var dst []Rect
	b.ReportAllocs()
	for b.Loop() {
		dst, _ = c.Rectangles(dst[:0], outline, EvenOdd)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(len(outline)), "ns/point")
}

// An L is cut without a scan; every outline of six edges, upright and level in turn, comes out as a scan cuts it.
func TestSixCornersAreCutAsByScan(t *testing.T) {
	var c Cutter
	found := 0
	for n := range 1 << 12 { // three abscissas and three ordinates from 0 to 3
		v := func(i int) int64 { return int64(n >> (2 * i) & 3) }
		level := []Point{{v(0), v(3)}, {v(1), v(3)}, {v(1), v(4)}, {v(2), v(4)}, {v(2), v(5)}, {v(0), v(5)}}
		upright := make([]Point, len(level))
		for i, p := range level {
			upright[len(level)-1-i] = Point{p.Y, p.X}
		}
		for _, outline := range [][]Point{level, append(slices.Clone(level), level[0]), upright, append(slices.Clone(upright), upright[0])} {
			if _, _, ok := plainL(outline); ok {
				found++
			}
			for _, fill := range []Fill{EvenOdd, NonZero} {
				got, _ := c.Rectangles(nil, outline, fill)
				want, _ := c.scan(nil, outline, fill)
				if !slices.Equal(got, want) {
					t.Fatalf("%v is cut to %v, by a scan to %v", outline, got, want)
				}
			}
		}
	}
	// Boxes with a point inside: 4 of a row of 4 (1 + 1 + 2) by 4 of a column, with one of four corners left out: 64 figures. Each is
	// drawn from any of six corners in two directions, with and without the closing point.
	if want := 64 * 6 * 2 * 2; found != want {
		t.Errorf("%d outlines were taken for an L, there are %d", found, want)
	}
}

func BenchmarkRectanglesOfL(b *testing.B) {
	var c Cutter
	var dst []Rect
	outline := []Point{{0, 0}, {900, 0}, {900, 20}, {20, 20}, {20, 900}, {0, 900}, {0, 0}}
	for b.Loop() {
		dst, _ = c.Rectangles(dst[:0], outline, EvenOdd)
	}
}
