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
	// Mirroring turns a counter-clockwise turn into a clockwise one: R^a M R^b = R^(a-b) M.
	turns := o & 3
	if outer&Mirrored != 0 {
		turns = -turns
	}
	return (outer+turns)&3 | (o^outer)&Mirrored
}

// Inverse gives the orientation that undoes o.
func (o Orientation) Inverse() Orientation {
	if o&Mirrored != 0 {
		return o & 7 // a mirrored orientation undoes itself
	}
	return -o & 3
}

// Apply turns a point about the origin.
func (o Orientation) Apply(x, y int64) (int64, int64) {
	if o&Mirrored != 0 {
		y = -y
	}
	switch o & 3 {
	case 1:
		return -y, x
	case 2:
		return -x, -y
	case 3:
		return y, -x
	}
	return x, y
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
	// file can leave int64: points handed to Apply are below 2^33 in magnitude, so grow times a point is at most 2^53; a
	// composition adds at most 2^34 (a place and a lattice) times 2^20 to a shift of at most 2^60, and falls back to
	// floating point where the sum passes 2^60.
	maxGrow  = 1 << 20
	maxShift = 1 << 60
)

// Transform is a placement: it takes points of a structure to where they lie in the structure (or the top) that holds it.
// The zero value leaves all where it is. Where Exact says so, a point goes to Orientation.Apply(x, y) times Magnification,
// plus (X, Y). Compare with Equal.
type Transform struct {
	X, Y        int64 // shift in whole units; meaningful where Exact
	Orientation Orientation
	grow        int32    // whole magnification less 1
	odd         *inexact // not nil: this is what counts
}

// inexact is a placement that is no whole number of units, as float64.
type inexact struct {
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
func (t Transform) Exact() bool { return t.odd == nil }

// Rigid says whether the placement is exact and does not magnify.
func (t Transform) Rigid() bool { return t.odd == nil && t.grow == 0 }

// Magnification gives the whole magnification of an exact placement.
func (t Transform) Magnification() int64 { return int64(t.grow) + 1 }

// Scale gives the magnification: what the width of a path is to be multiplied with, unless it is negative (absolute).
func (t Transform) Scale() float64 {
	if t.odd != nil {
		return t.odd.scale
	}
	return float64(t.grow) + 1
}

// Equal says whether two placements are the same.
func (t Transform) Equal(u Transform) bool {
	if t.odd == nil || u.odd == nil {
		return t == u
	}
	return *t.odd == *u.odd
}

// Compose places a reference: it gives the placement of what ref places (element column, row of an array) where parent
// places the structure that holds ref. p is the Placement of ref, nil where ref.Extra is 0; column and row are 0 for a
// single placement.
//
// Element (c, r) of an array lies at At + c*(ColumnEnd-At)/Columns + r*(RowEnd-At)/Rows, rounded to whole units (ties to
// even) in the structure that holds the array.
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
			return composeOdd(parent, p, x, y)
		}
	}
	if parent.odd != nil {
		o := Orientation(ref.Turn)
		return parent.odd.compose(float64(x), float64(y), 1, 90*float64(o&3), o&Mirrored != 0, false, false)
	}
	if parent.grow != 0 {
		return composeGrown(parent, x, y, 1, Orientation(ref.Turn), false, false)
	}
	return parent.place(x, y, Orientation(ref.Turn))
}

// Shift gives the placement of something upright at (x, y) where t places what holds it.
func (t Transform) Shift(x, y int64) Transform {
	if t.odd != nil {
		return t.odd.compose(float64(x), float64(y), 1, 0, false, false, false)
	}
	if t.grow != 0 {
		return composeGrown(t, x, y, 1, 0, false, false)
	}
	return t.place(x, y, 0)
}

// Then gives the placement of something that t places inside something that outer places.
func (t Transform) Then(outer Transform) Transform {
	if t.odd == nil && outer.odd == nil {
		if t.grow|outer.grow == 0 {
			return outer.place(t.X, t.Y, t.Orientation)
		}
		return composeGrown(outer, t.X, t.Y, t.Magnification(), t.Orientation, false, false)
	}
	i := t.float()
	return outer.float().compose(i.x, i.y, i.scale, i.degrees, i.mirror, false, false)
}

// place composes without magnification, by integers.
func (t Transform) place(x, y int64, o Orientation) Transform {
	dx, dy := t.Orientation.Apply(x, y)
	return Transform{X: t.X + dx, Y: t.Y + dy, Orientation: o.Then(t.Orientation)}
}

// composeGrown composes where parent and reference are exact but one of them may magnify, or be absolute.
func composeGrown(parent Transform, x, y, magnification int64, o Orientation, absoluteMagnification, absoluteAngle bool) Transform {
	total := magnification
	if !absoluteMagnification {
		total *= parent.Magnification() // each at most 2^20
	}
	const most = maxShift >> 21
	if total > maxGrow || x > most || x < -most || y > most || y < -most {
		return parent.float().compose(float64(x), float64(y), float64(magnification), 90*float64(o&3), o&Mirrored != 0,
			absoluteMagnification, absoluteAngle)
	}
	dx, dy := parent.Orientation.Apply(x, y)
	dx, dy = parent.X+dx*parent.Magnification(), parent.Y+dy*parent.Magnification()
	if dx > maxShift || dx < -maxShift || dy > maxShift || dy < -maxShift {
		return parent.float().compose(float64(x), float64(y), float64(magnification), 90*float64(o&3), o&Mirrored != 0,
			absoluteMagnification, absoluteAngle)
	}
	if absoluteAngle {
		o = o&3 | (o^parent.Orientation)&Mirrored
	} else {
		o = o.Then(parent.Orientation)
	}
	return Transform{X: dx, Y: dy, Orientation: o, grow: int32(total - 1)}
}

// composeOdd composes a reference that magnifies, has an odd angle, or is absolute.
func composeOdd(parent Transform, p *Placement, x, y int64) Transform {
	quarter, whole := quarterTurns(p.Angle)
	if parent.odd == nil && whole && p.Magnification >= 1 && p.Magnification <= maxGrow && p.Magnification == math.Trunc(p.Magnification) {
		o := quarter
		if p.Mirror {
			o |= Mirrored
		}
		return composeGrown(parent, x, y, int64(p.Magnification), o, p.AbsoluteMagnification, p.AbsoluteAngle)
	}
	return parent.float().compose(float64(x), float64(y), p.Magnification, p.Angle, p.Mirror, p.AbsoluteMagnification, p.AbsoluteAngle)
}

// float gives the placement as floating point.
func (t Transform) float() *inexact {
	if t.odd != nil {
		return t.odd
	}
	i := &inexact{x: float64(t.X), y: float64(t.Y), scale: float64(t.grow) + 1, degrees: 90 * float64(t.Orientation&3),
		mirror: t.Orientation&Mirrored != 0}
	i.cos, i.sin = cosSin(i.degrees)
	return i
}

// compose places something with the given shift, scale, angle and mirroring inside i. Angles add up as degrees, so that
// two turns by 45 degrees are a quarter turn; what comes out exact is made exact again.
func (i *inexact) compose(x, y, scale, degrees float64, mirror, absoluteMagnification, absoluteAngle bool) Transform {
	n := &inexact{scale: scale, degrees: degrees, mirror: mirror != i.mirror}
	n.x, n.y = i.place(x, y)
	if !absoluteMagnification {
		n.scale = scale * i.scale
	}
	if !absoluteAngle {
		if i.mirror {
			degrees = -degrees
		}
		n.degrees = i.degrees + degrees
	}
	n.degrees = math.Mod(n.degrees, 360)
	if n.degrees < 0 {
		n.degrees += 360
	}
	if n.degrees >= 360 { // a tiny negative angle, rounded
		n.degrees = 0
	}
	n.cos, n.sin = cosSin(n.degrees)

	quarter, whole := quarterTurns(n.degrees)
	if whole && n.scale >= 1 && n.scale <= maxGrow && n.scale == math.Trunc(n.scale) && wholeShift(n.x) && wholeShift(n.y) {
		t := Transform{X: int64(n.x), Y: int64(n.y), Orientation: quarter, grow: int32(n.scale) - 1}
		if n.mirror {
			t.Orientation |= Mirrored
		}
		return t
	}
	return Transform{odd: n}
}

// wholeShift says whether a shift is a whole number that float64 holds without doubt.
func wholeShift(f float64) bool { return f == math.Trunc(f) && math.Abs(f) < 1<<52 }

// place gives the place of a point, unrounded. The conversions keep the compiler from fusing products and sums, so that
// every machine computes the same.
func (i *inexact) place(x, y float64) (float64, float64) {
	if i.mirror {
		y = -y
	}
	c, s := i.cos*i.scale, i.sin*i.scale
	return float64(float64(c*x)-float64(s*y)) + i.x, float64(float64(s*x)+float64(c*y)) + i.y
}

// quarterTurns gives an angle as quarter turns, where it is a multiple of 90 degrees.
func quarterTurns(degrees float64) (Orientation, bool) {
	turns := degrees / 90
	if turns != math.Trunc(turns) || turns*90 != degrees {
		return 0, false
	}
	return Orientation(int64(math.Mod(turns, 4))) & 3, true
}

// cosSin gives cosine and sine of an angle, exact at the quarter turns and at halves.
func cosSin(degrees float64) (cos, sin float64) {
	degrees = math.Mod(degrees, 360)
	if degrees < 0 {
		degrees += 360
	}
	quarter := math.Floor(degrees / 90)
	rest := degrees - 90*quarter // exact: both are multiples of the last place of degrees
	switch {
	case rest == 0:
		cos, sin = 1, 0
	case rest == 45:
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
	switch int(quarter) & 3 {
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
		fx, fy := t.odd.place(float64(x), float64(y))
		return round(fx), round(fy)
	}
	x, y = t.Orientation.Apply(x, y)
	if t.grow != 0 {
		k := int64(t.grow) + 1
		return t.X + x*k, t.Y + y*k
	}
	return t.X + x, t.Y + y
}

// ApplyFloat places a point without rounding it to whole units.
func (t Transform) ApplyFloat(x, y float64) (float64, float64) { return t.float().place(x, y) }

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
	if t.odd != nil {
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
	if t.odd != nil {
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
	if t.odd == nil {
		words := ""
		if t.Orientation != 0 {
			words = t.Orientation.String() + ", "
		}
		if t.grow != 0 {
			words += fmt.Sprintf("magnified %d times, ", t.Magnification())
		}
		return words + fmt.Sprintf("at (%d, %d)", t.X, t.Y)
	}
	words := ""
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
