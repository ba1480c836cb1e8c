package geom

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

func TestUnionAreaCountsCells(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	var s AreaScratch
	for range 20000 {
		size := 1 + rng.Int64N(16)
		rects := randomRects(rng, rng.IntN(3*few), size)
		var want uint64
		for _, n := range coverage(rects, size) {
			want += uint64(min(n, 1))
		}
		var lean []Rect32
		for _, r := range rects {
			lean = append(lean, Rect32{int32(r.X1), int32(r.Y1), int32(r.X2), int32(r.Y2)})
		}
		if got := s.UnionArea(rects); got != (Area{0, want}) {
			t.Fatalf("%v: area %v, want %d", rects, got, want)
		}
		if got := s.UnionArea32(lean); got != want {
			t.Fatalf("%v: lean area %d, want %d", rects, got, want)
		}
	}
}

func (a Area) big() *big.Int {
	v := new(big.Int).SetUint64(a.Hi)
	return v.Add(v.Lsh(v, 64), new(big.Int).SetUint64(a.Lo))
}

// Over the whole plane the area is as large as it gets; a cross of two bars over it has its middle once.
func TestUnionAreaAtTheEndsOfThePlane(t *testing.T) {
	const l = Limit
	square := func(a, b int64) *big.Int { return new(big.Int).Mul(big.NewInt(a), big.NewInt(b)) }
	var s AreaScratch
	all := Rect{-l, -l, l, l}
	cross := []Rect{{-l, -5, l, 5}, {-5, -l, 5, l}}
	want := square(2*l, 20)
	want.Sub(want, big.NewInt(100))
	for _, copies := range []int{1, few} { // past few the tree measures
		var many, crosses []Rect
		for range copies {
			many = append(many, all)
			crosses = append(crosses, cross...)
		}
		if got := s.UnionArea(many).big(); got.Cmp(square(2*l, 2*l)) != 0 {
			t.Errorf("%d times the plane: %v, want %v", copies, got, square(2*l, 2*l))
		}
		if got := s.UnionArea(crosses).big(); got.Cmp(want) != 0 {
			t.Errorf("%d crosses: %v, want %v", copies, got, want)
		}
	}
	lean := Rect32{-1 << 31, -1 << 31, 1<<31 - 1, 1<<31 - 1}
	if got, want := s.UnionArea32([]Rect32{lean, lean}), uint64(1<<32-1)*(1<<32-1); got != want {
		t.Errorf("the plane of int32: %d, want %d", got, want)
	}
	if got := s.UnionArea(nil); got != (Area{}) {
		t.Errorf("nothing has area %v", got)
	}
}

func TestSmallUnionAreaTakesNoMemory(t *testing.T) {
	var s AreaScratch
	rects := []Rect32{{0, 0, 10, 10}, {5, 5, 15, 15}, {10, 0, 20, 10}, {0, 10, 10, 20}, {3, 3, 4, 40}, {1, 1, 2, 2}, {0, 0, 20, 1}, {9, 9, 11, 11}}
	if n := testing.AllocsPerRun(10, func() { s.UnionArea32(rects) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func benchmarkUnionArea(b *testing.B, n int) {
	rng := rand.New(rand.NewPCG(7, 8))
	rects := make([]Rect32, n)
	side := int32(7 * math.Sqrt(float64(n))) // covers about half of the square
	for i := range rects {
		x, y := 10*rng.Int32N(side), 10*rng.Int32N(side)
		rects[i] = Rect32{x, y, x + 20 + 10*rng.Int32N(9), y + 20 + 10*rng.Int32N(9)}
	}
	var s AreaScratch
	b.ReportAllocs()
	for b.Loop() {
		s.UnionArea32(rects)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(n), "ns/rect")
}

func BenchmarkUnionArea2(b *testing.B)       { benchmarkUnionArea(b, 2) }
func BenchmarkUnionArea8(b *testing.B)       { benchmarkUnionArea(b, 8) }
func BenchmarkUnionArea1000(b *testing.B)    { benchmarkUnionArea(b, 1000) }
func BenchmarkUnionArea1000000(b *testing.B) { benchmarkUnionArea(b, 1000000) }
