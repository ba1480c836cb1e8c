package exact

// This file improves an assignment by solving one cluster after another exactly, the rest held as it is, until no cluster can be improved; then it kicks a part out of place and tries
// again.

// improver is a search with clusters.
type improver struct {
	*search
	s        *solver
	c        *cover
	of       [][]int32 // per node: clusters that it is in or next to
	dirty    []bool    // per cluster: to be solved again
	queue    []int32   // the dirty ones, and some that are not any more
	weight   []int64   // of the cluster in hand, in the order of its plan
	unary    []int64
	ranked   []uint8
	inside   []int32 // per node: number of the last cluster solved with it plus 1, or -1 in a kick
	best     []uint8
	least    int64 // energy of best, unlimited before there is one
	changed  []int32
	round    uint64 // numbers the kicks, from which chance is drawn
	crossing int64  // work that one crossing may take
}

func newImprover(s *solver, g *graph) *improver {
	return &improver{search: newSearch(g), s: s, c: &cover{g: g}, of: make([][]int32, g.nodes()), inside: make([]int32, g.nodes()), best: make([]uint8, g.nodes()), least: unlimited}
}

// use takes clusters into service.
func (im *improver) use(c *cover) {
	im.c = c
	im.dirty = make([]bool, c.spanned)
	g := im.g
	last := make([]int32, g.nodes())
	for k := range c.spanned {
		at := func(v int32) {
			if last[v] != int32(k+1) {
				last[v] = int32(k + 1)
				im.of[v] = append(im.of[v], int32(k))
			}
		}
		for _, v := range c.clusters[k].node {
			at(v)
			adj, _ := g.row(v)
			for _, w := range adj {
				at(w)
			}
		}
	}
}

// keep remembers the assignment if it is the best so far.
func (im *improver) keep() {
	if im.energy < im.least {
		im.least = im.energy
		copy(im.best, im.x)
	}
}

// soil marks the clusters at a node for another look.
func (im *improver) soil(v int32) {
	for _, k := range im.of[v] {
		if !im.dirty[k] {
			im.dirty[k] = true
			im.queue = append(im.queue, k)
		}
	}
}

// settle solves clusters until none is marked or the work is spent.
func (im *improver) settle(work int64) {
	for at := 0; at < len(im.queue); at++ {
		k := im.queue[at]
		if im.dirty[k] {
			im.dirty[k] = false
			if im.search.work < work {
				im.solve(k)
			}
		}
	}
	im.queue = im.queue[:0]
}

// solve puts the nodes of one cluster on the best masks for those of all others.
func (im *improver) solve(k int32) {
	c := &im.c.clusters[k]
	g := im.g
	n := len(c.node)
	im.weight, im.unary, im.ranked = resize(im.weight, len(c.half)), resize(im.unary, n), resize(im.ranked, n)
	for j, h := range c.half {
		im.weight[j] = g.wt[h]
	}
	for _, v := range c.node {
		im.inside[v] = k + 1
	}
	for r, v := range c.node {
		u := g.h[v]
		adj, wt := g.row(v)
		for i, w := range adj {
			if im.inside[w] == k+1 {
				continue
			}
			if im.x[w] != 0 {
				u += wt[i]
			} else {
				u -= wt[i]
			}
		}
		im.unary[r] = u
	}
	im.s.tables.solve(&c.plan, im.weight, im.unary)
	im.s.tables.decode(&c.plan, im.ranked)
	im.search.work += c.work()
	before := im.energy
	im.changed = im.changed[:0]
	for r, v := range c.node {
		if im.ranked[r] != im.x[v] {
			im.flip(v)
			im.changed = append(im.changed, v)
		}
	}
	if im.energy == before {
		// As good as it was; back, so that the search cannot go round in circles.
		for _, v := range im.changed {
			im.flip(v)
		}
		return
	}
	for _, v := range im.changed {
		im.soil(v)
	}
	im.dirty[k] = false // it is solved for what it has just changed itself
}

// start searches from an assignment, and then crosses what comes out with the best.
func (im *improver) start(x []uint8, work int64) {
	im.load(x)
	im.descend(nil)
	for im.search.work < work && im.pass() {
	}
	for k := range im.dirty {
		if !im.dirty[k] {
			im.dirty[k] = true
			im.queue = append(im.queue, int32(k))
		}
	}
	im.settle(work)
	im.cross()
	im.keep()
}

// cross replaces the assignment by the best one that agrees with it or with the best wherever these two agree on an edge: the regions in which one is the other, or its flip, are turned
// as a whole, which undoes walls between them that no cluster can see from end to end.
func (im *improver) cross() {
	if im.least == unlimited {
		return
	}
	im.search.work += int64(len(im.g.adj))
	turn := im.s.turns(im.g, im.x, im.best, min(im.crossing, int64(len(im.x))<<8))
	changed := im.changed[:0]
	for i, t := range turn {
		if t != 0 {
			changed = append(changed, int32(i))
		}
	}
	im.changed = changed
	if len(changed) == 0 {
		return
	}
	before := im.energy
	for _, v := range changed {
		im.flip(v)
	}
	if im.energy > before {
		for _, v := range changed {
			im.flip(v)
		}
		return
	}
	for _, v := range changed {
		im.soil(v)
	}
}

// run searches by turns from kicks of the best and from trees grown by chance, until the work is spent, the energy is down to the bound, or for a number of rounds nothing better was
// found.
func (im *improver) run(bound, work int64) {
	const patience = 24
	for idle := 0; im.search.work < work && im.least > bound && idle < patience; {
		im.round++
		rng := scramble(im.round)
		least := im.least
		if im.round%3 == 0 {
			im.start(scatteredTree(im.g, rng), work)
		} else {
			im.load(im.best)
			im.kick(rng)
			im.settle(work)
			im.keep()
		}
		idle++
		if im.least < least {
			idle = 0
		}
	}
}

// kick sets the nodes of a ball on masks drawn by chance.
func (im *improver) kick(rng uint64) {
	n := len(im.x)
	center := int32(rng % uint64(n))
	size := min(n, 8+int(rng>>32%64))
	ball := []int32{center}
	for _, v := range ball {
		im.inside[v] = -1
	}
	for at := 0; at < len(ball) && len(ball) < size; at++ {
		adj, _ := im.g.row(ball[at])
		for _, w := range adj {
			if im.inside[w] != -1 && len(ball) < size {
				im.inside[w] = -1
				ball = append(ball, w)
			}
		}
	}
	for i, v := range ball {
		im.inside[v] = 0
		if scramble(rng+uint64(i))&1 != 0 {
			im.flip(v)
		}
		im.soil(v)
	}
	im.descend(ball)
}
