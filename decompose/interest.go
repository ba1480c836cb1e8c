package decompose

import "maskpair/gds"

// Interest gives what the index of a stream must keep for a run by this deck. It needs no lengths, so it is known before the stream's
// database unit is.
func (d *Deck) Interest() (gds.Interest, error) {
	r := &Rules{Marks: d.Marks}
	for i := range d.Layers {
		l := &d.Layers[i]
		rules := LayerRules{Name: l.Name, Drawn: l.Drawn, MaskA: l.MaskA, MaskB: l.MaskB, AnchorA: l.AnchorA, AnchorB: l.AnchorB, AnchorLabel: l.AnchorLabel}
		if l.Stitch != nil {
			rules.Stitch = &StitchRules{KeepOut: l.Stitch.KeepOut}
		}
		r.Layers = append(r.Layers, rules)
	}
	c, err := newClasses(r)
	if err != nil {
		return gds.Interest{}, err
	}
	return c.interest, nil
}
