package graphs

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/crillab/gophersat/maxsat"

	"maskpair/decompose/exact"
	"maskpair/testdata/crosscheck/outside"
)

// This file asks for the optimum.

// bySAT gives the optimum of a problem as weighted MaxSAT: an edge of the opposite kind is two clauses of its weight, of
// which an assignment fails at most one; variables are true on mask B. It is no answer (ok is false) where the assignment
// that comes with it costs something else: gophersat v1.4.0 sometimes says 0 of a problem that costs at least 1.
func bySAT(t testing.TB, p *exact.Problem) (optimum int64, ok bool) {
	t.Helper()
	lit := func(v int32, onB bool) maxsat.Lit {
		name := fmt.Sprint(v)
		if onB {
			return maxsat.Var(name)
		}
		return maxsat.Not(name)
	}
	var clauses []maxsat.Constr
	var always int64 // loops: the judge has no clause that is always false
	for _, e := range p.Edges {
		w := int(e.Weight)
		switch {
		case e.U == e.V && !e.Same:
			always += e.Weight
		case e.U == e.V:
		case e.Same:
			clauses = append(clauses, maxsat.WeightedClause([]maxsat.Lit{lit(e.U, true), lit(e.V, false)}, w), maxsat.WeightedClause([]maxsat.Lit{lit(e.U, false), lit(e.V, true)}, w))
		default:
			clauses = append(clauses, maxsat.WeightedClause([]maxsat.Lit{lit(e.U, true), lit(e.V, true)}, w), maxsat.WeightedClause([]maxsat.Lit{lit(e.U, false), lit(e.V, false)}, w))
		}
	}
	for v, f := range p.Fixed {
		if f >= 0 {
			clauses = append(clauses, maxsat.HardClause(lit(int32(v), f == 1)))
		}
	}
	for v, c := range p.Cost {
		if c[0] > 0 {
			clauses = append(clauses, maxsat.WeightedClause([]maxsat.Lit{lit(int32(v), true)}, int(c[0])))
		}
		if c[1] > 0 {
			clauses = append(clauses, maxsat.WeightedClause([]maxsat.Lit{lit(int32(v), false)}, int(c[1])))
		}
	}
	if len(clauses) == 0 {
		return always, true
	}
	model, cost := maxsat.New(clauses...).Solve()
	if cost < 0 {
		t.Fatalf("the judge finds the problem unsatisfiable: %+v", p)
	}
	masks := make([]uint8, p.Nodes)
	for v := range masks {
		if model[fmt.Sprint(v)] {
			masks[v] = 1
		}
	}
	optimum = always + int64(cost)
	return optimum, costOf(p, masks) == optimum
}

const packed = 1 << 44

// times gives the problem with all weights and costs multiplied.
func times(p *exact.Problem, k int64) *exact.Problem {
	q := *p
	q.Edges, q.Cost = slices.Clone(p.Edges), slices.Clone(p.Cost)
	for i := range q.Edges {
		q.Edges[i].Weight *= k
	}
	for i := range q.Cost {
		q.Cost[i][0] *= k
		q.Cost[i][1] *= k
	}
	return &q
}

func TestOptimumAgainstGophersat(t *testing.T) {
	rng := rand.New(rand.NewPCG(22, 1))
	var doubtful []*exact.Problem
	for n := range 6000 {
		p := random(rng, 1+rng.IntN(10))
		if n%10 == 0 {
			p = sparse(rng, 8+rng.IntN(10), 3+rng.IntN(4), 4)
		}
		s := exact.Solve(p, exact.DefaultBudget())
		check(t, p, s)
		want, ok := bySAT(t, p)
		if !ok {
			doubtful = append(doubtful, p)
			continue
		}
		if s.Cost != want || !s.Proved || s.LowerBound != want {
			t.Fatalf("problem %d: cost %d, bound %d, proved %v; the judge's optimum is %d\n%+v", n, s.Cost, s.LowerBound, s.Proved, want, p)
		}
		// Weights of several aims packed into one number are as large as this.
		if s := exact.Solve(times(p, packed), exact.DefaultBudget()); !s.Proved || s.Cost != want*packed {
			t.Fatalf("problem %d with weights times %d: cost %d, proved %v; the judge's optimum is %d of them\n%+v", n, packed, s.Cost, s.Proved, want, p)
		}
	}
	for n, want := range byILP(t, doubtful) {
		if s := exact.Solve(doubtful[n], exact.DefaultBudget()); s.Cost != want || !s.Proved {
			t.Errorf("cost %d, proved %v; HiGHS finds %d\n%+v", s.Cost, s.Proved, want, doubtful[n])
		}
	}
	t.Logf("%d problems were left to HiGHS", len(doubtful))
	if len(doubtful) > 60 {
		t.Errorf("the judge contradicts itself in %d of 6000 problems", len(doubtful))
	}
}

// byILP gives the optima of problems as integer programmes.
func byILP(t testing.TB, problems []*exact.Problem) []int64 {
	t.Helper()
	outside.Packages(t, "python3-numpy", "python3-scipy")
	optima := outside.Ask[[]*exact.Problem, []int64](t, "milp.py", problems)
	if len(optima) != len(problems) {
		t.Fatalf("%d answers to %d questions", len(optima), len(problems))
	}
	return optima
}

// TestOptimumAgainstHiGHS also gives the solver less than it needs: then the optimum must lie between its bound and its cost.
func TestOptimumAgainstHiGHS(t *testing.T) {
	rng := rand.New(rand.NewPCG(22, 2))
	var problems []*exact.Problem
	for n := range 700 {
		problems = append(problems, random(rng, 1+rng.IntN(10)))
		// A solver in floating point is asked about weights whose sums it holds without doubt.
		for i := range problems[n].Edges {
			problems[n].Edges[i].Weight = 1 + problems[n].Edges[i].Weight%1000
		}
		for i := range problems[n].Cost {
			problems[n].Cost[i][0] %= 1000
			problems[n].Cost[i][1] %= 1000
		}
	}
	for n := range 24 {
		side := 6 + n%3
		for _, d := range []diagonals{oneDiagonal, bothDiagonal, someDiagonal} {
			problems = append(problems, grid(rng, side, 6+rng.IntN(3), d, []int64{1, 9}[n%2]))
			if n%4 == 3 {
				hold(rng, problems[len(problems)-1])
			}
			if n%6 == 5 {
				prefer(rng, problems[len(problems)-1], 3)
			}
		}
		problems = append(problems, sparse(rng, 60, 4+n%4, 5))
	}
	proved := 0
	for n, want := range byILP(t, problems) {
		p := problems[n]
		s := exact.Solve(p, exact.DefaultBudget())
		check(t, p, s)
		if s.Cost != want || !s.Proved || s.LowerBound != want {
			t.Errorf("problem %d of %d nodes: cost %d, bound %d, proved %v; the judge's optimum is %d", n, p.Nodes, s.Cost, s.LowerBound, s.Proved, want)
		}
		for _, b := range []exact.Budget{{Work: 1, Memory: 1}, {Work: 200, Memory: 1 << 10}, {Work: 3000, Memory: 1 << 14}} {
			s := exact.Solve(p, b)
			check(t, p, s)
			if s.LowerBound > want || s.Cost < want || s.Proved != (s.Cost == s.LowerBound) {
				t.Errorf("problem %d of %d nodes with budget %+v: cost %d, bound %d, proved %v; the judge's optimum is %d", n, p.Nodes, b, s.Cost, s.LowerBound, s.Proved, want)
			}
			if s.Proved {
				proved++
			}
		}
	}
	t.Logf("%d problems; with small budgets %d of %d are proved", len(problems), proved, 3*len(problems))
}
