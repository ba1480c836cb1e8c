package gds

import (
	"encoding/binary"
	"math"
)

// This file turns the eight-byte reals of the format into float64 and back. Such a real is a sign bit, seven bits of
// exponent in excess 64 to the base 16, and 56 bits of mantissa below the point: (-1)^s * m/2^56 * 16^(e-64). A normal one
// has a mantissa of at least 1/16, so 53 to 56 of its bits count.

// DecodeReal8 reads the first eight bytes of b as a real of the format. Bits below what a float64 holds are rounded, ties
// to even; every real of the format lies in the range of float64.
func DecodeReal8(b []byte) float64 {
	v := binary.BigEndian.Uint64(b)
	mantissa := v & (1<<56 - 1)
	exponent := int(v>>56&0x7F) - 64
	// A mantissa has at most 56 bits, so that the conversion rounds once and Ldexp, well inside the range, not at all.
	f := math.Ldexp(float64(mantissa), 4*exponent-56)
	if v>>63 != 0 {
		f = -f
	}
	return f
}

// EncodeReal8 gives the real of the format nearest to f. Every float64 between 16^-65 and 16^63 in magnitude is held
// exactly. Smaller ones become zero; larger ones, infinities and not-a-number have no such real: ok is false.
func EncodeReal8(f float64) (real8 [8]byte, ok bool) {
	if math.IsNaN(f) || math.IsInf(f, 0) {
		return real8, false
	}
	if f == 0 {
		return real8, true
	}
	fraction, exponent := math.Frexp(math.Abs(f)) // fraction in [1/2, 1)
	mantissa := uint64(math.Ldexp(fraction, 53))  // 53 bits, exact
	// |f| = mantissa * 2^(exponent-53). The hexadecimal exponent e is the least with |f| < 16^e.
	e := ceilDiv4(exponent)
	mantissa <<= 3 - (4*e - exponent) // by 0 to 3 bits: |f| = mantissa / 2^56 * 16^e
	if e > 63 {
		return real8, false
	}
	if e < -64 {
		return real8, true
	}
	v := mantissa | uint64(e+64)<<56
	if math.Signbit(f) {
		v |= 1 << 63
	}
	binary.BigEndian.PutUint64(real8[:], v)
	return real8, true
}

// ceilDiv4 is n/4 rounded up.
func ceilDiv4(n int) int { return (n + 3) >> 2 }
