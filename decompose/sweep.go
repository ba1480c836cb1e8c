package decompose

import (
	"context"
	"math"
	"math/bits"
	"slices"
	"sync/atomic"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/geom"
	"maskpair/gds/arena"
)

// This file finds which items touch and which are near. A line sweeps upwards; an item is active from its lower edge until the line
// is a spacing above its upper edge. Active items lie in buckets by their left edge, in one level per power of two of their width, so
// that an item is in one bucket however wide it is, and a query looks at the buckets within its reach of each level. What is looked at
// is within the spacing in y and, but for the outermost buckets, in x: the work grows with the pairs found and not with the size of
// figures or of their bounding boxes. The sorted items are cut in stretches that depend on the items alone; each stretch starts with
// what is active there (see plan).
//
// What only looks for figures that it touches does not become active (see seek.go).

// pairSink takes what a sweep finds.
type pairSink struct {
	sets    union // touching figures are joined here
	near    pairs // near figures
	hits    []hit // probes that touch a figure; as far as the seekers of the stretch go, in the room that the sweep has for them
	touched []hit // pairs of touching figures, where they are wanted
	seekers int   // with room for one hit each
	limit   *atomic.Int64
	done    searched
}

// hit says that a probe touches a flat figure, or a figure another.
type hit struct{ probe, figure uint32 }

// sweep is one window of one top, ready to be searched.
type sweep struct {
	items       []item // sorted by (Y1, X1)
	seekers     []item // sorted by (Y2, X1): see seek.go
	hitRoom     []hit  // as long as seekers
	bands       []band
	polygons    []*geom.Polygon
	spacing     int64  // work units
	anyMask     int64  // work units; 0: none
	figures     uint32 // IDs from here on are probes
	low, high   int64  // least X1, greatest X2
	keepTouched bool
	tags        []uint8           // by ordinal: only figures with equal tags hide each other; nil: all are equal
	room        *pairRoom         // for near pairs; nil: the heap
	progress    func(items int64) // told of each stretch that is done; nil: nobody is
}

const (
	stretchItems = 1 << 16 // at least
	levels       = 33
	mostBuckets  = 1 << 20
	leastSlots   = 64
)

// run searches all stretches with some workers. The sinks come in the order of the stretches.
func (s *sweep) run(ctx context.Context, sets union, jobs int, limit *atomic.Int64) ([]pairSink, error) {
	n := len(s.items)
	if n == 0 {
		return nil, nil
	}
	if n <= fewItems {
		sink := pairSink{sets: sets, limit: limit, near: pairs{room: s.room}}
		w := searcher{s: s, sink: &sink}
		w.few()
		sink.near.flush(limit)
		w.seekFew()
		return []pairSink{sink}, ctx.Err()
	}
	s.low, s.high = int64(s.items[0].X1), int64(s.items[0].X2)
	for i := range s.items {
		it := &s.items[i]
		s.low, s.high = min(s.low, int64(it.X1)), max(s.high, int64(it.X2))
	}
	var sinks []*pairSink
	jobs = max(jobs, 1)
	idle := make(chan *searcher, jobs)
	for range jobs {
		idle <- newSearcher(s)
	}
	defer func() {
		for range jobs {
			(<-idle).room.Free()
		}
	}()
	g, within := errgroup.WithContext(ctx)
	g.SetLimit(jobs)
	s.plan(func(st stretch) bool {
		sink := &pairSink{sets: sets, limit: limit, near: pairs{room: s.room}}
		sinks = append(sinks, sink)
		g.Go(safely(func() error {
			w := <-idle
			defer func() { idle <- w }()
			err := w.stretch(within, sink, &st)
			if s.progress != nil {
				s.progress(int64(st.to - st.from))
			}
			return err
		}))
		return within.Err() == nil
	})
	if err := g.Wait(); err != nil {
		return nil, err
	}
	out := make([]pairSink, len(sinks))
	for i := range sinks {
		out[i] = *sinks[i]
	}
	return out, ctx.Err()
}

// stretch is a part of the sorted items, with those before it that are active where it begins.
type stretch struct {
	from, to         int
	active           []uint32
	seekFrom, seekTo int // seekers whose upper edge is reached here
}

// plan cuts the items in stretches and gives them to fn, in order, until that is false. What is active where a stretch begins costs
// time to go through, and of wires that all stand beside each other it can be nearly all items before it. So a stretch is at least
// half as long as the list it begins with: the lists then come to less than three times the items, however these lie.
func (s *sweep) plan(fn func(stretch) bool) {
	st := stretch{}
	var reaching []uint32
	for st.from < len(s.items) {
		st.to = min(st.from+max(stretchItems, len(st.active)/2), len(s.items))
		st.seekTo = s.seekersBefore(&st)
		if !fn(st) || st.to == len(s.items) {
			return
		}
		line := int64(s.items[st.to].Y1)
		reaching = reaching[:0]
		for _, i := range st.active {
			if int64(s.items[i].Y2)+s.spacing > line {
				reaching = append(reaching, i)
			}
		}
		for i := st.from; i < st.to; i++ {
			if int64(s.items[i].Y2)+s.spacing > line {
				reaching = append(reaching, uint32(i))
			}
		}
		st = stretch{from: st.to, active: slices.Clone(reaching), seekFrom: st.seekTo}
	}
}

// searcher is what one worker needs to search a stretch.
type searcher struct {
	s      *sweep
	sink   *pairSink
	room   *arena.Array[active]
	active []active // of room, as far as it is in use; the first is none
	free   uint32   // room that has become free, as a list; 0: none
	level  [levels]level
	used   uint64 // bit k: level k has been filled in this stretch
	seeks  bool   // the item at hand is a seeker: it is compared as one
	mixed  []hit  // see orderHits
	places [seekersAtOnce + 1]uint32
	shift0 int   // log2 of the width of the buckets of level 0
	slots  int64 // of level 0
}

// active is an active item in the list of its bucket. It is a copy: few items are active at a time, and what is looked at again and
// again then lies close together.
type active struct {
	item
	next uint32 // in the bucket, or the list of free room; 0: none
}

// level holds the active items of one class of widths. Buckets far apart share a slot; coordinates tell their items apart.
type level struct {
	heads []uint32 // first item of the slot, in active; 0: none
	mask  int64    // takes a bucket to its slot
	taken occupancy
}

func newSearcher(s *sweep) *searcher {
	w := &searcher{s: s}
	// Buckets about as wide as the spacing: a query then looks at about four of level 0.
	w.shift0 = bits.Len64(uint64(max(s.spacing, 1) - 1))
	span := (s.high-s.low)>>w.shift0 + 1
	for w.shift0 < 40 && span > mostBuckets {
		// The sweep is wider than the table: slots are shared, or buckets grow where the items are few.
		if int64(len(s.items)) > span/4 {
			break
		}
		w.shift0++
		span = (s.high-s.low)>>w.shift0 + 1
	}
	want := min(span, int64(2*min(len(s.items), mostBuckets)+64), mostBuckets)
	w.slots = int64(1) << bits.Len64(uint64(want-1))
	w.slots = max(w.slots, leastSlots)
	return w
}

func (w *searcher) stretch(ctx context.Context, sink *pairSink, st *stretch) error {
	s := w.s
	w.sink = sink
	for u := w.used; u != 0; u &= u - 1 {
		l := &w.level[bits.TrailingZeros64(u)]
		clear(l.heads)
		l.taken.clear()
	}
	w.used = 0
	if most := 1 + len(st.active) + st.to - st.from; w.room == nil || len(w.room.Data) < most {
		w.room.Free()
		w.room = arena.New[active](most)
	}
	w.active, w.free = w.room.Data[:1], 0
	sink.hits, sink.seekers = s.hitRoom[st.seekFrom:st.seekFrom:st.seekTo], st.seekTo-st.seekFrom
	sink.done.carried += int64(len(st.active))
	for _, i := range st.active {
		w.insert(&s.items[i])
	}
	next := st.seekFrom
	for i := st.from; i < st.to; i++ {
		if next < st.seekTo && s.seekers[next].Y2 < s.items[i].Y1 {
			var err error
			if next, err = w.seekBelow(ctx, next, st.seekTo, int64(s.items[i].Y1)); err != nil {
				return err
			}
		}
		if i&1023 == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			if sink.limit.Load() < 0 {
				return errTooManyPairs
			}
		}
		if !w.query(&s.items[i]) {
			w.insert(&s.items[i])
		}
	}
	sink.near.flush(sink.limit)
	_, err := w.seekBelow(ctx, next, st.seekTo, math.MaxInt64)
	return err
}

// fewItems is up to how many items are compared each with each, without buckets.
const fewItems = 48

// few compares each item with those before it, as far up as these reach.
func (w *searcher) few() {
	s := w.s
	hidden := uint64(0) // items that lie within another
	for i := range s.items {
		q := &s.items[i]
		for k := range i {
			if hidden>>k&1 == 0 && int64(q.Y1)-int64(s.items[k].Y2) < s.spacing && w.compare(&s.items[k], q) {
				hidden |= 1 << i
				break
			}
		}
	}
}

// levelOf gives the level whose buckets are at least as wide as an item.
func (w *searcher) levelOf(it *item) int {
	wide := uint64(int64(it.X2) - int64(it.X1))
	return max(0, bits.Len64(wide)-w.shift0)
}

func (w *searcher) insert(it *item) {
	k := w.levelOf(it)
	l := &w.level[k]
	if w.used&(1<<k) == 0 {
		w.used |= 1 << k
		if l.heads == nil {
			slots := max(w.slots>>k, leastSlots) // buckets twice as wide are half as many
			l.heads = make([]uint32, slots)
			l.mask = slots - 1
			l.taken.resize(int(slots))
		}
	}
	slot := uint32((int64(it.X1)-w.s.low)>>(w.shift0+k)) & uint32(l.mask)
	if l.heads[slot] == 0 {
		l.taken.set(slot)
	}
	n := w.free
	if n == 0 {
		n = uint32(len(w.active))
		w.active = append(w.active, active{*it, l.heads[slot]})
	} else {
		a := &w.active[n]
		w.free = a.next
		*a = active{*it, l.heads[slot]}
	}
	l.heads[slot] = n
}

// query finds what the item touches or is near to among the active ones; true: the item lies within another rectangle, with
// which it has been joined, and need not become active.
func (w *searcher) query(q *item) bool {
	s := w.s
	for u := w.used; u != 0; u &= u - 1 {
		k := bits.TrailingZeros64(u)
		l := &w.level[k]
		shift := w.shift0 + k
		// An item of this level reaches at most one bucket's width to the right of its left edge.
		first := max(int64(q.X1)-s.spacing-int64(1)<<shift-s.low, 0) >> shift
		last := (min(int64(q.X2)+s.spacing, s.high) - s.low) >> shift
		if last-first < 6 {
			w.sink.done.buckets += last - first + 1
			for b := first; b <= last; b++ {
				if slot := uint32(b & l.mask); l.heads[slot] != 0 && w.slot(l, slot, q) {
					return true
				}
			}
			continue
		}
		if w.many(l, first, last, q) {
			return true
		}
	}
	return false
}

// many compares an item with those of many buckets of a level.
func (w *searcher) many(l *level, first, last int64, q *item) bool {
	mask := l.mask
	from, to := uint32(first&mask), uint32(last&mask)
	switch {
	case last-first >= mask:
		return w.slotRange(l, 0, uint32(mask), q)
	case from <= to:
		return w.slotRange(l, from, to, q)
	}
	return w.slotRange(l, from, uint32(mask), q) || w.slotRange(l, 0, to, q)
}

func (w *searcher) slotRange(l *level, from, to uint32, q *item) bool {
	for slot, ok := l.taken.next(from); ok && slot <= to; slot, ok = l.taken.next(slot + 1) {
		w.sink.done.buckets++
		if w.slot(l, slot, q) {
			return true
		}
	}
	return false
}

// slot compares an item with those of one slot, and drops from it what the sweep has left behind.
func (w *searcher) slot(l *level, slot uint32, q *item) bool {
	if w.seeks {
		w.seekSlot(l.heads[slot], q)
		return false
	}
	spacing := w.s.spacing
	line := int64(q.Y1)
	for link := &l.heads[slot]; *link != 0; {
		n := *link
		a := &w.active[n]
		if line-int64(a.Y2) >= spacing {
			*link = a.next
			a.next, w.free = w.free, n
			continue
		}
		if w.compare(&a.item, q) {
			return true
		}
		link = &a.next
	}
	if l.heads[slot] == 0 {
		l.taken.unset(slot)
	}
	return false
}

// compare compares two items of which the second does not begin below the first and is less than the spacing above it; true: the
// second lies within the first, with which it has been joined.
func (w *searcher) compare(it, q *item) bool {
	s := w.s
	spacing := s.spacing
	w.sink.done.compared++
	dx := max(int64(it.X1)-int64(q.X2), int64(q.X1)-int64(it.X2))
	if dx >= spacing {
		return false
	}
	dy := int64(q.Y1) - int64(it.Y2)
	if (it.ID|q.ID)&bandBit != 0 || it.ID >= s.figures || q.ID >= s.figures {
		w.odd(it, q)
		return false
	}
	if dx <= 0 && dy <= 0 {
		if s.keepTouched {
			w.sink.touched = append(w.sink.touched, hit{it.ID, q.ID})
			return false
		}
		if it.ID != q.ID {
			w.join(it.ID, q.ID)
		}
		return it.X1 <= q.X1 && q.X2 <= it.X2 && q.Y2 <= it.Y2 && (s.tags == nil || s.tags[it.ID] == s.tags[q.ID])
	}
	// Gaps are below 2^33; gapSq guards their squares.
	if d, ok := gapSq(max(dx, 0), max(dy, 0), spacing); ok && it.ID != q.ID {
		w.near(it.ID, q.ID, d)
	}
	return false
}

// join makes one shape of two figures that touch.
func (w *searcher) join(a, b uint32) {
	w.sink.done.joined++
	w.sink.done.links += w.sink.sets.join(a, b)
}

// near records a near pair of figures; distance is squared, in work units.
func (w *searcher) near(a, b uint32, distance uint64) {
	tooNear := uint32(0)
	if w.s.anyMask > 0 && distance < uint64(w.s.anyMask)*uint64(w.s.anyMask) {
		tooNear = 1
	}
	w.add(a, b, tooNear)
}

func (w *searcher) add(a, b, tooNear uint32) {
	w.sink.done.near++
	w.sink.near.add(a, b, tooNear, w.sink.limit)
}

// gapSq gives the squared distance of two rectangles by their gaps, where it is below the squared spacing. Gaps and spacing are
// below 2^34, so squares can leave 64 bits; they are then compared in 128.
func gapSq(dx, dy, spacing int64) (uint64, bool) {
	if spacing < 1<<31 {
		d := uint64(dx)*uint64(dx) + uint64(dy)*uint64(dy)
		return d, d < uint64(spacing)*uint64(spacing)
	}
	xh, xl := bits.Mul64(uint64(dx), uint64(dx))
	yh, yl := bits.Mul64(uint64(dy), uint64(dy))
	dl, carry := bits.Add64(xl, yl, 0)
	dh := xh + yh + carry
	sh, sl := bits.Mul64(uint64(spacing), uint64(spacing))
	if dh > sh || dh == sh && dl >= sl {
		return 0, false
	}
	if dh > 0 {
		return 1<<64 - 1, true
	}
	return dl, true
}

// odd compares two items of which one at least is a band or a probe.
func (w *searcher) odd(a, b *item) {
	s := w.s
	idA, idB := a.ID, b.ID
	var bandA, bandB *band
	if isBand(a.ID) {
		bandA = &s.bands[a.ID&^bandBit]
		idA = bandA.ordinal
	}
	if isBand(b.ID) {
		bandB = &s.bands[b.ID&^bandBit]
		idB = bandB.ordinal
	}
	probeA, probeB := idA >= s.figures, idB >= s.figures
	if idA == idB || probeA && probeB {
		return
	}
	relation := s.relation(a, bandA, b, bandB, s.spacing)
	switch {
	case relation == geom.Touch && probeA:
		w.sink.hits = append(w.sink.hits, hit{idA - s.figures, idB})
	case relation == geom.Touch && probeB:
		w.sink.hits = append(w.sink.hits, hit{idB - s.figures, idA})
	case relation == geom.Touch:
		if s.keepTouched {
			w.sink.touched = append(w.sink.touched, hit{idA, idB})
		} else {
			w.join(idA, idB)
		}
	case relation == geom.Near && !probeA && !probeB:
		tooNear := uint32(0)
		if s.anyMask > 0 && s.relation(a, bandA, b, bandB, s.anyMask) == geom.Near {
			tooNear = 1
		}
		w.add(idA, idB, tooNear)
	}
}

func isBand(id uint32) bool { return id&bandBit != 0 }

// relation compares two items exactly.
func (s *sweep) relation(a *item, bandA *band, b *item, bandB *band, spacing int64) geom.Relation {
	switch {
	case bandA != nil && bandB != nil:
		return geom.BandRelation(s.polygons[bandA.polygon], int(bandA.number), bandA.at, s.polygons[bandB.polygon], int(bandB.number), bandB.at, spacing)
	case bandA != nil:
		return geom.BandRectRelation(s.polygons[bandA.polygon], int(bandA.number), bandA.at, b.rect(), spacing)
	case bandB != nil:
		return geom.BandRectRelation(s.polygons[bandB.polygon], int(bandB.number), bandB.at, a.rect(), spacing)
	}
	dx := max(int64(a.X1)-int64(b.X2), int64(b.X1)-int64(a.X2), 0)
	dy := max(int64(a.Y1)-int64(b.Y2), int64(b.Y1)-int64(a.Y2), 0)
	if dx == 0 && dy == 0 {
		return geom.Touch
	}
	if _, ok := gapSq(dx, dy, spacing); ok {
		return geom.Near
	}
	return geom.Far
}

func (it *item) rect() geom.Rect {
	return geom.Rect{X1: int64(it.X1), Y1: int64(it.Y1), X2: int64(it.X2), Y2: int64(it.Y2)}
}
