package exact

// This file chooses among the elimination orders. Min-fill does well on most graphs; on grids and the like a sweep is better, and how good it is depends on where it starts.

// easy is the number of table entries per node up to which the order of min-fill is taken without looking for a better one.
const easy = 1 << 10

// narrow leaves in s.order the best elimination order for g that it finds, among those of at most the given width and work, with at most so many sweeps. It answers false where
// none is. The names are numbers of the nodes whose order may follow the lie of the nodes.
func (s *solver) narrow(g *graph, names []int32, limit int, work int64, sweeps int) bool {
	o := &s.order
	n := g.nodes()
	if limit = min(limit, maxWidth); beyondWidth(g, limit) {
		o.width = limit + 1
		return false
	}
	found := o.run(g, limit, work)
	if found && o.work <= easy*int64(n) {
		return true
	}
	best, order := work, []int32(nil)
	if found {
		best = o.work - 1
	}
	width := o.width
	try := func(given []int32) {
		if o.follow(g, limit, best, given) {
			best, order = o.work-1, append(order[:0], given...)
		} else {
			width = min(width, o.width)
		}
	}
	try(s.sweep.byName(names))
	// From the two ends of a long walk, and from nodes spread over the numbers. Their number depends on the size of the graph, so that looking for an order costs no more than a
	// few passes over a large one.
	const effort = 1 << 15
	starts := int32(max(2, min(sweeps, effort/max(1, n))))
	from := s.sweep.far(g, 0)
	for k := range starts {
		switch {
		case k == 1:
			from = s.sweep.far(g, from)
		case k > 1:
			from = int32(int64(k-2) * int64(n) / int64(starts-2))
		}
		try(s.sweep.run(g, from, false))
		try(s.sweep.run(g, from, true))
	}
	switch {
	case order != nil:
		return o.follow(g, limit, best+1, order)
	case found:
		return o.run(g, limit, best+1)
	}
	o.width = width
	return false
}
