package geom

import (
	"cmp"
	"math/bits"
	"slices"
)

// This file measures the area that rectangles cover together, exactly. Shapes are mostly a handful of figures, so few
// rectangles go slab by slab through arrays on the stack; many go through a scan line with a segment tree that counts how
// often each stretch is covered (Bentley, "Algorithms for Klee's rectangle problems", 1977).

// Area is an exact area in square units: Hi * 2^64 + Lo.
type Area struct{ Hi, Lo uint64 }

// Float is the area as a float.
func (a Area) Float() float64 {
	return float64(a.Hi)*0x1p64 + float64(a.Lo)
}

// plus adds the area of a rectangle with these sides.
func (a Area) plus(width, height int64) Area {
	hi, lo := bits.Mul64(uint64(width), uint64(height))
	var carry uint64
	a.Lo, carry = bits.Add64(a.Lo, lo, 0)
	a.Hi += hi + carry
	return a
}

// AreaScratch measures merged areas. It keeps its memory from call to call; the zero value is ready. One goroutine uses it
// at a time.
type AreaScratch struct {
	rects []Rect
	xs    []int64 // distinct coordinates under the tree
	ys    []int64 // and of the other axis
	sides []side
	count []int32 // by node of the segment tree: rectangles that cover all of it and not all of its parent
	cover []int64 // by node: covered length
}

// side is the lower (d = 1) or upper (d = -1) side of a rectangle, over the ranks [a, b) of xs.
type side struct {
	y    int64
	a, b int32
	d    int32
}

// few is the number of rectangles up to which slabs on the stack are quicker than the tree.
const few = 12

// UnionArea32 is the area that the rectangles cover together. The plane of int32 is less than 2^32 wide and high, so an
// area is less than 2^64.
func (s *AreaScratch) UnionArea32(rects []Rect32) uint64 {
	if len(rects) == 1 {
		r := rects[0].Wide()
		return uint64(r.X2-r.X1) * uint64(r.Y2-r.Y1)
	}
	if len(rects) <= few {
		var wide [few]Rect
		for i, r := range rects {
			wide[i] = r.Wide()
		}
		return fewArea(wide[:len(rects)]).Lo
	}
	s.rects = slices.Grow(s.rects[:0], len(rects))
	for _, r := range rects {
		s.rects = append(s.rects, r.Wide())
	}
	return s.treeArea(s.rects).Lo
}

// UnionArea is the area that the rectangles cover together.
func (s *AreaScratch) UnionArea(rects []Rect) Area {
	if len(rects) <= few {
		var own [few]Rect
		copy(own[:], rects)
		return fewArea(own[:len(rects)])
	}
	return s.treeArea(rects)
}

// fewArea measures at most few rectangles; it changes their order.
func fewArea(rects []Rect) Area {
	var sum Area
	apart := true
	for i, r := range rects {
		sum = sum.plus(r.X2-r.X1, r.Y2-r.Y1)
		for _, q := range rects[:i] {
			apart = apart && (r.X1 >= q.X2 || q.X1 >= r.X2 || r.Y1 >= q.Y2 || q.Y1 >= r.Y2)
		}
	}
	if apart {
		return sum
	}
	var cuts [2 * few]int64
	for i, r := range rects {
		cuts[2*i], cuts[2*i+1] = r.Y1, r.Y2
		for k := i; k > 0 && r.X1 < rects[k-1].X1; k-- {
			rects[k], rects[k-1] = rects[k-1], r
		}
	}
	ys := cuts[:2*len(rects)]
	slices.Sort(ys)
	sum = Area{}
	for k := 1; k < len(ys); k++ {
		low, high := ys[k-1], ys[k]
		if low == high {
			continue
		}
		var width int64
		reach := rects[0].X1
		for _, r := range rects {
			if r.Y1 <= low && high <= r.Y2 && r.X2 > reach {
				width += r.X2 - max(r.X1, reach)
				reach = r.X2
			}
		}
		sum = sum.plus(width, high-low)
	}
	return sum
}

// treeArea measures any number of rectangles in n log n. The tree stands on the axis with fewer distinct coordinates, which
// keeps it small where a layout keeps to a grid.
func (s *AreaScratch) treeArea(rects []Rect) Area {
	s.xs, s.ys = slices.Grow(s.xs[:0], 2*len(rects)), slices.Grow(s.ys[:0], 2*len(rects))
	for _, r := range rects {
		if r.X1 < r.X2 && r.Y1 < r.Y2 {
			s.xs, s.ys = append(s.xs, r.X1, r.X2), append(s.ys, r.Y1, r.Y2)
		}
	}
	if len(s.xs) == 0 {
		return Area{}
	}
	s.xs, s.ys = distinct(s.xs), distinct(s.ys)
	transposed := len(s.ys) < len(s.xs)
	if transposed {
		s.xs, s.ys = s.ys, s.xs
	}
	s.sides = slices.Grow(s.sides[:0], 2*len(rects))
	for _, r := range rects {
		if r.X1 < r.X2 && r.Y1 < r.Y2 {
			if transposed {
				r = Rect{r.Y1, r.X1, r.Y2, r.X2}
			}
			a, _ := slices.BinarySearch(s.xs, r.X1)
			b, _ := slices.BinarySearch(s.xs, r.X2)
			s.sides = append(s.sides, side{r.Y1, int32(a), int32(b), 1}, side{r.Y2, int32(a), int32(b), -1})
		}
	}
	slices.SortFunc(s.sides, func(a, b side) int { return cmp.Compare(a.y, b.y) })
	leaves := 1
	for leaves < len(s.xs)-1 {
		leaves *= 2
	}
	s.count = zeroed(s.count, 2*leaves)
	if cap(s.cover) < 2*leaves {
		s.cover = make([]int64, 2*leaves)
	} else {
		s.cover = s.cover[:2*leaves]
		clear(s.cover)
	}
	var sum Area
	below := s.sides[0].y
	for _, e := range s.sides {
		if e.y != below {
			sum = sum.plus(s.cover[1], e.y-below)
			below = e.y
		}
		s.mark(1, 0, int32(leaves), e)
	}
	return sum
}

// distinct sorts v and keeps one of each number.
func distinct(v []int64) []int64 {
	slices.Sort(v)
	return slices.Compact(v)
}

// mark counts a side in at node k of the tree, which stands for the ranks [from, to).
func (s *AreaScratch) mark(k int, from, to int32, e side) {
	if e.a <= from && to <= e.b {
		s.count[k] += e.d
	} else {
		mid := (from + to) / 2
		if e.a < mid {
			s.mark(2*k, from, mid, e)
		}
		if mid < e.b {
			s.mark(2*k+1, mid, to, e)
		}
	}
	switch {
	case s.count[k] > 0:
		s.cover[k] = s.xs[min(int(to), len(s.xs)-1)] - s.xs[from]
	case to-from > 1:
		s.cover[k] = s.cover[2*k] + s.cover[2*k+1]
	default:
		s.cover[k] = 0
	}
}
