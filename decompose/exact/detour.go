package exact

import "slices"

// This file finds some simple contradictory cycle through a given edge of a block that has contradictory cycles. Two paths without a common node lead from the ends of the edge to
// a contradictory cycle (Menger 1927), the ring; of the two ways round the ring from one path to the other, exactly one closes a contradictory cycle.

// detour works from a closed walk of states in the block that contradicts the edge, given as the states of a path between the ends of the edge; the walk meets a node twice.
func (f *CycleFinder) detour(edge int32, walk []int32) []int32 {
	e := f.edges[edge]
	ring := f.ring(walk)
	place := make(map[int32]int, len(ring)) // node -> place on the ring
	for i, s := range ring {
		place[s>>1] = i
	}
	succ := f.linked(edge, place)
	// The states along both paths, and with them the parities of the ways from the ends of the edge to the ring.
	trace := func(v int32) (nodes []int32, side uint8) {
		nodes = append(nodes, v)
		for {
			h, ok := succ[v]
			if !ok {
				return nodes, side
			}
			v, side = h.to, side^h.ask
			nodes = append(nodes, v)
		}
	}
	up, sideU := trace(e.U)
	down, sideV := trace(e.V)
	a, b := place[down[len(down)-1]], place[up[len(up)-1]]
	// The parity between two places of the ring is that of their states, and the other one for the way over the end of the ring, as the whole ring is contradictory.
	need := sideU ^ sideV
	if e.Same {
		need ^= 1
	}
	arc := uint8((ring[a] ^ ring[b]) & 1)
	forward := arc
	if b < a {
		forward ^= 1
	}
	step := 1
	if forward != need {
		step = len(ring) - 1
	}
	cycle := append([]int32{e.U}, down...)
	for at := a; at != b; {
		at = (at + step) % len(ring)
		cycle = append(cycle, ring[at]>>1)
	}
	// The last node of the ring is the last of the path up to it; back along that path, without e.U.
	for i := len(up) - 2; i > 0; i-- {
		cycle = append(cycle, up[i])
	}
	if len(up) == 1 {
		cycle = cycle[:len(cycle)-1] // e.U itself is on the ring
	}
	return cycle
}

// ring cuts the innermost part between two visits of one node out of a walk of states. What it gives are the states of that part but its last, which is the first with the other parity.
func (f *CycleFinder) ring(walk []int32) []int32 {
	lo, hi := 0, len(walk)
	last := map[int32]int{}
	for i, s := range walk {
		if at, ok := last[s>>1]; ok && i-at < hi-lo {
			lo, hi = at, i
		}
		last[s>>1] = i
	}
	return walk[lo:hi]
}

// linked gives two paths without a common node from the ends of an edge to two places, not over the edge, in the form of the half-edge to the next node, for each node but the last ones. The first
// path goes from U, around V; the second is an augmenting path of a flow that passes each node once.
func (f *CycleFinder) linked(edge int32, place map[int32]int) map[int32]halfEdge {
	e := f.edges[edge]
	succ := map[int32]halfEdge{}
	isEnd := func(v int32) bool { _, ok := place[v]; return ok }
	inside := func(h halfEdge) bool { return h.edge != edge && f.block[h.edge] == f.block[edge] }
	pred := map[int32]halfEdge{} // on the first path: half-edge back to the node before
	back := func(v int32, h halfEdge) halfEdge { return halfEdge{to: v, edge: h.edge, ask: h.ask} }
	if !isEnd(e.U) {
		from := map[int32]halfEdge{e.U: {}}
		queue := []int32{e.U}
	search:
		for at := 0; at < len(queue); at++ {
			v := queue[at]
			for _, h := range f.row(v) {
				if _, met := from[h.to]; met || !inside(h) || h.to == e.V {
					continue
				}
				from[h.to] = back(v, h)
				if isEnd(h.to) {
					for w := h.to; w != e.U; w = from[w].to {
						p := from[w]
						pred[w] = p
						succ[p.to] = back(w, p)
					}
					break search
				}
				queue = append(queue, h.to)
			}
		}
	}
	if isEnd(e.V) {
		return succ
	}
	// States of the second search: 2*node for arriving, 2*node+1 for leaving a node of the first path, whose use there is given back. Other nodes arrive and leave at once.
	onFirst := func(v int32) bool { _, ok := pred[v]; return ok || v == e.U }
	type step struct {
		state int32
		h     halfEdge // taken from the state before; edge -1 where the node is the same
	}
	from := map[int32]step{2 * e.V: {state: -1}}
	queue := []int32{2 * e.V}
	reached := int32(-1)
	reach := func(next, state int32, h halfEdge) {
		if _, met := from[next]; !met && reached < 0 {
			from[next] = step{state, h}
			queue = append(queue, next)
			if isEnd(next>>1) && !onFirst(next>>1) {
				reached = next
			}
		}
	}
	for at := 0; at < len(queue) && reached < 0; at++ {
		state := queue[at]
		v := state >> 1
		if onFirst(v) && state&1 == 0 {
			if p, ok := pred[v]; ok {
				reach(2*p.to+1, state, p)
			}
			continue
		}
		if onFirst(v) {
			reach(2*v, state, halfEdge{edge: -1})
		}
		used, ok := succ[v]
		for _, h := range f.row(v) {
			if inside(h) && !(ok && h == used) {
				reach(2*h.to, state, h)
			}
		}
	}
	var steps []step
	for state := reached; from[state].state >= 0; state = from[state].state {
		steps = append(steps, from[state])
	}
	slices.Reverse(steps)
	// Steps back along the first path give its edges up, all others are new.
	var fresh []step
	for _, s := range steps {
		v := s.state >> 1
		switch {
		case s.h.edge < 0:
		case s.state&1 == 0 && onFirst(v):
			delete(succ, s.h.to)
		default:
			fresh = append(fresh, s)
		}
	}
	for _, s := range fresh {
		succ[s.state>>1] = s.h
	}
	return succ
}
