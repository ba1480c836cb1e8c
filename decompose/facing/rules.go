package facing

import "slices"

// This file holds the rules as numbers, in the unit of the coordinates.

// Rules are same-mask spacings by what faces what.
type Rules struct {
	Other          int64 // where a slanted edge takes part
	SideToSide     int64
	TipToSide      int64
	TipToTip       int64
	CornerToCorner int64
	TipWidth       int64 // longest edge that is a tip; 0: nothing is a tip
	Wide           []Wide
}

// Wide asks for Spacing in place of what the kinds of two facing edges ask for, if it is more, where a square of Width fits into one
// of the shapes with a side on its facing edge, along more than 0 of the part that faces the other edge.
type Wide struct{ Width, Spacing int64 }

// Rule tells which of the rules applies.
type Rule uint8

// The rules, by the keys of the deck.
const (
	Other Rule = iota
	SideToSide
	TipToSide
	TipToTip
	CornerToCorner
	WidePart
)

var ruleKeys = [...]string{"same_mask_spacing", "side_to_side", "tip_to_side", "tip_to_tip", "corner_to_corner", "wide"}

// String gives the key of the rule in the deck.
func (r Rule) String() string { return ruleKeys[r] }

// Reach is the largest spacing: shapes that far apart are not near.
func (r *Rules) Reach() int64 {
	reach := max(r.Other, r.SideToSide, r.TipToSide, r.TipToTip, r.CornerToCorner)
	for _, w := range r.Wide {
		reach = max(reach, w.Spacing)
	}
	return reach
}

// Sight is how far from a box one must see of a shape to judge what is within reach of the box: farther than a tip is long, and than a
// square that makes a part wide, from all that is within reach. Of a shape that is known only so far, edges end too early or are not
// there, but none that is within reach comes to be of another kind.
func (r *Rules) Sight() int64 {
	more := r.TipWidth
	for _, w := range r.Wide {
		more = max(more, w.Width)
	}
	return r.Reach() + more + 1
}

// Equal tells whether all rules ask for one spacing, so that two shapes are near exactly if their distance is below it: where two
// outlines come nearest of all is one of the places that are judged.
func (r *Rules) Equal() bool {
	s := r.Other
	return s == r.SideToSide && s == r.TipToSide && s == r.TipToTip && s == r.CornerToCorner &&
		!slices.ContainsFunc(r.Wide, func(w Wide) bool { return w.Spacing > s })
}

// ofKinds gives the rule for two facing edges and its spacing.
func (r *Rules) ofKinds(tipA, tipB bool) (Rule, int64) {
	switch {
	case tipA && tipB:
		return TipToTip, r.TipToTip
	case tipA || tipB:
		return TipToSide, r.TipToSide
	}
	return SideToSide, r.SideToSide
}

// isTip tells whether an edge of this length between convex corners is a tip.
func (r *Rules) isTip(length int64) bool { return length <= r.TipWidth }

// facingReach is the largest spacing for facing edges.
func (r *Rules) facingReach() int64 {
	reach := max(r.SideToSide, r.TipToSide, r.TipToTip)
	for _, w := range r.Wide {
		reach = max(reach, w.Spacing)
	}
	return reach
}
