package page

import (
	"bytes"

	"maskpair/gds"
)

// This file draws what the page is to show: an invented layout with each kind of thing that a report can name.

// scene is a layout with its deck, its anchors, and the layout before an edit.
type scene struct {
	layout, before []byte
	deck, anchors  string
}

// hostile is a cell name that would run, were it put into the page as it is.
const hostile = `<img src=x onerror="document.title='broken'">`

const sceneDeck = `unit = "nm"
[[layer]]
name = "wire"
drawn = "10/0"
mask_a = "10/1"
mask_b = "10/2"
same_mask_spacing = 40
any_mask_spacing = 12
[layer.stitch]
min_overlap = 20
min_piece = 40
[[layer]]
name = "via & <pad>"
drawn = "20/0"
mask_a = "20/1"
mask_b = "20/2"
same_mask_spacing = 50
`

const sceneAnchors = `[[anchor]]
layer = "wire"
mask = "A"
at = [2010, 100]
name = "left <end>"
[[anchor]]
layer = "wire"
mask = "A"
at = [2050, 100]
name = "right & end"
[[waiver]]
layer = "via & <pad>"
at = [[3010, 10], [3060, 10]]
reason = "measured on \"silicon\" & <accepted>"
`

// makeScene draws the scene. Layer wire has one kind of odd cycle three times, which a cut resolves; one with slanted and bent shapes;
// and orders that clash. Layer via has triangles: two to be mended, one accepted. One pair is too near on any masks, one
// shape to itself. Since the edit a shape more makes others move.
func makeScene() (*scene, error) {
	draw := func(edited bool) ([]byte, error) {
		var out bytes.Buffer
		w := gds.NewWriter(&out, gds.WriterOptions{})
		wire, via := gds.LayerType{Layer: 10}, gds.LayerType{Layer: 20}
		box := func(l gds.LayerType, x1, y1, x2, y2 int32) { w.Rectangle(l, gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2}) }
		w.BeginStructure("ring")
		box(wire, 0, 0, 600, 20)
		box(wire, 0, 40, 100, 60)
		box(wire, 60, 80, 290, 100)
		box(wire, 310, 80, 540, 100)
		box(wire, 500, 40, 600, 60)
		w.EndStructure()
		w.BeginStructure(hostile)
		w.Boundary(wire, []gds.Point{{X: 0, Y: 0}, {X: 200, Y: 0}, {X: 200, Y: 20}, {X: 20, Y: 20}, {X: 20, Y: 200}, {X: 0, Y: 200}})
		w.Boundary(wire, []gds.Point{{X: 45, Y: 190}, {X: 65, Y: 190}, {X: 205, Y: 50}, {X: 205, Y: 22 + 23}, {X: 190, Y: 45}})
		w.Boundary(wire, []gds.Point{{X: 75, Y: 45}, {X: 150, Y: 45}, {X: 75, Y: 120}})
		w.EndStructure()
		w.BeginStructure("pads")
		box(via, 0, 0, 30, 30)
		box(via, 60, 0, 90, 30)
		box(via, 0, 60, 90, 90)
		w.EndStructure()
		w.BeginStructure("block")
		w.SRef("ring", gds.Strans{}, gds.Point{X: 0, Y: 1000})
		w.SRef("ring", gds.Strans{Angle: 90}, gds.Point{X: 1200, Y: 1000})
		w.SRef("ring", gds.Strans{Mirror: true}, gds.Point{X: 1400, Y: 2000})
		w.SRef(hostile, gds.Strans{}, gds.Point{X: 0, Y: 2200})
		for x := range int32(3) { // the outer two are anchored alike: their neighbours cannot be on a mask
			box(wire, 2000+40*x, 0, 2020+40*x, 300)
		}
		box(wire, 2140, 0, 2160, 300)
		w.SRef("pads", gds.Strans{}, gds.Point{X: 3000, Y: 0})
		w.SRef("pads", gds.Strans{}, gds.Point{X: 3000, Y: 1000})
		w.SRef("pads", gds.Strans{Angle: 180}, gds.Point{X: 3000, Y: 2000})
		box(wire, 0, 3000, 20, 3300)
		box(wire, 30, 3000, 50, 3300) // 10 apart
		box(wire, 4000, 0, 4300, 20)  // a U, whose arms are 20 apart
		box(wire, 4000, 0, 4020, 60)
		box(wire, 4000, 40, 4300, 60)
		bars := func(from, n int32) {
			for x := range n {
				box(wire, from+40*x, 4000, from+40*x+20, 4300)
			}
		}
		bars(1000, 6)
		bars(720, 2)
		bars(1320, 2)
		if edited { // one bar joins what is to the right, two what is to the left: one of the three parts has to move
			bars(1240, 2)
			bars(800, 5)
		}
		w.EndStructure()
		err := w.Close()
		return out.Bytes(), err
	}
	before, err := draw(false)
	if err != nil {
		return nil, err
	}
	layout, err := draw(true)
	return &scene{layout, before, sceneDeck, sceneAnchors}, err
}
