package verify

import (
	"context"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
)

// randomItems draws boxes of all sorts: small ones, points, copies, and rails as long as the field along either axis.
func randomItems(rng *rand.Rand, n int) []item {
	at := func(size int64) int64 { return rng.Int64N(size) - size/2 }
	items := make([]item, 0, n)
	for i := range n {
		x, y := at(1000), at(1000)
		w, h := rng.Int64N(20), rng.Int64N(20)
		switch rng.IntN(12) {
		case 0:
			w = 1000
		case 1:
			h = 1000
		case 2:
			w, h = 0, 0
		case 3:
			if i > 0 {
				b := items[rng.IntN(i)].box
				x, y, w, h = b.X1, b.Y1, b.X2-b.X1, b.Y2-b.Y1
			}
		}
		items = append(items, item{geom.Rect{X1: x, Y1: y, X2: x + w, Y2: y + h}, uint32(i), wholeRect})
	}
	return items
}

// Every two boxes within reach along both axes must come once, and no others.
func TestSearchFindsAllPairsOnce(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for round := range 300 {
		items := randomItems(rng, 1+rng.IntN(120))
		reach := []int64{0, 1, 7, 60, 2000}[round%5]
		var want, got [][2]uint32
		for i := range items {
			for k := range i {
				dx, dy := geom.RectGap(items[i].box, items[k].box)
				if dx <= reach && dy <= reach {
					want = append(want, [2]uint32{items[k].fig, items[i].fig})
				}
			}
		}
		sortItems(items)
		err := search(context.Background(), items, reach, func(a, b *item) {
			got = append(got, [2]uint32{min(a.fig, b.fig), max(a.fig, b.fig)})
		})
		if err != nil {
			t.Fatal(err)
		}
		order := func(p, q [2]uint32) int { return compareUint32(p[0], q[0], p[1], q[1]) }
		slices.SortFunc(want, order)
		slices.SortFunc(got, order)
		if d := cmp.Diff(want, got); d != "" {
			t.Fatalf("round %d, reach %d: pairs differ (-want +got):\n%s", round, reach, d)
		}
	}
}

func TestSearchStopsWithItsContext(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	items := randomItems(rand.New(rand.NewPCG(3, 4)), 10)
	sortItems(items)
	if err := search(ctx, items, 0, func(*item, *item) {}); err == nil {
		t.Error("a search under a context that has ended gives no error")
	}
}

// A distance of exactly the spacing is far enough, one less is not; also where squares leave 64 bits.
func TestRectRelationAtTheLimit(t *testing.T) {
	for _, c := range []struct {
		dx, dy, spacing int64
	}{
		{3, 4, 5}, {5, 12, 13}, {0, 7, 7}, {7, 0, 7}, {3 << 28, 4 << 28, 5 << 28}, {3 << 29, 4 << 29, 5 << 29}, {3 << 30, 4 << 30, 5 << 30},
		{1<<32 - 1, 1<<32 - 1, 1 << 32}, {1<<32 - 2, 0, 1<<32 - 2}, {1, 1, 1<<32 - 2},
	} {
		a := geom.Rect{X1: -1 << 32, Y1: -1 << 32, X2: 10 - 1<<32, Y2: 5 - 1<<32}
		b := geom.Rect{X1: a.X2 + c.dx, Y1: a.Y2 + c.dy, X2: a.X2 + c.dx + 4, Y2: a.Y2 + c.dy + 9}
		square := func(v int64) *big.Int { return new(big.Int).Mul(big.NewInt(v), big.NewInt(v)) }
		for _, s := range []int64{c.spacing - 1, c.spacing, c.spacing + 1} {
			want := geom.Far
			if new(big.Int).Add(square(c.dx), square(c.dy)).Cmp(square(s)) < 0 {
				want = geom.Near
			}
			if got := rectRelation(a, b, s); got != want {
				t.Errorf("gap (%d, %d), spacing %d: %v, want %v", c.dx, c.dy, s, got, want)
			}
			if got := rectRelation(b, a, s); got != want {
				t.Errorf("gap (%d, %d), spacing %d, the other way: %v, want %v", c.dx, c.dy, s, got, want)
			}
		}
	}
	if got := rectRelation(geom.Rect{X2: 4, Y2: 4}, geom.Rect{X1: 4, Y1: 4, X2: 6, Y2: 6}, 0); got != geom.Touch {
		t.Errorf("a shared corner is %v, want Touch", got)
	}
}

// A million small boxes on a grid, with rails over all of it: the time must stay near linear.
func BenchmarkSearch(b *testing.B) {
	var items []item
	for i := range int64(1000) {
		for k := range int64(1000) {
			items = append(items, item{geom.Rect{X1: 40 * i, Y1: 40 * k, X2: 40*i + 18, Y2: 40*k + 18}, uint32(len(items)), wholeRect})
		}
		items = append(items, item{geom.Rect{X1: 0, Y1: 40*i + 20, X2: 40000, Y2: 40*i + 30}, uint32(len(items)), wholeRect},
			item{geom.Rect{X1: 40*i + 20, Y1: 0, X2: 40*i + 30, Y2: 40000}, uint32(len(items)), wholeRect})
	}
	sortItems(items)
	b.ReportAllocs()
	for b.Loop() {
		pairs := 0
		if err := search(context.Background(), items, 30, func(*item, *item) { pairs++ }); err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(float64(pairs), "pairs")
	}
}
