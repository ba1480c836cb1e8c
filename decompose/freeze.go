package decompose

import (
	"cmp"
	"context"
	"slices"

	"maskpair/decompose/geom"
)

// This file says what a mask that is already made does not allow. Package anchor holds shapes on frozen masks by orders; here the merged
// area of each frozen mask is held against the baseline, and what differs is named with the edit that it comes from.

// FrozenKind says how a frozen mask does not come out as it was made.
type FrozenKind uint8

// The kinds of faults of a frozen mask.
const (
	FrozenLost   FrozenKind = iota // area that the mask has is not drawn any more, or is on the other mask
	FrozenGained                   // area that the mask has not is on it now
	FrozenNew                      // a new shape, where both masks are made
	FrozenPair                     // a near pair that an edit leaves on one mask
)

// String gives the name that the report uses.
func (k FrozenKind) String() string { return [...]string{"lost", "gained", "new", "pair"}[k] }

// FrozenFault is a place where a frozen mask does not allow what is drawn.
type FrozenFault struct {
	Kind FrozenKind
	Top  string
	Mask Mask
	Box  Box     // half database units
	Area float64 // that differs, square database units; of lost and gained
	Edit string  // what was edited there
}

// Freeze says which masks are already made; they come out as in the baseline, or the result says where they do not.
func (r *Run) Freeze(masks [2]bool) { r.frozen = masks }

// Frozen tells which masks are already made.
func (v *View) Frozen() [2]bool { return v.run.frozen }

// Recalled calls fn for every shape that did not arrive stitched: the mask that covers more of it in the baseline, or NoMemory, and
// whether it lies over a stitched shape there. There is nothing to tell without a baseline.
func (v *View) Recalled(fn func(node uint32, was uint8, cut bool)) {
	l := v.layout
	if l.memory == nil {
		return
	}
	for u, r := range l.memory.nodes {
		if l.given != nil {
			if _, stitched := l.given.shape[uint32(u)]; stitched {
				continue
			}
		}
		fn(uint32(u), uint8(r&recalledMask), r&recalledCut != 0)
	}
}

// frozenCheck finds the faults of the frozen masks of a layer.
type frozenCheck struct {
	l      *layout
	a      *assignment
	v      *View
	frozen [2]bool
	areas  areas
	faults []FrozenFault
}

// frozenFaults finds the faults of the frozen masks of a layer, by place.
func (l *layout) frozenFaults(ctx context.Context, a *assignment, o *Orders, v *View) ([]FrozenFault, error) {
	c := &frozenCheck{l: l, a: a, v: v, frozen: v.run.frozen}
	if l.memory == nil || c.frozen == [2]bool{} {
		return nil, nil
	}
	c.pairs(o)
	c.clusters()
	boxes := l.boxes()
	if c.frozen == [2]bool{true, true} {
		for u, r := range l.memory.nodes {
			if r&recalledMask == NoMemory {
				c.add(FrozenFault{Kind: FrozenNew, Mask: Mask(a.mask.Data[u]), Box: l.half(boxes[u]), Edit: c.edit(uint32(u))}, uint32(u))
			}
		}
	}
	slices.SortStableFunc(c.faults, func(a, b FrozenFault) int {
		return cmp.Or(cmp.Compare(a.Top, b.Top), compareBoxes(a.Box, b.Box), cmp.Compare(a.Kind, b.Kind), cmp.Compare(a.Mask, b.Mask))
	})
	return c.faults, ctx.Err()
}

func (c *frozenCheck) add(f FrozenFault, node uint32) {
	f.Top = c.v.TopName(c.l.topOf(node))
	c.faults = append(c.faults, f)
}

// edit words what was edited about a shape; "" where it is as it was.
func (c *frozenCheck) edit(node uint32) string {
	at := c.v.Place(node)
	switch r := c.l.memory.nodes[c.l.shapeOf(node)]; {
	case r&recalledSome == 0:
		return "the new shape at " + at
	case r&recalledSame == 0:
		return "the reshaped shape at " + at
	case r&recalledCut != 0:
		return "the shape at " + at + ", which is stitched in the baseline"
	case r&recalledMask == NoMemory:
		return "the shape at " + at + ", which both masks cover in the baseline"
	}
	return ""
}

// pairs finds near pairs that an edit leaves on one mask.
func (c *frozenCheck) pairs(o *Orders) {
	l := c.l
	waived := map[[2]uint32]bool{}
	for _, w := range o.Waivers {
		waived[[2]uint32{min(w.A, w.B), max(w.A, w.B)}] = true
	}
	boxes := l.boxes()
	for u := range uint32(l.nodes) {
		for _, e := range l.near.of(u) {
			x := e >> 1
			m := c.a.mask.Data[u]
			if m != c.a.mask.Data[x] || l.isCut(u) || l.isCut(x) || waived[[2]uint32{u, x}] {
				continue
			}
			edit := c.edit(u)
			if edit == "" {
				edit = c.edit(x)
			}
			if edit != "" {
				c.add(FrozenFault{Kind: FrozenPair, Mask: Mask(m), Box: l.half(boxes[u].join(boxes[x])), Edit: edit}, u)
			}
		}
	}
}

// frozenCluster is some shapes, and the figures of the baseline that they lie over.
type frozenCluster struct {
	shapes  []uint32
	figures []uint32 // ordinals
}

// clusters compares what lies over each other, mask by mask. Shapes that are as they were, on the mask on which they were, need no look.
func (c *frozenCheck) clusters() {
	mem := c.l.memory
	// Both sides as one list: shapes, then the figures of the baseline that differ.
	var shapes []uint32
	index := map[uint32]uint32{}
	for u, r := range mem.nodes {
		if r&recalledSame == 0 || r&recalledCut != 0 || r&recalledMask == NoMemory {
			index[uint32(u)] = uint32(len(shapes))
			shapes = append(shapes, uint32(u))
		}
	}
	n := uint32(len(shapes))
	ofFigure := map[uint32]uint32{}
	for i, f := range mem.loose {
		ofFigure[f.ordinal] = n + uint32(i)
	}
	sets := newUnion(make(union, int(n)+len(mem.loose)))
	for _, f := range mem.loose {
		sets.join(ofFigure[f.ordinal], ofFigure[f.root])
	}
	for _, lap := range mem.laps {
		i, ok := index[lap.shape]
		if !ok {
			// As it was, but looked at: something that touches it differs.
			i = uint32(len(sets))
			index[lap.shape] = i
			sets = append(sets, i)
			shapes = append(shapes, lap.shape)
		}
		sets.join(i, ofFigure[lap.figure])
	}
	by := map[uint32]*frozenCluster{}
	var list []*frozenCluster
	of := func(i uint32) *frozenCluster {
		r := sets.find(i)
		if by[r] == nil {
			by[r] = &frozenCluster{}
			list = append(list, by[r])
		}
		return by[r]
	}
	for _, u := range shapes {
		k := of(index[u])
		k.shapes = append(k.shapes, u)
	}
	for i, f := range mem.loose {
		k := of(n + uint32(i))
		k.figures = append(k.figures, f.ordinal)
	}
	now := c.partsNow(shapes)
	was, tops := c.partsBefore()
	for _, k := range list {
		for m := range c.frozen {
			if c.frozen[m] {
				c.cluster(k, Mask(m), now[m], was[m], tops)
			}
		}
	}
}

// partsNow gives what each mask has of some shapes.
func (c *frozenCheck) partsNow(shapes []uint32) [2]map[uint32]geom.Parts {
	l := c.l
	wanted := map[uint32]*geom.Parts{}
	for _, u := range shapes {
		wanted[u] = &geom.Parts{}
	}
	if l.given != nil {
		for node, shape := range l.given.shape {
			if wanted[shape] != nil {
				wanted[node] = &geom.Parts{}
			}
		}
	}
	l.geometryOf(wanted)
	on := [2]map[uint32]geom.Parts{{}, {}}
	add := func(m uint8, shape uint32, p geom.Parts) {
		q := on[m][shape]
		on[m][shape] = geom.Parts{Rects: append(q.Rects, p.Rects...), Polygons: append(q.Polygons, p.Polygons...)}
	}
	for node, p := range wanted {
		m := c.a.mask.Data[node]
		if l.isCut(node) {
			held := l.cuts.shapes[node].held
			add(m, node, geom.Parts{Rects: held[0]})
			add(m^1, node, geom.Parts{Rects: held[1]})
			continue
		}
		add(m, l.shapeOf(node), *p)
	}
	return on
}

// partsBefore gives what each mask had of the figures of the baseline that differ, and their tops.
func (c *frozenCheck) partsBefore() (on [2]map[uint32]geom.Parts, tops map[uint32]int) {
	mem := c.l.memory
	e := mem.e
	wanted := map[uint32]bool{}
	for _, f := range mem.loose {
		wanted[f.ordinal] = true
	}
	on, tops = [2]map[uint32]geom.Parts{{}, {}}, map[uint32]int{}
	topOf := map[int]int{}
	for run, base := range e.tops {
		topOf[base] = run
	}
	for m, f := range e.masks {
		for top := range f.h.tops {
			f.visit(top, func(s int32, at placement, placed bool, first uint32) {
				f.ownFigures(s, func(k, figure uint32) {
					o := first + k
					if !wanted[o] {
						return
					}
					var p geom.Parts
					if placed {
						f.parts(figure, at, &p)
					} else if odd := e.odd[m][top].find(o); odd != nil {
						e.odd[m][top].forms.place(&odd.form, placement{}, &p)
					}
					on[m][o], tops[o] = p, topOf[top]
				})
			})
		}
	}
	return on, tops
}

// cluster compares one mask of one cluster.
func (c *frozenCheck) cluster(k *frozenCluster, m Mask, now, was map[uint32]geom.Parts, tops map[uint32]int) {
	gather := func(list []uint32, from map[uint32]geom.Parts) geom.Parts {
		var p geom.Parts
		for _, i := range list {
			p.Rects = append(p.Rects, from[i].Rects...)
			p.Polygons = append(p.Polygons, from[i].Polygons...)
		}
		return p
	}
	here, before := gather(k.shapes, now), gather(k.figures, was)
	share := c.areas.shared(here, before)
	lost := c.areas.of(before).compare(share) != 0
	// Where both masks are made, new shapes are told as such.
	known := k.shapes
	if c.frozen == [2]bool{true, true} {
		known = slices.DeleteFunc(slices.Clone(known), func(u uint32) bool { return c.l.memory.nodes[u]&recalledMask == NoMemory })
	}
	held := gather(known, now)
	heldShare := c.areas.shared(held, before)
	gained := c.areas.of(held).compare(heldShare) != 0
	scale := float64(c.l.flat.forms.scale)
	unit := scale * scale
	edit := ""
	for _, u := range k.shapes {
		if edit = c.edit(u); edit != "" {
			break
		}
	}
	if lost {
		box, at := emptyBox, 0
		for _, i := range k.figures {
			if p, ok := was[i]; ok && c.areas.shared(p, here).compare(c.areas.of(p)) != 0 {
				box, at = box.join(boxOfParts(p)), tops[i]
			}
		}
		f := FrozenFault{Kind: FrozenLost, Mask: m, Box: c.l.half(box), Area: (c.areas.of(before).float() - share.float()) / unit, Top: c.v.TopName(at), Edit: edit}
		if f.Edit == "" {
			f.Edit = "what was there is gone"
		}
		c.faults = append(c.faults, f)
	}
	if gained {
		box, node := emptyBox, uint32(0)
		for _, u := range known {
			if p, ok := now[u]; ok && c.areas.shared(p, before).compare(c.areas.of(p)) != 0 {
				box, node = box.join(boxOfParts(p)), u
			}
		}
		c.add(FrozenFault{Kind: FrozenGained, Mask: m, Box: c.l.half(box), Area: (c.areas.of(held).float() - heldShare.float()) / unit, Edit: c.edit(node)}, node)
	}
}

func boxOfParts(p geom.Parts) Box {
	box := emptyBox
	for _, r := range p.Rects {
		box = box.join(Box(r))
	}
	for _, q := range p.Polygons {
		box = box.join(Box(q.At.ApplyRect(q.Polygon.Box())))
	}
	return box
}
