package decompose

import "maskpair/decompose/exact"

func tmpCycle(n int, edges []exact.Edge, through int) []int32 {
	next := make([][]int32, n)
	for i, e := range edges {
		if i != through {
			next[e.U] = append(next[e.U], e.V)
			next[e.V] = append(next[e.V], e.U)
		}
	}
	back := make([]int32, 2*n)
	for i := range back {
		back[i] = -2
	}
	s := 2 * edges[through].U
	goal := 2 * edges[through].V
	back[s] = -1
	q := []int32{s}
	for len(q) > 0 {
		at := q[0]
		q = q[1:]
		if at == goal {
			var path []int32
			for at >= 0 {
				path = append(path, at/2)
				at = back[at]
			}
			return path
		}
		for _, k := range next[at/2] {
			if to := 2*k + (at%2 ^ 1); back[to] == -2 {
				back[to] = at
				q = append(q, to)
			}
		}
	}
	return nil
}
