package decompose

import (
	"context"
	"math/bits"
	"sync"
	"sync/atomic"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/geom"
)

// This file finds which items touch and which are near. A line sweeps upwards; an item is active from its lower edge until the line
// is a spacing above its upper edge. Active items lie in buckets by their left edge, in one level per power of two of their width, so
// that an item is in one bucket however wide it is, and a query looks at the buckets within its reach of each level. What is looked at
// is within the spacing in y and, but for the outermost buckets, in x: the work grows with the pairs found and not with the size of
// figures or of their bounding boxes. The sorted items are cut in stretches that depend on their number alone; each stretch starts
// with what is active there.

// pairSink takes what a sweep finds.
type pairSink struct {
	sets    union // touching figures are joined here
	near    pairs // near figures
	hits    []hit // probes that touch a figure
	touched []hit // pairs of touching figures, where they are wanted
	limit   *atomic.Int64
}

// hit says that a probe touches a flat figure, or a figure another.
type hit struct{ probe, figure uint32 }

// sweep is one window of one top, ready to be searched.
type sweep struct {
	items       []item // sorted by (Y1, X1)
	next        []uint32
	bands       []band
	polygons    []*geom.Polygon
	spacing     int64  // work units
	anyMask     int64  // work units; 0: none
	figures     uint32 // IDs from here on are probes
	low, high   int64  // least X1, greatest X2
	keepTouched bool
	tags        []uint8           // by ordinal: only figures with equal tags hide each other; nil: all are equal
	blocks      []int32           // greatest Y2 of each block of items
	searched    func(items int64) // told of each stretch that is done; nil: nobody is
}

const (
	stretchItems = 1 << 16
	blockItems   = 1 << 10
	levels       = 33
	mostBuckets  = 1 << 20
)

// run searches all stretches with some workers. The sinks come in the order of the stretches.
func (s *sweep) run(ctx context.Context, sets union, jobs int, limit *atomic.Int64) ([]pairSink, error) {
	n := len(s.items)
	if n == 0 {
		return nil, nil
	}
	if n <= fewItems {
		sink := pairSink{sets: sets, limit: limit}
		w := searcher{s: s, sink: &sink}
		w.few()
		sink.near.flush(limit)
		return []pairSink{sink}, ctx.Err()
	}
	s.low, s.high = int64(s.items[0].X1), int64(s.items[0].X2)
	s.blocks = make([]int32, (n+blockItems-1)/blockItems)
	for i := range s.items {
		it := &s.items[i]
		s.low, s.high = min(s.low, int64(it.X1)), max(s.high, int64(it.X2))
		if b := &s.blocks[i/blockItems]; i%blockItems == 0 || it.Y2 > *b {
			*b = it.Y2
		}
	}
	stretches := (n + stretchItems - 1) / stretchItems
	sinks := make([]pairSink, stretches)
	searchers := sync.Pool{New: func() any { return newSearcher(s) }}
	g, within := errgroup.WithContext(ctx)
	g.SetLimit(max(jobs, 1))
	for k := range stretches {
		if within.Err() != nil {
			break
		}
		g.Go(func() error {
			w := searchers.Get().(*searcher)
			defer searchers.Put(w)
			sinks[k] = pairSink{sets: sets, limit: limit}
			end := min((k+1)*stretchItems, n)
			err := w.stretch(within, &sinks[k], k*stretchItems, end)
			if s.searched != nil {
				s.searched(int64(end - k*stretchItems))
			}
			return err
		})
	}
	if err := g.Wait(); err != nil {
		return nil, err
	}
	return sinks, ctx.Err()
}

// searcher is what one worker needs to search a stretch.
type searcher struct {
	s      *sweep
	sink   *pairSink
	next   []uint32 // by item relative to base: next in its bucket, plus 1
	level  [levels]level
	used   uint64 // bit k: level k has been filled in this stretch
	shift0 int    // log2 of the width of the buckets of level 0
	slots  int64
	alive  map[uint32]uint32 // next of items from before the stretch
	base   uint32
}

// level holds the active items of one class of widths. Buckets far apart share a slot; coordinates tell their items apart.
type level struct {
	heads []uint32 // first item of the slot, plus 1
	taken occupancy
}

func newSearcher(s *sweep) *searcher {
	w := &searcher{s: s, alive: map[uint32]uint32{}}
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
	if w.slots < 64 {
		w.slots = 64
	}
	w.next = make([]uint32, min(len(s.items), stretchItems))
	return w
}

func (w *searcher) stretch(ctx context.Context, sink *pairSink, from, to int) error {
	s := w.s
	w.sink = sink
	for u := w.used; u != 0; u &= u - 1 {
		l := &w.level[bits.TrailingZeros64(u)]
		clear(l.heads)
		l.taken.clear()
	}
	w.used = 0
	w.base = uint32(from)
	clear(w.alive)
	line := int64(s.items[from].Y1)
	for b := 0; b*blockItems < from; b++ {
		if int64(s.blocks[b])+s.spacing <= line {
			continue
		}
		for i := b * blockItems; i < min((b+1)*blockItems, from); i++ {
			if int64(s.items[i].Y2)+s.spacing > line {
				w.insert(uint32(i))
			}
		}
	}
	for i := from; i < to; i++ {
		if i&1023 == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
			if sink.limit.Load() < 0 {
				return errTooManyPairs
			}
		}
		if !w.query(&s.items[i]) {
			w.insert(uint32(i))
		}
	}
	sink.near.flush(sink.limit)
	return nil
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

func (w *searcher) insert(i uint32) {
	it := &w.s.items[i]
	k := w.levelOf(it)
	l := &w.level[k]
	if w.used&(1<<k) == 0 {
		w.used |= 1 << k
		if l.heads == nil {
			l.heads = make([]uint32, w.slots)
			l.taken.resize(int(w.slots))
		}
	}
	slot := uint32((int64(it.X1)-w.s.low)>>(w.shift0+k)) & uint32(w.slots-1)
	if l.heads[slot] == 0 {
		l.taken.set(slot)
	}
	w.setNext(i, l.heads[slot])
	l.heads[slot] = i + 1
}

func (w *searcher) setNext(i, v uint32) {
	if i >= w.base {
		w.next[i-w.base] = v
	} else {
		w.alive[i] = v
	}
}

func (w *searcher) nextOf(i uint32) uint32 {
	if i >= w.base {
		return w.next[i-w.base]
	}
	return w.alive[i]
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
		mask := w.slots - 1
		if last-first < 6 {
			for b := first; b <= last; b++ {
				if slot := uint32(b & mask); l.heads[slot] != 0 && w.slot(l, slot, q) {
					return true
				}
			}
			continue
		}
		from, to := uint32(first&mask), uint32(last&mask)
		switch {
		case last-first >= mask:
			if w.slotRange(l, 0, uint32(mask), q) {
				return true
			}
		case from <= to:
			if w.slotRange(l, from, to, q) {
				return true
			}
		default:
			if w.slotRange(l, from, uint32(mask), q) || w.slotRange(l, 0, to, q) {
				return true
			}
		}
	}
	return false
}

func (w *searcher) slotRange(l *level, from, to uint32, q *item) bool {
	for slot, ok := l.taken.next(from); ok && slot <= to; slot, ok = l.taken.next(slot + 1) {
		if w.slot(l, slot, q) {
			return true
		}
	}
	return false
}

// slot compares an item with those of one slot, and drops from it what the sweep has left behind.
func (w *searcher) slot(l *level, slot uint32, q *item) bool {
	s := w.s
	spacing := s.spacing
	line := int64(q.Y1)
	before := uint32(0)
	for e := l.heads[slot]; e != 0; {
		i := e - 1
		it := &s.items[i]
		after := w.nextOf(i)
		dy := line - int64(it.Y2)
		if dy >= spacing {
			if before == 0 {
				l.heads[slot] = after
				if after == 0 {
					l.taken.unset(slot)
				}
			} else {
				w.setNext(before-1, after)
			}
			e = after
			continue
		}
		before, e = e, after
		if w.compare(it, q) {
			return true
		}
	}
	return false
}

// compare compares two items of which the second does not begin below the first and is less than the spacing above it; true: the
// second lies within the first, with which it has been joined.
func (w *searcher) compare(it, q *item) bool {
	s := w.s
	spacing := s.spacing
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
			w.sink.sets.join(it.ID, q.ID)
		}
		return it.X1 <= q.X1 && q.X2 <= it.X2 && q.Y2 <= it.Y2 && (s.tags == nil || s.tags[it.ID] == s.tags[q.ID])
	}
	// Gaps are below 2^33; gapSq guards their squares.
	if d, ok := gapSq(max(dx, 0), max(dy, 0), spacing); ok && it.ID != q.ID {
		w.near(it.ID, q.ID, d)
	}
	return false
}

// near records a near pair of figures; distance is squared, in work units.
func (w *searcher) near(a, b uint32, distance uint64) {
	tooNear := uint32(0)
	if w.s.anyMask > 0 && distance < uint64(w.s.anyMask)*uint64(w.s.anyMask) {
		tooNear = 1
	}
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
			w.sink.sets.join(idA, idB)
		}
	case relation == geom.Near && !probeA && !probeB:
		tooNear := uint32(0)
		if s.anyMask > 0 && s.relation(a, bandA, b, bandB, s.anyMask) == geom.Near {
			tooNear = 1
		}
		w.sink.near.add(idA, idB, tooNear, w.sink.limit)
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
