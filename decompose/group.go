package decompose

import (
	"cmp"
	"slices"
)

// This file gathers unresolved components that are equal, so that a person sees each kind once.

// Group is one kind of unresolved component of a layer: equal up to translation and the eight orientations.
type Group struct {
	Members []int // indices into LayerResult.Unresolved, ascending
	Shown   int   // the member that stands for all: the first whose repair is known, else the first with a pair left, else the first
	Pairs   int64 // near pairs that all members leave on one mask
}

// Groups gives the kinds of unresolved components, those that leave most pairs first, then those that occur most often.
func (l *LayerResult) Groups() []Group {
	place := map[int64]int{}
	var groups []Group
	for i := range l.Unresolved {
		u := &l.Unresolved[i]
		k, ok := place[u.Group]
		if !ok {
			k = len(groups)
			place[u.Group] = k
			groups = append(groups, Group{Shown: i})
		}
		if telling(u) > telling(&l.Unresolved[groups[k].Shown]) {
			groups[k].Shown = i
		}
		groups[k].Members = append(groups[k].Members, i)
		groups[k].Pairs += int64(len(u.Pairs))
	}
	slices.SortStableFunc(groups, func(a, b Group) int {
		return cmp.Or(cmp.Compare(b.Pairs, a.Pairs), cmp.Compare(len(b.Members), len(a.Members)))
	})
	return groups
}

// telling ranks how much an entry has to tell.
func telling(u *Unresolved) int { return 2*boolInt(u.Repair != nil) + boolInt(len(u.Pairs) > 0) }
