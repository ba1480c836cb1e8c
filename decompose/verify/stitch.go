package verify

import (
	"cmp"
	"fmt"
	"slices"

	"maskpair/decompose/geom"
)

// This file judges what is stitched: where pieces on A and B meet they overlap far enough along the wire, each piece is long
// enough, and no overlap touches a keep_out figure. Stitches lie across axis-parallel wire, so a meeting of slanted figures is
// none. A shape that arrived stitched is held to its overlaps alone.

// overlap is one part of what a piece on A and a piece on B both cover.
type overlap struct {
	shape uint32
	rects []geom.Rect
	box   geom.Rect
}

// stitches makes the check. drawn is the flat drawn layout, nil where it is not at hand.
func (j *judge) stitches(c *Check, drawn *flat) error {
	least := int64(1)
	minPiece := int64(0)
	if j.rules.Stitch != nil {
		least = 2 * j.rules.Stitch.MinOverlap
		minPiece = 2 * j.rules.Stitch.MinPiece
	}
	meets := slices.DeleteFunc(slices.Clone(j.meets), func(m meet) bool { return !j.shapes[j.shapeOf[m.a.fig]].stitched })
	slices.SortStableFunc(meets, func(m, n meet) int {
		return cmp.Or(cmp.Compare(j.pieceOf[m.a.fig], j.pieceOf[n.a.fig]), cmp.Compare(j.pieceOf[m.b.fig], j.pieceOf[n.b.fig]))
	})
	parts := j.pieceRects(meets)
	var laps []overlap
	for i := 0; i < len(meets); {
		p, q := j.pieceOf[meets[i].a.fig], j.pieceOf[meets[i].b.fig]
		end := i
		for end < len(meets) && j.pieceOf[meets[end].a.fig] == p && j.pieceOf[meets[end].b.fig] == q {
			end++
		}
		found := j.overlaps(c, meets[i:end])
		i = end
		k := j.pieces[p].shape
		nested := covers(parts[p], parts[q]) || covers(parts[q], parts[p])
		for _, lap := range found {
			j.counts.Overlaps++
			if lap.area() == (geom.Area{}) {
				j.stitchFault(c, k, lap.box, "pieces on A and B touch here and do not overlap")
				continue
			}
			laps = append(laps, lap)
			along, length := lapLength(parts[p], parts[q], lap.box)
			if nested {
				j.stitchFault(c, k, lap.box, "one piece lies wholly under the other")
				continue
			}
			if length < least {
				j.stitchFault(c, k, lap.box, fmt.Sprintf("an overlap of %s; min_overlap is %s", j.half(length), j.half(least)))
			}
			if j.shapes[k].given {
				continue
			}
			for _, n := range [2]uint32{p, q} {
				if extent := along.of(j.pieces[n].box); extent < minPiece {
					j.stitchFault(c, k, j.pieces[n].box, fmt.Sprintf("a piece of %s on mask %s; min_piece is %s", j.half(extent), j.pieces[n].mask.maskName(), j.half(minPiece)))
				}
			}
		}
	}
	return j.keepOut(c, laps, drawn)
}

func (j *judge) half(v int64) string { return j.v.rules.Length(float64(v) / 2) }

func (j *judge) stitchFault(c *Check, k uint32, box geom.Rect, text string) {
	p := j.placeOf(k, text)
	p.Box.X1, p.Box.Y1, p.Box.X2, p.Box.Y2 = box.X1, box.Y1, box.X2, box.Y2
	c.fault(p)
}

// pieceRects gives the rectangles of the pieces that meet others. Slanted figures are left out: where one meets the other
// mask is told by overlaps.
func (j *judge) pieceRects(meets []meet) map[uint32][]geom.Rect {
	out := map[uint32][]geom.Rect{}
	for i := range meets {
		out[j.pieceOf[meets[i].a.fig]] = nil
		out[j.pieceOf[meets[i].b.fig]] = nil
	}
	if len(out) == 0 {
		return out
	}
	for i := range j.kept {
		it := &j.kept[i]
		if !j.flat.figs[it.fig].tag.mask() || it.band != wholeRect {
			continue
		}
		p := j.pieceOf[it.fig]
		if rects, ok := out[p]; ok {
			out[p] = append(rects, it.box)
		}
	}
	return out
}

// overlaps gives the parts of what two pieces both cover: the meetings of their rectangles, grouped where they are joined by
// more than a point. A meeting that has no area and stands alone is a touch.
func (j *judge) overlaps(c *Check, meets []meet) []overlap {
	var cut []geom.Rect
	for i := range meets {
		a, b := &meets[i].a, &meets[i].b
		k := j.shapeOf[a.fig]
		if a.band != wholeRect || b.band != wholeRect {
			j.stitchFault(c, k, a.box, "pieces on A and B meet at a figure with slanted edges, where no stitch can be")
			continue
		}
		cut = append(cut, meeting(a.box, b.box))
	}
	set := newSets(len(cut))
	order := make([]int, len(cut))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(i, k int) int { return cmp.Compare(cut[i].X1, cut[k].X1) })
	for n, i := range order {
		for _, k := range order[n+1:] {
			if cut[k].X1 > cut[i].X2 {
				break
			}
			// A corner point that lies in an overlap is a part of it.
			if m := meeting(cut[i], cut[k]); m.X1 <= m.X2 && m.Y1 <= m.Y2 && (m.X1 < m.X2 || m.Y1 < m.Y2 || m == cut[i] || m == cut[k]) {
				set.join(uint32(i), uint32(k))
			}
		}
	}
	of, count := set.number()
	out := make([]overlap, count)
	for i, r := range cut {
		o := &out[of[i]]
		if o.rects == nil {
			o.box, o.shape = r, j.shapeOf[meets[0].a.fig]
		}
		o.rects = append(o.rects, r)
		o.box = o.box.Union(r)
	}
	return out
}

func (o *overlap) area() geom.Area {
	var s geom.AreaScratch
	return s.UnionArea(o.rects)
}

// meeting is what two rectangles have in common; turned inside out where they have nothing.
func meeting(a, b geom.Rect) geom.Rect {
	return geom.Rect{X1: max(a.X1, b.X1), Y1: max(a.Y1, b.Y1), X2: min(a.X2, b.X2), Y2: min(a.Y2, b.Y2)}
}

// axis is the direction of a wire.
type axis uint8

const (
	alongX axis = iota
	alongY
	either
)

// of gives the extent of a box along the axis, the larger one where the axis is not known.
func (a axis) of(b geom.Rect) int64 {
	switch a {
	case alongX:
		return b.X2 - b.X1
	case alongY:
		return b.Y2 - b.Y1
	}
	return max(b.X2-b.X1, b.Y2-b.Y1)
}

// lapLength measures an overlap along the wire: the direction in which one piece alone goes on at one side of the overlap and
// the other alone at the opposite side. Where that holds for both directions, or for none, the shorter extent counts.
func lapLength(p, q []geom.Rect, box geom.Rect) (axis, int64) {
	goesOn := func(low, high geom.Rect) bool {
		return alone(p, q, low) && alone(q, p, high) || alone(q, p, low) && alone(p, q, high)
	}
	x := goesOn(geom.Rect{X1: box.X1 - 1, Y1: box.Y1, X2: box.X1, Y2: box.Y2}, geom.Rect{X1: box.X2, Y1: box.Y1, X2: box.X2 + 1, Y2: box.Y2})
	y := goesOn(geom.Rect{X1: box.X1, Y1: box.Y1 - 1, X2: box.X2, Y2: box.Y1}, geom.Rect{X1: box.X1, Y1: box.Y2, X2: box.X2, Y2: box.Y2 + 1})
	w, h := box.X2-box.X1, box.Y2-box.Y1
	switch {
	case x && (!y || w <= h):
		return alongX, w
	case y:
		return alongY, h
	}
	return either, min(w, h)
}

// alone says whether p covers some of a box that q does not.
func alone(p, q []geom.Rect, box geom.Rect) bool {
	var s geom.AreaScratch
	in := within(nil, q, box)
	before := s.UnionArea(in)
	return s.UnionArea(within(in, p, box)) != before
}

// covers says whether p covers all of q.
func covers(p, q []geom.Rect) bool {
	var s geom.AreaScratch
	both := slices.Concat(p, q)
	return s.UnionArea(both) == s.UnionArea(slices.Clone(p))
}

// within appends the parts of rectangles that lie in a box and have area.
func within(dst, rects []geom.Rect, box geom.Rect) []geom.Rect {
	for _, r := range rects {
		if m := meeting(r, box); m.X1 < m.X2 && m.Y1 < m.Y2 {
			dst = append(dst, m)
		}
	}
	return dst
}

// keepOut looks for overlaps that touch a figure of the keep_out layers. These are taken from the drawn layout where it is at
// hand.
func (j *judge) keepOut(c *Check, laps []overlap, drawn *flat) error {
	laps = slices.DeleteFunc(laps, func(o overlap) bool { return j.shapes[o.shape].given })
	if len(laps) == 0 || len(j.rules.Stitch.KeepOut) == 0 {
		return nil
	}
	src := j.v.masked
	if drawn != nil {
		src = j.v.drawn
	}
	f, err := newFlat(j.v.ctx, src, j.v.roles.keepOut(j.v.rules, j.rules, drawn == nil))
	if err != nil {
		return err
	}
	tops := topsByName(src)
	for top, t := range j.v.masked.tree.tops {
		other, ok := tops[j.v.masked.lib.Structures[t].Name]
		if !ok {
			f.end()
			continue
		}
		if err := f.place(other); err != nil {
			return err
		}
		from := uint32(len(f.figs))
		lapOf := []int{}
		for i := range laps {
			if int(j.shapes[laps[i].shape].top) == top {
				for _, r := range laps[i].rects {
					f.figs = append(f.figs, figure{box: r, form: formRect, tag: tagProbe})
					lapOf = append(lapOf, i)
				}
			}
		}
		f.end()
		items := f.items(nil, f.first[top], f.first[top+1])
		sortItems(items)
		touched := map[int]bool{}
		err := search(j.v.ctx, items, 0, func(a, b *item) {
			if f.figs[a.fig].tag == tagProbe {
				a, b = b, a
			}
			if f.figs[a.fig].tag != tagProbe && f.figs[b.fig].tag == tagProbe && f.relation(a, b, 0) == geom.Touch {
				touched[lapOf[b.fig-from]] = true
			}
		})
		if err != nil {
			return err
		}
		for i := range laps {
			if touched[i] {
				j.stitchFault(c, laps[i].shape, laps[i].box, "the overlap touches a keep_out figure")
			}
		}
	}
	return nil
}

// topsByName finds the tops of a stream.
func topsByName(l *layout) map[string]int32 {
	out := make(map[string]int32, len(l.tree.tops))
	for _, t := range l.tree.tops {
		out[l.lib.Structures[t].Name] = t
	}
	return out
}
