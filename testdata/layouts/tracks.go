package layouts

import "math/rand/v2"

// This file fills tracks with wires and counts their near pairs. Track t lies around y = 40 t, 20 wide. Under the plain spacing
// of 36 only wires of neighbouring tracks are near: 20 lies between them, 60 between a track and the one after the next, and
// between wires of one track no less than 60. So the parity of the track is an answer, and no odd cycle can arise.

// span is a wire of a track, from x1 to x2.
type span struct{ x1, x2 int32 }

const (
	endGap = 60 // least gap between wires of one track

	// sideways is the largest gap along the tracks at which wires of neighbouring tracks are near:
	// 29*29 + 20*20 = 1241 < 36*36 = 1296 < 30*30 + 20*20.
	sideways = 29
)

// randomTrack fills x1 to x2 with wires of 100 to 700 and gaps of 60 to 120: one wire on 490 on average.
func randomTrack(rng *rand.Rand, into []span, x1, x2 int32) []span {
	into = into[:0]
	for x := x1; x < x2; {
		end := min(x+100+rng.Int32N(601), x2)
		if end-x >= narrow {
			into = append(into, span{x, end})
		}
		x = end + endGap + rng.Int32N(61)
	}
	return into
}

// wiresPerUnit is the number of wires that randomTrack draws on one unit of a track, about.
const wiresPerUnit = 1.0 / 490

// nearSpans counts the near pairs between two neighbouring tracks; both are in order.
func nearSpans(a, b []span) int64 {
	var n int64
	from := 0
	for _, s := range a {
		for from < len(b) && b[from].x2 < s.x1-sideways {
			from++
		}
		for k := from; k < len(b) && b[k].x1 <= s.x2+sideways; k++ {
			n++
		}
	}
	return n
}

// track draws the wires of a track.
func (s *sheet) track(y int32, spans []span) {
	for _, w := range spans {
		s.rect(w.x1, y-narrow/2, w.x2, y+narrow/2)
	}
}

// tracks draws random tracks between x1 and x2, the first around y, and counts them. before is the track below the first, or
// empty; the last is given back.
func (s *sheet) tracks(n int, x1, x2, y int32, before []span) []span {
	for range n {
		spans := randomTrack(s.rng, nil, x1, x2)
		s.track(y, spans)
		s.counted(int64(len(spans)), nearSpans(before, spans))
		before = spans
		y += trackPitch
	}
	return before
}
