package verify

import (
	"maskpair/decompose"
	"maskpair/gds"
)

// This file deals the classes under which package gds keeps figures and labels: one for each layer of the stream that the
// deck names.

// mostClasses is the number of layers that a deck may name; a class is a byte, and 0 means none.
const mostClasses = 255

// tag is what a flat figure is to its deck layer.
type tag uint8

const (
	tagNone  tag = iota
	tagDrawn     // on a drawn layer
	tagA         // on a mask
	tagB
	tagMarkA // a marker
	tagMarkB
	tagProbe // a place of the anchor file, or a label
)

// mask says whether the tag is that of a mask.
func (t tag) mask() bool { return t == tagA || t == tagB }

// maskName gives "A" or "B".
func (t tag) maskName() string {
	if t == tagB {
		return "B"
	}
	return "A"
}

func tagOf(m decompose.Mask) tag {
	if m == decompose.B {
		return tagB
	}
	return tagA
}

// roles are the classes of a deck.
type roles struct {
	interest gds.Interest
	figures  []gds.LayerType // by class, from 1
	labels   []gds.LayerType // by class, from 1
}

// newRoles numbers the layers of a deck; nil where they are too many.
func newRoles(d *decompose.Deck) *roles {
	r := &roles{figures: make([]gds.LayerType, 1), labels: make([]gds.LayerType, 1),
		interest: gds.Interest{Figures: map[gds.LayerType]uint8{}, Labels: map[gds.LayerType]uint8{}}}
	for i := range d.Layers {
		l := &d.Layers[i]
		r.figure(l.Drawn...)
		r.figure(l.MaskA, l.MaskB)
		for _, marker := range []*gds.LayerType{l.AnchorA, l.AnchorB} {
			if marker != nil {
				r.figure(*marker)
			}
		}
		if l.AnchorLabel != nil {
			if _, ok := r.interest.Labels[*l.AnchorLabel]; !ok {
				r.labels = append(r.labels, *l.AnchorLabel)
				r.interest.Labels[*l.AnchorLabel] = uint8(len(r.labels) - 1)
			}
		}
		if l.Stitch != nil {
			r.figure(l.Stitch.KeepOut...)
		}
	}
	if len(r.figures) > mostClasses+1 || len(r.labels) > mostClasses+1 {
		return nil
	}
	return r
}

func (r *roles) figure(layers ...gds.LayerType) {
	for _, l := range layers {
		if _, ok := r.interest.Figures[l]; !ok {
			r.figures = append(r.figures, l)
			r.interest.Figures[l] = uint8(len(r.figures) - 1)
		}
	}
}

// tags gives the tag that figures of each class have for a deck layer.
func (r *roles) tags(l *decompose.LayerRules) (tags [256]tag) {
	set := func(layer *gds.LayerType, t tag) {
		if layer != nil {
			tags[r.interest.Figures[*layer]] = t
		}
	}
	set(l.AnchorA, tagMarkA)
	set(l.AnchorB, tagMarkB)
	for i := range l.Drawn {
		set(&l.Drawn[i], tagDrawn)
	}
	set(&l.MaskA, tagA)
	set(&l.MaskB, tagB)
	return tags
}

// keepOut gives the classes whose figures no overlap of a deck layer may touch. In a masked stream, the figures of a drawn
// layer are on the masks of its deck layer.
func (r *roles) keepOut(rules *decompose.Rules, l *decompose.LayerRules, masked bool) (tags [256]tag) {
	for _, k := range l.Stitch.KeepOut {
		tags[r.interest.Figures[k]] = tagMarkA
		for i := range rules.Layers {
			for _, d := range rules.Layers[i].Drawn {
				if d == k && masked {
					tags[r.interest.Figures[rules.Layers[i].MaskA]] = tagMarkA
					tags[r.interest.Figures[rules.Layers[i].MaskB]] = tagMarkA
				}
			}
		}
	}
	return tags
}
