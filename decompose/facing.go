package decompose

import (
	"sort"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
	"maskpair/gds/arena"
)

// This file keeps the geometry of shapes while their pairs are judged by what faces what. The sweep finds the pairs that are within the
// largest spacing; which of them a rule makes near is known only on the merged outlines of both. Most shapes are one rectangle, so what
// is kept is rectangles, shape by shape; outlines are made of them when they are asked for.

// facingRules gives the rules by what faces what in work units; nil where the deck has none.
func (l *layout) facingRules() *facing.Rules {
	f := l.rules.ByFacing
	if f == nil {
		return nil
	}
	scale := l.flat.forms.scale
	r := &facing.Rules{Other: l.rules.Spacing * scale, SideToSide: f.SideToSide * scale, TipToSide: f.TipToSide * scale,
		TipToTip: f.TipToTip * scale, CornerToCorner: f.CornerToCorner * scale, TipWidth: f.TipWidth * scale}
	for _, w := range f.Wide {
		r.Wide = append(r.Wide, facing.Wide{Width: w.Width * scale, Spacing: w.Spacing * scale})
	}
	return r
}

// judgedRules gives the rules by which pairs within the largest spacing must be judged one by one; nil where all of them are near.
func (l *layout) judgedRules() *facing.Rules {
	r := l.facingRules()
	if r == nil || r.Equal() {
		return nil
	}
	return r
}

// topRects are the rectangles of the shapes of one top.
type topRects struct {
	begin, end uint32                    // the shapes
	first      *arena.Array[uint32]      // by shape: its rectangles are rects[first[k]:first[k+1]]; none for what is not kept here
	rects      *arena.Array[geom.Rect32] // work units relative to the origin
	x, y       int64                     // the origin
	complete   bool                      // every shape has its rectangles here
}

func (t *topRects) free() {
	t.first.Free()
	t.rects.Free()
}

// of gives the rectangles of a shape.
func (t *topRects) of(shape uint32) []geom.Rect32 {
	k := shape - t.begin
	return t.rects.Data[t.first.Data[k]:t.first.Data[k+1]]
}

// keepRects keeps the rectangles of the shapes from begin to end, which are those of a top; the window at hand is the whole top. Shapes
// with slanted figures have none here.
func (b *builder) keepRects(begin, end uint32, win window) {
	t := topRects{begin: begin, end: end, first: arena.New[uint32](int(end-begin) + 2), x: win.originX, y: win.originY, complete: len(b.slanted) == 0}
	next := t.first.Data // of shape k at k+1, until it has moved on to where shape k+1 begins
	node := b.l.nodeOf.Data
	each := func(fn func(k uint32, it *item)) {
		for i := range b.sorted {
			it := &b.sorted[i]
			if o, ok := b.ordinal(it); ok && (len(b.slanted) == 0 || b.slanted[node[o]] == nil) {
				fn(node[o]-begin, it)
			}
		}
	}
	each(func(k uint32, _ *item) { next[k+2]++ })
	for k := 2; k < len(next); k++ {
		next[k] += next[k-1]
	}
	t.rects = arena.New[geom.Rect32](int(next[len(next)-1]))
	each(func(k uint32, it *item) {
		t.rects.Data[next[k+1]] = geom.Rect32{X1: it.X1, Y1: it.Y1, X2: it.X2, Y2: it.Y2}
		next[k+1]++
	})
	b.kept = append(b.kept, t)
}

// topOfShape gives the rectangles of the top that a shape lies in; nil where none are kept.
func topOfShape(kept []topRects, shape uint32) *topRects {
	k := sort.Search(len(kept), func(i int) bool { return kept[i].end > shape })
	if k == len(kept) || shape < kept[k].begin {
		return nil
	}
	return &kept[k]
}

// shifted gives parts as seen from an origin.
func shifted(p geom.Parts, x, y int64) geom.Parts {
	out := geom.Parts{Rects: make([]geom.Rect, len(p.Rects)), Polygons: make([]geom.Placed, len(p.Polygons))}
	for i, r := range p.Rects {
		out.Rects[i] = geom.Rect{X1: r.X1 - x, Y1: r.Y1 - y, X2: r.X2 - x, Y2: r.Y2 - y}
	}
	for i, q := range p.Polygons {
		q.At.X -= x
		q.At.Y -= y
		out.Polygons[i] = q
	}
	return out
}
