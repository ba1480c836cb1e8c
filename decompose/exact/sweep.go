package exact

import (
	"cmp"
	"slices"
)

// This file finds elimination orders that sweep over a graph, for strips, grids and the like, on which min-fill does badly (Díaz, Petit and Serna 2002 survey such orders). The nodes met but
// not eliminated are the front; the width is at most its size. Next comes the node of the front that meets the fewest new nodes, or, with a slope, one that is also near to the start and far from
// the other end of the graph (after Sloan 1986); of equal ones the earliest met.

// sweeper is the workspace of one sweep after another.
type sweeper struct {
	news  []int32 // neighbours not met yet
	met   []int32 // when, from 1; 0: not yet; -1: eliminated
	slope []int32
	front []ahead
	order []int32
	level []int32
	walk  []int32
}

// ahead is a node of the front with its key when it was put there; it is stale where the key has changed.
type ahead struct {
	key  int64
	node int32
}

// levels walks breadth first from v, and sets level to the distance from v, -1 where there is no way.
func (w *sweeper) levels(g *graph, v int32) {
	w.level = resize(w.level, g.nodes())
	for i := range w.level {
		w.level[i] = -1
	}
	w.level[v] = 0
	w.walk = append(w.walk[:0], v)
	for at := 0; at < len(w.walk); at++ {
		u := w.walk[at]
		adj, _ := g.row(u)
		for _, x := range adj {
			if w.level[x] < 0 {
				w.level[x] = w.level[u] + 1
				w.walk = append(w.walk, x)
			}
		}
	}
}

// far gives a node at the end of a breadth-first walk from v: the one of least degree among the farthest, then the first met.
func (w *sweeper) far(g *graph, v int32) int32 {
	w.levels(g, v)
	best := v
	degree := func(v int32) int32 { return g.start[v+1] - g.start[v] }
	for _, u := range w.walk {
		if w.level[u] > w.level[best] || w.level[u] == w.level[best] && degree(u) < degree(best) {
			best = u
		}
	}
	return best
}

// run sweeps over g, from start first, and from the least node not met where a component is done.
func (w *sweeper) run(g *graph, start int32, sloped bool) []int32 {
	n := g.nodes()
	w.news, w.met, w.slope = resize(w.news, n), zeroed(w.met, n), zeroed(w.slope, n)
	w.order, w.front = resize(w.order, n)[:0], w.front[:0]
	if sloped {
		end := w.far(g, start)
		copy(w.slope, w.level)
		w.levels(g, end)
		for i, l := range w.level {
			w.slope[i] -= l
		}
	}
	for v := range n {
		w.news[v] = g.start[v+1] - g.start[v]
	}
	key := func(v int32) int64 { return int64(2*w.news[v]+w.slope[v])<<32 | int64(w.met[v]) }
	time := int32(0)
	meet := func(v int32) {
		time++
		w.met[v] = time
		adj, _ := g.row(v)
		for _, x := range adj {
			w.news[x]--
			if w.met[x] > 0 {
				w.push(ahead{key(x), x})
			}
		}
		w.push(ahead{key(v), v})
	}
	next := int32(0)
	for len(w.order) < n {
		if len(w.front) == 0 {
			v := start
			for w.met[v] != 0 {
				v = next
				next++
			}
			meet(v)
		}
		a := w.pop()
		if w.met[a.node] < 0 || a.key != key(a.node) {
			continue
		}
		w.met[a.node] = -1
		w.order = append(w.order, a.node)
		adj, _ := g.row(a.node)
		for _, x := range adj {
			if w.met[x] == 0 {
				meet(x)
			}
		}
	}
	return w.order
}

// push and pop keep front a heap, the least key first.
func (w *sweeper) push(a ahead) {
	w.front = append(w.front, a)
	f, p := w.front, len(w.front)-1
	for p > 0 && f[p].key < f[(p-1)/2].key {
		f[p], f[(p-1)/2] = f[(p-1)/2], f[p]
		p = (p - 1) / 2
	}
}

func (w *sweeper) pop() ahead {
	f := w.front
	top, last := f[0], len(f)-1
	f[0] = f[last]
	f = f[:last]
	for p := 0; ; {
		c := 2*p + 1
		if c >= last {
			break
		}
		if c+1 < last && f[c+1].key < f[c].key {
			c++
		}
		if f[p].key <= f[c].key {
			break
		}
		f[p], f[c] = f[c], f[p]
		p = c
	}
	w.front = f
	return top
}

// byName is the order of ascending names, for numberings that follow the lie of the nodes.
func (w *sweeper) byName(names []int32) []int32 {
	w.order = resize(w.order, len(names))
	for i := range w.order {
		w.order[i] = int32(i)
	}
	slices.SortFunc(w.order, func(a, b int32) int { return cmp.Compare(names[a], names[b]) })
	return w.order
}
