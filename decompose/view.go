package decompose

// View is what package anchor sees of a deck layer: the tops, and once the shapes are known, the nodes and what the probes hit.
type View struct {
	run    *Run
	layer  int
	layout *layout
}

// Rules gives the rules of the layer.
func (v *View) Rules() *LayerRules { return &v.run.rules.Layers[v.layer] }

// Nodes is the number of nodes: shapes, and pieces of shapes that arrived stitched.
func (v *View) Nodes() int { return v.layout.nodes }

// Hits tells which probes touch which nodes; a hit may be told more than once.
func (v *View) Hits(fn func(probe, node uint32)) {
	for _, h := range v.layout.hits {
		fn(h.Probe, v.layout.nodeOf.Data[h.Figure])
	}
}

// Masked calls fn for each node with a figure that arrived on a mask, in ascending order.
func (v *View) Masked(fn func(node uint32, mask Mask)) {
	l := v.layout
	if l.tags == nil {
		return
	}
	on := make([]uint8, l.nodes)
	for o, t := range l.tags.Data {
		switch tag(t) {
		case onA:
			on[l.nodeOf.Data[o]] |= 1
		case onB:
			on[l.nodeOf.Data[o]] |= 2
		}
	}
	for n, m := range on {
		if m&1 != 0 {
			fn(uint32(n), A)
		}
		if m&2 != 0 {
			fn(uint32(n), B)
		}
	}
}

// Place words where a node is, in the deck's unit: "(120, 340) nm in chip".
func (v *View) Place(node uint32) string {
	l := v.layout
	b := l.half(l.boxes()[node])
	r := v.run.rules
	return "(" + r.Number(float64(b.X1)/2) + ", " + r.Number(float64(b.Y1)/2) + ") " + r.Unit + " in " + l.flat.h.name(l.flat.h.tops[l.topOf(node)])
}
