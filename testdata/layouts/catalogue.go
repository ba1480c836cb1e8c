package layouts

// This file lists the layouts. The plain ones are what a chip is made of; the hard ones have each one thing that a careless
// search or memory plan does not survive.

// Entry is a layout that can be drawn.
type Entry struct {
	Name string
	Says string // what it is
	Hard bool

	spacing int32 // 0: plainSpacing
	markers bool
	draw    func(s *sheet, figures int64)
}

// Catalogue gives all layouts, plain ones first.
func Catalogue() []Entry {
	return []Entry{
		{Name: "flat", Says: "one structure: wires in tracks, arrays of contacts, rails as long as the chip", draw: drawFlat},
		{Name: "cells", Says: "rows of abutted cells in all orientations, in blocks, in arrays; many figures are drawn twice", draw: drawCells},
		{Name: "strips", Says: "strips of contacts that are near on the diagonal too: odd cycles of small treewidth, no two alike", draw: drawStrips},
		{Name: "sparse", Says: "a file of which the drawn layer is 1 %: about 6 kB a drawn figure", draw: drawSparse},
		{Name: "rail", Says: "one rail as long as the chip, near a contact at every step", Hard: true, draw: drawRail},
		{Name: "nested", Says: "L shapes one in the other: all bounding boxes overlap", Hard: true, draw: drawNested},
		{Name: "snake", Says: "all figures make one shape", Hard: true, draw: drawSnake},
		{Name: "grid", Says: "all shapes are one component", Hard: true, draw: drawGrid},
		{Name: "combs", Says: "polygons of 65,532-byte XY records, two and two interleaved; counted by teeth, 2046 to a polygon", Hard: true, draw: drawCombs},
		{Name: "ring", Says: "three turns of an any-angle ring among wires", Hard: true, draw: drawRing},
		{Name: "tops", Says: "a top structure for every ten figures", Hard: true, draw: drawTops},
		{Name: "deep", Says: "a hierarchy 1,000 deep", Hard: true, draw: drawDeep},
		{Name: "wide", Says: "contacts under a spacing of 50 of their widths", Hard: true, spacing: 50 * narrow, draw: drawWide},
		{Name: "marked", Says: "wires in tracks, each under a marker that anchors it", Hard: true, markers: true, draw: drawMarked},
	}
}
