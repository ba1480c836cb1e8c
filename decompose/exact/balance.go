package exact

import "maskpair/gds/arena"

// This file settles, in linear time, the components whose wishes do not contradict each other round any cycle (Harary's balanced signed graphs; König 1936 where all
// edges are of the opposite kind). Such a component has two assignments without a broken edge, one the flip of the other.

// parity is a union-find structure that knows for each node whether it is alike or opposite to its representative.
type parity struct {
	link []int32 // parent, or minus the size for a representative
	flip []uint8 // against the parent
}

func newParity(n int) *parity {
	p := new(parity)
	p.reset(nil, n)
	return p
}

// reset makes every one of n nodes its own representative.
func (p *parity) reset(room *arena.Slab, n int) {
	p.link, p.flip = fit(room, p.link, n), fitZeroed(room, p.flip, n)
	for i := range p.link {
		p.link[i] = -1
	}
}

// find gives the representative of i and the parity of i against it, and shortens the way (path halving).
func (p *parity) find(i int32) (int32, uint8) {
	var f uint8
	for p.link[i] >= 0 {
		up := p.link[i]
		if p.link[up] >= 0 {
			p.flip[i] ^= p.flip[up]
			p.link[i] = p.link[up]
		}
		f ^= p.flip[i]
		i = p.link[i]
	}
	return i, f
}

// join makes u and v alike (f 0) or opposite (f 1). It answers false where they are already joined the other way.
func (p *parity) join(u, v int32, f uint8) bool {
	a, fa := p.find(u)
	b, fb := p.find(v)
	if a == b {
		return fa^fb == f
	}
	if p.link[a] > p.link[b] {
		a, b = b, a
	}
	p.link[a] += p.link[b]
	p.link[b] = a
	p.flip[b] = fa ^ fb ^ f
	return true
}

// unlimited stands for the cost of a side that a held node forbids; it is above every sum of weights.
const unlimited = int64(1) << 62

// addLimited adds two numbers of which each is unlimited or part of a sum below unlimited.
func addLimited(a, b int64) int64 {
	if a == unlimited || b == unlimited {
		return unlimited
	}
	return a + b
}

// settler settles what is balanced.
type settler struct {
	room  *arena.Slab // nil: the heap
	uf    parity
	odd   []bool     // by representative: not settled
	first []uint8    // by representative: 0 not met, else 2 plus the parity, later the mask, of the least node
	side  [][2]int64 // by representative: cost with it on A, on B
	least []int64    // by representative: sum of the lesser costs
	edge  []int64    // by representative: the least edge
	bound []bool     // by representative: a node is held or prefers a mask
	rest  []int32
}

// settle finds the components in which the better of the two assignments without a broken edge is an optimum, and writes them into masks. It returns the remaining
// nodes in ascending order, which hold until the next call, and the sum of the costs of what it settled. Of two sides that cost the same, the one with the least node of the component on mask A is
// taken.
//
// Beyond the components without costs that is certain where the better side costs no more than all nodes at their least plus the least edge: any other
// assignment breaks an edge.
func (t *settler) settle(p *Problem, masks []uint8) (rest []int32, cost int64) {
	n := p.Nodes
	uf := &t.uf
	uf.reset(t.room, n)
	odd := fitZeroed(t.room, t.odd, n)
	first := fitZeroed(t.room, t.first, n)
	t.odd, t.first = odd, first
	var loops int64
	var clashes []int32
	for i := range p.Edges {
		e := &p.Edges[i]
		if e.Weight <= 0 {
			continue
		}
		if e.U == e.V {
			if !e.Same {
				loops += e.Weight * p.unit()
			}
			continue
		}
		var f uint8
		if !e.Same {
			f = 1
		}
		if !uf.join(e.U, e.V, f) {
			clashes = append(clashes, e.U)
		}
	}
	for _, u := range clashes {
		r, _ := uf.find(u)
		odd[r] = true
	}
	plain := p.Fixed == nil && !p.costs()
	if !plain {
		t.side, t.least = fitZeroed(t.room, t.side, n), fitZeroed(t.room, t.least, n)
	}
	side, least := t.side, t.least
	balanced := false // some node is in a component that may be settled
	for i := range n {
		r, f := uf.find(int32(i))
		if first[r] == 0 {
			first[r] = 2 | f
		}
		if plain || odd[r] {
			continue
		}
		balanced = true
		c := p.cost(int32(i))
		if k := p.fixed(int32(i)); k >= 0 {
			least[r] += c[k]
			c[1-k] = unlimited
		} else {
			least[r] += min(c[0], c[1])
		}
		side[r][0] = addLimited(side[r][0], c[f])
		side[r][1] = addLimited(side[r][1], c[1^f])
	}
	if balanced {
		edge := fitZeroed(t.room, t.edge, n)
		t.edge = edge
		for i := range p.Edges {
			if e := &p.Edges[i]; e.Weight > 0 && e.U != e.V {
				r, _ := uf.find(e.U)
				if w := e.Weight * p.unit(); edge[r] == 0 || w < edge[r] {
					edge[r] = w
				}
			}
		}
		for i := range n {
			if uf.link[i] >= 0 || odd[i] {
				continue
			}
			best := min(side[i][0], side[i][1])
			if best == unlimited || edge[i] > 0 && best-least[i] > edge[i] {
				odd[i] = true
			}
		}
	}
	rest = fit(t.room, t.rest, n)[:0]
	for i := range n {
		r, f := uf.find(int32(i))
		if odd[r] {
			rest = append(rest, int32(i))
			continue
		}
		s := first[r] & 1 // the side of r that puts the least node on A
		if !plain {
			if side[r][1^s] < side[r][s] {
				s ^= 1
			}
			if int(r) == i {
				cost += side[r][s]
			}
		}
		masks[i] = s ^ f
	}
	t.rest = rest
	return rest, cost + loops
}

// orient turns each component among the nodes of rest (ascending) whose flip costs the same, as no node of it is held or prefers a mask, so that its least node is on
// mask A. It follows settle.
func (t *settler) orient(p *Problem, rest []int32, masks []uint8) {
	plain := p.Fixed == nil && !p.costs()
	t.bound = fitZeroed(t.room, t.bound, p.Nodes)
	if !plain {
		for _, i := range rest {
			if c := p.cost(i); p.fixed(i) >= 0 || c[0] != c[1] {
				r, _ := t.uf.find(i)
				t.bound[r] = true
			}
		}
	}
	met := fitZeroed(t.room, t.first, p.Nodes)
	for _, i := range rest {
		r, _ := t.uf.find(i)
		if t.bound[r] {
			continue
		}
		if met[r] == 0 {
			met[r] = 2 | masks[i]
		}
		masks[i] ^= met[r] & 1
	}
}
