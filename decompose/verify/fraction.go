package verify

import (
	"math/big"
	"slices"

	"maskpair/decompose/geom"
)

// This file answers with fractions whether a figure with slanted edges lies in the union of others. It is slow and simple, and
// asked for the rare figures alone that are not drawn alike in both streams: pieces of what was cut, and faults.
//
// All heights at which edges end or cross are found as fractions. Between two heights that follow each other edges are in one
// order from left to right, as they are at the middle; a walk along it with the winding number of every figure tells for each
// gap between edges what covers it. A gap of width 0 counts for nothing.

// overlay is a set of outlines laid over each other.
type overlay struct {
	edges   []slope
	fills   []geom.Fill
	covers  []bool // by outline: it is one of those that may cover
	outline int
}

// slope is an edge that is not level, from its lower to its upper end.
type slope struct {
	a, b    geom.Point
	outline int
	up      int32 // 1 where the outline runs upwards here, else -1
}

func newOverlay() *overlay { return &overlay{} }

// add adds a closed outline, as the one that is to be covered or as one that covers.
func (o *overlay) add(points []geom.Point, fill geom.Fill, covers bool) {
	for i, q := range points {
		p := points[(i+len(points)-1)%len(points)]
		switch {
		case p.Y < q.Y:
			o.edges = append(o.edges, slope{p, q, o.outline, 1})
		case p.Y > q.Y:
			o.edges = append(o.edges, slope{q, p, o.outline, -1})
		}
	}
	o.fills = append(o.fills, fill)
	o.covers = append(o.covers, covers)
	o.outline++
}

// covered says whether every point of the outlines to be covered, all within box, is in one that covers. Points on lines do
// not count.
func (o *overlay) covered(box geom.Rect) bool {
	// What lies right of the box, or wholly above or below it, changes nothing in it. Edges on its right side end what is
	// to be covered.
	o.edges = slices.DeleteFunc(o.edges, func(e slope) bool {
		return e.b.Y <= box.Y1 || e.a.Y >= box.Y2 || min(e.a.X, e.b.X) > box.X2
	})
	slices.SortFunc(o.edges, func(e, f slope) int { return int(sign(e.a.Y - f.a.Y)) })
	heights := o.heights(box)
	var active []int
	next := 0
	for i := 1; i < len(heights); i++ {
		low, high := heights[i-1], heights[i]
		active = slices.DeleteFunc(active, func(k int) bool { return compareHeight(o.edges[k].b.Y, low) <= 0 })
		for ; next < len(o.edges) && compareHeight(o.edges[next].a.Y, low) <= 0; next++ {
			if compareHeight(o.edges[next].b.Y, low) > 0 {
				active = append(active, next)
			}
		}
		middle := new(big.Rat).Add(low, high)
		middle.Quo(middle, big.NewRat(2, 1))
		if !o.slab(active, middle) {
			return false
		}
	}
	return true
}

func sign(v int64) int64 {
	switch {
	case v < 0:
		return -1
	case v > 0:
		return 1
	}
	return 0
}

func compareHeight(y int64, h *big.Rat) int { return new(big.Rat).SetInt64(y).Cmp(h) }

// heights gives all heights within the box at which edges end or cross, ascending.
func (o *overlay) heights(box geom.Rect) []*big.Rat {
	whole := []int64{box.Y1, box.Y2}
	for _, e := range o.edges {
		for _, y := range [2]int64{e.a.Y, e.b.Y} {
			if box.Y1 < y && y < box.Y2 {
				whole = append(whole, y)
			}
		}
	}
	slices.Sort(whole)
	whole = slices.Compact(whole)
	out := make([]*big.Rat, len(whole))
	for i, y := range whole {
		out[i] = new(big.Rat).SetInt64(y)
	}
	low, high := out[0], out[len(out)-1]
	for i := range o.edges {
		for k := range i {
			e, f := &o.edges[i], &o.edges[k]
			if e.a.Y >= f.b.Y || f.a.Y >= e.b.Y || max(e.a.X, e.b.X) <= min(f.a.X, f.b.X) || max(f.a.X, f.b.X) <= min(e.a.X, e.b.X) {
				continue
			}
			if y := crossing(e, f); y != nil && y.Cmp(low) > 0 && y.Cmp(high) < 0 {
				out = append(out, y)
			}
		}
	}
	slices.SortFunc(out, (*big.Rat).Cmp)
	return slices.CompactFunc(out, func(a, b *big.Rat) bool { return a.Cmp(b) == 0 })
}

// crossing gives the height at which two edges meet; nil where they do not, or lie on one line.
func crossing(e, f *slope) *big.Rat {
	ex, ey, fx, fy := e.b.X-e.a.X, e.b.Y-e.a.Y, f.b.X-f.a.X, f.b.Y-f.a.Y
	det := minus(product(ex, fy), product(ey, fx))
	if det.Sign() == 0 {
		return nil
	}
	// e.a + t*(ex, ey) lies on f where t = ((f.a - e.a) x (fx, fy)) / det.
	t := new(big.Rat).SetFrac(minus(product(f.a.X-e.a.X, fy), product(f.a.Y-e.a.Y, fx)), det)
	if t.Sign() < 0 || t.Cmp(big.NewRat(1, 1)) > 0 {
		return nil
	}
	y := t.Mul(t, new(big.Rat).SetInt64(ey))
	y.Add(y, new(big.Rat).SetInt64(e.a.Y))
	if compareHeight(f.a.Y, y) > 0 || compareHeight(f.b.Y, y) < 0 {
		return nil
	}
	return y
}

func product(a, b int64) *big.Int { return new(big.Int).Mul(big.NewInt(a), big.NewInt(b)) }

func minus(a, b *big.Int) *big.Int { return a.Sub(a, b) }

// slab walks along a height between two that count, and says whether all that is to be covered there is.
func (o *overlay) slab(active []int, y *big.Rat) bool {
	type at struct {
		x    *big.Rat
		edge int
	}
	row := make([]at, len(active))
	for i, k := range active {
		e := &o.edges[k]
		// x = a.X + (y - a.Y) * (b.X - a.X) / (b.Y - a.Y)
		x := new(big.Rat).Sub(y, new(big.Rat).SetInt64(e.a.Y))
		x.Mul(x, big.NewRat(e.b.X-e.a.X, e.b.Y-e.a.Y))
		row[i] = at{x.Add(x, new(big.Rat).SetInt64(e.a.X)), k}
	}
	slices.SortFunc(row, func(p, q at) int { return p.x.Cmp(q.x) })
	wind := make([]int32, o.outline)
	wanted, covering := 0, 0
	for i := range row {
		if i > 0 && wanted > 0 && covering == 0 && row[i-1].x.Cmp(row[i].x) < 0 {
			return false
		}
		e := &o.edges[row[i].edge]
		before := o.full(e.outline, wind[e.outline])
		wind[e.outline] += e.up
		after := o.full(e.outline, wind[e.outline])
		count := &wanted
		if o.covers[e.outline] {
			count = &covering
		}
		switch {
		case after && !before:
			*count++
		case before && !after:
			*count--
		}
	}
	return true
}

// full says whether points of a winding number are filled.
func (o *overlay) full(outline int, wind int32) bool {
	if o.fills[outline] == geom.EvenOdd {
		return wind&1 != 0
	}
	return wind != 0
}
