package decompose

import (
	"context"
	"math"
	"sync/atomic"

	"maskpair/decompose/geom"
)

// This file finds the keep_out figures that touch shapes which might be cut.

// keepOut gives for each node the keep_out rectangles that touch its box, in work units of its top; slanted keep_out figures count by
// the boxes of their bands, which is never too little.
func (s *solver) keepOut(ctx context.Context, parts map[uint32]*geom.Parts) (map[uint32][]geom.Rect, error) {
	sel, any := s.l.classes.selectRole(s.l.number, roleKeepOut, drawn)
	if !any {
		return nil, nil
	}
	f, err := newFlat(s.l.flat.h, sel, gridOf(s.l.flat.lib, sel))
	if err != nil {
		return nil, err
	}
	out := map[uint32][]geom.Rect{}
	for top := range f.h.tops {
		if f.all[f.h.tops[top]] == 0 {
			continue
		}
		if err := s.keepOutOf(ctx, f, top, parts, out); err != nil {
			return nil, err
		}
	}
	return out, nil
}

func (s *solver) keepOutOf(ctx context.Context, f *flat, top int, parts map[uint32]*geom.Parts, out map[uint32][]geom.Rect) error {
	l := s.l
	// The boxes of the nodes of this top are the figures of a sweep, the keep_out rectangles its probes.
	var nodes []uint32
	around := emptyBox
	boxes := l.boxes()
	for i := range s.groups {
		for _, u := range s.groups[i].nodes {
			if l.topOf(u) == top {
				nodes = append(nodes, u)
				around = around.join(boxes[u])
			}
		}
	}
	if len(nodes) == 0 || around.X2-around.X1 > math.MaxUint32-2 || around.Y2-around.Y1 > math.MaxUint32-2 {
		return nil
	}
	ox, oy := around.X1+(around.X2-around.X1)/2, around.Y1+(around.Y2-around.Y1)/2
	var items []item
	add := func(b Box, id uint32) {
		b = Box{max(b.X1, around.X1), max(b.Y1, around.Y1), min(b.X2, around.X2), min(b.Y2, around.Y2)}
		if b.X1 <= b.X2 && b.Y1 <= b.Y2 {
			items = append(items, item{int32(b.X1 - ox), int32(b.Y1 - oy), int32(b.X2 - ox), int32(b.Y2 - oy), id})
		}
	}
	for i, u := range nodes {
		add(boxes[u], uint32(i))
	}
	var odd oddFigures
	if err := f.collectOdd(top, &odd); err != nil {
		return err
	}
	var rects []geom.Rect
	keep := func(p *geom.Parts) {
		for _, b := range placedRects(p, placement{}) {
			box := rescale(Box(b), f.forms.scale, l.flat.forms.scale)
			add(box, uint32(len(nodes)+len(rects)))
			rects = append(rects, geom.Rect(box))
		}
	}
	f.visit(top, func(st int32, at placement, placed bool, first uint32) {
		f.ownFigures(st, func(k, figure uint32) {
			var p geom.Parts
			if placed {
				f.parts(figure, at, &p)
			} else if o := odd.find(first + k); o != nil {
				odd.forms.place(&o.form, placement{}, &p)
			}
			keep(&p)
		})
	})
	search := &sweep{items: sortItems(items, make([]item, len(items)), 1), spacing: 1, figures: uint32(len(nodes)), keepTouched: true}
	var limit atomic.Int64
	limit.Store(math.MaxInt64)
	sinks, err := search.run(ctx, nil, 1, &limit)
	if err != nil {
		return err
	}
	for _, k := range sinks {
		for _, h := range k.hits {
			u := nodes[h.figure]
			out[u] = append(out[u], rects[h.probe])
		}
	}
	return nil
}

// rescale turns work units of one selection into those of another, outwards.
func rescale(b Box, from, to int64) Box {
	switch {
	case from < to:
		return Box{2 * b.X1, 2 * b.Y1, 2 * b.X2, 2 * b.Y2}
	case from > to:
		return Box{b.X1 >> 1, b.Y1 >> 1, (b.X2 + 1) >> 1, (b.Y2 + 1) >> 1}
	}
	return b
}
