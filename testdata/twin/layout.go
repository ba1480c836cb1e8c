package twin

import (
	"fmt"
	"slices"
	"strings"

	"maskpair/gds"
)

// This file is the layout as a value.

// Kind is the kind of an element.
type Kind uint8

// The kinds of elements.
const (
	Boundary Kind = iota
	Path
	Box
	Node
	Text
	Reference
	Array
)

// String gives the name of the record that begins the element.
func (k Kind) String() string {
	return [...]string{"BOUNDARY", "PATH", "BOX", "NODE", "TEXT", "SREF", "AREF"}[k]
}

// Property is a PROPATTR with its PROPVALUE.
type Property struct {
	Attribute int16
	Value     string
}

// Element is one element of a structure. Of its fields those count that its kind has.
type Element struct {
	Kind          Kind
	Layer         gds.LayerType
	Points        []gds.Point // of a boundary without the closing one; of an array: place, end of columns, end of rows
	Style         gds.PathStyle
	Text          string // of a TEXT; of references the name of the structure
	Strans        gds.Strans
	Columns, Rows int
	Properties    []Property
	Rest          string // what a stream that was read says beyond the above, record by record, properties included
}

// Cell is a structure.
type Cell struct {
	Name     string
	Elements []Element
}

// Layout is a whole stream.
type Layout struct {
	DBU   float64 // size of a database unit in metres; 0: 1e-9
	Cells []Cell
}

// Clone gives a layout that shares nothing that a change of elements or cells would touch.
func (l *Layout) Clone() *Layout {
	c := &Layout{DBU: l.DBU, Cells: slices.Clone(l.Cells)}
	for i := range c.Cells {
		c.Cells[i].Elements = slices.Clone(c.Cells[i].Elements)
	}
	return c
}

// cell gives the cell of a name, or nil.
func (l *Layout) cell(name string) *Cell {
	for i := range l.Cells {
		if l.Cells[i].Name == name {
			return &l.Cells[i]
		}
	}
	return nil
}

// Tops gives the names of the cells that nothing places, in file order.
func (l *Layout) Tops() []string {
	placed := map[string]bool{}
	for _, c := range l.Cells {
		for _, e := range c.Elements {
			if e.Kind >= Reference {
				placed[e.Text] = true
			}
		}
	}
	var tops []string
	for _, c := range l.Cells {
		if !placed[c.Name] {
			tops = append(tops, c.Name)
		}
	}
	return tops
}

// String gives the layout in a form to be read in a failure.
func (l *Layout) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "database unit %g m\n", l.DBU)
	for _, c := range l.Cells {
		fmt.Fprintf(&b, "%s:\n", c.Name)
		for _, e := range c.Elements {
			fmt.Fprintf(&b, "  %v", e.Kind)
			switch e.Kind {
			case Reference, Array:
				fmt.Fprintf(&b, " %s", e.Text)
				if e.Strans != (gds.Strans{}) {
					fmt.Fprintf(&b, " %+v", e.Strans)
				}
				if e.Kind == Array {
					fmt.Fprintf(&b, " %dx%d", e.Columns, e.Rows)
				}
			default:
				fmt.Fprintf(&b, " %d/%d", e.Layer.Layer, e.Layer.Type)
			}
			if e.Kind == Path {
				fmt.Fprintf(&b, " %+v", e.Style)
			}
			fmt.Fprintf(&b, " %v", e.Points)
			if e.Kind == Text {
				fmt.Fprintf(&b, " %q", e.Text)
			}
			if len(e.Properties) > 0 {
				fmt.Fprintf(&b, " %v", e.Properties)
			}
			b.WriteByte('\n')
		}
	}
	return b.String()
}
