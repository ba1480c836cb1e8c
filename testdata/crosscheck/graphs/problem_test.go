package graphs

import (
	"math/rand/v2"
	"testing"

	"maskpair/decompose/exact"
)

// This file draws problems.

// random draws a problem of n nodes with edges of either kind, parallel ones and loops included, and sometimes with held
// nodes and costs of masks.
func random(rng *rand.Rand, n int) *exact.Problem {
	p := &exact.Problem{Nodes: n}
	top := []int64{1, 3, 20, 1000}[rng.IntN(4)]
	density, same := rng.Float64(), rng.Float64()*rng.Float64()
	for u := range n {
		for v := range u + 1 {
			chance := density
			if u == v {
				chance = 0.02
			}
			for rng.Float64() < chance {
				p.Edges = append(p.Edges, exact.Edge{U: int32(u), V: int32(v), Weight: 1 + rng.Int64N(top), Same: rng.Float64() < same})
				chance *= 0.2
			}
		}
	}
	if rng.IntN(3) == 0 {
		hold(rng, p)
	}
	if rng.IntN(3) == 0 {
		prefer(rng, p, top)
	}
	return p
}

// hold fixes some nodes.
func hold(rng *rand.Rand, p *exact.Problem) {
	p.Fixed = make([]int8, p.Nodes)
	for i := range p.Fixed {
		p.Fixed[i] = -1
		if rng.IntN(4) == 0 {
			p.Fixed[i] = int8(rng.IntN(2))
		}
	}
}

// prefer lets masks cost something at some nodes.
func prefer(rng *rand.Rand, p *exact.Problem, top int64) {
	p.Cost = make([][2]int64, p.Nodes)
	for i := range p.Cost {
		if rng.IntN(3) == 0 {
			p.Cost[i] = [2]int64{rng.Int64N(top + 1), rng.Int64N(top + 1)}
		}
	}
}

// diagonals says which diagonals of the cells of a grid are edges.
type diagonals int

const (
	oneDiagonal  diagonals = iota // one of the two in each cell, at random: the graph stays planar
	bothDiagonal                  // both: contacts so near that all eight neighbours are
	someDiagonal                  // each with chance one half
)

// grid draws a grid of contacts with weights from 1 to top.
func grid(rng *rand.Rand, columns, rows int, d diagonals, top int64) *exact.Problem {
	p := &exact.Problem{Nodes: columns * rows}
	join := func(u, v int) {
		p.Edges = append(p.Edges, exact.Edge{U: int32(u), V: int32(v), Weight: 1 + rng.Int64N(top)})
	}
	for y := range rows {
		for x := range columns {
			v := y*columns + x
			if x+1 < columns {
				join(v, v+1)
			}
			if y+1 < rows {
				join(v, v+columns)
			}
			if x+1 == columns || y+1 == rows {
				continue
			}
			first, second := rng.IntN(2) == 0, rng.IntN(2) == 0
			switch d {
			case oneDiagonal:
				second = !first
			case bothDiagonal:
				first, second = true, true
			}
			if first {
				join(v, v+columns+1)
			}
			if second {
				join(v+1, v+columns)
			}
		}
	}
	return p
}

// sparse draws a connected graph of n nodes in which each has a few neighbours among those shortly before it, as the wires
// of a layout have.
func sparse(rng *rand.Rand, n, reach int, top int64) *exact.Problem {
	p := &exact.Problem{Nodes: n}
	for v := 1; v < n; v++ {
		for range 1 + rng.IntN(3) {
			u := v - 1 - rng.IntN(min(v, reach))
			p.Edges = append(p.Edges, exact.Edge{U: int32(u), V: int32(v), Weight: 1 + rng.Int64N(top), Same: rng.IntN(12) == 0})
		}
	}
	return p
}

// costOf is the cost of an assignment by its definition.
func costOf(p *exact.Problem, masks []uint8) int64 {
	var cost int64
	for _, e := range p.Edges {
		if (masks[e.U] == masks[e.V]) != e.Same {
			cost += e.Weight
		}
	}
	for i, m := range masks {
		if p.Cost != nil {
			cost += p.Cost[i][m]
		}
	}
	return cost
}

// check holds a solution against what it says of itself.
func check(t testing.TB, p *exact.Problem, s exact.Solution) {
	t.Helper()
	for i, m := range s.Masks {
		if m > 1 || p.Fixed != nil && p.Fixed[i] >= 0 && int8(m) != p.Fixed[i] {
			t.Fatalf("node %d comes out on mask %d; held: %v", i, m, p.Fixed)
		}
	}
	if cost := costOf(p, s.Masks); cost != s.Cost {
		t.Fatalf("the cost is given as %d, the masks cost %d", s.Cost, cost)
	}
}
