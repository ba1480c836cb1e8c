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

// BenchmarkStrip is a component of a million nodes, four wide.
func BenchmarkStrip(b *testing.B) {
	for _, n := range []int{1_000, 10_000, 100_000, 1_000_000} {
		b.Run(fmt.Sprint(n), func(b *testing.B) { benchmarkSolve(b, strip(n/4, 4)) })
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
