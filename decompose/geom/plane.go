package geom

// This file holds the plain things: points, boxes, fill rules, and the relation of two figures.

// Limit bounds the coordinates of points in the plane: |x|, |y| <= Limit. Every bound in this package rests on it:
// differences of two coordinates stay within 2^35, products of differences within 2^70.
const Limit = 1 << 34

// Point is a position in the plane.
type Point struct{ X, Y int64 }

// Rect is a closed axis-parallel rectangle, X1 <= X2 and Y1 <= Y2.
type Rect struct{ X1, Y1, X2, Y2 int64 }

// Rect32 is Rect in half the memory, for flat work. Its coordinates span the whole range of int32.
type Rect32 struct{ X1, Y1, X2, Y2 int32 }

// Fill is the rule by which an outline that meets itself fills the plane.
type Fill uint8

const (
	EvenOdd Fill = iota // filled where a ray to infinity crosses the outline an odd number of times
	NonZero             // filled where the outline winds around a point, either way
)

// Relation says how near two figures are. A nearer one compares greater, so the relation of two figures made of parts is
// the greatest over all pairs of parts.
type Relation uint8

const (
	Far   Relation = iota // distance at least the spacing
	Near                  // 0 < distance < spacing
	Touch                 // distance 0: a common point, or one inside the filled area of the other
)

// Wide gives the same rectangle in 64 bits.
func (r Rect32) Wide() Rect {
	return Rect{int64(r.X1), int64(r.Y1), int64(r.X2), int64(r.Y2)}
}

// Meets tells whether two closed rectangles have a point in common.
func (r Rect) Meets(q Rect) bool {
	return r.X1 <= q.X2 && q.X1 <= r.X2 && r.Y1 <= q.Y2 && q.Y1 <= r.Y2
}

// Contains tells whether p lies in the closed rectangle.
func (r Rect) Contains(p Point) bool {
	return r.X1 <= p.X && p.X <= r.X2 && r.Y1 <= p.Y && p.Y <= r.Y2
}

// Union is the least rectangle around both.
func (r Rect) Union(q Rect) Rect {
	return Rect{min(r.X1, q.X1), min(r.Y1, q.Y1), max(r.X2, q.X2), max(r.Y2, q.Y2)}
}

// BoxOf is the bounding box of points; the zero Rect where there are none.
func BoxOf(points []Point) Rect {
	if len(points) == 0 {
		return Rect{}
	}
	b := Rect{points[0].X, points[0].Y, points[0].X, points[0].Y}
	for _, p := range points[1:] {
		b.X1, b.X2 = min(b.X1, p.X), max(b.X2, p.X)
		b.Y1, b.Y2 = min(b.Y1, p.Y), max(b.Y2, p.Y)
	}
	return b
}

// RectGap gives the gaps of two rectangles along both axes, 0 where their projections meet.
func RectGap(a, b Rect) (dx, dy int64) {
	return max(0, b.X1-a.X2, a.X1-b.X2), max(0, b.Y1-a.Y2, a.Y1-b.Y2)
}

// RectsRelation compares two rectangles. The spacing s is at most 2^31.
//
// Past the first tests both gaps are below s <= 2^31, so the sum of squares stays below 2^63.
func RectsRelation(a, b Rect, s int64) Relation {
	dx, dy := RectGap(a, b)
	switch {
	case dx|dy == 0:
		return Touch
	case dx < s && dy < s && dx*dx+dy*dy < s*s:
		return Near
	}
	return Far
}

// Rects32Relation is RectsRelation for the lean form.
func Rects32Relation(a, b Rect32, s int64) Relation {
	dx := max(0, int64(b.X1)-int64(a.X2), int64(a.X1)-int64(b.X2))
	dy := max(0, int64(b.Y1)-int64(a.Y2), int64(a.Y1)-int64(b.Y2))
	switch {
	case dx|dy == 0:
		return Touch
	case dx < s && dy < s && dx*dx+dy*dy < s*s:
		return Near
	}
	return Far
}
