package geom

// This file names places along segments by exact fractions of the way, for what slanted edges cut of each other.

// Fraction is an exact rational number. Numerator and denominator are sums of two products of differences of points, at most 2^72, so
// a comparison multiplies out to 2^144 and takes 256 bits.
type Fraction struct{ num, den int128 } // den > 0

// WholeFraction is n as a fraction.
func WholeFraction(n int64) Fraction { return Fraction{mul(n, 1), mul(1, 1)} }

// Crossing is the part of the way from a to b at which the line through c and d crosses the line through a and b. The lines are not
// parallel.
func Crossing(a, b, c, d Point) Fraction {
	ux, uy, vx, vy := b.X-a.X, b.Y-a.Y, d.X-c.X, d.Y-c.Y
	return newFraction(mul(vx, c.Y-a.Y).sub(mul(vy, c.X-a.X)), mul(vx, uy).sub(mul(vy, ux)))
}

// Foot is the part of the way from a to b at which the perpendicular through p meets the line through them; a is not b.
func Foot(p, a, b Point) Fraction {
	ux, uy := b.X-a.X, b.Y-a.Y
	return newFraction(mul(ux, p.X-a.X).add(mul(uy, p.Y-a.Y)), mul(ux, ux).add(mul(uy, uy)))
}

func newFraction(num, den int128) Fraction {
	if den.hi < 0 {
		num, den = int128{}.sub(num), int128{}.sub(den)
	}
	return Fraction{num, den}
}

// Compare is the sign of f - g.
func (f Fraction) Compare(g Fraction) int {
	s, t := f.num.sign(), g.num.sign()
	if s != t || s == 0 {
		return int(sign(int64(s - t)))
	}
	p, q := mulWide(f.num.abs(), g.den), mulWide(g.num.abs(), f.den)
	switch {
	case p == q:
		return 0
	case p.less(q):
		return -s
	}
	return s
}

// Rest is 1 - f.
func (f Fraction) Rest() Fraction { return Fraction{f.den.sub(f.num), f.den} }

// IsZero tells whether f is 0.
func (f Fraction) IsZero() bool { return f.num.sign() == 0 }

// Along gives the number that lies f of the way from p to q, |p|, |q| <= Limit, 0 <= f <= 1: rounded down, and what is left of it.
//
// The way is at most 2^35 and f's numerator at most 2^72, so the product is at most 2^107; the quotient is no longer than the way.
func (f Fraction) Along(p, q int64) (whole int64, rest Fraction) {
	way := max(q-p, p-q)
	product := mulWide(f.num, mul(way, 1))
	left := int128{int64(product[1]), product[0]}
	var steps int64
	for bit := int64(1) << 36; bit > 0; bit >>= 1 {
		part := mulWide(f.den, mul(bit, 1)) // at most 2^108
		if less := left.sub(int128{int64(part[1]), part[0]}); less.hi >= 0 {
			left, steps = less, steps+bit
		}
	}
	switch {
	case q >= p:
		return p + steps, Fraction{left, f.den}
	case left.sign() == 0:
		return p - steps, Fraction{left, f.den}
	}
	return p - steps - 1, Fraction{f.den.sub(left), f.den}
}

// Winding gives the edges at which winding numbers of the polygon change, local coordinates: from the right of one to its left the
// number changes by w (or, in all edges of the polygon alike, by -w). Polygon.Full tells which winding numbers are filled.
func (p *Polygon) Winding(yield func(a, b Point, w int32) bool) {
	for _, e := range p.edges {
		if p.swapped {
			e.a, e.b = Point{e.a.Y, e.a.X}, Point{e.b.Y, e.b.X}
		}
		if !yield(e.a, e.b, e.w) {
			return
		}
	}
}

// Full tells whether points of this winding number are filled. The sign of the number does not matter.
func (p *Polygon) Full(wind int32) bool { return p.full(wind) }
