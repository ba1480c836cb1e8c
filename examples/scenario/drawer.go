package scenario

import (
	"bytes"
	"strings"
	"time"

	"maskpair/gds"
)

// This file draws layouts. One database unit is a nanometre.

// Drawer draws a layout cell by cell.
type Drawer struct{ *gds.Writer }

// draw gives the stream of a layout.
func draw(name string, layout func(*Drawer)) ([]byte, error) {
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{LibName: strings.ToUpper(name), Time: time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC)})
	layout(&Drawer{w})
	err := w.Close()
	return out.Bytes(), err
}

// Cell draws a structure.
func (d *Drawer) Cell(name string, draw func()) {
	d.BeginStructure(name)
	draw()
	d.EndStructure()
}

// Rect draws a rectangle.
func (d *Drawer) Rect(on gds.LayerType, x1, y1, x2, y2 int32) {
	d.Rectangle(on, gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2})
}

// Place places a structure upright.
func (d *Drawer) Place(name string, x, y int32) { d.SRef(name, gds.Strans{}, gds.Point{X: x, Y: y}) }
