package main

import (
	"bytes"
	"time"

	"maskpair/gds"
)

// This file draws the block, round by round. One database unit is a nanometre; wires are 20 wide and 20 apart.

// The layers of the block: wires as drawn, and those of the neighbouring block, which are on masks already.
var (
	wire  = gds.LayerType{Layer: 10, Type: 0}
	wireA = gds.LayerType{Layer: 10, Type: 1}
	wireB = gds.LayerType{Layer: 10, Type: 2}
)

// Rounds is how often the block is drawn: once, and after three edits.
const rounds = 4

// layout gives the block of a round, from 0 on.
func layout(round int) ([]byte, error) {
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{LibName: "MIXED", Time: time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC)})
	d := &drawer{w}
	lane, clock := "lane", "clock"
	if round >= 3 {
		lane = "bus_wire" // renamed, and the clock is drawn where it stands
	}
	d.cell("mirror", func() {
		for x := int32(0); x <= 160; x += 40 {
			d.rect(wire, x, 0, x+20, 300)
		}
		d.rect(wire, 0, 340, 60, 400)
		d.rect(wire, 120, 340, 180, 400)
	})
	d.cell(lane, func() { d.rect(wire, 0, 0, 20, 600) })
	if round < 3 {
		d.cell(clock, func() { d.clock(0, 0) })
	}
	d.cell("neighbour", func() {
		d.rect(wireA, 0, 0, 20, 600)
		d.rect(wireB, 40, 0, 60, 600)
		d.rect(wireA, 80, 0, 100, 600)
	})
	d.cell("mixed", func() {
		w.SRef("neighbour", gds.Strans{}, gds.Point{})
		w.ARef(lane, gds.Strans{}, 8, 1, gds.Point{X: 120}, gds.Point{X: 120 + 8*40}, gds.Point{X: 120, Y: 100})
		if round < 3 {
			w.ARef(lane, gds.Strans{}, 6, 1, gds.Point{X: 520}, gds.Point{X: 520 + 6*40}, gds.Point{X: 520, Y: 100})
		} else {
			for x := int32(520); x <= 720; x += 40 {
				d.rect(wire, x, 0, x+20, 600)
			}
		}
		w.SRef("mirror", gds.Strans{}, gds.Point{Y: 700})
		second := gds.Point{X: 400, Y: 1100}
		if round >= 2 {
			second.X += 4
		}
		w.SRef("mirror", gds.Strans{Mirror: true}, second)
		w.SRef("mirror", gds.Strans{Angle: 90}, gds.Point{X: 1040, Y: 700})
		if round < 3 {
			w.SRef(clock, gds.Strans{}, gds.Point{X: 240, Y: 700})
		} else {
			d.clock(240, 700)
		}
		if round >= 1 { // two lanes more close the gap between the buses
			w.SRef(lane, gds.Strans{}, gds.Point{X: 440})
			w.SRef(lane, gds.Strans{}, gds.Point{X: 480})
		}
		if round >= 2 { // a guard between the first mirror and the clock
			d.rect(wire, 200, 700, 220, 1000)
		}
	})
	err := w.Close()
	return out.Bytes(), err
}

type drawer struct{ *gds.Writer }

func (d *drawer) cell(name string, draw func()) {
	d.BeginStructure(name)
	draw()
	d.EndStructure()
}

func (d *drawer) rect(on gds.LayerType, x1, y1, x2, y2 int32) {
	d.Rectangle(on, gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2})
}

func (d *drawer) clock(x, y int32) {
	for k := int32(0); k < 3; k++ {
		d.rect(wire, x+40*k, y, x+40*k+20, y+300)
	}
}
