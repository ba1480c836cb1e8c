package exact

// This file chooses among the elimination orders. Min-fill does well on most graphs; on grids and the like a sweep is better, and how good it is depends on where it starts.

// easy is the number of table entries per node up to which the order of min-fill is taken without looking for a better one.
const easy = 1 << 10

// narrow leaves in s.order the best elimination order for g that it finds, among those of at most the given width and work, with sweeps from at most so many nodes. It answers
// false where none is.
func (s *solver) narrow(g *graph, limit int, work int64, sweeps int) bool {
	o := &s.order
	n := g.nodes()
	found := o.run(g, limit, work)
	if found && o.work <= easy*int64(n) {
		return true
	}
	best, order := unlimited, []int32(nil)
	if found {
		best = o.work
		work = best - 1
	}
	width := o.width
	// The number of starts depends on the size of the graph, so that looking for an order costs no more than a few passes over a large one.
	const effort = 1 << 15
	starts := max(2, min(sweeps, effort/max(1, n)))
	a := s.sweep.far(g, 0)
	for k := range starts { // the two ends of a long walk, and nodes spread over the numbers
		from := a
		switch {
		case k == 1:
			from = s.sweep.far(g, a)
		case k > 1:
			from = int32(int64(k-2) * int64(n) / int64(starts-2))
		}
		if o.follow(g, limit, work, s.sweep.run(g, from)) {
			best, order = o.work, append(order[:0], s.sweep.order...)
			work = best - 1
		} else {
			width = min(width, o.width)
		}
	}
	switch {
	case order != nil:
		return o.follow(g, limit, best, order)
	case found:
		return o.run(g, limit, best)
	}
	o.width = width
	return false
}
