package exact

import "maskpair/gds/arena"

// This file leads a problem through the stages: what is settled in linear time, the reductions, and the kernel.

// Solve finds an assignment of least cost, or, where the budget is too small for that, a good one together with a lower bound on the cost of every assignment.
//
// Ties: a component in which no node is held or prefers a mask has its least node on mask A. Beyond that, which of several assignments of one cost comes out depends
// on the problem and the budget alone.
func Solve(p *Problem, b Budget) Solution { return new(Workspace).Solve(p, b) }

// Workspace is where problems are solved, one after another. The zero value solves on the heap; with a room, of which it disposes alone, it solves in memory that is touched
// already, as the first touch costs more than many a stage.
type Workspace struct {
	Room   *arena.Slab
	solver solver // for what it has grown
}

// Solve is as the function Solve; the solution does not depend on what was solved before.
func (w *Workspace) Solve(p *Problem, b Budget) Solution {
	if w.Room != nil {
		w.Room.Reset()
	}
	sol := Solution{Masks: make([]uint8, p.Nodes)}
	t := settler{room: w.Room}
	rest, settled := t.settle(p, sol.Masks)
	sol.LowerBound = settled
	if len(rest) > 0 {
		r := reducer{room: w.Room}
		r.load(p, rest)
		r.run()
		g, nodes := r.kernel()
		s := &w.solver
		s.room, s.budget, s.work, s.width = w.Room, b, 0, 0
		x, bound := s.kernel(g)
		sol.LowerBound += r.base + bound
		sol.Work, sol.Width = s.work, s.width
		all := fit[uint8](w.Room, nil, len(rest)) // restore writes all of it
		r.restore(all, nodes, x)
		for i, v := range rest {
			sol.Masks[v] = all[i]
		}
		t.orient(p, rest, sol.Masks)
	}
	sol.Cost = p.CostOf(sol.Masks)
	sol.Proved = sol.Cost == sol.LowerBound
	return sol
}
