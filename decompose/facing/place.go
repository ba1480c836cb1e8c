package facing

import "maskpair/decompose/geom"

// This file is about places along an axis-parallel line: whole numbers, or, where a slanted edge crosses the line, exact fractions.

// place is a number: rounded down, and where it lies between whole numbers, what is left of it.
type place struct {
	whole   int64
	between bool
	rest    geom.Fraction // only with between
}

func whole64(n int64) place { return place{whole: n} }

// along is the number that lies part of the way from p to q.
func along(part geom.Fraction, p, q int64) place {
	whole, rest := part.Along(p, q)
	if rest.IsZero() {
		return whole64(whole)
	}
	return place{whole, true, rest}
}

// plus moves a place by a whole number.
func (p place) plus(by int64) place {
	p.whole += by
	return p
}

// less tells whether p lies before q.
func (p place) less(q place) bool {
	switch {
	case p.whole != q.whole:
		return p.whole < q.whole
	case !q.between:
		return false
	case !p.between:
		return true
	}
	return p.rest.Compare(q.rest) < 0
}

// maxPlace and minPlace give the later and the earlier of two places.
func maxPlace(p, q place) place {
	if p.less(q) {
		return q
	}
	return p
}

func minPlace(p, q place) place {
	if q.less(p) {
		return q
	}
	return p
}
