package exact

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

// TestSmallBudgets: whatever the budget, the assignment is valid and the bound is one.
func TestSmallBudgets(t *testing.T) {
	rng := rand.New(rand.NewPCG(19, 20))
	beyond := 0
	for i := range 1500 {
		p := randomProblem(rng, 6+rng.IntN(7))
		best := bruteForce(p)
		for _, b := range []Budget{{}, {Work: 50, Memory: 1 << 20}, {Work: 1000, Memory: 1 << 20}, {Work: 1 << 14, Memory: 1 << 9}, {Work: 1 << 30, Memory: 0}} {
			t.Run(fmt.Sprint(i, " ", b.Work, " ", b.Memory), func(t *testing.T) {
				s := Solve(p, b)
				check(t, p, s, best)
				if !s.Proved {
					beyond++
				}
			})
		}
	}
	if beyond < 100 {
		t.Errorf("only %d problems were beyond their budget: the test does not reach what it is for", beyond)
	}
}

// TestNothingToSolve: problems without nodes or without edges that count.
func TestNothingToSolve(t *testing.T) {
	if s := Solve(&Problem{}, DefaultBudget()); s.Cost != 0 || !s.Proved || len(s.Masks) != 0 {
		t.Errorf("%+v", s)
	}
	p := &Problem{Nodes: 3, Edges: []Edge{{U: 0, V: 1}, {U: 1, V: 2, Weight: -4}, {U: 2, V: 2, Weight: 5}, {U: 1, V: 1, Weight: 7, Same: true}}, Fixed: []int8{-1, 1, -1}}
	if s := Solve(p, Budget{}); s.Cost != 5 || !s.Proved || s.Masks[0] != 0 || s.Masks[1] != 1 || s.Masks[2] != 0 {
		t.Errorf("%+v", s)
	}
}

// TestLeastNodeOnA: a component that may be flipped has its least node on mask A, wherever it is settled.
func TestLeastNodeOnA(t *testing.T) {
	rng := rand.New(rand.NewPCG(27, 28))
	for range 300 {
		p := loose(rng, 1+rng.IntN(12))
		p.Cost = nil
		for _, b := range []Budget{{}, DefaultBudget()} {
			s := Solve(p, b)
			met := newParity(p.Nodes)
			for _, e := range p.Edges {
				met.join(e.U, e.V, 0)
			}
			first := map[int32]bool{}
			for i, m := range s.Masks {
				if r, _ := met.find(int32(i)); !first[r] {
					first[r] = true
					if m != 0 {
						t.Fatalf("node %d is the least of its component, and on mask B: %v", i, s.Masks)
					}
				}
			}
		}
	}
}

// TestBudgetIsKept: work stays near the budget, and elimination tables within the memory, on graphs that would take much more.
func TestBudgetIsKept(t *testing.T) {
	p := king(rand.New(rand.NewPCG(21, 22)), 30, 30, 9)
	linear := int64(64 * (p.Nodes + len(p.Edges)))
	for _, work := range []int64{0, 1000, 1 << 20, 1 << 24} {
		s := Solve(p, Budget{Work: work, Memory: 1 << 24})
		check(t, p, s, s.Cost)
		if s.Work > work+work/4+linear {
			t.Errorf("budget %d: work %d", work, s.Work)
		}
	}
}

// TestMoreBudgetHelps: with the budget for it, what was beyond is proved.
func TestMoreBudgetHelps(t *testing.T) {
	p := king(rand.New(rand.NewPCG(23, 24)), 10, 10, 9)
	small := Solve(p, Budget{Work: 100, Memory: 1 << 20})
	large := Solve(p, DefaultBudget())
	if !large.Proved || small.LowerBound > large.Cost || small.Cost < large.Cost {
		t.Errorf("%d to %d with little, %d to %d with much", small.LowerBound, small.Cost, large.LowerBound, large.Cost)
	}
}

// TestLargeWeights: sums just below 2^62, the most that is allowed.
func TestLargeWeights(t *testing.T) {
	rng := rand.New(rand.NewPCG(25, 26))
	for range 200 {
		p := randomProblem(rng, 12)
		terms := int64(len(p.Edges))
		if p.Cost != nil {
			terms += 2 * int64(p.Nodes)
		}
		most := (unlimited - 1) / max(1, terms)
		for i := range p.Edges {
			p.Edges[i].Weight = most - rng.Int64N(most/2)
		}
		for i := range p.Cost {
			p.Cost[i] = [2]int64{most - rng.Int64N(most), most - rng.Int64N(most)}
		}
		best := bruteForce(p)
		s := Solve(p, DefaultBudget())
		check(t, p, s, best)
		if !s.Proved {
			t.Errorf("cost %d, bound %d", s.Cost, s.LowerBound)
		}
		check(t, p, Solve(p, Budget{Work: 3000, Memory: 1 << 20}), best)
	}
}
