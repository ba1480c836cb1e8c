package decompose

import "maskpair/gds"

// Interest gives what the index of a stream must keep for a run by this deck. It needs no lengths, so it is known before the stream's
// database unit is.
func (d *Deck) Interest() (gds.Interest, error) {
	c, err := d.classes()
	if err != nil {
		return gds.Interest{}, err
	}
	return c.interest, nil
}

// BaselineInterest gives what the index of an earlier result must keep: the figures on the masks, with the same classes.
func (d *Deck) BaselineInterest() (gds.Interest, error) {
	c, err := d.classes()
	if err != nil {
		return gds.Interest{}, err
	}
	onMasks := gds.Interest{Figures: map[gds.LayerType]uint8{}}
	for i := range d.Layers {
		for _, m := range []gds.LayerType{d.Layers[i].MaskA, d.Layers[i].MaskB} {
			onMasks.Figures[m] = c.interest.Figures[m]
		}
	}
	return onMasks, nil
}

// classes deals the classes of the layers that the deck names.
func (d *Deck) classes() (*classes, error) {
	r := &Rules{Marks: d.Marks}
	for i := range d.Layers {
		l := &d.Layers[i]
		rules := LayerRules{Name: l.Name, Drawn: l.Drawn, MaskA: l.MaskA, MaskB: l.MaskB, AnchorA: l.AnchorA, AnchorB: l.AnchorB, AnchorLabel: l.AnchorLabel}
		if l.Stitch != nil {
			rules.Stitch = &StitchRules{KeepOut: l.Stitch.KeepOut}
		}
		r.Layers = append(r.Layers, rules)
	}
	return newClasses(r)
}
