package orders

import (
	"math/rand/v2"
	"slices"

	"maskpair/gds"
	"maskpair/testdata/twin"
)

// This file edits layouts.

// Edit changes a layout: figures of the layers are moved, deleted, added and stretched, references moved, deleted and swapped. It gives
// the number of edits that were made.
func Edit(l *twin.Layout, layers []Layer, edits int, r *rand.Rand) int {
	e := &editor{layout: l, r: r, spacing: map[gds.LayerType]int32{}}
	for _, d := range layers {
		for _, k := range append(slices.Clone(d.Drawn), d.Masks[:]...) {
			e.spacing[k] = int32(d.Spacing)
		}
	}
	made := 0
	for range 20 * edits {
		if made == edits {
			break
		}
		if e.once() {
			made++
		}
	}
	return made
}

type editor struct {
	layout  *twin.Layout
	r       *rand.Rand
	spacing map[gds.LayerType]int32
}

func (e *editor) once() bool {
	c := &e.layout.Cells[e.r.IntN(len(e.layout.Cells))]
	if len(c.Elements) == 0 {
		return false
	}
	i := e.r.IntN(len(c.Elements))
	el := c.Elements[i]
	el.Points = slices.Clone(el.Points)
	switch {
	case el.Kind <= twin.Path && e.spacing[el.Layer] > 0:
		step := e.spacing[el.Layer]
		switch e.r.IntN(4) {
		case 0: // moved
			e.shift(&el, step)
			c.Elements[i] = el
		case 1: // deleted
			c.Elements = slices.Delete(c.Elements, i, i+1)
		case 2: // added
			e.shift(&el, 2*step)
			c.Elements = slices.Insert(c.Elements, e.r.IntN(len(c.Elements)+1), el)
		default: // stretched: a side of a rectangle, or all of it
			if el.Kind != twin.Boundary || len(el.Points) != 4 {
				e.shift(&el, step)
			} else {
				e.stretch(&el, step)
			}
			c.Elements[i] = el
		}
		return true
	case el.Kind >= twin.Reference:
		switch e.r.IntN(4) {
		case 0: // moved
			step := int32(10)
			for _, s := range e.spacing {
				step = max(step, s)
			}
			e.shift(&el, step)
			c.Elements[i] = el
		case 1:
			if el.Kind == twin.Array {
				return false
			}
			c.Elements = slices.Delete(c.Elements, i, i+1)
		default: // swapped for another cell that is placed beside it
			var others []string
			for k := range c.Elements {
				if o := &c.Elements[k]; o.Kind >= twin.Reference && o.Text != el.Text {
					others = append(others, o.Text)
				}
			}
			if others == nil {
				return false
			}
			el.Text = others[e.r.IntN(len(others))]
			c.Elements[i] = el
		}
		return true
	}
	return false
}

// shift moves an element by at most step either way.
func (e *editor) shift(el *twin.Element, step int32) {
	dx, dy := e.r.Int32N(2*step+1)-step, e.r.Int32N(2*step+1)-step
	if e.r.IntN(2) == 0 {
		dx = 0
	}
	for k := range el.Points {
		el.Points[k].X += dx
		el.Points[k].Y += dy
	}
}

// stretch moves the points of one side.
func (e *editor) stretch(el *twin.Element, step int32) {
	by := 1 + e.r.Int32N(step)
	low := el.Points[0]
	for _, p := range el.Points {
		low.X, low.Y = min(low.X, p.X), min(low.Y, p.Y)
	}
	sideways := e.r.IntN(2) == 0
	for k := range el.Points {
		p := &el.Points[k]
		if sideways && p.X > low.X {
			p.X += by
		}
		if !sideways && p.Y > low.Y {
			p.Y += by
		}
	}
}
