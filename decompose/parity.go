package decompose

// parity is a union-find that knows for each node whether it is on the mask of its root or on the other (Tarjan's union-find with
// path halving, a bit on each link). A graph is two-colourable exactly when no pair contradicts it (König 1936). The root of a set is
// its least node.
type parity struct {
	link []uint32 // parent, shifted by one bit; low bit: on the other mask than the parent
}

func newParity(link []uint32) parity {
	for i := range link {
		link[i] = uint32(i) << 1
	}
	return parity{link}
}

// find gives the root of a node, and 1 where the node is on the other mask.
func (p parity) find(a uint32) (root, other uint32) {
	for {
		l := p.link[a]
		up := l >> 1
		if up == a {
			return a, other
		}
		m := p.link[up]
		l = m ^ l&1
		p.link[a] = l
		other ^= l & 1
		a = l >> 1
	}
}

// relate says that two nodes are on the same mask (apart 0) or on opposite ones (apart 1). It is false where that contradicts what was
// said before; nothing changes then.
func (p parity) relate(a, b, apart uint32) bool {
	ra, pa := p.find(a)
	rb, pb := p.find(b)
	turn := pa ^ pb ^ apart
	if ra == rb {
		return turn == 0
	}
	if ra > rb {
		ra, rb = rb, ra
	}
	p.link[rb] = ra<<1 | turn
	return true
}
