package decompose

import (
	"cmp"
	"context"
	"slices"

	"maskpair/decompose/geom"
)

// This file lists the pairs that are too near whatever the masks: nearer than any_mask_spacing, by plain distance. The sweep has found
// them; here they get their places.

// anyMaskPairs gives them with the masks that their shapes are on, by top and place.
func (l *layout) anyMaskPairs(ctx context.Context, mask []uint8, jobs int) ([]Pair, error) {
	pairs := l.pairsTooNear()
	if len(pairs) == 0 {
		return nil, nil
	}
	parts := map[uint32]*geom.Parts{}
	for _, p := range pairs {
		for _, n := range p {
			if parts[n] == nil {
				parts[n] = &geom.Parts{}
			}
		}
	}
	l.geometryOf(parts)
	boxes := l.boxes()
	out := make([]Pair, len(pairs))
	const block = 1 << 10
	inTurn(jobs, (len(pairs)+block-1)/block, func(_, k int) {
		for i := k * block; i < min((k+1)*block, len(pairs)) && ctx.Err() == nil; i++ {
			out[i] = l.anyMaskPair(pairs[i], parts, boxes, mask)
		}
	})
	slices.SortFunc(out, func(a, b Pair) int {
		return cmp.Or(cmp.Compare(a.Top, b.Top), compareBoxes(a.A, b.A), compareBoxes(a.B, b.B))
	})
	return out, ctx.Err()
}

// pairsTooNear gives the pairs of nodes; those that no rule by what faces what makes near are among what is far.
func (l *layout) pairsTooNear() [][2]uint32 {
	if l.near.tooNear == 0 {
		return nil
	}
	out := make([][2]uint32, 0, l.near.tooNear)
	for u := range uint32(l.nodes) {
		for _, e := range l.near.of(u) {
			if e&1 != 0 {
				out = append(out, [2]uint32{u, e >> 1})
			}
		}
	}
	for _, p := range l.far {
		if p.tooNear {
			out = append(out, [2]uint32{p.a, p.b})
		}
	}
	return out
}

func (l *layout) anyMaskPair(p [2]uint32, parts map[uint32]*geom.Parts, boxes []Box, mask []uint8) Pair {
	u, v := p[0], p[1]
	if compareBoxes(boxes[u], boxes[v]) > 0 {
		u, v = v, u
	}
	scale := l.flat.forms.scale
	reach := l.rules.AnyMask * scale
	from, to, sq := geom.Closest(near(parts[u], boxes[v], reach), near(parts[v], boxes[u], reach))
	k := 2 / scale
	out := Pair{A: l.half(boxes[u]), B: l.half(boxes[v]), DistanceSq: sq / float64(scale*scale), Top: l.flat.h.name(l.flat.h.tops[l.topOf(u)]),
		From: Spot{from.X * k, from.Y * k}, To: Spot{to.X * k, to.Y * k}, Rule: "any_mask_spacing", Spacing: l.rules.AnyMask,
		Mask: Mask(mask[u]), MaskB: Mask(mask[v])}
	out.Gap = gapBox(out.A, out.B, out.From, out.To)
	out.Widen = lacks(out.Spacing, out.DistanceSq)
	return out
}

// near gives the parts that can be nearer to a box than a reach.
func near(all *geom.Parts, box Box, reach int64) geom.Parts {
	if len(all.Rects) < 8 {
		return *all
	}
	out := geom.Parts{Polygons: all.Polygons}
	for _, r := range all.Rects {
		if r.X1-box.X2 < reach && box.X1-r.X2 < reach && r.Y1-box.Y2 < reach && box.Y1-r.Y2 < reach {
			out.Rects = append(out.Rects, r)
		}
	}
	return out
}
