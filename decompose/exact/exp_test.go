package exact

import (
	"fmt"
	"math/bits"
	"math/rand/v2"
	"testing"
)

func kern(p *Problem) *graph {
	_, rest, _ := settle(p, make([]uint8, p.Nodes))
	r := newReducer(p, rest)
	r.run()
	g, _ := r.kernel()
	return g
}
func TestExp(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for _, n := range []int{8, 10, 12, 16, 20} {
		g := kern(king(rng, n, n, 9))
		var o minFill
		ok := o.run(g, 40, 1<<60)
		fmt.Println("king", n, g.nodes(), ok, o.width, bits.Len64(uint64(o.work)))
	}
	for _, n := range []int{1000, 10000, 100000} {
		g := kern(partialTree(rng, n, 4, 0.9))
		var o minFill
		ok := o.run(g, 40, 1<<60)
		fmt.Println("tree", n, g.nodes(), ok, o.width, o.work)
	}
	for _, n := range []int{1000, 10000} {
		g := kern(king(rng, n/4, 4, 9))
		var o minFill
		ok := o.run(g, 40, 1<<60)
		fmt.Println("kingstrip", n, g.nodes(), ok, o.width, o.work)
	}
}
