package verify

import (
	"cmp"
	"context"
	"math/bits"
	"slices"

	"maskpair/decompose/geom"
)

// This file finds what lies near what: items sorted by their left sides enter one after the other, and meet the items that
// are still within reach, which wait in rows of equal height. An item waits in every row that it crosses; the height of rows
// is chosen so that this stays a few rows for most, also among rails as long as the chip.

// item is a part of a flat figure: a rectangle of it, or a band of its polygon, which the box covers.
type item struct {
	box  geom.Rect
	fig  uint32
	band int32 // number of the band; wholeRect for a rectangle
}

const wholeRect = -1

// items appends the items of the figures [from, to).
func (f *flat) items(dst []item, from, to uint32) []item {
	for i := from; i < to; i++ {
		dst = f.itemsOf(dst, i)
	}
	return dst
}

func (f *flat) itemsOf(dst []item, i uint32) []item {
	fig := &f.figs[i]
	switch {
	case fig.form == formRect:
		return append(dst, item{fig.box, i, wholeRect})
	case fig.form == formNone:
		return dst
	}
	made, at := &f.forms[fig.form], f.at(fig)
	for _, r := range made.rects {
		dst = append(dst, item{at.ApplyRect(r), i, wholeRect})
	}
	if made.polygon != nil {
		for k, b := range made.polygon.Bands() {
			dst = append(dst, item{at.ApplyRect(b.Box), i, int32(k)})
		}
	}
	return dst
}

// sortItems puts items in the order that search wants; equal boxes come together.
func sortItems(items []item) {
	slices.SortFunc(items, func(a, b item) int {
		if a.box.X1 != b.box.X1 {
			return cmp.Compare(a.box.X1, b.box.X1)
		}
		return cmp.Or(cmp.Compare(a.box.Y1, b.box.Y1), cmp.Compare(a.box.X2, b.box.X2), cmp.Compare(a.box.Y2, b.box.Y2),
			cmp.Compare(a.fig, b.fig))
	})
}

// search calls visit once for each two of the sorted items whose boxes are at most reach apart along x and along y.
func search(ctx context.Context, items []item, reach int64, visit func(a, b *item)) error {
	if len(items) == 0 {
		return nil
	}
	rows := newRows(items, reach)
	for i := range items {
		if i&0xFFFF == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		it := &items[i]
		low, high := rows.of(it.box.Y1-reach), rows.of(it.box.Y2+reach)
		for row := low; row <= high; row++ {
			wait := rows.wait[row]
			for k := 0; k < len(wait); {
				other := &items[wait[k]]
				if other.box.X2+reach < it.box.X1 {
					wait[k] = wait[len(wait)-1]
					wait = wait[:len(wait)-1]
					continue
				}
				k++
				// Two items may share several rows; the lowest of them counts.
				if other.box.Y1 <= it.box.Y2+reach && it.box.Y1-reach <= other.box.Y2 && row == max(low, rows.of(other.box.Y1)) {
					visit(other, it)
				}
			}
			rows.wait[row] = wait
		}
		for row := rows.of(it.box.Y1); row <= rows.of(it.box.Y2); row++ {
			rows.wait[row] = append(rows.wait[row], uint32(i))
		}
	}
	return nil
}

// rows are the places where items wait.
type rows struct {
	base   int64
	height int64
	wait   [][]uint32
}

// newRows chooses the height of the rows: as low as lets all items together cross at most about eight rows each.
func newRows(items []item, reach int64) *rows {
	low, high := items[0].box.Y1, items[0].box.Y2
	for i := range items {
		low, high = min(low, items[i].box.Y1), max(high, items[i].box.Y2)
	}
	r := &rows{base: low}
	for count := int64(min(len(items)/2+1, 1<<20)); ; count /= 2 {
		r.height = (high-low)/count + 1
		crossed := int64(0)
		for i := range items {
			crossed += (items[i].box.Y2-items[i].box.Y1+2*reach)/r.height + 1
		}
		if crossed <= 8*int64(len(items)) || count == 1 {
			r.wait = make([][]uint32, (high-low)/r.height+1)
			return r
		}
	}
}

// of gives the row of a height; heights beyond the items are in the outermost rows.
func (r *rows) of(y int64) int {
	return int(min(max((y-r.base)/r.height, 0), int64(len(r.wait)-1)))
}

// relation compares two items of one flat layout: they touch, are nearer than the spacing, or neither. A spacing of 0 asks for
// touching alone.
func (f *flat) relation(a, b *item, spacing int64) geom.Relation {
	switch {
	case a.band == wholeRect && b.band == wholeRect:
		return rectRelation(a.box, b.box, spacing)
	case a.band == wholeRect:
		a, b = b, a
	}
	fig := &f.figs[a.fig]
	p := f.forms[fig.form].polygon
	if b.band == wholeRect {
		return geom.BandRectRelation(p, int(a.band), f.at(fig), b.box, spacing)
	}
	other := &f.figs[b.fig]
	return geom.BandRelation(p, int(a.band), f.at(fig), f.forms[other.form].polygon, int(b.band), f.at(other), spacing)
}

// rectRelation compares two rectangles. Gaps and spacing are below 2^33, so squares and their sum are below 2^67.
func rectRelation(a, b geom.Rect, spacing int64) geom.Relation {
	dx, dy := geom.RectGap(a, b)
	switch {
	case dx|dy == 0:
		return geom.Touch
	case dx >= spacing || dy >= spacing:
		return geom.Far
	case spacing <= 1<<31:
		if dx*dx+dy*dy < spacing*spacing {
			return geom.Near
		}
		return geom.Far
	}
	h1, l1 := bits.Mul64(uint64(dx), uint64(dx))
	h2, l2 := bits.Mul64(uint64(dy), uint64(dy))
	l, carry := bits.Add64(l1, l2, 0)
	h := h1 + h2 + carry
	hs, ls := bits.Mul64(uint64(spacing), uint64(spacing))
	if h < hs || h == hs && l < ls {
		return geom.Near
	}
	return geom.Far
}
