package exact

import (
	"math/bits"
	"slices"
)

// This file proves a lower bound. The weights of the graph are shared out among clusters, each of which is solved exactly: as the energy is linear in the weights, the sum of the
// optima is a lower bound whatever the shares. They are then improved by subgradient steps (Held and Karp 1971; Polyak 1969 for the length of a step): where two clusters that
// share an edge disagree on it, weight goes to the one that breaks it.

// dual is a graph shared out among clusters. All weights in it are those of the graph times scale, which leaves room for shares of small weights.
type dual struct {
	g     *graph
	c     *cover
	s     *solver
	scale int64
	total []int64 // per edge: s
	agree []int32 // per edge: clusters in which its ends are alike
	share [][]int64
	unary [][]int64
	nodes []int32 // per node: clusters that hold it
	ones  []int32 // per node: clusters that have it on mask B
	x     [][]uint8
	loose int64 // what the terms that no cluster holds come to at least
}

// newDual gives each cycle what the packing uses of its edges, and shares the rest out evenly among the other clusters that hold an edge, or among its cycles where there are none.
func newDual(s *solver, g *graph, c *cover) *dual {
	d := &dual{g: g, c: c, s: s, total: make([]int64, c.edges), agree: make([]int32, c.edges), nodes: make([]int32, g.nodes()), ones: make([]int32, g.nodes())}
	for h, e := range c.edge {
		d.total[e] = g.wt[h]
	}
	for k := range c.clusters {
		for _, v := range c.clusters[k].node {
			d.nodes[v]++
		}
	}
	d.scale = d.fit()
	for e := range d.total {
		d.total[e] *= d.scale
		if c.held[e] == 0 {
			d.loose += min(0, d.total[e])
		}
	}
	for v, r := range d.nodes {
		if r == 0 {
			d.loose += min(0, g.h[v]*d.scale)
		}
	}
	edges := portions{rest: slices.Clone(d.total), spans: make([]int32, c.edges), cycles: make([]int32, c.edges)}
	terms := portions{rest: make([]int64, g.nodes()), spans: make([]int32, g.nodes()), cycles: make([]int32, g.nodes())}
	for v, h := range g.h {
		terms.rest[v] = h * d.scale
	}
	for k := range c.clusters {
		cl := &c.clusters[k]
		share, unary := make([]int64, len(cl.half)), make([]int64, len(cl.node))
		d.share, d.unary, d.x = append(d.share, share), append(d.unary, unary), append(d.x, make([]uint8, len(cl.node)))
		if !cl.cycle {
			for _, h := range cl.half {
				edges.spans[c.edge[h]]++
			}
			for _, v := range cl.node {
				terms.spans[v]++
			}
			continue
		}
		for j, h := range cl.half {
			share[j] = edges.use(c.edge[h], g.wt[h], cl.amount*d.scale)
			edges.cycles[c.edge[h]]++
		}
		for _, r := range cl.ends {
			unary[r] += terms.use(cl.node[r], g.h[cl.node[r]], cl.amount*d.scale)
		}
		for _, v := range cl.node {
			terms.cycles[v]++
		}
	}
	edges.divide()
	terms.divide()
	for k := range c.clusters {
		cl := &c.clusters[k]
		for j, h := range cl.half {
			d.share[k][j] += edges.next(c.edge[h], cl.cycle)
		}
		for r, v := range cl.node {
			d.unary[k][r] += terms.next(v, cl.cycle)
		}
	}
	return d
}

// portions deals out weights to those that hold them.
type portions struct {
	rest   []int64 // not yet given to a cycle; after divide, what the first one to ask gets more than the others
	spans  []int32 // clusters that hold the weight and are no cycles
	cycles []int32 // cycles that do
	each   []int64
}

// use gives a part of the given size, and of the sign of w, away.
func (p *portions) use(e int32, w, amount int64) int64 {
	if w < 0 {
		amount = -amount
	}
	p.rest[e] -= amount
	return amount
}

// divide makes equal portions of the rest.
func (p *portions) divide() {
	p.each = make([]int64, len(p.rest))
	for e, w := range p.rest {
		if r := int64(p.takers(int32(e))); r > 0 {
			p.each[e] = w / r
			p.rest[e] = w - r*p.each[e]
		}
	}
}

// takers is the number of clusters that the rest is for.
func (p *portions) takers(e int32) int32 {
	if p.spans[e] > 0 {
		return p.spans[e]
	}
	return p.cycles[e]
}

// next is the portion for the next cluster that asks.
func (p *portions) next(e int32, cycle bool) int64 {
	if cycle && p.spans[e] > 0 {
		return 0
	}
	q := p.each[e] + p.rest[e]
	p.rest[e] = 0
	return q
}

// stretch is how far a share may go beyond the weight that is shared.
const stretch = 2

// fit chooses the scale: the largest power of 2 up to 2^20 such that all shares, each at most stretch times the weight, add up to less than 2^61 in every sum. It is 0 where there is none.
func (d *dual) fit() int64 {
	const most = uint64(1) << 61
	var sum uint64
	add := func(w int64, r int32) bool {
		hi, lo := bits.Mul64(uint64(magnitude(w)), uint64(stretch*(r+1)))
		sum += lo
		return hi == 0 && lo < most && sum < most
	}
	for e, w := range d.total {
		if !add(w, d.c.held[e]) {
			return 0
		}
	}
	for v, w := range d.g.h {
		if !add(w, d.nodes[v]) {
			return 0
		}
	}
	scale := int64(1)
	for scale < 1<<20 && sum*2 < most {
		scale, sum = scale*2, sum*2
	}
	return scale
}

// value solves all clusters and gives the bound, scaled.
func (d *dual) value() int64 {
	sum := d.loose
	clear(d.agree)
	clear(d.ones)
	for k := range d.c.clusters {
		cl := &d.c.clusters[k]
		p := &cl.plan
		sum += d.s.tables.solve(p, d.share[k], d.unary[k])
		x := d.x[k]
		d.s.tables.decode(p, x)
		d.each(k, func(j int, e int32, alike bool) {
			if alike {
				d.agree[e]++
			}
		})
		for r, v := range cl.node {
			d.ones[v] += int32(x[r])
		}
	}
	return sum
}

// each calls f for each edge of a cluster: its place in the plan, its number, and whether its ends are alike.
func (d *dual) each(k int, f func(j int, e int32, alike bool)) {
	cl := &d.c.clusters[k]
	p, x := &cl.plan, d.x[k]
	j := int32(0)
	for r := range p.span {
		bag := p.bag[p.bagStart[r]:p.bagStart[r+1]]
		for ; j < p.refStart[r+1]; j++ {
			f(int(j), d.c.edge[cl.half[j]], x[r] == x[bag[p.ref[j].slot]])
		}
	}
}

// norm is the gain that a step of length 1 promises: over all terms, |weight| times alike times unlike clusters, per cluster.
func (d *dual) norm() int64 {
	var sum uint64
	for e, b := range d.agree {
		r := d.c.held[e]
		if b > 0 && b < r {
			sum += gainOf(d.total[e], b, r)
		}
	}
	for v, b := range d.ones {
		r := d.nodes[v]
		if b > 0 && b < r {
			sum += gainOf(d.g.h[v]*d.scale, b, r)
		}
	}
	return int64(sum)
}

// gainOf is |w|*b*(r-b)/r, which is at most |w|*r, so that fit bounds the sum.
func gainOf(w int64, b, r int32) uint64 {
	hi, lo := bits.Mul64(uint64(magnitude(w)), uint64(b)*uint64(r-b))
	q, _ := bits.Div64(hi, lo, uint64(r))
	return q
}

// unitStep is the fixed point of a step length.
const unitStep = 1 << 24

// step moves weight between the clusters that disagree; length is in units of 1/unitStep.
func (d *dual) step(length uint64) {
	eta := func(w int64, r int32) int64 {
		hi, lo := bits.Mul64(uint64(magnitude(w)), length)
		if hi >= unitStep {
			return 0
		}
		q, _ := bits.Div64(hi, lo, unitStep)
		return int64(q / uint64(r))
	}
	// A share moves by eta*(r-b) up in the b clusters where the edge counts, and by eta*b down in the r-b others, which adds up to 0. Where that would carry one of them beyond
	// stretch times the weight, eta is cut for all.
	room := make([]int64, len(d.total))
	for e, b := range d.agree {
		r := d.c.held[e]
		if b > 0 && b < r {
			room[e] = eta(d.total[e], r)
		}
	}
	up := func(b, r int32, alike bool) int64 {
		if alike {
			return int64(r - b)
		}
		return -int64(b)
	}
	for k := range d.c.clusters {
		share := d.share[k]
		d.each(k, func(j int, e int32, alike bool) {
			if room[e] > 0 {
				room[e] = min(room[e], reach(share[j], d.total[e], up(d.agree[e], d.c.held[e], alike)))
			}
		})
	}
	for k := range d.c.clusters {
		share := d.share[k]
		d.each(k, func(j int, e int32, alike bool) {
			if room[e] > 0 {
				share[j] += room[e] * up(d.agree[e], d.c.held[e], alike)
			}
		})
	}
	free := make([]int64, len(d.nodes))
	for v, b := range d.ones {
		r := d.nodes[v]
		if b > 0 && b < r {
			free[v] = eta(d.g.h[v]*d.scale, r)
		}
	}
	for k := range d.c.clusters {
		for r, v := range d.c.clusters[k].node {
			if free[v] > 0 {
				free[v] = min(free[v], reach(d.unary[k][r], d.g.h[v]*d.scale, up(d.ones[v], d.nodes[v], d.x[k][r] != 0)))
			}
		}
	}
	for k := range d.c.clusters {
		for r, v := range d.c.clusters[k].node {
			if free[v] > 0 {
				d.unary[k][r] += free[v] * up(d.ones[v], d.nodes[v], d.x[k][r] != 0)
			}
		}
	}
}

// reach is how often a share can move by the given way and stay within stretch times the weight.
func reach(share, weight, way int64) int64 {
	limit := stretch * magnitude(weight)
	if way > 0 {
		return max(0, (limit-share)/way)
	}
	return max(0, (limit+share)/-way)
}

// run improves the bound until the work is spent, steps do not help any more, or it meets the energy of a known assignment. It returns the bound, unscaled and rounded up to a
// multiple of unit, which every energy is.
func (d *dual) run(best, unit, work int64) int64 {
	if d.scale == 0 {
		return -unlimited
	}
	target := best * d.scale
	top := -unlimited
	theta := uint64(unitStep)
	const patience = 5 // steps without a better bound
	stale := 0
	for spent := int64(0); ; {
		v := d.value()
		spent += d.c.work + int64(len(d.g.adj))
		d.s.work += d.c.work + int64(len(d.g.adj))
		if v > top {
			top, stale = v, 0
		} else if stale++; stale == patience {
			theta, stale = theta/2, 0
		}
		if roundUp(top, d.scale, unit) >= best || spent >= work || theta < unitStep>>12 {
			break
		}
		norm := d.norm()
		if norm == 0 {
			break
		}
		// length = theta * (target-v) / norm
		hi, lo := bits.Mul64(uint64(target-v), theta)
		length := uint64(unitStep)
		if hi < uint64(norm) {
			q, _ := bits.Div64(hi, lo, uint64(norm))
			length = min(length, q)
		}
		d.step(length)
	}
	return roundUp(top, d.scale, unit)
}

// assignments puts one together from the clusters: each node as most of its clusters have it, after each cluster has been turned to agree with those before it.
func (d *dual) assignments() [][]uint8 {
	n := d.g.nodes()
	votes := make([]int32, n)
	for k := range d.c.clusters {
		var agree int32
		for r, v := range d.c.clusters[k].node {
			if d.x[k][r] != 0 {
				agree += votes[v]
			} else {
				agree -= votes[v]
			}
		}
		for r, v := range d.c.clusters[k].node {
			if (d.x[k][r] != 0) == (agree >= 0) {
				votes[v]++
			} else {
				votes[v]--
			}
		}
	}
	x, y := make([]uint8, n), make([]uint8, n)
	for v, k := range votes {
		y[v] = 1
		if k > 0 {
			x[v], y[v] = 1, 0
		}
	}
	return [][]uint8{x, y}
}

// roundUp is the least multiple of unit that is no less than v/scale.
func roundUp(v, scale, unit int64) int64 {
	v = divideUp(v, scale)
	return divideUp(v, unit) * unit
}

// divideUp is a/b, rounded up; b > 0.
func divideUp(a, b int64) int64 {
	q := a / b
	if a%b > 0 {
		q++
	}
	return q
}
