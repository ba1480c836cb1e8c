package decompose

import (
	"cmp"
	"slices"

	"maskpair/gds"
)

// This file draws the marks: boxes on layers of their own, in the top that they are about, in an order that depends on their places
// alone.

// markBox is one mark to be drawn.
type markBox struct {
	layer gds.LayerType
	box   gds.Rect
}

// mark adds the marks of a layer's result to the tops.
func (r *Run) mark(res *LayerResult) {
	byTop := map[string][]markBox{}
	add := func(layer *gds.LayerType, top string, b Box) {
		if layer != nil {
			byTop[top] = append(byTop[top], markBox{*layer, wholeRect(b)})
		}
	}
	m := &r.rules.Marks
	for i := range res.Unresolved {
		u := &res.Unresolved[i]
		for _, p := range u.Pairs {
			add(m.Unresolved, u.Top, p.Gap)
		}
		for _, c := range u.Cycle {
			add(m.Cycle, u.Top, c.Box)
		}
		// What is cut where the deck says so, else where it could be.
		for _, c := range u.Candidates {
			if l := r.rules.layer(res.Name); l != nil && l.Stitch.Apply && !c.Made {
				continue
			}
			add(m.Stitch, u.Top, c.Box)
		}
	}
	for _, p := range res.AnyMask {
		add(m.AnyMask, p.Top, p.Gap)
	}
	for _, s := range res.Moved {
		add(m.Moved, s.Top, s.Box)
	}
	for top, boxes := range byTop {
		r.marks[top] = append(r.marks[top], boxes...)
	}
}

// tails words the marks of each top as elements of the stream.
func (r *Run) tails() map[int32][]byte {
	out := map[int32][]byte{}
	for _, t := range r.h.tops {
		boxes := r.marks[r.h.name(t)]
		slices.SortFunc(boxes, func(a, b markBox) int {
			return cmp.Or(cmp.Compare(a.layer.Layer, b.layer.Layer), cmp.Compare(a.layer.Type, b.layer.Type), compareRects(a.box, b.box))
		})
		boxes = slices.Compact(boxes)
		for _, b := range boxes {
			out[t] = gds.AppendRectangle(out[t], b.layer, b.box)
		}
	}
	return out
}

// wholeRect gives the least rectangle on whole units, with area, that holds a box.
func wholeRect(b Box) gds.Rect {
	r := gds.Rect{X1: int32(b.X1 >> 1), Y1: int32(b.Y1 >> 1), X2: int32((b.X2 + 1) >> 1), Y2: int32((b.Y2 + 1) >> 1)}
	if r.X1 == r.X2 {
		r.X2++
	}
	if r.Y1 == r.Y2 {
		r.Y2++
	}
	return r
}

// gapBox is the box between two boxes: between facing sides where they overlap in projection, between corners else. Boxes that
// overlap in both directions (one in a notch of the other) have the box of the nearest points instead.
func gapBox(a, b Box, from, to Spot) Box {
	low, high := Box{max(a.X1, b.X1), max(a.Y1, b.Y1), 0, 0}, Box{0, 0, min(a.X2, b.X2), min(a.Y2, b.Y2)}
	x1, x2 := min(low.X1, high.X2), max(low.X1, high.X2)
	y1, y2 := min(low.Y1, high.Y2), max(low.Y1, high.Y2)
	if low.X1 < high.X2 && low.Y1 < high.Y2 {
		return Box{min(from.X, to.X), min(from.Y, to.Y), max(from.X, to.X), max(from.Y, to.Y)}
	}
	return Box{x1, y1, x2, y2}
}

// layer gives the rules of a layer by its name.
func (r *Rules) layer(name string) *LayerRules {
	for i := range r.Layers {
		if r.Layers[i].Name == name {
			return &r.Layers[i]
		}
	}
	return nil
}
