package decompose

import (
	"cmp"
	"encoding/binary"
	"hash/maphash"
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file ties each figure of a cell to itself in all placements of the cell. Placements of one structure have their figures in the
// same order, so ordinals say which is which; between a cell and its variants equal outlines in cell coordinates do.

// Alike calls tie for each figure of a cell, of what it places, and of its variants: the node of the figure where it is first met, and
// its node in another placement. found is false where no placement has a figure.
func (v *View) Alike(cell string, tie func(a, b uint32)) (found bool, err error) {
	h, f := v.run.h, v.layout.flat
	member, known := h.family(cell)
	if !known {
		return false, nil
	}
	count := h.countUnder(func(s int32) uint64 { return uint64(boolInt(member[s])) })
	if err := h.countable(count, "placements of "+cell); err != nil {
		return false, err
	}
	number := v.numberFigures(member)
	var first []uint32 // by number: 1 + node
	node := v.layout.nodeOf.Data
	f.eachMember(member, count, func(s int32, ordinal uint64) {
		for k := range f.all[s] {
			n, at := node[ordinal+k], uint32(k)
			if number[s] != nil {
				at = number[s][k]
			}
			for uint32(len(first)) <= at {
				first = append(first, 0)
			}
			found = true
			if first[at] == 0 {
				first[at] = n + 1
				if v.Rules().Stitch != nil {
					tie(n, n) // it is under an order, so that it is not cut
				}
			} else if first[at]-1 != n {
				tie(first[at]-1, n)
			}
		}
	})
	return found, nil
}

// eachMember calls fn for each placement of a structure that is a member, with the ordinal of its first figure.
func (f *flat) eachMember(member []bool, count []uint64, fn func(s int32, ordinal uint64)) {
	var walk func(s int32, ordinal uint64)
	walk = func(s int32, ordinal uint64) {
		if count[s] == 0 || f.all[s] == 0 {
			return
		}
		if member[s] {
			fn(s, ordinal)
		}
		ordinal += uint64(f.own[s])
		st := &f.lib.Structures[s]
		for r := st.FirstRef; r < st.EndRef; r++ {
			ref := &f.lib.Refs[r]
			if ref.Target < 0 || f.all[ref.Target] == 0 {
				continue
			}
			for range elements(f.lib, ref) {
				walk(ref.Target, ordinal)
				ordinal += f.all[ref.Target]
			}
		}
	}
	for top, t := range f.h.tops {
		walk(t, f.first[top])
	}
}

// outlined is a flat figure of a cell with what its outline comes to.
type outlined struct {
	hash   uint64
	member int32
	figure uint32 // ordinal within the member
	points []geom.Point
}

// numberFigures numbers the flat figures of cells that are variants of each other, so that equal outlines have equal numbers. Where
// only one member is placed, its figures keep their order: it has no numbers.
func (v *View) numberFigures(member []bool) [][]uint32 {
	f := v.layout.flat
	number := make([][]uint32, len(member))
	var placed []int32
	for s, m := range member {
		if m && f.h.placed[s] > 0 && f.all[s] > 0 {
			placed = append(placed, int32(s))
		}
	}
	if len(placed) < 2 {
		return number
	}
	seed := maphash.MakeSeed() // decides only what is compared first
	var list []outlined
	for _, s := range placed {
		number[s] = make([]uint32, f.all[s])
		k := uint32(0)
		f.outlines(s, gds.Identity(), func(points []geom.Point) {
			points = canonicalOutline(points)
			list = append(list, outlined{hashPoints(seed, points), s, k, points})
			k++
		})
	}
	slices.SortFunc(list, func(a, b outlined) int {
		return cmp.Or(cmp.Compare(a.hash, b.hash), slices.CompareFunc(a.points, b.points, comparePoints), cmp.Compare(a.member, b.member), cmp.Compare(a.figure, b.figure))
	})
	n := uint32(0)
	for i := range list {
		if i > 0 && !slices.Equal(list[i].points, list[i-1].points) {
			n++
		}
		number[list[i].member][list[i].figure] = n
	}
	return number
}

func comparePoints(a, b geom.Point) int { return cmp.Or(cmp.Compare(a.X, b.X), cmp.Compare(a.Y, b.Y)) }

func hashPoints(seed maphash.Seed, points []geom.Point) uint64 {
	var h maphash.Hash
	h.SetSeed(seed)
	var buf [16]byte
	for _, p := range points {
		binary.LittleEndian.PutUint64(buf[:8], uint64(p.X))
		binary.LittleEndian.PutUint64(buf[8:], uint64(p.Y))
		h.Write(buf[:])
	}
	return h.Sum64()
}

// outlines calls fn for the flat figures under a structure in the order of their ordinals, with the outline in half units where at
// places the structure.
func (f *flat) outlines(s int32, at gds.Transform, fn func(points []geom.Point)) {
	st := &f.lib.Structures[s]
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		if !f.figure(i) {
			continue
		}
		fig := &f.lib.Figures[i]
		var points []geom.Point
		if fig.Outline == 0 {
			b := fig.Box
			for _, p := range [4][2]int32{{b.X1, b.Y1}, {b.X2, b.Y1}, {b.X2, b.Y2}, {b.X1, b.Y2}} {
				points = append(points, geom.Point{X: 2 * int64(p[0]), Y: 2 * int64(p[1])})
			}
		} else {
			points, _, _ = outlinePoints(nil, f.lib, &f.lib.Outlines[fig.Outline-1])
		}
		for k, p := range points {
			points[k] = geom.Point(placeHalf(at, Spot(p)))
		}
		fn(points)
	}
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		p := f.lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if p != nil {
			columns, rows = p.Columns, p.Rows
		}
		for row := range rows {
			for column := range columns {
				f.outlines(ref.Target, gds.Compose(at, ref, p, column, row), fn)
			}
		}
	}
}

// canonicalOutline drops repeated points and points on straight edges, and starts a closed outline at its least point in the direction
// that comes first; outlines that are the same walk come out equal.
func canonicalOutline(points []geom.Point) []geom.Point {
	for changed := true; changed && len(points) > 2; {
		changed = false
		kept := make([]geom.Point, 0, len(points))
		for i, b := range points {
			a := points[(i+len(points)-1)%len(points)]
			if len(kept) > 0 {
				a = kept[len(kept)-1]
			}
			c := points[(i+1)%len(points)]
			if a == b || b == c || straightOn(a, b, c) {
				changed = true
				continue
			}
			kept = append(kept, b)
		}
		if len(kept) == 0 {
			break
		}
		points = kept
	}
	best := points
	low := slices.MinFunc(points, comparePoints)
	back := slices.Clone(points)
	slices.Reverse(back)
	for n, run := range [2][]geom.Point{points, back} {
		for k, p := range run {
			if p != low {
				continue
			}
			turned := append(slices.Clone(run[k:]), run[:k]...)
			if n == 0 && &best[0] == &points[0] || slices.CompareFunc(turned, best, comparePoints) < 0 {
				best = turned
			}
		}
	}
	return best
}

// straightOn tells whether the way from a over b to c goes straight on at b.
func straightOn(a, b, c geom.Point) bool {
	if geom.Orient(a, b, c) != 0 {
		return false
	}
	// Differences of coordinates below 2^33 fit; only their signs count.
	return sameSign(b.X-a.X, c.X-b.X) && sameSign(b.Y-a.Y, c.Y-b.Y)
}

func sameSign(a, b int64) bool { return (a > 0) == (b > 0) && (a < 0) == (b < 0) || a == 0 || b == 0 }
