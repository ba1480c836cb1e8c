package gds

import (
	"fmt"
	"math"
	"strings"
)

// This file places structures. A placement is one of eight orientations, a magnification and a shift. Nearly all
// placements of a layout are exact on whole database units: quarter turns, mirrored or not, magnified by a whole number;
// these are composed and applied with integers. The rest (odd angles, fractional magnifications) keep angle, magnification
// and shift as float64, are composed unrounded, and round once, when a point is placed.

// Orientation is one of the eight ways to lay a structure on whole units: the low two bits count quarter turns
// counter-clockwise, and where bit 2 is set the structure is mirrored about the x axis before it is turned.
type Orientation uint8

// Mirrored is the orientation that mirrors about the x axis and does not turn.
const Mirrored Orientation = 4

// Then gives the orientation of something laid by o inside something laid by outer.
func (o Orientation) Then(outer Orientation) Orientation {
	// Mirroring turns a counter-clockwise turn into a clockwise one: R^a M R^b = R^(a-b) M. sign is 0 or -1, and turns the
	// count of o around without a branch.
	sign := -(outer >> 2 & 1)
	return (outer+(o^sign)-sign)&3 | (o^outer)&Mirrored
}

// Inverse gives the orientation that undoes o.
func (o Orientation) Inverse() Orientation {
	if o&Mirrored != 0 {
		return o & 7 // a mirrored orientation undoes itself
	}
	return -o & 3
}

// axes says what becomes of the axes: (x, y) goes to (a*x + b*y, c*x + d*y). It is never written to.
var axes = [8]struct{ a, b, c, d int64 }{
	{1, 0, 0, 1}, {0, -1, 1, 0}, {-1, 0, 0, -1}, {0, 1, -1, 0},
	{1, 0, 0, -1}, {0, 1, 1, 0}, {-1, 0, 0, 1}, {0, -1, -1, 0},
}

// Apply turns a point about the origin.
func (o Orientation) Apply(x, y int64) (int64, int64) {
	m := &axes[o&7]
	return m.a*x + m.b*y, m.c*x + m.d*y
}

// String gives the orientation in words.
func (o Orientation) String() string {
	var parts []string
	if o&Mirrored != 0 {
		parts = append(parts, "mirrored")
	}
	if o&3 != 0 {
		parts = append(parts, fmt.Sprintf("turned %d degrees", 90*int(o&3)))
	}
	if parts == nil {
		return "upright"
	}
	return strings.Join(parts, ", ")
}

const (
	// maxGrow is the largest whole magnification that is kept as an integer. With it, and with maxShift, nothing in this
	// file can leave int64: points handed to Apply are below 2^33 in magnitude, so a grown point is below 2^53; without
	// magnification a composition adds at most 2^34 (a place and a lattice) to a shift, which takes more levels of
	// hierarchy than there can be structures; with it, composeGrown checks the shift.
	maxGrow  = 1 << 20
	maxShift = 1 << 60
)

// Transform is a placement: it takes points of a structure to where they lie in the structure (or the top) that holds it.
// The zero value leaves all where it is. Where Exact says so, a point goes to Orientation.Apply(x, y) times Magnification,
// plus (X, Y). Compare with Equal.
type Transform struct {
	X, Y        int64 // shift in whole units; meaningful where Exact
	Orientation Orientation
	odd         *odd // nil: neither magnified nor odd. (Four fields are what the compiler keeps in registers.)
}

// odd says of a placement what whole units and eight orientations do not.
type odd struct {
	grow     int64   // not 0: the placement is exact and this its whole magnification, 2 or more; nothing below counts
	x, y     float64 // shift
	scale    float64
	degrees  float64 // counter-clockwise, in [0, 360)
	mirror   bool
	cos, sin float64 // of degrees
}

// Identity leaves all where it is.
func Identity() Transform { return Transform{} }

// NewTransform gives the placement with an orientation and a shift.
func NewTransform(o Orientation, x, y int64) Transform {
	return Transform{X: x, Y: y, Orientation: o & 7}
}

// Exact says whether the placement takes whole units to whole units by integers alone.
func (t Transform) Exact() bool { return t.odd == nil || t.odd.grow != 0 }

// Rigid says whether the placement is exact and does not magnify.
func (t Transform) Rigid() bool { return t.odd == nil }

// Magnification gives the whole magnification of an exact placement, 0 for others.
func (t Transform) Magnification() int64 {
	if t.odd == nil {
		return 1
	}
	return t.odd.grow
}

// Scale gives the magnification: what the width of a path is to be multiplied with, unless it is negative (absolute).
func (t Transform) Scale() float64 {
	if t.Exact() {
		return float64(t.Magnification())
	}
	return t.odd.scale
}

// Equal says whether two placements are the same.
func (t Transform) Equal(u Transform) bool {
	if t.odd == nil || u.odd == nil {
		return t == u
	}
	return t.X == u.X && t.Y == u.Y && t.Orientation == u.Orientation && *t.odd == *u.odd
}

// Compose places a reference: it gives the placement of what ref places (element column, row of an array) where parent
// places the structure that holds ref. p is the Placement of ref, nil where ref.Extra is 0; column and row are 0 for a
// single placement.
//
// Element (c, r) of an array lies at At + c*(ColumnEnd-At)/Columns + r*(RowEnd-At)/Rows, the sum of the quotients rounded to
// whole units of the structure that holds the array (see Placement.Element).
//
// An absolute magnification or angle takes the place of what the parents add up to, as the manual has it: the magnification
// (the angle) is then that of ref alone, whatever the parents'; place and mirroring are not touched by it.
func Compose(parent Transform, ref *Ref, p *Placement, column, row int32) Transform {
	x, y := int64(ref.At.X), int64(ref.At.Y)
	if p != nil {
		if column|row != 0 {
			x, y = p.Element(ref.At, column, row)
		}
		if !p.Exact || p.AbsoluteAngle || p.AbsoluteMagnification {
			return parent.composeOdd(p, x, y)
		}
	}
	return parent.Place(Orientation(ref.Turn), x, y)
}

// Place gives the placement of something laid by o at (x, y), where t places what holds it.
func (t Transform) Place(o Orientation, x, y int64) Transform {
	if t.odd != nil {
		return t.placeOdd(part{whole: true, orientation: o, grow: 1, x: x, y: y})
	}
	dx, dy := t.Orientation.Apply(x, y)
	return Transform{X: t.X + dx, Y: t.Y + dy, Orientation: o.Then(t.Orientation)}
}

// Then gives the placement of something that t places inside something that outer places.
func (t Transform) Then(outer Transform) Transform {
	if t.odd == nil {
		return outer.Place(t.Orientation, t.X, t.Y)
	}
	if t.odd.grow != 0 {
		return outer.placeOdd(part{whole: true, orientation: t.Orientation, grow: t.odd.grow, x: t.X, y: t.Y})
	}
	return outer.float().compose(part{fx: t.odd.x, fy: t.odd.y, scale: t.odd.scale, degrees: t.odd.degrees, mirror: t.odd.mirror})
}

// part is what is placed inside a placement: a reference, or another placement.
type part struct {
	whole       bool // orientation, grow, x and y count; otherwise scale, degrees, mirror, fx and fy
	orientation Orientation
	grow        int64
	x, y        int64

	scale, degrees float64
	mirror         bool
	fx, fy         float64

	absoluteMagnification, absoluteAngle bool
}

// composeOdd places a reference that magnifies, has an odd angle, or is absolute, at (x, y).
func (t Transform) composeOdd(p *Placement, x, y int64) Transform {
	n := part{x: x, y: y, scale: p.Magnification, degrees: p.Angle, mirror: p.Mirror, fx: float64(x), fy: float64(y),
		absoluteMagnification: p.AbsoluteMagnification, absoluteAngle: p.AbsoluteAngle}
	quarter, turns := quarterTurns(p.Angle)
	if turns && wholeGrow(p.Magnification) {
		n.whole, n.orientation, n.grow = true, quarter, int64(p.Magnification)
		if p.Mirror {
			n.orientation |= Mirrored
		}
	}
	return t.placeOdd(n)
}

// placeOdd places n where not all is rigid: by integers where these do, otherwise by floating point.
func (t Transform) placeOdd(n part) Transform {
	if !n.whole {
		return t.float().compose(n)
	}
	if t.Exact() {
		if u, ok := t.placeGrown(n); ok {
			return u
		}
	}
	n.scale, n.degrees, n.mirror = float64(n.grow), 90*float64(n.orientation&3), n.orientation&Mirrored != 0
	n.fx, n.fy = float64(n.x), float64(n.y)
	return t.float().compose(n)
}

// placeGrown composes by integers. It says false where these could overflow.
func (t Transform) placeGrown(n part) (Transform, bool) {
	grow := t.Magnification()
	total := n.grow
	if !n.absoluteMagnification {
		total *= grow // each at most 2^20
	}
	const most = maxShift / maxGrow
	if total > maxGrow || n.x > most || n.x < -most || n.y > most || n.y < -most {
		return Transform{}, false
	}
	x, y := t.Orientation.Apply(n.x, n.y)
	x, y = t.X+x*grow, t.Y+y*grow // below 2^62: a shift is at most 2^60, or of a few levels of 2^34 more
	if x > maxShift || x < -maxShift || y > maxShift || y < -maxShift {
		return Transform{}, false
	}
	u := Transform{X: x, Y: y, Orientation: n.orientation.Then(t.Orientation)}
	if n.absoluteAngle {
		u.Orientation = u.Orientation&Mirrored | n.orientation&3
	}
	if total != 1 {
		u.odd = &odd{grow: total}
	}
	return u, true
}

// float gives the placement as floating point.
func (t Transform) float() *odd {
	if !t.Exact() {
		return t.odd
	}
	f := &odd{x: float64(t.X), y: float64(t.Y), scale: t.Scale(), degrees: 90 * float64(t.Orientation&3),
		mirror: t.Orientation&Mirrored != 0}
	f.cos, f.sin = cosSin(f.degrees)
	return f
}

// compose places n inside f, by floating point. Angles add up as degrees, so that two turns by 45 degrees are a quarter
// turn; what comes out exact is made exact again.
func (f *odd) compose(n part) Transform {
	u := &odd{scale: n.scale, degrees: n.degrees, mirror: n.mirror != f.mirror}
	u.x, u.y = f.place(n.fx, n.fy)
	if !n.absoluteMagnification {
		u.scale = n.scale * f.scale
	}
	if !n.absoluteAngle {
		if f.mirror {
			u.degrees = -n.degrees
		}
		u.degrees += f.degrees
	}
	u.degrees = turnOnce(u.degrees)
	u.cos, u.sin = cosSin(u.degrees)

	if quarter, turns := quarterTurns(u.degrees); turns && wholeGrow(u.scale) && wholeShift(u.x) && wholeShift(u.y) {
		t := Transform{X: int64(u.x), Y: int64(u.y), Orientation: quarter}
		if u.mirror {
			t.Orientation |= Mirrored
		}
		if u.scale != 1 {
			t.odd = &odd{grow: int64(u.scale)}
		}
		return t
	}
	return Transform{odd: u}
}

// wholeGrow says whether a magnification is a whole number that is kept as an integer.
func wholeGrow(f float64) bool { return f >= 1 && f <= maxGrow && f == math.Trunc(f) }

// wholeShift says whether a shift is a whole number that float64 holds without doubt.
func wholeShift(f float64) bool { return f == math.Trunc(f) && math.Abs(f) < 1<<52 }

// place gives the place of a point, unrounded. The conversions keep the compiler from fusing products and sums, so that
// every machine computes the same.
func (f *odd) place(x, y float64) (float64, float64) {
	if f.mirror {
		y = -y
	}
	c, s := f.cos*f.scale, f.sin*f.scale
	return float64(float64(c*x)-float64(s*y)) + f.x, float64(float64(s*x)+float64(c*y)) + f.y
}

// turnOnce takes whole turns off an angle: the result lies in [0, 360).
func turnOnce(degrees float64) float64 {
	degrees = math.Mod(degrees, 360)
	if degrees < 0 {
		degrees += 360
	}
	if degrees >= 360 { // a tiny negative angle, rounded
		return 0
	}
	return degrees
}

// quarterTurns gives an angle as quarter turns, where it is a multiple of 90 degrees. Programs that count in radians miss
// such a multiple in the last places; what is off by less than 1e-10 degrees moves no point of the 32-bit plane by more
// than 2^32 * 1e-10 * pi/180 < 0.01 units, and is taken for the multiple.
func quarterTurns(degrees float64) (Orientation, bool) {
	switch degrees {
	case 0:
		return 0, true
	case 90:
		return 1, true
	case 180:
		return 2, true
	case 270:
		return 3, true
	}
	rest := math.Remainder(degrees, 90)
	if math.Abs(rest) > 1e-10 {
		return 0, false
	}
	return Orientation(math.Round(turnOnce(degrees)/90)) & 3, true
}

// cosSin gives cosine and sine of an angle, exact at the quarter turns and where one of them is a half.
func cosSin(degrees float64) (cos, sin float64) {
	degrees = turnOnce(degrees)
	quarter := math.Floor(degrees / 90)
	rest := degrees - 90*quarter // exact: no bits are lost to a smaller number
	switch rest {
	case 0:
		cos, sin = 1, 0
	case 45:
		cos, sin = math.Sqrt2/2, math.Sqrt2/2
	default:
		sin, cos = math.Sincos(rest * (math.Pi / 180))
		if rest == 30 {
			sin = 0.5
		}
		if rest == 60 {
			cos = 0.5
		}
	}
	switch int(quarter) {
	case 1:
		return -sin, cos
	case 2:
		return -cos, -sin
	case 3:
		return sin, -cos
	}
	return cos, sin
}

// Apply places a point. Coordinates are whole database units below 2^33 in magnitude; a placement that is not exact rounds
// to the nearest unit, ties to even.
func (t Transform) Apply(x, y int64) (int64, int64) {
	if t.odd != nil {
		return t.applyOdd(x, y)
	}
	x, y = t.Orientation.Apply(x, y)
	return t.X + x, t.Y + y
}

func (t Transform) applyOdd(x, y int64) (int64, int64) {
	if k := t.odd.grow; k != 0 {
		x, y = t.Orientation.Apply(x, y)
		return t.X + x*k, t.Y + y*k
	}
	fx, fy := t.odd.place(float64(x), float64(y))
	return round(fx), round(fy)
}

// ApplyFloat places a point without rounding it to whole units.
func (t Transform) ApplyFloat(x, y float64) (float64, float64) {
	if !t.Exact() {
		return t.odd.place(x, y)
	}
	m, k := &axes[t.Orientation&7], float64(t.Magnification())
	return float64(t.X) + k*(float64(m.a)*x+float64(m.b)*y), float64(t.Y) + k*(float64(m.c)*x+float64(m.d)*y)
}

// round gives the nearest whole number, ties to even; what lies outside of int64's middle is held at its border.
func round(f float64) int64 {
	const most = 1 << 62
	f = math.RoundToEven(f)
	if f >= most {
		return most
	}
	if f <= -most {
		return -most
	}
	return int64(f)
}

// ApplyRect places a rectangle. It says false where the placement is not exact, and where the rectangle would leave the
// range of int32.
func (t Transform) ApplyRect(r Rect) (Rect, bool) {
	if !t.Exact() {
		return Rect{}, false
	}
	x1, y1 := t.Apply(int64(r.X1), int64(r.Y1))
	x2, y2 := t.Apply(int64(r.X2), int64(r.Y2))
	x1, x2 = min(x1, x2), max(x1, x2)
	y1, y2 = min(y1, y2), max(y1, y2)
	if x1 < math.MinInt32 || y1 < math.MinInt32 || x2 > math.MaxInt32 || y2 > math.MaxInt32 {
		return Rect{}, false
	}
	return Rect{int32(x1), int32(y1), int32(x2), int32(y2)}, true
}

// Invert gives the placement that undoes t. It says false where t is not Rigid.
func (t Transform) Invert() (Transform, bool) {
	if !t.Rigid() {
		return Transform{}, false
	}
	o := t.Orientation.Inverse()
	x, y := o.Apply(-t.X, -t.Y)
	return Transform{X: x, Y: y, Orientation: o}, true
}

// ApplyInverse finds the point that t places at (x, y). It says false where t is not exact, or no whole point goes there.
func (t Transform) ApplyInverse(x, y int64) (int64, int64, bool) {
	if !t.Exact() {
		return 0, 0, false
	}
	x, y = x-t.X, y-t.Y
	if k := t.Magnification(); k != 1 {
		if x%k != 0 || y%k != 0 {
			return 0, 0, false
		}
		x, y = x/k, y/k
	}
	x, y = t.Orientation.Inverse().Apply(x, y)
	return x, y, true
}

// String gives the placement in words, for reports: "mirrored, turned 90 degrees, at (120, -40)".
func (t Transform) String() string {
	words := ""
	if t.Exact() {
		if t.Orientation != 0 {
			words = t.Orientation.String() + ", "
		}
		if k := t.Magnification(); k != 1 {
			words += fmt.Sprintf("magnified %d times, ", k)
		}
		return words + fmt.Sprintf("at (%d, %d)", t.X, t.Y)
	}
	if t.odd.mirror {
		words = "mirrored, "
	}
	if t.odd.degrees != 0 {
		words += fmt.Sprintf("turned %.9g degrees, ", t.odd.degrees)
	}
	if t.odd.scale != 1 {
		words += fmt.Sprintf("magnified %.9g times, ", t.odd.scale)
	}
	return words + fmt.Sprintf("at (%.9g, %.9g)", t.odd.x, t.odd.y)
}
