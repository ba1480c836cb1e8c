package layouts

import "math"

// This file draws a chip without hierarchy: bands of wires in tracks between two rails as long as the chip, and above each band
// a row of contact arrays. Half of the figures are wires, half contacts, with about two near pairs a figure.

const (
	flatTracks  = 48   // of a band, without its rails
	flatRows    = 8    // of a contact array
	flatHeight  = 2600 // of a band with its contacts: tracks to 49*40+10, contacts from 2050 to 2050+7*46+20, 200 free
	arrayGap    = 300  // between contact arrays
	flatDensity = flatTracks*wiresPerUnit + flatRows*8.0/(8*contactPitch+arrayGap)
)

func drawFlat(s *sheet, figures int64) {
	side := math.Sqrt(float64(figures) * flatHeight / flatDensity)
	bands := max(1, int32(math.Round(side/flatHeight)))
	width := max(100, int32(float64(figures)/flatDensity/float64(bands)))
	s.begin("chip")
	for b := range bands {
		y := b * flatHeight
		rail := []span{{0, width}}
		s.track(y, rail)
		last := s.tracks(flatTracks, 0, width, y+trackPitch, rail)
		s.track(y+(flatTracks+1)*trackPitch, rail)
		s.counted(2, nearSpans(last, rail))
		for x := int32(0); x < width; {
			columns := 2 + s.rng.Int32N(13)
			s.contacts(columns, flatRows, x, y+2050, contactPitch)
			x += columns*contactPitch + arrayGap
		}
	}
	s.end()
}

// contacts draws an array of contacts, near along rows and columns and not on the diagonal, and counts it.
func (s *sheet) contacts(columns, rows, x, y, pitch int32) {
	for r := range rows {
		for c := range columns {
			s.rect(x+c*pitch, y+r*pitch, x+c*pitch+narrow, y+r*pitch+narrow)
		}
	}
	c, r := int64(columns), int64(rows)
	s.counted(c*r, (c-1)*r+c*(r-1))
}
