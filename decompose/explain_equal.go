package decompose

import (
	"slices"

	"maskpair/gds/arena"
)

// This file tells which unresolved components are the same thing again: made of the same figures in the canonical frames of their groups,
// and near to each other in the same way.

// sign hashes what each node of the broken groups is made of: its figures, each once, in the canonical frame of its group.
func (e *explainer) sign() {
	l := e.l
	sizes := map[[2]int]int{} // groups of one size: only these can be equal
	size := func(b *brokenGroup) [2]int { return [2]int{len(b.nodes), len(b.edges)} }
	for i := range e.solver.groups {
		sizes[size(&e.solver.groups[i])]++
	}
	signed := newBitset(l.nodes)
	nodes := uint32(0)
	e.local = make([]uint32, len(e.solver.groups))
	for i := range e.solver.groups {
		b := &e.solver.groups[i]
		if sizes[size(b)] == 1 && !e.a.tied {
			continue
		}
		e.local[i] = nodes + 1
		for _, u := range b.nodes {
			signed.add(u)
		}
		nodes += uint32(len(b.nodes))
	}
	if nodes == 0 {
		return
	}
	indexOf := func(n uint32) (int, *brokenGroup) {
		i, _ := e.of(n)
		b := &e.solver.groups[i]
		return int(e.local[i] - 1 + e.place(b, n)), b
	}
	end := arena.Cut[uint32](&l.room, int(nodes)) // of the figures of each node
	for top := range l.flat.h.tops {
		l.eachFigureOf(top, signed, func(o, _ uint32, _ placement, _ *oddFigure) {
			k, _ := indexOf(l.nodeOf.Data[o])
			end[k]++
		})
	}
	at := uint32(0)
	for k, count := range end {
		end[k], at = at, at+count
	}
	hashes := arena.CutDirty[uint64](&l.room, int(at))
	for top := range l.flat.h.tops {
		l.eachFigureOf(top, signed, func(o, fig uint32, at placement, odd *oddFigure) {
			k, b := indexOf(l.nodeOf.Data[o])
			if odd != nil {
				hashes[end[k]] = hashBox(b.canon.back.applyBox(odd.form.box))
			} else {
				hashes[end[k]] = hashPlaced(l.flat, fig, b.canon.back.compose(at))
			}
			end[k]++
		})
	}
	e.shape = arena.Cut[uint64](&l.room, int(nodes))
	from := uint32(0)
	for n := range e.shape {
		own := hashes[from:end[n]]
		from = end[n]
		slices.Sort(own)
		for _, h := range slices.Compact(own) {
			e.shape[n] += mix(h, 5)
		}
	}
}

func hashBox(b Box) uint64 {
	return mix(mix(mix(mix(11, uint64(b.X1)), uint64(b.Y1)), uint64(b.X2)), uint64(b.Y2))
}

// hashPlaced hashes the points of a figure as placed; the sum does not depend on where the outline starts.
func hashPlaced(f *flat, figure uint32, at placement) uint64 {
	fig := &f.lib.Figures[figure]
	h := hashBox(at.applyBox(f.scaled(fig.Box)))
	if fig.Outline == 0 {
		return h
	}
	o := &f.lib.Outlines[fig.Outline-1]
	for _, p := range f.lib.Points[o.First : o.First+uint64(o.Count)] {
		x, y := at.apply(int64(p.X)*f.forms.scale, int64(p.Y)*f.forms.scale)
		h += mix(mix(13, uint64(x)), uint64(y))
	}
	return mix(h, uint64(uint32(o.Width)))
}

// number gives the number of the group of equal components with a signature.
func (e *explainer) number(signature uint64) int64 {
	n, ok := e.groups[signature]
	if !ok {
		n = int64(len(e.groups))
		e.groups[signature] = n
	}
	return n
}

// signature is the same for equal components; box is that of the component.
func (e *explainer) signature(b *brokenGroup, p *componentPart, box Box) uint64 {
	sign := mix(mix(17, uint64(len(p.nodes))), uint64(len(p.edges)))
	first := e.local[e.indexOf(b)]
	if first == 0 {
		return sign // no other component is of this size
	}
	// Components of one group that ties join have canonical places of their own.
	low := b.canon.back.applyBox(box)
	for _, k := range p.nodes {
		sign = mix(sign, e.shape[first-1+uint32(k)])
		sign = mix(sign, hashBox(b.canon.back.applyBox(e.boxes[b.nodes[k]]).shift(-low.X1, -low.Y1)))
	}
	for _, ed := range p.edges {
		sign = mix(sign, uint64(ed.U)<<32|uint64(uint32(ed.V)))
	}
	return sign
}
