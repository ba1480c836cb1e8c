package exact

import (
	"cmp"
	"math"
	"math/bits"
	"slices"

	"maskpair/gds/arena"
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
	room  *arena.Slab // nil: the heap
	half  []rowEntry
	node  []reducedNode
	met   []meeting // per node
	time  int32
	queue []int32
	base  int64
	trail []undo
	local []int32 // per node of the problem: its number here, or -1; then, per node here, its number in the kernel

	// For twins: the nodes that may be some, and the hashes of their neighbours without and with themselves.
	alive        []int32
	hash         [2][]uint64
	open, closed repeats
	keys, sorted []twinKey
	count        []int32
	pairs        []twinPair
	kept         []int32
}

// rowEntry is a half-edge: an edge as one of its ends sees it.
type rowEntry struct {
	s        int64
	to, mate int32
}

// reducedNode is what is known of a node.
type reducedNode struct {
	h          int64
	start, end int32  // its own row
	next       int32  // node with the next row of the chain, or -1
	last       int32  // node with the last row of its chain
	size       int32  // half-edges in its rows
	fresh      uint16 // changes since it was cleaned, up to as many as fit
	state      uint8
}

// meeting says in which row walk a node was met, and at which half-edge.
type meeting struct{ time, half int32 }

// The states of a node, as bits.
const (
	gone    = 1 << iota // taken out
	queued              // in the queue
	twofold             // may have parallel edges
)

// load takes in the part of a problem that rest (ascending) spans. Held nodes become unary terms and are left without edges.
func (r *reducer) load(p *Problem, rest []int32) {
	n := len(rest)
	r.local = fit(r.room, r.local, max(p.Nodes, n))
	local := r.local
	for i := range local {
		local[i] = -1
	}
	for i, v := range rest {
		local[v] = int32(i)
	}
	r.node, r.met, r.time, r.base = fitZeroed(r.room, r.node, n), fitZeroed(r.room, r.met, n), 0, 0
	r.queue, r.trail = fit(r.room, r.queue, n+n/2)[:0], fit(r.room, r.trail, n)[:0]
	for i, v := range rest {
		nd := &r.node[i]
		k := p.fixed(v)
		if c := p.cost(v); k >= 0 {
			r.base += c[k]
		} else {
			r.base += c[0]
			nd.h = c[1] - c[0]
		}
		if k >= 0 {
			nd.state = gone
			r.trail = append(r.trail, undo{int32(i), -1, uint8(k)})
		}
	}
	unit := p.unit()
	parallel := uint8(twofold)
	if inOrder(p.Edges) {
		parallel = 0
	}
	for i := range p.Edges {
		e := &p.Edges[i]
		u, v := local[e.U], local[e.V]
		if u < 0 || u == v || e.Weight <= 0 {
			continue // loops are in what settle returns
		}
		s := e.Weight * unit
		if e.Same {
			r.base += s
			s = -s
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
			r.node[u].size++
			r.node[v].size++
		}
	}
	at := int32(0)
	for i := range r.node {
		nd := &r.node[i]
		nd.start, nd.end, nd.next, nd.last = at, at, -1, int32(i)
		nd.state |= parallel
		at += nd.size
	}
	r.half = fit(r.room, r.half, int(at))
	for i := range p.Edges {
		e := &p.Edges[i]
		u, v := local[e.U], local[e.V]
		if u < 0 || u == v || e.Weight <= 0 || p.fixed(e.U) >= 0 || p.fixed(e.V) >= 0 {
			continue
		}
		s := e.Weight * unit
		if e.Same {
			s = -s
		}
		nu, nv := &r.node[u], &r.node[v]
		r.half[nu.end] = rowEntry{s, v, nv.end}
		r.half[nv.end] = rowEntry{s, u, nu.end}
		nu.end++
		nv.end++
	}
}

// lean turns an edge to a node that is on mask x into a unary term.
func (r *reducer) lean(v int32, s int64, x uint8) {
	if x != 0 {
		r.node[v].h += s
	} else {
		r.node[v].h -= s
		r.base += s
	}
}

// clean merges the parallel edges of v and drops deleted ones from its rows.
func (r *reducer) clean(v int32) {
	nv := &r.node[v]
	if nv.state&twofold != 0 {
		r.time++
		for c := v; c >= 0; c = r.node[c].next {
			for k := r.node[c].start; k < r.node[c].end; k++ {
				e := &r.half[k]
				if e.s == 0 {
					continue
				}
				m := &r.met[e.to]
				if m.time != r.time {
					*m = meeting{r.time, k}
					continue
				}
				sum := r.half[m.half].s + e.s
				r.set(k, 0)
				r.set(m.half, sum)
				if sum == 0 {
					m.time = 0 // a third one starts anew
				}
			}
		}
		nv.state &^= twofold
	}
	size, kept := int32(0), v
	for c := v; c >= 0; c = r.node[c].next {
		row := &r.node[c]
		at := row.start
		for k := row.start; k < row.end; k++ {
			e := &r.half[k]
			if e.s == 0 {
				continue
			}
			if k != at {
				r.half[at] = *e
				r.half[e.mate].mate = at
			}
			at++
		}
		row.end = at
		size += at - row.start
		if at > row.start && c != v {
			// Empty rows drop out of the chain, or a node into which thousands have been merged would get slow.
			r.node[kept].next = c
			kept = c
		}
	}
	r.node[kept].next = -1
	nv.last = kept
	nv.size = size
	nv.fresh = 0
}

// set gives both halves of an edge a new s.
func (r *reducer) set(k int32, s int64) {
	e := &r.half[k]
	e.s = s
	r.half[e.mate].s = s
}

// long is the number of half-edges from which a node is looked at only after a quarter of them may have changed, so that a hub is not walked for each neighbour it loses.
const long = 64

// touch puts a node in the queue.
func (r *reducer) touch(v int32) {
	nd := &r.node[v]
	if nd.fresh < math.MaxUint16 {
		nd.fresh++
	}
	if nd.state&(queued|gone) != 0 || nd.size > long && int32(nd.fresh) < min(nd.size/4, math.MaxUint16) {
		return
	}
	nd.state |= queued
	r.queue = append(r.queue, v)
}

// run applies the first rule until it applies no more, then the twin rule, and so on while the twin rule finds much; each of its rounds costs a walk over the graph.
func (r *reducer) run() {
	const rounds = 6
	for v := range r.node {
		r.node[v].fresh = 1
	}
	for round := 0; ; round++ {
		for v := range r.node {
			if nd := &r.node[v]; nd.fresh > 0 && nd.state&(queued|gone) == 0 {
				nd.state |= queued
				r.queue = append(r.queue, int32(v))
			}
		}
		for at := 0; at < len(r.queue); at++ {
			v := r.queue[at]
			r.node[v].state &^= queued
			if r.node[v].state&gone == 0 {
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
	for c := v; c >= 0; c = r.node[c].next {
		for k := r.node[c].start; k < r.node[c].end; k++ {
			e := &r.half[k]
			a := magnitude(e.s)
			sum += a
			if a > most || a == most && e.to < r.half[heavy].to {
				heavy, most = k, a
			}
		}
	}
	h := magnitude(r.node[v].h)
	if h >= sum {
		var x uint8
		if r.node[v].h < 0 {
			x = 1
		}
		r.hold(v, x)
		return
	}
	if most >= sum-most+h {
		var flip uint8
		if r.half[heavy].s > 0 {
			flip = 1
		}
		r.merge(v, r.half[heavy].to, flip)
	}
}

// hold takes v out with mask x.
func (r *reducer) hold(v int32, x uint8) {
	r.node[v].state |= gone
	r.trail = append(r.trail, undo{v, -1, x})
	if x != 0 {
		r.base += r.node[v].h
	}
	for c := v; c >= 0; c = r.node[c].next {
		for k := r.node[c].start; k < r.node[c].end; k++ {
			if e := r.half[k]; e.s != 0 {
				r.lean(e.to, e.s, x)
				r.set(k, 0)
				r.touch(e.to)
			}
		}
	}
}

// merge takes one of v and j out, the one with fewer half-edges, with x[v] = x[j] ^ flip, and gives its edges to the other.
func (r *reducer) merge(v, j int32, flip uint8) {
	if r.node[v].size > r.node[j].size {
		v, j = j, v
	}
	r.absorb(v, j, flip)
}

// absorb takes v out with x[v] = x[j] ^ flip, and gives its edges to j.
func (r *reducer) absorb(v, j int32, flip uint8) {
	nv, nj := &r.node[v], &r.node[j]
	nv.state |= gone
	r.trail = append(r.trail, undo{v, j, flip})
	if flip != 0 {
		r.base += nv.h
		nj.h -= nv.h
	} else {
		nj.h += nv.h
	}
	for c := v; c >= 0; c = r.node[c].next {
		for k := r.node[c].start; k < r.node[c].end; k++ {
			e := r.half[k]
			if e.s == 0 {
				continue
			}
			if e.to == j {
				if flip == 0 {
					r.base += e.s
				}
				r.set(k, 0)
				continue
			}
			if flip != 0 {
				// s*[x[v]==x[w]] = s*[x[j]!=x[w]] = s - s*[x[j]==x[w]]
				r.base += e.s
				r.set(k, -e.s)
			}
			r.half[e.mate].to = j
			r.node[e.to].state |= twofold
			r.touch(e.to)
		}
	}
	r.node[nj.last].next = v
	nj.last = nv.last
	nj.size += nv.size
	nj.state |= twofold
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
	n := len(r.node)
	r.open.reset(r.room, n)
	r.closed.reset(r.room, n)
	r.hash[0], r.hash[1] = fit(r.room, r.hash[0], n)[:0], fit(r.room, r.hash[1], n)[:0]
	r.alive = fit(r.room, r.alive, n)[:0]
	for v := range int32(n) {
		nd := &r.node[v]
		if nd.state&gone != 0 {
			continue
		}
		if nd.fresh > 0 {
			r.clean(v)
			nd.fresh = 1 // still to be visited
		}
		if nd.size > long {
			continue
		}
		var open uint64
		for c := v; c >= 0; c = r.node[c].next {
			for k := r.node[c].start; k < r.node[c].end; k++ {
				open += scramble(uint64(r.half[k].to))
			}
		}
		closed := open + scramble(uint64(v))
		r.open.note(open)
		r.closed.note(closed)
		r.hash[0], r.hash[1] = append(r.hash[0], open), append(r.hash[1], closed)
		r.alive = append(r.alive, v)
	}
	merged := 0
	for i, seen := range [2]*repeats{&r.open, &r.closed} {
		r.keys = fit(r.room, r.keys, len(r.alive))[:0]
		for k, v := range r.alive {
			if hash := r.hash[i][k]; seen.twice(hash) {
				r.keys = append(r.keys, twinKey{hash, v})
			}
		}
		merged += r.mergeTwins()
	}
	const many = 64 // one in so many: fewer are not worth another round
	return merged*many > len(r.alive)
}

// repeats tells hashes that may have been noted more than once from those that were noted once: two bits for each of several places per node.
type repeats struct {
	once, more []uint64
	mask       uint64
}

// reset forgets all hashes and makes room for n.
func (r *repeats) reset(room *arena.Slab, n int) {
	places := uint64(64)
	for places < 8*uint64(n) {
		places *= 2
	}
	r.once, r.more, r.mask = fitZeroed(room, r.once, int(places/64)), fitZeroed(room, r.more, int(places/64)), places-1
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

// sortKeys orders the keys, which come in the order of their nodes, by hash and node: by leading bits first, as hashes spread evenly.
func (r *reducer) sortKeys() {
	compare := func(a, b twinKey) int {
		if a.hash != b.hash {
			return cmp.Compare(a.hash, b.hash)
		}
		return cmp.Compare(a.node, b.node)
	}
	const few = 1 << 6
	if len(r.keys) < few {
		slices.SortFunc(r.keys, compare)
		return
	}
	wide := bits.Len(uint(len(r.keys)))
	shift := 64 - wide
	r.count = fitZeroed(r.room, r.count, 1<<wide)
	for i := range r.keys {
		r.count[r.keys[i].hash>>shift]++
	}
	at := int32(0)
	for i, n := range r.count {
		r.count[i], at = at, at+n
	}
	r.sorted = fit(r.room, r.sorted, len(r.keys))
	for _, k := range r.keys {
		c := &r.count[k.hash>>shift]
		r.sorted[*c] = k
		*c++
	}
	r.keys, r.sorted = r.sorted, r.keys
	from := int32(0)
	for _, to := range r.count {
		if to-from > 1 {
			slices.SortFunc(r.keys[from:to], compare)
		}
		from = to
	}
}

// mergeTwins merges the twins among nodes of equal hash, and returns how many it took out.
func (r *reducer) mergeTwins() int {
	r.sortKeys()
	r.pairs = r.pairs[:0]
	for i := range r.keys {
		v := r.keys[i].node
		if i == 0 || r.keys[i].hash != r.keys[i-1].hash {
			r.kept = r.kept[:0]
		}
		if r.node[v].state&gone != 0 {
			continue
		}
		joined := false
		const memory = 8
		for _, u := range r.kept[max(0, len(r.kept)-memory):] {
			if flip, ok := r.compare(u, v); ok {
				r.pairs = append(r.pairs, twinPair{u, v, flip})
				joined = true
				break
			}
		}
		if !joined {
			r.kept = append(r.kept, v)
		}
	}
	for _, p := range r.pairs {
		r.absorb(p.drop, p.keep, p.flip)
	}
	return len(r.pairs)
}

// compare tells whether u and v are twins, and whether they want opposite masks.
func (r *reducer) compare(u, v int32) (flip uint8, ok bool) {
	r.time++
	var between int64
	du, dv := 0, 0
	for c := u; c >= 0; c = r.node[c].next {
		for k := r.node[c].start; k < r.node[c].end; k++ {
			e := &r.half[k]
			if e.s == 0 {
				continue
			}
			if e.to == v {
				between += e.s
				continue
			}
			m := &r.met[e.to]
			if m.time == r.time {
				return 0, false // a parallel edge not merged yet
			}
			*m = meeting{r.time, k}
			du++
		}
	}
	var su, sv int64 // one edge of each, to which all others are held
	for c := v; c >= 0; c = r.node[c].next {
		for k := r.node[c].start; k < r.node[c].end; k++ {
			e := &r.half[k]
			if e.s == 0 || e.to == u {
				continue
			}
			m := &r.met[e.to]
			if m.time != r.time {
				return 0, false
			}
			m.time = 0 // a second edge to the same node is no match
			a := r.half[m.half].s
			if dv++; dv == 1 {
				su, sv = a, e.s
			} else if !proportional(su, sv, a, e.s) {
				return 0, false
			}
		}
	}
	if du != dv || du == 0 || !proportional(su, sv, r.node[u].h, r.node[v].h) {
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
	nodes := fit(r.room, r.alive, len(r.node))[:0]
	halves := 0
	for v := range r.node {
		if r.node[v].state&gone == 0 {
			r.clean(int32(v))
			halves += int(r.node[v].size)
			r.local[v] = int32(len(nodes))
			nodes = append(nodes, int32(v))
		}
	}
	g := &graph{start: fit[int32](r.room, nil, len(nodes)+1)[:0], adj: fit[int32](r.room, nil, halves)[:0],
		wt: fit[int64](r.room, nil, halves)[:0], h: fit[int64](r.room, nil, len(nodes))}
	g.start = append(g.start, 0)
	for i, v := range nodes {
		g.h[i] = r.node[v].h
		for c := v; c >= 0; c = r.node[c].next {
			for k := r.node[c].start; k < r.node[c].end; k++ {
				if e := &r.half[k]; e.s != 0 {
					g.adj = append(g.adj, r.local[e.to])
					g.wt = append(g.wt, e.s)
				}
			}
		}
		g.start = append(g.start, int32(len(g.adj)))
	}
	return g, nodes
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
