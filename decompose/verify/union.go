package verify

// This file keeps sets that grow together: shapes and pieces, and what orders say about them.

// sets are disjoint sets of numbers, kept as trees.
type sets []uint32

func newSets(n int) sets {
	s := make(sets, n)
	for i := range s {
		s[i] = uint32(i)
	}
	return s
}

// find gives the number that stands for the set of i, shortening the way there.
func (s sets) find(i uint32) uint32 {
	for s[i] != i {
		s[i] = s[s[i]]
		i = s[i]
	}
	return i
}

// join makes one set of two; the lower number stands for it.
func (s sets) join(i, k uint32) {
	i, k = s.find(i), s.find(k)
	if i != k {
		s[max(i, k)] = min(i, k)
	}
}

// number deals numbers from 0 to the sets, in the order of their least members, and gives for each member that of its set.
func (s sets) number() (of []uint32, count int) {
	of = make([]uint32, len(s))
	for i := range s {
		if root := s.find(uint32(i)); root == uint32(i) {
			of[i] = uint32(count)
			count++
		} else {
			of[i] = of[root] // a root is the least of its set
		}
	}
	return of, count
}
