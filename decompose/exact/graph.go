package exact

import "maskpair/gds/arena"

// This file holds the form in which everything after the first pass sees a problem: a signed graph with unary terms.
//
// With x[i] in {0, 1} the mask of node i, and [..] 1 where it holds and 0 elsewhere, the energy is
//
//	E(x) = base + sum over edges of s*[x[u] == x[v]] + sum over nodes of h[i]*x[i]
//
// An edge of the opposite kind has s = weight. One of the same kind costs weight*[x[u] != x[v]] = weight - weight*[x[u] == x[v]], so it has s = -weight and adds weight
// to the base. The form is linear in s and h: parallel edges are merged by adding, and a graph may be split into graphs whose s and h add up to its own.

// graph is a signed graph without loops or parallel edges in compressed rows. The base is kept by whoever owns the graph.
type graph struct {
	start []int32 // row of node i: start[i] to start[i+1]
	adj   []int32
	wt    []int64 // s, the same in both directions of an edge
	h     []int64 // one per node
}

// nodes is the number of nodes.
func (g *graph) nodes() int { return len(g.h) }

// row gives the neighbours of a node and the edges to them.
func (g *graph) row(i int32) ([]int32, []int64) {
	a, b := g.start[i], g.start[i+1]
	return g.adj[a:b], g.wt[a:b]
}

// entry is the place of neighbour j in the row of i, -1 where it is none.
func (g *graph) entry(i, j int32) int32 {
	for h := g.start[i]; h < g.start[i+1]; h++ {
		if g.adj[h] == j {
			return h
		}
	}
	return -1
}

// energy is E(x) with base 0.
func (g *graph) energy(x []uint8) int64 {
	var sum int64
	for i := range g.h {
		if x[i] != 0 {
			sum += g.h[i]
		}
		adj, wt := g.row(int32(i))
		for k, j := range adj {
			if int(j) > i && x[j] == x[i] {
				sum += wt[k]
			}
		}
	}
	return sum
}

// pull is E with x[i] = 1 less E with x[i] = 0, the rest as it is.
func (g *graph) pull(x []uint8, i int32) int64 {
	d := g.h[i]
	adj, wt := g.row(i)
	for k, j := range adj {
		if x[j] != 0 {
			d += wt[k]
		} else {
			d -= wt[k]
		}
	}
	return d
}

// floor is a bound that holds for every x: each term at its least.
func (g *graph) floor() int64 {
	var sum int64
	for i := range g.h {
		sum += min(0, g.h[i])
		adj, wt := g.row(int32(i))
		for k, j := range adj {
			if int(j) > i {
				sum += min(0, wt[k])
			}
		}
	}
	return sum
}

// reset makes g a graph without nodes that has room for so many nodes and entries of rows, keeping its memory where it can.
func (g *graph) reset(nodes, halves int) {
	g.start = append(resize(g.start, nodes+1)[:0], 0)
	g.adj, g.wt, g.h = resize(g.adj, halves)[:0], resize(g.wt, halves)[:0], resize(g.h, nodes)[:0]
}

// resize gives s the length n, keeping its memory where it can; what it holds is left over from before.
func resize[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n, n+n/4)
	}
	return s[:n]
}

// fit is resize with memory from a slab; nil: the heap. T must hold no pointers.
func fit[T any](room *arena.Slab, s []T, n int) []T {
	switch {
	case cap(s) >= n:
		return s[:n]
	case room == nil:
		return make([]T, n)
	}
	return arena.CutDirty[T](room, n)
}

// fitZeroed is fit with every element zero.
func fitZeroed[T any](room *arena.Slab, s []T, n int) []T {
	s = fit(room, s, n)
	clear(s)
	return s
}

// zeroed is resize with every element zero.
func zeroed[T any](s []T, n int) []T {
	s = resize(s, n)
	clear(s)
	return s
}

// magnitude is |v|; the caller's bound on sums keeps v away from the least int64.
func magnitude(v int64) int64 {
	if v < 0 {
		return -v
	}
	return v
}
