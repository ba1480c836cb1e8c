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

// fillNode is what is known of a node; it fills one cache line, as the nodes are met in no order.
type fillNode struct {
	off        int   // row: cell[off : off+size], with room for more
	fill       int64 // pairs of neighbours that are not adjacent
	size, room int32
	degree     int32 // living neighbours; size may count dead ones where the node is large
	key        int32 // list of nodes of equal fill that the node is in, or -1
	prev, next int32 // neighbours in that list, or -1
	slot       int32 // place in the bag in hand plus 1, or 0
	mark       int32 // time at which the node was met
	dead, big  bool
	_          [14]byte
}

// minFill is the workspace of one ordering after another.
type minFill struct {
	node  []fillNode
	cell  []int32
	far   pairSet // edges between large nodes
	head  []int32 // per fill: first node, or -1
	least int32   // no list below is occupied
	time  int32

	rows  []uint64 // adjacency within the bag
	moved []int32  // nodes outside the bag whose fill changed
	ups   []int32  // neighbours of higher degree, for the triangles
	upAt  []int32

	// The result: order[k] is eliminated when bag[bagStart[k]:bagStart[k+1]] are its neighbours.
	order    []int32
	bagStart []int32
	bag      []int32
	width    int
	work     int64 // table entries of the elimination: the sum of 2^(bag+1)
}

// run orders all nodes of g. It gives up, answering false, where no node has at most limit neighbours any more or the work passes the given number. The width is then
// the least degree met that was too high, or the largest width so far.
func (o *minFill) run(g *graph, limit int, work int64) bool {
	return o.eliminateAll(g, limit, work, nil)
}

// follow is run with a given order.
func (o *minFill) follow(g *graph, limit int, work int64, order []int32) bool {
	return o.eliminateAll(g, limit, work, order)
}

func (o *minFill) eliminateAll(g *graph, limit int, work int64, given []int32) bool {
	limit = min(limit, maxWidth)
	o.load(g)
	n := g.nodes()
	o.order, o.bag, o.bagStart = resize(o.order, n)[:0], resize(o.bag, len(g.adj))[:0], append(resize(o.bagStart, n+1)[:0], 0)
	o.width, o.work = 0, 0
	for len(o.order) < n {
		var v int32
		if given == nil {
			v = o.pick(int32(limit))
		} else if v = given[len(o.order)]; int(o.node[v].degree) > limit {
			v = -1
		}
		if v < 0 {
			o.width = max(o.width, limit+1)
			return false
		}
		d := int(o.node[v].degree)
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
	o.head = resize(o.head, fillKeys+1)
	for i := range o.head {
		o.head[i] = -1
	}
	o.time = 0
	o.far.clear()
	const slack = 3
	o.node = resize(o.node, n)
	o.cell = resize(o.cell, len(g.adj)+slack*n)
	at := 0
	for v := range n {
		adj, _ := g.row(int32(v))
		d := int32(len(adj))
		pairs := int64(d) * int64(d-1) / 2
		o.node[v] = fillNode{off: at, fill: pairs, size: d, room: d + slack, degree: d, key: -1, big: d > large}
		copy(o.cell[at:], adj)
		at += len(adj) + slack
	}
	o.triangles(g)
	for v := range o.node {
		if !o.node[v].big {
			continue
		}
		for _, w := range o.row(int32(v)) {
			if int(w) > v && o.node[w].big {
				o.far.add(int32(v), w)
			}
		}
	}
	o.least = fillKeys
	for v := n - 1; v >= 0; v-- {
		o.place(int32(v))
	}
}

// triangles takes the triangles through each node from its fill. Each triangle is found once, from its node of least degree.
func (o *minFill) triangles(g *graph) {
	n := g.nodes()
	o.upAt = resize(o.upAt, n+1)
	o.ups = resize(o.ups, len(g.adj)/2)
	at := int32(0)
	for v := range int32(n) {
		o.upAt[v] = at
		row := o.row(v)
		d := len(row)
		for _, w := range row {
			if e := int(g.start[w+1] - g.start[w]); d < e || d == e && v < w {
				o.ups[at] = w
				at++
			}
		}
	}
	o.upAt[n] = at
	for v := range n {
		ups := o.ups[o.upAt[v]:o.upAt[v+1]]
		if len(ups) < 2 {
			continue
		}
		o.time++
		for _, w := range ups {
			o.node[w].mark = o.time
		}
		for _, w := range ups {
			for _, x := range o.ups[o.upAt[w]:o.upAt[w+1]] {
				if o.node[x].mark == o.time {
					o.node[v].fill--
					o.node[w].fill--
					o.node[x].fill--
				}
			}
		}
	}
}

// row is the stored row of a node, dead nodes included where it is large.
func (o *minFill) row(v int32) []int32 {
	nd := &o.node[v]
	return o.cell[nd.off : nd.off+int(nd.size)]
}

// place moves v to the list of its fill.
func (o *minFill) place(v int32) {
	nd := &o.node[v]
	k := int32(min(nd.fill, fillKeys))
	if nd.key == k {
		return
	}
	if nd.key >= 0 {
		o.unlink(v)
	}
	o.link(v, k)
}

func (o *minFill) link(v, k int32) {
	nd := &o.node[v]
	h := o.head[k]
	nd.prev, nd.next, nd.key = -1, h, k
	if h >= 0 {
		o.node[h].prev = v
	}
	o.head[k] = v
	o.least = min(o.least, k)
}

func (o *minFill) unlink(v int32) {
	nd := &o.node[v]
	if nd.prev >= 0 {
		o.node[nd.prev].next = nd.next
	} else {
		o.head[nd.key] = nd.next
	}
	if nd.next >= 0 {
		o.node[nd.next].prev = nd.prev
	}
	nd.key = -1
}

// pick takes the node of least fill that has at most limit neighbours out of its list, -1 where there is none.
func (o *minFill) pick(limit int32) int32 {
	for ; o.least < fillKeys; o.least++ {
		for v := o.head[o.least]; v >= 0; v = o.head[o.least] {
			o.unlink(v)
			if o.node[v].degree <= limit {
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
		if !o.node[w].dead {
			o.bag = append(o.bag, w)
		}
	}
	bag := o.bag[at:]
	o.order = append(o.order, v)
	o.bagStart = append(o.bagStart, int32(len(o.bag)))
	o.node[v].dead = true
	d := len(bag)
	full := uint64(1)<<d - 1
	o.rows = zeroed(o.rows, d)
	rows := o.rows
	for i, a := range bag {
		o.node[a].slot = int32(i + 1)
	}
	for i, a := range bag {
		nd := &o.node[a]
		if nd.big {
			for j := range i {
				if b := bag[j]; o.node[b].big && o.far.has(a, b) {
					rows[i] |= 1 << j
					rows[j] |= 1 << i
				}
			}
			if nd.size > 2*nd.degree {
				o.sweep(a)
			}
			continue
		}
		row := o.row(a)
		drop := -1
		for k, x := range row {
			if s := o.node[x].slot; s > 0 {
				rows[i] |= 1 << (s - 1)
				rows[s-1] |= 1 << i
			} else if x == v {
				drop = k
			}
		}
		row[drop] = row[len(row)-1]
		nd.size--
	}
	for i, a := range bag {
		// v had no edge to these neighbours of a, and takes the pairs with it.
		nd := &o.node[a]
		nd.degree--
		nd.fill -= int64(int(nd.degree) - bits.OnesCount64(rows[i]))
	}
	o.moved = o.moved[:0]
	for i, a := range bag {
		lacks := full &^ rows[i] &^ (1<<(i+1) - 1)
		if lacks == 0 {
			continue
		}
		if !o.node[a].big {
			// The neighbours of a outside the bag, which no new edge of this elimination changes.
			o.time++
			for _, x := range o.row(a) {
				if o.node[x].slot == 0 {
					o.node[x].mark = o.time
				}
			}
		}
		for ; lacks != 0; lacks &= lacks - 1 {
			o.connect(bag, i, bits.TrailingZeros64(lacks))
		}
	}
	for _, a := range bag {
		o.node[a].slot = 0
		o.place(a)
	}
	for _, x := range o.moved {
		o.place(x)
	}
}

// connect adds the edge between two nodes of the bag. Where the first is not large, its neighbours outside the bag carry the mark of the present time.
func (o *minFill) connect(bag []int32, i, j int) {
	a, b := bag[i], bag[j]
	na, nb := &o.node[a], &o.node[b]
	common := 0
	for both := o.rows[i] & o.rows[j]; both != 0; both &= both - 1 {
		o.node[bag[bits.TrailingZeros64(both)]].fill--
		common++
	}
	walk, other, marked := b, a, !na.big
	if nb.big && (marked || na.size < nb.size) {
		walk, other, marked = a, b, false
	}
	for _, x := range o.row(walk) {
		nx := &o.node[x]
		if nx.dead || nx.slot != 0 {
			continue
		}
		if marked && nx.mark == o.time || !marked && o.adjacent(x, other) {
			nx.fill--
			o.moved = append(o.moved, x)
			common++
		}
	}
	na.fill += int64(int(na.degree) - common)
	nb.fill += int64(int(nb.degree) - common)
	o.rows[i] |= 1 << j
	o.rows[j] |= 1 << i
	o.append(a, b)
	o.append(b, a)
	if na.big && nb.big {
		o.far.add(a, b)
	}
}

// adjacent tells whether there is an edge between x and a large node.
func (o *minFill) adjacent(x, big int32) bool {
	if o.node[x].big {
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
	nd := &o.node[a]
	if nd.size == nd.room {
		room := 2 * nd.room
		at := len(o.cell)
		if at+int(room) > cap(o.cell) {
			grown := make([]int32, at, at+at/2+int(room))
			copy(grown, o.cell)
			o.cell = grown
		}
		o.cell = o.cell[:at+int(room)]
		copy(o.cell[at:], o.row(a))
		nd.off, nd.room = at, room
	}
	o.cell[nd.off+int(nd.size)] = b
	nd.size++
	nd.degree++
	if nd.degree > large && !nd.big {
		nd.big = true
		for _, x := range o.row(a) {
			if o.node[x].big && x != b {
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
		if !o.node[x].dead {
			row[k] = x
			k++
		}
	}
	o.node[a].size = k
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
