package arena

import (
	"math/rand/v2"
	"sync"
	"testing"
)

// fill writes a number all over a slice, and wrong tells whether another is in it.
func fill(s []uint32, v uint32) {
	for i := range s {
		s[i] = v
	}
}

func wrong(s []uint32, v uint32) bool {
	for _, x := range s {
		if x != v {
			return true
		}
	}
	return false
}

func TestSlicesOfASlabAreZeroAndApart(t *testing.T) {
	var s Slab
	defer s.Free()
	Hand(&s, New[uint64](1<<17))
	rng := rand.New(rand.NewPCG(1, 2))
	for round := range 4 {
		var all [][]uint32
		from := &s
		if round > 1 {
			from = s.Within()
		}
		for i := range uint32(300) {
			n := rng.IntN(1 << (1 + rng.IntN(15)))
			c := Cut[uint32](from, n)
			if len(c) != n || cap(c) != n || wrong(c, 0) {
				t.Fatalf("round %d: a slice of %d elements has %d, room for %d, or is not zero", round, n, len(c), cap(c))
			}
			fill(c, i+1)
			all = append(all, c)
		}
		for i, c := range all {
			if wrong(c, uint32(i)+1) {
				t.Fatalf("round %d: slice %d was overwritten", round, i)
			}
		}
		if round < 1 {
			s.Reset()
		}
	}
}

func TestASlabServesAgain(t *testing.T) {
	var s Slab
	defer s.Free()
	first := CutDirty[uint64](&s, 1000)
	large := CutDirty[uint64](&s, 1<<20)
	s.Reset()
	if again := CutDirty[uint64](&s, 1000); &again[0] != &first[0] {
		t.Error("the first slice after Reset does not lie where the first lay")
	}
	if again := CutDirty[uint64](&s, 1<<20); &again[0] != &large[0] {
		t.Error("a large slice after Reset does not lie where the large one lay")
	}
}

func TestASlabTakesWhatItIsHanded(t *testing.T) {
	var s Slab
	defer s.Free()
	a := New[uint64](1 << 17)
	start := &a.Data[0]
	Hand(&s, a)
	if a.Data != nil {
		t.Error("the array is still there")
	}
	a.Free()
	if c := Cut[uint64](&s, 10); &c[0] != start {
		t.Error("the slice does not lie in what was handed over")
	}
	small := New[byte](10)
	Hand(&s, small)
	Hand[byte](&s, nil)
	if small.Data != nil {
		t.Error("an array on the heap is still there")
	}
}

func TestSlabsWithinOneAtOnce(t *testing.T) {
	var s Slab
	defer s.Free()
	var wait sync.WaitGroup
	for w := range uint32(8) {
		wait.Add(1)
		go func() {
			defer wait.Done()
			in := s.Within()
			for round := range uint32(20) {
				var all [][]uint32
				for i := range uint32(40) {
					c := Cut[uint32](in, int(i*round*13))
					fill(c, w<<16|i)
					all = append(all, c)
				}
				for i, c := range all {
					if wrong(c, w<<16|uint32(i)) {
						t.Errorf("slice %d of worker %d was overwritten", i, w)
					}
				}
				in.Reset()
			}
		}()
	}
	wait.Wait()
}

func BenchmarkCut(b *testing.B) {
	var s Slab
	defer s.Free()
	const n = 1 << 18
	b.SetBytes(8 * n)
	for b.Loop() {
		fill(Cut[uint32](&s, 2*n), 1)
		s.Reset()
	}
}
