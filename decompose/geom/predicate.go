package geom

import "math/bits"

// This file holds the exact questions about points and segments. Each has a quick way for numbers that fit, and a certain
// way for all others; both are exact, so there is no margin in which they could disagree.
//
// Bounds: points of the plane differ by at most 2^35 in each coordinate. A dot or cross product of two differences is the
// sum of two products of at most 2^70, so at most 2^71 and at home in 128 bits. Its square is at most 2^142. A spacing is
// cut down to spacingCap, beyond every distance in the plane (less than 1.5 * 2^35), so s*s*|ab|^2 is at most 2^143. Both
// fit in 256 bits.

const (
	quick      = 1 << 30 // differences below this take the quick way
	spacingCap = 1 << 36
)

// fits tells whether all four are in [-quick, quick).
func fits(a, b, c, d int64) bool {
	return uint64(a+quick)|uint64(b+quick)|uint64(c+quick)|uint64(d+quick) < 2*quick
}

// crossSign is the sign of ax*by - ay*bx. Quick way: both products are at most 2^60.
func crossSign(ax, ay, bx, by int64) int {
	if fits(ax, ay, bx, by) {
		v := ax*by - ay*bx
		switch {
		case v > 0:
			return 1
		case v < 0:
			return -1
		}
		return 0
	}
	return mul(ax, by).sub(mul(ay, bx)).sign()
}

// Orient tells on which side of the line from a to b the point c lies: 1 left, -1 right, 0 on it.
func Orient(a, b, c Point) int {
	return crossSign(b.X-a.X, b.Y-a.Y, c.X-a.X, c.Y-a.Y)
}

// inBox tells whether p lies in the bounding box of the segment ab.
func inBox(a, b, p Point) bool {
	return min(a.X, b.X) <= p.X && p.X <= max(a.X, b.X) && min(a.Y, b.Y) <= p.Y && p.Y <= max(a.Y, b.Y)
}

// SegmentsMeet tells whether the closed segments ab and cd have a point in common. A segment may be a single point.
func SegmentsMeet(a, b, c, d Point) bool {
	o1, o2 := Orient(a, b, c), Orient(a, b, d)
	if o1*o2 > 0 {
		return false
	}
	o3, o4 := Orient(c, d, a), Orient(c, d, b)
	if o3*o4 > 0 {
		return false
	}
	if o1*o2 < 0 && o3*o4 < 0 {
		return true
	}
	return o1 == 0 && inBox(a, b, c) || o2 == 0 && inBox(a, b, d) || o3 == 0 && inBox(c, d, a) || o4 == 0 && inBox(c, d, b)
}

// shorter tells whether the vector (dx, dy) is shorter than s, 0 <= s <= spacingCap. Past the first test both are below s;
// with s <= 2^31 the sum of squares stays below 2^63, otherwise it is at most 2^73.
func shorter(dx, dy, s int64) bool {
	if dx >= s || -dx >= s || dy >= s || -dy >= s {
		return false
	}
	if s <= 1<<31 {
		return dx*dx+dy*dy < s*s
	}
	return mul(dx, dx).add(mul(dy, dy)).sub(mul(s, s)).hi < 0
}

// pointNearSegment tells whether p is nearer than s to the closed segment ab, 0 <= s <= spacingCap.
//
// Quick way: differences below 2^30 give |ab|^2, the dot and the cross product below 2^61 + 1; with s <= 2^31 both sides of
// the last comparison are products of two 64-bit numbers.
func pointNearSegment(p, a, b Point, s int64) bool {
	ux, uy, vx, vy := b.X-a.X, b.Y-a.Y, p.X-a.X, p.Y-a.Y
	if s <= 1<<31 && fits(ux, uy, vx, vy) {
		n, t := ux*ux+uy*uy, ux*vx+uy*vy
		switch {
		case t <= 0:
			return shorter(vx, vy, s)
		case t >= n:
			return shorter(p.X-b.X, p.Y-b.Y, s)
		}
		c := ux*vy - uy*vx
		if c < 0 {
			c = -c
		}
		h1, l1 := bits.Mul64(uint64(c), uint64(c))
		h2, l2 := bits.Mul64(uint64(s*s), uint64(n))
		return h1 < h2 || h1 == h2 && l1 < l2
	}
	n, t := mul(ux, ux).add(mul(uy, uy)), mul(ux, vx).add(mul(uy, vy))
	switch {
	case t.sign() <= 0:
		return shorter(vx, vy, s)
	case t.sub(n).sign() >= 0:
		return shorter(p.X-b.X, p.Y-b.Y, s)
	}
	c := mul(ux, vy).sub(mul(uy, vx)).abs()
	return mulWide(c, c).less(mulWide(mul(s, s), n))
}

// SegmentsRelation compares two closed segments: Touch, Near (nearer than s), or Far. A distance of exactly s is Far; with s
// of 0 or less nothing is Near.
//
// Two segments that do not meet come nearest at an end of one of them.
func SegmentsRelation(a, b, c, d Point, s int64) Relation {
	s = min(s, spacingCap)
	dx := max(0, min(c.X, d.X)-max(a.X, b.X), min(a.X, b.X)-max(c.X, d.X))
	dy := max(0, min(c.Y, d.Y)-max(a.Y, b.Y), min(a.Y, b.Y)-max(c.Y, d.Y))
	if dx|dy == 0 {
		if SegmentsMeet(a, b, c, d) {
			return Touch
		}
	} else if dx >= s || dy >= s || !shorter(dx, dy, s) {
		return Far
	}
	if s > 0 && (pointNearSegment(a, c, d, s) || pointNearSegment(b, c, d, s) || pointNearSegment(c, a, b, s) || pointNearSegment(d, a, b, s)) {
		return Near
	}
	return Far
}
