package decompose

import (
	"slices"

	"maskpair/gds/arena"
)

// neighbours are the near pairs of nodes, each once, under its lower node, in ascending order. The low bit of an entry says that the
// pair is nearer than any_mask_spacing.
type neighbours struct {
	start   []uint32 // entries of node i: start[i] to end[i]
	end     []uint32
	entries []uint32
	pairs   int64
	tooNear int64 // pairs nearer than any_mask_spacing
}

// of gives the entries of a node: higher nodes near to it, shifted by one bit.
func (n *neighbours) of(i uint32) []uint32 {
	return n.entries[n.start[i]:n.end[i]]
}

// gather turns near pairs of flat figures into those of nodes: it maps them, sorts them by counting, and drops what is double or
// within one node, or between two pieces of one stitch that overlap. The blocks are overwritten on the way.
func gather(room *arena.Slab, blocks [][]uint64, nodeOf []uint32, nodes int, given *givenStitches) *neighbours {
	n := &neighbours{start: arena.Cut[uint32](room, nodes+1), end: arena.CutDirty[uint32](room, nodes+1)}
	start, end := n.start, n.end
	total := 0
	for b, block := range blocks {
		kept := block[:0]
		for _, p := range block {
			u, v, tooNear := unpackPair(p)
			u, v = nodeOf[u], nodeOf[v]
			if u == v || given != nil && given.meet[[2]uint32{min(u, v), max(u, v)}] {
				continue
			}
			q := packPair(u, v, tooNear)
			if len(kept) > 0 && kept[len(kept)-1] == q {
				continue
			}
			kept = append(kept, q)
			start[q>>pairShift]++
		}
		blocks[b] = kept
		total += len(kept)
	}
	next := uint32(0)
	for i := range start {
		start[i], next = next, next+start[i]
	}
	copy(end, start)
	n.entries = arena.CutDirty[uint32](room, total)
	entries := n.entries
	for _, block := range blocks {
		for _, q := range block {
			u := q >> pairShift
			entries[end[u]] = uint32(q)
			end[u]++
		}
	}
	for i := range nodes {
		own := entries[start[i]:end[i]]
		if len(own) > 1 {
			slices.Sort(own)
			own = dropDouble(own)
			end[i] = start[i] + uint32(len(own))
		}
		n.pairs += int64(len(own))
		for _, e := range own {
			n.tooNear += int64(e & 1)
		}
	}
	return n
}

// dropDouble keeps one entry per node of a sorted list; the bit of the last of equal ones, which is set where any is.
func dropDouble(own []uint32) []uint32 {
	kept := own[:0]
	for _, e := range own {
		if n := len(kept); n > 0 && kept[n-1]>>1 == e>>1 {
			kept[n-1] = e
			continue
		}
		kept = append(kept, e)
	}
	return kept
}
