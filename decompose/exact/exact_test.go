package exact

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

// bruteForce tries every assignment that respects Fixed, by the definition alone.
func bruteForce(p *Problem) int64 {
	best := int64(-1)
	masks := make([]uint8, p.Nodes)
	for bits := range 1 << p.Nodes {
		ok := true
		for i := range masks {
			masks[i] = uint8(bits >> i & 1)
			if p.Fixed != nil && p.Fixed[i] >= 0 && masks[i] != uint8(p.Fixed[i]) {
				ok = false
			}
		}
		if !ok {
			continue
		}
		var cost int64
		for _, e := range p.Edges {
			equal := masks[e.U] == masks[e.V]
			if equal && !e.Same || !equal && e.Same {
				cost += e.Weight
			}
		}
		for i, m := range masks {
			if p.Cost != nil {
				cost += p.Cost[i][m]
			}
		}
		if best < 0 || cost < best {
			best = cost
		}
	}
	return best
}

// randomProblem draws a problem of n nodes; kind chooses what it has besides edges.
func randomProblem(rng *rand.Rand, n int) *Problem {
	p := &Problem{Nodes: n}
	density := rng.Float64()
	top := int64(1)
	switch rng.IntN(4) {
	case 1:
		top = 3
	case 2:
		top = 1000
	case 3:
		top = 1 << 50
	}
	same := rng.Float64() * rng.Float64()
	for u := range n {
		for v := range u + 1 {
			chance := density
			if u == v {
				chance = 0.02
			}
			for rng.Float64() < chance {
				p.Edges = append(p.Edges, Edge{int32(u), int32(v), 1 + rng.Int64N(top), rng.Float64() < same})
				chance *= 0.2
			}
		}
	}
	rng.Shuffle(len(p.Edges), func(i, j int) { p.Edges[i], p.Edges[j] = p.Edges[j], p.Edges[i] })
	if rng.IntN(3) == 0 {
		p.Fixed = make([]int8, n)
		for i := range p.Fixed {
			p.Fixed[i] = -1
			if rng.IntN(4) == 0 {
				p.Fixed[i] = int8(rng.IntN(2))
			}
		}
	}
	if rng.IntN(3) == 0 {
		p.Cost = make([][2]int64, n)
		often := 1 + rng.IntN(6)
		for i := range p.Cost {
			if rng.IntN(often) == 0 {
				p.Cost[i][rng.IntN(2)] = rng.Int64N(2 * top)
				p.Cost[i][rng.IntN(2)] = rng.Int64N(top)
			}
		}
	}
	return p
}

// check holds a solution against what every solution promises, and against the optimum.
func check(t *testing.T, p *Problem, s Solution, best int64) {
	t.Helper()
	if len(s.Masks) != p.Nodes {
		t.Fatalf("%d masks for %d nodes", len(s.Masks), p.Nodes)
	}
	for i, m := range s.Masks {
		if m > 1 || p.Fixed != nil && p.Fixed[i] >= 0 && m != uint8(p.Fixed[i]) {
			t.Fatalf("node %d is on mask %d, fixed %v", i, m, p.Fixed)
		}
	}
	var cost int64
	for _, e := range p.Edges {
		if (s.Masks[e.U] == s.Masks[e.V]) != e.Same {
			cost += e.Weight
		}
	}
	for i, m := range s.Masks {
		if p.Cost != nil {
			cost += p.Cost[i][m]
		}
	}
	if s.Cost != cost {
		t.Fatalf("Cost is %d, but Masks cost %d", s.Cost, cost)
	}
	if s.LowerBound > best || s.Cost < best || s.Proved != (s.Cost == s.LowerBound) {
		t.Fatalf("cost %d, bound %d, proved %v; the optimum is %d", s.Cost, s.LowerBound, s.Proved, best)
	}
}

func TestSolveAgainstAllAssignments(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for i := range 6000 {
		p := randomProblem(rng, 1+rng.IntN(9)+rng.IntN(6)*(i%8/7))
		best := bruteForce(p)
		t.Run(fmt.Sprint(i), func(t *testing.T) {
			s := Solve(p, DefaultBudget())
			check(t, p, s, best)
			if !s.Proved {
				t.Errorf("a problem of %d nodes is within the budget, but cost %d and bound %d differ", p.Nodes, s.Cost, s.LowerBound)
			}
		})
	}
}
