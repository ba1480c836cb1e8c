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

// reducer is the graph under reduction.
//
// An edge is two half-edges, mates of each other, which carry the same s; where that is 0 the edge is deleted. The half-edges of a node are one row each for the node itself and
// for the nodes merged into it, chained; a row is closed up when its node is cleaned. Node numbers in to are kept right when nodes are merged, so that the way from a node to its
// neighbours goes through its rows alone.
type reducer struct {
	to    []int32 // per half-edge: the neighbour
	mate  []int32
	s     []int64
	row   []rowSpan // per node: its own row, and the next in the chain
	last  []int32   // per node: last row of its chain
	size  []int32   // per node: half-edges in its rows
	fresh []int32   // per node: changes since it was cleaned
	state []uint8
	h     []int64
	met   []meeting
	time  int32
	queue []int32
	base  int64
	trail []undo
	keys  [2][]twinKey
}

type rowSpan struct{ start, end, next int32 }

// meeting says in which row walk a node was met, and at which half-edge.
type meeting struct{ time, half int32 }

// The states of a node, as bits.
const (
	gone    = 1 << iota // taken out
	queued              // in the queue
	twofold             // may have parallel edges
)

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
	r := &reducer{
		row: make([]rowSpan, n), last: make([]int32, n), size: make([]int32, n), fresh: make([]int32, n),
		state: make([]uint8, n), h: make([]int64, n), met: make([]meeting, n),
		queue: make([]int32, 0, n+n/2), trail: make([]undo, 0, n),
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
			r.state[i] = gone
			r.trail = append(r.trail, undo{int32(i), -1, uint8(k)})
		}
	}
	for i := range p.Edges {
		e := &p.Edges[i]
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
			r.size[u]++
			r.size[v]++
		}
	}
	at := int32(0)
	for i := range r.row {
		r.row[i] = rowSpan{at, at, -1}
		r.last[i] = int32(i)
		r.state[i] |= twofold
		at += r.size[i]
	}
	r.to, r.mate, r.s = make([]int32, at), make([]int32, at), make([]int64, at)
	for i := range p.Edges {
		e := &p.Edges[i]
		u, v := local[e.U], local[e.V]
		if u < 0 || u == v || e.Weight <= 0 || p.fixed(e.U) >= 0 || p.fixed(e.V) >= 0 {
			continue
		}
		s := e.Weight
		if e.Same {
			s = -s
		}
		a, b := r.row[u].end, r.row[v].end
		r.to[a], r.mate[a], r.s[a] = v, b, s
		r.to[b], r.mate[b], r.s[b] = u, a, s
		r.row[u].end++
		r.row[v].end++
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

// clean merges the parallel edges of v and drops deleted ones from its rows.
func (r *reducer) clean(v int32) {
	if r.state[v]&twofold != 0 {
		r.time++
		for c := v; c >= 0; c = r.row[c].next {
			for k := r.row[c].start; k < r.row[c].end; k++ {
				if r.s[k] == 0 {
					continue
				}
				m := &r.met[r.to[k]]
				if m.time != r.time {
					*m = meeting{r.time, k}
					continue
				}
				sum := r.s[m.half] + r.s[k]
				r.set(k, 0)
				r.set(m.half, sum)
				if sum == 0 {
					m.time = 0 // a third one starts anew
				}
			}
		}
		r.state[v] &^= twofold
	}
	size, kept := int32(0), v
	for c := v; c >= 0; c = r.row[c].next {
		span := &r.row[c]
		at := span.start
		for k := span.start; k < span.end; k++ {
			if r.s[k] == 0 {
				continue
			}
			if k != at {
				r.to[at], r.mate[at], r.s[at] = r.to[k], r.mate[k], r.s[k]
				r.mate[r.mate[at]] = at
			}
			at++
		}
		span.end = at
		size += at - span.start
		if at > span.start && c != v {
			// Empty rows drop out of the chain, or a node into which thousands have been merged would get slow.
			r.row[kept].next = c
			kept = c
		}
	}
	r.row[kept].next = -1
	r.last[v] = kept
	r.size[v] = size
	r.fresh[v] = 0
}

// set gives both halves of an edge a new s.
func (r *reducer) set(k int32, s int64) {
	r.s[k] = s
	r.s[r.mate[k]] = s
}

// long is the number of half-edges from which a node is looked at only after a quarter of them may have changed, so that a hub is not walked for each neighbour it loses.
const long = 64

// touch puts a node in the queue.
func (r *reducer) touch(v int32) {
	r.fresh[v]++
	if r.state[v]&(queued|gone) != 0 || r.size[v] > long && r.fresh[v] < r.size[v]/4 {
		return
	}
	r.state[v] |= queued
	r.queue = append(r.queue, v)
}

// run applies the first rule until it applies no more, then the twin rule, and so on while the twin rule finds much; each of its rounds costs a walk over the graph.
func (r *reducer) run() {
	const rounds = 6
	for v := range r.row {
		r.fresh[v] = 1
	}
	for round := 0; ; round++ {
		for v := range r.row {
			if r.fresh[v] > 0 && r.state[v]&(queued|gone) == 0 {
				r.state[v] |= queued
				r.queue = append(r.queue, int32(v))
			}
		}
		for at := 0; at < len(r.queue); at++ {
			v := r.queue[at]
			r.state[v] &^= queued
			if r.state[v]&gone == 0 {
				r.visit(v)
			}
		}
		r.queue = r.queue[:0]
		if round == rounds || !r.twins() {
			return
		}
	}
}

// visit tries the first rule on a node.
func (r *reducer) visit(v int32) {
	r.clean(v)
	var sum, most int64
	heavy := int32(-1)
	for c := v; c >= 0; c = r.row[c].next {
		for k := r.row[c].start; k < r.row[c].end; k++ {
			a := magnitude(r.s[k])
			sum += a
			if a > most || a == most && r.to[k] < r.to[heavy] {
				heavy, most = k, a
			}
		}
	}
	h := magnitude(r.h[v])
	if h >= sum {
		var x uint8
		if r.h[v] < 0 {
			x = 1
		}
		r.hold(v, x)
		return
	}
	if most >= sum-most+h {
		var flip uint8
		if r.s[heavy] > 0 {
			flip = 1
		}
		r.merge(v, r.to[heavy], flip)
	}
}

// hold takes v out with mask x.
func (r *reducer) hold(v int32, x uint8) {
	r.state[v] |= gone
	r.trail = append(r.trail, undo{v, -1, x})
	if x != 0 {
		r.base += r.h[v]
	}
	for c := v; c >= 0; c = r.row[c].next {
		for k := r.row[c].start; k < r.row[c].end; k++ {
			if s := r.s[k]; s != 0 {
				r.lean(r.to[k], s, x)
				r.set(k, 0)
				r.touch(r.to[k])
			}
		}
	}
}

// merge takes one of v and j out, the one with fewer half-edges, with x[v] = x[j] ^ flip, and gives its edges to the other.
func (r *reducer) merge(v, j int32, flip uint8) {
	if r.size[v] > r.size[j] {
		v, j = j, v
	}
	r.absorb(v, j, flip)
}

// absorb takes v out with x[v] = x[j] ^ flip, and gives its edges to j.
func (r *reducer) absorb(v, j int32, flip uint8) {
	r.state[v] |= gone
	r.trail = append(r.trail, undo{v, j, flip})
	if flip != 0 {
		r.base += r.h[v]
		r.h[j] -= r.h[v]
	} else {
		r.h[j] += r.h[v]
	}
	for c := v; c >= 0; c = r.row[c].next {
		for k := r.row[c].start; k < r.row[c].end; k++ {
			s, w := r.s[k], r.to[k]
			if s == 0 {
				continue
			}
			if w == j {
				if flip == 0 {
					r.base += s
				}
				r.set(k, 0)
				continue
			}
			if flip != 0 {
				// s*[x[v]==x[w]] = s*[x[j]!=x[w]] = s - s*[x[j]==x[w]]
				r.base += s
				r.set(k, -s)
			}
			r.to[r.mate[k]] = j
			r.state[w] |= twofold
			r.touch(w)
		}
	}
	r.row[r.last[j]].next = v
	r.last[j] = r.last[v]
	r.size[j] += r.size[v]
	r.state[j] |= twofold
	r.touch(j)
}

// twinKey is a node with a number that twins share.
type twinKey struct {
	hash uint64
	node int32
}

// twinPair says that drop is a twin of keep.
type twinPair struct {
	keep, drop int32
	flip       uint8
}

// twins merges twins, and tells whether there were many. Twins are found by a hash of their neighbours, and compared exactly with the last few nodes of that hash; twins with an edge
// between them have the same hash when each counts among its own neighbours.
//
// Pairs found in one pass may all be merged: when twins u and u' are merged, two twins among their neighbours still see the merged node with edges in their old proportion.
func (r *reducer) twins() bool {
	n := len(r.row)
	open, closed := newRepeats(n), newRepeats(n)
	hashOf := func(v int32) (uint64, bool) {
		if r.state[v]&gone != 0 || r.size[v] > long {
			return 0, false
		}
		var hash uint64
		for c := v; c >= 0; c = r.row[c].next {
			for _, w := range r.to[r.row[c].start:r.row[c].end] {
				hash += scramble(uint64(w))
			}
		}
		return hash, true
	}
	living := 0
	for v := range int32(n) {
		if r.fresh[v] > 0 && r.state[v]&gone == 0 {
			r.clean(v)
			r.fresh[v] = 1 // still to be visited
		}
		if hash, ok := hashOf(v); ok {
			living++
			open.note(hash)
			closed.note(hash + scramble(uint64(v)))
		}
	}
	r.keys[0], r.keys[1] = r.keys[0][:0], r.keys[1][:0]
	for v := range int32(n) {
		if hash, ok := hashOf(v); ok {
			if open.twice(hash) {
				r.keys[0] = append(r.keys[0], twinKey{hash, v})
			}
			if hash += scramble(uint64(v)); closed.twice(hash) {
				r.keys[1] = append(r.keys[1], twinKey{hash, v})
			}
		}
	}
	merged := r.mergeTwins(r.keys[0])
	merged += r.mergeTwins(r.keys[1])
	const many = 64 // one in so many: fewer are not worth another round
	return merged*many > living
}

// repeats tells hashes that may have been noted more than once from those that were noted once: two bits for each of several places per node.
type repeats struct {
	once, more []uint64
	mask       uint64
}

func newRepeats(n int) *repeats {
	places := uint64(64)
	for places < 8*uint64(n) {
		places *= 2
	}
	return &repeats{make([]uint64, places/64), make([]uint64, places/64), places - 1}
}

func (r *repeats) note(hash uint64) {
	h := scramble(hash) & r.mask
	bit := uint64(1) << (h & 63)
	r.more[h/64] |= r.once[h/64] & bit
	r.once[h/64] |= bit
}

func (r *repeats) twice(hash uint64) bool {
	h := scramble(hash) & r.mask
	return r.more[h/64]>>(h&63)&1 != 0
}

// mergeTwins merges the twins among nodes of equal hash, and returns how many it took out.
func (r *reducer) mergeTwins(keys []twinKey) int {
	slices.SortFunc(keys, func(a, b twinKey) int {
		if c := cmp.Compare(a.hash, b.hash); c != 0 {
			return c
		}
		return cmp.Compare(a.node, b.node)
	})
	var pairs []twinPair
	var kept []int32
	for i := range keys {
		v := keys[i].node
		if i == 0 || keys[i].hash != keys[i-1].hash {
			kept = kept[:0]
		}
		if r.state[v]&gone != 0 {
			continue
		}
		joined := false
		const memory = 8
		for _, u := range kept[max(0, len(kept)-memory):] {
			if flip, ok := r.compare(u, v); ok {
				pairs = append(pairs, twinPair{u, v, flip})
				joined = true
				break
			}
		}
		if !joined {
			kept = append(kept, v)
		}
	}
	for _, p := range pairs {
		r.absorb(p.drop, p.keep, p.flip)
	}
	return len(pairs)
}

// compare tells whether u and v are twins, and whether they want opposite masks.
func (r *reducer) compare(u, v int32) (flip uint8, ok bool) {
	r.time++
	var between int64
	du, dv := 0, 0
	for c := u; c >= 0; c = r.row[c].next {
		for k := r.row[c].start; k < r.row[c].end; k++ {
			w := r.to[k]
			if r.s[k] == 0 {
				continue
			}
			if w == v {
				between += r.s[k]
				continue
			}
			if r.met[w].time == r.time {
				return 0, false // a parallel edge not merged yet
			}
			r.met[w] = meeting{r.time, k}
			du++
		}
	}
	var su, sv int64 // one edge of each, to which all others are held
	for c := v; c >= 0; c = r.row[c].next {
		for k := r.row[c].start; k < r.row[c].end; k++ {
			b, w := r.s[k], r.to[k]
			if b == 0 || w == u {
				continue
			}
			m := &r.met[w]
			if m.time != r.time {
				return 0, false
			}
			m.time = 0 // a second edge to w is no match
			a := r.s[m.half]
			if dv++; dv == 1 {
				su, sv = a, b
			} else if !proportional(su, sv, a, b) {
				return 0, false
			}
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
	nodes := make([]int32, 0, len(r.row))
	local := r.last // the chains are not lengthened any more
	halves := 0
	for v := range r.row {
		if r.state[v]&gone == 0 {
			r.clean(int32(v))
			halves += int(r.size[v])
			local[v] = int32(len(nodes))
			nodes = append(nodes, int32(v))
		}
	}
	g := &graph{start: make([]int32, 1, len(nodes)+1), adj: make([]int32, 0, halves), wt: make([]int64, 0, halves), h: make([]int64, len(nodes))}
	for i, v := range nodes {
		g.h[i] = r.h[v]
		for c := v; c >= 0; c = r.row[c].next {
			for k := r.row[c].start; k < r.row[c].end; k++ {
				if s := r.s[k]; s != 0 {
					g.adj = append(g.adj, local[r.to[k]])
					g.wt = append(g.wt, s)
				}
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
