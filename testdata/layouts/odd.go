package layouts

import "math"

// This file draws what two masks cannot do: strips of contacts, four high, so near that the diagonal ones are near as well. The
// pairs of such a strip are the moves of a king on a board of four rows, without the fields that are left free; a strip of four
// rows has a small treewidth. Strips have random lengths and holes, so that hardly two are equal.

const (
	stripRows  = 4
	stripPitch = 40 // a gap of 20; 28.3 on the diagonal, 60 to the next but one
)

func drawStrips(s *sheet, figures int64) {
	perRow := int64(math.Ceil(math.Sqrt(float64(figures) / 24)))
	s.begin("chip")
	s.uncounted()
	for n, y := int64(0), int32(0); n < figures; y += stripRows*stripPitch + 100 {
		x := int32(0)
		for range perRow {
			columns := 3 + s.rng.Int32N(10)
			for c := range columns {
				for r := range int32(stripRows) {
					if s.rng.IntN(5) == 0 {
						continue
					}
					s.rect(x+c*stripPitch, y+r*stripPitch, x+c*stripPitch+narrow, y+r*stripPitch+narrow)
					n++
				}
			}
			x += columns*stripPitch + 100
		}
	}
	s.end()
}
