package decompose

import (
	"context"
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"sync/atomic"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// bruteRelation compares two rectangles in math/big: 0 touching, 1 nearer than s, 2 farther.
func bruteRelation(a, b item, s int64) int {
	gap := func(a1, a2, b1, b2 int32) *big.Int {
		return big.NewInt(max(0, int64(a1)-int64(b2), int64(b1)-int64(a2)))
	}
	dx, dy := gap(a.X1, a.X2, b.X1, b.X2), gap(a.Y1, a.Y2, b.Y1, b.Y2)
	sum := new(big.Int).Add(new(big.Int).Mul(dx, dx), new(big.Int).Mul(dy, dy))
	switch {
	case sum.Sign() == 0:
		return 0
	case sum.Cmp(new(big.Int).Mul(big.NewInt(s), big.NewInt(s))) < 0:
		return 1
	}
	return 2
}

// swept searches items and gives the sets as roots, and the near pairs of sets.
func swept(t *testing.T, items []item, spacing int64, jobs int) ([]uint32, []uint64) {
	t.Helper()
	n := len(items)
	sets := newUnion(make(union, n))
	sorted := dropCopies(sortItems(slices.Clone(items), make([]item, n), jobs), sets, uint32(n), nil)
	s := &sweep{items: sorted, spacing: spacing, figures: uint32(n)}
	var limit atomic.Int64
	limit.Store(1 << 40)
	sinks, err := s.run(context.Background(), sets, jobs, &limit)
	if err != nil {
		t.Fatal(err)
	}
	roots := make([]uint32, n)
	for i := range roots {
		roots[i] = sets.find(uint32(i))
	}
	return roots, pairsOfSets(sinks, roots)
}

func pairsOfSets(sinks []pairSink, roots []uint32) []uint64 {
	var out []uint64
	for _, k := range sinks {
		for _, b := range k.near.blocks {
			for _, p := range b {
				u, v, _ := unpackPair(p)
				if roots[u] != roots[v] {
					out = append(out, packPair(roots[u], roots[v], 0))
				}
			}
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// brute does the same over all pairs.
func brute(items []item, spacing int64) ([]uint32, []uint64) {
	n := len(items)
	sets := newUnion(make(union, n))
	for i := range items {
		for k := range i {
			if bruteRelation(items[i], items[k], spacing) == 0 {
				sets.join(uint32(i), uint32(k))
			}
		}
	}
	roots := make([]uint32, n)
	for i := range roots {
		roots[i] = sets.find(uint32(i))
	}
	var out []uint64
	for i := range items {
		for k := range i {
			if roots[i] != roots[k] && bruteRelation(items[i], items[k], spacing) == 1 {
				out = append(out, packPair(roots[i], roots[k], 0))
			}
		}
	}
	slices.Sort(out)
	return roots, slices.Compact(out)
}

func TestSweepFindsWhatAllPairsFind(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for round := range 3000 {
		n := 1 + rng.IntN(60)
		span := []int64{20, 100, 1000, 1 << 20, 1 << 31}[rng.IntN(5)]
		spacing := 1 + rng.Int64N([]int64{3, 30, 300, 1 << 31}[rng.IntN(4)])
		long := rng.IntN(3) == 0
		items := make([]item, n)
		for i := range items {
			x, y := rng.Int64N(2*span)-span, rng.Int64N(2*span)-span
			w, h := 1+rng.Int64N(1+span/8), 1+rng.Int64N(1+span/8)
			if long && rng.IntN(4) == 0 {
				w, h = 2*span, 1
			} else if long && rng.IntN(4) == 0 {
				w, h = 1, 2*span
			}
			items[i] = item{int32(x), int32(y), int32(min(x+w, math.MaxInt32)), int32(min(y+h, math.MaxInt32)), uint32(i)}
			if i > 0 && rng.IntN(8) == 0 {
				k := rng.IntN(i)
				items[i] = items[k]
				items[i].ID = uint32(i)
			}
		}
		wantRoots, wantPairs := brute(items, spacing)
		roots, pairs := swept(t, items, spacing, 1+round%3)
		if diff := cmp.Diff(wantRoots, roots); diff != "" {
			t.Fatalf("round %d: sets differ (-want +got):\n%s", round, diff)
		}
		if diff := cmp.Diff(wantPairs, pairs); diff != "" {
			t.Fatalf("round %d, spacing %d: near pairs differ (-want +got):\n%s", round, spacing, diff)
		}
	}
}

// A sweep of several stretches must find the pairs across their borders, whatever the number of workers. The rows are 100 apart and
// the spacing 101, so each square is near to its four neighbours and to nothing else (corners are 141 apart).
func TestSweepAcrossStretches(t *testing.T) {
	const columns, rows = 400, 400
	var items []item
	for r := range int32(rows) {
		for c := range int32(columns) {
			items = append(items, item{200 * c, 200 * r, 200*c + 100, 200*r + 100, uint32(len(items))})
		}
	}
	rand.New(rand.NewPCG(3, 4)).Shuffle(len(items), func(i, k int) { items[i], items[k] = items[k], items[i] })
	for _, jobs := range []int{1, 2, 3} {
		_, pairs := swept(t, items, 101, jobs)
		if want := columns*(rows-1) + rows*(columns-1); len(pairs) != want {
			t.Errorf("%d workers: %d near pairs, want %d", jobs, len(pairs), want)
		}
	}
}

func TestOccupancyFindsTheNextMember(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for _, n := range []int{64, 4096, 1 << 18, 1 << 20} {
		var o occupancy
		o.resize(n)
		in := map[uint32]bool{}
		for range 200 {
			i := uint32(rng.IntN(n))
			if rng.IntN(3) == 0 {
				o.unset(i)
				delete(in, i)
			} else {
				o.set(i)
				in[i] = true
			}
			from := uint32(rng.IntN(n))
			want, ok := uint32(math.MaxUint32), false
			for m := range in {
				if m >= from && m < want {
					want, ok = m, true
				}
			}
			if got, found := o.next(from); found != ok || ok && got != want {
				t.Fatalf("of %d: next(%d) = %d, %v; want %d, %v", n, from, got, found, want, ok)
			}
		}
	}
}

func BenchmarkSweep(b *testing.B) {
	for _, n := range []int{1 << 14, 1 << 17, 1 << 20} {
		items := make([]item, 0, n)
		side := int32(math.Sqrt(float64(n)))
		for i := range int32(n) {
			x, y := 200*(i%side), 200*(i/side)
			items = append(items, item{x, y, x + 100, y + 100, uint32(i)})
		}
		b.Run(itoa(n), func(b *testing.B) {
			b.SetBytes(int64(n) * 20)
			for b.Loop() {
				sets := newUnion(make(union, n))
				s := &sweep{items: items, spacing: 101, figures: uint32(n)}
				var limit atomic.Int64
				limit.Store(1 << 40)
				if _, err := s.run(context.Background(), sets, 1, &limit); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkSort(b *testing.B) {
	for _, n := range []int{1 << 14, 1 << 17, 1 << 20} {
		rng := rand.New(rand.NewPCG(7, 8))
		items, scratch := make([]item, n), make([]item, n)
		for i := range items {
			items[i] = item{rng.Int32N(1 << 22), rng.Int32N(1 << 22), 0, 0, uint32(i)}
		}
		b.Run(itoa(n), func(b *testing.B) {
			b.SetBytes(int64(n) * 20)
			for b.Loop() {
				sortItems(items, scratch, 1)
			}
		})
	}
}

// Upright wires beside each other are all active to the end: each stretch begins with all that lies before it.
func TestStretchesOfWhatStaysActive(t *testing.T) {
	const n = 20 * stretchItems
	items := make([]item, n)
	for i := range items {
		items[i] = item{X1: int32(40 * i), Y1: int32(i), X2: int32(40*i + 20), Y2: math.MaxInt32, ID: uint32(i)}
	}
	s := &sweep{items: items, spacing: 36, figures: n}
	next, carried := 0, 0
	s.plan(func(st stretch) bool {
		if st.from != next || st.to <= st.from || len(st.active) != st.from {
			t.Fatalf("a stretch from %d to %d with %d active items follows one that ends at %d", st.from, st.to, len(st.active), next)
		}
		next = st.to
		carried += len(st.active)
		return true
	})
	if next != n || carried > 3*n {
		t.Errorf("stretches end at %d of %d items and begin with %d active ones in total", next, n, carried)
	}
}
