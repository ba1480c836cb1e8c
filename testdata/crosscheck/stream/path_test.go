package stream

import (
	"math/rand/v2"
	"testing"

	"maskpair/decompose/geom"
	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// This file holds the outlines of paths against those of gdspy: natural corners, and ends flush, round, extended by half the
// width, or by given lengths. The manual leaves the shape of corners open.

// wire draws a path that does not meet itself: segments are long beside the width, and no turn is sharper than a right angle.
func wire(rng *rand.Rand, straight bool) path {
	p := path{PathType: []int{0, 1, 2, 4}[rng.IntN(4)], Width: 1 + rng.Int64N(60)}
	if straight && p.PathType == 1 {
		p.PathType = 0
	}
	if p.PathType == 4 {
		p.Begin, p.Finish = rng.Int64N(80), rng.Int64N(80) // below 0 gdspy leaves spikes
	}
	at := point{rng.Int64N(2000) - 1000, rng.Int64N(2000) - 1000}
	p.Points = []point{at}
	up := rng.IntN(2) == 0
	for k := range 1 + rng.IntN(6) {
		long := 3*p.Width + 50 + rng.Int64N(200)
		switch {
		case !straight: // within 45 degrees of one direction
			side := rng.Int64N(2*long) - long
			at = point{at[0] + long, at[1] + side}
		case (k%2 == 0) == up:
			at[1] += long
		case rng.IntN(2) == 0 && k%4 == 1: // a detour back, farther up
			at[0] -= long
		default:
			at[0] += long
		}
		p.Points = append(p.Points, at)
	}
	turn := rng.IntN(4)
	for i, q := range p.Points {
		for range turn {
			q = point{-q[1], q[0]}
		}
		p.Points[i] = q
	}
	return p
}

func TestPathOutlinesAgainstGdspy(t *testing.T) {
	type question struct {
		Path     string
		Outlines [][][2]float64
	}
	type answer struct {
		Valid          bool
		Area, Distance float64
	}
	rng := rand.New(rand.NewPCG(34, 1))
	var c cell
	c.Name = "TOP"
	for n := range 2000 {
		c.Paths = append(c.Paths, wire(rng, n%2 == 0))
	}
	file := write(t, []cell{c}, gds.WriterOptions{UserUnit: 1}, bare)
	lib := index(t, file)
	q := question{Path: file}
	var rounded []bool
	for _, o := range lib.Outlines {
		var centre []geom.Point
		for _, p := range lib.Points[o.First : o.First+uint64(o.Count)] {
			centre = append(centre, geom.Point{X: 2 * int64(p.X), Y: 2 * int64(p.Y)}) // half units
		}
		end := geom.PathEnd{Type: o.PathType, Begin: 2 * int64(o.Begin), Finish: 2 * int64(o.Finish)}
		outline, off, ok := geom.PathOutline(nil, centre, 2*int64(o.Width), end, 2)
		if !ok {
			t.Fatalf("path %d has no outline", len(q.Outlines))
		}
		var list [][2]float64
		for _, p := range outline {
			list = append(list, [2]float64{float64(p.X) / 2, float64(p.Y) / 2})
		}
		q.Outlines, rounded = append(q.Outlines, list), append(rounded, off)
	}
	outside.Packages(t, "python3-gdspy", "python3-numpy", "python3-shapely")
	valid, exact := 0, 0
	for n, a := range outside.Ask[question, []answer](t, "gdspy_paths.py", q) {
		if !a.Valid {
			continue
		}
		valid++
		// A vertex is rounded to a whole unit, so it is off by half a diagonal; a round end of either side is off by 0.1, gdspy's
		// by its tolerance of 0.01, and has its corners elsewhere.
		limit := 0.72
		if c.Paths[n].PathType == 1 {
			limit += 0.11
		}
		if a.Distance > limit {
			t.Errorf("path %d: the outlines are %g apart (%g square units differ)\n%+v\n%v", n, a.Distance, a.Area, c.Paths[n], q.Outlines[n])
		}
		if !rounded[n] {
			exact++
			if a.Area > 1e-5 && c.Paths[n].PathType != 1 {
				t.Errorf("path %d is exact, and differs from gdspy's by %g square units\n%+v\n%v", n, a.Area, c.Paths[n], q.Outlines[n])
			}
		}
		if t.Failed() {
			break
		}
	}
	t.Logf("%d outlines compared, %d of them exact", valid, exact)
	if valid < 1800 || exact < 800 {
		t.Errorf("too few outlines compared: %d, %d of them exact", valid, exact)
	}
}
