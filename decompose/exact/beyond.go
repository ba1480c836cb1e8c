package exact

import "math/bits"

// This file leads through what is done for a graph that is too wide for exact elimination within the budget.
//
// Where the sum of all weights passes about 2^57, the shares of the clusters would not fit 64 bits, and the packing of cycles is the only bound.

// beyond finds a good assignment of s.sub, writes it to x, and returns a lower bound on the energy. It takes about the given work, and less where nothing more is to be gained; a
// number of steps linear in the graph is taken whatever the budget.
//
// First comes a packing of cycles and a quick search; then, as long as the two do not meet, a search and a bound with clusters, and a last search from what the bound found.
func (s *solver) beyond(x []uint8, work int64) int64 {
	g := &s.sub
	im := newImprover(s, g)
	defer func() { copy(x, im.best) }()
	if s.quick {
		im.start(x, 0)
		return g.floor()
	}
	im.crossing = work / 128
	edge, edges := numberEdges(g)
	const least = 16 // steps per edge and node that are taken in any case
	enough := least * int64(edges+g.nodes())
	begun := s.work
	unit := commonFactor(g)
	bound := roundUp(g.floor(), 1, unit)
	if degeneracy(g)+2 >= leastClique {
		p := newPacker(g, edge, edges)
		p.packCliques(max(work/16, enough))
		p.packRest(max(work/8, enough))
		bound = max(bound, roundUp(g.floor()+p.sum, 1, unit))
		s.work += p.work
	}
	for _, y := range [][]uint8{heavyTree(g), broadTree(g)} {
		im.start(y, im.search.work+max(work/64, enough))
	}
	if im.least == bound {
		s.work += im.search.work
		return bound
	}
	p := packCycles(g, edge, edges, max(work/8, enough))
	s.work += p.work
	bound = max(bound, roundUp(g.floor()+p.sum, 1, unit))
	if im.least > bound && work >= enough {
		if c := s.makeCover(g, edge, edges, work); c.work <= work/8 {
			im.use(c)
			im.run(bound, im.search.work+work/4)
			q := shortCycles(g, edge, edges, work/16)
			s.work += q.work
			s.addCycles(c, append(p.cycles, q.cycles...))
			d := newDual(s, g, c)
			bound = max(bound, d.run(im.least, unit, min(work/2, work-(s.work-begun)-im.search.work)))
			for _, y := range d.assignments() {
				im.start(y, im.search.work+work/32)
			}
			im.run(bound, im.search.work+work/16)
		}
	}
	s.work += im.search.work
	return bound
}

// commonFactor is the greatest number that divides all terms of g, and so every energy.
func commonFactor(g *graph) int64 {
	var unit int64
	add := func(v int64) {
		v = magnitude(v)
		for v != 0 {
			unit, v = v, unit%v
		}
	}
	for _, w := range g.wt {
		add(w)
	}
	for _, h := range g.h {
		add(h)
	}
	return max(1, unit)
}

// makeCover chooses the widest clusters of which all can be solved often enough within the given work. It takes no more than a part of that; where even small clusters take more, there are none.
func (s *solver) makeCover(g *graph, edge []int32, edges int, work int64) *cover {
	const rounds = 200
	round := work / rounds
	steps := work / 8
	// The widest table of a cluster may take a small part of the memory, and at most 2^20 entries.
	widest := max(2, min(20, bits.Len64(uint64(max(0, s.budget.Memory)))-8))
	limit := max(2, min(bits.Len64(uint64(round/int64(2*g.nodes())))-2, widest))
	c := s.coverWith(g, edge, edges, limit, &steps)
	if c == nil {
		return newCover(g, edge, edges)
	}
	for limit < widest && len(c.clusters) > 0 {
		// One more neighbour doubles a table, so the step that would use up the round can be guessed.
		step := max(1, min(widest-limit, bits.Len64(uint64(round/max(1, c.work)))-1))
		wider := s.coverWith(g, edge, edges, limit+step, &steps)
		for wider != nil && wider.work > round && step > 1 {
			step--
			wider = s.coverWith(g, edge, edges, limit+step, &steps)
		}
		if wider == nil || wider.work > round || len(wider.clusters) == 0 {
			break
		}
		c = wider
		limit += step
	}
	return c
}
