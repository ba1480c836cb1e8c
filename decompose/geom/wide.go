package geom

import "math/bits"

// This file is arithmetic in 128 and 256 bits, as far as the predicates need it.

// int128 is a signed number hi * 2^64 + lo.
type int128 struct {
	hi int64
	lo uint64
}

// mul is the full product of two signed numbers. Read as unsigned, a negative a stands for a + 2^64; the extra b * 2^64 is
// taken off the upper word again.
func mul(a, b int64) int128 {
	hi, lo := bits.Mul64(uint64(a), uint64(b))
	return int128{int64(hi) - (a>>63)&b - (b>>63)&a, lo}
}

func (x int128) add(y int128) int128 {
	lo, carry := bits.Add64(x.lo, y.lo, 0)
	return int128{x.hi + y.hi + int64(carry), lo}
}

func (x int128) sub(y int128) int128 {
	lo, borrow := bits.Sub64(x.lo, y.lo, 0)
	return int128{x.hi - y.hi - int64(borrow), lo}
}

func (x int128) sign() int {
	switch {
	case x.hi < 0:
		return -1
	case x.hi|int64(x.lo>>1)|int64(x.lo&1) != 0:
		return 1
	}
	return 0
}

func (x int128) abs() int128 {
	if x.hi < 0 {
		return int128{}.sub(x)
	}
	return x
}

// float is x to the nearest, but for a double rounding that costs at most one unit more in the 53rd bit.
func (x int128) float() float64 {
	if x.hi < 0 {
		return -x.abs().float()
	}
	return float64(x.hi)*0x1p64 + float64(x.lo)
}

// uint256 is an unsigned number, least word first.
type uint256 [4]uint64

// mulWide is the full product of two numbers that are not negative.
func mulWide(x, y int128) uint256 {
	xh, yh := uint64(x.hi), uint64(y.hi)
	h0, l0 := bits.Mul64(x.lo, y.lo)
	h1, l1 := bits.Mul64(x.lo, yh)
	h2, l2 := bits.Mul64(xh, y.lo)
	h3, l3 := bits.Mul64(xh, yh)
	var r uint256
	var c, d uint64
	r[0] = l0
	r[1], c = bits.Add64(h0, l1, 0)
	r[1], d = bits.Add64(r[1], l2, 0)
	r[2], c = bits.Add64(h1, h2, c)
	r[2], d = bits.Add64(r[2], l3, d)
	r[3] = h3 + c + d
	return r
}

func (x uint256) less(y uint256) bool {
	for i := 3; i >= 0; i-- {
		if x[i] != y[i] {
			return x[i] < y[i]
		}
	}
	return false
}
