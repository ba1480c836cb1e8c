package decompose

import (
	"cmp"
	"slices"
)

// This file orders the nodes of broken groups so that equal groups come out alike: by their boxes in the frame of the lowest cell that
// holds the group, in that of its eight orientations in which the list of boxes is least.

// canon is the canonical frame of a group: it takes boxes from the top to a place that is the same for equal groups.
type canon struct {
	frame frame
	back  placement // from the top to the canonical frame
}

// arrange orders the nodes of all broken groups.
func (s *solver) arrange() {
	l := s.l
	for i := range s.groups {
		s.groups[i].first = ^uint32(0)
	}
	for o, n := range l.nodeOf.Data {
		if i, ok := s.of(n); ok {
			b := &s.groups[i]
			b.first, b.last = min(b.first, uint32(o)), uint32(o)
		}
	}
	boxes := l.boxes()
	fr := newFrames(l.flat)
	for i := range s.groups {
		s.groups[i].arrange(l, fr, boxes)
	}
}

// manyNodes is the size from which a group is taken as it lies in its cell: large groups hardly recur in another orientation.
const manyNodes = 4096

func (b *brokenGroup) arrange(l *layout, fr *frames, boxes []Box) {
	top := l.topOf(b.nodes[0])
	if l.topOf(b.nodes[len(b.nodes)-1]) == top {
		b.canon.frame = fr.of(top, b.first, b.last)
	}
	home := b.canon.frame.at.inverse()
	type entry struct {
		box  Box
		node uint32
	}
	var best []entry
	list := make([]entry, len(b.nodes))
	turns := uint8(8)
	if len(b.nodes) > manyNodes {
		turns = 1
	}
	for turn := range turns {
		p := placement{turn: orientation(turn)}.compose(home)
		low := emptyBox
		for k, u := range b.nodes {
			list[k] = entry{p.applyBox(boxes[u]), u}
			low = low.join(list[k].box)
		}
		// Whole database units stay whole.
		low.X1 -= low.X1 & (l.flat.forms.scale - 1)
		low.Y1 -= low.Y1 & (l.flat.forms.scale - 1)
		p.x, p.y = p.x-low.X1, p.y-low.Y1
		for k := range list {
			list[k].box = list[k].box.shift(-low.X1, -low.Y1)
		}
		slices.SortFunc(list, func(a, c entry) int { return cmp.Or(compareBoxes(a.box, c.box), cmp.Compare(a.node, c.node)) })
		if best == nil || slices.CompareFunc(list, best, func(a, c entry) int { return compareBoxes(a.box, c.box) }) < 0 {
			best = slices.Clone(list)
			b.canon.back = p
		}
	}
	for k := range best {
		b.nodes[k] = best[k].node
	}
}
