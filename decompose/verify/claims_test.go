package verify

import (
	"math/rand/v2"
	"testing"
)

// Orders over a few units, against all assignments: a contradiction is found exactly when no assignment is left, and the
// orders of its chain alone leave none either.
func TestClaimsAgainstAllAssignments(t *testing.T) {
	type order struct {
		a, b     uint32 // b is the ground for an anchor
		opposite bool
	}
	const units = 6
	possible := func(orders []order) bool {
		for bits := range 1 << units {
			mask := func(u uint32) bool { return bits>>u&1 != 0 } // true is B; the ground is A
			ok := true
			for _, o := range orders {
				ok = ok && (mask(o.a) != (o.b != units && mask(o.b))) == o.opposite
			}
			if ok {
				return true
			}
		}
		return false
	}
	rng := rand.New(rand.NewPCG(11, 12))
	contradictions := 0
	for range 3000 {
		c := newClaims(units)
		var orders []order
		for n := range 14 {
			o := order{uint32(rng.IntN(units)), uint32(rng.IntN(units)), rng.IntN(2) == 0}
			s := source{kind: entryTie, entry: int32(n)}
			var chain []source
			if rng.IntN(3) == 0 {
				o.b = units
				mask := tagA
				if o.opposite {
					mask = tagB
				}
				chain = c.hold(o.a, mask, s)
			} else {
				chain = c.tie(o.a, o.b, o.opposite, s)
			}
			orders = append(orders, o)
			if got, want := chain == nil, possible(orders); got != want {
				t.Fatalf("orders %v: held to be possible: %v, want %v", orders, got, want)
			}
			if chain != nil {
				contradictions++
				var alone []order
				for _, s := range chain {
					alone = append(alone, orders[s.entry])
				}
				if possible(alone) {
					t.Fatalf("orders %v: the chain %v does not contradict itself", orders, alone)
				}
				break
			}
		}
	}
	if contradictions < 1000 {
		t.Errorf("%d contradictions in 3000 rounds: the test is one-sided", contradictions)
	}
}
