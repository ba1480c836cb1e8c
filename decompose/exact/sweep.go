package exact

// This file finds elimination orders that sweep over a graph, for graphs like wide strips and grids, on which min-fill does badly (Diaz, Petit and Serna 2002 survey such
// layouts). The set of nodes met but not eliminated is the front; next comes the node of the front that meets the fewest new nodes, the earliest met of equal ones. The width
// is at most the size of the front.

// sweeper is the workspace of one sweep after another.
type sweeper struct {
	news  []int32 // neighbours not met yet
	met   []bool
	left  []bool
	queue [][]int32 // per number of new neighbours: nodes in the order met, some of them stale
	head  []int
	order []int32
	level []int32
	walk  []int32
}

// far gives a node at the end of a breadth-first walk from v: the one of least degree among the farthest, then the first met.
func (w *sweeper) far(g *graph, v int32) int32 {
	w.level = resize(w.level, g.nodes())
	for i := range w.level {
		w.level[i] = -1
	}
	w.level[v] = 0
	w.walk = append(w.walk[:0], v)
	best := v
	for at := 0; at < len(w.walk); at++ {
		u := w.walk[at]
		adj, _ := g.row(u)
		b, _ := g.row(best)
		if w.level[u] > w.level[best] || len(adj) < len(b) && w.level[u] == w.level[best] {
			best = u
		}
		for _, x := range adj {
			if w.level[x] < 0 {
				w.level[x] = w.level[u] + 1
				w.walk = append(w.walk, x)
			}
		}
	}
	return best
}

// run sweeps over g, from start first, and from the least node not met where a component is done.
func (w *sweeper) run(g *graph, start int32) []int32 {
	n := g.nodes()
	w.news = resize(w.news, n)
	w.met, w.left = zeroed(w.met, n), zeroed(w.left, n)
	w.order = resize(w.order, n)[:0]
	for i := range w.queue {
		w.queue[i] = w.queue[i][:0]
		w.head[i] = 0
	}
	for v := range n {
		w.news[v] = g.start[v+1] - g.start[v]
	}
	least := 0
	push := func(v int32) {
		k := int(w.news[v])
		for len(w.queue) <= k {
			w.queue = append(w.queue, nil)
			w.head = append(w.head, 0)
		}
		w.queue[k] = append(w.queue[k], v)
		least = min(least, k)
	}
	meet := func(v int32) {
		w.met[v] = true
		adj, _ := g.row(v)
		for _, x := range adj {
			w.news[x]--
			if w.met[x] && !w.left[x] {
				push(x)
			}
		}
		push(v)
	}
	next := int32(0)
	for len(w.order) < n {
		if least == len(w.queue) {
			v := start
			for w.met[v] {
				v = next
				next++
			}
			meet(v)
		}
		k := least
		if w.head[k] == len(w.queue[k]) {
			least++
			continue
		}
		v := w.queue[k][w.head[k]]
		w.head[k]++
		if w.left[v] || int(w.news[v]) != k {
			continue
		}
		w.left[v] = true
		w.order = append(w.order, v)
		adj, _ := g.row(v)
		for _, x := range adj {
			if !w.met[x] {
				meet(x)
			}
		}
	}
	return w.order
}
