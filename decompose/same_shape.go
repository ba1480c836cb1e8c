package decompose

import (
	"cmp"
	"context"
	"slices"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
)

// This file looks for what no mask can help: notches and gaps inside one shape below the same-mask spacing. They are told, where the
// deck asks for it, and change nothing.

// SameShapePlace is a place where a shape comes nearer to itself than same_mask_spacing.
type SameShapePlace struct {
	Top          string
	Box          Box  // of the shape
	Notch        bool // the two edges are joined by one edge across; else a gap
	EdgeA, EdgeB Edge
	From, To     Spot
	DistanceSq   float64 // square database units
	Widen        int64   // database units by which it must widen
}

// selfPlace is such a place in work units of its top.
type selfPlace struct {
	node  uint32
	place facing.SelfPlace
}

// findSameShape looks at all shapes of the layer, before the rectangles that are kept of them are given back.
func (l *layout) findSameShape(ctx context.Context, kept []topRects, jobs int) error {
	if !l.rules.SameShapeReport {
		return nil
	}
	spacing := l.rules.Spacing * l.flat.forms.scale
	var g errgroup.Group
	g.SetLimit(max(jobs, 1))
	type block struct{ top, from, to uint32 }
	var blocks []block
	for i := range kept {
		for n := kept[i].begin; n < kept[i].end; n += judgedNodes {
			blocks = append(blocks, block{uint32(i), n, min(n+judgedNodes, kept[i].end)})
		}
	}
	found := make([][]selfPlace, len(blocks))
	for k, b := range blocks {
		g.Go(safely(func() error {
			c := outlineCache{}
			t := &kept[b.top]
			var s facing.Shape
			for n := b.from; n < b.to && ctx.Err() == nil; n++ {
				rects := t.of(n)
				if len(rects) < 2 || l.isGiven(n) {
					continue
				}
				c.make(&s, rects)
				for _, p := range s.NearSelf(spacing) {
					found[k] = append(found[k], selfPlace{n, movedPlace(p, t.x, t.y)})
				}
			}
			return nil
		}))
	}
	if err := g.Wait(); err != nil {
		return err
	}
	for _, f := range found {
		l.self = append(l.self, f...)
	}
	l.self = append(l.self, l.selfOfOthers(kept, spacing)...)
	return ctx.Err()
}

// selfOfOthers looks at the shapes of which no rectangles are kept; a given stitch is one shape.
func (l *layout) selfOfOthers(kept []topRects, spacing int64) []selfPlace {
	wanted := map[uint32]*geom.Parts{}
	for n := range uint32(l.nodes) {
		if t := topOfShape(kept, l.shapeOf(n)); t == nil || l.isGiven(n) || len(t.of(n)) == 0 {
			wanted[n] = &geom.Parts{}
		}
	}
	l.geometryOf(wanted)
	byShape := map[uint32]geom.Parts{}
	var shapes []uint32
	for n := range uint32(l.nodes) {
		if p := wanted[n]; p != nil {
			shape := l.shapeOf(n)
			all, seen := byShape[shape]
			if !seen {
				shapes = append(shapes, shape)
			}
			all.Rects, all.Polygons = append(all.Rects, p.Rects...), append(all.Polygons, p.Polygons...)
			byShape[shape] = all
		}
	}
	var out []selfPlace
	for _, shape := range shapes {
		for _, p := range outlineOf(byShape[shape]).NearSelf(spacing) {
			out = append(out, selfPlace{shape, p})
		}
	}
	return out
}

// movedPlace shifts a place.
func movedPlace(p facing.SelfPlace, x, y int64) facing.SelfPlace {
	for _, q := range [...]*geom.Point{&p.A[0], &p.A[1], &p.B[0], &p.B[1], &p.From, &p.To} {
		q.X += x
		q.Y += y
	}
	return p
}

// sameShape gives the places as the result lists them, by top and place.
func (l *layout) sameShape() []SameShapePlace {
	if len(l.self) == 0 {
		return nil
	}
	boxes := l.shapeBoxes()
	scale := l.flat.forms.scale
	k := 2 / scale
	spot := func(p geom.Point) Spot { return Spot{p.X * k, p.Y * k} }
	out := make([]SameShapePlace, 0, len(l.self))
	for i := range l.self {
		p := &l.self[i].place
		s := SameShapePlace{Top: l.flat.h.name(l.flat.h.tops[l.topOf(l.self[i].node)]), Box: l.half(boxes(l.self[i].node)), Notch: p.Notch,
			EdgeA: Edge{spot(p.A[0]), spot(p.A[1])}, EdgeB: Edge{spot(p.B[0]), spot(p.B[1])}, From: spot(p.From), To: spot(p.To),
			DistanceSq: p.DistanceSq / float64(scale*scale)}
		s.Widen = lacks(l.rules.Spacing, s.DistanceSq)
		out = append(out, s)
	}
	slices.SortFunc(out, func(a, b SameShapePlace) int {
		return cmp.Or(cmp.Compare(a.Top, b.Top), compareSpots(a.From, b.From), compareSpots(a.To, b.To))
	})
	return out
}

// shapeBoxes gives the boxes of shapes: of a given stitch that of all its pieces.
func (l *layout) shapeBoxes() func(shape uint32) Box {
	boxes := l.boxes()
	if l.given == nil {
		return func(shape uint32) Box { return boxes[shape] }
	}
	whole := map[uint32]Box{}
	for n, shape := range l.given.shape {
		if b, ok := whole[shape]; ok {
			whole[shape] = b.join(boxes[n])
		} else {
			whole[shape] = boxes[n]
		}
	}
	return func(shape uint32) Box {
		if b, ok := whole[shape]; ok {
			return b
		}
		return boxes[shape]
	}
}

func compareSpots(a, b Spot) int { return cmp.Or(cmp.Compare(a.X, b.X), cmp.Compare(a.Y, b.Y)) }
