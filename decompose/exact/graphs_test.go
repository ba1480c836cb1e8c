package exact

import "math/rand/v2"

// This file makes the graphs that tests and benchmarks share.

// unit is an edge of the opposite kind of weight 1.
func unit(u, v int) Edge { return Edge{U: int32(u), V: int32(v), Weight: 1} }

// strip is a grid of the given length and width with one diagonal in every cell, numbered along the short side. Its treewidth is at most width+1; every cell has two odd triangles.
func strip(length, width int) *Problem {
	p := &Problem{Nodes: length * width}
	for i := range length {
		for j := range width {
			v := i*width + j
			if j+1 < width {
				p.Edges = append(p.Edges, unit(v, v+1))
			}
			if i+1 < length {
				p.Edges = append(p.Edges, unit(v, v+width))
				if j+1 < width {
					p.Edges = append(p.Edges, unit(v, v+width+1))
				}
			}
		}
	}
	return p
}

// partialTree is a random k-tree (each new node joined to a random clique of k nodes of what is there) from which a part of the edges is left out. Its treewidth is at
// most k by construction. Node numbers are shuffled.
func partialTree(rng *rand.Rand, n, k int, keep float64) *Problem {
	p := &Problem{Nodes: n}
	name := rng.Perm(n)
	add := func(u, v int) {
		if rng.Float64() < keep {
			p.Edges = append(p.Edges, Edge{U: int32(name[u]), V: int32(name[v]), Weight: 1 + rng.Int64N(9)})
		}
	}
	first := make([]int, k)
	for i := range first {
		first[i] = i
		for j := range i {
			add(i, j)
		}
	}
	cliques := [][]int{first}
	for v := k; v < n; v++ {
		c := cliques[rng.IntN(len(cliques))]
		for _, u := range c {
			add(u, v)
		}
		fresh := append([]int(nil), c...)
		fresh[rng.IntN(k)] = v
		cliques = append(cliques, fresh)
	}
	return p
}

// king is the king's graph: a grid with both diagonals in every cell, and weights drawn from 1 to top.
func king(rng *rand.Rand, rows, columns int, top int64) *Problem {
	p := &Problem{Nodes: rows * columns}
	add := func(u, v int) {
		p.Edges = append(p.Edges, Edge{U: int32(u), V: int32(v), Weight: 1 + rng.Int64N(top)})
	}
	for i := range rows {
		for j := range columns {
			v := i*columns + j
			if j+1 < columns {
				add(v, v+1)
			}
			if i+1 < rows {
				add(v, v+columns)
				if j+1 < columns {
					add(v, v+columns+1)
					add(v+1, v+columns)
				}
			}
		}
	}
	return p
}

// complete is the complete graph of n nodes.
func complete(n int) *Problem {
	p := &Problem{Nodes: n}
	for u := range n {
		for v := range u {
			p.Edges = append(p.Edges, unit(u, v))
		}
	}
	return p
}
