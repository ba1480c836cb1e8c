package layouts

import (
	"math"

	"maskpair/gds"
)

// This file draws hard shapes of whole units: one figure that meets all others, boxes that all overlap, one shape or one
// component of everything, outlines as long as a record can be, a spacing far above the widths.

// drawRail draws a rail with columns of eight contacts above and below it. Columns are 66 apart, more than the spacing; each
// contact is near the one before it, the first ones are near the rail.
func drawRail(s *sheet, figures int64) {
	const high, step = 8, 86
	columns := max(1, int32((figures-1)/(2*high)))
	s.begin("chip")
	s.rect(0, 0, columns*step, narrow)
	for c := range columns {
		for r := int32(1); r <= high; r++ {
			up, down := r*contactPitch, -r*contactPitch
			s.rect(c*step, up, c*step+narrow, up+narrow)
			s.rect(c*step, down, c*step+narrow, down+narrow)
		}
	}
	s.counted(int64(columns)*2*high+1, int64(columns)*2*high)
	s.end()
}

// drawNested draws L shapes, each in the corner of the one before it, 20 from it.
func drawNested(s *sheet, figures int64) {
	n := int32(figures)
	far := n*trackPitch + 100
	s.begin("chip")
	for i := range n {
		o := i * trackPitch
		s.boundary([]gds.Point{{X: o, Y: o}, {X: far, Y: o}, {X: far, Y: o + narrow}, {X: o + narrow, Y: o + narrow}, {X: o + narrow, Y: far}, {X: o, Y: far}})
	}
	s.counted(figures, figures-1)
	s.end()
}

// drawSnake draws one wire that runs to and fro in rows 20 apart, in pieces of 100 that abut.
func drawSnake(s *sheet, figures int64) {
	const piece = 100
	perRow := max(1, int32(math.Ceil(math.Sqrt(float64(figures)*trackPitch/piece))))
	rows := max(1, int32(figures/int64(perRow+1)))
	s.begin("chip")
	for r := range rows {
		y := r * trackPitch
		for c := range perRow {
			s.rect(c*piece, y, (c+1)*piece, y+narrow)
		}
		if r+1 < rows { // at the right end of even rows, at the left end of odd ones
			x := (r + 1) % 2 * (perRow*piece - narrow)
			s.rect(x, y+narrow, x+narrow, y+trackPitch)
		}
	}
	s.counted(1, 0)
	s.end()
}

// drawGrid draws one array of contacts.
func drawGrid(s *sheet, figures int64) { drawSquare(s, figures, contactPitch) }

// drawWide draws contacts 880 apart; the diagonal gap is 1244.
func drawWide(s *sheet, figures int64) { drawSquare(s, figures, 900) }

func drawSquare(s *sheet, figures int64, pitch int32) {
	columns := max(1, int32(math.Sqrt(float64(figures))))
	s.begin("chip")
	s.contacts(columns, int32(figures/int64(columns)), 0, 0, pitch)
	s.end()
}

const combTeeth = 2046 // with 4 points a tooth, 6 for the back, and the closing one: 8191 points, 65,528 bytes

// drawCombs draws pairs of combs whose teeth reach between each other, 20 from the next tooth, 40 from the other back.
func drawCombs(s *sheet, figures int64) {
	pairs := max(1, int32(figures/(2*combTeeth)))
	s.begin("chip")
	for p := range pairs {
		y := p * 600
		s.boundary(comb(0, y, 1))
		s.boundary(comb(trackPitch, y+480, -1))
	}
	s.counted(2*int64(pairs), int64(pairs))
	s.end()
}

// comb gives the outline of a comb whose back begins at x, y and whose teeth stand up (1) or hang down (-1).
func comb(x, y, up int32) []gds.Point {
	const step, back, tip = 2 * trackPitch, narrow, 420
	width := int32(narrow + combTeeth*step)
	at := func(dx, dy int32) gds.Point { return gds.Point{X: x + dx, Y: y + up*dy} }
	points := []gds.Point{at(0, back/2), at(back/2, back/2), at(back/2, 0), at(width, 0), at(width, back)}
	for t := int32(combTeeth - 1); t >= 0; t-- {
		left := narrow + t*step
		right := left + narrow
		points = append(points, at(right, back), at(right, tip), at(left, tip), at(left, back))
	}
	return append(points, at(0, back))
}

// drawMarked draws random tracks and over each wire a marker: A for even tracks, B for odd ones.
func drawMarked(s *sheet, figures int64) {
	side := math.Sqrt(float64(figures) * trackPitch / wiresPerUnit)
	width := max(100, int32(side))
	n := max(1, int32(side/trackPitch))
	s.begin("chip")
	var before []span
	for t := range n {
		spans := randomTrack(s.rng, nil, 0, width)
		s.track(t*trackPitch, spans)
		s.counted(int64(len(spans)), nearSpans(before, spans))
		before = spans
		mark := gds.LayerType{Layer: Layer, Type: markA + uint16(t%2)}
		for _, w := range spans {
			s.w.Rectangle(mark, gds.Rect{X1: w.x1 + 5, Y1: t*trackPitch - 5, X2: w.x1 + 15, Y2: t*trackPitch + 5})
		}
	}
	s.end()
}
