package exact

import (
	"slices"

	"maskpair/gds/arena"
)

// This file explains why a graph cannot be satisfied: it finds contradictory cycles, those that go through an odd number of edges of the opposite kind (König 1936; Harary 1953 for
// edges of both kinds). Every search goes breadth first over neighbours in ascending order, so that one graph always gets the same cycle.

// CycleFinder answers questions about the contradictory cycles of one graph. Weights do not matter, but an edge of weight 0 or less does not count. It may be used by one goroutine at a time.
type CycleFinder struct {
	edges []Edge
	start []int32 // row of a node in half
	half  []halfEdge
	block []int32 // per edge: number of its biconnected block, -1 for a loop
	odd   []bool  // per block: has a contradictory cycle
	roots []int32 // the lesser ends of the edges that contradict a spanning forest, ascending: every contradictory cycle goes through one
	loop  int32   // least node with a loop of the opposite kind, -1 if there is none
	from  []int32 // per state of a walk: half-edge by which it was reached
	mark  []int32
	depth []int32
	time  int32
	queue []int32
	spot  []int32
	side  []uint8
	plain bool // no loops and no parallel edges: no cycle is smaller than a triangle
}

// halfEdge is an edge as seen from one end.
type halfEdge struct {
	to, edge int32
	ask      uint8 // 1: opposite masks
}

// ShortestOddCycle gives the nodes of the smallest contradictory cycle through an edge, in order, beginning with its ends U and V; nil where no contradictory cycle goes through it. A
// loop of the opposite kind is a cycle of one node, two parallel edges that contradict each other are one of two.
//
// The cycle is simple. The smallest closed walk is searched for in the doubled graph, one node for each node and parity. Where that walk meets a node twice, a simple cycle is
// searched for exhaustively, up to a fixed number of steps; beyond, the cycle returned is simple and contradictory, but there may be a smaller one.
func ShortestOddCycle(n int, edges []Edge, through int) []int32 {
	return NewCycleFinder(nil, n, edges).Through(through)
}

// SmallestOddCycle gives the nodes of the smallest contradictory cycle of a graph, in order, beginning with the least node and going on to the lesser of its two neighbours; nil where there is none.
//
// The answer is exact as long as the walks cross at most 2^26 edges, which is always so where nodes times edges are no more than that, and nearly always where the
// smallest cycle is short; beyond, it is the smallest of those found.
func SmallestOddCycle(n int, edges []Edge) []int32 {
	c, _ := NewCycleFinder(nil, n, edges).Smallest()
	return c
}

// NewCycleFinder prepares the search in a graph, in linear time, in memory of the room; nil: the heap.
func NewCycleFinder(room *arena.Slab, n int, edges []Edge) *CycleFinder {
	f := &CycleFinder{edges: edges, start: fitZeroed[int32](room, nil, n+1), loop: -1, plain: inOrder(edges)}
	counts := func(e *Edge) bool { return e.Weight > 0 && e.U != e.V }
	for i := range edges {
		if e := &edges[i]; counts(e) {
			f.start[e.U+1]++
			f.start[e.V+1]++
		} else if e.Weight > 0 && !e.Same && (f.loop < 0 || e.U < f.loop) {
			f.loop = e.U
		}
	}
	for i := range n {
		f.start[i+1] += f.start[i]
	}
	// From edges in order, every row gets first the lesser nodes and then the greater, all in ascending order.
	next := fit[int32](room, nil, n)
	copy(next, f.start)
	f.half = fit[halfEdge](room, nil, int(f.start[n]))
	for i := range edges {
		e := &edges[i]
		if !counts(e) {
			continue
		}
		ask := uint8(1)
		if e.Same {
			ask = 0
		}
		f.half[next[e.U]] = halfEdge{to: e.V, edge: int32(i), ask: ask}
		f.half[next[e.V]] = halfEdge{to: e.U, edge: int32(i), ask: ask}
		next[e.U]++
		next[e.V]++
	}
	if !f.plain {
		f.plain = f.loop < 0
		for v := range int32(n) {
			row := f.row(v)
			slices.SortStableFunc(row, func(a, b halfEdge) int { return int(a.to) - int(b.to) })
			for k := 1; k < len(row); k++ {
				f.plain = f.plain && row[k].to != row[k-1].to
			}
		}
	}
	f.from, f.mark, f.depth = fit[int32](room, nil, 2*n), fitZeroed[int32](room, nil, 2*n), fit[int32](room, nil, 2*n)
	f.spot, f.side = fitZeroed[int32](room, nil, n), fitZeroed[uint8](room, nil, n)
	f.cut(room)
	return f
}

// inOrder tells whether edges are in strict order by U and V, and U below V: there are no loops and no parallel edges then.
func inOrder(edges []Edge) bool {
	for i := range edges {
		e := &edges[i]
		if e.U >= e.V {
			return false
		}
		if i > 0 {
			if b := &edges[i-1]; b.U > e.U || b.U == e.U && b.V >= e.V {
				return false
			}
		}
	}
	return true
}

func (f *CycleFinder) row(v int32) []halfEdge { return f.half[f.start[v]:f.start[v+1]] }

// cut finds the biconnected blocks (Hopcroft and Tarjan 1973), and which of them hold contradictory cycles: those with an edge that contradicts the spanning forest of the walk.
func (f *CycleFinder) cut(room *arena.Slab) {
	n := len(f.start) - 1
	f.block = fit[int32](room, nil, len(f.edges))
	for e := range f.block {
		f.block[e] = -1
	}
	rank, low, next := fitZeroed[int32](room, nil, n), fit[int32](room, nil, n), fit[int32](room, nil, n)
	by := fit[int32](room, nil, n) // edge by which a node was reached
	side := fitZeroed[uint8](room, nil, n)
	clash := fitZeroed[bool](room, nil, n)
	path, open := fit[int32](room, nil, n)[:0], fit[int32](room, nil, len(f.edges))[:0]
	var bad []int32
	count := int32(0)
	enter := func(v, edge int32) {
		count++
		rank[v], low[v], next[v], by[v] = count, count, f.start[v], edge
		path = append(path, v)
	}
	for root := range int32(n) {
		if rank[root] != 0 {
			continue
		}
		enter(root, -1)
		for len(path) > 0 {
			v := path[len(path)-1]
			if next[v] < f.start[v+1] {
				h := f.half[next[v]]
				next[v]++
				if h.edge == by[v] {
					continue
				}
				if rank[h.to] == 0 {
					side[h.to] = side[v] ^ h.ask
					open = append(open, h.edge)
					enter(h.to, h.edge)
				} else if rank[h.to] < rank[v] {
					open = append(open, h.edge)
					low[v] = min(low[v], rank[h.to])
					if side[h.to] != side[v]^h.ask {
						bad = append(bad, h.edge)
						clash[min(v, h.to)] = true
					}
				}
				continue
			}
			path = path[:len(path)-1]
			if len(path) == 0 {
				break
			}
			u := path[len(path)-1]
			low[u] = min(low[u], low[v])
			if low[v] < rank[u] {
				continue
			}
			for {
				e := open[len(open)-1]
				open = open[:len(open)-1]
				f.block[e] = int32(len(f.odd))
				if e == by[v] {
					break
				}
			}
			f.odd = append(f.odd, false)
		}
	}
	for _, e := range bad {
		f.odd[f.block[e]] = true
	}
	for v, c := range clash {
		if c {
			f.roots = append(f.roots, int32(v))
		}
	}
}

// Smallest is SmallestOddCycle; it also tells whether the answer is exact.
func (f *CycleFinder) Smallest() (cycle []int32, sure bool) {
	if f.loop >= 0 {
		return []int32{f.loop}, true
	}
	const effort = 1 << 26
	var best []int32
	spent := 0
	for _, root := range f.roots {
		if spent > effort {
			return arrange(best), false
		}
		most := anyLength
		if best != nil {
			most = int32(len(best)) - 1
		}
		if c := f.near(root, most, &spent); c != nil {
			best = c
		}
	}
	return arrange(best), true
}

// near gives the smallest of the contradictory cycles that the edges outside a breadth-first tree close with it, of at most the given length, or nil. The smallest cycle of all is
// among them when the root lies on it: all its nodes are at least as near to the root in the tree as on the cycle, and one of its edges must contradict the tree.
func (f *CycleFinder) near(root, most int32, spent *int) []int32 {
	f.time++
	// State 2*node stands for the node; where the tree asks for the other mask than the root's, side says so.
	f.mark[2*root], f.from[2*root], f.depth[2*root], f.side[root] = f.time, -1, 0, 0
	f.queue = append(f.queue[:0], root)
	bx, by := int32(-1), int32(-1)
	for at := 0; at < len(f.queue); at++ {
		v := f.queue[at]
		d := f.depth[2*v]
		if 2*d+1 > most {
			break
		}
		*spent += len(f.row(v))
		for _, h := range f.row(v) {
			side := f.side[v] ^ h.ask
			if f.mark[2*h.to] != f.time {
				f.mark[2*h.to], f.from[2*h.to], f.depth[2*h.to], f.side[h.to] = f.time, v, d+1, side
				f.queue = append(f.queue, h.to)
			} else if f.side[h.to] != side && d+f.depth[2*h.to]+1 <= most {
				bx, by = v, h.to
				most = d + f.depth[2*h.to]
			}
		}
	}
	if bx < 0 {
		return nil
	}
	// Up from both ends to where they meet.
	var left, right []int32
	for bx != by {
		if f.depth[2*bx] >= f.depth[2*by] {
			left = append(left, bx)
			bx = f.from[2*bx]
		} else {
			right = append(right, by)
			by = f.from[2*by]
		}
	}
	cycle := append(left, bx)
	for i := len(right) - 1; i >= 0; i-- {
		cycle = append(cycle, right[i])
	}
	return cycle
}

// arrange turns a cycle so that it begins with the least node and goes on to the lesser of its neighbours.
func arrange(c []int32) []int32 {
	if len(c) < 2 {
		return c
	}
	at := 0
	for i, v := range c {
		if v < c[at] {
			at = i
		}
	}
	n := len(c)
	step := 1
	if c[(at+n-1)%n] < c[(at+1)%n] {
		step = n - 1
	}
	out := make([]int32, n)
	for i := range out {
		out[i] = c[(at+i*step)%n]
	}
	return out
}

// detours is how many steps the search for a simple cycle may take where the smallest walk is none.
const detours = 1 << 20

// Through is ShortestOddCycle.
func (f *CycleFinder) Through(edge int) []int32 {
	e := f.edges[edge]
	if e.Weight <= 0 {
		return nil
	}
	if e.U == e.V {
		if e.Same {
			return nil
		}
		return []int32{e.U}
	}
	// Every edge of a block with a contradictory cycle is on one, and no edge of another is.
	if !f.odd[f.block[edge]] {
		return nil
	}
	goal := f.goal(edge)
	// Backwards, from the goal, so that depth bounds from below how long the way from any state to the goal is.
	f.walk(goal, 2*e.U, int32(edge), anyLength)
	path := f.follow(2*e.U, goal)
	if f.isSimple(path) {
		return closing(path)
	}
	detour := f.detour(int32(edge), path)
	f.walk(goal, -1, int32(edge), anyLength)
	steps := 0
	for length := f.depth[2*e.U]; int(length) < len(detour)-1 && steps < detours; length++ {
		if found := f.deepen(2*e.U, goal, length, int32(edge), detours, &steps); found != nil {
			return closing(found)
		}
	}
	return detour
}

// SmallestThrough gives the smallest of the smallest contradictory cycles through some edges, which are named by their places in the list; nil where none is on one. It is sure as
// long as the walks look at no more than 2^26 edges; beyond, it is the smallest of those found.
func (f *CycleFinder) SmallestThrough(edges []int) (cycle []int32, sure bool) {
	const effort = 1 << 26
	spent := 0
	for _, edge := range edges {
		if len(cycle) == 1 || len(cycle) == 3 && f.plain {
			break
		}
		if spent > effort {
			return cycle, false
		}
		e := f.edges[edge]
		found := []int32(nil)
		switch {
		case e.Weight <= 0 || e.U != e.V && !f.odd[f.block[edge]]:
			continue
		case e.U == e.V:
			found = f.Through(edge)
		default:
			most := anyLength
			if cycle != nil {
				most = int32(len(cycle)) - 2 // steps beside the edge itself
			}
			goal := f.goal(edge)
			spent += f.walk(goal, 2*e.U, int32(edge), most)
			if f.mark[2*e.U] != f.time {
				continue // no shorter than what there is
			}
			if path := f.follow(2*e.U, goal); f.isSimple(path) {
				found = closing(path)
			} else {
				spent += len(f.half) + detours
				found = f.Through(edge)
			}
		}
		if found != nil && (cycle == nil || len(found) < len(cycle)) {
			cycle = found
		}
	}
	return cycle, true
}

// closing turns the states of a path from U to V into the cycle U, V, and back along the path.
func closing(path []int32) []int32 {
	out := make([]int32, 0, len(path))
	out = append(out, path[0]>>1)
	for i := len(path) - 1; i > 0; i-- {
		out = append(out, path[i]>>1)
	}
	return out
}

// goal is the state of the second end of an edge that a walk from its first end, at state 2*U, must reach to close a contradictory cycle with the edge.
func (f *CycleFinder) goal(edge int) int32 {
	e := f.edges[edge]
	if e.Same {
		return 2*e.V + 1
	}
	return 2 * e.V
}

// anyLength is no bound on the length of a walk.
const anyLength = int32(1) << 30

// walk goes breadth first over the states of the block of an edge, but not over the edge, from one state until another is reached, or over all of them where that is -1; it goes no
// farther than most steps. A state is 2*node + parity. It returns the edges that it looked at.
func (f *CycleFinder) walk(from, until, edge, most int32) (looked int) {
	f.time++
	f.mark[from], f.depth[from], f.from[from] = f.time, 0, -1
	f.queue = append(f.queue[:0], from)
	for at := 0; at < len(f.queue) && f.queue[at] != until; at++ {
		state := f.queue[at]
		if f.depth[state] == most {
			break
		}
		row := f.row(state >> 1)
		looked += len(row)
		for _, h := range row {
			if h.edge == edge || f.block[h.edge] != f.block[edge] {
				continue
			}
			next := 2*h.to + (state&1 ^ int32(h.ask))
			if f.mark[next] != f.time {
				f.mark[next], f.depth[next], f.from[next] = f.time, f.depth[state]+1, state
				f.queue = append(f.queue, next)
			}
		}
	}
	return looked
}

// follow gives the states from one to the other, the beginning of the last walk.
func (f *CycleFinder) follow(state, goal int32) []int32 {
	path := []int32{state}
	for state != goal {
		state = f.from[state]
		path = append(path, state)
	}
	return path
}

// isSimple tells whether a path of states meets no node twice.
func (f *CycleFinder) isSimple(path []int32) bool {
	ok := true
	for _, s := range path {
		ok = ok && f.spot[s>>1] == 0
		f.spot[s>>1] = 1
	}
	for _, s := range path {
		f.spot[s>>1] = 0
	}
	return ok
}

// deepen searches, depth first, for a simple path of the given number of edges between two states. The last walk, over all states from the goal, says where the goal is too far off.
func (f *CycleFinder) deepen(from, goal, length, edge int32, effort int, steps *int) []int32 {
	path, next := []int32{from}, []int32{f.start[from>>1]}
	f.spot[from>>1] = 1
	defer func() {
		for _, s := range path {
			f.spot[s>>1] = 0
		}
	}()
	for len(path) > 0 {
		state := path[len(path)-1]
		if state == goal {
			return path // no shorter than length, or an earlier call would have found it
		}
		k := &next[len(next)-1]
		if *k == f.start[state>>1+1] || *steps >= effort {
			f.spot[state>>1] = 0
			path, next = path[:len(path)-1], next[:len(next)-1]
			continue
		}
		h := f.half[*k]
		*k++
		*steps++
		to := 2*h.to + (state&1 ^ int32(h.ask))
		if h.edge == edge || f.block[h.edge] != f.block[edge] || f.spot[h.to] != 0 || to == goal^1 {
			continue
		}
		if f.mark[to] == f.time && int32(len(path))+f.depth[to] <= length {
			f.spot[h.to] = 1
			path, next = append(path, to), append(next, f.start[h.to])
		}
	}
	return nil
}
