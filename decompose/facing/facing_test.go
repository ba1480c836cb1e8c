package facing

import (
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
)

// Hand-drawn cases. The distance that counts is worked out beside each; a case is tried with the spacing of its rule at the distance
// (far enough) and one above it (near), all other spacings at 1, so that nothing else can make the pair near.

func box(x1, y1, x2, y2 int64) geom.Rect { return geom.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2} }

func rects(r ...geom.Rect) geom.Parts { return geom.Parts{Rects: r} }

// with adds a slanted polygon to parts.
func with(p geom.Parts, outline ...geom.Point) geom.Parts {
	p.Polygons = append(p.Polygons[:len(p.Polygons):len(p.Polygons)], geom.Placed{Polygon: geom.NewPolygon(outline, geom.EvenOdd)})
	return p
}

func at(x, y int64) geom.Point { return geom.Point{X: x, Y: y} }

func shapeOf(p geom.Parts) *Shape {
	var m Maker
	s := new(Shape)
	m.Parts(s, p)
	return s
}

// only gives rules with one spacing that counts.
func only(rule Rule, spacing, tipWidth int64) *Rules {
	r := &Rules{1, 1, 1, 1, 1, tipWidth, nil}
	switch rule {
	case Other:
		r.Other = spacing
	case SideToSide:
		r.SideToSide = spacing
	case TipToSide:
		r.TipToSide = spacing
	case TipToTip:
		r.TipToTip = spacing
	case CornerToCorner:
		r.CornerToCorner = spacing
	}
	return r
}

// Wires of 10 by 60, level ones along x; the tip width is 10.
var drawn = []struct {
	name     string
	a, b     geom.Parts
	rule     Rule
	far      int64 // the greatest spacing that is kept
	distance int64 // squared
}{
	{"two level wires, one 12 above the other", rects(box(0, 0, 60, 10)), rects(box(0, 22, 60, 32)), SideToSide, 12, 144},
	{"projections overlap by 1", rects(box(0, 0, 60, 10)), rects(box(59, 22, 119, 32)), SideToSide, 12, 144},
	{"projections overlap by exactly 0: the corners (60, 10) and (60, 22)", rects(box(0, 0, 60, 10)), rects(box(60, 22, 120, 32)), CornerToCorner, 12, 144},
	{"projections 5 apart: 5, 12, 13", rects(box(0, 0, 60, 10)), rects(box(65, 22, 125, 32)), CornerToCorner, 13, 169},
	{"corners 3 and 4 apart: 5", rects(box(0, 0, 60, 10)), rects(box(63, 14, 123, 24)), CornerToCorner, 5, 25},
	{"corners 8 and 15 apart, the other way: 17", rects(box(0, 0, 60, 10)), rects(box(68, -25, 128, -15)), CornerToCorner, 17, 289},
	{"corners 20 and 21 apart: 29", rects(box(0, 0, 10, 60)), rects(box(-30, 81, -20, 141)), CornerToCorner, 29, 841},
	{"tip against tip in one line", rects(box(0, 0, 60, 10)), rects(box(74, 0, 134, 10)), TipToTip, 14, 196},
	{"tip against tip, overlapping by 1", rects(box(0, 0, 60, 10)), rects(box(74, 9, 134, 19)), TipToTip, 14, 196},
	{"tip against tip, overlapping by 0", rects(box(0, 0, 60, 10)), rects(box(74, 10, 134, 20)), CornerToCorner, 14, 196},
	{"a tip against the side of an upright wire", rects(box(0, 0, 60, 10)), rects(box(77, -30, 87, 30)), TipToSide, 17, 289},
	{"a tip facing a corner: the wire ends 4 short of it, 3 below: 5", rects(box(0, 0, 60, 10)), rects(box(64, 13, 74, 73)), CornerToCorner, 5, 25},
	{"a tip facing the last unit of a side", rects(box(0, 0, 60, 10)), rects(box(64, 9, 74, 69)), TipToSide, 4, 16},
	{"an edge of 11 is a side", rects(box(0, 0, 60, 11)), rects(box(77, -30, 87, 30)), SideToSide, 17, 289},
	// A wire drawn as two figures: each has an end of 10 where they meet, the merged outline has none there.
	{"the seam of a wire in two parts is no tip", rects(box(0, 0, 30, 10), box(30, 0, 60, 10)), rects(box(0, 22, 60, 32)), SideToSide, 12, 144},
	// A side of 60 drawn as six figures of 10: each of their edges alone would be a tip.
	{"a side in short parts is a side", rects(box(0, 0, 10, 10), box(10, 0, 20, 10), box(20, 0, 30, 10), box(30, 0, 40, 10), box(40, 0, 50, 10), box(50, 0, 60, 10)),
		rects(box(0, 22, 60, 32)), SideToSide, 12, 144},
	// A T: the stem's end is a tip. The underside of the bar, left of the stem, is only 5 long, but one of its corners is concave.
	{"an edge between a convex and a concave corner is a side", rects(box(0, 0, 20, 10), box(5, -40, 15, 10)), rects(box(-100, -21, 4, -13)), SideToSide, 13, 169},
	{"the end of the stem is a tip", rects(box(0, 0, 20, 10), box(5, -40, 15, 10)), rects(box(-30, -60, 50, -47)), TipToSide, 7, 49},
	{"the bottom of a notch is no tip", rects(box(0, 0, 10, 40), box(0, 0, 30, 10), box(20, 0, 30, 40)), rects(box(12, 25, 18, 45)), TipToSide, 15, 225},
	// Nothing shields: the near side of the wire is 2 away and kept, the far side faces the other way, so only the near one counts.
	{"the far edge of a wire faces away", rects(box(0, 0, 60, 10)), rects(box(0, 12, 60, 13)), SideToSide, 2, 4},
	// The own arm is between the tip of the upper arm and the wire: 12 from the inner edge of the arm below to the wire, 32 over it.
	{"between them lies an arm of the shape itself", rects(box(0, 0, 60, 10), box(0, 0, 10, 40), box(0, 30, 60, 40)), rects(box(0, 52, 60, 62)), SideToSide, 12, 144},
	// A right-angled triangle with legs of 30 and 40: its hypotenuse is 50 long, and the corner of the box at (40, 30) is 2*600/50 = 24
	// from it (the triangle is half of the rectangle, whose diagonal is the hypotenuse).
	{"a corner looks at a slanted edge", with(rects(), at(0, 0), at(40, 0), at(0, 30)), rects(box(40, 30, 60, 60)), Other, 24, 576},
	// The sharp corner (40, 0) looks at the side of a wire.
	{"a slanted corner looks at a side", with(rects(), at(0, 0), at(40, 0), at(0, 30)), rects(box(47, -20, 57, 20)), Other, 7, 49},
	// The slanted corners (40, 0) and (43, -4): 3, 4, 5.
	{"two slanted corners", with(rects(), at(0, 0), at(40, 0), at(0, 30)), with(rects(), at(43, -4), at(83, -4), at(83, -34)), Other, 5, 25},
	// An octagon turns a flat side of 10 to the wire; the flat side lies between convex corners, so it is a tip, and no slanted edge is
	// nearest to anything.
	{"a flat side of an octagon", with(rects(), at(10, 0), at(20, 0), at(30, 10), at(30, 20), at(20, 30), at(10, 30), at(0, 20), at(0, 10)), rects(box(41, -30, 51, 60)), TipToSide, 11, 121},
	// Two parallel edges of slope 3/4: (0, 0)-(40, 30) and, 10 away along (-3, 4)/5, (-6, 8)-(34, 38).
	{"two slanted edges side by side", with(rects(), at(0, 0), at(8, -6), at(48, 24), at(40, 30)), with(rects(), at(-6, 8), at(34, 38), at(26, 44), at(-14, 14)), Other, 10, 100},
	// A rectangle whose end lies inside a slanted figure has no tip there, and the bend's corner (66, 16) looks at the wire above.
	{"a wire that goes on slanted", with(rects(box(0, 0, 60, 10)), at(55, 10), at(60, 0), at(70, 0), at(70, 10)), rects(box(0, 19, 50, 29)), SideToSide, 9, 81},
}

func TestDrawn(t *testing.T) {
	for _, c := range drawn {
		t.Run(c.name, func(t *testing.T) {
			for _, turn := range turns {
				a, b := turn.of(c.a), turn.of(c.b)
				sa, sb := shapeOf(a), shapeOf(b)
				if r := only(c.rule, c.far, 10); r.Near(sa, sb) || r.Near(sb, sa) {
					t.Errorf("%s: near with %s at the distance itself", turn.name, c.rule)
				}
				r := only(c.rule, c.far+1, 10)
				if !r.Near(sa, sb) || !r.Near(sb, sa) {
					t.Errorf("%s: not near with %s one above the distance", turn.name, c.rule)
				}
				got, ok := r.Nearest(sa, sb)
				want := Approach{Rule: c.rule, Spacing: c.far + 1, DistanceSq: float64(c.distance), Lacks: 1}
				got.A, got.B, got.From, got.To = [2]geom.Point{}, [2]geom.Point{}, geom.Point{}, geom.Point{}
				got.DistanceSq = math.Round(got.DistanceSq*1e6) / 1e6
				if diff := cmp.Diff(want, got); !ok || diff != "" {
					t.Errorf("%s: Nearest (want, got):\n%s", turn.name, diff)
				}
			}
		})
	}
}

// turning is one of the eight orientations, with a shift.
type turning struct {
	name  string
	place geom.Placement
}

var turns = func() []turning {
	var out []turning
	for k, name := range []string{"as drawn", "90", "180", "270", "mirrored", "mirrored 90", "mirrored 180", "mirrored 270"} {
		out = append(out, turning{name, geom.Placement{Turn: uint8(k), X: 1000 * int64(k), Y: -math.MaxInt32 + 77}})
	}
	return out
}()

func (t turning) of(p geom.Parts) geom.Parts {
	var out geom.Parts
	for _, r := range p.Rects {
		out.Rects = append(out.Rects, t.place.ApplyRect(r))
	}
	for _, q := range p.Polygons {
		out.Polygons = append(out.Polygons, geom.Placed{Polygon: q.Polygon, At: t.place.After(q.At)})
	}
	return out
}
