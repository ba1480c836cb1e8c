package geom

import (
	"math/rand/v2"
	"testing"
)

func TestRankSetAgainstAMap(t *testing.T) {
	rng := rand.New(rand.NewPCG(21, 22))
	var s rankSet
	for _, n := range []int{1, 2, 63, 64, 65, 4096, 4097, 300000, 10} {
		s.reset(n)
		in := map[int]bool{}
		for range 2000 {
			i := rng.IntN(n)
			switch rng.IntN(3) {
			case 0:
				s.add(i)
				in[i] = true
			case 1:
				s.remove(i)
				delete(in, i)
			case 2:
				s.flip(i)
				if in[i] {
					delete(in, i)
				} else {
					in[i] = true
				}
			}
			if rng.IntN(40) != 0 {
				continue
			}
			k := rng.IntN(n)
			next, prev := -1, -1
			for j := range in {
				if j >= k && (next < 0 || j < next) {
					next = j
				}
				if j <= k && j > prev {
					prev = j
				}
			}
			if s.next(k) != next || s.prev(k) != prev || s.has(k) != in[k] {
				t.Fatalf("n %d at %d: next %d, prev %d, has %v; want %d, %d, %v", n, k, s.next(k), s.prev(k), s.has(k), next, prev, in[k])
			}
		}
		if s.next(n) != -1 || s.prev(-1) != -1 {
			t.Errorf("n %d: next beyond the end %d, prev before the start %d", n, s.next(n), s.prev(-1))
		}
	}
}
