package decompose

import "maskpair/gds/arena"

// This file makes components of near pairs and settles all that parity settles: by union-find, in one pass over the pairs. What is
// left is a list of groups that an odd cycle or clashing orders keep from two masks.

// assignment is the mask of each node of a layout, and the components and groups it is found by.
//
// A component hangs together by near pairs. A group is a set of components that ties join; without ties, groups are components.
// The masks of the nodes of a free group may still be turned over together.
//
// All but the masks lies in the room of the layout.
type assignment struct {
	mask       *arena.Array[uint8] // by node
	component  []uint32            // by node: number, dealt by least node
	components int
	group      []uint32 // by node; the same slice as component where no tie joins components
	groups     int
	free       []bool  // by group: may be turned over
	broken     []int32 // groups that parity cannot settle, ascending
	tied       bool
}

// assign finds components and groups and settles what parity settles. The masks of broken groups are not final.
func (l *layout) assign(o *Orders) *assignment {
	a := &assignment{mask: arena.New[uint8](l.nodes), component: arena.CutDirty[uint32](&l.room, l.nodes), tied: len(o.Ties) > 0}
	broken := map[uint32]bool{} // by root, possibly no longer a root
	p := newParity(a.component)
	for u := range uint32(l.nodes) {
		for _, e := range l.near.of(u) {
			if !p.relate(u, e>>1, 1) {
				broken[u] = true
			}
		}
	}
	a.group = a.component
	if a.tied {
		a.group = arena.CutDirty[uint32](&l.room, l.nodes)
		copy(a.group, a.component)
		q := parity{a.group}
		for _, t := range o.Ties {
			apart := uint32(0)
			if t.Opposite {
				apart = 1
			}
			if !q.relate(t.A, t.B, apart) {
				broken[t.A] = true
			}
		}
		for u := range a.mask.Data {
			_, other := q.find(uint32(u))
			a.mask.Data[u] = uint8(other)
		}
		a.groups = numberRoots(q)
		a.components = numberRoots(p)
	} else {
		for u := range a.mask.Data {
			_, other := p.find(uint32(u))
			a.mask.Data[u] = uint8(other)
		}
		a.components = numberRoots(p)
		a.groups = a.components
	}
	a.free = arena.CutDirty[bool](&l.room, a.groups)
	for i := range a.free {
		a.free[i] = true
	}
	isBroken := arena.Cut[bool](&l.room, a.groups)
	for u := range broken {
		isBroken[a.group[u]] = true
	}
	a.anchor(o, isBroken)
	a.remember(o, isBroken)
	for g := range isBroken {
		if isBroken[g] {
			a.broken = append(a.broken, int32(g))
		}
	}
	return a
}

// numberRoots replaces each link by the number of its set, dealt by least node. The union-find is gone then.
func numberRoots(p parity) int {
	sets := uint32(0)
	for i := range p.link {
		if up := p.link[i] >> 1; up == uint32(i) {
			p.link[i] = sets
			sets++
		} else {
			p.link[i] = p.link[up] // up < i, so it holds its number already
		}
	}
	return int(sets)
}

// anchor turns each group to where its anchors hold it, and finds the groups whose anchors clash through near pairs.
func (a *assignment) anchor(o *Orders, isBroken []bool) {
	if len(o.Anchors) == 0 {
		return
	}
	const unset = 2
	turn := make([]uint8, a.groups)
	for i := range turn {
		turn[i] = unset
	}
	for _, an := range o.Anchors {
		g := a.group[an.Node]
		a.free[g] = false
		want := a.mask.Data[an.Node] ^ uint8(an.Mask)
		if turn[g] == unset {
			turn[g] = want
		} else if turn[g] != want {
			isBroken[g] = true
		}
	}
	a.turnOver(func(g uint32) bool { return turn[g] == 1 })
}

// turnOver changes the masks of all nodes of the groups that are named.
func (a *assignment) turnOver(which func(group uint32) bool) {
	for u := range a.mask.Data {
		if which(a.group[u]) {
			a.mask.Data[u] ^= 1
		}
	}
}

// remember turns each settled free group to where fewer of its shapes move, and then to where more wishes are kept. Only a group that
// gains by neither stays free.
func (a *assignment) remember(o *Orders, isBroken []bool) {
	if o.Memory == nil && len(o.Wishes) == 0 {
		return
	}
	type loss struct{ moved, wishes int64 } // by which turning over is the worse choice
	gain := make([]loss, a.groups)
	for u, m := range o.Memory {
		if m == NoMemory {
			continue
		}
		if a.mask.Data[u] == m-1 {
			gain[a.group[u]].moved++
		} else {
			gain[a.group[u]].moved--
		}
	}
	for _, w := range o.Wishes {
		if a.mask.Data[w.Node] == uint8(w.Mask) {
			gain[a.group[w.Node]].wishes++
		} else {
			gain[a.group[w.Node]].wishes--
		}
	}
	turn := make([]bool, a.groups)
	for g := range gain {
		if !a.free[g] || isBroken[g] {
			continue
		}
		if gain[g] == (loss{}) {
			continue
		}
		a.free[g] = false
		turn[g] = gain[g].moved < 0 || gain[g].moved == 0 && gain[g].wishes < 0
	}
	a.turnOver(func(g uint32) bool { return turn[g] })
}
