package decompose

// This file drops figures that are drawn more than once: cells that abut often draw what is on their border twice, and most figures of
// some layers are copies.

// manyItems is the number of items from which several workers look for copies.
const manyItems = 1 << 16

// dropCopies drops rectangles that are exact copies of one before them and joins the two figures; items are sorted by their lower left
// corners. Copies stand side by side, or among the few that share a corner. With no sets the figures are joined already.
// tags tell, where not nil, what arrived on a mask: only figures with equal tags are copies.
func dropCopies(items []item, sets union, figures uint32, tags []uint8) []item {
	kept := items[:0]
	begin := 0 // of the kept items that share the corner at hand
next:
	for _, it := range items {
		if begin < len(kept) && !sameCorner(&kept[begin], &it) {
			begin = len(kept)
		}
		if it.ID < figures { // neither a band nor a probe
			for k := len(kept) - 1; k >= max(begin, len(kept)-8); k-- {
				if q := &kept[k]; q.X2 == it.X2 && q.Y2 == it.Y2 && q.ID < figures && (tags == nil || tags[q.ID] == tags[it.ID]) {
					if sets != nil && q.ID != it.ID {
						sets.join(q.ID, it.ID)
					}
					continue next
				}
			}
		}
		kept = append(kept, it)
	}
	return kept
}

func sameCorner(a, b *item) bool { return a.Y1 == b.Y1 && a.X1 == b.X1 }

// dropCopiesBy is dropCopies with several workers, which changes nothing but the time that it takes.
func dropCopiesBy(jobs int, items []item, sets union, figures uint32, tags []uint8) []item {
	if len(items) < manyItems {
		jobs = 1
	}
	// Each worker has a stretch, which begins where a corner begins.
	begin := make([]int, jobs+1)
	begin[jobs] = len(items)
	for w := 1; w < jobs; w++ {
		at := max(begin[w-1], len(items)*w/jobs)
		for at > begin[w-1] && at < len(items) && sameCorner(&items[at-1], &items[at]) {
			at++
		}
		begin[w] = at
	}
	kept := make([][]item, jobs)
	each(jobs, func(w int) {
		kept[w] = dropCopies(items[begin[w]:begin[w+1]], sets, figures, tags)
	})
	all := len(kept[0])
	for _, k := range kept[1:] {
		all += copy(items[all:], k)
	}
	return items[:all]
}
