package orders

// parity is a union-find that knows which shapes are on the same mask, and can go back to a mark.
type parity struct {
	parent []int32
	odd    []bool
	size   []int32
	past   []int32 // roots that were hung under others
}

func newParity(n int) *parity {
	p := &parity{parent: make([]int32, n), odd: make([]bool, n), size: make([]int32, n)}
	for i := range p.parent {
		p.parent[i], p.size[i] = int32(i), 1
	}
	return p
}

func (p *parity) find(i int32) (root int32, odd bool) {
	for p.parent[i] != i {
		odd = odd != p.odd[i]
		i = p.parent[i]
	}
	return i, odd
}

// relate is false where it contradicts what was said before; nothing changes then.
func (p *parity) relate(a, b int32, opposite bool) bool {
	ra, oa := p.find(a)
	rb, ob := p.find(b)
	odd := (oa != ob) != opposite
	if ra == rb {
		return !odd
	}
	if p.size[ra] < p.size[rb] {
		ra, rb = rb, ra
	}
	p.parent[rb], p.odd[rb] = ra, odd
	p.size[ra] += p.size[rb]
	p.past = append(p.past, rb)
	return true
}

func (p *parity) mark() int { return len(p.past) }

// undo forgets all that was related since the mark.
func (p *parity) undo(mark int) {
	for len(p.past) > mark {
		r := p.past[len(p.past)-1]
		p.past = p.past[:len(p.past)-1]
		p.size[p.parent[r]] -= p.size[r]
		p.parent[r], p.odd[r] = r, false
	}
}
