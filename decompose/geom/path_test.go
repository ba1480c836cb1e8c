package geom

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"testing"
)

// Expectations are worked out by hand from the rules at the head of path.go, in half database units (grid 2).
func TestPathOutlineByHand(t *testing.T) {
	ell := []Point{{0, 0}, {100, 0}, {100, 200}}
	bend := []Point{{0, 0}, {100, 0}, {200, 100}}
	for _, c := range []struct {
		name    string
		centre  []Point
		width   int64
		end     PathEnd
		want    []Point
		rounded bool
	}{
		{"straight, flush", []Point{{0, 0}, {100, 0}}, 20, PathEnd{}, []Point{{100, -10}, {100, 10}, {0, 10}, {0, -10}}, false},
		{"straight, odd width", []Point{{0, 0}, {0, 100}}, 10, PathEnd{}, []Point{{5, 100}, {-5, 100}, {-5, 0}, {5, 0}}, false},
		{"straight, width below 0", []Point{{0, 0}, {0, 100}}, -10, PathEnd{}, []Point{{5, 100}, {-5, 100}, {-5, 0}, {5, 0}}, false},
		{"straight, extended by half the width", []Point{{0, 0}, {100, 0}}, 20, PathEnd{Type: 2, Begin: 99, Finish: 99}, []Point{{110, -10}, {110, 10}, {-10, 10}, {-10, -10}}, false},
		{"straight, its own extensions", []Point{{0, 0}, {100, 0}}, 20, PathEnd{Type: 4, Begin: 6, Finish: -8}, []Point{{92, -10}, {92, 10}, {-6, 10}, {-6, -10}}, false},
		{"unknown type is flush", []Point{{0, 0}, {100, 0}}, 20, PathEnd{Type: 3, Begin: 6, Finish: 8}, []Point{{100, -10}, {100, 10}, {0, 10}, {0, -10}}, false},
		{"a left turn", ell, 20, PathEnd{}, []Point{{110, -10}, {110, 200}, {90, 200}, {90, 10}, {0, 10}, {0, -10}}, false},
		{"a point on the way", []Point{{0, 0}, {50, 0}, {100, 0}}, 20, PathEnd{}, []Point{{100, -10}, {100, 10}, {0, 10}, {0, -10}}, false},
		{"repeated points", []Point{{0, 0}, {0, 0}, {100, 0}, {100, 0}, {100, 200}, {100, 200}}, 20, PathEnd{}, []Point{{110, -10}, {110, 200}, {90, 200}, {90, 10}, {0, 10}, {0, -10}}, false},
		{"right round", []Point{{0, 0}, {100, 0}, {40, 0}}, 20, PathEnd{}, []Point{{100, -10}, {100, 10}, {40, 10}, {40, -10}, {100, -10}, {100, 10}, {0, 10}, {0, -10}}, false},
		{"single point, extended", []Point{{7, 8}, {7, 8}}, 10, PathEnd{Type: 2}, []Point{{2, 3}, {12, 3}, {12, 13}, {2, 13}}, false},
		{"single point, round", []Point{{7, 8}}, 10, PathEnd{Type: 1}, []Point{{2, 3}, {12, 3}, {12, 13}, {2, 13}}, false},
		{"single point, half units off the grid", []Point{{0, 0}}, 3, PathEnd{Type: 2}, []Point{{-2, -2}, {2, -2}, {2, 2}, {-2, 2}}, true},
		{"3-4-5: slanted and whole", []Point{{0, 0}, {300, 400}}, 20, PathEnd{}, []Point{{308, 394}, {292, 406}, {-8, 6}, {8, -6}}, false},
		{"3-4-5 with odd half units", []Point{{0, 0}, {300, 400}}, 10, PathEnd{}, []Point{{304, 397}, {296, 403}, {-4, 3}, {4, -3}}, false},
		{"3-4-5, a square turn", []Point{{0, 0}, {300, 400}, {-100, 700}}, 20, PathEnd{}, []Point{{314, 402}, {-94, 708}, {-106, 692}, {286, 398}, {-8, 6}, {8, -6}}, false},
		{"3-4-5, right round", []Point{{0, 0}, {300, 400}, {150, 200}}, 20, PathEnd{},
			[]Point{{308, 394}, {292, 406}, {142, 206}, {158, 194}, {308, 394}, {292, 406}, {-8, 6}, {8, -6}}, false},
		{"45 degrees: 7.07 to the nearest whole unit", []Point{{0, 0}, {100, 100}}, 20, PathEnd{}, []Point{{108, 92}, {92, 108}, {-8, 8}, {8, -8}}, true},
		{"45 degrees from odd half units: 1 + 7.07", []Point{{1, 1}, {101, 101}}, 20, PathEnd{}, []Point{{108, 94}, {94, 108}, {-6, 8}, {8, -6}}, true},
		{"a bend by 45 degrees: 10 tan 22.5 = 4.14", bend, 20, PathEnd{}, []Point{{104, -10}, {208, 92}, {192, 108}, {96, 10}, {0, 10}, {0, -10}}, true},
		{"a turn by 135 degrees: cut outside, 10 tan 67.5 = 24.1 inside", []Point{{0, 0}, {100, 0}, {0, 100}}, 20, PathEnd{},
			[]Point{{110, -10}, {114, 0}, {8, 108}, {-8, 92}, {76, 10}, {0, 10}, {0, -10}}, true},
		{"a turn by 135 degrees, inside by the vertex", []Point{{0, 0}, {20, 0}, {0, 20}}, 20, PathEnd{},
			[]Point{{30, -10}, {34, 0}, {8, 28}, {-8, 12}, {12, -8}, {20, 0}, {20, 10}, {0, 10}, {0, -10}}, true},
		{"round, radius 1 unit: steps of 45 degrees, 1.41 half units", []Point{{0, 0}, {100, 0}}, 4, PathEnd{Type: 1},
			[]Point{{100, -2}, {102, -2}, {102, 0}, {102, 2}, {100, 2}, {0, 2}, {-2, 2}, {-2, 0}, {-2, -2}, {0, -2}}, true},
		{"round, radius 5 units: pi/2 / acos 0.98 = 7.8, so 8 steps of 22.5 degrees, 3.83, 7.07 and 9.24 half units", []Point{{0, 0}, {100, 0}}, 20, PathEnd{Type: 1},
			[]Point{{100, -10}, {104, -10}, {108, -8}, {110, -4}, {110, 0}, {110, 4}, {108, 8}, {104, 10}, {100, 10},
				{0, 10}, {-4, 10}, {-8, 8}, {-10, 4}, {-10, 0}, {-10, -4}, {-8, -8}, {-4, -10}, {0, -10}}, true},
	} {
		before := Point{-1, -1}
		got, rounded, ok := PathOutline([]Point{before}, c.centre, c.width, c.end, 2)
		if !ok || rounded != c.rounded || got[0] != before || !slices.Equal(got[1:], c.want) {
			t.Errorf("%s: %v rounded %v ok %v, want %v rounded %v", c.name, got[1:], rounded, ok, c.want, c.rounded)
		}
	}
	for _, c := range []struct {
		name   string
		centre []Point
		width  int64
		end    PathEnd
	}{
		{"no width", ell, 0, PathEnd{Type: 2}},
		{"no points", nil, 20, PathEnd{Type: 2}},
		{"one point, flush", []Point{{5, 5}, {5, 5}}, 20, PathEnd{}},
	} {
		if got, _, ok := PathOutline(nil, c.centre, c.width, c.end, 2); ok || got != nil {
			t.Errorf("%s: %v covers something", c.name, got)
		}
	}
}

// testdata/README.md says where the outlines come from. Both outlines have each other's vertices, but for rounding by at
// most half a database unit, and points in the middle of a side.
func TestPathOutlineAgreesWithGdspy(t *testing.T) {
	data, err := os.ReadFile("testdata/paths.json")
	if err != nil {
		t.Fatal(err)
	}
	var cases []struct {
		Centre        [][2]int64
		Width         int64
		Type          uint8
		Begin, Finish int64
		Outline       [][2]float64
	}
	if err := json.Unmarshal(data, &cases); err != nil || len(cases) != 150 {
		t.Fatalf("%d cases, %v", len(cases), err)
	}
	for _, c := range cases {
		var centre []Point
		for _, p := range c.Centre {
			centre = append(centre, Point{2 * p[0], 2 * p[1]})
		}
		got, rounded, ok := PathOutline(nil, centre, 2*c.Width, PathEnd{c.Type, 2 * c.Begin, 2 * c.Finish}, 2)
		slack := 1e-5
		if rounded {
			slack = 1 + 1e-5
		}
		far := func(p Point, q [2]float64) bool {
			return math.Abs(float64(p.X)-2*q[0]) > slack || math.Abs(float64(p.Y)-2*q[1]) > slack
		}
		for _, p := range got {
			if !slices.ContainsFunc(c.Outline, func(q [2]float64) bool { return !far(p, q) }) {
				t.Errorf("%v: %v is no vertex of %v", c.Centre, p, c.Outline)
			}
		}
		for i, q := range c.Outline {
			before, after := c.Outline[(i+len(c.Outline)-1)%len(c.Outline)], c.Outline[(i+1)%len(c.Outline)]
			cross := (q[0]-before[0])*(after[1]-q[1]) - (q[1]-before[1])*(after[0]-q[0])
			if !slices.ContainsFunc(got, func(p Point) bool { return !far(p, q) }) && math.Abs(cross) > 1e-2 {
				t.Errorf("%v: %v is missing in %v", c.Centre, q, got)
			}
		}
		if !ok {
			t.Errorf("%v covers nothing", c.Centre)
		}
	}
}

// A Manhattan path whose segments are at least as long as it is wide covers the rectangles of its segments and a square
// about each square corner.
func TestManhattanPathCoversItsSegments(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 10))
	const size = 40
	for range 3000 {
		half := 1 + rng.Int64N(3)
		centre := []Point{{8 + rng.Int64N(size-16), 8 + rng.Int64N(size-16)}}
		for range 1 + rng.IntN(6) {
			p := centre[len(centre)-1]
			if rng.IntN(2) == 0 {
				p.X = 8 + rng.Int64N(size-16)
			} else {
				p.Y = 8 + rng.Int64N(size-16)
			}
			if q := centre[len(centre)-1]; max(p.X-q.X, q.X-p.X, p.Y-q.Y, q.Y-p.Y) >= 2*half {
				centre = append(centre, p)
			}
		}
		if len(centre) < 2 {
			continue
		}
		var want []Rect
		for i := 1; i < len(centre); i++ {
			p, q := centre[i-1], centre[i]
			r := Rect{min(p.X, q.X), min(p.Y, q.Y), max(p.X, q.X), max(p.Y, q.Y)}
			if p.X == q.X {
				want = append(want, Rect{r.X1 - half, r.Y1, r.X2 + half, r.Y2})
			} else {
				want = append(want, Rect{r.X1, r.Y1 - half, r.X2, r.Y2 + half})
			}
			if i > 1 && (centre[i-2].X == p.X) != (p.X == q.X) {
				want = append(want, Rect{p.X - half, p.Y - half, p.X + half, p.Y + half})
			}
		}
		outline, rounded, ok := PathOutline(nil, centre, 2*half, PathEnd{}, 2)
		rects, manhattan := Rectangles(nil, outline, NonZero)
		if !ok || rounded || !manhattan {
			t.Fatalf("%v: ok %v, rounded %v, Manhattan %v", centre, ok, rounded, manhattan)
		}
		got := coverage(rects, size)
		for i, n := range coverage(want, size) {
			if got[i] != min(n, 1) {
				t.Fatalf("%v half %d: cell %d,%d covered %d times, want %d", centre, half, i%size, i/size, got[i], min(n, 1))
			}
		}
	}
}

// Turning or mirroring the centre line turns or mirrors the outline, rounding included.
func TestPathOutlineKeepsSymmetry(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	order := func(p, q Point) int {
		if p.X != q.X {
			return int(p.X - q.X)
		}
		return int(p.Y - q.Y)
	}
	for range 2000 {
		var centre []Point
		for range 2 + rng.IntN(4) {
			centre = append(centre, Point{2 * rng.Int64N(500), 2 * rng.Int64N(500)})
		}
		width, end := 2+2*rng.Int64N(80), PathEnd{uint8(rng.IntN(3)), 0, 0}
		want, rounded, _ := PathOutline(nil, centre, width, end, 2)
		for turn := range uint8(8) {
			at := Placement{turn, -734, 412}
			var moved, back []Point
			for _, p := range centre {
				moved = append(moved, at.Apply(p))
			}
			got, r, _ := PathOutline(nil, moved, width, end, 2)
			for _, p := range got {
				back = append(back, at.Inverse().Apply(p))
			}
			slices.SortFunc(back, order)
			sorted := slices.Clone(want)
			slices.SortFunc(sorted, order)
			if r != rounded || !slices.Equal(back, sorted) {
				t.Fatalf("%v width %d type %d turn %d: %v, want %v", centre, width, end.Type, turn, back, sorted)
			}
		}
	}
}

func TestPathOutlineAtTheEndsOfThePlane(t *testing.T) {
	const far = 1 << 32 // twice the 32-bit plane
	got, rounded, ok := PathOutline(nil, []Point{{-far, -far}, {far - 2, -far}, {far - 2, far - 2}}, far, PathEnd{Type: 2}, 2)
	const h = far / 2
	want := []Point{{far - 2 + h, -far - h}, {far - 2 + h, far - 2 + h}, {far - 2 - h, far - 2 + h}, {far - 2 - h, -far + h}, {-far - h, -far + h}, {-far - h, -far - h}}
	if !ok || rounded || !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	// 3-4-5 as long as the plane allows, half width 5 * 2^20
	const k = 1 << 30
	got, rounded, ok = PathOutline(nil, []Point{{-3 * k, -4 * k}, {3 * k, 4 * k}}, 10<<20, PathEnd{}, 2)
	want = []Point{{3*k + 4<<20, 4*k - 3<<20}, {3*k - 4<<20, 4*k + 3<<20}, {-3*k - 4<<20, -4*k + 3<<20}, {-3*k + 4<<20, -4*k - 3<<20}}
	if !ok || rounded || !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

func BenchmarkPathOutlineManhattan(b *testing.B) {
	centre := []Point{{0, 0}, {100, 0}, {100, 200}, {300, 200}}
	var dst []Point
	b.ReportAllocs()
	for b.Loop() {
		dst, _, _ = PathOutline(dst[:0], centre, 20, PathEnd{Type: 2}, 2)
	}
}

func BenchmarkPathOutlineSlanted(b *testing.B) {
	centre := []Point{{0, 0}, {100, 0}, {200, 100}, {200, 300}}
	var dst []Point
	b.ReportAllocs()
	for b.Loop() {
		dst, _, _ = PathOutline(dst[:0], centre, 20, PathEnd{Type: 1}, 2)
	}
}
