package decompose

import (
	"cmp"
	"context"
	"math"
	"slices"

	"maskpair/decompose/geom"
)

// This file finds the cheapest repair of a component by widening gaps. The pairs that stay on one mask are the fewest, but not always
// the easiest to mend: of an odd cycle any gap can be widened, and one of them lacks least. So the group is solved once more with each
// pair weighed by how much it lacks of its spacing: the pairs that are broken then, widened by what they lack, leave a graph that two
// masks can do, and no other choice lacks less in total. Equal groups share one solution.

// Repairs are worked out for groups of no more than mostRepaired near pairs, and for no more than mostKinds kinds of components: nobody
// reads more.
const (
	mostRepaired = 1 << 14
	mostKinds    = 1000
)

// repairs fills in the cheapest repairs, for one component of each group of equal ones; the others have the same by place.
func (e *explainer) repairs(ctx context.Context, res *LayerResult, jobs int) error {
	seen := map[int64]bool{}
	var todo []*Unresolved
	byGroup := map[int32]*Unresolved{}
	for i := range res.Unresolved {
		u := &res.Unresolved[i]
		if seen[u.Group] || len(u.Pairs) == 0 {
			continue
		}
		seen[u.Group] = true
		k, ok := e.of(u.node)
		if !ok || byGroup[int32(k)] != nil {
			continue
		}
		if b := &e.solver.groups[k]; len(todo) == mostKinds || len(b.edges) > mostRepaired || !b.solution.Proved {
			u.NotComputed = append(u.NotComputed, "repair")
			continue
		}
		byGroup[int32(k)] = u
		todo = append(todo, u)
		for _, n := range e.solver.groups[k].nodes {
			if e.parts[n] == nil {
				e.parts[n] = &geom.Parts{}
				e.more[n] = e.parts[n]
			}
		}
	}
	e.l.geometryOf(e.more)
	return e.solver.each(ctx, jobs, func(b *brokenGroup) {
		if u := byGroup[int32(e.indexOf(b))]; u != nil {
			if u.Repair = e.repair(b, u.Top, jobs); u.Repair == nil {
				u.NotComputed = append(u.NotComputed, "repair")
			}
		}
	})
}

// repair gives the pairs to be widened; nil where that takes too much work.
func (e *explainer) repair(b *brokenGroup, top string, jobs int) []Pair {
	trial := *b
	trial.cutting = false
	e.weigh(&trial, nil)
	p := trial.problem
	p.Cost = nil
	pair := func(i int) Pair {
		return e.pairOf(&trial, i, b.nodes[b.edges[i].U], b.nodes[b.edges[i].V], top)
	}
	const part = 1 << 10 // edges
	parts := (len(b.edges) + part - 1) / part
	inTurn(jobs, parts, func(_, k int) {
		for i := k * part; i < min((k+1)*part, len(b.edges)); i++ {
			// What is accepted need not be widened: any number of such pairs weighs less than one unit of a gap, or one pair more.
			p.Edges[i].Weight = 1
			if !b.waived[i] {
				p.Edges[i].Weight = (pair(i).Widen*int64(len(b.edges)+1) + 1) * int64(len(b.edges)+1)
			}
		}
	})
	sol := e.exactly(p, b.again())
	if !sol.Proved {
		return nil
	}
	masks := trial.spread(sol.Masks)
	out := []Pair{}
	for i := range b.edges {
		if !b.waived[i] && trial.violated(i, masks) {
			out = append(out, pair(i))
		}
	}
	slices.SortFunc(out, func(a, b Pair) int { return cmp.Or(compareBoxes(a.A, b.A), compareBoxes(a.B, b.B)) })
	return out
}

// lacks is by how many database units a gap must widen to reach a spacing; the squared gap is in square database units.
func lacks(spacing int64, distanceSq float64) int64 {
	have := int64(math.Sqrt(distanceSq))
	for float64(have)*float64(have) > distanceSq {
		have--
	}
	for float64(have+1)*float64(have+1) <= distanceSq {
		have++
	}
	return spacing - have
}
