package exact

// This file leads a problem through the stages: what is settled in linear time, the reductions, and the kernel.

// Solve finds an assignment of least cost, or, where the budget is too small for that, a good one together with a lower bound on the cost of every assignment.
//
// Ties: a component in which no node is held or prefers a mask has its least node on mask A. Beyond that, which of several assignments of one cost comes out depends
// on the problem and the budget alone.
func Solve(p *Problem, b Budget) Solution {
	sol := Solution{Masks: make([]uint8, p.Nodes)}
	uf, rest, settled := settle(p, sol.Masks)
	sol.LowerBound = settled
	if len(rest) > 0 {
		r := newReducer(p, rest)
		r.run()
		g, nodes := r.kernel()
		r.release()
		s := solver{budget: b}
		x, bound := s.kernel(g)
		sol.LowerBound += r.base + bound
		sol.Work, sol.Width = s.work, s.width
		all := make([]uint8, len(rest))
		r.restore(all, nodes, x)
		for i, v := range rest {
			sol.Masks[v] = all[i]
		}
		orient(p, uf, rest, sol.Masks)
	}
	sol.Cost = p.CostOf(sol.Masks)
	sol.Proved = sol.Cost == sol.LowerBound
	return sol
}
