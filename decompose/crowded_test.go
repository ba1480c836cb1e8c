package decompose

import (
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/decompose/exact"
)

// TestCrowdsCostOnce: for all masks of the atoms, the best masks of the other nodes, found by trial, cost what the pair costs, once or not at all, and
// settle finds such masks.
func TestCrowdsCostOnce(t *testing.T) {
	rng := rand.New(rand.NewPCG(71, 72))
	parts := map[int]int{}
	for range 400 {
		const left, right, weight = 4, 4, 10
		var near [][2]int32
		for range 2 + rng.IntN(4) {
			q := [2]int32{rng.Int32N(left), left + rng.Int32N(right)}
			if !slices.Contains(near, q) {
				near = append(near, q)
			}
		}
		c := newCrowd(0, near, weight)
		p := &exact.Problem{Nodes: left + right}
		surplus := c.edges(p, near)
		parts[c.parts]++
		for m := range 1 << (left + right) {
			masks := make([]uint8, p.Nodes)
			for i := range left + right {
				masks[i] = uint8(m >> i & 1)
			}
			want := int64(0)
			if slices.ContainsFunc(near, func(q [2]int32) bool { return masks[q[0]] == masks[q[1]] }) {
				want = weight
			}
			c.settle(masks, func(node int32, mask uint8) { masks[node] = mask })
			if got := p.CostOf(masks) - surplus; got != want {
				t.Fatalf("near %v, masks %v: %d after settle, want %d", near, masks, got, want)
			}
			if extra := p.Nodes - left - right; extra <= 8 && m%7 == 0 {
				least := int64(1) << 60
				for k := range 1 << extra {
					for i := range extra {
						masks[left+right+i] = uint8(k >> i & 1)
					}
					least = min(least, p.CostOf(masks)-surplus)
				}
				if least != want {
					t.Fatalf("near %v, masks %v: at least %d, want %d", near, masks, least, want)
				}
			}
		}
	}
	if parts[1] < 20 || parts[2] < 20 || parts[3] < 20 {
		t.Errorf("pairs by parts: %v", parts)
	}
}

// TestCrowdsOfManyParts: beyond mostParts a pair costs its atoms too little, never too much, and the true cost is told.
func TestCrowdsOfManyParts(t *testing.T) {
	const n, weight = mostParts + 1, 60
	var near [][2]int32
	for i := range int32(n) {
		near = append(near, [2]int32{i, n + i})
	}
	b := &brokenGroup{cutting: true, pieces: &pieces{first: []int32{0, n, 2 * n}, pairs: [][][2]int32{near}}, nodes: make([]uint32, 2)}
	p := &exact.Problem{Nodes: 2 * n}
	b.crowds = []crowd{newCrowd(0, near, weight)}
	b.surplus = b.crowds[0].edges(p, near)
	if b.crowds[0].parts != n || b.surplus != 0 || p.Nodes != 2*n {
		t.Fatalf("%d parts, %d nodes", b.crowds[0].parts, p.Nodes)
	}
	for m := range 1 << n {
		masks := make([]uint8, 2*n)
		want := int64(0)
		for i := range n {
			masks[i] = uint8(m >> i & 1)
			if masks[i] == 0 {
				want = weight
			}
		}
		if got := b.settleCrowds(p, masks); got != want || p.CostOf(masks) > want {
			t.Fatalf("masks %v: %d, by shares %d, want %d", masks, got, p.CostOf(masks), want)
		}
	}
}
