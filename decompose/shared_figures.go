package decompose

import (
	"maskpair/gds"
	"maskpair/gds/arena"
)

// This file numbers the drawn figures of structures that are placed more than once, tells what each is, and goes through all their
// placements.

// hashFigures tells what each figure of a shared structure is; false where no structure is shared.
func (d *dealer) hashFigures() bool {
	f := d.l.flat
	d.shared = make([]bool, len(f.lib.Structures))
	any := false
	for _, s := range f.h.bottom {
		d.shared[s] = f.own[s] > 0 && f.h.placed[s] > 1
		any = any || d.shared[s]
	}
	if !any {
		return false
	}
	d.base = make([]uint32, len(f.lib.Structures))
	n := uint32(0)
	for _, s := range f.h.bottom {
		if d.shared[s] {
			d.base[s] = n
			n += f.own[s]
		}
	}
	d.hash, d.signs = make([]uint64, n), make([][2]uint64, n)
	for _, s := range f.h.bottom {
		if !d.shared[s] {
			continue
		}
		name := mixString(f.h.name(s))
		f.ownFigures(s, func(k, i uint32) {
			h := hashFigure(f.lib, i, name)
			d.hash[d.base[s]+k], d.signs[d.base[s]+k] = h, [2]uint64{mix(h, 0), mix(h, 1)}
		})
	}
	return true
}

// hashFigure hashes class, box and outline of a figure, wherever the outline starts and whichever way it runs.
func hashFigure(lib *gds.Library, i uint32, h uint64) uint64 {
	fig := &lib.Figures[i]
	h = mix(h, uint64(fig.Class))
	h = mix(h, uint64(uint32(fig.Box.X1))<<32|uint64(uint32(fig.Box.Y1)))
	h = mix(h, uint64(uint32(fig.Box.X2))<<32|uint64(uint32(fig.Box.Y2)))
	if fig.Outline == 0 {
		return h
	}
	o := &lib.Outlines[fig.Outline-1]
	sum := uint64(0)
	for _, p := range lib.Points[o.First : o.First+uint64(o.Count)] {
		sum += mix(1, uint64(uint32(p.X))<<32|uint64(uint32(p.Y)))
	}
	return mix(mix(h, sum), uint64(uint32(o.Width)))
}

// findPlaces lists the placements of shared structures, so that they can be gone through often.
func (d *dealer) findPlaces() {
	f := d.l.flat
	n := uint64(0)
	for _, s := range f.h.bottom {
		if d.shared[s] {
			n += f.h.placed[s]
		}
	}
	d.places = arena.CutDirty[place](&d.l.room, int(n))[:0]
	for top := range f.h.tops {
		f.visit(top, func(s int32, _ placement, _ bool, first uint32) {
			if d.shared[s] {
				d.places = append(d.places, place{first, s})
			}
		})
	}
}

// eachShared calls fn for every placement of a shared structure, by several workers: with the number of the worker, the nodes of the own
// figures, and the number of the first of these.
func (d *dealer) eachShared(workers int, fn func(worker int, nodes []uint32, base uint32)) {
	node, own := d.l.nodeOf.Data, d.l.flat.own
	visited := make([]int64, workers)
	each(workers, func(w int) {
		n := int64(0)
		for _, p := range d.places[len(d.places)*w/workers : len(d.places)*(w+1)/workers] {
			nodes := node[p.first:][:own[p.structure]]
			n += int64(len(nodes))
			fn(w, nodes, d.base[p.structure])
		}
		visited[w] = n
	})
	for _, n := range visited {
		d.visited += n
	}
}
