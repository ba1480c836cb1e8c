package layouts

import (
	"math"

	"maskpair/gds"
)

// This file draws a ring of slanted edges, open on one side like a coil, among wires in tracks. Its three turns are 30 apart, so
// that each is near the next; wires keep 50 from it, outside and inside, under its bounding box all the same.

const (
	ringTurns  = 3
	ringStep   = 230 // from turn to turn: 200 wide, 30 free
	ringWide   = 200
	ringCorner = 96 // points of an arc
)

func drawRing(s *sheet, figures int64) {
	side := max(4000, int32(math.Sqrt(float64(figures)*trackPitch/wiresPerUnit)))
	middle, outer := side/2, side/3
	inner := outer - (ringTurns-1)*ringStep - ringWide
	s.begin("chip")
	for t := range int32(ringTurns) {
		s.boundary(arc(middle, middle, outer-t*ringStep-ringWide, outer-t*ringStep))
	}
	s.counted(ringTurns, ringTurns-1)
	var before []span
	for y := int32(0); y <= side; y += trackPitch {
		var kept []span
		for _, w := range randomTrack(s.rng, nil, 0, side) {
			if clearOfRing(w, y, middle, int64(inner)-50, int64(outer)+50) {
				kept = append(kept, w)
			}
		}
		s.track(y, kept)
		s.counted(int64(len(kept)), nearSpans(before, kept))
		before = kept
	}
	s.end()
}

// arc gives a ring sector of 340 degrees with corners on whole units. The chords of neighbouring turns are parallel.
func arc(x, y, inner, outer int32) []gds.Point {
	points := make([]gds.Point, 0, 2*ringCorner)
	corner := func(r int32, i int) {
		sin, cos := math.Sincos((10 + 340*float64(i)/(ringCorner-1)) * math.Pi / 180)
		points = append(points, gds.Point{X: x + int32(math.Round(float64(r)*cos)), Y: y + int32(math.Round(float64(r)*sin))})
	}
	for i := range ringCorner {
		corner(outer, i)
	}
	for i := ringCorner - 1; i >= 0; i-- {
		corner(inner, i)
	}
	return points
}

// clearOfRing tells whether a wire of the track around y lies wholly inside the smaller circle, or outside the larger one.
// Chords lie inside their circle by up to r(1-cos(340°/95/2)) < r/2000; inner is kept clear of that by the caller's 50 for
// r below 100,000, and by the check against inner - inner/2000 beyond.
func clearOfRing(w span, y, middle int32, inner, outer int64) bool {
	inner -= inner / 2000
	x1, x2 := int64(w.x1-middle), int64(w.x2-middle)
	y1, y2 := int64(y-middle-narrow/2), int64(y-middle+narrow/2)
	nearX, nearY := max(0, x1, -x2), max(0, y1, -y2)
	farX, farY := max(-x1, x2), max(-y1, y2)
	return nearX*nearX+nearY*nearY > outer*outer || farX*farX+farY*farY < inner*inner
}
