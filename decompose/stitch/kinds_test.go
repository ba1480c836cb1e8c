package stitch

import (
	"math/rand/v2"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
)

// TestKindsSayWhatFindSays: on random wires with random neighbours, some of which go on far away, looked at in two places and with the lists in another order.
func TestKindsSayWhatFindSays(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 5))
	cuts := 0
	for _, grid := range []int64{1, 2} {
		rules := Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: grid}
		kinds := NewKinds(rules)
		for range 500 {
			shape := []geom.Rect{r(0, 0, 100+rng.Int64N(300), 20)}
			if rng.IntN(2) == 0 {
				at := rng.Int64N(80)
				shape = append(shape, r(at, 0, at+20, 60+rng.Int64N(200)))
			}
			var near []geom.Rect
			for range 1 + rng.IntN(4) {
				x := rng.Int64N(400) - 20
				near = append(near, r(x, -40, x+10+rng.Int64N(30), -21))
				if x > 250 {
					near[len(near)-1].X2 += 900
				}
			}
			want, why := Find(shape, near, nil, rules)
			cuts += len(want.Cuts)
			for _, by := range []int64{0, 2 * rng.Int64N(1000)} {
				rng.Shuffle(len(near), func(i, k int) { near[i], near[k] = near[k], near[i] })
				rng.Shuffle(len(shape), func(i, k int) { shape[i], shape[k] = shape[k], shape[i] })
				got, gotWhy := kinds.Find(shiftAll(shape, by, -by), shiftAll(near, by, -by), nil)
				if d := cmp.Diff(want.shift(by, -by), got); d != "" || why != gotWhy {
					t.Fatalf("%v beside %v, moved by %d: reason %d, want %d\n%s", shape, near, by, gotWhy, why, d)
				}
			}
		}
	}
	if cuts < 300 {
		t.Errorf("only %d cuts", cuts)
	}
}
