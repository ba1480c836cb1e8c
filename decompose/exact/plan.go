package exact

import (
	"math/bits"
	"slices"
)

// This file turns an elimination order into a plan: which table is made of which, in an order in which the tables form a stack. The plan depends on the edges alone, so that
// it can be carried out many times with other weights.

// plan is an elimination of all nodes of a graph. Nodes are known by their rank: the place in the order in which they are eliminated, children before parents, so that the
// messages that a node takes in are the topmost of the stack when its turn comes.
type plan struct {
	node     []int32 // by rank
	bagStart []int32
	bag      []int32 // ranks of the neighbours at the elimination, ascending
	span     []int32 // by rank: nodes in the subtree of the elimination tree
	refStart []int32 // edges of a rank to later ones
	ref      []planEdge
	back     []int64 // by rank: first word of its back-pointers; one more at the end
	work     int64   // the sum of 2^(bag+1)
	peak     int64   // entries that the stack of messages needs
	width    int

	raw, first, sibling, todo, rank []int32 // scratch
	need                            []int64
	kids                            []int32
}

// planEdge is an edge from the node eliminated first to a later one.
type planEdge struct {
	slot int32 // place of the later one in the bag
	half int32 // entry of the row of the first one in the graph
}

// make follows the order that o has just found for g.
func (p *plan) make(g *graph, o *minFill) {
	n := g.nodes()
	p.work, p.width = o.work, o.width
	// raw is the place in the order of o; the parent of a node is the neighbour eliminated next.
	p.raw = resize(p.raw, n)
	for k, v := range o.order {
		p.raw[v] = int32(k)
	}
	p.first, p.sibling = resize(p.first, n), resize(p.sibling, n)
	for k := range p.first {
		p.first[k] = -1
	}
	p.need = resize(p.need, n)
	p.node, p.rank, p.span = resize(p.node, n), resize(p.rank, n), resize(p.span, n)
	var roots []int32
	p.peak = 0
	// need[k] is the stack that the subtree of k needs. Taking the child with the largest excess over its own message first is best (Liu 1986, for the stack of the multifrontal method).
	for k := range int32(n) {
		p.need[k] = p.arrange(o, k)
		bag := o.bag[o.bagStart[k]:o.bagStart[k+1]]
		if len(bag) == 0 {
			roots = append(roots, k)
			p.peak = max(p.peak, p.need[k])
			continue
		}
		parent := p.raw[bag[0]]
		for _, w := range bag[1:] {
			parent = min(parent, p.raw[w])
		}
		p.sibling[k] = p.first[parent]
		p.first[parent] = k
	}
	p.number(o, roots)
	p.fill(g, o)
}

// arrange sorts the children of k, and returns the stack that its subtree needs.
func (p *plan) arrange(o *minFill, k int32) int64 {
	size := func(k int32) int64 { return 1 << (o.bagStart[k+1] - o.bagStart[k]) }
	if p.first[k] < 0 {
		return size(k)
	}
	if p.sibling[p.first[k]] < 0 {
		return max(p.need[p.first[k]], size(k))
	}
	p.kids = p.kids[:0]
	for c := p.first[k]; c >= 0; c = p.sibling[c] {
		p.kids = append(p.kids, c)
	}
	slices.SortFunc(p.kids, func(a, b int32) int {
		if ea, eb := p.need[a]-size(a), p.need[b]-size(b); ea != eb {
			if ea > eb {
				return -1
			}
			return 1
		}
		return int(a - b)
	})
	var held, most int64
	p.first[k] = p.kids[0]
	for i, c := range p.kids {
		most = max(most, held+p.need[c])
		held += size(c)
		p.sibling[c] = -1
		if i+1 < len(p.kids) {
			p.sibling[c] = p.kids[i+1]
		}
	}
	return max(most, size(k))
}

// number ranks all nodes, each after its children.
func (p *plan) number(o *minFill, roots []int32) {
	next := int32(0)
	todo := p.todo[:0]
	for _, r := range roots {
		todo = append(todo, r)
		for len(todo) > 0 {
			k := todo[len(todo)-1]
			if c := p.first[k]; c >= 0 {
				p.first[k] = p.sibling[c]
				todo = append(todo, c)
				continue
			}
			todo = todo[:len(todo)-1]
			p.node[next] = o.order[k]
			p.rank[o.order[k]] = next
			next++
		}
	}
	p.todo = todo
}

// fill writes the bags, the edges and the place of the back-pointers by rank.
func (p *plan) fill(g *graph, o *minFill) {
	n := g.nodes()
	p.bagStart, p.bag = append(resize(p.bagStart, n+1)[:0], 0), resize(p.bag, len(o.bag))[:0]
	p.refStart, p.ref = append(resize(p.refStart, n+1)[:0], 0), resize(p.ref, len(g.adj)/2)[:0]
	p.back = append(resize(p.back, n+1)[:0], 0)
	for r := range p.span {
		p.span[r] = 1
	}
	slot := p.first // all -1 again; place in the present bag by rank
	slot = resize(slot, n)
	words := int64(0)
	for r := range int32(n) {
		v := p.node[r]
		k := p.raw[v]
		at := len(p.bag)
		for _, w := range o.bag[o.bagStart[k]:o.bagStart[k+1]] {
			p.bag = append(p.bag, p.rank[w])
		}
		bag := p.bag[at:]
		insertionSort(bag)
		p.bagStart = append(p.bagStart, int32(len(p.bag)))
		for i, w := range bag {
			slot[w] = int32(i)
		}
		for h := g.start[v]; h < g.start[v+1]; h++ {
			if w := p.rank[g.adj[h]]; w > r {
				p.ref = append(p.ref, planEdge{slot[w], h})
			}
		}
		p.refStart = append(p.refStart, int32(len(p.ref)))
		words += backWords(len(bag))
		p.back = append(p.back, words)
		if len(bag) > 0 {
			p.span[bag[0]] += p.span[r]
		}
	}
}

// backWords is the number of words for the back-pointers of a node with d neighbours: one bit for each of their masks.
func backWords(d int) int64 {
	return (1<<d + 63) / 64
}

// memory is the number of bytes that carrying out the plan needs.
func (p *plan) memory() int64 {
	return 8 * (p.peak + p.back[len(p.back)-1] + 2<<p.width)
}

// insertionSort sorts a short slice.
func insertionSort(s []int32) {
	for i := 1; i < len(s); i++ {
		v := s[i]
		k := i
		for ; k > 0 && s[k-1] > v; k-- {
			s[k] = s[k-1]
		}
		s[k] = v
	}
}

// tables is the memory in which plans are carried out, one after another.
type tables struct {
	stack    []int64
	off, on  []int64 // the table of the node in hand, for its mask A and B
	back     []uint64
	step     [maxWidth + 1]int
	coupling [maxWidth]int64
}

// solve carries out a plan with the given weights: s of the edges in the order of p.ref, h of the nodes by rank. It returns the least energy; decode then gives an
// assignment that has it. Every entry is a sum of distinct terms of the graph, so the caller's bound holds for it.
func (t *tables) solve(p *plan, s, h []int64) int64 {
	t.stack = resize(t.stack, int(p.peak))
	t.off, t.on = resize(t.off, 1<<p.width), resize(t.on, 1<<p.width)
	t.back = resize(t.back, int(p.back[len(p.back)-1]))
	var total int64
	top := 0
	for r := range p.span {
		bag := p.bag[p.bagStart[r]:p.bagStart[r+1]]
		d := len(bag)
		size := 1 << d
		off, on := t.off[:size], t.on[:size]
		t.own(p, r, d, s, h[r])
		first := int32(r) - p.span[r]
		for c := int32(r) - 1; c > first; c -= p.span[c] {
			rest := p.bag[p.bagStart[c]+1 : p.bagStart[c+1]]
			top -= 2 << len(rest)
			t.take(t.stack[top:top+2<<len(rest)], rest, bag)
		}
		back := t.back[p.back[r]:p.back[r+1]]
		if d == 0 {
			back[0] = 0
			if on[0] < off[0] {
				back[0] = 1
			}
			total += min(off[0], on[0])
			continue
		}
		choose(off, on, t.stack[top:top+size], back)
		top += size
	}
	return total
}

// own fills the table of a node with its unary term and its edges.
func (t *tables) own(p *plan, r, d int, s []int64, h int64) {
	clear(t.coupling[:d])
	var all int64
	a, b := p.refStart[r], p.refStart[r+1]
	for k := a; k < b; k++ {
		t.coupling[p.ref[k].slot] = s[k]
		all += s[k]
	}
	off, on := t.off, t.on
	// All neighbours on A: every edge counts for mask A and none for B. Each bit of the index moves one neighbour to B.
	off[0], on[0] = all, h
	for i := range d {
		c := t.coupling[i]
		half := 1 << i
		lo, hi := off[:half], off[half:2*half]
		for k, e := range lo {
			hi[k] = e - c
		}
		lo, hi = on[:half], on[half:2*half]
		for k, e := range lo {
			hi[k] = e + c
		}
	}
}

// take adds the message of a child. Its index has the node in hand as lowest bit, and then rest, a subset of bag in the same order.
func (t *tables) take(m []int64, rest, bag []int32) {
	size := 1 << len(bag)
	off, on := t.off[:size], t.on[:size]
	// Where rest begins like the bag, the message is read in runs. Between runs, step[b] is what a carry into bit b of the table's index adds to the message's: the weight of the bit
	// less those of the bits between the run and it, which go back to 0.
	same := 0
	for same < len(rest) && rest[same] == bag[same] {
		same++
	}
	if same == len(rest) && len(rest) < len(bag) {
		// The whole message again and again.
		for i := 0; i < size; i += 1 << same {
			addPairs(off[i:i+1<<same], on[i:i+1<<same], m)
		}
		return
	}
	sum, k := 0, same
	for b := same; b < len(bag); b++ {
		weight := 0
		if k < len(rest) && rest[k] == bag[b] {
			weight = 2 << k
			k++
		}
		t.step[b] = weight - sum
		sum += weight
	}
	t.step[len(bag)] = 0
	at := 0
	if same == 0 {
		for i := range off {
			off[i] += m[at]
			on[i] += m[at+1]
			at += t.step[bits.TrailingZeros(uint(i+1))]
		}
		return
	}
	run := 1 << same
	for i := 0; i < size; i += run {
		addPairs(off[i:i+run], on[i:i+run], m[at:at+2*run])
		at += t.step[bits.TrailingZeros(uint(i+run))]
	}
}

// addPairs adds the even entries of m to off, the odd ones to on.
func addPairs(off, on, m []int64) {
	on, m = on[:len(off)], m[:2*len(off)]
	for len(off) >= 4 && len(on) >= 4 && len(m) >= 8 {
		off[0] += m[0]
		on[0] += m[1]
		off[1] += m[2]
		on[1] += m[3]
		off[2] += m[4]
		on[2] += m[5]
		off[3] += m[6]
		on[3] += m[7]
		off, on, m = off[4:], on[4:], m[8:]
	}
	for i := range off {
		off[i] += m[2*i]
		on[i] += m[2*i+1]
	}
}

// choose writes the lesser of both tables to m, and a bit where that is mask B; of equal ones A is taken.
func choose(off, on, m []int64, back []uint64) {
	on, m = on[:len(off)], m[:len(off)]
	for w := range back {
		var word uint64
		lo := w * 64
		hi := min(lo+64, len(off))
		for i := lo; i < hi; i++ {
			a, b := off[i], on[i]
			m[i] = min(a, b)
			word |= uint64(b-a) >> 63 << (i - lo) // the sign of the difference, which is below 2^63
		}
		back[w] = word
	}
}

// decode writes the masks by rank.
func (t *tables) decode(p *plan, x []uint8) {
	for r := len(p.span) - 1; r >= 0; r-- {
		idx := 0
		for i, w := range p.bag[p.bagStart[r]:p.bagStart[r+1]] {
			idx |= int(x[w]) << i
		}
		x[r] = uint8(t.back[p.back[r]+int64(idx>>6)] >> (idx & 63) & 1)
	}
}
