package layouts

import (
	"fmt"

	"maskpair/gds"
)

// This file draws hard hierarchies: very many tops, and very deep nesting.

// drawTops draws tops of ten wires each.
func drawTops(s *sheet, figures int64) {
	for i := range max(1, figures/10) {
		s.begin(fmt.Sprintf("top%d", i))
		var before []span
		for t := range int32(5) {
			x := s.rng.Int32N(400)
			spans := []span{{x, x + 200}, {x + 1000, x + 1200}}
			s.track(t*trackPitch, spans)
			s.counted(int64(len(spans)), nearSpans(before, spans))
			before = spans
		}
		s.end()
	}
}

const depth = 1000

// drawDeep draws a chain of structures: each has a wire and, on the next track, the one before it, every second time with left
// and right exchanged. The chip places the last of them side by side.
func drawDeep(s *sheet, figures int64) {
	name := func(level int) string { return fmt.Sprintf("level%d", level) }
	levels := int(min(depth-1, figures))
	for i := range levels {
		s.begin(name(i))
		s.rect(-100, -narrow/2, 100, narrow/2)
		s.counted(1, 0)
		if i > 0 {
			s.place(name(i-1), gds.Strans{Mirror: i%2 == 1, Angle: float64(i % 2 * 180)}, 0, trackPitch)
			s.counted(0, 1)
		}
		s.end()
	}
	times := max(1, figures/int64(levels))
	columns := min(times, 50_000)
	s.begin("chip")
	s.array(name(levels-1), gds.Strans{}, uint16(columns), uint16(times/columns), 0, 0, 300, int32(levels)*trackPitch+100)
	s.end()
}
