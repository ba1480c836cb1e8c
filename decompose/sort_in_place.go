package decompose

import (
	"cmp"
	"math/bits"
	"slices"
)

// This file sorts items where no second array is at hand: the first digit of the edge deals them to buckets in place (American flag sort,
// McIlroy, Bostic and McIlroy 1993), each of which is sorted by comparing. To touch fresh memory for an array would cost as much again.

// byEdge is an order of items: by an edge, then X1, then the rest, so that it is total and copies stand side by side.
type byEdge struct {
	edge    func(*item) int32
	compare func(a, b item) int
}

// byLower is the order of the sweep, byUpper that in which it passes items by.
func byLower() byEdge {
	return byEdge{func(it *item) int32 { return it.Y1 }, func(a, b item) int { return compareFrom(a.Y1, b.Y1, &a, &b) }}
}

func byUpper() byEdge {
	return byEdge{func(it *item) int32 { return it.Y2 }, func(a, b item) int { return compareFrom(a.Y2, b.Y2, &a, &b) }}
}

func compareFrom(p, q int32, a, b *item) int {
	if p != q {
		return cmp.Compare(p, q)
	}
	if a.X1 != b.X1 {
		return cmp.Compare(a.X1, b.X1)
	}
	return cmp.Or(cmp.Compare(a.X2, b.X2), cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.Y2, b.Y2), cmp.Compare(a.ID, b.ID))
}

// sortInPlace sorts items.
func sortInPlace(items []item, by byEdge, jobs int) {
	if len(items) < 1<<12 {
		slices.SortFunc(items, by.compare)
		return
	}
	edge := by.edge
	low, high := edge(&items[0]), edge(&items[0])
	for i := range items {
		low, high = min(low, edge(&items[i])), max(high, edge(&items[i]))
	}
	const digits = 1 << digitBits
	shift := max(0, bits.Len32(uint32(high)-uint32(low))-digitBits)
	digit := func(it *item) uint32 { return (uint32(edge(it)) - uint32(low)) >> shift }
	var next, end [digits]uint32
	for i := range items {
		end[digit(&items[i])]++
	}
	for d := 1; d < digits; d++ {
		end[d] += end[d-1]
		next[d] = end[d-1]
	}
	var it item // one for all: it is on the heap
	for d := range uint32(digits) {
		for next[d] < end[d] {
			it = items[next[d]]
			for to := digit(&it); to != d; to = digit(&it) {
				it, items[next[to]] = items[next[to]], it
				next[to]++
			}
			items[next[d]] = it
			next[d]++
		}
	}
	// Each worker takes the buckets that begin in its part of the items.
	each(jobs, func(w int) {
		from, to := uint32(len(items)*w/jobs), uint32(len(items)*(w+1)/jobs)
		for d := range digits {
			begin := uint32(0)
			if d > 0 {
				begin = end[d-1]
			}
			if begin >= from && begin < to {
				slices.SortFunc(items[begin:end[d]], by.compare)
			}
		}
	})
}

// mergeItems merges some items into others, both in the order of the sweep, in the room behind the latter. Of equal ones, those that were
// there come first.
func mergeItems(items, more []item) []item {
	n, m := len(items), len(more)
	all := items[:n+m]
	for m > 0 {
		if n > 0 && cmp.Or(cmp.Compare(all[n-1].Y1, more[m-1].Y1), cmp.Compare(all[n-1].X1, more[m-1].X1)) > 0 {
			all[n+m-1] = all[n-1]
			n--
		} else {
			all[n+m-1] = more[m-1]
			m--
		}
	}
	return all
}
