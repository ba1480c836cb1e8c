package decompose

import "math/bits"

// bitset is a set of numbers below a bound, a bit each. Once it is ranked, each of its numbers has a rank: how many lesser ones there are.
// A nil set has all numbers, but no ranks.
type bitset struct {
	words  []uint64
	before []uint32 // by word: numbers in the words before it
}

func newBitset(bound int) *bitset { return &bitset{words: make([]uint64, (bound+63)/64)} }

func (s *bitset) add(n uint32) { s.words[n>>6] |= 1 << (n & 63) }

func (s *bitset) has(n uint32) bool { return s == nil || s.words[n>>6]>>(n&63)&1 != 0 }

// makeRanks deals the ranks, and gives how many numbers there are.
func (s *bitset) makeRanks() int {
	s.before = make([]uint32, len(s.words))
	count := uint32(0)
	for i, w := range s.words {
		s.before[i] = count
		count += uint32(bits.OnesCount64(w))
	}
	return int(count)
}

// rank gives the rank of a number; false where it is not in the set.
func (s *bitset) rank(n uint32) (int, bool) {
	word := s.words[n>>6]
	above := word >> (n & 63)
	if above&1 == 0 {
		return 0, false
	}
	return int(s.before[n>>6]) + bits.OnesCount64(word) - bits.OnesCount64(above), true
}
