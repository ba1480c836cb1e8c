package decompose

import "maskpair/decompose/exact"

// This file solves groups with crowded near pairs: pairs of cut shapes with more near atoms than pairwise weights can count once. Such
// a pair is spread over its atoms, each costing a share, so that it never costs too much: that gives a bound. Where a solution breaks
// a pair in part only, the bound is below the true cost, and the search branches: the pair is given up (it costs once and asks nothing
// more), or it must be kept (each of its atoms costs more than everything else). Depth first, the kept branch first.

// The search is bounded: no more than mostBranches problems are solved for one group, and of a large one only so many that their atoms
// add up to mostBranched. Beyond, the best found and the bound stand.
const (
	mostBranches = 1024
	mostBranched = 1 << 18
)

// The states of a crowded pair.
const (
	open = iota
	given
	kept
)

// crowdSearch is the search of one group.
type crowdSearch struct {
	s       *solver
	b       *brokenGroup
	wishes  map[uint32][2]int64
	best    []uint8 // by atom
	cost    int64   // true cost of best
	bound   int64
	left    int
	stopped bool
}

// solveCrowded gives the solution of a group by true cost.
func (s *solver) solveCrowded(b *brokenGroup, wishes map[uint32][2]int64) exact.Solution {
	c := &crowdSearch{s: s, b: b, wishes: wishes, cost: 1 << 62, left: max(2, min(mostBranches, mostBranched/b.atoms()))}
	state := make([]uint8, len(b.edges))
	lower := c.branch(state)
	sol := exact.Solution{Masks: c.best, Cost: c.cost, LowerBound: min(lower, c.cost)}
	sol.Proved = sol.LowerBound == sol.Cost
	return sol
}

// branch solves the group with some pairs given or kept, and returns a lower bound of it.
func (c *crowdSearch) branch(state []uint8) int64 {
	c.left--
	trial := *c.b
	spread := *c.b.pieces
	spread.state = state
	trial.pieces = &spread
	c.s.weigh(&trial, c.wishes)
	sol := exact.Solve(trial.problem, exact.DefaultBudget())
	masks := trial.spread(sol.Masks)
	paid := int64(0)
	for i, st := range state {
		if st == given {
			paid += c.b.weight(i, trial.units)
		}
	}
	lower := sol.LowerBound + paid
	cost, broken := c.trueCost(&trial, masks, state, sol.Cost+paid)
	if cost < c.cost {
		c.cost, c.best = cost, sol.Masks
	}
	if lower >= c.cost || broken < 0 {
		return min(lower, cost)
	}
	if c.left < 2 {
		return lower
	}
	below := int64(1 << 62)
	for _, st := range [2]uint8{kept, given} {
		next := append([]uint8(nil), state...)
		next[broken] = st
		below = min(below, c.branch(next))
	}
	return max(lower, below)
}

// trueCost corrects the cost of a solution for crowded pairs, and gives one that is open and broken in part; below 0 where none is.
func (c *crowdSearch) trueCost(trial *brokenGroup, masks []uint8, state []uint8, cost int64) (int64, int) {
	broken := -1
	for i := range trial.edges {
		if !trial.pieces.isCrowded(i) {
			continue
		}
		weight := trial.weight(i, trial.units)
		n := int64(0)
		for _, q := range trial.pieces.pairs[i] {
			if masks[q[0]] == masks[q[1]] {
				n++
			}
		}
		switch state[i] {
		case open:
			if n > 0 {
				cost += weight - n*(weight/int64(len(trial.pieces.pairs[i])))
				if broken < 0 && weight != n*(weight/int64(len(trial.pieces.pairs[i]))) {
					broken = i
				}
			}
		case given:
			if n == 0 {
				cost -= weight
			}
		case kept:
			cost += boolWeight(n > 0, weight) - n*keptWeight(trial.units)
		}
	}
	return cost, broken
}

func boolWeight(b bool, w int64) int64 {
	if b {
		return w
	}
	return 0
}
