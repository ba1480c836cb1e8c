package exact

import "slices"

// This file covers a graph that is too wide for elimination with overlapping parts that are not: windows of consecutive levels of a breadth-first walk, as wide as the limit
// allows and each begun in the middle of the one before, and, for edges that no window holds, clusters grown round them. They serve the search, which solves one part exactly with
// the rest held, and the lower bound, which shares the weights among the parts.

// cluster is a part of a graph with the plan that solves it: the subgraph that its nodes span, or a cycle of the packing.
type cluster struct {
	plan   plan
	node   []int32 // of the graph, by rank
	half   []int32 // entry of the graph's rows, by place in plan.ref
	cycle  bool
	amount int64   // of a cycle: what the packing uses of its edges
	ends   []int32 // of a cycle that uses unary terms: their ranks
}

// cover is a set of clusters of one graph.
type cover struct {
	g        *graph
	edge     []int32 // entry of a row -> number of the edge
	edges    int
	clusters []cluster // cycles last
	spanned  int       // clusters that are no cycles
	held     []int32   // per edge: clusters that hold it
	work     int64     // of carrying out all plans once
	memory   int64
	width    int
}

// maker builds a cover.
type maker struct {
	s     *solver
	c     *cover
	limit int   // width that a cluster may have
	room  int64 // bytes that the cover may take
	local []int32
	sub   graph
	half  []int32 // entry of sub's rows -> entry of the graph's
	nodes []int32
	level []int32
	first []int32 // per level: first entry in walk
	walk  []int32
	met   []bool
	score []int32
	want  int32 // times that an edge is to be held
	spent int64 // steps taken
	most  int64 // steps that may be taken
	full  bool  // out of room, or of steps
}

// spend counts steps.
func (m *maker) spend(steps int) {
	if m.spent += int64(steps); m.spent > m.most {
		m.full = true
	}
}

// numberEdges gives each edge of g a number, in the order of the rows of the lesser ends.
func numberEdges(g *graph) (edge []int32, count int) {
	n := g.nodes()
	edge = make([]int32, len(g.adj))
	// In ascending order of the greater end, its entry takes the numbers from those of the lesser ends; pending[j] lists them.
	next := make([]int32, n)
	copy(next, g.start[:n])
	at := int32(0)
	type twin struct{ to, half int32 }
	back := make([]twin, len(g.adj))
	for i := range int32(n) {
		for h := g.start[i]; h < g.start[i+1]; h++ {
			j := g.adj[h]
			back[next[j]] = twin{i, h}
			next[j]++
		}
	}
	// back holds the rows in ascending order of neighbours, with the entry at the other end.
	mark := make([]int32, n)
	for i := range int32(n) {
		for h := g.start[i]; h < g.start[i+1]; h++ {
			mark[g.adj[h]] = h
		}
		for _, t := range back[g.start[i]:g.start[i+1]] {
			if t.to > i {
				edge[mark[t.to]], edge[t.half] = at, at
				at++
			}
		}
	}
	return edge, int(at)
}

// coverWith covers g with clusters of at most the given width. It answers nil where that takes more than the given steps, which it takes from them.
func (s *solver) coverWith(g *graph, edge []int32, edges, limit int, steps *int64) *cover {
	m := newMaker(s, g, limit, *steps)
	m.c = newCover(g, edge, edges)
	m.windows()
	m.grow()
	m.c.spanned = len(m.c.clusters)
	s.work += m.spent
	if *steps -= m.spent; *steps < 0 {
		return nil
	}
	return m.c
}

// newCover is a cover without clusters.
func newCover(g *graph, edge []int32, edges int) *cover {
	return &cover{g: g, edge: edge, edges: edges, held: make([]int32, edges)}
}

// addCycles adds the cycles of a packing that no cluster spans; the cover must have no cycles yet.
func (s *solver) addCycles(c *cover, cycles []oddCycle) {
	n := int32(c.g.nodes())
	m := newMaker(s, c.g, 0, unlimited)
	m.c = c
	in := make([][]int32, n) // per node: clusters that hold it
	for k := range c.clusters {
		for _, v := range c.clusters[k].node {
			in[v] = append(in[v], int32(k))
		}
	}
	met := make([]meeting, len(c.clusters)) // number of the cycle, and how many of its nodes the cluster holds
	for i, cy := range cycles {
		spanned := false
		size := int32(len(cy.node))
		if slices.Contains(cy.node, n) {
			size-- // every cluster holds the node that stands for mask B
		}
		for _, v := range cy.node {
			if v == n {
				continue
			}
			for _, k := range in[v] {
				t := &met[k]
				if t.time != int32(i+1) {
					*t = meeting{int32(i + 1), 0}
				}
				t.half++
				spanned = spanned || t.half == size
			}
		}
		if !spanned {
			m.cycle(cy)
		}
		if m.full {
			return
		}
	}
}

// cycle makes a cluster of a cycle: of its edges alone, not of what else its nodes span.
func (m *maker) cycle(cy oddCycle) {
	g := m.c.g
	n := int32(g.nodes())
	// Begin behind the node that stands for mask B; without it, the cycle has an edge from its last node to the first.
	nodes := m.nodes[:0]
	at := slices.Index(cy.node, n)
	nodes = append(append(nodes, cy.node[at+1:]...), cy.node[:max(0, at)]...)
	m.nodes = nodes
	k := len(nodes)
	m.sub.reset(k, 2*k)
	m.half = m.half[:0]
	for i, v := range nodes {
		for _, j := range [2]int{i - 1, i + 1} {
			if at >= 0 && (j < 0 || j == k) {
				continue
			}
			j = (j + k) % k
			m.sub.adj = append(m.sub.adj, int32(j))
			m.half = append(m.half, g.entry(v, nodes[j]))
		}
		m.sub.start = append(m.sub.start, int32(len(m.sub.adj)))
		m.sub.h = append(m.sub.h, 0)
	}
	m.s.order.run(&m.sub, 2, unlimited)
	m.add(nodes)
	if m.full {
		return
	}
	c := &m.c.clusters[len(m.c.clusters)-1]
	c.cycle, c.amount = true, cy.amount
	if at >= 0 {
		c.ends = []int32{m.s.plan.rank[0], m.s.plan.rank[k-1]}
	}
}

// newMaker begins a cover.
func newMaker(s *solver, g *graph, limit int, steps int64) *maker {
	n := g.nodes()
	m := &maker{s: s, limit: limit, room: s.budget.Memory / 2, most: steps, local: make([]int32, n), level: make([]int32, n), met: make([]bool, n), score: make([]int32, n)}
	for i := range m.local {
		m.local[i] = -1
	}
	return m
}

// try plans the subgraph that nodes span, and tells whether it is narrow enough.
func (m *maker) try(nodes []int32) bool {
	m.load(nodes)
	const each = 8 // steps of the orders that are tried
	m.spend(each * (len(nodes) + len(m.half)))
	return m.s.narrow(&m.sub, nodes, m.limit, unlimited, 2)
}

// load makes m.sub the graph that nodes span.
func (m *maker) load(nodes []int32) {
	g := m.c.g
	halves := 0
	for i, v := range nodes {
		m.local[v] = int32(i)
		halves += int(g.start[v+1] - g.start[v])
	}
	m.spend(halves)
	m.sub.reset(len(nodes), halves)
	m.half = resize(m.half, halves)[:0]
	for _, v := range nodes {
		for h := g.start[v]; h < g.start[v+1]; h++ {
			if l := m.local[g.adj[h]]; l >= 0 {
				m.sub.adj = append(m.sub.adj, l)
				m.half = append(m.half, h)
			}
		}
		m.sub.start = append(m.sub.start, int32(len(m.sub.adj)))
		m.sub.h = append(m.sub.h, 0)
	}
	for _, v := range nodes {
		m.local[v] = -1
	}
}

// add makes a cluster of nodes, whose plan the last try left in m.s.plan; there is none when it is out of room.
func (m *maker) add(nodes []int32) {
	p := &m.s.plan
	p.make(&m.sub, &m.s.order)
	c := cluster{plan: p.compact(), node: make([]int32, len(nodes)), half: make([]int32, len(p.ref))}
	for r, v := range p.node {
		c.node[r] = nodes[v]
	}
	for k, ref := range p.ref {
		c.half[k] = m.half[ref.half]
	}
	m.keep(c)
}

// keep puts a cluster in the cover if there is room.
func (m *maker) keep(c cluster) {
	size := c.bytes()
	for _, v := range c.node {
		size += 4 * int64(m.c.g.start[v+1]-m.c.g.start[v]) // the search notes which nodes are next to it
	}
	if m.c.memory+size > m.room {
		m.full = true
		return
	}
	m.c.memory += size
	for _, h := range c.half {
		m.c.held[m.c.edge[h]]++
	}
	m.c.work += c.work()
	m.c.width = max(m.c.width, c.plan.width)
	m.c.clusters = append(m.c.clusters, c)
}

// work is what carrying out the plan once counts for: its table entries, and what goes with each node and edge, which outweighs the tables where they are small.
func (c *cluster) work() int64 {
	const each = 16
	return c.plan.work + each*int64(len(c.node)+len(c.half))
}

// bytes is the memory that a cluster takes, with what the lower bound keeps for it.
func (c *cluster) bytes() int64 {
	p := &c.plan
	const each = 1 << 10
	return each + int64(len(p.span))*48 + int64(len(p.bag))*4 + int64(len(p.ref))*24
}

// compact copies what solve and decode need.
func (p *plan) compact() plan {
	return plan{
		bagStart: slices.Clone(p.bagStart), bag: slices.Clone(p.bag), span: slices.Clone(p.span), refStart: slices.Clone(p.refStart), ref: slices.Clone(p.ref),
		back: slices.Clone(p.back), work: p.work, peak: p.peak, width: p.width,
	}
}

// windows covers the graph by levels of a breadth-first walk from the end of another walk.
func (m *maker) windows() {
	g := m.c.g
	n := g.nodes()
	w := &m.s.sweep
	for i := range m.level {
		m.level[i] = -1
	}
	for start := range int32(n) {
		if m.level[start] >= 0 || m.full {
			continue
		}
		m.levels(w.far(g, start))
		m.slide()
	}
}

// levels walks over the component of a node.
func (m *maker) levels(from int32) {
	g := m.c.g
	m.walk, m.first = append(m.walk[:0], from), append(m.first[:0], 0)
	m.level[from] = 0
	last := int32(0)
	for at := 0; at < len(m.walk); at++ {
		v := m.walk[at]
		if m.level[v] > last {
			last = m.level[v]
			m.first = append(m.first, int32(at))
		}
		adj, _ := g.row(v)
		for _, x := range adj {
			if m.level[x] < 0 {
				m.level[x] = m.level[v] + 1
				m.walk = append(m.walk, x)
			}
		}
	}
	m.first = append(m.first, int32(len(m.walk)))
}

// slide cuts the walk into windows.
func (m *maker) slide() {
	levels := len(m.first) - 1
	span := 2 // levels of the last window
	for at := 0; !m.full; {
		fits := func(k int) bool { return m.try(m.walk[m.first[at]:m.first[min(at+k, levels)]]) }
		k := min(span, levels-at)
		if fits(k) {
			for at+k < levels && fits(k+1) {
				k++
			}
		} else {
			for k--; k > 0 && !fits(k); k-- {
			}
		}
		if k < 2 && at+1 < levels {
			// Not even two levels: the edges here are left for grow.
			at++
			span = 2
			continue
		}
		if k == 0 {
			return
		}
		nodes := m.walk[m.first[at]:m.first[at+k]]
		m.try(nodes)
		m.add(nodes)
		if at+k >= levels {
			return
		}
		span = k
		at += k / 2 // at most the last level of this window, so that the edges to the next level are in the next one
	}
}

// grow makes clusters round edges that no window holds, until each is held several times: where edges are held once only, there is nothing to share out.
func (m *maker) grow() {
	g := m.c.g
	const times = 4
	var edges [][2]int32
	for v := range int32(g.nodes()) {
		for h := g.start[v]; h < g.start[v+1]; h++ {
			if g.adj[h] > v && m.c.held[m.c.edge[h]] == 0 {
				edges = append(edges, [2]int32{v, h})
			}
		}
	}
	for m.want = 1; m.want <= times; m.want++ {
		for _, e := range edges {
			if !m.full && m.c.held[m.c.edge[e[1]]] < m.want {
				m.around(e[0], g.adj[e[1]])
			}
		}
	}
}

// around makes the largest cluster that begins with two nodes and goes on with the node that has most edges to the cluster which are still wanted, then most edges, then the least number.
func (m *maker) around(u, v int32) {
	g := m.c.g
	most := 3 * (m.limit + 1)
	m.nodes = m.nodes[:0]
	var border []int32
	take := func(v int32) {
		m.met[v] = true
		m.nodes = append(m.nodes, v)
		for h := g.start[v]; h < g.start[v+1]; h++ {
			x := g.adj[h]
			if m.met[x] {
				continue
			}
			if m.score[x] == 0 {
				border = append(border, x)
			}
			m.score[x]++
			if m.c.held[m.c.edge[h]] < m.want {
				m.score[x] += 1 << 16
			}
		}
	}
	take(u)
	take(v)
	for len(m.nodes) < most {
		best := -1
		m.spend(len(border))
		for i, x := range border {
			if !m.met[x] && (best < 0 || m.score[x] > m.score[border[best]] || m.score[x] == m.score[border[best]] && x < border[best]) {
				best = i
			}
		}
		if best < 0 {
			break
		}
		take(border[best])
	}
	for _, x := range border {
		m.score[x] = 0
	}
	for _, x := range m.nodes {
		m.met[x] = false
		m.score[x] = 0
	}
	// limit+1 nodes always fit; find the longest prefix that does, by bisection.
	lo, hi := min(m.limit+1, len(m.nodes)), len(m.nodes)
	for lo < hi {
		mid := (lo + hi + 1) / 2
		if m.try(m.nodes[:mid]) {
			lo = mid
		} else {
			hi = mid - 1
		}
	}
	m.try(m.nodes[:lo])
	m.add(m.nodes[:lo])
}
