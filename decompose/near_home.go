package decompose

import (
	"context"
	"math"
	"slices"

	"maskpair/gds/arena"
)

// This file chooses among the equally good solutions of broken groups. A group with an odd cycle has many, and which one it takes
// should not cost variants: so it is solved again with a cheapest aim behind all others, that its figures be on their home masks.

// usualMasks gives, by number of a figure of a shared structure, the mask that it has where the structure comes out as it does most often:
// +1 for A, -1 for B, 0 where the figure is not shared.
func (d *dealer) usualMasks() []int8 {
	l := d.l
	f := l.flat
	tables := make([]variantTable, len(f.lib.Structures))
	node, mask := l.nodeOf.Data, d.a.mask.Data
	var words []uint32
	for _, p := range d.places {
		words = words[:0]
		nodes := node[p.first : p.first+f.own[p.structure]]
		d.visited += int64(len(nodes))
		for len(nodes) > 0 {
			n := min(len(nodes), 32)
			w := uint32(0)
			for i, u := range nodes[:n] {
				w |= uint32(mask[u]) << i
			}
			words = append(words, w)
			nodes = nodes[n:]
		}
		tables[p.structure].intern(words)
	}
	usual := make([]int8, len(d.hash))
	for _, s := range f.h.bottom {
		t := &tables[s]
		if t.ways() == 0 {
			continue
		}
		best, bestSign := int32(-1), uint64(0)
		for i := range int32(t.ways()) {
			if best >= 0 && t.uses[i] < t.uses[best] {
				continue
			}
			sign := uint64(0)
			for k := range f.own[s] {
				sign += mix(d.hash[d.base[s]+k], uint64(t.way(i)[k/32]>>(k%32)&1))
			}
			if best < 0 || t.uses[i] > t.uses[best] || sign < bestSign {
				best, bestSign = i, sign
			}
		}
		for k := range f.own[s] {
			usual[d.base[s]+k] = 1 - 2*int8(t.way(best)[k/32]>>(k%32)&1)
		}
	}
	return usual
}

// homing solves broken groups again, round by round.
type homing struct {
	s    *solver
	d    *dealer
	off  [][2]int64 // by number of node: what it costs on A, on B, for figures that are then not on their usual masks
	area float64    // of all nodes
}

func newHoming(s *solver, d *dealer) *homing {
	h := &homing{s: s, d: d, off: arena.CutDirty[[2]int64](&s.l.room, s.nodes)}
	for i := range s.groups {
		for _, u := range s.groups[i].nodes {
			h.area += s.l.area[u]
		}
	}
	return h
}

// solve solves the broken groups again, nearest to the usual masks among all that is as good.
func (h *homing) solve(ctx context.Context, usual []int8, bias float64, jobs int) error {
	s := h.s
	clear(h.off)
	number := s.number
	h.d.eachShared(1, func(_ int, nodes []uint32, base uint32) {
		for i, n := range nodes {
			k := number[n]
			if k == 0 {
				continue
			}
			switch usual[base+uint32(i)] {
			case 1:
				h.off[k-1][1]++
			case -1:
				h.off[k-1][0]++
			}
		}
	})
	err := s.each(ctx, jobs, func(b *brokenGroup) {
		off := h.off[b.begin-1:][:len(b.nodes)]
		h.lean(b, off, bias)
		b.comeHome(&s.l.room, off)
	})
	if err != nil {
		return err
	}
	s.findSame()
	err = s.each(ctx, jobs, func(b *brokenGroup) {
		if &s.groups[b.same] == b && b.homing {
			b.near = s.exactly(b.problem, b.again())
		}
	})
	if err != nil {
		return err
	}
	for i := range s.groups {
		b := &s.groups[i]
		if !b.homing {
			continue
		}
		// A solution that is worse in what counts (where the budget ran out) is not taken.
		if near := s.groups[b.same].near.Masks; b.settleCrowds(b.weighed, near) <= b.solution.Cost {
			s.take(b, near)
		}
	}
	return nil
}

// choice is an assignment that may be taken up again.
type choice struct {
	mask  []uint8
	atoms [][]uint8 // by broken group
}

func (s *solver) keep() choice {
	c := choice{slices.Clone(s.a.mask.Data), make([][]uint8, len(s.groups))}
	for i := range s.groups {
		c.atoms[i] = s.groups[i].masks
	}
	return c
}

func (s *solver) restore(c choice) {
	copy(s.a.mask.Data, c.mask)
	for i := range s.groups {
		s.groups[i].masks = c.atoms[i]
		s.cut(&s.groups[i])
	}
}

// leanScale is what a figure away from home costs, so that the area of a node can count as a fraction of it.
const leanScale = 64

// lean makes the fuller mask dearer: bias is what the area of an average node on A costs more than on B, in figures away from home.
func (h *homing) lean(b *brokenGroup, off [][2]int64, bias float64) {
	for k, u := range b.nodes {
		o := &off[k]
		o[0] *= leanScale
		o[1] *= leanScale
		if lean := int64(math.Round(leanScale * bias * h.s.l.area[u] * float64(len(h.off)) / h.area)); lean > 0 {
			o[0] += lean
		} else {
			o[1] -= lean
		}
	}
}

// comeHome adds the cheapest aim to the problem of a group; off tells what each mask costs each node. It stays in use until the next
// round; what is needed besides lies in room.
func (b *brokenGroup) comeHome(room *arena.Slab, off [][2]int64) {
	sum := int64(1)
	for _, o := range off {
		sum += o[0] + o[1]
	}
	if b.worst == 0 {
		b.worst = 1
		for i := range b.weighed.Edges {
			b.worst += b.weighed.Edges[i].Weight
		}
		for _, c := range b.weighed.Cost {
			b.worst += c[0] + c[1]
		}
	}
	// What is not proved is not solved with more aims either.
	b.homing = b.worst < 1<<61/sum && b.solution.Proved
	if !b.homing {
		return
	}
	p := *b.weighed
	p.Unit, p.Lesser = sum, off
	if b.rep != nil || p.Nodes != len(off) {
		if b.home == nil {
			b.home = arena.CutDirty[[2]int64](room, p.Nodes)
		}
		clear(b.home)
		p.Lesser = b.home
		b.spreadCosts(off)
	}
	b.problem = &p
}

// spreadCosts gives what the masks of nodes cost to what gets a mask in the problem.
func (b *brokenGroup) spreadCosts(off [][2]int64) {
	for k, o := range off {
		n := int64(b.atomsOf(k))
		for i := range n {
			atom := b.atom(k) + int(i)
			to, flip := int32(atom), uint8(0)
			if b.rep != nil {
				to, flip = b.rep[atom], b.flip[atom]
			}
			b.home[to][flip] += o[0] / n
			b.home[to][flip^1] += o[1] / n
		}
	}
}
