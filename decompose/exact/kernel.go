package exact

import (
	"cmp"
	"math/bits"
	"slices"

	"maskpair/gds/arena"
)

// This file solves the kernel block by block, from the leaves of the block tree to its roots.
//
// A block without unary terms below its top node may be flipped at no cost, so its optimum does not depend on the mask of the top: it is solved with the top on A, once
// and for all. The optimum of any other block is a pair of numbers, one for each mask of the top, and becomes a unary term of the top.
//
// A block that is beyond the budget stays for later, when it is known what the others have left of it. If it has unary terms, it cannot be told apart from the blocks above
// it, and is solved together with them.

// solver is the workspace and the account of one call of Solve.
type solver struct {
	room   *arena.Slab // nil: the heap
	budget Budget
	work   int64 // spent
	width  int
	quick  bool // what is beyond the budget gets a descent only

	order  minFill
	sweep  sweeper
	plan   plan
	tables tables
	local  []int32 // node of the kernel -> node of the piece in hand, or -1
	sub    graph
	weight []int64 // in the order of a plan
	unary  []int64
	ranked []uint8
	queue  []int32
}

// share is the part of the budget that a block may take before all others are known: one in so many.
const share = 64

// cheap is the number of table entries per node that a block may take in any case before all others are known.
const cheap = 256

// sweeps is the number of nodes from which a sweep is tried.
const sweeps = 16

// piece is a part of the kernel that is solved by itself: nodes without the top, which is held on A, or -1 where there is none.
type piece struct {
	nodes []int32
	top   int32
	work  int64 // that an exact solution takes; unlimited where there is none
	held  int64 // energy of the edges to the top with all nodes on A
}

// forest gathers the answers of the blocks.
type forest struct {
	top   []int32           // per node: top node of the block it is below in, or -1
	given [][2]uint8        // per node: its mask if the top is on A, on B
	order []int32           // nodes in the order in which their blocks were met: tops come later
	wait  map[int32][]int32 // node -> nodes of the pieces that hang at it unsolved; mostly empty
	late  []piece
}

// kernel solves g, whose unary terms it uses up, and returns an assignment and a lower bound on the energy.
func (s *solver) kernel(g *graph) (x []uint8, bound int64) {
	n := g.nodes()
	f := &forest{top: fit[int32](s.room, nil, n), given: fitZeroed[[2]uint8](s.room, nil, n), order: fit[int32](s.room, nil, n)[:0], wait: map[int32][]int32{}}
	s.local = fit[int32](s.room, nil, n)
	for i := range s.local {
		s.local[i] = -1
	}
	blocks(s.room, g,
		func(top int32, below []int32) { bound += s.block(g, f, top, below) },
		func(root int32) {
			f.order = append(f.order, root)
			f.top[root] = -1
			if w := f.wait[root]; w != nil {
				delete(f.wait, root)
				f.late = append(f.late, piece{nodes: append(w, root), top: -1})
				return
			}
			bound += min(0, g.h[root])
			if g.h[root] < 0 {
				f.given[root] = [2]uint8{1, 1}
			}
		})
	bound += s.late(g, f)
	x = fit[uint8](s.room, nil, n)
	for i := len(f.order) - 1; i >= 0; i-- {
		v := f.order[i]
		side := uint8(0)
		if t := f.top[v]; t >= 0 {
			side = x[t]
		}
		x[v] = f.given[v][side]
	}
	return x, bound
}

// block solves one block, or leaves it for later, and returns what it adds to the bound.
func (s *solver) block(g *graph, f *forest, top int32, below []int32) int64 {
	f.order = append(f.order, below...)
	free, whole := true, true
	for _, v := range below {
		f.top[v] = top
		free = free && g.h[v] == 0
		whole = whole && (len(f.wait) == 0 || f.wait[v] == nil)
	}
	if !whole {
		nodes := slices.Clone(below)
		for _, v := range below {
			nodes = append(nodes, f.wait[v]...)
			delete(f.wait, v)
		}
		f.wait[top] = append(f.wait[top], nodes...)
		return 0
	}
	if len(below) == 1 {
		return bridge(g, f, top, below[0])
	}
	if free {
		if e, ok := s.balanced(g, f, top, below); ok {
			return e
		}
	}
	ca := s.load(g, below, top, 0)
	if !s.planned(below, max(s.budget.Work/share, cheap*int64(len(below)))) {
		if free {
			f.late = append(f.late, piece{nodes: slices.Clone(below), top: top})
		} else {
			f.wait[top] = append(f.wait[top], below...)
		}
		return 0
	}
	ea := ca + s.carry()
	for i, v := range below {
		m := s.ranked[s.plan.rank[i]]
		f.given[v] = [2]uint8{m, 1 ^ m}
	}
	if free {
		return ea
	}
	eb := s.load(g, below, top, 1) + s.carry()
	for i, v := range below {
		f.given[v][1] = s.ranked[s.plan.rank[i]]
	}
	g.h[top] += eb - ea
	return ea
}

// bridge solves a block of one edge.
func bridge(g *graph, f *forest, top, v int32) int64 {
	var c int64
	adj, wt := g.row(v)
	for k, w := range adj {
		if w == top {
			c = wt[k]
		}
	}
	var best [2]int64
	for side := range best {
		a, b := int64(0), g.h[v]
		if side == 0 {
			a += c
		} else {
			b += c
		}
		best[side] = min(a, b)
		f.given[v][side] = 0
		if b < a {
			f.given[v][side] = 1
		}
	}
	g.h[top] += best[1] - best[0]
	return best[0]
}

// load makes s.sub the graph that the nodes of a piece span, with its top, if it has one, on the given mask; it returns the energy of the edges to the top with all nodes on A.
func (s *solver) load(g *graph, nodes []int32, top int32, side uint8) int64 {
	for i, v := range nodes {
		s.local[v] = int32(i)
	}
	sub := &s.sub
	halves := 0
	for _, v := range nodes {
		halves += int(g.start[v+1] - g.start[v])
	}
	sub.reset(len(nodes), halves)
	var held int64
	for _, v := range nodes {
		h := g.h[v]
		adj, wt := g.row(v)
		for k, w := range adj {
			if w == top {
				if side == 0 {
					held += wt[k]
					h -= wt[k]
				} else {
					h += wt[k]
				}
			} else if l := s.local[w]; l >= 0 {
				sub.adj = append(sub.adj, l)
				sub.wt = append(sub.wt, wt[k])
			}
		}
		sub.h = append(sub.h, h)
		sub.start = append(sub.start, int32(len(sub.adj)))
	}
	for _, v := range nodes {
		s.local[v] = -1
	}
	return held
}

// balanced solves a block without unary terms in which no cycle of edges is contradictory.
func (s *solver) balanced(g *graph, f *forest, top int32, below []int32) (energy int64, ok bool) {
	// s.local has 1 plus the mask of a node that has been reached, 0 for one not reached, -1 outside the block. The row of the top is not walked, as it may be long and the
	// top of many blocks; without it the block is still connected.
	for _, v := range below {
		s.local[v] = 0
	}
	s.local[top] = 0
	s.local[below[0]] = 1
	s.queue = append(s.queue[:0], below[0])
	ok = true
	for at := 0; at < len(s.queue) && ok; at++ {
		v := s.queue[at]
		adj, wt := g.row(v)
		for k, w := range adj {
			want := s.local[v]
			if wt[k] > 0 {
				want = 3 - want
			}
			switch s.local[w] {
			case -1:
				continue
			case 0:
				s.local[w] = want
				if w != top {
					s.queue = append(s.queue, w)
				}
			default:
				ok = ok && s.local[w] == want
			}
			if w == top || w > v {
				energy += min(0, wt[k])
			}
		}
	}
	for _, v := range below {
		if ok {
			m := uint8(0)
			if s.local[v] != s.local[top] {
				m = 1
			}
			f.given[v] = [2]uint8{m, 1 ^ m}
		}
		s.local[v] = -1
	}
	s.local[top] = -1
	return energy, ok
}

// planned makes a plan for s.sub, which spans the given nodes of the kernel, and tells whether it fits the given work, what is left of the budget, and the memory.
func (s *solver) planned(nodes []int32, work int64) bool {
	work = min(work, s.budget.Work-s.work)
	limit := min(bits.Len64(uint64(max(0, work)))-2, bits.Len64(uint64(max(0, s.budget.Memory)))-5)
	if limit < 0 || !s.narrow(&s.sub, nodes, limit, work, sweeps) {
		return false
	}
	s.plan.make(&s.sub, &s.order)
	return s.plan.memory() <= s.budget.Memory
}

// carry carries out s.plan with the weights of s.sub, and leaves the masks by rank in s.ranked.
func (s *solver) carry() int64 {
	p, g := &s.plan, &s.sub
	s.work += p.work
	s.width = max(s.width, p.width)
	n := g.nodes()
	s.weight, s.unary, s.ranked = resize(s.weight, len(p.ref)), resize(s.unary, n), resize(s.ranked, n)
	for k, r := range p.ref {
		s.weight[k] = g.wt[r.half]
	}
	for r, v := range p.node {
		s.unary[r] = g.h[v]
	}
	e := s.tables.solve(p, s.weight, s.unary)
	s.tables.decode(p, s.ranked)
	return e
}

// late solves what the blocks left: first what fits the budget, cheapest first, and then the rest, each with an equal share of what is left.
func (s *solver) late(g *graph, f *forest) (bound int64) {
	for i := range f.late {
		pc := &f.late[i]
		pc.held = s.load(g, pc.nodes, pc.top, 0)
		pc.work = unlimited
		if s.planned(pc.nodes, unlimited) {
			pc.work = s.plan.work
		}
	}
	slices.SortStableFunc(f.late, func(a, b piece) int { return cmp.Compare(a.work, b.work) })
	for i, pc := range f.late {
		fits := pc.work <= s.budget.Work-s.work
		if len(f.late) > 1 { // else the piece and its plan are at hand
			s.load(g, pc.nodes, pc.top, 0)
			fits = fits && s.planned(pc.nodes, unlimited)
		}
		bound += pc.held
		x := make([]uint8, len(pc.nodes))
		if fits {
			bound += s.carry()
			for k := range x {
				x[k] = s.ranked[s.plan.rank[k]]
			}
		} else {
			s.width = max(s.width, s.order.width)
			rest := max(0, s.budget.Work-s.work) / int64(len(f.late)-i)
			bound += s.beyond(x, rest)
		}
		for k, v := range pc.nodes {
			f.given[v] = [2]uint8{x[k], 1 ^ x[k]}
			if pc.top < 0 {
				f.given[v][1] = x[k]
			}
		}
	}
	return bound
}
