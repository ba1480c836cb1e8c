package exact

import "maskpair/gds/arena"

// This file cuts a graph into biconnected blocks (Hopcroft and Tarjan 1973). Unary terms do not count as edges.

// blocks calls visit for each block of g, each block after all blocks that hang below it: top is the node that the block shares with what is above it, or the root of its
// component, and below are its other nodes in the order of discovery, which keeps neighbours near each other, valid during the call. A node without edges is a block with nothing below. Every node but the roots is
// below in exactly one block; roots are the least nodes of their components, and done is called for each after the blocks of its component.
func blocks(room *arena.Slab, g *graph, visit func(top int32, below []int32), done func(root int32)) {
	n := g.nodes()
	rank := fitZeroed[int32](room, nil, n) // order of discovery, from 1
	low := fit[int32](room, nil, n)
	next := fit[int32](room, nil, n) // next entry of the row to look at
	up := fit[int32](room, nil, n)
	path, open, below := fit[int32](room, nil, n)[:0], fit[int32](room, nil, n)[:0], fit[int32](room, nil, n)[:0]
	count := int32(0)
	discover := func(v, from int32) {
		count++
		rank[v], low[v], next[v], up[v] = count, count, g.start[v], from
		path = append(path, v)
		open = append(open, v)
	}
	for root := range int32(n) {
		if rank[root] != 0 {
			continue
		}
		discover(root, -1)
		for len(path) > 0 {
			v := path[len(path)-1]
			if next[v] < g.start[v+1] {
				w := g.adj[next[v]]
				next[v]++
				switch {
				case rank[w] == 0:
					discover(w, v)
				case w != up[v]:
					low[v] = min(low[v], rank[w])
				}
				continue
			}
			path = path[:len(path)-1]
			u := up[v]
			if u < 0 {
				break
			}
			low[u] = min(low[u], low[v])
			if low[v] < rank[u] {
				continue
			}
			// u separates v and what hangs below it from the rest; that is on the stack of open nodes from v on.
			at := len(open) - 1
			for open[at] != v {
				at--
			}
			below = append(below[:0], open[at:]...)
			open = open[:at]
			visit(u, below)
		}
		open = open[:0]
		done(root)
	}
}
