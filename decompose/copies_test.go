package decompose

import (
	"cmp"
	"math/rand/v2"
	"slices"
	"testing"
)

// Copies are found by any number of workers as they are found by comparing each rectangle with all others.
func TestCopiesAreDroppedByAnyNumberOfWorkers(t *testing.T) {
	rng := rand.New(rand.NewPCG(61, 62))
	const n = manyItems + 1000
	var items []item
	for i := range uint32(n) {
		x, y := int32(rng.IntN(150)), int32(rng.IntN(150)) // several to a corner, three in four of them copies
		items = append(items, item{X1: x, Y1: y, X2: x + 1 + int32(rng.IntN(2)), Y2: y + 1, ID: i})
	}
	slices.SortStableFunc(items, func(a, b item) int { return cmp.Or(cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.X1, b.X1)) })
	least := map[[4]int32]uint32{}
	for _, it := range items {
		k := [4]int32{it.X1, it.Y1, it.X2, it.Y2}
		if _, ok := least[k]; !ok {
			least[k] = it.ID
		}
	}
	for _, jobs := range []int{1, 2, 3, 7} {
		list := slices.Clone(items)
		sets := newUnion(make(union, n))
		kept := dropCopiesBy(jobs, list, sets, n, nil)
		if len(kept) != len(least) {
			t.Fatalf("%d workers: %d are left of %d that differ", jobs, len(kept), len(least))
		}
		for i, it := range kept {
			if least[[4]int32{it.X1, it.Y1, it.X2, it.Y2}] != it.ID {
				t.Fatalf("%d workers: not the first of its copies is left", jobs)
			}
			if i > 0 && (kept[i-1].Y1 > it.Y1 || kept[i-1].Y1 == it.Y1 && kept[i-1].X1 > it.X1) {
				t.Fatalf("%d workers: the order is lost", jobs)
			}
		}
		for _, it := range items {
			if first := least[[4]int32{it.X1, it.Y1, it.X2, it.Y2}]; sets.find(it.ID) != sets.find(first) {
				t.Fatalf("%d workers: a copy is not joined to what is left", jobs)
			}
		}
	}
}
