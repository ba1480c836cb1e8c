package exact

import (
	"cmp"
	"math/bits"
	"slices"
)

// This file shrinks a problem without losing an optimum.
//
// One rule does most of it. Let S be the sum of |s| over the edges of node v. If |h[v]| >= S, then v takes the mask that h asks for, whatever its neighbours do. If one edge of v
// outweighs all the rest of v together, |s| >= S-|s|+|h[v]|, then v may follow that neighbour, and is merged into it. Nodes of degree 0 and 1 always fall to the rule, and so do
// nodes of degree 2 without a cost of their own: the heavier edge is contracted, and the lighter one is left between the two neighbours.
//
// The other rule is for twins: two nodes that see the same neighbours with proportional edges want the same in every case (or the opposite, where the factor is
// negative), and are merged unless an edge between them says otherwise.

// undo says how a node that was taken out gets its mask back: x[node] = x[from] ^ flip, or flip where from is -1.
type undo struct {
	node, from int32
	flip       uint8
}

// reducer is the graph under reduction. Half-edges 2e and 2e+1 are the two ends of edge e; the half-edges of a node form a list. Merged and deleted edges stay in the
// lists, marked, until the list is cleaned.
type reducer struct {
	end    []int32 // node at a half-edge
	next   []int32 // next half-edge of the same node, or -1
	s      []int64 // per edge; 0: deleted
	head   []int32 // per node: first half-edge, or -1
	size   []int32 // per node: length of the list
	fresh  []int32 // per node: changes since the list was last looked at
	h      []int64
	gone   []bool
	queued []bool
	seen   []int32 // per node: half-edge of the list being cleaned that leads there; valid where stamp says so
	stamp  []int32
	time   int32
	queue  []int32
	base   int64
	trail  []undo
}

// newReducer takes in the part of a problem that rest (ascending) spans. Held nodes become unary terms and are left without edges.
func newReducer(p *Problem, rest []int32) *reducer {
	n := len(rest)
	local := make([]int32, p.Nodes)
	for i := range local {
		local[i] = -1
	}
	for i, v := range rest {
		local[v] = int32(i)
	}
	m := 0
	for _, e := range p.Edges {
		if local[e.U] >= 0 {
			m++
		}
	}
	r := &reducer{
		end: make([]int32, 0, 2*m), next: make([]int32, 0, 2*m), s: make([]int64, 0, m),
		head: make([]int32, n), size: make([]int32, n), fresh: make([]int32, n), h: make([]int64, n),
		gone: make([]bool, n), queued: make([]bool, n), seen: make([]int32, n), stamp: make([]int32, n),
	}
	for i := range r.head {
		r.head[i] = -1
	}
	for i, v := range rest {
		k := p.fixed(v)
		if p.Cost != nil {
			c := p.Cost[v]
			if k >= 0 {
				r.base += c[k]
			} else {
				r.base += c[0]
				r.h[i] = c[1] - c[0]
			}
		}
		if k >= 0 {
			r.gone[i] = true
			r.trail = append(r.trail, undo{int32(i), -1, uint8(k)})
		}
	}
	for _, e := range p.Edges {
		u, v := local[e.U], local[e.V]
		if u < 0 || u == v || e.Weight <= 0 {
			continue // loops are in what settle returns
		}
		s := e.Weight
		if e.Same {
			s = -s
			r.base += e.Weight
		}
		a, b := p.fixed(e.U), p.fixed(e.V)
		switch {
		case a >= 0 && b >= 0:
			if a == b {
				r.base += s
			}
		case a >= 0:
			r.lean(v, s, uint8(a))
		case b >= 0:
			r.lean(u, s, uint8(b))
		default:
			r.add(u, v, s)
		}
	}
	return r
}

// lean turns an edge to a node that is on mask x into a unary term.
func (r *reducer) lean(v int32, s int64, x uint8) {
	if x != 0 {
		r.h[v] += s
	} else {
		r.h[v] -= s
		r.base += s
	}
}

// add makes a new edge.
func (r *reducer) add(u, v int32, s int64) {
	k := int32(len(r.end))
	r.end = append(r.end, u, v)
	r.next = append(r.next, r.head[u], r.head[v])
	r.s = append(r.s, s)
	r.head[u], r.head[v] = k, k+1
	r.size[u]++
	r.size[v]++
}

// clean merges the parallel edges of v and drops deleted ones from its list. It returns the number of edges, the sum of their |s|, and the half-edge with the largest
// |s|, -1 if there is none; of equal ones that to the least node.
func (r *reducer) clean(v int32) (degree int32, sum int64, heavy int32) {
	r.time++
	heavy = -1
	for pass := 0; pass < 2; pass++ {
		// The first pass adds up parallel edges, the second drops what came to 0, so that the list is right even where a sum did.
		last := int32(-1)
		degree = 0
		for k := r.head[v]; k >= 0; k = r.next[k] {
			keep := r.s[k>>1] != 0
			if keep && pass == 0 {
				w := r.end[k^1]
				if r.stamp[w] == r.time {
					r.s[r.seen[w]>>1] += r.s[k>>1]
					r.s[k>>1] = 0
					keep = false
				} else {
					r.stamp[w], r.seen[w] = r.time, k
				}
			}
			if !keep {
				continue
			}
			if last < 0 {
				r.head[v] = k
			} else {
				r.next[last] = k
			}
			last = k
			degree++
			if pass == 1 {
				a := magnitude(r.s[k>>1])
				sum += a
				if heavy < 0 || a > magnitude(r.s[heavy>>1]) || a == magnitude(r.s[heavy>>1]) && r.end[k^1] < r.end[heavy^1] {
					heavy = k
				}
			}
		}
		if last < 0 {
			r.head[v] = -1
			degree = 0
			break
		}
		r.next[last] = -1
	}
	r.size[v] = degree
	r.fresh[v] = 0
	return degree, sum, heavy
}

// long is the list length from which a node is looked at only after a quarter of its list may have changed, so that a hub is not walked for each neighbour it loses.
const long = 64

// touch puts a node in the queue.
func (r *reducer) touch(v int32) {
	r.fresh[v]++
	if r.queued[v] || r.gone[v] || r.size[v] > long && r.fresh[v] < r.size[v]/4 {
		return
	}
	r.queued[v] = true
	r.queue = append(r.queue, v)
}

// run applies the rules until none applies, or until the rounds of the twin rule, each of which costs a sort, are used up.
func (r *reducer) run() {
	const rounds = 6
	for v := range r.head {
		if !r.gone[v] {
			r.queued[v] = true
			r.queue = append(r.queue, int32(v))
		}
	}
	for round := 0; ; round++ {
		for at := 0; at < len(r.queue); at++ {
			v := r.queue[at]
			r.queued[v] = false
			if !r.gone[v] {
				r.visit(v)
			}
		}
		r.queue = r.queue[:0]
		if round == rounds {
			return
		}
		for v := range r.head {
			if r.fresh[v] > 0 && !r.gone[v] {
				r.queued[v] = true
				r.queue = append(r.queue, int32(v))
			}
		}
		if !r.twins() && len(r.queue) == 0 {
			return
		}
	}
}

// visit tries the first rule on a node.
func (r *reducer) visit(v int32) {
	_, sum, heavy := r.clean(v)
	h := magnitude(r.h[v])
	if h >= sum {
		var x uint8
		if r.h[v] < 0 {
			x = 1
		}
		r.hold(v, x)
		return
	}
	s := r.s[heavy>>1]
	if a := magnitude(s); a >= sum-a+h {
		var flip uint8
		if s > 0 {
			flip = 1
		}
		r.merge(v, r.end[heavy^1], flip)
	}
}

// hold takes v out with mask x.
func (r *reducer) hold(v int32, x uint8) {
	r.gone[v] = true
	r.trail = append(r.trail, undo{v, -1, x})
	if x != 0 {
		r.base += r.h[v]
	}
	for k := r.head[v]; k >= 0; k = r.next[k] {
		if s := r.s[k>>1]; s != 0 {
			w := r.end[k^1]
			r.lean(w, s, x)
			r.s[k>>1] = 0
			r.touch(w)
		}
	}
}

// merge takes one of v and j out, the one with the shorter list, with x[v] = x[j] ^ flip, and gives its edges to the other.
func (r *reducer) merge(v, j int32, flip uint8) {
	if r.size[v] > r.size[j] {
		v, j = j, v
	}
	r.absorb(v, j, flip)
}

// absorb takes v out with x[v] = x[j] ^ flip, and gives its edges to j.
func (r *reducer) absorb(v, j int32, flip uint8) {
	r.gone[v] = true
	r.trail = append(r.trail, undo{v, j, flip})
	if flip != 0 {
		r.base += r.h[v]
		r.h[j] -= r.h[v]
	} else {
		r.h[j] += r.h[v]
	}
	last := int32(-1)
	for k := r.head[v]; k >= 0; k = r.next[k] {
		last = k
		s := r.s[k>>1]
		if s == 0 {
			continue
		}
		w := r.end[k^1]
		if w == j {
			if flip == 0 {
				r.base += s
			}
			r.s[k>>1] = 0
			continue
		}
		if flip != 0 {
			// s*[x[v]==x[w]] = s*[x[j]!=x[w]] = s - s*[x[j]==x[w]]
			r.base += s
			r.s[k>>1] = -s
		}
		r.end[k] = j
		r.touch(w)
	}
	if last >= 0 {
		r.next[last] = r.head[j]
		r.head[j] = r.head[v]
		r.size[j] += r.size[v]
	}
	r.touch(j)
}

// twinKey is a node with a number that twins share.
type twinKey struct {
	hash uint64
	node int32
}

// twins merges twins, and tells whether there were any. Twins are found by a hash of their neighbours, and compared exactly with the last few nodes of that hash.
//
// Pairs found in one pass may all be merged: when twins u and u' are merged, two twins among their neighbours still see the merged node with edges in their old proportion.
func (r *reducer) twins() bool {
	found := false
	for _, closed := range [2]bool{false, true} {
		var keys []twinKey
		for v := range r.head {
			if r.gone[v] || r.size[v] > long {
				continue
			}
			if r.fresh[v] > 0 {
				r.clean(int32(v))
			}
			var hash uint64
			if closed {
				hash = scramble(uint64(v))
			}
			for k := r.head[v]; k >= 0; k = r.next[k] {
				if r.s[k>>1] != 0 {
					hash += scramble(uint64(r.end[k^1]))
				}
			}
			keys = append(keys, twinKey{hash, int32(v)})
		}
		slices.SortFunc(keys, func(a, b twinKey) int {
			if c := cmp.Compare(a.hash, b.hash); c != 0 {
				return c
			}
			return cmp.Compare(a.node, b.node)
		})
		type pair struct {
			keep, drop int32
			flip       uint8
		}
		var pairs []pair
		var kept []int32
		for i := range keys {
			if i > 0 && keys[i].hash != keys[i-1].hash {
				kept = kept[:0]
			}
			v, joined := keys[i].node, false
			const memory = 8
			for _, u := range kept[max(0, len(kept)-memory):] {
				if flip, ok := r.compare(u, v); ok {
					pairs = append(pairs, pair{u, v, flip})
					joined = true
					break
				}
			}
			if !joined {
				kept = append(kept, v)
			}
		}
		for _, p := range pairs {
			found = true
			r.absorb(p.drop, p.keep, p.flip)
		}
	}
	return found
}

// compare tells whether u and v are twins, and whether they want opposite masks.
func (r *reducer) compare(u, v int32) (flip uint8, ok bool) {
	r.time++
	var between int64
	du, dv := 0, 0
	for k := r.head[u]; k >= 0; k = r.next[k] {
		if r.s[k>>1] == 0 {
			continue
		}
		w := r.end[k^1]
		if w == v {
			between += r.s[k>>1]
			continue
		}
		if r.stamp[w] == r.time {
			return 0, false // a parallel edge not merged yet
		}
		r.stamp[w], r.seen[w] = r.time, k
		du++
	}
	var su, sv int64 // one edge of each, to which all others are held
	for k := r.head[v]; k >= 0; k = r.next[k] {
		b := r.s[k>>1]
		if b == 0 || r.end[k^1] == u {
			continue
		}
		w := r.end[k^1]
		if r.stamp[w] != r.time {
			return 0, false
		}
		r.stamp[w] = r.time - 1 // met: a second edge to w is no match
		a := r.s[r.seen[w]>>1]
		if dv++; dv == 1 {
			su, sv = a, b
		} else if !proportional(su, sv, a, b) {
			return 0, false
		}
	}
	if du != dv || du == 0 || !proportional(su, sv, r.h[u], r.h[v]) {
		return 0, false
	}
	if su > 0 == (sv > 0) {
		return 0, between <= 0
	}
	return 1, between >= 0
}

// proportional tells whether a/b = c/d, signs included, in the sense that (a, b) and (c, d) are multiples of one another; a and b are not 0.
func proportional(a, b, c, d int64) bool {
	if c == 0 || d == 0 {
		return c == d
	}
	if (a > 0 == (b > 0)) != (c > 0 == (d > 0)) {
		return false
	}
	h1, l1 := bits.Mul64(uint64(magnitude(a)), uint64(magnitude(d)))
	h2, l2 := bits.Mul64(uint64(magnitude(b)), uint64(magnitude(c)))
	return h1 == h2 && l1 == l2
}

// scramble spreads a number over 64 bits (the finishing step of Steele, Lea and Flood's SplitMix, 2014).
func scramble(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}

// kernel is what is left: a graph over the surviving nodes, which it lists in ascending order.
func (r *reducer) kernel() (*graph, []int32) {
	var nodes []int32
	local := r.seen // no list is cleaned any more after the loop below
	halves := 0
	for v := range r.head {
		if !r.gone[v] {
			d, _, _ := r.clean(int32(v))
			halves += int(d)
			nodes = append(nodes, int32(v))
		}
	}
	for i, v := range nodes {
		local[v] = int32(i)
	}
	g := &graph{start: make([]int32, 1, len(nodes)+1), adj: make([]int32, 0, halves), wt: make([]int64, 0, halves), h: make([]int64, len(nodes))}
	for i, v := range nodes {
		g.h[i] = r.h[v]
		for k := r.head[v]; k >= 0; k = r.next[k] {
			if s := r.s[k>>1]; s != 0 {
				g.adj = append(g.adj, local[r.end[k^1]])
				g.wt = append(g.wt, s)
			}
		}
		g.start = append(g.start, int32(len(g.adj)))
	}
	return g, nodes
}

// release lets go of what restore does not need.
func (r *reducer) release() {
	*r = reducer{base: r.base, trail: r.trail}
}

// restore completes x, over all nodes that the reducer was given, from the masks of the kernel.
func (r *reducer) restore(x []uint8, nodes []int32, masks []uint8) {
	for i, v := range nodes {
		x[v] = masks[i]
	}
	for i := len(r.trail) - 1; i >= 0; i-- {
		u := r.trail[i]
		x[u.node] = u.flip
		if u.from >= 0 {
			x[u.node] ^= x[u.from]
		}
	}
}
