package decompose

import "maskpair/decompose/exact"

// This file finds short odd cycles. In the graph doubled by parity (each node once for an even and once for an odd number of steps) the
// shortest odd cycle through an edge is the shortest way of even length between its ends that does without it; breadth-first search
// finds it.

// ringFinder looks for odd cycles in one graph.
type ringFinder struct {
	start []int32 // neighbours of node i: next[start[i]:start[i+1]]
	next  []int32
	back  []int32 // by doubled node: where the search came from; unseen else
	queue []int32
}

const unseen = -2

func newRingFinder(nodes int, edges []exact.Edge) *ringFinder {
	r := &ringFinder{start: make([]int32, nodes+2), next: make([]int32, 2*len(edges)), back: make([]int32, 2*nodes)}
	for _, e := range edges {
		r.start[e.U+2]++
		r.start[e.V+2]++
	}
	for i := 2; i < len(r.start); i++ {
		r.start[i] += r.start[i-1]
	}
	for _, e := range edges {
		r.next[r.start[e.U+1]] = e.V
		r.start[e.U+1]++
		r.next[r.start[e.V+1]] = e.U
		r.start[e.V+1]++
	}
	for i := range r.back {
		r.back[i] = unseen
	}
	return r
}

// through gives the nodes of the shortest odd cycle through an edge, in order, from its first end to its second; nil where none is
// shorter than most.
func (r *ringFinder) through(e exact.Edge, most int) []int32 {
	defer func() {
		for _, v := range r.queue {
			r.back[v] = unseen
		}
		r.queue = r.queue[:0]
	}()
	from, to := 2*e.U, 2*e.V
	r.back[from] = -1
	r.queue = append(r.queue, from)
	end, depth := 1, 1
	for i := 0; i < len(r.queue); i++ {
		if i == end {
			end = len(r.queue)
			if depth++; depth >= most {
				return nil
			}
		}
		at := r.queue[i]
		node, odd := at/2, at&1
		for _, v := range r.next[r.start[node]:r.start[node+1]] {
			step := 2*v + odd ^ 1
			if r.back[step] != unseen {
				continue
			}
			r.back[step] = at
			r.queue = append(r.queue, step)
			if step == to {
				var path []int32
				for ; step != -1; step = r.back[step] {
					path = append(path, step/2)
				}
				return path
			}
		}
	}
	return nil
}

// smallest gives the shortest of the shortest odd cycles through some edges; nil where there is none. It looks at no more than
// mostRings edges, and stops at a triangle.
func (r *ringFinder) smallest(edges []exact.Edge) []int32 {
	var best []int32
	most := len(r.start)
	for _, e := range edges[:min(len(edges), mostRings)] {
		if ring := r.through(e, most); ring != nil {
			best, most = ring, len(ring)
			if most == 3 {
				break
			}
		}
	}
	return best
}

const mostRings = 4096
