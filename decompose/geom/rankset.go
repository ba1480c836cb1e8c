package geom

import "math/bits"

// rankSet is a set of ranks 0 to n-1 that finds its next and previous member in about log n / 6 steps: a bitmap, over it a
// bitmap of its words that are not empty, and so on up to a single word. Scan lines keep the places of their edges in it.
type rankSet struct {
	levels [6][]uint64 // 64^6 ranks: more than memory holds
	depth  int
}

// reset makes the set empty, for ranks below n.
func (s *rankSet) reset(n int) {
	s.depth = 0
	for {
		n = max(1, (n+63)/64)
		level := s.levels[s.depth]
		if cap(level) < n {
			level = make([]uint64, n)
		} else {
			level = level[:n]
			clear(level)
		}
		s.levels[s.depth] = level
		s.depth++
		if n == 1 {
			return
		}
	}
}

func (s *rankSet) has(i int) bool {
	return s.levels[0][i>>6]>>(i&63)&1 != 0
}

func (s *rankSet) add(i int) {
	for l := range s.depth {
		word := &s.levels[l][i>>6]
		before := *word
		*word |= 1 << (i & 63)
		if before != 0 {
			return
		}
		i >>= 6
	}
}

func (s *rankSet) remove(i int) {
	for l := range s.depth {
		word := &s.levels[l][i>>6]
		*word &^= 1 << (i & 63)
		if *word != 0 {
			return
		}
		i >>= 6
	}
}

// flip adds or removes i.
func (s *rankSet) flip(i int) {
	if s.has(i) {
		s.remove(i)
	} else {
		s.add(i)
	}
}

// next is the least member that is at least i, or -1.
func (s *rankSet) next(i int) int {
	for l := 0; l < s.depth; l++ {
		w := i >> 6
		if w < len(s.levels[l]) {
			if m := s.levels[l][w] &^ (1<<(i&63) - 1); m != 0 {
				i = w<<6 | bits.TrailingZeros64(m)
				for l--; l >= 0; l-- {
					i = i<<6 | bits.TrailingZeros64(s.levels[l][i])
				}
				return i
			}
		}
		i = w + 1
	}
	return -1
}

// prev is the greatest member that is at most i, or -1.
func (s *rankSet) prev(i int) int {
	for l := 0; l < s.depth && i >= 0; l++ {
		w := i >> 6
		if m := s.levels[l][w] & (^uint64(0) >> (63 - i&63)); m != 0 {
			i = w<<6 | 63 - bits.LeadingZeros64(m)
			for l--; l >= 0; l-- {
				i = i<<6 | 63 - bits.LeadingZeros64(s.levels[l][i])
			}
			return i
		}
		i = w - 1
	}
	return -1
}
