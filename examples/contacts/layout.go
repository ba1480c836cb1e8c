package main

import (
	"maskpair/examples/scenario"
	"maskpair/gds"
)

// This file draws the contacts. One database unit is a nanometre; contacts are 20 wide, with a pitch of 50 in both directions: the gap to
// the next is 30, and to the diagonal one sqrt(30*30 + 30*30) = 42.4.

// The layers: contacts as drawn, and their masks.
var (
	contact  = gds.LayerType{Layer: 14, Type: 0}
	contactA = gds.LayerType{Layer: 14, Type: 1}
	contactB = gds.LayerType{Layer: 14, Type: 2}
)

const pitch = 50

// layout draws a matched pair of two halves, a ring around it, and an array beside it. With a dummy column the halves are a pitch
// farther apart, with contacts between them.
func layout(d *scenario.Drawer, dummy bool) {
	array := func(columns, rows, x, y int32) {
		at := gds.Point{X: x, Y: y}
		d.ARef("contact", gds.Strans{}, uint16(columns), uint16(rows), at, gds.Point{X: x + columns*pitch, Y: y}, gds.Point{X: x, Y: y + rows*pitch})
	}
	d.Cell("contact", func() { d.Rect(contact, 0, 0, 20, 20) })
	d.Cell("half", func() { array(3, 4, 0, 0) })
	d.Cell("block", func() {
		d.Place("half", 0, 0)
		if dummy {
			array(1, 4, 3*pitch, 0)
			d.Place("half", 4*pitch, 0)
		} else {
			d.Place("half", 3*pitch, 0)
		}
		array(11, 1, -2*pitch, -2*pitch) // the ring: 11 by 8 on the outside
		array(11, 1, -2*pitch, 5*pitch)
		array(1, 6, -2*pitch, -1*pitch)
		array(1, 6, 8*pitch, -1*pitch)
		array(8, 8, 10*pitch, -2*pitch)
	})
}
