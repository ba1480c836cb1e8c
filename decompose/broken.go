package decompose

import (
	"context"
	"slices"
	"sync"

	"maskpair/decompose/exact"
	"maskpair/gds/arena"
)

// This file hands the groups that parity does not settle to package exact, and takes back masks and bounds. What gets a mask there is
// an atom: a node, or one of the pieces into which a node can be cut (see pieces.go). Aims are packed in one 64-bit weight each, the
// dearer above the cheaper: pairs that are not waived, all pairs, stitches, moved shapes, wishes.

// brokenGroup is a group that two masks cannot do, with its nodes in an order that depends on the geometry of its cells alone.
type brokenGroup struct {
	group       int32
	nodes       []uint32 // canonical order
	begin       uint32   // number of the first of them
	ties        []Tie    // between them
	first, last uint32   // least and greatest ordinal
	canon       canon
	edges       []exact.Edge // near pairs by place in nodes, ascending
	waived      []bool       // by edge
	fixed       []int8       // by node: mask that an anchor holds it on, or -1; nil: no anchors
	pieces      *pieces      // where nodes can be cut; nil: nowhere, or the deck has no stitches
	cutting     bool         // what is cut is cut in the output

	problem  *exact.Problem // to be solved next
	weighed  *exact.Problem // with the aims that count
	rep      []int32        // by atom and by node that no atom has, where ties merge atoms: node of the problem; else nil
	flip     []uint8        // by atom, with rep: on the other mask than that
	crowds   []crowd        // of the problem
	surplus  int64          // what their nodes cost in the problem beyond what the pairs cost
	units    units
	same     int            // index of the group whose problem is the same, possibly its own
	solution exact.Solution // of weighed
	masks    []uint8        // by atom, as solved last; the group may have been turned over since
	homing   bool           // solved again, nearest to the usual masks
	home     [][2]int64     // what masks cost then, where ties or pieces make other nodes of the problem than those of the group
	worst    int64          // more than any assignment costs in the aims that count; 0: not worked out
	near     exact.Solution
	least    *[]int // least set of cuts that resolves the group, once it was looked for

	leastKnown bool // it is the least set

	leastStitches int64 // no assignment with as few pairs has fewer stitches
}

// units are the weights of one group. Each is even, so that halves are whole.
type units struct{ wish, moved, stitch, waived, pair int64 }

// pairsOf takes the number of pairs that are not waived out of a cost.
func (u units) pairsOf(cost int64) int64 { return cost / u.pair }

// solver solves the broken groups of one layout.
type solver struct {
	l      *layout
	a      *assignment
	o      *Orders
	groups []brokenGroup
	broken *bitset  // group numbers; their ranks are their places in groups
	nodes  int      // of all groups
	number []uint32 // by node: its number among those of all groups, from 1; 0: its group is not broken
	boxes  []Box    // of the nodes of all groups, by node
	mu     sync.Mutex
	idle   []*exact.Workspace // with memory for the work on one group; not in use now
	opt    *Options
	apart  map[uint32][]uint32 // by node of a broken group: what is within the largest spacing and yet not near
}

// newSolver gathers the nodes of the broken groups.
func newSolver(l *layout, a *assignment, o *Orders, opt *Options) *solver {
	s := &solver{l: l, a: a, o: o, opt: opt, groups: make([]brokenGroup, len(a.broken))}
	if len(s.groups) == 0 {
		return s
	}
	s.broken = newBitset(a.groups)
	for i, g := range a.broken {
		s.groups[i].group = g
		s.broken.add(uint32(g))
	}
	s.broken.makeRanks()
	size := make([]int, len(s.groups))
	for u := range uint32(l.nodes) {
		if i, ok := s.of(u); ok {
			size[i]++
		}
	}
	for i, n := range size {
		s.groups[i].nodes, s.groups[i].begin = arena.CutDirty[uint32](&l.room, n)[:0], uint32(s.nodes)+1
		s.nodes += n
	}
	for u := range uint32(l.nodes) {
		if i, ok := s.of(u); ok {
			s.groups[i].nodes = append(s.groups[i].nodes, u)
		}
	}
	for _, t := range o.Ties {
		if i, ok := s.of(t.A); ok {
			s.groups[i].ties = append(s.groups[i].ties, t)
		}
	}
	return s
}

// place gives the place of a node in the nodes of its group.
func (s *solver) place(b *brokenGroup, node uint32) uint32 { return s.number[node] - b.begin }

// indexOf gives the index of a group.
func (s *solver) indexOf(b *brokenGroup) int {
	i, _ := s.of(b.nodes[0])
	return i
}

// within calls fn with memory that is given up when fn returns.
func (s *solver) within(fn func(room *arena.Slab)) {
	w := s.workspace()
	fn(w.Room)
	s.putBack(w)
}

// exactly solves a problem.
func (s *solver) exactly(p *exact.Problem, budget exact.Budget) exact.Solution {
	w := s.workspace()
	defer s.putBack(w)
	return w.Solve(p, budget)
}

func (s *solver) workspace() *exact.Workspace {
	s.mu.Lock()
	defer s.mu.Unlock()
	n := len(s.idle)
	if n == 0 {
		return &exact.Workspace{Room: s.l.room.Within()}
	}
	w := s.idle[n-1]
	s.idle = s.idle[:n-1]
	return w
}

func (s *solver) putBack(w *exact.Workspace) {
	w.Room.Reset()
	s.mu.Lock()
	defer s.mu.Unlock()
	s.idle = append(s.idle, w)
}

// of gives the index of the broken group of a node; false where its group is not broken.
func (s *solver) of(node uint32) (int, bool) {
	if s.broken == nil {
		return 0, false
	}
	return s.broken.rank(s.a.group[node])
}

// each calls work for every broken group, some at a time.
func (s *solver) each(ctx context.Context, jobs int, work func(b *brokenGroup)) error {
	done := s.opt.counted(int64(len(s.groups)), "odd components")
	inTurn(jobs, len(s.groups), func(_, i int) {
		if ctx.Err() == nil {
			work(&s.groups[i])
			done(1)
		}
	})
	return ctx.Err()
}

// solve gives every broken group its masks.
func (s *solver) solve(ctx context.Context, jobs int) error {
	if len(s.groups) == 0 {
		return nil
	}
	if err := s.checkPairs(); err != nil {
		return err
	}
	if err := s.arrange(ctx, jobs); err != nil {
		return err
	}
	fixed, wishes := s.byNode()
	waived := map[[2]uint32]bool{}
	for _, w := range s.o.Waivers {
		waived[[2]uint32{min(w.A, w.B), max(w.A, w.B)}] = true
	}
	if err := s.each(ctx, jobs, func(b *brokenGroup) { s.gather(b, fixed, waived) }); err != nil {
		return err
	}
	if err := s.findPieces(ctx, jobs); err != nil {
		return err
	}
	if err := s.each(ctx, jobs, func(b *brokenGroup) { s.weigh(b, wishes) }); err != nil {
		return err
	}
	s.findSame()
	err := s.solveEach(ctx, jobs)
	if err != nil {
		return err
	}
	err = s.each(ctx, jobs, func(b *brokenGroup) {
		if &s.groups[b.same] == b && !b.solution.Proved {
			s.boundApart(b)
		}
	})
	if err != nil {
		return err
	}
	for i := range s.groups {
		b := &s.groups[i]
		b.solution = s.groups[b.same].solution
		b.weighed = b.problem
		s.take(b, b.solution.Masks)
		b.leastStitches = s.groups[b.same].leastStitches
		if b.cutting && b.solution.Proved {
			b.leastStitches = int64(len(b.pieces.made(b.masks)))
		}
		s.a.free[b.group] = b.turnable()
	}
	return s.checkLeft()
}

// The counted work of a layer: what may be spent on the groups of one layer at first, what any group may take of it, and what it may
// take in any case. Neither depends on the time that anything takes.
const (
	layerWork = int64(1) << 33
	mostWork  = int64(1) << 30
	leastWork = int64(1) << 22
)

// solveEach solves one group of each kind: first each with an equal share of the work, and then those that are not proved with what is left.
func (s *solver) solveEach(ctx context.Context, jobs int) error {
	open := 0
	for i := range s.groups {
		open += boolInt(s.groups[i].same == i)
	}
	given, left := int64(0), layerWork
	for open > 0 {
		share := max(leastWork, min(mostWork, left/int64(open)))
		if share < 2*given {
			break // little more than before
		}
		given = share
		err := s.each(ctx, jobs, func(b *brokenGroup) {
			if &s.groups[b.same] == b && !b.solution.Proved {
				b.solution = s.solved(b, exact.Budget{Work: share, Memory: exact.DefaultBudget().Memory})
			}
		})
		if err != nil {
			return err
		}
		open, left = 0, layerWork
		for i := range s.groups {
			if b := &s.groups[i]; b.same == i {
				left -= b.solution.Work
				open += boolInt(!b.solution.Proved)
			}
		}
	}
	return nil
}

// boundApart proves more of a group whose aims are too much to be proved together. What the pairs cost alone is easier: with nothing else
// to pay for, the group falls into smaller pieces, and the bound may be rounded up to whole pairs. Of the stitches, a bound is proved
// with pairs that cost little more than stitches, so that the two are of one size: every assignment with no more pairs than there are
// needs at least what is left of that bound when those pairs are paid.
func (s *solver) boundApart(b *brokenGroup) {
	trial := *b
	trial.units = units{pair: 2}
	s.pose(&trial, nil)
	sol := s.solved(&trial, exact.Budget{Work: mostWork, Memory: exact.DefaultBudget().Memory})
	b.solution.LowerBound = max(b.solution.LowerBound, (sol.LowerBound+1)/2*b.units.pair)
	b.solution.Proved = b.solution.Cost == b.solution.LowerBound
	if !b.cutting {
		return
	}
	masks := b.spread(b.solution.Masks)
	pairs := int64(0)
	for i := range b.edges {
		pairs += int64(boolInt(b.violated(i, masks)))
	}
	const ratio = 2
	trial.units = units{stitch: 2, waived: 2 * ratio, pair: 2 * ratio}
	s.pose(&trial, nil)
	sol = s.solved(&trial, exact.Budget{Work: mostWork / 4, Memory: exact.DefaultBudget().Memory})
	b.leastStitches = max(0, (sol.LowerBound+1)/2-ratio*pairs)
}

// again is the budget for what is solved once more with other weights.
func (b *brokenGroup) again() exact.Budget {
	return exact.Budget{Work: max(leastWork, 4*b.solution.Work), Memory: exact.DefaultBudget().Memory}
}

// take gives the nodes of a group the masks of a solution.
func (s *solver) take(b *brokenGroup, solved []uint8) {
	b.masks = b.spread(solved)
	for k, u := range b.nodes {
		s.a.mask.Data[u] = b.masks[b.atom(k)]
	}
	s.cut(b)
}

// spread gives the masks of all atoms by a solution of the problem.
func (b *brokenGroup) spread(solved []uint8) []uint8 {
	masks := make([]uint8, b.atoms())
	for k := range masks {
		if b.rep == nil {
			masks[k] = solved[k]
		} else {
			masks[k] = solved[b.rep[k]] ^ b.flip[k]
		}
	}
	return masks
}

// turnable tells whether a solution costs as much when it is turned over.
func (b *brokenGroup) turnable() bool {
	p := b.weighed
	if p.Fixed != nil {
		return false
	}
	if p.Cost == nil {
		return true
	}
	turned := make([]uint8, len(b.solution.Masks))
	for k, m := range b.solution.Masks {
		turned[k] = m ^ 1
	}
	return p.CostOf(turned) == p.CostOf(b.solution.Masks)
}

// atoms is the number of atoms of a group.
func (b *brokenGroup) atoms() int {
	if b.pieces == nil || !b.cutting {
		return len(b.nodes)
	}
	return int(b.pieces.first[len(b.nodes)])
}

// atom gives the first atom of a node.
func (b *brokenGroup) atom(k int) int {
	if b.pieces == nil || !b.cutting {
		return k
	}
	return int(b.pieces.first[k])
}

// atomsOf is the number of atoms of a node.
func (b *brokenGroup) atomsOf(k int) int {
	if b.pieces == nil || !b.cutting {
		return 1
	}
	return int(b.pieces.first[k+1] - b.pieces.first[k])
}

// byNode spreads anchors and wishes over the nodes of broken groups.
func (s *solver) byNode() (fixed map[uint32]Mask, wishes map[uint32][2]int64) {
	fixed, wishes = map[uint32]Mask{}, map[uint32][2]int64{}
	for _, an := range s.o.Anchors {
		if _, ok := s.of(an.Node); ok {
			fixed[an.Node] = an.Mask
		}
	}
	for _, w := range s.o.Wishes {
		if _, ok := s.of(w.Node); ok {
			n := wishes[w.Node]
			n[w.Mask.Other()]++
			wishes[w.Node] = n
		}
	}
	return fixed, wishes
}

// gather finds the near pairs and anchors of a group.
func (s *solver) gather(b *brokenGroup, fixed map[uint32]Mask, waived map[[2]uint32]bool) {
	end := arena.Cut[int32](&s.l.room, len(b.nodes)+1) // of the edges under each node
	total := int32(0)
	for k, u := range b.nodes {
		for _, e := range s.l.near.of(u) {
			end[min(uint32(k), s.place(b, e>>1))]++
			total++
		}
	}
	at := int32(0)
	for k, n := range end {
		end[k], at = at, at+n
	}
	b.edges, b.waived = arena.CutDirty[exact.Edge](&s.l.room, int(total)), arena.Cut[bool](&s.l.room, int(total))
	for k, u := range b.nodes {
		for _, e := range s.l.near.of(u) {
			other := s.place(b, e>>1)
			under := min(uint32(k), other)
			b.edges[end[under]] = exact.Edge{U: int32(under), V: int32(max(uint32(k), other))}
			end[under]++
		}
	}
	from := int32(0)
	for _, to := range end[:len(b.nodes)] {
		slices.SortFunc(b.edges[from:to], func(p, q exact.Edge) int { return int(p.V) - int(q.V) })
		from = to
	}
	if len(waived) > 0 {
		for i, e := range b.edges {
			u, v := b.nodes[e.U], b.nodes[e.V]
			b.waived[i] = waived[[2]uint32{min(u, v), max(u, v)}]
		}
	}
	for k, u := range b.nodes {
		if m, ok := fixed[u]; ok {
			if b.fixed == nil {
				b.fixed = make([]int8, len(b.nodes))
				for i := range b.fixed {
					b.fixed[i] = -1
				}
			}
			b.fixed[k] = int8(m)
		}
	}
}

// memory gives the mask of a node in the baseline: NoMemory, or 1 + mask.
func (s *solver) memory(u uint32) uint8 {
	if s.o.Memory == nil {
		return NoMemory
	}
	return s.o.Memory[u]
}

// weigh makes the problem of a group.
func (s *solver) weigh(b *brokenGroup, wishes map[uint32][2]int64) {
	var memories, wished, accepted, cuts int64
	for _, u := range b.nodes {
		if s.memory(u) != NoMemory {
			memories++
		}
		wished += wishes[u][0] + wishes[u][1]
	}
	for _, w := range b.waived {
		if w {
			accepted++
		}
	}
	if b.cutting {
		cuts = int64(len(b.pieces.cuts))
	}
	b.units.wish = 2
	b.units.moved = b.units.wish * (wished + 1)
	b.units.stitch = b.units.moved * (memories + 1)
	b.units.waived = b.units.stitch * (cuts + 1)
	b.units.pair = b.units.waived * (accepted + 1)
	s.pose(b, wishes)
}

// pose makes the problem of a group with the units that it has.
func (s *solver) pose(b *brokenGroup, wishes map[uint32][2]int64) {
	p := &exact.Problem{Nodes: b.atoms()}
	b.problem = p
	b.crowds, b.surplus = nil, 0
	if b.cutting {
		b.pieceEdges(p)
	} else {
		p.Edges = arena.CutDirty[exact.Edge](&s.l.room, len(b.edges))
		for i, e := range b.edges {
			e.Weight = b.weight(i, b.units)
			p.Edges[i] = e
		}
	}
	if b.fixed != nil {
		p.Fixed = make([]int8, p.Nodes)
		for i := b.atoms(); i < p.Nodes; i++ {
			p.Fixed[i] = -1
		}
		for k, m := range b.fixed {
			for n := range b.atomsOf(k) {
				p.Fixed[b.atom(k)+n] = m
			}
		}
	}
	for k, u := range b.nodes {
		cost := wishes[u]
		cost[0], cost[1] = cost[0]*b.units.wish, cost[1]*b.units.wish
		// A shape that is cut does not count as moved, so a memory weighs only on shapes that stay whole.
		if m := s.memory(u); m != NoMemory && b.atomsOf(k) == 1 {
			cost[2-m] += b.units.moved
		}
		if cost == [2]int64{} {
			continue
		}
		if p.Cost == nil {
			p.Cost = make([][2]int64, p.Nodes)
		}
		p.Cost[b.atom(k)] = cost
	}
	if s.a.tied {
		s.contract(b)
	}
}

// weight is what it costs to leave a near pair on one mask.
func (b *brokenGroup) weight(edge int, u units) int64 {
	if b.waived[edge] {
		return u.waived
	}
	return u.pair
}

// contract merges what ties hold together. A node under a tie is never cut, so it is one atom.
func (s *solver) contract(b *brokenGroup) {
	local := make(map[uint32]uint32, len(b.nodes))
	for k, u := range b.nodes {
		local[u] = uint32(b.atom(k))
	}
	old := b.problem
	p := newParity(make([]uint32, old.Nodes))
	for _, t := range b.ties {
		p.relate(local[t.A], local[t.B], uint32(boolInt(t.Opposite))) // contradictions were refused before
	}
	b.rep, b.flip = make([]int32, old.Nodes), make([]uint8, old.Nodes)
	number := make([]int32, old.Nodes)
	reps := int32(0)
	for k := range b.rep {
		root, other := p.find(uint32(k))
		if root == uint32(k) {
			number[k] = reps
			reps++
		}
		b.rep[k], b.flip[k] = number[root], uint8(other)
	}
	made := &exact.Problem{Nodes: int(reps), Edges: make([]exact.Edge, len(old.Edges))}
	for i, e := range old.Edges {
		e.Same = e.Same == (b.flip[e.U] == b.flip[e.V])
		e.U, e.V = b.rep[e.U], b.rep[e.V]
		if e.U > e.V {
			e.U, e.V = e.V, e.U
		}
		made.Edges[i] = e
	}
	if old.Fixed != nil {
		made.Fixed = make([]int8, reps)
		for i := range made.Fixed {
			made.Fixed[i] = -1
		}
		for k, m := range old.Fixed {
			if m >= 0 {
				made.Fixed[b.rep[k]] = m ^ int8(b.flip[k])
			}
		}
	}
	if old.Cost != nil {
		made.Cost = make([][2]int64, reps)
		for k, c := range old.Cost {
			made.Cost[b.rep[k]][b.flip[k]] += c[0]
			made.Cost[b.rep[k]][1^b.flip[k]] += c[1]
		}
	}
	b.problem = made
}
