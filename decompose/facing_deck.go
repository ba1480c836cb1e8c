package decompose

import (
	"fmt"
	"strconv"
)

// This file holds the rules of a deck against each other. What is wrong on its face is an error of ParseDeck; here is what a deck may say
// and hardly can mean.

// Remark is a doubt about a deck.
type Remark struct {
	Line int    // of the key
	Key  string // "layer metal1: spacing.tip_to_tip"
	Text string // what is odd, and what to do
}

// Remarks gives the rules of the deck that contradict each other, or that change nothing, layer by layer.
func (d *Deck) Remarks() []Remark {
	r := &deckDoubts{deck: d}
	stitches := false
	anyMask := false
	for i := range d.Layers {
		r.layer(&d.Layers[i])
		stitches = stitches || d.Layers[i].Stitch != nil
		anyMask = anyMask || d.Layers[i].AnyMask.Given
	}
	if d.Marks.Stitch != nil && !stitches {
		r.add(0, "marks.stitch", "no layer has a [layer.stitch], so none will be drawn; add one, or leave the mark out")
	}
	if d.Marks.AnyMask != nil && !anyMask {
		r.add(0, "marks.any_mask", "no layer has any_mask_spacing, so none will be drawn; add it, or leave the mark out")
	}
	return r.found
}

type deckDoubts struct {
	deck  *Deck
	found []Remark
}

func (r *deckDoubts) add(line int, key, format string, args ...any) {
	r.found = append(r.found, Remark{line, key, fmt.Sprintf(format, args...)})
}

// about notes a doubt about a length.
func (r *deckDoubts) about(l Length, format string, args ...any) {
	r.add(l.line, l.key, format, args...)
}

// length words a length of the deck.
func (r *deckDoubts) length(l Length) string { return l.Text() + " " + r.deck.Unit }

// Text gives the length as a plain decimal, without the unit.
func (l Length) Text() string { return strconv.FormatFloat(l.Value, 'f', -1, 64) }

// Line is the line of the deck that the length stands on; 0 where the deck does not have it.
func (l Length) Line() int { return l.line }

// Or gives the length, or another where the deck does not have it.
func (l Length) Or(other Length) Length {
	if l.Given {
		return l
	}
	return other
}

func (r *deckDoubts) layer(d *DeckLayer) {
	if d.AnyMask.Given && d.AnyMask.Value == d.SameMask.Value {
		r.about(d.AnyMask, "equals same_mask_spacing, so that opposite masks help nowhere: every near pair is wrong whatever the masks; make it smaller")
	}
	if f := d.Spacing; f != nil {
		r.spacing(d, f)
	}
	if t := d.Stitch; t != nil {
		if t.MinPiece.Given && t.MinPiece.Value < t.MinOverlap.Value {
			r.about(t.MinPiece, "%s is less than min_overlap (%s), which is part of each piece, and so changes nothing; make it larger, or leave it out",
				r.length(t.MinPiece), r.length(t.MinOverlap))
		}
	}
}

// kind is one of the rules by what faces what.
type kind struct {
	name   string
	length Length
}

func (d *DeckLayer) kinds() []kind {
	f := d.Spacing
	return []kind{{"side_to_side", f.SideToSide}, {"tip_to_side", f.TipToSide}, {"tip_to_tip", f.TipToTip}, {"corner_to_corner", f.CornerToCorner}}
}

func (r *deckDoubts) spacing(d *DeckLayer, f *DeckSpacing) {
	for _, k := range d.kinds() {
		switch l := k.length; {
		case !l.Given:
		case d.AnyMask.Given && l.Value < d.AnyMask.Value:
			r.about(l, "%s is below any_mask_spacing (%s): two shapes would be far enough apart for one mask, and too near on any; raise it, or lower the other",
				r.length(l), r.length(d.AnyMask))
		case l.Value > 10*d.SameMask.Value || 10*l.Value < d.SameMask.Value:
			r.about(l, "%s and same_mask_spacing (%s) are more than ten times apart; is one of them in another unit?", r.length(l), r.length(d.SameMask))
		}
	}
	side, tipSide, tipTip := f.SideToSide.Or(d.SameMask), f.TipToSide.Or(d.SameMask), f.TipToTip.Or(d.SameMask)
	// That the ends of wires need more room than their sides is common practice.
	if tipSide.Value < side.Value {
		r.about(f.TipToSide.Or(f.SideToSide), "tip_to_side (%s) is less than side_to_side (%s): a tip may come nearer to a side than a side may; are the two exchanged?", r.length(tipSide), r.length(side))
	}
	if tipTip.Value < tipSide.Value {
		r.about(f.TipToTip.Or(f.TipToSide), "tip_to_tip (%s) is less than tip_to_side (%s): two tips may come nearer than a tip and a side; are the two exchanged?", r.length(tipTip), r.length(tipSide))
	}
	if w := f.TipWidth; w.Given && tipSide.Value == side.Value && tipTip.Value == side.Value {
		r.about(w, "tips and sides all keep %s, so it changes nothing; add tip_to_side or tip_to_tip, or leave it out", r.length(side))
	}
	if w := f.TipWidth; w.Given && w.Value > d.SameMask.Value {
		r.about(w, "%s is above same_mask_spacing (%s): where wires of that width are common, spacings are below the width of the wires; is one of them in another unit?",
			r.length(w), r.length(d.SameMask))
	}
	most := side
	for _, l := range []Length{tipSide, tipTip} {
		if l.Value > most.Value {
			most = l
		}
	}
	for i, w := range f.Wide {
		switch {
		case w.Spacing.Value <= min(side.Value, tipSide.Value, tipTip.Value):
			r.about(w.Spacing, "%s is no more than facing edges keep anyway, so the rule changes nothing; raise it, or leave the rule out", r.length(w.Spacing))
		case w.Spacing.Value < most.Value:
			r.about(w.Spacing, "%s is less than some narrow parts keep (%s): a part that is wide has no more room there than a narrow one; is that meant?", r.length(w.Spacing), r.length(most))
		}
		if f.TipWidth.Given && w.Width.Value <= f.TipWidth.Value {
			r.about(w.Width, "%s is no more than tip_width (%s): the end of a wire that has a tip can count as wide; is that meant?", r.length(w.Width), r.length(f.TipWidth))
		}
		for k, v := range f.Wide {
			if k != i && v.Width.Value <= w.Width.Value && v.Spacing.Value >= w.Spacing.Value && (v.Width.Value < w.Width.Value || v.Spacing.Value > w.Spacing.Value || k < i) {
				r.about(w.Spacing, "parts from %s on keep %s already (line %d), so the rule changes nothing; raise it, or leave the rule out", r.length(v.Width), r.length(v.Spacing), v.Spacing.line)
				break
			}
		}
	}
}
