package decompose

import (
	"cmp"
	"math/bits"
	"slices"
)

// This file puts items in the order of the sweep: by lower edge, then left edge, by a radix sort with the least digit first. It is
// stable, so the order depends on the items alone, whatever the number of workers.

const (
	digitBits = 11
	fewDigits = 1 << 9 // below, counting digits costs more than comparing
)

// sortItems orders items by (Y1, X1), using scratch of the same length; the sorted items are in the slice that it returns, which is
// one of the two.
func sortItems(items, scratch []item, jobs int) []item {
	if len(items) < fewDigits {
		slices.SortStableFunc(items, func(a, b item) int { return cmp.Or(cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.X1, b.X1)) })
		return items
	}
	if len(items) < 1<<12 {
		jobs = 1
	}
	x1, x2, y1, y2 := items[0].X1, items[0].X1, items[0].Y1, items[0].Y1
	for i := range items {
		x1, x2 = min(x1, items[i].X1), max(x2, items[i].X1)
		y1, y2 = min(y1, items[i].Y1), max(y2, items[i].Y1)
	}
	byX := func(it *item) uint32 { return uint32(it.X1) - uint32(x1) }
	byY := func(it *item) uint32 { return uint32(it.Y1) - uint32(y1) }
	from, to := sortBy(items, scratch, byX, bits.Len32(uint32(x2)-uint32(x1)), jobs)
	from, _ = sortBy(from, to, byY, bits.Len32(uint32(y2)-uint32(y1)), jobs)
	return from
}

// sortBy sorts by one key of so many bits, digit by digit. It returns the sorted slice, then the other.
func sortBy[T any](from, to []T, key func(*T) uint32, keyBits, jobs int) (sorted, other []T) {
	for shift := 0; shift < keyBits; shift += digitBits {
		scatter(from, to, key, shift, jobs)
		from, to = to, from
	}
	return from, to
}

// scatter does one digit: each worker counts and then moves its own stretch.
func scatter[T any](from, to []T, key func(*T) uint32, shift, jobs int) {
	const digits = 1 << digitBits
	counts := make([][digits]uint32, jobs)
	stretch := func(w int) []T { return from[len(from)*w/jobs : len(from)*(w+1)/jobs] }
	each(jobs, func(w int) {
		c := &counts[w]
		part := stretch(w)
		for i := range part {
			c[key(&part[i])>>shift&(digits-1)]++
		}
	})
	next := uint32(0)
	for d := range digits {
		for w := range counts {
			n := counts[w][d]
			counts[w][d] = next
			next += n
		}
	}
	each(jobs, func(w int) {
		c := &counts[w]
		part := stretch(w)
		for i := range part {
			d := key(&part[i]) >> shift & (digits - 1)
			to[c[d]] = part[i]
			c[d]++
		}
	})
}
