package graphs

import (
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/graph/simple"
	"gonum.org/v1/gonum/graph/topo"

	"maskpair/decompose/exact"
)

// This file asks gonum for components and for the verdict whether two masks do.

// components gives for each node the least node of its component.
func components(p *exact.Problem) []int64 {
	g := simple.NewUndirectedGraph()
	for v := range p.Nodes {
		g.AddNode(simple.Node(v))
	}
	for _, e := range p.Edges {
		if e.U != e.V {
			g.SetEdge(g.NewEdge(simple.Node(e.U), simple.Node(e.V)))
		}
	}
	least := make([]int64, p.Nodes)
	for _, c := range topo.ConnectedComponents(g) {
		first := c[0].ID()
		for _, n := range c {
			first = min(first, n.ID())
		}
		for _, n := range c {
			least[n.ID()] = first
		}
	}
	return least
}

// fits tells of each node whether its component can be done: in the double cover, where an edge of the opposite kind leads
// from one sheet to the other, the two copies of the node must not hang together.
func fits(p *exact.Problem) []bool {
	g := simple.NewUndirectedGraph()
	for v := range 2 * p.Nodes {
		g.AddNode(simple.Node(v))
	}
	for _, e := range p.Edges {
		for sheet := range int64(2) {
			other := 1 - sheet
			if e.Same {
				other = sheet
			}
			if u, v := 2*int64(e.U)+sheet, 2*int64(e.V)+other; u != v {
				g.SetEdge(g.NewEdge(simple.Node(u), simple.Node(v)))
			}
		}
	}
	sheet := make([]int, 2*p.Nodes)
	for i, c := range topo.ConnectedComponents(g) {
		for _, n := range c {
			sheet[n.ID()] = i
		}
	}
	ok := make([]bool, p.Nodes)
	for v := range ok {
		ok[v] = sheet[2*v] != sheet[2*v+1]
	}
	return ok
}

func TestVerdictAgainstGonum(t *testing.T) {
	rng := rand.New(rand.NewPCG(21, 1))
	yes, no := 0, 0
	for n := range 6000 {
		p := &exact.Problem{Nodes: 1 + rng.IntN(40)}
		// Around one edge a node, graphs fall in many components, some with and some without odd cycles.
		for range rng.IntN(2 * p.Nodes) {
			p.Edges = append(p.Edges, exact.Edge{U: int32(rng.IntN(p.Nodes)), V: int32(rng.IntN(p.Nodes)), Weight: 1 + rng.Int64N(5), Same: rng.IntN(5) == 0})
		}
		s := exact.Solve(p, exact.DefaultBudget())
		check(t, p, s)
		least, ok := components(p), fits(p)
		broken := make([]bool, p.Nodes) // by least node
		for _, e := range p.Edges {
			if (s.Masks[e.U] == s.Masks[e.V]) != e.Same {
				broken[least[e.U]] = true
			}
		}
		for v, first := range least {
			if first != int64(v) {
				continue
			}
			if broken[v] == ok[v] {
				t.Fatalf("graph %d, component of node %d: an edge is broken: %v; gonum says that two masks do: %v\n%+v", n, v, broken[v], ok[v], p)
			}
			if s.Masks[v] != 0 {
				t.Fatalf("graph %d: the least node %d of a free component, by gonum, is not on mask A\n%+v", n, v, p)
			}
			if ok[v] {
				yes++
			} else {
				no++
			}
		}
	}
	t.Logf("%d components that two masks can do, %d that they cannot", yes, no)
	if yes < 3000 || no < 3000 {
		t.Errorf("the graphs are too one-sided: %d yes, %d no", yes, no)
	}
}
