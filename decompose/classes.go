package decompose

import (
	"fmt"

	"maskpair/gds"
)

// This file says which layers of the stream matter to a run. Each of them has a class (a small number that the index keeps
// with every element), and each class has one role or several: a keep_out layer may be another deck layer's drawn layer.

// role is what a class means to one deck layer.
type role uint8

const (
	roleDrawn role = iota
	roleMaskA
	roleMaskB
	roleMarkerA
	roleMarkerB
	roleLabel
	roleKeepOut
)

// classes deals the classes of a run.
type classes struct {
	interest gds.Interest
	layers   []gds.LayerType // by class; entry 0 is not used
	roles    [][]classRole   // by class; none for a marks layer
	marks    []bool          // by class: figures here are marks of an earlier run
}

type classRole struct {
	layer int // deck layer
	role  role
}

// newClasses numbers the layers that the rules name, in the order in which the deck names them.
func newClasses(rules *Rules) (*classes, error) {
	c := &classes{
		interest: gds.Interest{Figures: map[gds.LayerType]uint8{}, Labels: map[gds.LayerType]uint8{}},
		layers:   make([]gds.LayerType, 1),
		roles:    make([][]classRole, 1),
		marks:    make([]bool, 1),
	}
	for i := range rules.Layers {
		l := &rules.Layers[i]
		for _, d := range l.Drawn {
			c.add(c.interest.Figures, d, i, roleDrawn)
		}
		c.add(c.interest.Figures, l.MaskA, i, roleMaskA)
		c.add(c.interest.Figures, l.MaskB, i, roleMaskB)
		if l.AnchorA != nil {
			c.add(c.interest.Figures, *l.AnchorA, i, roleMarkerA)
		}
		if l.AnchorB != nil {
			c.add(c.interest.Figures, *l.AnchorB, i, roleMarkerB)
		}
		if l.AnchorLabel != nil {
			c.add(c.interest.Labels, *l.AnchorLabel, i, roleLabel)
		}
		if l.Stitch != nil {
			for _, k := range l.Stitch.KeepOut {
				c.add(c.interest.Figures, k, i, roleKeepOut)
			}
		}
	}
	for _, m := range rules.Marks.layers() {
		if k := c.class(c.interest.Figures, m); k != 0 {
			c.marks[k] = true
		}
	}
	if len(c.layers) > 255 {
		return nil, &LimitError{Msg: fmt.Sprintf("the deck names %d layers; at most 254 can be handled in one run", len(c.layers)-1), Remedy: "split the deck"}
	}
	return c, nil
}

// class gives the class of a layer, dealing a new one where it has none.
func (c *classes) class(table map[gds.LayerType]uint8, l gds.LayerType) uint8 {
	if k, ok := table[l]; ok {
		return k
	}
	k := len(c.layers)
	c.layers = append(c.layers, l)
	c.roles = append(c.roles, nil)
	c.marks = append(c.marks, false)
	if k < 256 {
		table[l] = uint8(k)
	}
	return uint8(k)
}

func (c *classes) add(table map[gds.LayerType]uint8, l gds.LayerType, layer int, r role) {
	k := c.class(table, l)
	c.roles[k] = append(c.roles[k], classRole{layer, r})
}

// layers lists the marks layers that the deck names.
func (m *MarkRules) layers() []gds.LayerType {
	var out []gds.LayerType
	for _, l := range []*gds.LayerType{m.Unresolved, m.Cycle, m.Stitch, m.Moved, m.AnyMask} {
		if l != nil {
			out = append(out, *l)
		}
	}
	return out
}

// selection is a set of classes with the tag that each gives its figures.
type selection struct {
	tag [256]tag // by class
}

// tag says what a flat figure is to its deck layer; none means that the figure is not selected.
type tag uint8

const (
	none tag = iota
	drawn
	onA
	onB
)

// select gives the figures of deck layer i that become shapes: drawn ones and those already on a mask.
func (c *classes) selectLayer(i int) *selection {
	s := new(selection)
	for k, rs := range c.roles {
		for _, r := range rs {
			if r.layer != i {
				continue
			}
			switch r.role {
			case roleDrawn:
				s.tag[k] = drawn
			case roleMaskA:
				s.tag[k] = onA
			case roleMaskB:
				s.tag[k] = onB
			}
		}
	}
	return s
}

// selectMarkers gives the figures of the marker layers of deck layer i, with the tags of the masks that they stand for; nil where it
// has none.
func (c *classes) selectMarkers(i int) *selection {
	a, anyA := c.selectRole(i, roleMarkerA, onA)
	b, anyB := c.selectRole(i, roleMarkerB, onB)
	if !anyA && !anyB {
		return nil
	}
	for k, t := range b.tag {
		if t != none {
			a.tag[k] = t
		}
	}
	return a
}

// selectRole gives the figures or labels of deck layer i in one role, all with the same tag.
func (c *classes) selectRole(i int, want role, t tag) (*selection, bool) {
	s, any := new(selection), false
	for k, rs := range c.roles {
		for _, r := range rs {
			if r.layer == i && r.role == want {
				s.tag[k], any = t, true
			}
		}
	}
	return s, any
}
