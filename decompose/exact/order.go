package exact

import "math/bits"

// This file finds the order in which nodes are eliminated: greedily the node whose neighbours lack the fewest edges among each other (min-fill; Kjaerulff 1990 compares it with
// others), the latest of equal ones, which keeps the work in one place. Only symbols are moved here; the tables come later.
//
// Rows live in one array and are moved to its end when they outgrow their room, so that a graph of a million nodes makes no million allocations. Fill counts are
// exact all the time and are updated by what an elimination changes. Nodes of high degree are told apart: no step walks the row of one to answer whether an edge is there.

const (
	// large is the degree from which a node is of high degree. Edges between two such nodes are kept in a hash set as well, all others are found in the row of the other end.
	large = 48
	// maxWidth is the largest elimination width that is tried whatever the budget; a bag then fits a word of bits.
	maxWidth = 40
	// fillKeys bounds the fill by which nodes are sorted. A node of degree maxWidth has a fill of at most 40*39/2 = 780.
	fillKeys = 1024
)

// minFill is the workspace of one ordering after another.
type minFill struct {
	off        []int // row of a node: cell[off : off+size], with room for more
	size, room []int32
	cell       []int32
	degree     []int32 // living neighbours; size may count dead ones where the node is large
	dead       []bool
	big        []bool
	fill       []int64
	far        pairSet // edges between large nodes

	head       []int32 // per fill: first node, or -1
	prev, tail []int32 // neighbours in that list
	key        []int32 // list the node is in, or -1
	least      int32

	slot   []int32 // place in the bag plus 1, or 0
	mark   []int32 // time at which a node was met
	time   int32
	rows   []uint64 // adjacency within the bag
	listed []int32
	moved  []int32 // nodes outside the bag whose fill changed
	out    []int32
	triple []int32

	// The result: order[k] is eliminated when bag[bagStart[k]:bagStart[k+1]] are its neighbours.
	order    []int32
	bagStart []int32
	bag      []int32
	width    int
	work     int64 // table entries of the elimination: the sum of 2^(bag+1)
}

// resize gives s the length n, keeping its memory where it can; what it holds is left over from before.
func resize[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n, n+n/4)
	}
	return s[:n]
}

// zeroed is resize with every element zero.
func zeroed[T any](s []T, n int) []T {
	s = resize(s, n)
	clear(s)
	return s
}

// run orders all nodes of g. It gives up, answering false, where no node has at most limit neighbours any more or the work passes the given number. The width is then
// the least degree met that was too high, or the largest width so far.
func (o *minFill) run(g *graph, limit int, work int64) bool {
	limit = min(limit, maxWidth)
	o.load(g)
	o.order, o.bag, o.bagStart = o.order[:0], o.bag[:0], append(o.bagStart[:0], 0)
	o.width, o.work = 0, 0
	n := g.nodes()
	for len(o.order) < n {
		v := o.pick(int32(limit))
		if v < 0 {
			o.width = max(o.width, limit+1)
			return false
		}
		d := int(o.degree[v])
		o.width = max(o.width, d)
		o.work += 2 << d
		if o.work > work {
			return false
		}
		o.eliminate(v)
	}
	return true
}

// load copies the graph and counts the fill of every node.
func (o *minFill) load(g *graph) {
	n := g.nodes()
	o.off, o.size, o.room = resize(o.off, n), resize(o.size, n), resize(o.room, n)
	o.degree, o.dead, o.big = resize(o.degree, n), zeroed(o.dead, n), zeroed(o.big, n)
	o.fill = resize(o.fill, n)
	o.head = resize(o.head, fillKeys+1)
	for i := range o.head {
		o.head[i] = -1
	}
	o.prev, o.tail, o.key = resize(o.prev, n), resize(o.tail, n), resize(o.key, n)
	o.slot, o.mark = zeroed(o.slot, n), zeroed(o.mark, n)
	o.time = 0
	o.far.clear()
	const slack = 3
	o.cell = resize(o.cell, len(g.adj)+slack*n)
	at := 0
	for v := range n {
		adj, _ := g.row(int32(v))
		d := int32(len(adj))
		o.off[v], o.size[v], o.room[v], o.degree[v] = at, d, d+slack, d
		copy(o.cell[at:], adj)
		at += len(adj) + slack
		o.big[v] = d > large
	}
	o.triangles(g)
	for v := range n {
		o.key[v] = -1
		if !o.big[v] {
			continue
		}
		for _, w := range o.row(int32(v)) {
			if int(w) > v && o.big[w] {
				o.far.add(int32(v), w)
			}
		}
	}
	o.least = fillKeys
	for v := n - 1; v >= 0; v-- {
		o.place(int32(v))
	}
}

// triangles sets fill to the number of pairs of neighbours less the triangles through the node. Each triangle is found once, from its node of least degree.
func (o *minFill) triangles(g *graph) {
	n := g.nodes()
	below := func(u, v int32) bool {
		return o.degree[u] < o.degree[v] || o.degree[u] == o.degree[v] && u < v
	}
	o.triple = resize(o.triple, n+1)
	o.out = resize(o.out, len(g.adj)/2)
	at := int32(0)
	for v := range int32(n) {
		o.triple[v] = at
		for _, w := range o.row(v) {
			if below(v, w) {
				o.out[at] = w
				at++
			}
		}
	}
	o.triple[n] = at
	for v := range n {
		d := int64(o.degree[v])
		o.fill[v] = d * (d - 1) / 2
	}
	for v := range n {
		ups := o.out[o.triple[v]:o.triple[v+1]]
		if len(ups) < 2 {
			continue
		}
		o.time++
		for _, w := range ups {
			o.mark[w] = o.time
		}
		for _, w := range ups {
			for _, x := range o.out[o.triple[w]:o.triple[w+1]] {
				if o.mark[x] == o.time {
					o.fill[v]--
					o.fill[w]--
					o.fill[x]--
				}
			}
		}
	}
}

// row is the stored row of a node, dead nodes included where it is large.
func (o *minFill) row(v int32) []int32 { return o.cell[o.off[v] : o.off[v]+int(o.size[v])] }

// place moves v to the list of its fill.
func (o *minFill) place(v int32) {
	k := int32(min(o.fill[v], fillKeys))
	if o.key[v] == k {
		return
	}
	if o.key[v] >= 0 {
		o.unlink(v)
	}
	o.link(v, k)
}

func (o *minFill) link(v, k int32) {
	h := o.head[k]
	o.prev[v], o.tail[v], o.key[v] = -1, h, k
	if h >= 0 {
		o.prev[h] = v
	}
	o.head[k] = v
	o.least = min(o.least, k)
}

func (o *minFill) unlink(v int32) {
	p, t := o.prev[v], o.tail[v]
	if p >= 0 {
		o.tail[p] = t
	} else {
		o.head[o.key[v]] = t
	}
	if t >= 0 {
		o.prev[t] = p
	}
	o.key[v] = -1
}

// pick takes the node of least fill that has at most limit neighbours out of its list, -1 where there is none.
func (o *minFill) pick(limit int32) int32 {
	for ; o.least < fillKeys; o.least++ {
		for v := o.head[o.least]; v >= 0; v = o.head[o.least] {
			o.unlink(v)
			if o.degree[v] <= limit {
				return v
			}
			o.link(v, fillKeys) // parked until an elimination changes it
		}
	}
	return -1
}

// eliminate takes v out, joins its neighbours to each other, and updates all fill counts.
func (o *minFill) eliminate(v int32) {
	at := len(o.bag)
	for _, w := range o.row(v) {
		if !o.dead[w] {
			o.bag = append(o.bag, w)
		}
	}
	bag := o.bag[at:]
	o.order = append(o.order, v)
	o.bagStart = append(o.bagStart, int32(len(o.bag)))
	o.dead[v] = true
	d := len(bag)
	full := uint64(1)<<d - 1
	o.rows = zeroed(o.rows, d)
	for i, a := range bag {
		o.slot[a] = int32(i + 1)
	}
	for i, a := range bag {
		if o.big[a] {
			continue
		}
		row := o.row(a)
		drop := -1
		for k, x := range row {
			if s := o.slot[x]; s > 0 {
				o.rows[i] |= 1 << (s - 1)
				o.rows[s-1] |= 1 << i
			} else if x == v {
				drop = k
			}
		}
		row[drop] = row[len(row)-1]
		o.size[a]--
	}
	for i, a := range bag {
		if o.big[a] {
			for j := range i {
				if b := bag[j]; o.big[b] && o.far.has(a, b) {
					o.rows[i] |= 1 << j
					o.rows[j] |= 1 << i
				}
			}
			if o.size[a] > 2*o.degree[a] {
				o.sweep(a)
			}
		}
		o.degree[a]--
	}
	for i, a := range bag {
		// v had no edge to these neighbours of a, and takes the pairs with it.
		o.fill[a] -= int64(int(o.degree[a]) - bits.OnesCount64(o.rows[i]))
	}
	o.moved = o.moved[:0]
	for i, a := range bag {
		lacks := full &^ o.rows[i] &^ (1<<(i+1) - 1)
		if lacks == 0 {
			continue
		}
		if !o.big[a] {
			// The neighbours of a outside the bag, which no new edge of this elimination changes.
			o.time++
			for _, x := range o.row(a) {
				if o.slot[x] == 0 {
					o.mark[x] = o.time
				}
			}
		}
		for ; lacks != 0; lacks &= lacks - 1 {
			o.connect(bag, i, bits.TrailingZeros64(lacks))
		}
	}
	for _, a := range bag {
		o.slot[a] = 0
		o.place(a)
	}
	for _, x := range o.moved {
		o.place(x)
	}
}

// connect adds the edge between two nodes of the bag. Where the first is not large, its neighbours outside the bag carry the mark of the present time.
func (o *minFill) connect(bag []int32, i, j int) {
	a, b := bag[i], bag[j]
	common := 0
	for both := o.rows[i] & o.rows[j]; both != 0; both &= both - 1 {
		o.fill[bag[bits.TrailingZeros64(both)]]--
		common++
	}
	walk, other, marked := b, a, !o.big[a]
	if o.big[b] && (marked || o.size[a] < o.size[b]) {
		walk, other, marked = a, b, false
	}
	for _, x := range o.row(walk) {
		if o.dead[x] || o.slot[x] != 0 {
			continue
		}
		if marked && o.mark[x] == o.time || !marked && o.adjacent(x, other) {
			o.fill[x]--
			o.moved = append(o.moved, x)
			common++
		}
	}
	o.fill[a] += int64(int(o.degree[a]) - common)
	o.fill[b] += int64(int(o.degree[b]) - common)
	o.rows[i] |= 1 << j
	o.rows[j] |= 1 << i
	o.append(a, b)
	o.append(b, a)
	if o.big[a] && o.big[b] {
		o.far.add(a, b)
	}
}

// adjacent tells whether there is an edge between x and a large node.
func (o *minFill) adjacent(x, big int32) bool {
	if o.big[x] {
		return o.far.has(x, big)
	}
	for _, y := range o.row(x) {
		if y == big {
			return true
		}
	}
	return false
}

// append adds b to the row of a, which may make a large.
func (o *minFill) append(a, b int32) {
	if o.size[a] == o.room[a] {
		room := 2 * o.room[a]
		at := len(o.cell)
		if at+int(room) > cap(o.cell) {
			grown := make([]int32, at, at+at/2+int(room))
			copy(grown, o.cell)
			o.cell = grown
		}
		o.cell = o.cell[:at+int(room)]
		copy(o.cell[at:], o.row(a))
		o.off[a], o.room[a] = at, room
	}
	o.cell[o.off[a]+int(o.size[a])] = b
	o.size[a]++
	o.degree[a]++
	if o.degree[a] > large && !o.big[a] {
		o.big[a] = true
		for _, x := range o.row(a) {
			if o.big[x] && x != b {
				o.far.add(a, x)
			}
		}
	}
}

// sweep drops dead nodes from the row of a large node.
func (o *minFill) sweep(a int32) {
	row := o.row(a)
	k := int32(0)
	for _, x := range row {
		if !o.dead[x] {
			row[k] = x
			k++
		}
	}
	o.size[a] = k
}

// pairSet is a set of unordered pairs of nodes: open addressing, pair (u, v) with u < v as u<<32 | v, 0 for an empty place. The pair (0, 0) never occurs.
type pairSet struct {
	cells []uint64
	count int
}

func (s *pairSet) clear() {
	if s.count > 0 {
		clear(s.cells)
		s.count = 0
	}
}

func pairOf(u, v int32) uint64 {
	if u > v {
		u, v = v, u
	}
	return uint64(u)<<32 | uint64(uint32(v))
}

func (s *pairSet) has(u, v int32) bool {
	if s.count == 0 {
		return false
	}
	k := pairOf(u, v)
	mask := uint64(len(s.cells) - 1)
	for i := scramble(k) & mask; s.cells[i] != 0; i = (i + 1) & mask {
		if s.cells[i] == k {
			return true
		}
	}
	return false
}

func (s *pairSet) add(u, v int32) {
	if 2*(s.count+1) > len(s.cells) {
		old := s.cells
		s.cells = make([]uint64, max(1024, 2*len(old)))
		for _, k := range old {
			if k != 0 {
				s.put(k)
			}
		}
	}
	s.put(pairOf(u, v))
	s.count++
}

func (s *pairSet) put(k uint64) {
	mask := uint64(len(s.cells) - 1)
	i := scramble(k) & mask
	for s.cells[i] != 0 && s.cells[i] != k {
		i = (i + 1) & mask
	}
	s.cells[i] = k
}
