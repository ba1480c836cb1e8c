package exact

import "math/bits"

// This file leads through what is done for a graph that is too wide for exact elimination within the budget.

// beyond finds a good assignment of s.sub, writes it to x, and returns a lower bound on the energy. It takes about the given work, and less where nothing more is to be gained.
//
// First comes a packing of cycles and a quick search; then, as long as the two do not meet, a bound from clusters that share out the weights, and a longer search among them.
func (s *solver) beyond(x []uint8, work int64) int64 {
	g := &s.sub
	im := newImprover(s, g)
	defer func() { copy(x, im.best) }()
	if s.quick {
		im.start(x, 0)
		return g.floor()
	}
	edge, edges := numberEdges(g)
	const least = 16 // steps per edge and node that are taken whatever the budget
	enough := least * int64(edges+g.nodes())
	p := packCycles(g, edge, edges, max(work/8, enough))
	bound := g.floor() + p.sum
	for _, y := range [][]uint8{heavyTree(g), broadTree(g)} {
		im.start(y, max(work/64, enough))
	}
	s.work += p.work + im.search.work
	if im.least <= bound || work < enough {
		return bound
	}
	c := s.makeCover(g, edge, edges, work)
	im.use(c)
	im.search.work = 0
	im.run(nil, bound, work/4)
	s.work += im.search.work
	q := shortCycles(g, edge, edges, work/16)
	s.work += q.work
	s.addCycles(c, append(p.cycles, q.cycles...))
	d := newDual(s, g, c)
	if trace != nil {
		trace("ub", im.least, "floor", g.floor(), "packed", p.sum, "clusters", len(c.clusters), c.width, c.work)
	}
	bound = max(bound, d.run(im.least, work/2))
	im.search.work = 0
	im.run(d.assignments(), bound, work/8)
	s.work += im.search.work
	return bound
}

// makeCover chooses the widest clusters of which all can be solved often enough within the given work.
func (s *solver) makeCover(g *graph, edge []int32, edges int, work int64) *cover {
	const rounds = 200
	const widest = 20
	round := work / rounds
	limit := max(2, min(bits.Len64(uint64(round/int64(2*g.nodes())))-2, widest))
	c := s.coverWith(g, edge, edges, limit)
	for limit < widest {
		wider := s.coverWith(g, edge, edges, limit+1)
		if wider.work > round {
			break
		}
		c = wider
		limit++
	}
	return c
}
