package main

import (
	"maskpair/examples/scenario"
	"maskpair/gds"
)

// This file draws the block, round by round. One database unit is a nanometre; wires are 20 wide and 20 apart.

// The layers of the block: wires as drawn, and those of the neighbouring block, which are on masks already.
var (
	wire  = gds.LayerType{Layer: 10, Type: 0}
	wireA = gds.LayerType{Layer: 10, Type: 1}
	wireB = gds.LayerType{Layer: 10, Type: 2}
)

// layout draws the block of a round, from 0 on.
func layout(d *scenario.Drawer, round int) {
	lane, clock := "lane", "clock"
	if round >= 3 {
		lane = "bus_wire" // renamed, and the clock is drawn where it stands
	}
	d.Cell("mirror", func() {
		for x := int32(0); x <= 160; x += 40 {
			d.Rect(wire, x, 0, x+20, 300)
		}
		d.Rect(wire, 0, 340, 60, 400)
		d.Rect(wire, 120, 340, 180, 400)
	})
	d.Cell(lane, func() { d.Rect(wire, 0, 0, 20, 600) })
	if round < 3 {
		d.Cell(clock, func() { clockWires(d, 0, 0) })
	}
	d.Cell("neighbour", func() {
		d.Rect(wireA, 0, 0, 20, 600)
		d.Rect(wireB, 40, 0, 60, 600)
		d.Rect(wireA, 80, 0, 100, 600)
	})
	d.Cell("mixed", func() {
		d.Place("neighbour", 0, 0)
		d.ARef(lane, gds.Strans{}, 8, 1, gds.Point{X: 120}, gds.Point{X: 120 + 8*40}, gds.Point{X: 120, Y: 100})
		if round < 3 {
			d.ARef(lane, gds.Strans{}, 6, 1, gds.Point{X: 520}, gds.Point{X: 520 + 6*40}, gds.Point{X: 520, Y: 100})
		} else {
			for x := int32(520); x <= 720; x += 40 {
				d.Rect(wire, x, 0, x+20, 600)
			}
		}
		d.Place("mirror", 0, 700)
		second := gds.Point{X: 400, Y: 1100}
		if round >= 2 {
			second.X += 4
		}
		d.SRef("mirror", gds.Strans{Mirror: true}, second)
		d.SRef("mirror", gds.Strans{Angle: 90}, gds.Point{X: 1040, Y: 700})
		if round < 3 {
			d.Place(clock, 240, 700)
		} else {
			clockWires(d, 240, 700)
		}
		if round >= 1 { // two lanes more close the gap between the buses
			d.Place(lane, 440, 0)
			d.Place(lane, 480, 0)
		}
		if round >= 2 { // a guard between the first mirror and the clock
			d.Rect(wire, 200, 700, 220, 1000)
		}
	})
}

// clockWires draws the three wires of the clock.
func clockWires(d *scenario.Drawer, x, y int32) {
	for k := int32(0); k < 3; k++ {
		d.Rect(wire, x+40*k, y, x+40*k+20, y+300)
	}
}
