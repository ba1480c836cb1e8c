package decompose

import (
	"cmp"
	"context"
	"fmt"
	"slices"
)

// This file lists the shapes that are on another mask than in the baseline, and says of each what moved it: the nearest order, new
// shape or new near pair on the way over shapes that moved as well.

// moved lists the shapes that moved, by place.
func (l *layout) moved(ctx context.Context, a *assignment, o *Orders, v *View) ([]MovedShape, error) {
	var nodes []uint32
	for u, m := range o.Memory {
		if m != NoMemory && a.mask.Data[u] != m-1 && !l.isCut(uint32(u)) {
			nodes = append(nodes, uint32(u))
		}
	}
	if len(nodes) == 0 {
		return nil, nil
	}
	w := &mover{l: l, o: o, v: v, index: make(map[uint32]int32, len(nodes)), nodes: nodes, reasons: make([]reason, len(nodes))}
	w.bits = make([]uint64, (l.nodes+63)/64)
	for i, u := range nodes {
		w.index[u] = int32(i)
		w.bits[u>>6] |= 1 << (u & 63)
	}
	w.find()
	boxes := l.boxes()
	out := make([]MovedShape, len(nodes))
	for i, u := range nodes {
		if i&1023 == 0 && ctx.Err() != nil {
			return nil, ctx.Err()
		}
		out[i] = MovedShape{Top: l.flat.h.name(l.flat.h.tops[l.topOf(u)]), Box: l.half(boxes[u]),
			Was: Mask(o.Memory[u] - 1), Now: Mask(a.mask.Data[u]), Why: w.text(int32(i))}
	}
	return out, nil
}

// isCut tells whether a node is cut in the output.
func (l *layout) isCut(u uint32) bool { return l.cuts != nil && l.cuts.shapes[u] != nil }

// mover finds what moved shapes.
type mover struct {
	l       *layout
	o       *Orders
	v       *View
	nodes   []uint32         // that moved, ascending
	index   map[uint32]int32 // place in nodes
	bits    []uint64         // by node: it moved
	reasons []reason
	words   map[reason]string
}

// is tells whether a node moved.
func (w *mover) is(u uint32) bool { return w.bits[u>>6]>>(u&63)&1 == 1 }

// cause is the kind of a reason, the plainest first.
type cause uint8

const (
	noCause    cause = iota
	byAnchor         // at: its place in the anchors
	byTie            // at: its place in the ties
	byNewShape       // at: the node
	byNewPair        // at: the node that did not move
)

// reason is what moved a shape.
type reason struct {
	cause cause
	at    uint32
	away  int32 // shapes that moved as well on the way there
}

// find finds the reasons: first of the shapes that are moved by something that did not move, then breadth first of the others.
func (w *mover) find() {
	give := func(u uint32, r reason) {
		if !w.is(u) {
			return
		}
		i := w.index[u]
		if w.reasons[i].cause == noCause || cmp.Or(cmp.Compare(r.cause, w.reasons[i].cause), cmp.Compare(r.at, w.reasons[i].at)) < 0 {
			w.reasons[i] = r
		}
	}
	type link struct{ from, to int32 }
	var links []link
	join := func(a, b uint32) bool {
		one, other := w.is(a), w.is(b)
		if one && other {
			i, k := w.index[a], w.index[b]
			links = append(links, link{i, k}, link{k, i})
		}
		return one != other
	}
	for n, an := range w.o.Anchors {
		give(an.Node, reason{cause: byAnchor, at: uint32(n)})
	}
	for n, t := range w.o.Ties {
		if join(t.A, t.B) {
			give(t.A, reason{cause: byTie, at: uint32(n)})
			give(t.B, reason{cause: byTie, at: uint32(n)})
		}
	}
	for u := range uint32(w.l.nodes) {
		for _, e := range w.l.near.of(u) {
			if x := e >> 1; join(u, x) {
				give(u, w.neighbour(x))
				give(x, w.neighbour(u))
			}
		}
	}
	slices.SortFunc(links, func(a, b link) int { return cmp.Or(cmp.Compare(a.from, b.from), cmp.Compare(a.to, b.to)) })
	var queue []int32
	for i, r := range w.reasons {
		if r.cause != noCause {
			queue = append(queue, int32(i))
		}
	}
	// What is plainest goes first among what is equally far.
	slices.SortStableFunc(queue, func(a, b int32) int { return cmp.Compare(w.reasons[a].cause, w.reasons[b].cause) })
	for n := 0; n < len(queue); n++ {
		i := queue[n]
		first, _ := slices.BinarySearchFunc(links, i, func(l link, i int32) int { return cmp.Compare(l.from, i) })
		for _, l := range links[first:] {
			if l.from != i {
				break
			}
			if w.reasons[l.to].cause == noCause {
				w.reasons[l.to] = w.reasons[i]
				w.reasons[l.to].away++
				queue = append(queue, l.to)
			}
		}
	}
}

// neighbour is the reason that a node which did not move is to one that it is near to.
func (w *mover) neighbour(u uint32) reason {
	if w.o.Memory[u] == NoMemory {
		return reason{cause: byNewShape, at: u}
	}
	return reason{cause: byNewPair, at: u}
}

// text words what moved a shape.
func (w *mover) text(i int32) string {
	r := w.reasons[i]
	if w.words == nil {
		w.words = map[reason]string{}
	}
	s, ok := w.words[r]
	if !ok {
		s = w.word(r)
		w.words[r] = s
	}
	return s
}

func (w *mover) word(r reason) string {
	var s string
	switch r.cause {
	case byAnchor:
		s = w.o.DescribeAnchor(w.o.Anchors[r.at])
	case byTie:
		s = w.o.DescribeTie(w.o.Ties[r.at])
	case byNewShape:
		what := "the new shape"
		if m := w.l.memory; m != nil && int(r.at) < len(m.nodes) && m.nodes[r.at]&recalledSome != 0 {
			what = "the shape without memory"
		}
		s = fmt.Sprintf("%s at %s is near", what, w.v.Place(r.at))
	case byNewPair:
		s = fmt.Sprintf("the shape at %s, which stays, is near", w.v.Place(r.at))
	default:
		return "fewer near pairs stay on one mask this way"
	}
	switch r.away {
	case 0:
		return s
	case 1:
		return s + ", to a shape that moved as well"
	}
	return fmt.Sprintf("%s, over %d shapes that moved as well", s, r.away)
}
