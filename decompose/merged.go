package decompose

import (
	"math"

	"maskpair/decompose/geom"
)

// This file measures merged areas of shapes of any number of rectangles in little memory: a shape of many is cut in bands across, and
// each band is measured by itself.

// merged measures. It keeps its memory from call to call; the zero value is ready.
type merged struct {
	areas geom.AreaScratch
	band  []geom.Rect32
	high  []geom.Rect32 // of the rectangles of the band, those that reach above it
}

// add adds a rectangle to the band. Where it goes on one of the last, as the pieces of a wire do from cell to cell, it makes that longer;
// the rectangles come by their lower edges, those at one height by their left edges.
func (m *merged) add(r geom.Rect32) {
	const last = 4
	for i := len(m.band) - 1; i >= max(0, len(m.band)-last); i-- {
		q := &m.band[i]
		switch {
		case q.X1 == r.X1 && q.X2 == r.X2 && q.Y1 <= r.Y1 && r.Y1 <= q.Y2:
			q.Y2 = max(q.Y2, r.Y2)
			return
		case q.Y1 == r.Y1 && q.Y2 == r.Y2 && q.X1 <= r.X1 && r.X1 <= q.X2:
			q.X2 = max(q.X2, r.X2)
			return
		}
	}
	m.band = append(m.band, r)
}

// bandItems is about how many rectangles a band has.
const bandItems = 1 << 14

// area gives the area that items cover together; they are sorted by their lower edges. The plane of int32 is less than 2^32 wide and
// high, so an area is less than 2^64.
func (m *merged) area(items []item) uint64 {
	sum := uint64(0)
	m.high = m.high[:0]
	for len(items) > 0 || len(m.high) > 0 {
		// A band has at least as many rectangles of its own as it takes over, so that these come to no more than the items.
		n := min(max(bandItems, len(m.high)), len(items))
		for n > 0 && n < len(items) && items[n].Y1 == items[0].Y1 {
			n++
		}
		m.band = append(m.band[:0], m.high...)
		for i := range items[:n] {
			it := &items[i]
			m.add(geom.Rect32{X1: it.X1, Y1: it.Y1, X2: it.X2, Y2: it.Y2})
		}
		top := int32(math.MaxInt32)
		if n < len(items) {
			top = items[n].Y1
		}
		items = items[n:]
		m.high = m.high[:0]
		for i := range m.band {
			if r := &m.band[i]; r.Y2 > top {
				m.high = append(m.high, geom.Rect32{X1: r.X1, Y1: top, X2: r.X2, Y2: r.Y2})
				r.Y2 = top
			}
		}
		sum += m.areas.UnionArea32(m.band)
	}
	return sum
}
