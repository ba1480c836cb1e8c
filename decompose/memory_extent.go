package decompose

import (
	"math"
	"math/bits"

	"maskpair/decompose/geom"
)

// extent is an area in square work units: exact for rectangles, with a rounded part where slanted figures take part.
type extent struct {
	hi, lo  uint64
	slanted float64
}

func (e *extent) add(f extent) {
	var carry uint64
	e.lo, carry = bits.Add64(e.lo, f.lo, 0)
	e.hi += f.hi + carry
	e.slanted += f.slanted
}

// minus gives e - f; of the exact parts, that of e must not be smaller.
func (e extent) minus(f extent) extent {
	lo, borrow := bits.Sub64(e.lo, f.lo, 0)
	return extent{e.hi - f.hi - borrow, lo, e.slanted - f.slanted}
}

func (e extent) float() float64 { return float64(e.hi)*0x1p64 + float64(e.lo) + e.slanted }

// roundedArea is by what part of them two areas with slanted figures may differ and still count as equal; they are good to 1e-12 each.
const roundedArea = 1e-9

// compare orders two areas.
func (e extent) compare(f extent) int {
	if e.slanted == 0 && f.slanted == 0 {
		switch {
		case e == f:
			return 0
		case e.hi < f.hi || e.hi == f.hi && e.lo < f.lo:
			return -1
		}
		return 1
	}
	a, b := e.float(), f.float()
	switch {
	case math.Abs(a-b) <= roundedArea*max(a, b):
		return 0
	case a < b:
		return -1
	}
	return 1
}

// areas measures merged areas.
type areas struct{ scratch geom.AreaScratch }

func (s *areas) of(p geom.Parts) extent {
	if len(p.Polygons) > 0 {
		return extent{slanted: geom.UnionAreaPolygons(p)}
	}
	a := s.scratch.UnionArea(p.Rects)
	return extent{hi: a.Hi, lo: a.Lo}
}

// shared gives the area that two sets of figures share: what they cover each, less what they cover together. With slanted figures a
// share that is lost in rounding is none.
func (s *areas) shared(a, b geom.Parts) extent {
	one, other := s.of(a), s.of(b)
	together := s.of(geom.Parts{Rects: join(a.Rects, b.Rects), Polygons: join(a.Polygons, b.Polygons)})
	if len(a.Polygons)+len(b.Polygons) > 0 {
		share := one.float() + other.float() - together.float()
		if share <= roundedArea*min(one.float(), other.float()) {
			return extent{}
		}
		return extent{slanted: share}
	}
	one.add(other)
	return one.minus(together)
}

func join[T any](a, b []T) []T {
	return append(append(make([]T, 0, len(a)+len(b)), a...), b...)
}
