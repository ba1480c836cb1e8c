package twin

import (
	"math/big"
	"slices"
)

// This file measures the area that a set of regions covers together. The plane is cut into level slabs at every corner and
// every crossing; in a slab no two edges cross, so what is filled there is a row of trapezoids.

// unionArea gives the area of the union of regions, in square database units.
func unionArea(regions []*region) *big.Rat {
	var edges []flank
	for k, r := range regions {
		for i := range r.outline {
			a, b := r.edge(i)
			switch {
			case a.y < b.y:
				edges = append(edges, flank{segment{exactly(a), exactly(b)}, k, 1})
			case a.y > b.y:
				edges = append(edges, flank{segment{exactly(b), exactly(a)}, k, -1})
			}
		}
	}
	var heights []*big.Rat
	for i, e := range edges {
		heights = append(heights, e.a.y, e.b.y)
		for _, f := range edges[:i] {
			for _, p := range meetings(e.segment, f.segment) {
				heights = append(heights, p.y)
			}
		}
	}
	slices.SortFunc(heights, (*big.Rat).Cmp)
	heights = slices.CompactFunc(heights, func(a, b *big.Rat) bool { return a.Cmp(b) == 0 })
	area := new(big.Rat)
	for i := 1; i < len(heights); i++ {
		low, high := heights[i-1], heights[i]
		middle := new(big.Rat).Add(low, high)
		width := covered(regions, edges, middle.Mul(middle, big.NewRat(1, 2)))
		area.Add(area, width.Mul(width, sub(high, low)))
	}
	return area.Mul(area, big.NewRat(1, 4)) // square half units to square units
}

// flank is an edge from its lower to its upper end.
type flank struct {
	segment
	region int
	dir    int
}

// covered gives how much of a level line the regions cover. No edges cross on it.
func covered(regions []*region, edges []flank, y *big.Rat) *big.Rat {
	type step struct {
		x      *big.Rat
		region int
		dir    int
	}
	var steps []step
	for _, e := range edges {
		if e.a.y.Cmp(y) < 0 && e.b.y.Cmp(y) > 0 {
			x := sub(e.b.x, e.a.x)
			if x.Sign() != 0 {
				x.Mul(x, sub(y, e.a.y))
				x.Quo(x, sub(e.b.y, e.a.y))
			}
			steps = append(steps, step{x.Add(x, e.a.x), e.region, e.dir})
		}
	}
	slices.SortFunc(steps, func(s, t step) int { return s.x.Cmp(t.x) })
	winding := make([]int, len(regions))
	full := 0 // regions that are filled here
	width := new(big.Rat)
	var from *big.Rat
	for _, s := range steps {
		was := regions[s.region].fills(winding[s.region])
		winding[s.region] += s.dir
		is := regions[s.region].fills(winding[s.region])
		before := full
		switch {
		case is && !was:
			full++
		case was && !is:
			full--
		}
		switch {
		case before == 0 && full > 0:
			from = s.x
		case before > 0 && full == 0:
			width.Add(width, sub(s.x, from))
		}
	}
	return width
}
