package exact

import (
	"cmp"
	"slices"
)

// This file packs contradictory cliques: sets of nodes that are all joined, and of which every triangle is contradictory. Such a clique of k nodes breaks at least
// k*(k-1)/2 - floor(k*k/4) of its edges (Edwards 1973 and 1975: no two sets are joined by more of them), a share that grows from a third to a half with k, so that in a
// crowd one large clique proves more than all cycles that fit into it. Cliques that use up different parts of the weights cost that each, like the cycles of a packing.

// leastClique is the size from which a clique proves more than the triangles in it.
const leastClique = 5

// beyondWidth tells whether no elimination of g has a width of at most limit, as far as a look at its degeneracy tells.
func beyondWidth(g *graph, limit int) bool {
	above := 0
	for v := range g.nodes() {
		if int(g.start[v+1]-g.start[v]) > limit {
			above++
		}
	}
	return above > limit && degeneracy(g) > limit
}

// degeneracy is the greatest k such that some part of g has no node of fewer than k neighbours: a lower bound on every elimination width, found in linear time by taking the node of
// fewest neighbours out again and again (Matula and Beck 1983).
func degeneracy(g *graph) int {
	n := g.nodes()
	degree := make([]int32, n)
	most := int32(0)
	for v := range n {
		degree[v] = g.start[v+1] - g.start[v]
		most = max(most, degree[v])
	}
	// order holds the nodes by degree; first[d] is where those of degree d begin.
	first := make([]int32, most+2)
	for _, d := range degree {
		first[d+1]++
	}
	for d := range most {
		first[d+1] += first[d]
	}
	order, place := make([]int32, n), make([]int32, n)
	next := slices.Clone(first)
	for v, d := range degree {
		order[next[d]], place[v] = int32(v), next[d]
		next[d]++
	}
	found := int32(0)
	for at := range int32(n) {
		v := order[at]
		found = max(found, degree[v])
		adj, _ := g.row(v)
		for _, w := range adj {
			d := degree[w]
			if d <= degree[v] {
				continue // taken out already, or not below the present degree any more
			}
			// To the front of its degree, which then begins behind it.
			front := first[d]
			u := order[front]
			order[front], order[place[w]] = w, u
			place[u], place[w] = place[w], front
			first[d] = front + 1
			degree[w] = d - 1
		}
	}
	return int(found)
}

// cliqueFinder looks for cliques in what a packing has left. Node n of a graph of n nodes stands for mask B, as in the cycles.
type cliqueFinder struct {
	p      *packer
	rows   [][]cliqueEdge // by node: its edges with something left, and some without
	met    []int32        // per node: time at which it was met
	ask    []uint8        // per node met: parity that its edge asks for
	gauge  []uint8        // per node of the clique or candidate: its mask, were the first node on A and no edge to that one broken, turned over
	score  []int32
	time   int32
	open   []candidate
	clique []int32
}

// cliqueEdge is an edge as seen from one end.
type cliqueEdge struct {
	left *int64
	to   int32
	ask  uint8
}

// candidate is a node that may come into the clique; score counts edges to other candidates.
type candidate struct{ node, score int32 }

// packCliques uses up cliques of at least leastClique nodes, until it finds none or the work is spent.
func (p *packer) packCliques(work int64) {
	n := int32(p.g.nodes())
	f := &cliqueFinder{p: p, rows: make([][]cliqueEdge, n+1), met: make([]int32, n+1), ask: make([]uint8, n+1), gauge: make([]uint8, n+1), score: make([]int32, n+1)}
	for v := range n {
		p.each(v, func(w, ask, edge int32) {
			left := &p.ground[v]
			if edge >= 0 {
				left = &p.left[edge]
			} else {
				f.rows[n] = append(f.rows[n], cliqueEdge{left, v, uint8(ask)})
			}
			f.rows[v] = append(f.rows[v], cliqueEdge{left, w, uint8(ask)})
		})
	}
	for v := range n {
		for p.work < work && f.find(v) {
			f.use()
		}
	}
}

// row gives the edges of a node with something left.
func (f *cliqueFinder) row(v int32) []cliqueEdge {
	f.p.work += int64(len(f.rows[v]))
	f.rows[v] = slices.DeleteFunc(f.rows[v], func(e cliqueEdge) bool { return *e.left == 0 })
	return f.rows[v]
}

// meet notes what the edges of a node lead to.
func (f *cliqueFinder) meet(v int32) {
	f.time++
	for _, e := range f.row(v) {
		f.met[e.to], f.ask[e.to] = f.time, e.ask
	}
}

// find makes f.clique a clique round a node; it answers false where what it finds is too small. Of the candidates those come first that are joined to most of a sample of them.
func (f *cliqueFinder) find(root int32) bool {
	f.clique, f.open = append(f.clique[:0], root), f.open[:0]
	f.meet(root)
	if len(f.rows[root]) < leastClique-1 {
		return false
	}
	f.gauge[root] = 0
	for _, e := range f.rows[root] {
		f.gauge[e.to] = 1 ^ e.ask
		f.open = append(f.open, candidate{e.to, 0})
	}
	for _, c := range f.open {
		f.score[c.node] = 0
	}
	const sample = 32
	for i := range min(sample, len(f.open)) {
		for _, e := range f.row(f.open[i*len(f.open)/min(sample, len(f.open))].node) {
			f.score[e.to]++
		}
	}
	for i := range f.open {
		f.open[i].score = f.score[f.open[i].node]
	}
	slices.SortFunc(f.open, func(a, b candidate) int { return cmp.Or(cmp.Compare(b.score, a.score), cmp.Compare(a.node, b.node)) })
	for len(f.open) > 0 && len(f.clique)+len(f.open) >= leastClique {
		v := f.open[0].node
		f.clique = append(f.clique, v)
		f.meet(v)
		f.p.work += int64(len(f.open))
		f.open = slices.DeleteFunc(f.open, func(c candidate) bool {
			return f.met[c.node] != f.time || f.ask[c.node] != 1^f.gauge[c.node]^f.gauge[v]
		})
	}
	return len(f.clique) >= leastClique
}

// use takes the least weight in the clique from all its edges.
func (f *cliqueFinder) use() {
	f.time++
	for _, v := range f.clique {
		f.met[v] = f.time
	}
	var inside []*int64
	least := unlimited
	for _, v := range f.clique {
		for _, e := range f.row(v) {
			if e.to > v && f.met[e.to] == f.time {
				inside = append(inside, e.left)
				least = min(least, *e.left)
			}
		}
	}
	for _, left := range inside {
		*left -= least
	}
	k := int64(len(f.clique))
	f.p.sum += least * (k*(k-1)/2 - k*k/4)
}
