package main

import (
	"maskpair/examples/scenario"
	"maskpair/gds"
)

// This file draws three rows of cells that share their rails. One database unit is a nanometre. Between two rails run five tracks;
// wires are 20 wide, 20 apart from track to track, and 40 from the rails, which is far enough.

// The layers of the rows: metal as drawn, and its masks.
var (
	metal  = gds.LayerType{Layer: 12, Type: 0}
	metalA = gds.LayerType{Layer: 12, Type: 1}
	metalB = gds.LayerType{Layer: 12, Type: 2}
)

// rowHeight is from the middle of a rail to the middle of the next.
const rowHeight = 300

// widths of the cells.
var widths = map[string]int32{"inverter": 200, "nand": 280, "xor": 560, "latch": 360}

// rows lists the cells of each row, from the left. Every other row is upside down.
var rows = [3][5]string{
	{"inverter", "nand", "xor", "latch", "inverter"},
	{"latch", "inverter", "xor", "nand", "inverter"},
	{"nand", "latch", "inverter", "inverter", "xor"},
}

// layout draws the rows; trimmed is the latch after the edit.
func layout(d *scenario.Drawer, trimmed bool) {
	// wire draws a wire on a track, counted from 1.
	wire := func(track, x1, x2 int32) { d.Rect(metal, x1, 20+40*track, x2, 40+40*track) }
	cell := func(name string, wires func(right int32)) {
		d.Cell(name, func() {
			d.Rect(metal, 0, -20, widths[name], 20)
			d.Rect(metal, 0, rowHeight-20, widths[name], rowHeight+20)
			wires(widths[name] - 40)
		})
	}
	cell("inverter", func(right int32) {
		for _, track := range []int32{1, 2, 4, 5} {
			wire(track, 40, right)
		}
	})
	cell("nand", func(right int32) {
		for track := int32(1); track <= 5; track++ {
			wire(track, 40, right)
		}
	})
	cell("xor", func(right int32) { // a wire steps from track 2 to track 3, over the end of another: three that are all near each other
		wire(1, 40, 140)
		d.Boundary(metal, []gds.Point{{X: 40, Y: 100}, {X: 440, Y: 100}, {X: 440, Y: 140}, {X: right, Y: 140},
			{X: right, Y: 160}, {X: 420, Y: 160}, {X: 420, Y: 120}, {X: 40, Y: 120}})
		wire(3, 40, 140)
		wire(4, 40, right)
		wire(5, 40, right)
	})
	cell("latch", func(right int32) { // two wires end to end, 52 apart, and after the edit 60
		trim := int32(0)
		if trimmed {
			trim = 4
		}
		wire(1, 40, right)
		wire(2, 40, right)
		wire(3, 40, 154-trim)
		wire(3, 206+trim, right)
		wire(4, 40, right)
		wire(5, 40, right)
	})
	d.Cell("rows", func() {
		for i, row := range rows {
			x := int32(0)
			for _, name := range row {
				if i%2 == 0 {
					d.Place(name, x, int32(i)*rowHeight)
				} else {
					d.SRef(name, gds.Strans{Mirror: true}, gds.Point{X: x, Y: int32(i+1) * rowHeight})
				}
				x += widths[name]
			}
		}
	})
}
