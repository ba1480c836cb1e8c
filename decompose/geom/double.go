package geom

import "math"

// This file is arithmetic with about 106 bits: numbers kept as the unevaluated sum of two floats (T. J. Dekker, "A
// floating-point technique for extending the available precision", 1971). Areas of slanted figures use it; no decision
// about distances does. Relative to the operands an operation is off by less than 2^-100. Conversions around products keep
// compilers from fusing them with sums.

type double struct{ hi, lo float64 }

// norm is the sum of two floats of which the first is the larger.
func norm(a, b float64) double {
	s := a + b
	return double{s, b - (s - a)}
}

func (x double) plus(y double) double {
	s := x.hi + y.hi
	t := s - x.hi
	e := (x.hi - (s - t)) + (y.hi - t) // the exact error of s
	return norm(s, e+(x.lo+y.lo))
}

func (x double) minus(y double) double { return x.plus(double{-y.hi, -y.lo}) }

func (x double) mul(y double) double {
	p := x.hi * y.hi
	e := math.FMA(x.hi, y.hi, -p) // the exact error of p
	return norm(p, e+(float64(x.hi*y.lo)+float64(x.lo*y.hi)))
}

func (x double) div(y double) double {
	q1 := x.hi / y.hi
	r := x.minus(y.mul(double{q1, 0}))
	q2 := r.hi / y.hi
	r = r.minus(y.mul(double{q2, 0}))
	return norm(q1, q2).plus(double{r.hi / y.hi, 0})
}

func (x double) less(y double) bool {
	return x.hi < y.hi || x.hi == y.hi && x.lo < y.lo
}

// compare orders doubles as slices.SortFunc wants it.
func (x double) compare(y double) int {
	switch {
	case x.less(y):
		return -1
	case y.less(x):
		return 1
	}
	return 0
}
