package exact

import (
	"cmp"
	"slices"
)

// This file looks for good assignments of a graph that is too wide for elimination, by moves of single nodes: descent, and passes in the manner of Kernighan and Lin (1970), which go on
// through worse assignments and keep the best one met.

// search is an assignment under change.
type search struct {
	g      *graph
	x      []uint8
	pull   []int64 // energy with x[i] = 1 less energy with x[i] = 0
	energy int64
	work   int64 // entries of rows walked

	heap   []int32 // nodes of a pass by the change that their flip makes, least first, then by number
	place  []int32 // of a node in heap, or -1
	moves  []int32
	queue  []int32
	queued []bool
}

func newSearch(g *graph) *search {
	n := g.nodes()
	return &search{g: g, x: make([]uint8, n), pull: make([]int64, n), place: make([]int32, n), queued: make([]bool, n)}
}

// load starts from an assignment.
func (s *search) load(x []uint8) {
	copy(s.x, x)
	for i := range s.pull {
		s.pull[i] = s.g.pull(s.x, int32(i))
	}
	s.energy = s.g.energy(s.x)
	s.work += 2 * int64(len(s.g.adj))
}

// change is what a flip of i would add to the energy.
func (s *search) change(i int32) int64 {
	if s.x[i] != 0 {
		return -s.pull[i]
	}
	return s.pull[i]
}

// flip moves i to the other mask.
func (s *search) flip(i int32) {
	s.energy += s.change(i)
	s.x[i] ^= 1
	adj, wt := s.g.row(i)
	s.work += int64(len(adj)) + 1
	// The term s*[x[i]==x[j]] pulls j by -s where x[i] is 0, by +s where it is 1.
	if s.x[i] != 0 {
		for k, j := range adj {
			s.pull[j] += 2 * wt[k]
		}
	} else {
		for k, j := range adj {
			s.pull[j] -= 2 * wt[k]
		}
	}
}

// descend flips nodes as long as a flip helps, beginning with those given, or all where none are.
func (s *search) descend(from []int32) {
	s.queue = s.queue[:0]
	push := func(i int32) {
		if !s.queued[i] && s.change(i) < 0 {
			s.queued[i] = true
			s.queue = append(s.queue, i)
		}
	}
	if from == nil {
		for i := range s.x {
			push(int32(i))
		}
	}
	for _, i := range from {
		push(i)
	}
	for at := 0; at < len(s.queue); at++ {
		i := s.queue[at]
		s.queued[i] = false
		if s.change(i) < 0 {
			s.flip(i)
			adj, _ := s.g.row(i)
			for _, j := range adj {
				push(j)
			}
		}
	}
}

// pass flips every node once, always the one whose flip adds least, and goes back to the best assignment met. It tells whether that is better than the first. The pass ends early where
// the way led uphill for long.
func (s *search) pass() bool {
	n := len(s.x)
	s.heap = resize(s.heap, n)
	for i := range s.heap {
		s.heap[i], s.place[i] = int32(i), int32(i)
	}
	for i := n/2 - 1; i >= 0; i-- {
		s.down(i)
	}
	best, kept := s.energy, 0
	s.moves = s.moves[:0]
	patience := 100 + n/8
	for len(s.heap) > 0 && len(s.moves)-kept < patience {
		i := s.heap[0]
		s.remove(0)
		s.flip(i)
		adj, _ := s.g.row(i)
		for _, j := range adj {
			if p := s.place[j]; p >= 0 {
				s.fix(int(p))
			}
		}
		s.moves = append(s.moves, i)
		if s.energy < best {
			best, kept = s.energy, len(s.moves)
		}
	}
	for k := len(s.moves) - 1; k >= kept; k-- {
		s.flip(s.moves[k])
	}
	return kept > 0
}

func (s *search) less(a, b int32) bool {
	ca, cb := s.change(a), s.change(b)
	return ca < cb || ca == cb && a < b
}

func (s *search) swap(p, q int) {
	h := s.heap
	h[p], h[q] = h[q], h[p]
	s.place[h[p]], s.place[h[q]] = int32(p), int32(q)
}

func (s *search) down(p int) {
	for {
		c := 2*p + 1
		if c >= len(s.heap) {
			return
		}
		if c+1 < len(s.heap) && s.less(s.heap[c+1], s.heap[c]) {
			c++
		}
		if !s.less(s.heap[c], s.heap[p]) {
			return
		}
		s.swap(p, c)
		p = c
	}
}

func (s *search) fix(p int) {
	for p > 0 && s.less(s.heap[p], s.heap[(p-1)/2]) {
		s.swap(p, (p-1)/2)
		p = (p - 1) / 2
	}
	s.down(p)
}

func (s *search) remove(p int) {
	last := len(s.heap) - 1
	s.swap(p, last)
	s.place[s.heap[last]] = -1
	s.heap = s.heap[:last]
	if p < last {
		s.fix(p)
	}
}

// heavyTree is the assignment that satisfies a spanning forest of greatest weight (Kruskal 1956), unary terms being edges to one more node.
func heavyTree(g *graph) []uint8 {
	n := g.nodes()
	type link struct {
		u, v int32
		s    int64
	}
	links := make([]link, 0, len(g.adj)/2+n)
	for i := range int32(n) {
		adj, wt := g.row(i)
		for k, j := range adj {
			if j > i {
				links = append(links, link{i, j, wt[k]})
			}
		}
		if g.h[i] != 0 {
			links = append(links, link{i, int32(n), g.h[i]})
		}
	}
	slices.SortFunc(links, func(a, b link) int {
		if c := cmp.Compare(magnitude(b.s), magnitude(a.s)); c != 0 {
			return c
		}
		if c := cmp.Compare(a.u, b.u); c != 0 {
			return c
		}
		return cmp.Compare(a.v, b.v)
	})
	uf := newParity(n + 1)
	for _, l := range links {
		// The extra node stands for mask B: h*x is h*[x == B], an edge like any other.
		var f uint8
		if l.s > 0 {
			f = 1
		}
		uf.join(l.u, l.v, f)
	}
	root, f := uf.find(int32(n))
	first := make([]uint8, n+1) // by representative: 2 plus what turns its parities into masks
	first[root] = 2 | f ^ 1
	x := make([]uint8, n)
	for i := range x {
		r, f := uf.find(int32(i))
		if first[r] == 0 {
			first[r] = 2 | f
		}
		x[i] = f ^ first[r]&1
	}
	return x
}

// broadTree is the assignment that satisfies a breadth-first spanning forest, each root on the mask that its unary term asks for.
func broadTree(g *graph) []uint8 {
	n := g.nodes()
	x := make([]uint8, n)
	met := make([]bool, n)
	var queue []int32
	for root := range int32(n) {
		if met[root] {
			continue
		}
		met[root] = true
		if g.h[root] < 0 {
			x[root] = 1
		}
		queue = append(queue[:0], root)
		for at := 0; at < len(queue); at++ {
			v := queue[at]
			adj, wt := g.row(v)
			for k, w := range adj {
				if met[w] {
					continue
				}
				met[w] = true
				x[w] = x[v]
				if wt[k] > 0 {
					x[w] ^= 1
				}
				queue = append(queue, w)
			}
		}
	}
	return x
}

// scatteredTree is the assignment that satisfies a spanning forest grown from a random root over edges in random order.
func scatteredTree(g *graph, rng uint64) []uint8 {
	n := g.nodes()
	x := make([]uint8, n)
	met := make([]bool, n)
	var border []int32 // entries of rows that lead out of the tree
	heads := make([]int32, 0, len(g.adj))
	enter := func(v int32) {
		met[v] = true
		for h := g.start[v]; h < g.start[v+1]; h++ {
			border = append(border, h)
			heads = append(heads, v)
		}
	}
	root := int32(rng % uint64(n))
	for k := range int32(n) {
		v := (root + k) % int32(n)
		if met[v] {
			continue
		}
		if g.h[v] < 0 {
			x[v] = 1
		}
		enter(v)
		for len(border) > 0 {
			rng = scramble(rng)
			at := int(rng % uint64(len(border)))
			h, u := border[at], heads[at]
			last := len(border) - 1
			border[at], heads[at] = border[last], heads[last]
			border, heads = border[:last], heads[:last]
			if w := g.adj[h]; !met[w] {
				x[w] = x[u]
				if g.wt[h] > 0 {
					x[w] ^= 1
				}
				enter(w)
			}
		}
	}
	return x
}
