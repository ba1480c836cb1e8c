package twin

import (
	"bytes"

	"maskpair/gds"
)

// This file writes a layout as a stream.

// Bytes gives the layout as a stream. A layout that no stream can hold (a text of more than a record) is a fault of the test
// that made it, and panics.
func (l *Layout) Bytes() []byte {
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{LibName: "TWIN", DBU: l.DBU})
	for _, c := range l.Cells {
		w.BeginStructure(c.Name)
		for i := range c.Elements {
			c.Elements[i].write(w)
		}
		w.EndStructure()
	}
	if err := w.Close(); err != nil {
		panic(err)
	}
	return out.Bytes()
}

func (e *Element) write(w *gds.Writer) {
	for _, p := range e.Properties {
		w.Property(p.Attribute, p.Value)
	}
	switch e.Kind {
	case Boundary:
		w.Boundary(e.Layer, e.Points)
	case Path:
		w.Path(e.Layer, e.Style, e.Points)
	case Box:
		w.Box(e.Layer, gds.Rect{X1: e.Points[0].X, Y1: e.Points[0].Y, X2: e.Points[1].X, Y2: e.Points[1].Y})
	case Node:
		w.Node(e.Layer, e.Points)
	case Text:
		w.Text(e.Layer, e.Points[0], e.Text)
	case Reference:
		w.SRef(e.Text, e.Strans, e.Points[0])
	case Array:
		w.ARef(e.Text, e.Strans, uint16(e.Columns), uint16(e.Rows), e.Points[0], e.Points[1], e.Points[2])
	}
}
