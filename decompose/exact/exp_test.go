package exact

import (
	"fmt"
	"math/bits"
	"math/rand/v2"
	"testing"
	"time"
)

func kern(p *Problem) *graph {
	_, rest, _ := settle(p, make([]uint8, p.Nodes))
	r := newReducer(p, rest)
	r.run()
	g, _ := r.kernel()
	return g
}
func TestExp(t *testing.T) {
	for expMode := 0; expMode < 3; expMode++ {
		rng := rand.New(rand.NewPCG(1, 1))
		fmt.Print("mode ", expMode)
		for _, n := range []int{8, 10, 12, 16, 20} {
			g := kern(king(rng, n, n, 9))
			var o minFill
			expRun(&o, g, expMode)
			fmt.Print(" king", n, " ", o.width, " ", bits.Len64(uint64(o.work)))
		}
		for _, n := range []int{1000, 10000} {
			g := kern(partialTree(rng, n, 4, 0.9))
			var o minFill
			expRun(&o, g, expMode)
			fmt.Print(" tree", n, " ", o.width, " ", o.work/int64(n))
		}
		for _, n := range []int{1000} {
			g := kern(king(rng, n/4, 4, 9))
			var o minFill
			expRun(&o, g, expMode)
			fmt.Print(" kingstrip", n, " ", o.width, " ", o.work/int64(n))
		}
		fmt.Println()
	}
}

func expRun(o *minFill, g *graph, mode int) {
	if mode == 0 {
		o.run(g, 40, 1<<60)
		return
	}
	var w sweeper
	a := w.far(g, 0)
	if mode == 2 {
		a = w.far(g, a)
	}
	o.follow(g, 40, 1<<60, w.run(g, a))
}
func geo(rng *rand.Rand, n int, r float64) *Problem {
	p := &Problem{Nodes: n}
	x := make([]float64, n)
	y := make([]float64, n)
	for i := range x {
		x[i], y[i] = rng.Float64(), rng.Float64()
	}
	for i := range n {
		for j := range i {
			if (x[i]-x[j])*(x[i]-x[j])+(y[i]-y[j])*(y[i]-y[j]) < r*r {
				p.Edges = append(p.Edges, Edge{U: int32(i), V: int32(j), Weight: 1 + rng.Int64N(9)})
			}
		}
	}
	return p
}
func TestExp2(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for name, p := range map[string]*Problem{"king20": king(rng, 20, 20, 9), "strip20": strip(20, 20), "king16x40": king(rng, 16, 40, 9), "geo300": geo(rng, 300, 0.09), "geo600": geo(rng, 600, 0.06), "geo600d": geo(rng, 600, 0.08)} {
		g := kern(p)
		if g.nodes() < 10 {
			continue
		}
		var o minFill
		var w sweeper
		hist := map[int]int{}
		for v := range int32(g.nodes()) {
			o.follow(g, 40, 1<<60, w.run(g, v))
			hist[o.width]++
		}
		o.run(g, 40, 1<<60)
		fmt.Println(name, g.nodes(), len(g.adj)/g.nodes(), hist, "minfill", o.width)
	}
}

func mesh(rng *rand.Rand, n int, defects int, weight int64) *Problem {
	p := &Problem{Nodes: n * n}
	for i := range n {
		for j := range n {
			v := i*n + j
			if j+1 < n {
				p.Edges = append(p.Edges, Edge{int32(v), int32(v + 1), weight, false})
			}
			if i+1 < n {
				p.Edges = append(p.Edges, Edge{int32(v), int32(v + n), weight, false})
			}
		}
	}
	for range defects {
		i := rng.IntN(len(p.Edges))
		p.Edges[i].Same = true
	}
	return p
}
func regular(rng *rand.Rand, n, d int) *Problem {
	p := &Problem{Nodes: n}
	for range d {
		perm := rng.Perm(n)
		for i := 0; i+1 < n; i += 2 {
			p.Edges = append(p.Edges, unit(perm[i], perm[i+1]))
		}
	}
	return p
}
func random(rng *rand.Rand, n int, p float64) *Problem {
	q := &Problem{Nodes: n}
	for i := range n {
		for j := range i {
			if rng.Float64() < p {
				q.Edges = append(q.Edges, unit(i, j))
			}
		}
	}
	return q
}
func withCost(rng *rand.Rand, p *Problem, often int, from bool) *Problem {
	p.Cost = make([][2]int64, p.Nodes)
	s := Solve(p, DefaultBudget())
	for i := range p.Cost {
		if rng.IntN(100) < often {
			k := rng.IntN(2)
			if from {
				k = int(s.Masks[i])
				if rng.IntN(20) == 0 {
					k ^= 1
				}
			}
			p.Cost[i][1^k] = 1
		}
	}
	return p
}
func TestExp3(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for _, c := range []struct {
		name string
		p    *Problem
	}{
		{"king40u", king(rng, 40, 40, 1)},
		{"king40", king(rng, 40, 40, 9)},
		{"king40L", king(rng, 40, 40, 1<<40)},
		{"king100", king(rng, 100, 100, 9)},
		{"mesh100-3", mesh(rng, 100, 3, 1)},
		{"mesh100-30", mesh(rng, 100, 30, 1)},
		{"mesh100-300", mesh(rng, 100, 300, 1)},
		{"mesh60-3c", withCost(rng, mesh(rng, 60, 3, 1<<20), 100, false)},
		{"mesh60-30c", withCost(rng, mesh(rng, 60, 30, 1<<20), 100, true)},
		{"mesh60-30d", withCost(rng, mesh(rng, 60, 30, 1<<20), 10, true)},
		{"king30c", withCost(rng, king(rng, 30, 30, 1), 50, false)},
		{"reg200-3", regular(rng, 200, 3)},
		{"reg1000-3", regular(rng, 1000, 3)},
		{"reg200-6", regular(rng, 200, 6)},
		{"rand100-.1", random(rng, 100, .1)},
		{"rand60-.5", random(rng, 60, .5)},
		{"K30", complete(30)},
		{"K60", complete(60)},
		{"geo2000", geo(rng, 2000, 0.05)},
	} {
		t0 := time.Now()
		s := Solve(c.p, DefaultBudget())
		fmt.Printf("%-12s cost %d gap %d (%.2f%%) work %d M width %d  %v\n", c.name, s.Cost, s.Cost-s.LowerBound, 100*float64(s.Cost-s.LowerBound)/float64(s.Cost), s.Work>>20, s.Width, time.Since(t0).Round(time.Millisecond))
	}
}
