package verify

import (
	"maskpair/decompose"
	"maskpair/decompose/geom"
)

// This file is what a run comes to: checks with their faults, counts beside them.

// Kind names a check.
type Kind string

// The checks. Those of a deck layer are made for each of them; the rest are made once, where the drawn layout is at hand.
const (
	OnMasks    Kind = "on_masks"    // each shape is on exactly one mask, or on both where it is stitched
	DrawnLayer Kind = "drawn_layer" // nothing is left on the drawn layer; with keep_drawn, all that is there is on a mask too
	Stitches   Kind = "stitches"    // overlaps and pieces of what is stitched follow the rules
	SameMask   Kind = "same_mask"   // shapes on one mask are at least the same-mask spacing apart
	AnyMask    Kind = "any_mask"    // shapes are at least any_mask_spacing apart
	Orders     Kind = "orders"      // anchors, ties, markers and labels are held
	SameArea   Kind = "same_area"   // the two masks together cover what was drawn or already masked

	Library    Kind = "library"    // head and end of the library are unchanged
	Structures Kind = "structures" // structures are those of the input, in order, each with its variants behind it
	Elements   Kind = "elements"   // elements are those of the input, in order, with all their records
	References Kind = "references" // references place what they placed, where they placed it
	Marks      Kind = "marks"      // marks stand behind the elements of tops and nowhere else
)

// Place is one fault of a check.
type Place struct {
	Top       string         // "" where the fault is of the stream as such
	Structure string         // for faults of the stream
	Box       *decompose.Box // half database units of the top; nil where there is none
	Other     *decompose.Box // the other shape of a pair
	Text      string         // what is wrong, in a few words
}

// Check is what became of one check.
type Check struct {
	Kind   Kind
	Layer  string // name of the deck layer; "" for checks of the stream
	Faults int64
	Places []Place // the first faults, at most mostPlaces
}

// mostPlaces is how many faults of a check are told one by one.
const mostPlaces = 20

// LayerCounts is what a deck layer of the masked stream holds.
type LayerCounts struct {
	Name                string
	FiguresA, FiguresB  int64 // flat
	Left                int64 // flat figures on the drawn layer
	Shapes              int64
	Stitched            int64 // shapes on both masks
	Overlaps            int64 // of A and B in them
	Waived              int64 // pairs too near on one mask that a waiver accepts
	Anchored            int64 // shapes that an anchor of any form holds
	Wishes, WishesKept  int64 // once per shape and mask
	MarkersWithoutShape int64
	LabelsWithoutShape  int64
	WaivedPlaces        []Place // the first of the waived pairs
}

// Result is what a run came to.
type Result struct {
	Tops     []string // of the masked stream, in file order
	Rules    *decompose.Rules
	Compared bool // with the drawn layout
	Layers   []LayerCounts
	Checks   []*Check
	Warnings []string // one line each
}

// OK says whether all checks hold.
func (r *Result) OK() bool { return r.Faults() == 0 }

// Faults is the number of all faults.
func (r *Result) Faults() int64 {
	var n int64
	for _, c := range r.Checks {
		n += c.Faults
	}
	return n
}

// Check gives the check of a kind and layer, nil where it was not made.
func (r *Result) Check(kind Kind, layer string) *Check {
	for _, c := range r.Checks {
		if c.Kind == kind && c.Layer == layer {
			return c
		}
	}
	return nil
}

// open begins a check.
func (r *Result) open(kind Kind, layer string) *Check {
	c := &Check{Kind: kind, Layer: layer}
	r.Checks = append(r.Checks, c)
	return c
}

// fault counts a fault and keeps its place where it is among the first.
func (c *Check) fault(p Place) {
	c.Faults++
	if len(c.Places) < mostPlaces {
		c.Places = append(c.Places, p)
	}
}

// boxOf gives a box for a place.
func boxOf(r geom.Rect) decompose.Box { return decompose.Box(r) }
