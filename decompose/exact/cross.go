package exact

// This file crosses two assignments. The nodes fall into regions, connected sets in which the two are either alike or each other's flip; a graph with one node per region says what turning
// regions costs, and is solved like any other.

// turns gives, per node, whether to turn its region in x. The result is the best choice where the graph of regions can be solved with the given work, and a good one
// elsewhere.
func (s *solver) turns(g *graph, x, y []uint8, work int64) []uint8 {
	n := g.nodes()
	region := make([]int32, n)
	for i := range region {
		region[i] = -1
	}
	var queue []int32
	count := int32(0)
	for root := range int32(n) {
		if region[root] >= 0 {
			continue
		}
		region[root] = count
		queue = append(queue[:0], root)
		for at := 0; at < len(queue); at++ {
			v := queue[at]
			adj, _ := g.row(v)
			for _, w := range adj {
				if region[w] < 0 && x[v]^y[v] == x[w]^y[w] {
					region[w] = count
					queue = append(queue, w)
				}
			}
		}
		count++
	}
	const each = 8 // steps of the reductions per edge
	turn := make([]uint8, n)
	if count == 1 {
		return turn
	}
	// With t the turn of a region, an edge between regions is s*[t==t'] where x has its ends alike, and s*[t!=t'] = s - s*[t==t'] where not.
	p := regions(g, x, region, count)
	var r reducer
	r.load(p, everyNode(int(count)))
	r.run()
	k, nodes := r.kernel()
	sub := solver{budget: Budget{Work: work, Memory: s.budget.Memory / 8}, quick: true}
	best, _ := sub.kernel(k)
	s.work += sub.work + int64(len(p.Edges))*each
	all := make([]uint8, count)
	r.restore(all, nodes, best)
	for i := range turn {
		turn[i] = all[region[i]]
	}
	return turn
}

// regions is the problem of turning regions.
func regions(g *graph, x []uint8, region []int32, count int32) *Problem {
	p := &Problem{Nodes: int(count), Cost: make([][2]int64, count)}
	for i := range int32(len(region)) {
		c := &p.Cost[region[i]]
		if x[i] != 0 {
			c[0] += max(0, g.h[i])
			c[1] += max(0, -g.h[i])
		} else {
			c[1] += max(0, g.h[i])
			c[0] += max(0, -g.h[i])
		}
		adj, wt := g.row(i)
		for k, j := range adj {
			if j > i && region[i] != region[j] {
				s := wt[k]
				if x[i] != x[j] {
					s = -s
				}
				p.Edges = append(p.Edges, Edge{U: region[i], V: region[j], Weight: magnitude(s), Same: s < 0})
			}
		}
	}
	return p
}

// everyNode lists all nodes.
func everyNode(n int) []int32 {
	all := make([]int32, n)
	for i := range all {
		all[i] = int32(i)
	}
	return all
}
