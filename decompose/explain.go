package decompose

import (
	"cmp"
	"context"
	"maps"
	"math"
	"slices"

	"maskpair/decompose/exact"
	"maskpair/decompose/geom"
	"maskpair/gds"
	"maskpair/gds/arena"
)

// This file explains failure: for each component that two masks cannot do, the smallest odd cycle or the shortest path between
// clashing orders, the pairs that stay on one mask, and how far they are apart.

// explain fills in what is unresolved.
func (s *solver) explain(ctx context.Context, rules *Rules, res *LayerResult, jobs int) error {
	if len(s.groups) == 0 {
		return nil
	}
	e := &explainer{solver: s, groups: map[uint64]int64{}, rules: rules, more: map[uint32]*geom.Parts{},
		facing: newFacingNames(s.l)}
	atOnce(jobs, e.gather, e.sign)
	found := make([]groupResult, len(s.groups))
	err := s.each(ctx, jobs, func(b *brokenGroup) {
		s.within(func(room *arena.Slab) { e.group(room, b, &found[s.indexOf(b)]) })
	})
	if err != nil {
		return err
	}
	unresolved := 0
	for i := range found {
		unresolved += len(found[i].unresolved)
	}
	res.Unresolved = slices.Grow(res.Unresolved, unresolved)
	for i := range found {
		res.add(&found[i])
	}
	slices.SortStableFunc(res.Unresolved, func(a, b Unresolved) int { return cmp.Compare(a.Component, b.Component) })
	for i := range res.Unresolved {
		res.Unresolved[i].Group = e.number(uint64(res.Unresolved[i].Group))
	}
	return e.repairs(ctx, res, jobs)
}

// explainer holds what explaining needs.
type explainer struct {
	*solver
	parts  map[uint32]*geom.Parts // of the nodes of pairs that stay
	shape  []uint64               // what a node is, in the canonical frame of its group: of the nodes of one group after another
	local  []uint32               // by group: where its nodes are in shape, plus 1; 0: no other group can be equal
	groups map[uint64]int64       // signature to number
	rules  *Rules
	more   map[uint32]*geom.Parts // those of parts that repairs need besides
	facing *facingNames           // nil: one spacing
}

// gather finds the geometry of the nodes whose pairs stay on one mask.
func (e *explainer) gather() {
	e.parts = map[uint32]*geom.Parts{}
	for i := range e.solver.groups {
		b := &e.solver.groups[i]
		for x, ed := range b.edges {
			u, v := b.nodes[ed.U], b.nodes[ed.V]
			if b.violated(x, b.masks) {
				for _, n := range [2]uint32{u, v} {
					if e.parts[n] == nil {
						e.parts[n] = &geom.Parts{}
					}
				}
			}
		}
	}
	e.l.geometryOf(e.parts)
}

// groupResult is what the result of a layer has from one broken group.
type groupResult struct {
	unresolved     []Unresolved
	waived         []WaivedPair
	stuck          int64 // components that are unresolved
	jointClash     bool  // no component is, but together they are
	bound          int64 // no assignment leaves fewer pairs
	stitchesBound  int64
	proved         bool // as few pairs are left
	provedAllAims  bool
	pairs, allowed int64 // that are left, not waived and waived
}

// group explains one broken group, component by component. What it needs on the way lies in room.
func (e *explainer) group(room *arena.Slab, b *brokenGroup, res *groupResult) {
	a := e.a
	masks := arena.CutDirty[uint8](room, len(b.nodes))
	for k, u := range b.nodes {
		masks[k] = a.mask.Data[u]
	}
	res.bound, res.stitchesBound, res.provedAllAims = b.units.pairsOf(b.solution.LowerBound), b.leastStitches, b.solution.Proved
	parts := b.components(room, a)
	for _, nodes := range parts {
		part := e.part(room, b, nodes, masks)
		if part.stuck {
			res.stuck++
		}
		if part.stuck || len(part.left)+len(part.accepted) > 0 {
			u := e.entry(room, b, part, a.component[b.nodes[nodes[0]]])
			for _, x := range part.accepted {
				res.waived = append(res.waived, e.waived(b, part, x, u.Top))
			}
			res.pairs += int64(len(u.Pairs))
			res.allowed += int64(len(part.accepted))
			if part.stuck || len(u.Pairs) > 0 {
				res.unresolved = append(res.unresolved, u)
			}
		}
	}
	res.jointClash = res.stuck == 0
	res.proved = res.pairs == res.bound
	for i := range res.unresolved {
		res.unresolved[i].Proved = res.proved
		if len(parts) == 1 {
			res.unresolved[i].LowerBound = res.bound
		}
	}
}

// add takes in what explaining found of one group.
func (l *LayerResult) add(of *groupResult) {
	l.LowerBound += of.bound
	l.StitchesBound += of.stitchesBound
	l.UnresolvedComponents += of.stuck
	l.UnresolvedPairs += of.pairs
	l.WaivedPairs += of.allowed
	l.JointClashes += int64(boolInt(of.jointClash))
	l.Waived = append(l.Waived, of.waived...)
	l.Unresolved = append(l.Unresolved, of.unresolved...)
	l.ProvedOptimal = l.ProvedOptimal && of.proved
	l.AimsProved = l.AimsProved && of.provedAllAims
}

// components gives the nodes of each component of a group, by place in the group, components in ascending order.
func (b *brokenGroup) components(room *arena.Slab, a *assignment) [][]int32 {
	if !a.tied {
		all := arena.CutDirty[int32](room, len(b.nodes))
		for k := range all {
			all[k] = int32(k)
		}
		return [][]int32{all}
	}
	by := map[uint32][]int32{}
	for k, u := range b.nodes {
		c := a.component[u]
		by[c] = append(by[c], int32(k))
	}
	out := make([][]int32, 0, len(by))
	for _, c := range slices.Sorted(maps.Keys(by)) {
		out = append(out, by[c])
	}
	return out
}

// componentPart is one component of a broken group, with numbers of its own.
type componentPart struct {
	nodes    []int32 // places in the group
	edges    []exact.Edge
	source   []int // by edge: its number in the group
	masks    []uint8
	stuck    bool  // its own near pairs contradict the orders
	odd      bool  // it has an odd cycle
	left     []int // edges on one mask, not waived
	accepted []int // edges on one mask, waived
}

// part cuts a component out of a group.
func (e *explainer) part(room *arena.Slab, b *brokenGroup, nodes []int32, masks []uint8) *componentPart {
	p := &componentPart{nodes: nodes, masks: arena.CutDirty[uint8](room, len(nodes))}
	at := newPlaces(nodes, len(b.nodes))
	for i, k := range nodes {
		p.masks[i] = masks[k]
	}
	if at == nil {
		p.edges, p.source = arena.CutDirty[exact.Edge](room, len(b.edges))[:0], arena.CutDirty[int](room, len(b.edges))[:0]
	}
	near := newParity(arena.CutDirty[uint32](room, len(nodes)))
	reps := len(nodes)
	if b.rep != nil {
		reps = b.weighed.Nodes
	}
	orders := newParity(arena.CutDirty[uint32](room, reps+1)) // the last is mask A
	held := func(i int) (uint32, uint32) {
		if b.rep != nil {
			k := b.atom(int(nodes[i]))
			return uint32(b.rep[k]), uint32(b.flip[k])
		}
		return uint32(i), 0
	}
	for i := range nodes {
		rep, flip := held(i)
		if f := b.holds(int(nodes[i])); f >= 0 {
			orders.relate(rep, uint32(reps), uint32(f)^flip)
		}
	}
	for x, ed := range b.edges {
		i, ok := at.of(ed.U)
		if !ok {
			continue
		}
		k, _ := at.of(ed.V)
		n := len(p.edges)
		p.edges = append(p.edges, exact.Edge{U: i, V: k, Weight: 1})
		p.source = append(p.source, x)
		if b.violated(x, b.masks) {
			if b.waived[x] {
				p.accepted = append(p.accepted, n)
			} else {
				p.left = append(p.left, n)
			}
		}
		if !near.relate(uint32(i), uint32(k), 1) {
			p.odd, p.stuck = true, true
		}
		ri, fi := held(int(i))
		rk, fk := held(int(k))
		if !orders.relate(ri, rk, 1^fi^fk) {
			p.stuck = true
		}
	}
	return p
}

// places tells where in some nodes of a group a node is; nil: they are all nodes of the group.
type places map[int32]int32

func newPlaces(nodes []int32, all int) places {
	if len(nodes) == all {
		return nil
	}
	at := make(places, len(nodes))
	for i, k := range nodes {
		at[k] = int32(i)
	}
	return at
}

func (p places) of(k int32) (int32, bool) {
	if p == nil {
		return k, true
	}
	i, ok := p[k]
	return i, ok
}

// entry words a component for the result.
func (e *explainer) entry(room *arena.Slab, b *brokenGroup, p *componentPart, component uint32) Unresolved {
	l := e.l
	u := Unresolved{Component: int64(component), Shapes: int64(len(p.nodes)), Cause: OrderClash}
	firstNode := b.nodes[p.nodes[0]]
	u.node = firstNode
	top := l.topOf(firstNode)
	u.Top = l.flat.h.name(l.flat.h.tops[top])
	var ring []int32
	if p.odd {
		u.Cause = OddCycle
		var sure bool
		if ring, sure = p.smallestCycle(room); !sure {
			u.NotComputed = append(u.NotComputed, "cycle")
		}
	} else {
		ring = p.clash(b)
	}
	for _, i := range ring {
		n := b.nodes[p.nodes[i]]
		u.Cycle = append(u.Cycle, CycleShape{l.half(e.boxes[n]), Mask(p.masks[i])})
	}
	e.byPlace(room, b, p)
	u.Pairs = make([]Pair, len(p.left))
	for i, x := range p.left {
		u.Pairs[i] = e.pair(b, p, x, u.Top)
	}
	e.candidates(b, p, ring, &u)
	fr := b.canon.frame
	u.Cell = l.flat.h.name(fr.structure)
	box := emptyBox
	for _, k := range p.nodes {
		box = box.join(e.boxes[b.nodes[k]])
	}
	u.Group = int64(e.signature(b, p, box))
	place := fr.at.inverse().applyBox(box)
	k := 2 / l.flat.forms.scale
	u.CellPlace = Spot{place.X1 * k, place.Y1 * k}
	u.CellTransform = gds.NewTransform(fr.at.turn, fr.at.x/l.flat.forms.scale, fr.at.y/l.flat.forms.scale).String()
	return u
}

// byPlace sorts the pairs of a component that stay: by their boxes, the lesser of the two first. There may be very many.
func (e *explainer) byPlace(room *arena.Slab, b *brokenGroup, p *componentPart) {
	box := func(i int32) Box { return e.boxes[b.nodes[p.nodes[i]]] }
	ends := arena.CutDirty[int32](room, 2*len(p.left))[:0]
	for _, x := range p.left {
		ends = append(ends, p.edges[x].U, p.edges[x].V)
	}
	slices.SortFunc(ends, func(i, k int32) int { return compareBoxes(box(i), box(k)) })
	rank := arena.Cut[int32](room, len(p.nodes)) // of an end by its box; equal boxes have equal ranks
	for at, i := range ends {
		rank[i] = int32(at)
		if at > 0 && box(ends[at-1]) == box(i) {
			rank[i] = rank[ends[at-1]]
		}
	}
	key := func(x int) uint64 {
		u, v := rank[p.edges[x].U], rank[p.edges[x].V]
		return uint64(min(u, v))<<32 | uint64(max(u, v))
	}
	slices.SortFunc(p.left, func(x, y int) int { return cmp.Compare(key(x), key(y)) })
}

// mostTrials bounds the near pairs and pieces that are looked at to try the cuts of one component one by one.
const mostTrials = int64(1) << 28

// candidates words where the shapes of a component can be cut, and which cuts help.
func (e *explainer) candidates(b *brokenGroup, p *componentPart, ring []int32, u *Unresolved) {
	if b.pieces == nil {
		return
	}
	here := make(map[int32]bool, len(p.nodes))
	for _, k := range p.nodes {
		here[k] = true
	}
	// Alone, only a cut of a shape on every odd cycle (or clash) can resolve, so on this one.
	onRing := map[int32]bool{}
	for _, i := range ring {
		onRing[p.nodes[i]] = true
	}
	forward := b.canon.back.inverse()
	scale := e.l.flat.forms.scale
	place := map[int]int{}
	work := int64(0) // spent on trying cuts one by one
	for i := range b.pieces.cuts {
		c := &b.pieces.cuts[i]
		if !here[c.node] {
			continue
		}
		place[i] = len(u.Candidates)
		tried := onRing[c.node] && work < mostTrials
		if tried {
			work += int64(len(b.edges) + b.problem.Nodes)
		}
		u.Candidates = append(u.Candidates, StitchCandidate{Box: e.l.half(forward.applyBox(Box(c.box))), Overlap: c.length() / scale,
			Resolves: tried && e.resolves(b, i), Made: b.cutting && b.masks[c.low] != b.masks[c.high]})
	}
	if work >= mostTrials {
		u.NotComputed = append(u.NotComputed, "resolves")
	}
	if len(u.Candidates) == 0 {
		u.NoCandidate = b.pieces.forbids(p.nodes, e.rules, e.l.rules)
		return
	}
	if b.least == nil {
		set, known := e.leastCuts(b)
		b.least, b.leastKnown = &set, known
	}
	if !b.leastKnown {
		u.NotComputed = append(u.NotComputed, "least_stitches")
	}
	for _, i := range *b.least {
		if k, ok := place[i]; ok {
			u.LeastStitches = append(u.LeastStitches, k)
		}
	}
}

// holds gives the mask that orders hold a node on, through ties or by itself; -1 where none do.
func (b *brokenGroup) holds(k int) int8 {
	if b.rep == nil || b.weighed.Fixed == nil {
		if b.fixed == nil {
			return -1
		}
		return b.fixed[k]
	}
	atom := b.atom(k)
	if f := b.weighed.Fixed[b.rep[atom]]; f >= 0 {
		return f ^ int8(b.flip[atom])
	}
	return -1
}

// smallestCycle gives the smallest of the smallest odd cycles through the pairs that stay; where none stays, of all. It tells whether it is sure.
func (p *componentPart) smallestCycle(room *arena.Slab) (cycle []int32, sure bool) {
	finder := exact.NewCycleFinder(room, len(p.nodes), p.edges)
	if cycle, sure = finder.SmallestThrough(slices.Concat(p.left, p.accepted)); cycle != nil {
		return cycle, sure
	}
	return finder.Smallest()
}

// clash gives the shortest path of near pairs between two anchored nodes whose masks it contradicts: breadth first from all anchored
// nodes at once, over nodes and the masks that they would need.
func (p *componentPart) clash(b *brokenGroup) []int32 {
	n := len(p.nodes)
	fixed := make([]int8, n)
	for i, k := range p.nodes {
		fixed[i] = b.holds(int(k))
	}
	next := make([][]int32, n)
	for _, ed := range p.edges {
		next[ed.U] = append(next[ed.U], ed.V)
		next[ed.V] = append(next[ed.V], ed.U)
	}
	const source, unseen = -1, -2
	back := make([]int32, 2*n)
	for i := range back {
		back[i] = unseen
	}
	var queue []int32
	for i, f := range fixed {
		if f >= 0 {
			back[2*i+int(f)] = source
			queue = append(queue, int32(2*i+int(f)))
		}
	}
	for len(queue) > 0 {
		at := queue[0]
		queue = queue[1:]
		i, m := at/2, at%2
		if fixed[i] >= 0 && int32(fixed[i]) != m {
			var path []int32
			for at != source {
				path = append(path, at/2)
				at = back[at]
			}
			slices.Reverse(path)
			return path
		}
		for _, k := range next[i] {
			if to := 2*k + (m ^ 1); back[to] == unseen {
				back[to] = at
				queue = append(queue, to)
			}
		}
	}
	return nil
}

// pair words a near pair that stays on one mask.
func (e *explainer) pair(b *brokenGroup, p *componentPart, x int, top string) Pair {
	ed := p.edges[x]
	u, v := b.nodes[p.nodes[ed.U]], b.nodes[p.nodes[ed.V]]
	out := e.pairOf(b, p.source[x], u, v, top)
	out.Mask = Mask(p.masks[ed.U])
	out.MaskB = out.Mask
	return out
}

// pairOf words a near pair of a group.
func (e *explainer) pairOf(b *brokenGroup, edge int, u, v uint32, top string) Pair {
	if compareBoxes(e.boxes[u], e.boxes[v]) > 0 {
		u, v = v, u
	}
	scale := float64(e.l.flat.forms.scale)
	out := Pair{A: e.l.half(e.boxes[u]), B: e.l.half(e.boxes[v]), Top: top}
	if e.facing != nil && e.byFacing(b, edge, u, v, &out) {
		return out
	}
	from, to, sq := e.closest(b, edge, u, v)
	k := 2 / e.l.flat.forms.scale
	out.From, out.To, out.DistanceSq = Spot{from.X * k, from.Y * k}, Spot{to.X * k, to.Y * k}, sq/(scale*scale)
	out.Rule, out.Spacing = "same_mask_spacing", e.l.rules.Spacing
	out.Gap = gapBox(out.A, out.B, out.From, out.To)
	out.Widen = lacks(e.l.rules.Spacing, out.DistanceSq)
	return out
}

// closest gives where two nodes come nearest; of a shape that is cut, the pieces count that are on the mask of the other.
func (e *explainer) closest(b *brokenGroup, edge int, u, v uint32) (from, to geom.Point, sq float64) {
	if !b.cutting || b.pieces.pairs[edge] == nil {
		return geom.Closest(e.reach(u, v), e.reach(v, u))
	}
	forward := b.canon.back.inverse()
	piece := func(atom int32, n, of uint32) geom.Parts {
		rects := b.pieces.rects[atom]
		if rects == nil {
			return e.reach(n, of)
		}
		var p geom.Parts
		for _, r := range rects {
			p.Rects = append(p.Rects, geom.Rect(forward.applyBox(Box(r))))
		}
		return p
	}
	ends := b.edges[edge]
	turned := b.nodes[ends.U] != u
	sq = math.Inf(1)
	for _, q := range b.pieces.pairs[edge] {
		if b.masks[q[0]] != b.masks[q[1]] {
			continue
		}
		if turned {
			q[0], q[1] = q[1], q[0]
		}
		if f, t, d := geom.Closest(piece(q[0], u, v), piece(q[1], v, u)); d < sq {
			from, to, sq = f, t, d
		}
	}
	return from, to, sq
}

// reach gives the parts of a node that can be near to another: those within the largest spacing of its box.
func (e *explainer) reach(n, of uint32) geom.Parts {
	all := e.parts[n]
	if len(all.Rects) < 8 {
		return *all
	}
	box, s := e.boxes[of], e.l.rules.Reach()*e.l.flat.forms.scale
	near := geom.Parts{Polygons: all.Polygons}
	for _, r := range all.Rects {
		if r.X1-box.X2 < s && box.X1-r.X2 < s && r.Y1-box.Y2 < s && box.Y1-r.Y2 < s {
			near.Rects = append(near.Rects, r)
		}
	}
	return near
}

// waived words a pair that the user accepts.
func (e *explainer) waived(b *brokenGroup, p *componentPart, x int, top string) WaivedPair {
	ed := p.edges[x]
	u, v := b.nodes[p.nodes[ed.U]], b.nodes[p.nodes[ed.V]]
	out := WaivedPair{Pair: e.pair(b, p, x, top)}
	for _, w := range e.o.Waivers {
		if w.A == u && w.B == v || w.A == v && w.B == u {
			out.Name, out.Reason = w.Name, w.Reason
			break
		}
	}
	return out
}
