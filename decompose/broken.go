package decompose

import (
	"context"
	"encoding/binary"
	"hash/maphash"
	"slices"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/exact"
)

// This file hands the groups that parity does not settle to package exact, and takes back masks and bounds. Aims are packed in one
// 64-bit weight each, the dearer above the cheaper: pairs that are not waived, all pairs, moved shapes, wishes.

// brokenGroup is a group that two masks cannot do, with its nodes in an order that depends on the geometry of its cells alone.
type brokenGroup struct {
	group       int32
	nodes       []uint32 // canonical order
	first, last uint32   // least and greatest ordinal
	canon       canon
	edges       []exact.Edge   // near pairs by place in nodes, ascending
	waived      []bool         // by edge
	problem     *exact.Problem // to be solved next
	weighed     *exact.Problem // with the aims that count
	rep         []int32        // by node, where ties merge nodes: node of the problem; else nil
	flip        []uint8        // by node, with rep: on the other mask than that
	units       units
	same        int            // index of the group whose problem is the same, possibly its own
	solution    exact.Solution // of weighed
	homing      bool           // solved again, nearest to the usual masks
	homeUnit    int64          // by which the aims that count are weighed then
	near        exact.Solution
}

// units are the weights of one group.
type units struct{ wish, moved, waived, pair int64 }

// pairsOf takes the number of pairs out of a cost.
func (u units) pairsOf(cost int64) int64 { return cost / u.pair }

// solver solves the broken groups of one layout.
type solver struct {
	l      *layout
	a      *assignment
	o      *Orders
	groups []brokenGroup
	index  map[int32]int // group number to index in groups
	broken []uint64      // bit by group number
}

// newSolver gathers the nodes of the broken groups.
func newSolver(l *layout, a *assignment, o *Orders) *solver {
	s := &solver{l: l, a: a, o: o, index: map[int32]int{}, broken: make([]uint64, (a.groups+63)/64)}
	for i, g := range a.broken {
		s.groups = append(s.groups, brokenGroup{group: g})
		s.index[g] = i
		s.broken[g>>6] |= 1 << (g & 63)
	}
	if len(s.groups) == 0 {
		return s
	}
	for u := range uint32(l.nodes) {
		if i, ok := s.of(u); ok {
			s.groups[i].nodes = append(s.groups[i].nodes, u)
		}
	}
	s.arrange()
	return s
}

// of gives the index of the broken group of a node; false where its group is not broken.
func (s *solver) of(node uint32) (int, bool) {
	g := s.a.group.Data[node]
	if s.broken[g>>6]>>(g&63)&1 == 0 {
		return 0, false
	}
	return s.index[int32(g)], true
}

// solve gives every broken group its masks.
func (s *solver) solve(ctx context.Context, jobs int) error {
	if len(s.groups) == 0 {
		return nil
	}
	fixed, wishes := s.byNode()
	waived := map[[2]uint32]bool{}
	for _, w := range s.o.Waivers {
		waived[[2]uint32{min(w.A, w.B), max(w.A, w.B)}] = true
	}
	var g errgroup.Group
	g.SetLimit(max(jobs, 1))
	for i := range s.groups {
		g.Go(func() error {
			s.build(&s.groups[i], fixed, wishes, waived)
			return ctx.Err()
		})
	}
	if err := g.Wait(); err != nil {
		return err
	}
	s.findSame()
	for i := range s.groups {
		if s.groups[i].same != i {
			continue
		}
		g.Go(func() error {
			s.groups[i].solution = exact.Solve(s.groups[i].problem, exact.DefaultBudget())
			return ctx.Err()
		})
	}
	if err := g.Wait(); err != nil {
		return err
	}
	for i := range s.groups {
		b := &s.groups[i]
		b.solution = s.groups[b.same].solution
		b.weighed = b.problem
		for k, u := range b.nodes {
			s.a.mask.Data[u] = b.mask(b.solution.Masks, k)
		}
		// A solution that costs as much when it is turned over leaves the group free.
		s.a.free[b.group] = b.problem.Fixed == nil && b.problem.Cost == nil
		if b.problem.Fixed == nil && b.problem.Cost != nil {
			turned := make([]uint8, len(b.solution.Masks))
			for k, m := range b.solution.Masks {
				turned[k] = m ^ 1
			}
			s.a.free[b.group] = b.problem.CostOf(turned) == b.solution.Cost
		}
	}
	return nil
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

// build makes the problem of one group.
func (s *solver) build(b *brokenGroup, fixed map[uint32]Mask, wishes map[uint32][2]int64, waived map[[2]uint32]bool) {
	local := make(map[uint32]int32, len(b.nodes))
	for k, u := range b.nodes {
		local[u] = int32(k)
	}
	var memories, wished, accepted int64
	for _, u := range b.nodes {
		if s.o.Memory != nil && s.o.Memory[u] != NoMemory {
			memories++
		}
		wished += wishes[u][0] + wishes[u][1]
		for _, e := range s.l.near.of(u) {
			v := e >> 1
			w := waived[[2]uint32{u, v}]
			if w {
				accepted++
			}
			b.edges = append(b.edges, exact.Edge{U: min(local[u], local[v]), V: max(local[u], local[v])})
			b.waived = append(b.waived, w)
		}
	}
	b.units.wish = 1
	b.units.moved = wished + 1
	b.units.waived = b.units.moved * (memories + 1)
	b.units.pair = b.units.waived * (accepted + 1)
	order := make([]int, len(b.edges))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(i, j int) int {
		if b.edges[i].U != b.edges[j].U {
			return int(b.edges[i].U) - int(b.edges[j].U)
		}
		return int(b.edges[i].V) - int(b.edges[j].V)
	})
	edges, accept := make([]exact.Edge, len(order)), make([]bool, len(order))
	for k, i := range order {
		edges[k], accept[k] = b.edges[i], b.waived[i]
		edges[k].Weight = b.units.pair
		if accept[k] {
			edges[k].Weight = b.units.waived
		}
	}
	b.edges, b.waived = edges, accept
	p := &exact.Problem{Nodes: len(b.nodes), Edges: slices.Clone(edges)}
	b.problem = p
	for k, u := range b.nodes {
		if m, ok := fixed[u]; ok {
			if p.Fixed == nil {
				p.Fixed = make([]int8, len(b.nodes))
				for i := range p.Fixed {
					p.Fixed[i] = -1
				}
			}
			p.Fixed[k] = int8(m)
		}
		cost := wishes[u]
		if s.o.Memory != nil && s.o.Memory[u] != NoMemory {
			cost[2-s.o.Memory[u]] += b.units.moved
		}
		if cost != [2]int64{} {
			if p.Cost == nil {
				p.Cost = make([][2]int64, len(b.nodes))
			}
			p.Cost[k] = cost
		}
	}
	if s.a.tied {
		s.contract(b, local)
	}
}

// contract merges what ties hold together: local node k then stands for node rep[k] of the problem, turned over where flip[k] is 1.
func (s *solver) contract(b *brokenGroup, local map[uint32]int32) {
	p := newParity(make([]uint32, len(b.nodes)))
	for _, t := range s.o.Ties {
		u, ok := local[t.A]
		if !ok {
			continue
		}
		apart := uint32(0)
		if t.Opposite {
			apart = 1
		}
		p.relate(uint32(u), uint32(local[t.B]), apart) // contradictions were refused before
	}
	b.rep, b.flip = make([]int32, len(b.nodes)), make([]uint8, len(b.nodes))
	number := make([]int32, len(b.nodes))
	reps := int32(0)
	for k := range b.nodes {
		root, other := p.find(uint32(k))
		if root == uint32(k) {
			number[k] = reps
			reps++
		}
		b.rep[k], b.flip[k] = number[root], uint8(other)
	}
	old := b.problem
	made := &exact.Problem{Nodes: int(reps), Edges: make([]exact.Edge, len(old.Edges))}
	for i, e := range old.Edges {
		e.Same = b.flip[e.U] != b.flip[e.V]
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

// mask gives the mask of local node k by a solution of the problem.
func (b *brokenGroup) mask(masks []uint8, k int) uint8 {
	if b.rep == nil {
		return masks[k]
	}
	return masks[b.rep[k]] ^ b.flip[k]
}

// findSame finds groups with equal problems, so that each is solved once.
func (s *solver) findSame() {
	seed := maphash.MakeSeed()
	byHash := map[uint64][]int{}
	for i := range s.groups {
		b := &s.groups[i]
		b.same = i
		h := hashProblem(seed, b.problem)
		for _, k := range byHash[h] {
			if equalProblems(b.problem, s.groups[k].problem) {
				b.same = k
				break
			}
		}
		if b.same == i {
			byHash[h] = append(byHash[h], i)
		}
	}
}

func hashProblem(seed maphash.Seed, p *exact.Problem) uint64 {
	var h maphash.Hash
	h.SetSeed(seed)
	var buf [17]byte
	for _, e := range p.Edges {
		binary.LittleEndian.PutUint32(buf[0:], uint32(e.U))
		binary.LittleEndian.PutUint32(buf[4:], uint32(e.V))
		binary.LittleEndian.PutUint64(buf[8:], uint64(e.Weight))
		buf[16] = 0
		if e.Same {
			buf[16] = 1
		}
		h.Write(buf[:])
	}
	for _, f := range p.Fixed {
		h.WriteByte(byte(f))
	}
	return h.Sum64()
}

func equalProblems(p, q *exact.Problem) bool {
	return p.Nodes == q.Nodes && slices.Equal(p.Edges, q.Edges) && slices.Equal(p.Fixed, q.Fixed) && slices.Equal(p.Cost, q.Cost)
}
