package decompose

import (
	"slices"

	"maskpair/gds"
)

// This file recognises a layout that has not been edited since its baseline was made: each structure draws the same figures and places
// the same structures in the same order, whatever they are called, but on masks. Then the flat figures of both come in the same order, and
// what each shape remembers is read off without a look at places. It costs a comparison of what is drawn, once for each structure and
// its twin, and a walk through what is flat. One edit, or an array that was split for its masks, and places decide.

// twins are structures of a layout with those of its baseline that draw the same.
type twins struct {
	f     *flat
	masks [2]*flat
	known map[[2]int32][]uint8 // by the two: of each own figure, the state that it leaves to its shape; nil: no twins
}

// unchanged fills in what the shapes of a top of the layout remember, if the top of the baseline is its twin and each shape was on one
// mask. Else it leaves nothing behind.
func (c *comparison) unchanged(top int) bool {
	f := c.b.l.flat
	t := twins{f: f, masks: c.e.masks, known: map[[2]int32][]uint8{}}
	s, was := f.h.tops[top], c.e.masks[A].h.tops[c.top]
	if f.h.odd[s] || c.e.h.odd[was] || !t.same(s, was) {
		return false
	}
	t.tell(s, was, c.b.l.nodeOf.Data[f.first[top]:], c.begin, c.state)
	for _, state := range c.state {
		if state == stateA|stateB {
			clear(c.state)
			return false
		}
	}
	return true
}

// all is the number of flat figures under a structure of the baseline.
func (t *twins) all(was int32) uint64 { return t.masks[A].all[was] + t.masks[B].all[was] }

// same tells whether two structures draw and place the same.
func (t *twins) same(s, was int32) bool {
	if t.f.all[s] != t.all(was) {
		return false
	}
	key := [2]int32{s, was}
	if own, ok := t.known[key]; ok {
		return own != nil
	}
	own, ok := t.sameFigures(s, was)
	if !ok || !t.sameRefs(s, was) {
		own = nil
	}
	t.known[key] = own
	return own != nil
}

func (t *twins) sameFigures(s, was int32) ([]uint8, bool) {
	n := t.f.own[s]
	if n != t.masks[A].own[was]+t.masks[B].own[was] {
		return nil, false
	}
	own := make([]uint8, 0, n+1) // never nil
	now, before := t.f.lib, t.masks[A].lib
	st := &before.Structures[was]
	i := now.Structures[s].FirstFigure
	for k := st.FirstFigure; k < st.EndFigure; k++ {
		state := uint8(stateA)
		if !t.masks[A].figure(k) {
			if !t.masks[B].figure(k) {
				continue
			}
			state = stateB
		}
		for !t.f.figure(i) { // there are as many
			i++
		}
		if !sameFigure(now, &now.Figures[i], before, &before.Figures[k]) {
			return nil, false
		}
		own = append(own, state)
		i++
	}
	return own, true
}

func sameFigure(a *gds.Library, p *gds.Figure, b *gds.Library, q *gds.Figure) bool {
	if p.Box != q.Box || (p.Outline == 0) != (q.Outline == 0) {
		return false
	}
	if p.Outline == 0 {
		return true
	}
	o, w := a.Outlines[p.Outline-1], b.Outlines[q.Outline-1]
	points, were := a.Points[o.First:o.First+uint64(o.Count)], b.Points[w.First:w.First+uint64(w.Count)]
	o.First, w.First = 0, 0
	return o == w && slices.Equal(points, were)
}

// next gives the first reference from r on, before end, that places figures; end if there is none.
func next(lib *gds.Library, r, end uint32, all func(int32) uint64) uint32 {
	for r < end && (lib.Refs[r].Target < 0 || all(lib.Refs[r].Target) == 0) {
		r++
	}
	return r
}

// eachRef calls fn for the references of two structures, side by side, that place figures, until that is false; false too if there are
// more of one.
func (t *twins) eachRef(s, was int32, fn func(ref, was *gds.Ref) bool) bool {
	now, before := t.f.lib, t.masks[A].lib
	st, old := &now.Structures[s], &before.Structures[was]
	under := func(s int32) uint64 { return t.f.all[s] }
	r, q := st.FirstRef, old.FirstRef
	for {
		r, q = next(now, r, st.EndRef, under), next(before, q, old.EndRef, t.all)
		if r == st.EndRef || q == old.EndRef {
			return r == st.EndRef && q == old.EndRef
		}
		if !fn(&now.Refs[r], &before.Refs[q]) {
			return false
		}
		r, q = r+1, q+1
	}
}

func (t *twins) sameRefs(s, was int32) bool {
	return t.eachRef(s, was, func(ref, was *gds.Ref) bool {
		if ref.At != was.At || ref.Turn != was.Turn || (ref.Extra == 0) != (was.Extra == 0) {
			return false
		}
		if ref.Extra != 0 && t.f.lib.Placements[ref.Extra-1] != t.masks[A].lib.Placements[was.Extra-1] {
			return false
		}
		return t.same(ref.Target, was.Target)
	})
}

// tell leaves to each shape the states of its figures. Nodes are those of the figures under the structure, in order; it returns those
// behind them.
func (t *twins) tell(s, was int32, node []uint32, begin uint32, state []uint8) []uint32 {
	for k, own := range t.known[[2]int32{s, was}] {
		state[node[k]-begin] |= own
	}
	node = node[t.f.own[s]:]
	t.eachRef(s, was, func(ref, was *gds.Ref) bool {
		for range elements(t.f.lib, ref) {
			node = t.tell(ref.Target, was.Target, node, begin, state)
		}
		return true
	})
	return node
}
