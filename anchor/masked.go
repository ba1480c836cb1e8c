package anchor

import (
	"fmt"

	"maskpair/decompose"
)

// Sources make the orders of a run.
type Sources struct{}

// Probes gives the boxes that look for shapes of a deck layer.
func (s *Sources) Probes(layer int, v *decompose.View) ([]decompose.Probe, error) { return nil, nil }

// Orders gives the orders of a deck layer.
func (s *Sources) Orders(layer int, v *decompose.View) (*decompose.Orders, error) {
	o := &decompose.Orders{Describe: func(source int32) string {
		return fmt.Sprintf("the figures already masked at %s", v.Place(uint32(source)))
	}}
	alreadyMasked(o, v)
	return o, nil
}

// alreadyMasked holds shapes that arrive on a mask where they are, unless the deck says to do them anew.
func alreadyMasked(o *decompose.Orders, v *decompose.View) {
	if v.Rules().Redo {
		return
	}
	v.Masked(func(node uint32, mask decompose.Mask) {
		o.Anchors = append(o.Anchors, decompose.Anchor{Node: node, Mask: mask, Source: int32(node)})
	})
}
