package layouts

import (
	"math"

	"maskpair/gds"
)

// This file draws a file in which the drawn layer is one figure in a hundred: what the rest of a chip is to a program that works
// on one layer. The other elements are of all kinds, on layers that no deck names.

func drawSparse(s *sheet, figures int64) {
	perTrack := int64(math.Ceil(math.Sqrt(float64(figures))))
	width := int32(float64(perTrack) / wiresPerUnit)
	s.begin("chip")
	var before []span
	for y := int32(0); s.open.figures < figures; y += trackPitch {
		spans := randomTrack(s.rng, nil, 0, width)
		for _, w := range spans {
			s.rect(w.x1, y-narrow/2, w.x2, y+narrow/2)
			for i := range int32(99) {
				s.bystander(w.x1+i, y, i)
			}
		}
		s.counted(int64(len(spans)), nearSpans(before, spans))
		before = spans
	}
	s.end()
}

// bystander draws an element that is no figure of the layout.
func (s *sheet) bystander(x, y, i int32) {
	layer := gds.LayerType{Layer: uint16(bystander + s.rng.IntN(bystanders)), Type: uint16(i % 3)}
	switch i {
	case 10:
		s.w.Text(layer, gds.Point{X: x, Y: y}, "net")
	case 20, 21:
		s.w.Path(layer, gds.PathStyle{Type: 2, Width: 21}, []gds.Point{{X: x, Y: y}, {X: x + 300, Y: y}, {X: x + 300, Y: y + 500}})
	case 30:
		s.w.Property(1, "side")
		s.w.Boundary(layer, []gds.Point{{X: x, Y: y}, {X: x + 90, Y: y}, {X: x + 90, Y: y + 30}, {X: x + 30, Y: y + 30}, {X: x + 30, Y: y + 90}, {X: x, Y: y + 90}})
	case 40:
		s.w.Box(layer, gds.Rect{X1: x, Y1: y, X2: x + 50, Y2: y + 50})
	default:
		s.w.Rectangle(layer, gds.Rect{X1: x, Y1: y, X2: x + 60, Y2: y + 30})
	}
}
