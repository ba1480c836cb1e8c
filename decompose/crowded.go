package decompose

import (
	"slices"

	"maskpair/decompose/exact"
)

// This file gives crowded near pairs their cost: pairs of cut shapes with more near atoms than one edge, or a triangle of halves, can
// count once. Such a pair costs once if any two near atoms of it are on one mask, which is a term of many masks. It is made of edges by
// two nodes more for each way in which it can be kept (Boros and Hammer 2002 survey such reductions of pseudo-Boolean functions).
//
// The near atoms of a pair fall into parts that hang together; a part is kept in two ways, one the other turned over. Let y be the mask
// of an atom, turned over for the atoms of the second shape, so that a part is kept if its y are equal. Of k atoms in one part, with
// nodes z and w and half the cost to each edge,
//
//	(sum of [z != y] + [w != y]) / 2 + (k/2 - 1) * [z == w] - (k/2 - 1)
//
// is 1 where z and w differ, and with z = w the number of y that differ from both; so the least of it is 0 where all y are equal, else 1.
// With several parts each way of turning all but the first has two such nodes, for which its y are turned over; at most one of the ways
// is met, and gives back the cost that is charged once.

// mostParts is the number of parts up to which a crowded pair has such nodes. Beyond, its atoms cost a share each, which is never too
// much, so that what is proved holds; no layout tried has so many.
const mostParts = 5

// crowd is a crowded near pair in the problem of its group.
type crowd struct {
	edge   int     // number of the near pair in the group
	weight int64   // of the near pair
	atoms  []int32 // each once
	turned []uint8 // by atom: 1: of the second shape
	part   []uint8 // by atom
	parts  int
	nodes  int32 // first of the nodes in the problem, two for each way; below 0: shares
}

// newCrowd finds the parts of a near pair.
func newCrowd(edge int, near [][2]int32, weight int64) crowd {
	c := crowd{edge: edge, weight: weight, nodes: -1}
	var link []int
	place := func(atom int32, turned uint8) int {
		i := slices.Index(c.atoms, atom)
		if i < 0 {
			i = len(c.atoms)
			c.atoms, c.turned, link = append(c.atoms, atom), append(c.turned, turned), append(link, i)
		}
		for link[i] != i {
			i = link[i]
		}
		return i
	}
	for _, q := range near {
		a, b := place(q[0], 0), place(q[1], 1)
		link[max(a, b)] = min(a, b)
	}
	number := make([]uint8, len(link))
	for i, up := range link { // up is no greater than i
		if up == i {
			number[i] = uint8(min(c.parts, mostParts+1))
			c.parts++
		} else {
			number[i] = number[up]
		}
	}
	c.part = number
	return c
}

// ways is the number of ways to turn all parts but the first.
func (c *crowd) ways() int { return 1 << (c.parts - 1) }

// asks gives the mask that atom i must have in some way where the first part has y = 0.
func (c *crowd) asks(way, i int) uint8 {
	return c.turned[i] ^ uint8(way<<1>>c.part[i]&1)
}

// edges adds the nodes and edges of the pair to a problem, and returns by how much that charges more than the pair costs.
func (c *crowd) edges(p *exact.Problem, near [][2]int32) (surplus int64) {
	if c.parts > mostParts {
		for _, q := range near {
			p.Edges = append(p.Edges, exact.Edge{U: q[0], V: q[1], Weight: c.weight / int64(len(near))})
		}
		return 0
	}
	half := c.weight / 2
	c.nodes = int32(p.Nodes)
	for way := range c.ways() {
		z := int32(p.Nodes)
		p.Nodes += 2
		for i, atom := range c.atoms {
			same := c.asks(way, i) == 0
			p.Edges = append(p.Edges, exact.Edge{U: atom, V: z, Weight: half, Same: same}, exact.Edge{U: atom, V: z + 1, Weight: half, Same: same})
		}
		p.Edges = append(p.Edges, exact.Edge{U: z, V: z + 1, Weight: half * int64(len(c.atoms)-2)})
	}
	return half*int64(len(c.atoms))*int64(c.ways()) - c.weight
}

// settle gives the nodes of the pair their best masks for those of the atoms.
func (c *crowd) settle(atoms []uint8, give func(node int32, mask uint8)) {
	for way := range c.ways() {
		first := atoms[c.atoms[0]] ^ c.asks(way, 0)
		met := true
		for i, atom := range c.atoms {
			met = met && atoms[atom]^c.asks(way, i) == first
		}
		z := c.nodes + 2*int32(way)
		give(z, first)
		if met {
			give(z+1, first)
		} else {
			give(z+1, first^1)
		}
	}
}

// settleCrowds gives the nodes that no atom has their best masks in a solution of the problem, and returns its true cost.
func (b *brokenGroup) settleCrowds(p *exact.Problem, solved []uint8) int64 {
	if len(b.crowds) == 0 {
		return p.CostOf(solved)
	}
	atoms := b.spread(solved)
	cost := int64(0)
	for i := range b.crowds {
		c := &b.crowds[i]
		if c.nodes >= 0 {
			c.settle(atoms, func(node int32, mask uint8) {
				if b.rep != nil {
					node = b.rep[node]
				}
				solved[node] = mask
			})
			continue
		}
		near, broken := b.pieces.pairs[c.edge], int64(0)
		for _, q := range near {
			broken += int64(boolInt(atoms[q[0]] == atoms[q[1]]))
		}
		if broken > 0 {
			cost += c.weight - broken*(c.weight/int64(len(near)))
		}
	}
	return cost + p.CostOf(solved) - b.surplus
}

// solved gives the solution of the problem of a group by its true cost.
func (s *solver) solved(b *brokenGroup, budget exact.Budget) exact.Solution {
	sol := s.exactly(b.problem, budget)
	sol.Cost = b.settleCrowds(b.problem, sol.Masks)
	sol.LowerBound = max(0, sol.LowerBound-b.surplus)
	sol.Proved = sol.Cost == sol.LowerBound
	return sol
}
