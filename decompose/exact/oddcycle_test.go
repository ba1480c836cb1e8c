package exact

import (
	"math/rand/v2"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// simpleCycles calls visit for every simple cycle of a graph, as nodes and edges, loops and pairs of parallel edges included, by trying all paths.
func simpleCycles(n int, edges []Edge, visit func(nodes, used []int)) {
	for first := range n {
		var nodes, used []int
		var extend func(v int)
		extend = func(v int) {
			nodes = append(nodes, v)
			for k, e := range edges {
				w := -1
				switch v {
				case int(e.U):
					w = int(e.V)
				case int(e.V):
					w = int(e.U)
				}
				if w < first || slices.Contains(used, k) || w > first && slices.Contains(nodes, w) {
					continue
				}
				used = append(used, k)
				if w == first {
					visit(nodes, used)
				} else {
					extend(w)
				}
				used = used[:len(used)-1]
			}
			nodes = nodes[:len(nodes)-1]
		}
		extend(first)
	}
}

// shortestByTrial gives the length of the smallest contradictory cycle through each edge, 0 where there is none.
func shortestByTrial(n int, edges []Edge) []int {
	best := make([]int, len(edges))
	simpleCycles(n, edges, func(nodes, used []int) {
		opposite := 0
		for _, k := range used {
			if !edges[k].Same {
				opposite++
			}
		}
		if opposite%2 == 0 {
			return
		}
		for _, k := range used {
			if best[k] == 0 || len(used) < best[k] {
				best[k] = len(used)
			}
		}
	})
	return best
}

// isOddCycle tells whether nodes are a simple cycle that some choice among parallel edges makes contradictory, with the given edge between the first and second node unless that is -1.
func isOddCycle(edges []Edge, nodes []int32, through int) bool {
	n := len(nodes)
	sorted := slices.Clone(nodes)
	slices.Sort(sorted)
	if n == 0 || len(slices.Compact(sorted)) != n {
		return false
	}
	if n == 1 {
		for k, e := range edges {
			if e.U == nodes[0] && e.V == nodes[0] && !e.Same && (through < 0 || k == through) {
				return true
			}
		}
		return false
	}
	between := map[[2]int32][]int{}
	for k, e := range edges {
		pair := [2]int32{min(e.U, e.V), max(e.U, e.V)}
		between[pair] = append(between[pair], k)
	}
	// parities[b] tells whether the edges so far can add up to parity b. A cycle of two nodes must not use one edge twice, but then its parity would be even.
	parities := [2]bool{true, false}
	for i, v := range nodes {
		w := nodes[(i+1)%n]
		var next [2]bool
		for _, k := range between[[2]int32{min(v, w), max(v, w)}] {
			if through >= 0 && i == 0 && k != through {
				continue
			}
			ask := 1
			if edges[k].Same {
				ask = 0
			}
			next[ask] = next[ask] || parities[0]
			next[1^ask] = next[1^ask] || parities[1]
		}
		parities = next
	}
	return parities[1]
}

func randomMultigraph(rng *rand.Rand, n int) []Edge {
	var edges []Edge
	for range rng.IntN(2*n + 2) {
		e := Edge{U: int32(rng.IntN(n)), V: int32(rng.IntN(n)), Weight: 1, Same: rng.IntN(3) == 0}
		if e.U == e.V && rng.IntN(4) != 0 {
			continue
		}
		edges = append(edges, e)
	}
	return edges
}

func TestOddCyclesAgainstAllCycles(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	walks := 0
	for range 4000 {
		n := 2 + rng.IntN(7)
		edges := randomMultigraph(rng, n)
		want := shortestByTrial(n, edges)
		smallest := 0
		for k, length := range want {
			if length > 0 && (smallest == 0 || length < smallest) {
				smallest = length
			}
			c := ShortestOddCycle(n, edges, k)
			if len(c) != length {
				t.Fatalf("through edge %d of %v: %v, want %d nodes", k, edges, c, length)
			}
			if length == 0 {
				continue
			}
			if !isOddCycle(edges, c, k) || c[0] != edges[k].U || length > 1 && c[1] != edges[k].V {
				t.Fatalf("through edge %d of %v: %v is no contradictory cycle that begins with the edge", k, edges, c)
			}
			if f := NewCycleFinder(nil, n, edges); length > 1 {
				goal := 2 * edges[k].V
				if edges[k].Same {
					goal++
				}
				f.walk(goal, 2*edges[k].U, int32(k), anyLength)
				if path := f.follow(2*edges[k].U, goal); !f.isSimple(path) {
					walks++
					if d := f.detour(int32(k), path); !isOddCycle(edges, d, k) {
						t.Fatalf("detour through edge %d of %v: %v", k, edges, d)
					}
				}
			}
		}
		var some []int
		least := 0
		for k, length := range want {
			if rng.IntN(2) == 0 {
				some = append(some, k)
				if length > 0 && (least == 0 || length < least) {
					least = length
				}
			}
		}
		if c, sure := NewCycleFinder(nil, n, edges).SmallestThrough(some); len(c) != least || !sure || least > 0 && !isOddCycle(edges, c, -1) {
			t.Fatalf("through %v of %v: %v, want %d nodes", some, edges, c, least)
		}
		c := SmallestOddCycle(n, edges)
		if len(c) != smallest || smallest > 0 && !isOddCycle(edges, c, -1) {
			t.Fatalf("of %v: %v, want %d nodes", edges, c, smallest)
		}
		if smallest > 0 && c[0] != slices.Min(c) {
			t.Fatalf("%v does not begin with the least node", c)
		}
	}
	if walks < 100 {
		t.Errorf("only %d walks met a node twice: the test does not reach what it is for", walks)
	}
}

func TestOddCycleByHand(t *testing.T) {
	// A square 0-1-2-3 with a triangle 2-4-5 at one corner: the closed walk of nine edges through 0-1 is not simple, and there is no simple cycle.
	square := []Edge{unit(0, 1), unit(1, 2), unit(2, 3), unit(3, 0), unit(2, 4), unit(4, 5), unit(5, 2)}
	if c := ShortestOddCycle(6, square, 0); c != nil {
		t.Errorf("through the square: %v", c)
	}
	if d := cmp.Diff([]int32{2, 4, 5}, SmallestOddCycle(6, square)); d != "" {
		t.Error(d)
	}
	// Joined to the square by one more edge 5-3, the triangle can be used: 0 1 2 4 5 3 is even, 0 1 2 5 3 is odd.
	if d := cmp.Diff([]int32{0, 1, 2, 5, 3}, ShortestOddCycle(6, append(square, unit(5, 3)), 0)); d != "" {
		t.Error(d)
	}
	even := []Edge{unit(0, 1), unit(1, 2), unit(2, 3), unit(3, 0)}
	if c := SmallestOddCycle(4, even); c != nil {
		t.Errorf("of an even cycle: %v", c)
	}
	if c := SmallestOddCycle(3, []Edge{unit(0, 1), {U: 1, V: 1, Weight: 1}}); !slices.Equal(c, []int32{1}) {
		t.Errorf("of a loop: %v", c)
	}
	if c := SmallestOddCycle(3, []Edge{unit(1, 2), {U: 1, V: 2, Weight: 1, Same: true}}); !slices.Equal(c, []int32{1, 2}) {
		t.Errorf("of two parallel edges: %v", c)
	}
}

func TestOddCycleInLargeGraphs(t *testing.T) {
	// One ring of an odd number of nodes: the only cycle there is.
	const n = 200_001
	ring := make([]Edge, n)
	for i := range ring {
		ring[i] = unit(i, (i+1)%n)
	}
	if c := SmallestOddCycle(n, ring); len(c) != n || c[0] != 0 || c[1] != 1 {
		t.Errorf("ring: %d nodes", len(c))
	}
	// A strip of 100,000 nodes whose cells are squares but for one triangle at its far end.
	p := &Problem{Nodes: 100_000}
	for i := 0; i+2 < p.Nodes; i += 2 {
		p.Edges = append(p.Edges, unit(i, i+1), unit(i, i+2), unit(i+1, i+3))
	}
	p.Edges = append(p.Edges, unit(p.Nodes-4, p.Nodes-1))
	if d := cmp.Diff([]int32{99_996, 99_997, 99_999}, SmallestOddCycle(p.Nodes, p.Edges)); d != "" {
		t.Error(d)
	}
	c := ShortestOddCycle(p.Nodes, p.Edges, 0)
	if !isOddCycle(p.Edges, c, 0) {
		t.Errorf("through the first edge: %d nodes", len(c))
	}
}
