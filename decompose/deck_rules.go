package decompose

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strconv"

	"maskpair/gds"
)

// This file turns the deck into rules in whole database units. A deck is written in nm or um, a stream has a database unit
// of its own; a length that is no whole number of database units is refused, never rounded.

// Rules are what the deck asks for, with every length in whole database units of one stream.
type Rules struct {
	DBU     float64 // size of a database unit in metres
	Unit    string  // "nm" or "um": the deck's unit
	UnitDBU float64 // database units per deck unit
	Layers  []LayerRules
	Marks   MarkRules
}

// LayerRules are the rules of one [[layer]] of the deck.
type LayerRules struct {
	Name                          string
	Drawn                         []gds.LayerType
	MaskA, MaskB                  gds.LayerType
	Spacing                       int64 // same_mask_spacing
	AnyMask                       int64 // any_mask_spacing; 0: no such rule
	Redo                          bool  // figures already on a mask count as drawn
	AnchorA, AnchorB, AnchorLabel *gds.LayerType
	KeepDrawn                     bool
	SameShapeReport               bool
	ByFacing                      *FacingRules // nil: same_mask_spacing alone
	Stitch                        *StitchRules // nil: no stitches
}

// FacingRules are same-mask spacings by what faces what. A rule that the deck leaves out has the layer's Spacing.
type FacingRules struct {
	SideToSide, TipToSide, TipToTip, CornerToCorner int64
	TipWidth                                        int64      // longest outline edge that is a tip; 0: nothing is a tip
	Wide                                            []WideRule // by width, narrowest first
}

// WideRule is the spacing of a shape that is at least Width wide.
type WideRule struct{ Width, Spacing int64 }

// StitchRules say where a shape may be cut.
type StitchRules struct {
	MinOverlap int64 // length along the wire over which two pieces overlap
	MinPiece   int64 // least extent of a piece along the wire, overlap included
	KeepOut    []gds.LayerType
	Apply      bool // cut the least set of stitches in the output
}

// MarkRules name the layers of the marks in the output; nil: not written.
type MarkRules struct {
	Unresolved, Cycle, Stitch, Moved, AnyMask *gds.LayerType
	Replace                                   bool // figures already on a marks layer are dropped
}

// Reach gives the largest spacing of any rule of the layer: shapes that far apart or farther have no business with each
// other.
func (l *LayerRules) Reach() int64 {
	reach := max(l.Spacing, l.AnyMask)
	if f := l.ByFacing; f != nil {
		reach = max(reach, f.SideToSide, f.TipToSide, f.TipToTip, f.CornerToCorner)
		for _, w := range f.Wide {
			reach = max(reach, w.Spacing)
		}
	}
	return reach
}

// Length words a length or coordinate, given in database units, in the deck's unit: "36 nm".
func (r *Rules) Length(dbu float64) string { return r.Number(dbu) + " " + r.Unit }

// Number is Length without the unit.
func (r *Rules) Number(dbu float64) string {
	// Twelve digits hold every half unit of the plane (2^32 half units are ten digits) and hide the rest of a division.
	short, err := strconv.ParseFloat(strconv.FormatFloat(dbu/r.UnitDBU, 'g', 12, 64), 64)
	if err != nil || short == 0 {
		short = 0 // also for a negative zero
	}
	return strconv.FormatFloat(short, 'f', -1, 64)
}

// HalfUnits turns a coordinate in the deck's unit into half database units. It is false where the coordinate is no whole
// number of them, or outside the plane.
func (r *Rules) HalfUnits(v float64) (int64, bool) { return wholeUnits(v*r.UnitDBU*2, 1<<32) }

// longestLength is the longest length that a rule may have, in database units: the width of the coordinates.
const longestLength = 1<<31 - 1

// wholeUnits gives x as an integer, where it is one and at most limit either way.
//
// A number of the deck is a decimal that became a binary fraction, times a ratio that did: three roundings, each at most
// 2^-53 of the value. Up to 2^33 that is below 3e-6. A hundred-thousandth of a unit is therefore enough room for every
// number that is meant to be whole, and far less than any that is not.
func wholeUnits(x float64, limit float64) (int64, bool) {
	near := math.Round(x)
	if math.Abs(x-near) > 1e-5 || math.Abs(near) > limit { // a NaN fails neither test
		return 0, false
	}
	return int64(near), !math.IsNaN(x)
}

// unitMetres gives the size of the units that a deck may use.
func unitMetres(unit string) float64 {
	if unit == "um" {
		return 1e-6
	}
	return 1e-9
}

// simpleRatio gives a/b, taken to the simplest fraction within a millionth of it. Database units are written in decimals (1e-9,
// 2.5e-10), sometimes in single precision, and must not spoil whole numbers by their last digits. The fraction is a
// convergent of the continued fraction of a/b.
func simpleRatio(a, b float64) float64 {
	x := a / b
	rest := x
	p0, q0, p1, q1 := 0.0, 1.0, 1.0, 0.0
	for range 20 {
		integer := math.Floor(rest)
		p0, p1 = p1, integer*p1+p0
		q0, q1 = q1, integer*q1+q0
		if math.Abs(p1/q1-x) <= 1e-6*x {
			return p1 / q1
		}
		rest = 1 / (rest - integer)
	}
	return x
}

// Resolve gives the rules for a stream whose database unit is dbu metres. A length that is no whole number of database
// units is a *DeckError.
func (d *Deck) Resolve(dbu float64) (*Rules, error) {
	if !(dbu > 1e-15 && dbu < 1) {
		return nil, &InputError{Msg: fmt.Sprintf("UNITS gives a database unit of %g m; no layout is drawn in that: correct the stream", dbu)}
	}
	r := &Rules{DBU: dbu, Unit: d.Unit, UnitDBU: simpleRatio(unitMetres(d.Unit), dbu), Marks: d.Marks}
	s := &deckResolver{deck: d, rules: r}
	for i := range d.Layers {
		r.Layers = append(r.Layers, s.layer(&d.Layers[i]))
	}
	if s.err != nil {
		return nil, s.err
	}
	return r, nil
}

// deckResolver turns lengths into database units and keeps the first that cannot be.
type deckResolver struct {
	deck  *Deck
	rules *Rules
	err   *DeckError
}

func (s *deckResolver) length(l Length) int64 {
	if !l.Given {
		return 0
	}
	n, ok := wholeUnits(l.Value*s.rules.UnitDBU, longestLength)
	if !ok && s.err == nil {
		written := strconv.FormatFloat(l.Value, 'f', -1, 64) + " " + s.deck.Unit
		msg := fmt.Sprintf("%s is no whole number of database units (one is %s); give a multiple of it", written, s.rules.Length(1))
		if l.Value*s.rules.UnitDBU > longestLength {
			msg = fmt.Sprintf("%s is longer than the plane of coordinates; give at most %s", written, s.rules.Length(longestLength))
		}
		s.err = &DeckError{File: s.deck.File, Key: l.key, Line: l.line, Msg: msg}
	}
	return n
}

// or gives the length, or another where the deck has none.
func (s *deckResolver) or(l Length, other int64) int64 {
	if !l.Given {
		return other
	}
	return s.length(l)
}

func (s *deckResolver) layer(d *DeckLayer) LayerRules {
	l := LayerRules{
		Name: d.Name, Drawn: d.Drawn, MaskA: d.MaskA, MaskB: d.MaskB,
		Spacing: s.length(d.SameMask), AnyMask: s.length(d.AnyMask),
		Redo:    d.Redo,
		AnchorA: d.AnchorA, AnchorB: d.AnchorB, AnchorLabel: d.AnchorLabel,
		KeepDrawn: d.KeepDrawn, SameShapeReport: d.SameShapeReport,
	}
	if f := d.Spacing; f != nil {
		l.ByFacing = &FacingRules{
			SideToSide:     s.or(f.SideToSide, l.Spacing),
			TipToSide:      s.or(f.TipToSide, l.Spacing),
			TipToTip:       s.or(f.TipToTip, l.Spacing),
			CornerToCorner: s.or(f.CornerToCorner, l.Spacing),
			TipWidth:       s.length(f.TipWidth),
		}
		for _, w := range f.Wide {
			l.ByFacing.Wide = append(l.ByFacing.Wide, WideRule{s.length(w.Width), s.length(w.Spacing)})
		}
		slices.SortStableFunc(l.ByFacing.Wide, func(a, b WideRule) int {
			return cmp.Or(cmp.Compare(a.Width, b.Width), cmp.Compare(a.Spacing, b.Spacing))
		})
	}
	if t := d.Stitch; t != nil {
		l.Stitch = &StitchRules{MinOverlap: s.length(t.MinOverlap), KeepOut: t.KeepOut, Apply: t.Apply}
		l.Stitch.MinPiece = s.or(t.MinPiece, l.Stitch.MinOverlap)
	}
	return l
}
