package decompose

import (
	"cmp"
	"context"
	"math"
	"math/bits"
	"slices"

	"maskpair/gds/arena"
)

// This file orders the nodes of broken groups so that equal groups come out alike: by their boxes in the frame of the lowest cell that
// holds the group, in that of its eight orientations in which the list of boxes is least.

// canon is the canonical frame of a group: it takes boxes from the top to a place that is the same for equal groups.
type canon struct {
	frame frame
	back  placement // from the top to the canonical frame
}

// arrange orders the nodes of all broken groups.
func (s *solver) arrange(ctx context.Context, jobs int) error {
	l := s.l
	nodes := newBitset(l.nodes)
	for i := range s.groups {
		s.groups[i].first = ^uint32(0)
		for _, u := range s.groups[i].nodes {
			nodes.add(u)
		}
	}
	s.boxes = l.boxesOf(nodes, func(ordinal, node uint32) {
		i, _ := s.of(node)
		b := &s.groups[i]
		b.first, b.last = min(b.first, ordinal), max(b.last, ordinal)
	})
	fr := newFrames(l.flat)
	for i := range s.groups {
		b := &s.groups[i]
		top := l.topOf(b.nodes[0])
		if l.topOf(b.nodes[len(b.nodes)-1]) == top {
			b.canon.frame = fr.of(top, b.first, b.last)
		}
	}
	s.number = arena.Cut[uint32](&l.room, l.nodes)
	return s.each(ctx, jobs, func(b *brokenGroup) {
		s.within(func(room *arena.Slab) { b.arrange(room, s.boxes, l.flat.forms.scale) })
		for k, u := range b.nodes {
			s.number[u] = b.begin + uint32(k)
		}
	})
}

// manyNodes is the size from which a group is taken as it lies in its cell: large groups hardly recur in another orientation.
const manyNodes = 4096

// arrange orders the nodes of a group.
func (b *brokenGroup) arrange(room *arena.Slab, boxes []Box, scale int64) {
	home := b.canon.frame.at.inverse()
	turns := uint8(8)
	if len(b.nodes) > manyNodes {
		turns = 1
	}
	// The least box of a list comes first in it: only the orientations in which that is least of all can win.
	var able []arrangement
	for turn := range turns {
		a := arranged(b.nodes, boxes, placement{turn: orientation(turn)}.compose(home), scale)
		if len(able) > 0 {
			c := compareBoxes(a.least, able[0].least)
			if c > 0 {
				continue
			}
			if c < 0 {
				able = able[:0]
			}
		}
		able = append(able, a)
	}
	best := able[0]
	best.sort(room, b.nodes, boxes)
	for _, a := range able[1:] {
		a.sort(room, b.nodes, boxes)
		less := slices.CompareFunc(a.list, best.list, func(p, q placedNode) int {
			return compareBoxes(a.back.applyBox(boxes[p.node]), best.back.applyBox(boxes[q.node]))
		})
		if less < 0 {
			best = a
		}
	}
	for k := range best.list {
		b.nodes[k] = best.list[k].node
	}
	b.canon.back = best.back
}

// arrangement is the list of the nodes of a group in one orientation.
type arrangement struct {
	back  placement // from the top; the least corner comes to the origin
	least Box
	list  []placedNode
}

// placedNode is a node with the least corner of its box as placed.
type placedNode struct {
	x, y int64
	node uint32
}

// arranged finds where an arrangement lies, before it is sorted.
func arranged(nodes []uint32, boxes []Box, p placement, scale int64) arrangement {
	low, least := emptyBox, emptyBox
	for i, u := range nodes {
		box := p.applyBox(boxes[u])
		low = low.join(box)
		if i == 0 || compareBoxes(box, least) < 0 {
			least = box
		}
	}
	// Whole database units stay whole.
	low.X1 -= low.X1 & (scale - 1)
	low.Y1 -= low.Y1 & (scale - 1)
	p.x, p.y = p.x-low.X1, p.y-low.Y1
	return arrangement{back: p, least: least.shift(-low.X1, -low.Y1)}
}

// sort lists the nodes by their boxes.
func (a *arrangement) sort(room *arena.Slab, nodes []uint32, boxes []Box) {
	a.list = arena.CutDirty[placedNode](room, len(nodes))
	x, y := int64(0), int64(0)
	for k, u := range nodes {
		box := a.back.applyBox(boxes[u])
		a.list[k] = placedNode{box.X1, box.Y1, u}
		x, y = max(x, box.X1), max(y, box.Y1)
	}
	if len(a.list) >= fewDigits && max(x, y) <= math.MaxUint32 { // no corner is below the origin
		byX, byY := func(p *placedNode) uint32 { return uint32(p.x) }, func(p *placedNode) uint32 { return uint32(p.y) }
		list, other := sortBy(a.list, arena.CutDirty[placedNode](room, len(nodes)), byY, bits.Len64(uint64(y)), 1)
		a.list, _ = sortBy(list, other, byX, bits.Len64(uint64(x)), 1)
	} else {
		slices.SortFunc(a.list, func(p, q placedNode) int { return cmp.Or(cmp.Compare(p.x, q.x), cmp.Compare(p.y, q.y)) })
	}
	// Those with one corner, by the rest.
	for from := 0; from < len(a.list); {
		to := from + 1
		for to < len(a.list) && a.list[to].x == a.list[from].x && a.list[to].y == a.list[from].y {
			to++
		}
		if to > from+1 {
			slices.SortFunc(a.list[from:to], func(p, q placedNode) int {
				return cmp.Or(compareBoxes(a.back.applyBox(boxes[p.node]), a.back.applyBox(boxes[q.node])), cmp.Compare(p.node, q.node))
			})
		}
		from = to
	}
}
