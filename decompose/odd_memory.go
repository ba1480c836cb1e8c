package decompose

import (
	"fmt"
	"slices"
)

// This file says how much memory the odd components of a layer will need, as soon as it can be known: what solving takes, once the near
// pairs are there and parity has settled the rest; and what explaining takes, once it is known how many pairs stay unresolved.

// Bytes that odd components take, as measured on open and generated layouts. Of the room that the items have left, solving takes what
// it can.
const (
	bytesPerNode     = 36   // of any component: box and number
	bytesPerOddNode  = 20   // for as long as the layer is worked on
	bytesPerOddPair  = 49   // the same: as found, as weighed
	solvingPerNode   = 170  // while the component is solved
	solvingPerPair   = 70   // the same
	heapPerOddNode   = 40   // masks by round
	heapPerJudged    = 300  // by odd node, more where pairs are judged by what faces what
	heapPerCut       = 1500 // by odd node, more where shapes may be cut
	heapPerJudgedCut = 3500 // by odd node, more for both
	heapPerPiece     = 1000 // by odd node, more where the cuts are made
	bytesPerLeftPair = 800  // for the report
)

// checkPairs refuses odd components that cannot be solved in the memory that the run may use.
func (s *solver) checkPairs() error {
	pairs, _ := s.oddPairs()
	return s.opt.allow(s.need(0), func() string {
		return fmt.Sprintf("layer %s: %d near pairs in odd components", s.l.rules.Name, pairs)
	})
}

// checkLeft refuses so many unresolved pairs that they cannot be explained in the memory that the run may use.
func (s *solver) checkLeft() error {
	left := int64(0)
	for i := range s.groups {
		b := &s.groups[i]
		left += b.units.pairsOf(b.solution.Cost)
	}
	return s.opt.allow(s.need(left), func() string {
		return fmt.Sprintf("layer %s: %d unresolved pairs", s.l.rules.Name, left)
	})
}

// oddPairs counts the near pairs in broken groups, and tells what solving each group takes.
func (s *solver) oddPairs() (pairs int64, solving []int64) {
	for i := range s.groups {
		b := &s.groups[i]
		own := int64(0)
		for _, u := range b.nodes {
			own += int64(len(s.l.near.of(u)))
		}
		pairs += own
		solving = append(solving, int64(len(b.nodes))*solvingPerNode+own*solvingPerPair)
	}
	return pairs, solving
}

// need is what the run will use at most from here on, in bytes, with so many pairs left.
func (s *solver) need(left int64) int64 {
	l := s.l
	pairs, solving := s.oddPairs()
	slices.Sort(solving)
	room := int64(l.nodes)*bytesPerNode + int64(s.nodes)*bytesPerOddNode + pairs*bytesPerOddPair
	for _, n := range solving[max(0, len(solving)-s.opt.jobs()):] {
		room += n
	}
	heap := int64(heapPerOddNode)
	switch judged := l.facingRules() != nil; {
	case judged && l.rules.Stitch != nil:
		heap += heapPerJudgedCut
	case judged:
		heap += heapPerJudged
	case l.rules.Stitch != nil:
		heap += heapPerCut
	}
	if l.rules.Stitch != nil && l.rules.Stitch.Apply {
		heap += heapPerPiece
	}
	return l.settled + max(0, room-l.spare) + int64(s.nodes)*heap + left*bytesPerLeftPair
}
