package cli

import (
	"bufio"
	"io"
	"time"

	"maskpair/cli/picture"
	"maskpair/gds"
)

// This file is the demo layout. One database unit is a nanometre; wires are 20 wide and 20 apart. It has what usual layouts
// have: an array that alternates, rows of abutted cells in several orientations, shapes with nothing near, a matched pair to be
// anchored, and a place that two masks cannot do.

// The layers of the demo.
const (
	demoWire  = 10 // drawn on its datatype 0, mask A is 1, mask B is 2
	demoMark  = 90 // gaps that are unresolved
	demoLabel = 63 // names, to be read in the pictures
)

// The steps of the pictures in letters: a wire and its gap across, a wire or a gap along.
const demoStepX, demoStepY = 20, 40

func demoPicture(input io.Reader) (*picture.Scene, error) {
	return picture.Read(input, picture.Layers{
		Figures: map[gds.LayerType]picture.Role{
			{Layer: demoWire, Type: 0}: picture.Drawn,
			{Layer: demoWire, Type: 1}: picture.MaskA,
			{Layer: demoWire, Type: 2}: picture.MaskB,
			{Layer: demoMark, Type: 0}: picture.Mark,
		},
		Label: gds.LayerType{Layer: demoLabel},
	})
}

// writeDemoLayout writes the layout.
func writeDemoLayout(dst io.Writer) error {
	drawn := gds.LayerType{Layer: demoWire}
	buffered := bufio.NewWriter(dst)
	w := gds.NewWriter(buffered, gds.WriterOptions{LibName: "DEMO", Time: time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC)})
	draw := func(figures ...gds.Rect) {
		for _, r := range figures {
			w.Rectangle(drawn, r)
		}
	}
	cell := func(name string, figures ...gds.Rect) {
		w.BeginStructure(name)
		draw(figures...)
		w.EndStructure()
	}

	cell("line", gds.Rect{X1: 0, Y1: -10, X2: 20, Y2: 190})
	cell("gate", // the first two are rails, which abutted cells share
		gds.Rect{X1: 0, Y1: -10, X2: 200, Y2: 10},
		gds.Rect{X1: 0, Y1: 150, X2: 200, Y2: 170},
		gds.Rect{X1: 20, Y1: 30, X2: 140, Y2: 50},
		gds.Rect{X1: 20, Y1: 70, X2: 80, Y2: 90},
		gds.Rect{X1: 120, Y1: 70, X2: 180, Y2: 90},
		gds.Rect{X1: 20, Y1: 110, X2: 180, Y2: 130})
	cell("knot", // five wires in a ring, each 20 from the next: an odd cycle
		gds.Rect{X1: 0, Y1: -10, X2: 600, Y2: 10},
		gds.Rect{X1: 0, Y1: 30, X2: 100, Y2: 50},
		gds.Rect{X1: 60, Y1: 70, X2: 280, Y2: 90},
		gds.Rect{X1: 300, Y1: 70, X2: 540, Y2: 90},
		gds.Rect{X1: 500, Y1: 30, X2: 600, Y2: 50})
	cell("amplifier", // its outer wires are a matched pair, see the anchor file
		gds.Rect{X1: 0, Y1: -10, X2: 20, Y2: 190},
		gds.Rect{X1: 40, Y1: -10, X2: 60, Y2: 190},
		gds.Rect{X1: 80, Y1: -10, X2: 100, Y2: 190})

	w.BeginStructure("chip")
	draw(
		gds.Rect{X1: 720, Y1: -10, X2: 820, Y2: 90},
		gds.Rect{X1: 720, Y1: 150, X2: 820, Y2: 250},
		gds.Rect{X1: 720, Y1: 310, X2: 820, Y2: 410})
	as := gds.Strans{}
	halfTurn, mirrored := gds.Strans{Angle: 180}, gds.Strans{Mirror: true}
	w.ARef("line", as, 16, 2, gds.Point{}, gds.Point{X: 16 * 40}, gds.Point{Y: 2 * 240}) // the rows are 40 apart: far enough
	w.SRef("amplifier", as, gds.Point{X: 940})
	w.SRef("amplifier", gds.Strans{Angle: 90}, gds.Point{X: 1300, Y: -10})
	w.SRef("amplifier", mirrored, gds.Point{X: 940, Y: 420})
	for i := range int32(6) {
		x := 200 * i
		if i%2 == 0 { // the upper row is the lower one upside down
			w.SRef("gate", as, gds.Point{X: x, Y: 560})
			w.SRef("gate", mirrored, gds.Point{X: x, Y: 880})
		} else { // left and right exchanged
			w.SRef("gate", gds.Strans{Mirror: true, Angle: 180}, gds.Point{X: x + 200, Y: 560})
			w.SRef("gate", halfTurn, gds.Point{X: x + 200, Y: 880})
		}
	}
	w.SRef("knot", as, gds.Point{Y: 1040})
	w.SRef("knot", halfTurn, gds.Point{X: 1300, Y: 1120})
	label := func(x, y int32, text string) { w.Text(gds.LayerType{Layer: demoLabel}, gds.Point{X: x, Y: y}, text) }
	label(0, 440, "lines: 16 x 2 in an array")
	label(720, 440, "pads")
	label(940, 440, "amplifiers, three placements")
	label(0, 920, "gates: two rows that share a rail")
	label(0, 1160, "knot")
	label(700, 1160, "the same knot, turned")
	w.EndStructure()
	if err := w.Close(); err != nil {
		return err
	}
	return buffered.Flush()
}
