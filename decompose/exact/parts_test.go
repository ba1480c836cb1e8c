package exact

import (
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// This file tests the stages one by one, each against its definition worked out the slow way.

// signed is the graph of a problem as it is, without reductions; held nodes and loops must be absent. The cost of a problem is the energy plus the base.
func signed(p *Problem) (g *graph, base int64) {
	s := make([][]int64, p.Nodes)
	for i := range s {
		s[i] = make([]int64, p.Nodes)
	}
	for _, e := range p.Edges {
		w := e.Weight
		if e.Same {
			base += w
			w = -w
		}
		s[e.U][e.V] += w
		s[e.V][e.U] += w
	}
	g = &graph{start: []int32{0}}
	for i := range s {
		for j, w := range s[i] {
			if w != 0 && i != j {
				g.adj, g.wt = append(g.adj, int32(j)), append(g.wt, w)
			}
		}
		g.start = append(g.start, int32(len(g.adj)))
		var h int64
		if p.Cost != nil {
			base += p.Cost[i][0]
			h = p.Cost[i][1] - p.Cost[i][0]
		}
		g.h = append(g.h, h)
	}
	return g, base
}

// loose draws a problem without held nodes and loops.
func loose(rng *rand.Rand, n int) *Problem {
	p := randomProblem(rng, n)
	p.Fixed = nil
	p.Edges = slices.DeleteFunc(p.Edges, func(e Edge) bool { return e.U == e.V })
	return p
}

// masksOf spreads the bits of k.
func masksOf(k, n int) []uint8 {
	x := make([]uint8, n)
	for i := range x {
		x[i] = uint8(k >> i & 1)
	}
	return x
}

func leastEnergy(g *graph) int64 {
	least := unlimited
	for k := range 1 << g.nodes() {
		least = min(least, g.energy(masksOf(k, g.nodes())))
	}
	return least
}

func TestEnergyIsCost(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 32))
	for range 200 {
		p := loose(rng, 1+rng.IntN(7))
		g, base := signed(p)
		for k := range 1 << p.Nodes {
			x := masksOf(k, p.Nodes)
			if e := base + g.energy(x); e != p.CostOf(x) {
				t.Fatalf("energy %d, cost %d", e, p.CostOf(x))
			}
		}
	}
}

// TestReductionsKeepCosts: every assignment of the kernel costs, with the base, what the assignment restored from it costs.
func TestReductionsKeepCosts(t *testing.T) {
	rng := rand.New(rand.NewPCG(33, 34))
	smaller, left := 0, 0
	for range 1500 {
		p := randomProblem(rng, 1+rng.IntN(10))
		var loops int64
		for _, e := range p.Edges {
			if e.U == e.V && !e.Same {
				loops += e.Weight
			}
		}
		var r reducer
		r.load(p, everyNode(p.Nodes))
		r.run()
		g, nodes := r.kernel()
		if len(nodes) < p.Nodes {
			smaller++
		}
		if len(nodes) > 0 {
			left++
		}
		for k := range 1 << len(nodes) {
			x := masksOf(k, len(nodes))
			all := make([]uint8, p.Nodes)
			r.restore(all, nodes, x)
			if got, want := r.base+loops+g.energy(x), p.CostOf(all); got != want {
				t.Fatalf("%d nodes of %d left: energy and base %d, cost %d", len(nodes), p.Nodes, got, want)
			}
		}
	}
	if smaller < 500 || left < 100 {
		t.Errorf("%d problems got smaller, %d were not solved by it", smaller, left)
	}
}

// TestTwinsMerge: a complete graph of three parts has only twins, and comes down to a triangle of their weights, which is solved by the rule for heavy edges.
func TestTwinsMerge(t *testing.T) {
	p := &Problem{Nodes: 30}
	for u := range 30 {
		for v := range u {
			if u%3 != v%3 {
				p.Edges = append(p.Edges, unit(u, v))
			}
		}
	}
	var r reducer
	r.load(p, everyNode(p.Nodes))
	r.run()
	if g, _ := r.kernel(); g.nodes() != 0 {
		t.Errorf("%d nodes are left", g.nodes())
	}
	if s := Solve(p, DefaultBudget()); s.Cost != 100 {
		t.Errorf("cost %d, want the 10*10 edges between two of the parts", s.Cost)
	}
}

// hubs is a random graph in which a few nodes have very many neighbours.
func hubs(rng *rand.Rand, n int) *Problem {
	p := &Problem{Nodes: n}
	seen := map[[2]int]bool{}
	for range 2 * n {
		u, v := rng.IntN(n), rng.IntN(n)
		if rng.IntN(2) == 0 {
			u = rng.IntN(4)
		}
		if u != v && !seen[[2]int{min(u, v), max(u, v)}] {
			seen[[2]int{min(u, v), max(u, v)}] = true
			p.Edges = append(p.Edges, Edge{int32(u), int32(v), 1 + rng.Int64N(5), rng.IntN(4) == 0})
		}
	}
	return p
}

// TestMinFillOrder plays the elimination through on sets, and asks at each step whether the node chosen is one of least fill, and whether its bag is right.
func TestMinFillOrder(t *testing.T) {
	rng := rand.New(rand.NewPCG(35, 36))
	var o minFill
	large := 0
	for i := range 120 {
		var p *Problem
		switch i % 3 {
		case 0:
			p = loose(rng, 2+rng.IntN(25))
		case 1:
			p = hubs(rng, 130+rng.IntN(40))
		case 2:
			p = strip(10, 4)
		}
		g, _ := signed(p)
		const limit = 20
		done := o.run(g, limit, unlimited)
		n := g.nodes()
		near := make([]map[int32]bool, n)
		for v := range near {
			near[v] = map[int32]bool{}
			adj, _ := g.row(int32(v))
			for _, w := range adj {
				near[v][w] = true
			}
			if len(adj) > 48 {
				large++
			}
		}
		fill := func(v int32) int {
			lacks := 0
			for a := range near[v] {
				for b := range near[v] {
					if a < b && !near[a][b] {
						lacks++
					}
				}
			}
			return lacks
		}
		out := make([]bool, n)
		for k, v := range o.order {
			if k == len(o.order)-1 && !done {
				break
			}
			least := 1 << 30
			for w := range int32(n) {
				if !out[w] && len(near[w]) <= limit {
					least = min(least, fill(w))
				}
			}
			if got := fill(v); got != least {
				t.Fatalf("graph %d, step %d: node %d has a fill of %d, the least is %d", i, k, v, got, least)
			}
			bag := slices.Clone(o.bag[o.bagStart[k]:o.bagStart[k+1]])
			slices.Sort(bag)
			var want []int32
			for w := range near[v] {
				want = append(want, w)
			}
			slices.Sort(want)
			if !slices.Equal(bag, want) {
				t.Fatalf("graph %d, step %d: bag %v, want %v", i, k, bag, want)
			}
			for _, a := range want {
				delete(near[a], v)
				for _, b := range want {
					if a != b {
						near[a][b] = true
					}
				}
			}
			out[v] = true
		}
		if done && len(o.order) != n {
			t.Fatalf("graph %d: %d of %d nodes ordered", i, len(o.order), n)
		}
	}
	if large == 0 {
		t.Error("no graph had a node of high degree")
	}
}

func TestSweepMeetsEveryNode(t *testing.T) {
	rng := rand.New(rand.NewPCG(37, 38))
	var w sweeper
	for range 100 {
		g, _ := signed(loose(rng, 1+rng.IntN(30)))
		order := slices.Clone(w.run(g, int32(rng.IntN(g.nodes())), rng.IntN(2) == 0))
		slices.Sort(order)
		if !slices.Equal(order, everyNode(g.nodes())) {
			t.Fatalf("%v", order)
		}
	}
	// Along a strip of king's graph, begun at a short end, the front need be no more than one column and a node; it may be a little slanted.
	var s solver
	g, _ := signed(king(rng, 40, 6, 9))
	if !s.narrow(g, everyNode(g.nodes()), 8, unlimited, sweeps) {
		t.Errorf("width %d of a strip 6 wide", s.order.width)
	}
}

// TestBlocks compares with the blocks of CycleFinder, which come from a walk over edges.
func TestBlocks(t *testing.T) {
	rng := rand.New(rand.NewPCG(39, 40))
	for range 500 {
		p := &Problem{Nodes: 1 + rng.IntN(14)}
		seen := map[[2]int]bool{}
		for range rng.IntN(2*p.Nodes + 1) {
			u, v := rng.IntN(p.Nodes), rng.IntN(p.Nodes)
			if u < v && !seen[[2]int{u, v}] {
				seen[[2]int{u, v}] = true
				p.Edges = append(p.Edges, unit(u, v))
			}
		}
		g, _ := signed(p)
		want := NewCycleFinder(nil, p.Nodes, p.Edges)
		of := make([]int, len(p.Edges))
		for e := range of {
			of[e] = -1
		}
		count := 0
		below := make([]int, p.Nodes)
		blocks(nil, g, func(top int32, nodes []int32) {
			in := map[int32]bool{top: true}
			for _, v := range nodes {
				in[v] = true
				below[v]++
			}
			for e, edge := range p.Edges {
				if in[edge.U] && in[edge.V] {
					if of[e] >= 0 {
						t.Fatalf("edge %d is in two blocks", e)
					}
					of[e] = count
				}
			}
			count++
		}, func(root int32) { below[root]++ })
		for v, k := range below {
			if k != 1 {
				t.Fatalf("node %d was met %d times", v, k)
			}
		}
		for a := range of {
			for b := range of {
				if (of[a] == of[b]) != (want.block[a] == want.block[b]) {
					t.Fatalf("edges %v and %v: blocks %v, want %v", p.Edges[a], p.Edges[b], of, want.block)
				}
			}
		}
	}
}

func TestPackingIsOne(t *testing.T) {
	rng := rand.New(rand.NewPCG(41, 42))
	packed := 0
	for range 600 {
		p := loose(rng, 3+rng.IntN(8))
		g, _ := signed(p)
		n := int32(g.nodes())
		edge, edges := numberEdges(g)
		pk := packCycles(g, edge, edges, 1<<20)
		used := map[[2]int32]int64{}
		var sum int64
		for _, c := range pk.cycles {
			packed++
			sum += c.amount
			opposite := 0
			for i, v := range c.node {
				w := c.node[(i+1)%len(c.node)]
				used[[2]int32{min(v, w), max(v, w)}] += c.amount
				s := int64(0)
				if max(v, w) == n {
					s = g.h[min(v, w)]
				} else {
					s = g.wt[g.entry(v, w)]
				}
				if s > 0 {
					opposite++
				}
			}
			if opposite%2 == 0 || len(c.node) < 3 {
				t.Fatalf("cycle %v has %d edges of the opposite kind", c.node, opposite)
			}
		}
		for pair, a := range used {
			w := int64(0)
			if pair[1] == n {
				w = g.h[pair[0]]
			} else {
				w = g.wt[g.entry(pair[0], pair[1])]
			}
			if a > magnitude(w) {
				t.Fatalf("%d of the weight %d between %v are used", a, w, pair)
			}
		}
		if least := leastEnergy(g); sum != pk.sum || g.floor()+sum > least {
			t.Fatalf("the packing proves %d + %d, the least energy is %d", g.floor(), sum, least)
		}
	}
	if packed < 1000 {
		t.Errorf("only %d cycles", packed)
	}
}

// narrowCover covers a graph with clusters that are much narrower than it.
func narrowCover(s *solver, g *graph, limit int) *cover {
	edge, edges := numberEdges(g)
	steps := unlimited
	c := s.coverWith(g, edge, edges, limit, &steps)
	p := packCycles(g, edge, edges, 1<<20)
	s.addCycles(c, append(p.cycles, shortCycles(g, edge, edges, 1<<20).cycles...))
	return c
}

func TestCoverHoldsEveryEdge(t *testing.T) {
	rng := rand.New(rand.NewPCG(43, 44))
	for i := range 200 {
		p := loose(rng, 6+rng.IntN(30))
		if i%2 == 0 {
			p = king(rng, 9, 9, 3)
		}
		g, _ := signed(p)
		s := &solver{budget: DefaultBudget()}
		limit := 2 + rng.IntN(4)
		c := narrowCover(s, g, limit)
		held := make([]int32, c.edges)
		for k := range c.clusters {
			cl := &c.clusters[k]
			if cl.plan.width > limit {
				t.Fatalf("cluster of width %d, limit %d", cl.plan.width, limit)
			}
			for _, h := range cl.half {
				held[c.edge[h]]++
			}
			spanned := 0
			for _, v := range cl.node {
				adj, _ := g.row(v)
				for _, w := range adj {
					if w > v && slices.Contains(cl.node, w) {
						spanned++
					}
				}
			}
			if k < c.spanned && spanned != len(cl.half) {
				t.Fatalf("a cluster spans %d edges, and holds %d", spanned, len(cl.half))
			}
		}
		if d := cmp.Diff(c.held, held); d != "" {
			t.Fatal(d)
		}
		if c.edges > 0 && slices.Min(held) == 0 {
			t.Fatalf("an edge of %d is in no cluster", c.edges)
		}
	}
}

// TestSharesAddUp: after any number of steps, the shares of each term add up to it, stay within their bounds, and what they prove holds.
func TestSharesAddUp(t *testing.T) {
	rng := rand.New(rand.NewPCG(45, 46))
	better, met := 0, 0
	for range 250 {
		p := loose(rng, 8+rng.IntN(4))
		g, _ := signed(p)
		s := &solver{budget: DefaultBudget()}
		c := narrowCover(s, g, 2)
		d := newDual(s, g, c)
		if d.scale == 0 {
			continue
		}
		least := leastEnergy(g)
		first := d.value()
		for range 10 {
			if v := d.value(); divideUp(v, d.scale) > least {
				t.Fatalf("%d/%d is proved, the least energy is %d", v, d.scale, least)
			}
			d.step(unitStep / 8)
			total, terms := make([]int64, c.edges), make([]int64, g.nodes())
			for k := range c.clusters {
				for j, h := range c.clusters[k].half {
					e := c.edge[h]
					total[e] += d.share[k][j]
					if magnitude(d.share[k][j]) > stretch*magnitude(d.total[e]) {
						t.Fatalf("share %d of %d", d.share[k][j], d.total[e])
					}
				}
				for r, v := range c.clusters[k].node {
					terms[v] += d.unary[k][r]
				}
			}
			if diff := cmp.Diff(d.total, total); diff != "" {
				t.Fatal(diff)
			}
			for v, h := range g.h {
				if d.nodes[v] > 0 && terms[v] != h*d.scale {
					t.Fatalf("node %d: %d, want %d", v, terms[v], h*d.scale)
				}
			}
		}
		bound := newDual(s, g, c).run(least, commonFactor(g), 1<<20)
		if bound > least {
			t.Fatalf("%d is proved, the least energy is %d", bound, least)
		}
		if bound == least {
			met++
		}
		if bound > divideUp(first, d.scale) {
			better++
		}
	}
	if better < 50 || met < 100 {
		t.Errorf("%d bounds got better, %d met the optimum", better, met)
	}
}

// TestSearchKeepsAccount: the energy that the search carries along is that of its assignment, and no step makes the best worse.
func TestSearchKeepsAccount(t *testing.T) {
	rng := rand.New(rand.NewPCG(47, 48))
	for i := range 60 {
		p := loose(rng, 20+rng.IntN(20))
		if i%2 == 0 {
			p = weighted(rng, king(rng, 8, 8, 3))
		}
		g, _ := signed(p)
		s := &solver{budget: DefaultBudget()}
		im := newImprover(s, g)
		im.crossing = 1 << 16
		right := func(step string) {
			if im.energy != g.energy(im.x) {
				t.Fatalf("after %s: energy %d, really %d", step, im.energy, g.energy(im.x))
			}
			for v := range int32(g.nodes()) {
				if im.pull[v] != g.pull(im.x, v) {
					t.Fatalf("after %s: pull %d, really %d", step, im.pull[v], g.pull(im.x, v))
				}
			}
		}
		for _, x := range [][]uint8{heavyTree(g), broadTree(g), scatteredTree(g, 5)} {
			im.load(x)
			right("load")
			before := im.energy
			im.descend(nil)
			right("descend")
			for im.pass() {
				right("pass")
			}
			right("the last pass")
			if im.energy > before {
				t.Fatalf("from %d to %d", before, im.energy)
			}
		}
		im.use(narrowCover(s, g, 4))
		im.start(broadTree(g), 1<<20)
		least := im.least
		right("start")
		im.run(-unlimited, 1<<20)
		if im.least > least || im.least != g.energy(im.best) {
			t.Fatalf("best %d, really %d; before %d", im.least, g.energy(im.best), least)
		}
	}
}

// TestTreesAreTrees: what a spanning forest satisfies, where all edges agree with each other, is everything.
func TestTreesAreTrees(t *testing.T) {
	rng := rand.New(rand.NewPCG(49, 50))
	for range 100 {
		n := 2 + rng.IntN(30)
		hidden := make([]bool, n)
		p := &Problem{Nodes: n, Cost: make([][2]int64, n)}
		for v := range hidden {
			hidden[v] = rng.IntN(2) == 0
			for u := range v {
				if rng.IntN(4) == 0 {
					p.Edges = append(p.Edges, Edge{int32(u), int32(v), 1 + rng.Int64N(5), hidden[u] == hidden[v]})
				}
			}
			if rng.IntN(5) == 0 {
				k := 1
				if hidden[v] {
					k = 0
				}
				p.Cost[v][k] = 3
			}
		}
		if c := p.CostOf(heavyTree(must(signed(p)))); c != 0 {
			t.Fatalf("heavy tree: cost %d", c)
		}
		p.Cost = nil
		g := must(signed(p))
		for name, x := range map[string][]uint8{"broad": broadTree(g), "scattered": scatteredTree(g, rng.Uint64())} {
			if c := p.CostOf(x); c != 0 {
				t.Fatalf("%s tree: cost %d", name, c)
			}
		}
	}
}

func must(g *graph, _ int64) *graph { return g }

func TestRoundUp(t *testing.T) {
	for _, c := range []struct{ v, scale, unit, want int64 }{
		{7, 2, 1, 4}, {8, 2, 1, 4}, {-7, 2, 1, -3}, {-8, 2, 1, -4}, {0, 4, 3, 0}, {1, 4, 3, 3}, {-1, 1, 3, 0}, {-3, 1, 3, -3},
	} {
		if got := roundUp(c.v, c.scale, c.unit); got != c.want {
			t.Errorf("roundUp(%d, %d, %d) = %d, want %d", c.v, c.scale, c.unit, got, c.want)
		}
	}
}

// FuzzSolve reads a small problem from bytes, and holds what comes out against all assignments.
func FuzzSolve(f *testing.F) {
	f.Add([]byte{3, 0x01, 5, 0x12, 5, 0x02, 5}, uint16(0))
	f.Add([]byte{9, 0x01, 1, 0x12, 2, 0x20, 3, 0x34, 0x84, 0x45, 5, 0x35, 6, 0xf3, 7, 0x88, 2}, uint16(300))
	f.Fuzz(func(t *testing.T, data []byte, work uint16) {
		if len(data) == 0 {
			return
		}
		n := 1 + int(data[0])%12
		p := &Problem{Nodes: n, Fixed: make([]int8, n), Cost: make([][2]int64, n)}
		for i := range p.Fixed {
			p.Fixed[i] = -1
		}
		for data = data[1:]; len(data) >= 2; data = data[2:] {
			u, v, w := int(data[0]>>4), int(data[0]&15), data[1]
			switch {
			case u < n && v < n:
				p.Edges = append(p.Edges, Edge{int32(u), int32(v), int64(w & 127), w >= 128})
			case u < n && v == 15:
				p.Fixed[u] = int8(w & 1)
			case u < n:
				p.Cost[u][v&1] += int64(w)
			}
		}
		best := bruteForce(p)
		check(t, p, Solve(p, Budget{Work: int64(work), Memory: 1 << 16}), best)
		if s := Solve(p, DefaultBudget()); s.Cost != best || !s.Proved {
			t.Errorf("cost %d, proved %v; want %d", s.Cost, s.Proved, best)
		}
	})
}
