package exact

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

func benchmarkSolve(b *testing.B, p *Problem) {
	b.ReportAllocs()
	var s Solution
	for b.Loop() {
		s = Solve(p, DefaultBudget())
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(p.Nodes), "ns/node")
	b.ReportMetric(float64(s.Width), "width")
	b.ReportMetric(float64(s.Cost), "cost")
	b.ReportMetric(float64(s.Cost-s.LowerBound), "gap")
}

// BenchmarkStrip is a component of up to a million nodes, four wide; with weights of 1 the reductions take it apart, with others they do not.
func BenchmarkStrip(b *testing.B) {
	for _, n := range []int{1_000, 10_000, 100_000, 1_000_000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) { benchmarkSolve(b, strip(n/4, 4)) })
		b.Run(fmt.Sprint(n, "weighted"), func(b *testing.B) {
			benchmarkSolve(b, weighted(rand.New(rand.NewPCG(1, 1)), strip(n/4, 4)))
		})
	}
}

// BenchmarkSmall is many calls for components of a few nodes: the fixed cost of a call.
func BenchmarkSmall(b *testing.B) {
	for _, n := range []int{3, 8, 30} {
		b.Run(fmt.Sprint(n), func(b *testing.B) { benchmarkSolve(b, partialTree(rand.New(rand.NewPCG(1, 1)), n, 3, 1)) })
	}
}

// BenchmarkPartialTree is a random partial 4-tree of a million nodes.
func BenchmarkPartialTree(b *testing.B) {
	for _, n := range []int{10_000, 1_000_000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			benchmarkSolve(b, partialTree(rand.New(rand.NewPCG(1, uint64(n))), n, 4, 0.9))
		})
	}
}

// BenchmarkOddCycle asks for the smallest cycle of a long strip, and for the one through each of some edges.
func BenchmarkOddCycle(b *testing.B) {
	p := strip(50_000, 4)
	b.Run("smallest", func(b *testing.B) {
		for b.Loop() {
			SmallestOddCycle(p.Nodes, p.Edges)
		}
	})
	f := NewCycleFinder(nil, p.Nodes, p.Edges)
	b.Run("through", func(b *testing.B) {
		k := 0
		for b.Loop() {
			k = (k + 7919) % len(p.Edges)
			f.Through(k)
		}
	})
}

// BenchmarkKing is a graph whose treewidth is its side: beyond the budget from about 22 on.
func BenchmarkKing(b *testing.B) {
	for _, n := range []int{10, 16, 20, 40} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			benchmarkSolve(b, king(rand.New(rand.NewPCG(1, 1)), n, n, 1))
		})
		b.Run(fmt.Sprint(n, "weighted"), func(b *testing.B) {
			benchmarkSolve(b, king(rand.New(rand.NewPCG(1, 1)), n, n, 9))
		})
	}
}
