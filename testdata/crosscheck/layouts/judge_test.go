package layouts

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/graph/simple"
	"gonum.org/v1/gonum/graph/topo"

	"maskpair/testdata/crosscheck/outside"
)

// This file asks the judges.

// question is a job of judge.py.
type question struct {
	Path         string
	Drawn        [][2]int
	Spacings     []int64
	Output       string
	MaskA, MaskB [2]int
}

// finding is what judge.py says of one spacing.
type finding struct {
	Figures, Shapes, NearPairs, Components, OddComponents int
	Pairs                                                 [][2]int64
	Unresolved, Lost, Torn                                int
	AreaA, AreaB                                          float64
}

func judge(t testing.TB, questions []question) [][]finding {
	t.Helper()
	outside.Packages(t, "python3-gdspy", "python3-shapely", "python3-networkx", "python3-numpy")
	found := outside.Ask[[]question, [][]finding](t, "judge.py", questions)
	if len(found) != len(questions) {
		t.Fatalf("%d answers to %d questions", len(found), len(questions))
	}
	return found
}

// hold holds a report and, where the finding has one, the output against a finding.
func hold(t *testing.T, r layer, f finding, withOutput bool) {
	t.Helper()
	for _, c := range []struct {
		what      string
		got, want int
	}{
		{"figures", r.Figures, f.Figures}, {"shapes", r.Shapes, f.Shapes}, {"near pairs", r.NearPairs, f.NearPairs},
		{"components", r.Components, f.Components}, {"components that two masks cannot do", r.Odd, f.OddComponents},
	} {
		if c.got != c.want {
			t.Errorf("%s: %d reported, %d by gdspy, shapely and networkx", c.what, c.got, c.want)
		}
	}
	if !withOutput {
		return
	}
	if f.Lost != 0 || f.Torn != 0 {
		t.Errorf("%d figures are lost, doubled or changed in the output, %d shapes are not on one mask", f.Lost, f.Torn)
	}
	if r.Unresolved != f.Unresolved {
		t.Errorf("%d unresolved pairs reported, %d in the output", r.Unresolved, f.Unresolved)
	}
	// GEOS merges in floating point; the areas are whole, or fractions where slanted edges cross.
	if math.Abs(r.MaskArea.A-f.AreaA) > 1e-9*(1+f.AreaA) || math.Abs(r.MaskArea.B-f.AreaB) > 1e-9*(1+f.AreaB) {
		t.Errorf("areas %g and %g reported, %g and %g in the output", r.MaskArea.A, r.MaskArea.B, f.AreaA, f.AreaB)
	}
}

// double gives the components of a near-pair graph by gonum, and those that have no odd cycle: in the double cover, where a
// pair leads from one sheet to the other, their two copies of a shape do not hang together.
func double(shapes int, pairs [][2]int64) (components, odd int, of []int) {
	g, cover := simple.NewUndirectedGraph(), simple.NewUndirectedGraph()
	n := int64(shapes)
	for v := range n {
		g.AddNode(simple.Node(v))
		cover.AddNode(simple.Node(v))
		cover.AddNode(simple.Node(n + v))
	}
	for _, p := range pairs {
		g.SetEdge(g.NewEdge(simple.Node(p[0]), simple.Node(p[1])))
		cover.SetEdge(cover.NewEdge(simple.Node(p[0]), simple.Node(n+p[1])))
		cover.SetEdge(cover.NewEdge(simple.Node(n+p[0]), simple.Node(p[1])))
	}
	of = make([]int, shapes)
	parts := topo.ConnectedComponents(g)
	for i, c := range parts {
		for _, v := range c {
			of[v.ID()] = i
		}
	}
	// A component that can be done has two parts in the cover, one that cannot has one.
	return len(parts), 2*len(parts) - len(topo.ConnectedComponents(cover)), of
}

// problem is a question to milp.py: unit weights, opposite masks.
type problem struct {
	Nodes int
	Edges []edge
	Fixed []int8
	Cost  [][2]int64
}

type edge struct {
	U, V, Weight int
	Same         bool
}

// problems cuts a near-pair graph into its components that have at least as many pairs as shapes; trees are never odd.
func problems(components int, of []int, pairs [][2]int64) []problem {
	parts := make([]problem, components)
	number := make([]int, len(of))
	for v, c := range of {
		number[v] = parts[c].Nodes
		parts[c].Nodes++
	}
	for _, p := range pairs {
		c := of[p[0]]
		parts[c].Edges = append(parts[c].Edges, edge{U: number[p[0]], V: number[p[1]], Weight: 1})
	}
	var out []problem
	for _, p := range parts {
		if len(p.Edges) >= p.Nodes {
			out = append(out, p)
		}
	}
	return out
}

// optimum gives the least number of unresolved pairs, by HiGHS.
func optimum(t testing.TB, parts []problem) int64 {
	t.Helper()
	if len(parts) == 0 {
		return 0
	}
	var sum int64
	for _, v := range outside.Ask[[]problem, []int64](t, "../graphs/milp.py", parts) {
		sum += v
	}
	return sum
}
