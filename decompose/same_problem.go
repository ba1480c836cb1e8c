package decompose

import (
	"encoding/binary"
	"hash/maphash"
	"slices"

	"maskpair/decompose/exact"
)

// This file finds broken groups that pose the same problem, so that each is solved once.

// findSame finds groups with equal problems, so that each is solved once.
func (s *solver) findSame() {
	seed := maphash.MakeSeed()
	type size struct{ nodes, edges int }
	sizes := map[size]int{}
	sizeOf := func(b *brokenGroup) size { return size{b.problem.Nodes, len(b.problem.Edges)} }
	for i := range s.groups {
		sizes[sizeOf(&s.groups[i])]++
	}
	byHash := map[uint64][]int{}
	for i := range s.groups {
		b := &s.groups[i]
		b.same = i
		if sizes[sizeOf(b)] == 1 {
			continue
		}
		h := hashProblem(seed, b.problem)
		for _, k := range byHash[h] {
			if b.surplus == s.groups[k].surplus && equalProblems(b.problem, s.groups[k].problem) {
				b.same = k
				break
			}
		}
		if b.same == i {
			byHash[h] = append(byHash[h], i)
		}
	}
}

func hashProblem(seed maphash.Seed, p *exact.Problem) uint64 {
	var h maphash.Hash
	h.SetSeed(seed)
	var buf [17]byte
	for _, e := range p.Edges {
		binary.LittleEndian.PutUint32(buf[0:], uint32(e.U))
		binary.LittleEndian.PutUint32(buf[4:], uint32(e.V))
		binary.LittleEndian.PutUint64(buf[8:], uint64(e.Weight))
		buf[16] = uint8(boolInt(e.Same))
		h.Write(buf[:])
	}
	for _, f := range p.Fixed {
		h.WriteByte(byte(f))
	}
	for _, costs := range [2][][2]int64{p.Cost, p.Lesser} {
		for _, c := range costs {
			binary.LittleEndian.PutUint64(buf[0:], uint64(c[0]))
			binary.LittleEndian.PutUint64(buf[8:], uint64(c[1]))
			h.Write(buf[:16])
		}
	}
	return h.Sum64()
}

func equalProblems(p, q *exact.Problem) bool {
	return p.Nodes == q.Nodes && slices.Equal(p.Edges, q.Edges) && slices.Equal(p.Fixed, q.Fixed) && slices.Equal(p.Cost, q.Cost) &&
		p.Unit == q.Unit && slices.Equal(p.Lesser, q.Lesser)
}
