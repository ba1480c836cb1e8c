package decompose

import (
	"context"
	"math/bits"
	"sort"

	"maskpair/gds/arena"
)

// This file is the part of the sweep for what only looks for figures: seekers, nearly always markers and anchors. A seeker asks once, when
// the line reaches its upper edge: all figures that it can touch have begun by then, and those that end at its lower edge or above are
// still active, if it is less high than the spacing. So it never becomes active itself: no figure and no other seeker has to be compared
// with it. What is higher, or no rectangle, goes through the sweep as an item.

// seeks tells whether an item that looks for figures can be a seeker.
func seeks(it *item, spacing int64) bool {
	return !isBand(it.ID) && int64(it.Y2)-int64(it.Y1) < spacing
}

// splitSeekers moves the items that can be no seekers to some room, and returns both.
func splitSeekers(looking, room []item, spacing int64) (seekers, others []item) {
	seekers, others = looking[:0], room[:0]
	for i := range looking {
		if seeks(&looking[i], spacing) {
			seekers = append(seekers, looking[i])
		} else {
			others = append(others, looking[i])
		}
	}
	return seekers, others
}

// seekersBefore gives the end of the seekers that belong to a stretch: those whose upper edge lies below the first item behind it.
func (s *sweep) seekersBefore(st *stretch) int {
	if st.to == len(s.items) {
		return len(s.seekers)
	}
	line := s.items[st.to].Y1
	rest := s.seekers[st.seekFrom:]
	return st.seekFrom + sort.Search(len(rest), func(i int) bool { return rest[i].Y2 >= line })
}

// seekBelow lets the seekers from next to end ask whose upper edge is below a line; it returns the next one.
func (w *searcher) seekBelow(ctx context.Context, next, end int, line int64) (int, error) {
	for s := w.s; next < end && int64(s.seekers[next].Y2) < line; {
		if err := ctx.Err(); err != nil {
			return next, err
		}
		to := next + 1
		for to < min(end, next+seekersAtOnce) && int64(s.seekers[to].Y2) < line {
			to++
		}
		from := len(w.sink.hits)
		for u := w.used; u != 0; u &= u - 1 {
			w.seekLevel(bits.TrailingZeros64(u), s.seekers[next:to])
		}
		w.orderHits(from, s.seekers[next:to])
		next = to
	}
	return next, nil
}

// seekersAtOnce is how many seekers at most ask level by level: as many as stay close at hand.
const seekersAtOnce = 1 << 10

// seekLevel lets some seekers ask in one level. In the hits, their places stand for their IDs.
func (w *searcher) seekLevel(k int, seekers []item) {
	s, l := w.s, &w.level[k]
	shift, mask := w.shift0+k, l.mask
	begin := 0 // of what the seeker before has hit
	for i := range seekers {
		q := seekers[i]
		q.ID = s.figures + uint32(i)
		end := len(w.sink.hits)
		if i > 0 && sameBox(&q, &seekers[i-1]) {
			// Copies stand side by side: it hits what the one before has hit.
			for _, h := range w.sink.hits[begin:end] {
				w.sink.hits = append(w.sink.hits, hit{uint32(i), h.figure})
			}
			begin = end
			continue
		}
		begin = end
		// An item of this level reaches at most one bucket's width to the right of its left edge.
		first := max(int64(q.X1)-int64(1)<<shift-s.low, 0) >> shift
		last := (min(int64(q.X2), s.high) - s.low) >> shift
		if last-first >= 6 {
			w.seeks = true
			w.many(l, first, last, &q)
			w.seeks = false
			continue
		}
		w.sink.done.buckets += max(last-first+1, 0)
		for b := first; b <= last; b++ {
			if n := l.heads[b&mask]; n != 0 {
				w.seekSlot(n, &q)
			}
		}
	}
}

// orderHits puts the hits from some place on in the order of the seekers that asked together, and names these by their IDs. So the order
// depends neither on levels nor on who asks together.
func (w *searcher) orderHits(from int, seekers []item) {
	hits := w.sink.hits[from:]
	next := w.places[:len(seekers)+1]
	clear(next)
	for _, h := range hits {
		next[h.probe+1]++
	}
	for i := range seekers {
		next[i+1] += next[i]
	}
	w.mixed = append(w.mixed[:0], hits...)
	for _, h := range w.mixed {
		hits[next[h.probe]] = hit{seekers[h.probe].ID - w.s.figures, h.figure}
		next[h.probe]++
	}
}

func sameBox(a, b *item) bool {
	return a.X1 == b.X1 && a.Y1 == b.Y1 && a.X2 == b.X2 && a.Y2 == b.Y2
}

// seekSlot compares a seeker with the items of a list of active ones.
func (w *searcher) seekSlot(n uint32, q *item) {
	for n != 0 {
		a := &w.active[n]
		w.seek(&a.item, q)
		n = a.next
	}
}

// seek compares an item with a seeker whose upper edge it does not begin above.
func (w *searcher) seek(it, q *item) {
	w.sink.done.compared++
	if it.X1 > q.X2 || it.X2 < q.X1 || it.Y2 < q.Y1 {
		return
	}
	if isBand(it.ID) || it.ID >= w.s.figures {
		w.odd(it, q)
		return
	}
	w.sink.hits = append(w.sink.hits, hit{q.ID - w.s.figures, it.ID})
}

// seekFew compares each seeker with each item.
func (w *searcher) seekFew() {
	s := w.s
	w.sink.hits, w.sink.seekers = append(s.hitRoom[:0:len(s.seekers)], w.sink.hits...), len(s.seekers)
	for k := range s.seekers {
		for i := range s.items {
			if q := &s.seekers[k]; s.items[i].Y1 <= q.Y2 {
				w.seek(&s.items[i], q)
			}
		}
	}
}

// hitRoom gives room for a hit of each seeker: behind the hits that there are, if it is long enough.
func hitRoom(hits []hit, seekers int) []hit {
	if n := len(hits); n+seekers <= cap(hits) {
		return hits[n : n+seekers]
	}
	return arena.Make[hit](seekers, seekers)
}

// joinHits appends the hits of some sinks. Hits in the room behind those that there are only move down in it; where a sink has more
// hits than seekers, and so went elsewhere, all go to new room.
func joinHits(hits []hit, sinks []pairSink) []hit {
	more, within := 0, true
	for i := range sinks {
		more += len(sinks[i].hits)
		within = within && len(sinks[i].hits) <= sinks[i].seekers
	}
	if !within {
		hits = append(arena.Make[hit](0, len(hits)+more), hits...)
	}
	for i := range sinks {
		hits = append(hits, sinks[i].hits...)
	}
	return hits
}
