package exact

import (
	"math/rand/v2"
	"testing"
)

// dense draws a problem in which nearly all nodes are joined, by edges of both kinds that agree with masks drawn beforehand but for a few, so that there are large contradictory cliques.
func dense(rng *rand.Rand, n int) *Problem {
	p := &Problem{Nodes: n, Cost: make([][2]int64, n)}
	turned := make([]bool, n)
	for i := range turned {
		turned[i] = rng.IntN(2) == 0
		if rng.IntN(3) == 0 {
			p.Cost[i] = [2]int64{rng.Int64N(5), rng.Int64N(5)}
		}
	}
	for u := range n {
		for v := range u {
			if rng.IntN(8) != 0 {
				p.Edges = append(p.Edges, Edge{U: int32(u), V: int32(v), Weight: 1 + rng.Int64N(3), Same: turned[u] != turned[v] != (rng.IntN(20) == 0)})
			}
		}
	}
	return p
}

// TestCliquePackingIsABound: no weight is used twice, and what is packed proves no more than the least energy over all assignments.
func TestCliquePackingIsABound(t *testing.T) {
	rng := rand.New(rand.NewPCG(61, 62))
	packed, better := 0, 0
	for range 300 {
		p := dense(rng, 6+rng.IntN(7))
		g, _ := signed(p)
		edge, edges := numberEdges(g)
		pk := newPacker(g, edge, edges)
		pk.packCliques(1 << 20)
		if pk.sum > 0 {
			packed++
		}
		pk.packRest(1 << 20)
		for _, left := range [][]int64{pk.left, pk.ground} {
			for _, w := range left {
				if w < 0 {
					t.Fatalf("more than a weight is used of %v", p.Edges)
				}
			}
		}
		least := leastEnergy(g)
		if g.floor()+pk.sum > least {
			t.Fatalf("the packing proves %d, the least energy is %d: %v", g.floor()+pk.sum, least, p.Edges)
		}
		if pk.sum > packCycles(g, edge, edges, 1<<20).sum {
			better++
		}
	}
	if packed < 200 || better < 50 {
		t.Errorf("cliques in %d graphs, better than cycles in %d: the test does not reach what it is for", packed, better)
	}
}

// byTakingOut is the degeneracy by its definition: the greatest number of neighbours that a node of least neighbours has, while such nodes are taken out.
func byTakingOut(p *Problem) int {
	gone := make([]bool, p.Nodes)
	most := 0
	for range p.Nodes {
		best, least := -1, p.Nodes
		for v := range p.Nodes {
			if gone[v] {
				continue
			}
			met := map[int32]bool{}
			for _, e := range p.Edges {
				if e.U == int32(v) && !gone[e.V] {
					met[e.V] = true
				} else if e.V == int32(v) && !gone[e.U] {
					met[e.U] = true
				}
			}
			if best < 0 || len(met) < least {
				best, least = v, len(met)
			}
		}
		gone[best] = true
		most = max(most, least)
	}
	return most
}

func TestDegeneracy(t *testing.T) {
	rng := rand.New(rand.NewPCG(63, 64))
	for range 300 {
		p := &Problem{Nodes: 1 + rng.IntN(20)}
		chance := rng.Float64()
		for u := range p.Nodes {
			for v := range u {
				if rng.Float64() < chance {
					p.Edges = append(p.Edges, unit(u, v))
				}
			}
		}
		g, _ := signed(p)
		if got, want := degeneracy(g), byTakingOut(p); got != want {
			t.Fatalf("%d, want %d: %v", got, want, p.Edges)
		}
	}
}

// crowd is a square of so many contacts a side, of which two are near where they are less than reach apart, in steps of the square.
func crowd(side, reach int) *Problem {
	p := &Problem{Nodes: side * side}
	for a := range p.Nodes {
		for b := range a {
			if dx, dy := a%side-b%side, a/side-b/side; dx*dx+dy*dy < reach*reach {
				p.Edges = append(p.Edges, unit(a, b))
			}
		}
	}
	return p
}

// TestCrowds: graphs that are far too dense for elimination end within their budget, and with a bound. Where all are near to all, the bound is met (Edwards, as in TestCompleteGraphs).
func TestCrowds(t *testing.T) {
	for _, c := range []struct{ side, reach int }{{40, 2}, {30, 4}, {30, 8}, {20, 14}, {30, 43}} {
		p := crowd(c.side, c.reach)
		budget := Budget{Work: 1 << 24, Memory: 1 << 26}
		s := Solve(p, budget)
		check(t, p, s, s.Cost)
		n := int64(p.Nodes)
		whole := n * (n - 1) / 2
		if linear := int64(64 * (p.Nodes + len(p.Edges))); s.Work > budget.Work+budget.Work/4+linear {
			t.Errorf("%+v: work %d", c, s.Work)
		}
		if s.LowerBound == 0 || s.Cost > int64(len(p.Edges))/2 {
			t.Errorf("%+v: cost %d of %d edges, bound %d", c, s.Cost, len(p.Edges), s.LowerBound)
		}
		if int64(len(p.Edges)) == whole && (!s.Proved || s.Cost != whole-n*n/4) {
			t.Errorf("%d contacts all near: cost %d, bound %d, want %d", n, s.Cost, s.LowerBound, whole-n*n/4)
		}
	}
	// Contacts of which each is near to the eight around it: as TestKingGap, within less.
	if s := Solve(crowd(40, 2), Budget{Work: 1 << 27, Memory: 1 << 28}); 10*(s.Cost-s.LowerBound) >= s.Cost {
		t.Errorf("cost %d, bound %d", s.Cost, s.LowerBound)
	}
}
