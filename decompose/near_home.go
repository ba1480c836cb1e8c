package decompose

import (
	"context"
	"math"
	"slices"

	"maskpair/decompose/exact"
	"maskpair/gds/arena"
)

// This file chooses among the equally good solutions of broken groups. A group with an odd cycle has many, and which one it takes
// should not cost variants: so it is solved again with a cheapest aim behind all others, that its figures be on their home masks.

// usualMasks gives for each figure of a shared structure the mask that it has where the structure comes out as it does most often:
// +1 for A, -1 for B, 0 where the figure is not shared.
func (d *dealer) usualMasks() []int8 {
	l := d.l
	f := l.flat
	tables := make([]variantTable, len(f.lib.Structures))
	node, mask := l.nodeOf.Data, d.a.mask.Data
	var words []uint32
	for _, p := range d.places.Data {
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
	usual := make([]int8, len(f.lib.Figures))
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
			f.ownFigures(s, func(k, figure uint32) { sign += mix(d.hash[figure], uint64(t.way(i)[k/32]>>(k%32)&1)) })
			if best < 0 || t.uses[i] > t.uses[best] || sign < bestSign {
				best, bestSign = i, sign
			}
		}
		f.ownFigures(s, func(k, figure uint32) {
			usual[figure] = 1 - 2*int8(t.way(best)[k/32]>>(k%32)&1)
		})
	}
	return usual
}

// solveNear solves the broken groups again, nearest to the usual masks among all that is as good.
func (s *solver) solveNear(ctx context.Context, d *dealer, usual []int8, bias float64, jobs int) error {
	start := make([]int32, len(s.groups)+1)
	local := arena.New[uint32](s.l.nodes) // by node: its number among those of all broken groups, plus 1
	defer local.Free()
	for i := range s.groups {
		b := &s.groups[i]
		start[i+1] = start[i] + int32(len(b.nodes))
		for k, u := range b.nodes {
			local.Data[u] = uint32(start[i]) + uint32(k) + 1
		}
	}
	off := make([][2]int64, start[len(s.groups)])
	node := s.l.nodeOf.Data
	d.eachShared(func(first uint32, figures []uint32) {
		for i, n := range node[first : first+uint32(len(figures))] {
			k := local.Data[n]
			if k == 0 {
				continue
			}
			switch usual[figures[i]] {
			case 1:
				off[k-1][1]++
			case -1:
				off[k-1][0]++
			}
		}
	})
	s.lean(off, bias)
	for i := range s.groups {
		s.groups[i].comeHome(off[start[i]:start[i+1]])
	}
	s.findSame()
	err := s.each(ctx, jobs, func(b *brokenGroup) {
		if &s.groups[b.same] == b && b.homing {
			b.near = exact.Solve(b.problem, b.again())
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

// nodes is the number of nodes of all broken groups.
func (s *solver) nodes() int {
	n := 0
	for i := range s.groups {
		n += len(s.groups[i].nodes)
	}
	return n
}

// leanScale is what a figure away from home costs, so that the area of a node can count as a fraction of it.
const leanScale = 64

// lean makes the fuller mask dearer: bias is what the area of an average node on A costs more than on B, in figures away from home.
func (s *solver) lean(off [][2]int64, bias float64) {
	sum := 0.0
	for i := range s.groups {
		for _, u := range s.groups[i].nodes {
			sum += s.l.area[u]
		}
	}
	k := 0
	for i := range s.groups {
		for _, u := range s.groups[i].nodes {
			o := &off[k]
			k++
			o[0] *= leanScale
			o[1] *= leanScale
			if lean := int64(math.Round(leanScale * bias * s.l.area[u] * float64(len(off)) / sum)); lean > 0 {
				o[0] += lean
			} else {
				o[1] -= lean
			}
		}
	}
}

// comeHome adds the cheapest aim to the problem of a group; off tells what each mask costs each node.
func (b *brokenGroup) comeHome(off [][2]int64) {
	sum := int64(1)
	for _, o := range off {
		sum += o[0] + o[1]
	}
	worst := int64(1)
	for _, e := range b.weighed.Edges {
		worst += e.Weight
	}
	for _, c := range b.weighed.Cost {
		worst += c[0] + c[1]
	}
	// What is not proved is not solved with more aims either.
	b.homing = worst < 1<<61/sum && b.solution.Proved
	if !b.homing {
		return
	}
	b.homeUnit = sum
	p := &exact.Problem{Nodes: b.weighed.Nodes, Edges: make([]exact.Edge, len(b.weighed.Edges)), Fixed: b.weighed.Fixed, Cost: make([][2]int64, b.weighed.Nodes)}
	for i, e := range b.weighed.Edges {
		e.Weight *= sum
		p.Edges[i] = e
	}
	for k, c := range b.weighed.Cost {
		p.Cost[k] = [2]int64{c[0] * sum, c[1] * sum}
	}
	for k, o := range off {
		n := int64(b.atomsOf(k))
		for i := range n {
			atom := b.atom(k) + int(i)
			to, flip := int32(atom), uint8(0)
			if b.rep != nil {
				to, flip = b.rep[atom], b.flip[atom]
			}
			p.Cost[to][flip] += o[0] / n
			p.Cost[to][flip^1] += o[1] / n
		}
	}
	b.problem = p
}
