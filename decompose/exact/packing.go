package exact

// This file packs contradictory cycles: each costs at least the least weight on it, and cycles that use up different parts of the weights cost that each. It is the quickest
// lower bound, and the only one that sees cycles longer than a cluster is wide. Short cycles are packed first, as they leave most for others.

// oddCycle is a cycle of the packing. Nodes are in order; node n of a graph of n nodes stands for mask B, its edges being the unary terms.
type oddCycle struct {
	node   []int32
	amount int64
}

// packer is a packing under way. A state is 2*node + parity: the node, reached by a walk that asks for mask parity if it began at a node on mask A.
type packer struct {
	g      *graph
	edge   []int32
	left   []int64 // per edge: weight not used
	ground []int64 // per node: |h| not used
	lean   []int32 // nodes with ground left, and some without
	from   []int32 // per state: state before, in the walk in hand
	mark   []int32
	time   int32
	spot   []int32 // per node: place in a walk plus 1, or 0
	queue  []int32
	work   int64
	cycles []oddCycle
	sum    int64
}

// newPacker begins a packing.
func newPacker(g *graph, edge []int32, edges int) *packer {
	n := g.nodes()
	p := &packer{g: g, edge: edge, left: make([]int64, edges), ground: make([]int64, n), from: make([]int32, 2*n+2), mark: make([]int32, 2*n+2), spot: make([]int32, n+1)}
	for h, e := range edge {
		p.left[e] = magnitude(g.wt[h])
	}
	for i, h := range g.h {
		if h != 0 {
			p.ground[i] = magnitude(h)
			p.lean = append(p.lean, int32(i))
		}
	}
	return p
}

// packCycles packs cycles until none is left or the work is spent. The energy of every assignment is at least g.floor() plus the sum.
func packCycles(g *graph, edge []int32, edges int, work int64) *packer {
	p := newPacker(g, edge, edges)
	p.packRest(work)
	return p
}

// packRest packs cycles in what is left until none is left or the work is spent.
func (p *packer) packRest(work int64) {
	g, edge := p.g, p.edge
	n := g.nodes()
	// First from every edge, then, as walks get longer, from the edges that contradict a spanning forest of what is left: there is one on every contradictory cycle.
	for _, depth := range []int{2, 3, 4} {
		for i := range int32(n) {
			for h := g.start[i]; h < g.start[i+1]; h++ {
				if j := g.adj[h]; j > i {
					for p.work < work && p.left[edge[h]] > 0 && p.close(i, j, asks(g.wt[h]), depth) {
					}
				}
			}
		}
	}
	for depth := 6; p.work < work; depth += depth / 2 {
		clashes := p.clashes()
		if len(clashes) == 0 {
			break
		}
		for _, c := range clashes {
			for p.work < work && p.weight(c.u, c.v, c.edge) > 0 && p.close(c.u, c.v, c.ask, depth) {
			}
		}
		if depth > 2*n {
			depth = 2 * n
		}
	}
}

// shortCycles gives, for each edge, the shortest contradictory cycle that a walk over it finds, each cycle once, until the work is spent. They do not exclude each other.
func shortCycles(g *graph, edge []int32, edges int, work int64) *packer {
	n := g.nodes()
	p := newPacker(g, edge, edges)
	var seen pairSet
	for i := range int32(n) {
		for h := g.start[i]; h < g.start[i+1]; h++ {
			j := g.adj[h]
			if j < i || p.work > work {
				continue
			}
			nodes := p.find(i, j, asks(g.wt[h]), 2*n)
			if nodes == nil {
				continue
			}
			p.work += int64(len(nodes))
			hash := uint64(len(nodes))
			for _, v := range nodes {
				hash += scramble(uint64(v))
			}
			if a, b := int32(hash>>33)|1, int32(hash>>1&0x7fffffff); !seen.has(a, b) {
				seen.add(a, b)
				p.cycles = append(p.cycles, oddCycle{node: nodes})
			}
		}
	}
	return p
}

// asks is the parity that an edge asks for between its ends.
func asks(s int64) int32 {
	if s > 0 {
		return 1
	}
	return 0
}

// clash is an edge that contradicts a spanning forest; its number is -1 for a unary term, whose second end is then node n.
type clash struct {
	u, v, edge int32
	ask        int32
}

func (p *packer) weight(u, v, edge int32) int64 {
	if edge < 0 {
		return p.ground[u]
	}
	return p.left[edge]
}

// clashes walks over the graph of what is left, breadth first, and gives the edges that contradict the walk.
func (p *packer) clashes() []clash {
	g := p.g
	n := g.nodes()
	side := make([]int8, n+1)
	for i := range side {
		side[i] = -1
	}
	var found []clash
	visit := func(root int32) {
		side[root] = 0
		p.queue = append(p.queue[:0], root)
		for at := 0; at < len(p.queue); at++ {
			v := p.queue[at]
			p.each(v, func(w, ask, edge int32) {
				want := side[v] ^ int8(ask)
				if side[w] < 0 {
					side[w] = want
					p.queue = append(p.queue, w)
				} else if side[w] != want && v < w {
					found = append(found, clash{v, w, edge, ask})
				}
			})
		}
	}
	if len(p.lean) > 0 {
		visit(int32(n))
	}
	for i := range int32(n) {
		if side[i] < 0 {
			visit(i)
		}
	}
	return found
}

// each calls f for the neighbours of v over edges with something left.
func (p *packer) each(v int32, f func(w, ask, edge int32)) {
	g := p.g
	n := int32(g.nodes())
	if v == n {
		k := 0
		for _, w := range p.lean {
			if p.ground[w] > 0 {
				p.lean[k] = w
				k++
			}
		}
		p.lean = p.lean[:k]
		p.work += int64(k)
		for _, w := range p.lean {
			f(w, asks(g.h[w]), -1)
		}
		return
	}
	p.work += int64(g.start[v+1] - g.start[v])
	for h := g.start[v]; h < g.start[v+1]; h++ {
		if e := p.edge[h]; p.left[e] > 0 {
			f(g.adj[h], asks(g.wt[h]), e)
		}
	}
	if p.ground[v] > 0 {
		f(n, asks(g.h[v]), -1)
	}
}

// close looks for a walk from u to v, not longer than depth, that contradicts the edge between them, and uses up a contradictory cycle of the two. The cycle is shorter than that
// where the walk meets a node in both parities.
func (p *packer) close(u, v, ask int32, depth int) bool {
	nodes := p.find(u, v, ask, depth)
	if nodes == nil {
		return false
	}
	p.use(nodes)
	return true
}

// find is close without using the cycle up; it gives nil where there is none.
func (p *packer) find(u, v, ask int32, depth int) []int32 {
	p.time++
	goal := 2*v + (1 ^ ask)
	p.queue = append(p.queue[:0], 2*u)
	p.mark[2*u] = p.time
	p.from[2*u] = -1
	level := 0
	for at, end := 0, 1; at < len(p.queue) && p.mark[goal] != p.time; at++ {
		if at == end {
			if level++; level == depth {
				return nil
			}
			end = len(p.queue)
		}
		state := p.queue[at]
		w := state >> 1
		p.each(w, func(x, a, _ int32) {
			next := 2*x + state&1 ^ a
			if p.mark[next] != p.time && !(w == u && x == v || w == v && x == u) {
				p.mark[next] = p.time
				p.from[next] = state
				p.queue = append(p.queue, next)
			}
		})
	}
	if p.mark[goal] != p.time {
		return nil
	}
	var walk []int32
	for state := goal; state >= 0; state = p.from[state] {
		walk = append(walk, state)
	}
	return p.simple(walk)
}

// simple gives the nodes of a contradictory cycle in a closed walk of states whose last and first are closed by an edge: the whole walk, or the innermost part between two visits of one
// node, which are in different parities as no state comes twice.
func (p *packer) simple(walk []int32) []int32 {
	lo, hi := 0, len(walk)
	for i, state := range walk {
		v := state >> 1
		if at := p.spot[v] - 1; at >= 0 && i-int(at) < hi-lo {
			lo, hi = int(at), i
		}
		p.spot[v] = int32(i + 1)
	}
	for _, state := range walk {
		p.spot[state>>1] = 0
	}
	nodes := make([]int32, 0, hi-lo)
	for _, state := range walk[lo:hi] {
		nodes = append(nodes, state>>1)
	}
	return nodes
}

// use takes the least weight on a cycle from all its edges.
func (p *packer) use(nodes []int32) {
	n := int32(p.g.nodes())
	weights := make([]*int64, len(nodes))
	least := unlimited
	for i, v := range nodes {
		w := nodes[(i+1)%len(nodes)]
		switch n {
		case v:
			weights[i] = &p.ground[w]
		case w:
			weights[i] = &p.ground[v]
		default:
			weights[i] = &p.left[p.edge[p.g.entry(v, w)]]
		}
		least = min(least, *weights[i])
	}
	for _, w := range weights {
		*w -= least
	}
	p.sum += least
	p.cycles = append(p.cycles, oddCycle{nodes, least})
	p.work += int64(len(nodes))
}
