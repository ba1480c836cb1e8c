package decompose

import "context"

// This file counts what a spacing makes of a layer, without putting anything on a mask: what a user asks who has no deck yet.

// Census is what one deck layer comes to before any mask is chosen, without orders. Its counts are sums over the tops.
type Census struct {
	Figures    int64 // drawn figures with area, flat
	Shapes     int64
	NearPairs  int64
	Components int64
	Odd        int64 // components with an odd cycle: two masks cannot do them as drawn
	Largest    int64 // shapes in the largest component
}

// Census counts deck layer i. Memory is given back before it returns; a run may take several.
func (r *Run) Census(ctx context.Context, i int) (*Census, error) {
	l, err := newLayout(ctx, r.h, r.classes.selectLayer(i), &r.rules.Layers[i], i, nil, &r.opt)
	if err != nil {
		return nil, err
	}
	defer l.free()
	a := l.assign(&Orders{})
	defer a.mask.Free()
	c := &Census{Figures: int64(l.flat.total), Shapes: int64(l.shapes), NearPairs: l.near.pairs, Components: int64(a.components),
		Odd: int64(len(a.broken))} // without ties a group is a component
	sizes := make([]int64, a.components)
	for _, n := range a.component {
		sizes[n]++
		c.Largest = max(c.Largest, sizes[n])
	}
	return c, ctx.Err()
}
