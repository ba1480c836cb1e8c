package decompose

import (
	"math/rand/v2"
	"testing"

	"maskpair/decompose/exact"
)

// The shortest odd closed walk through any edge, by Floyd and Warshall's method on the graph doubled by parity: an outside way to the
// length of the shortest odd cycle.
func shortestOdd(n int, edges []exact.Edge) int {
	const far = 1 << 20
	d := make([][]int, 2*n)
	for i := range d {
		d[i] = make([]int, 2*n)
		for k := range d[i] {
			d[i][k] = far
		}
		d[i][i] = 0
	}
	for _, e := range edges {
		for _, p := range [2]int32{0, 1} {
			d[2*e.U+p][2*e.V+1-p], d[2*e.V+p][2*e.U+1-p] = 1, 1
		}
	}
	for k := range d {
		for i := range d {
			for j := range d {
				d[i][j] = min(d[i][j], d[i][k]+d[k][j])
			}
		}
	}
	best := far
	for i := range n {
		best = min(best, d[2*i][2*i+1])
	}
	return best % far
}

func TestSmallestOddCycle(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 9))
	for round := range 1500 {
		n := 2 + rng.IntN(12)
		have := map[[2]int32]bool{}
		var edges []exact.Edge
		for range rng.IntN(2 * n) {
			u, v := rng.Int32N(int32(n)), rng.Int32N(int32(n))
			if u != v && !have[[2]int32{min(u, v), max(u, v)}] {
				have[[2]int32{min(u, v), max(u, v)}] = true
				edges = append(edges, exact.Edge{U: min(u, v), V: max(u, v)})
			}
		}
		ring := newRingFinder(n, edges).smallest(edges)
		if want := shortestOdd(n, edges); len(ring) != want {
			t.Fatalf("round %d: a cycle of %d, want %d", round, len(ring), want)
		}
		seen := map[int32]bool{}
		for i, u := range ring {
			v := ring[(i+1)%len(ring)]
			if seen[u] || !have[[2]int32{min(u, v), max(u, v)}] {
				t.Fatalf("round %d: %v is no simple cycle of the graph", round, ring)
			}
			seen[u] = true
		}
	}
}
