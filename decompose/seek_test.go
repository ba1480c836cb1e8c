package decompose

import (
	"cmp"
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"sync/atomic"
	"testing"
)

// soughtHits searches items with what looks for them, and gives the hits: each once, in order.
func soughtHits(t *testing.T, items, looking []item, spacing int64, jobs int) []hit {
	t.Helper()
	figures := uint32(len(items))
	sets := newUnion(make(union, figures))
	seekers, others := splitSeekers(slices.Clone(looking), make([]item, len(looking)), spacing)
	sorted := make([]item, len(items), len(items)+len(looking))
	copy(sorted, sortItems(slices.Clone(items), make([]item, len(items)), jobs))
	sorted = mergeItems(sorted, sortItems(others, make([]item, len(others)), jobs))
	sortInPlace(seekers, byUpper(), jobs)
	s := &sweep{items: sorted, seekers: seekers, hitRoom: hitRoom(nil, len(seekers)), spacing: spacing, figures: figures}
	var limit atomic.Int64
	limit.Store(1 << 40)
	sinks, err := s.run(context.Background(), sets, jobs, &limit)
	if err != nil {
		t.Fatal(err)
	}
	hits := joinHits(nil, sinks)
	slices.SortFunc(hits, compareHits)
	return slices.Compact(hits)
}

func compareHits(a, b hit) int {
	return cmp.Or(cmp.Compare(a.probe, b.probe), cmp.Compare(a.figure, b.figure))
}

// What looks for figures finds each shape that it touches, corners included, however high or wide it is, and copies of it do.
func TestSeekersHitWhatTheyTouch(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 1))
	for _, n := range []int{0, 1, fewItems, fewItems + 1, 400, 1500} {
		for _, spacing := range []int64{1, 5, 40} {
			extent := 20 + int32(4*n)
			box := func(id uint32) item {
				x, y, wide, high := rng.Int32N(extent), rng.Int32N(60), rng.Int32N(8), rng.Int32N(8)
				switch rng.IntN(12) {
				case 0:
					wide = rng.Int32N(extent)
				case 1:
					high = rng.Int32N(60)
				}
				return item{X1: x, Y1: y, X2: x + wide, Y2: y + high, ID: id}
			}
			items, looking := make([]item, n), make([]item, n/2+3)
			for i := range items {
				items[i] = box(uint32(i))
				items[i].X2, items[i].Y2 = items[i].X2+1, items[i].Y2+1
			}
			for i := range looking {
				looking[i] = box(uint32(n + i))
				if i > 0 && rng.IntN(4) == 0 {
					looking[i] = looking[rng.IntN(i)]
					looking[i].ID = uint32(n + i)
				}
			}
			var want []hit
			inside := map[uint32]bool{} // figures within others: the sweep need not find them, since it finds those
			for i, a := range items {
				for k, b := range items {
					if i != k && b.X1 <= a.X1 && b.Y1 <= a.Y1 && a.X2 <= b.X2 && a.Y2 <= b.Y2 {
						inside[a.ID] = true
					}
				}
			}
			for i := range looking {
				for _, f := range items {
					if bruteRelation(looking[i], f, spacing) == 0 && !inside[f.ID] {
						want = append(want, hit{uint32(i), f.ID})
					}
				}
			}
			for _, jobs := range []int{1, 3} {
				got := slices.DeleteFunc(soughtHits(t, items, looking, spacing, jobs), func(h hit) bool { return inside[h.figure] })
				if !slices.Equal(got, want) {
					t.Errorf("%d figures at %d, %d jobs: %d hits, want %d", n, spacing, jobs, len(got), len(want))
				}
			}
		}
	}
}

// Squares stand in a raster of many stretches, so arithmetic says which a seeker touches. The order of the hits is that of the
// seekers: by upper edge, then left edge, also where stretches end within a row of squares.
func TestSeekersOverManyStretches(t *testing.T) {
	const pitch, side, columns = 10, 4, 700
	rows := int32(3*stretchItems/columns) + 1
	rng := rand.New(rand.NewPCG(7, 2))
	var items, looking []item
	for y := range rows {
		for x := range int32(columns) {
			items = append(items, item{X1: pitch * x, Y1: pitch * y, X2: pitch*x + side, Y2: pitch*y + side, ID: uint32(len(items))})
		}
	}
	rng.Shuffle(len(items), func(i, k int) {
		items[i].X1, items[i].Y1, items[i].X2, items[i].Y2, items[k].X1, items[k].Y1, items[k].X2, items[k].Y2 =
			items[k].X1, items[k].Y1, items[k].X2, items[k].Y2, items[i].X1, items[i].Y1, items[i].X2, items[i].Y2
	})
	at := map[[2]int32]uint32{}
	for _, it := range items {
		at[[2]int32{it.X1 / pitch, it.Y1 / pitch}] = it.ID
	}
	var want []hit
	for i := range uint32(50000) {
		x, y := rng.Int32N(pitch*columns), rng.Int32N(pitch*rows)
		q := item{X1: x, Y1: y, X2: x + rng.Int32N(12), Y2: y + rng.Int32N(12), ID: uint32(len(items)) + i}
		looking = append(looking, q)
		// Square number k covers pitch*k to pitch*k+side.
		first := func(low int32) int32 { return (low + pitch - side - 1) / pitch }
		for r := first(q.Y1); r <= q.Y2/pitch && r < rows; r++ {
			for c := first(q.X1); c <= q.X2/pitch && c < columns; c++ {
				want = append(want, hit{i, at[[2]int32{c, r}]})
			}
		}
	}
	slices.SortFunc(want, compareHits)
	for _, jobs := range []int{1, 2} {
		if got := soughtHits(t, items, looking, 13, jobs); !slices.Equal(got, want) {
			t.Errorf("%d jobs: %d hits, want %d", jobs, len(got), len(want))
		}
	}
}

// Sorting in place gives the order that comparing gives, whatever the heights of what is sorted, also where nearly all share one edge.
func TestSortInPlace(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 3))
	for _, n := range []int{0, 1, 1 << 10, 1 << 13, 50000} {
		for _, spread := range []int32{1, 30, 1 << 12, 1 << 30} {
			items := make([]item, n)
			for i := range items {
				items[i] = item{X1: rng.Int32N(50), Y1: rng.Int32N(spread) - spread/2, X2: 50 + rng.Int32N(3), ID: uint32(n - i)}
				items[i].Y2 = items[i].Y1 + rng.Int32N(9)
			}
			if n > 1 {
				items[n/2].Y1, items[n/2].Y2 = math.MinInt32, math.MaxInt32
			}
			for _, by := range []byEdge{byLower(), byUpper()} {
				want := slices.Clone(items)
				slices.SortFunc(want, func(a, b item) int {
					return cmp.Or(cmp.Compare(by.edge(&a), by.edge(&b)), cmp.Compare(a.X1, b.X1), cmp.Compare(a.X2, b.X2), cmp.Compare(a.Y1, b.Y1),
						cmp.Compare(a.Y2, b.Y2), cmp.Compare(a.ID, b.ID))
				})
				for _, jobs := range []int{1, 3} {
					got := slices.Clone(items)
					if sortInPlace(got, by, jobs); !slices.Equal(got, want) {
						t.Errorf("%d items over %d, %d jobs: out of order", n, spread, jobs)
					}
				}
			}
		}
	}
}
