package geometry

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	sf "github.com/peterstace/simplefeatures/geom"

	"maskpair/decompose/geom"
)

// This file draws random figures, each twice: as one closed outline with a fill rule, as a stream has it, and as the parts
// that the judge knows: rings with holes.

// figure is a figure in both forms.
type figure struct {
	outline []geom.Point
	fill    geom.Fill
	parts   []sf.Polygon // together they are the figure
}

// window is the half side of the square that all figures for the exact tests lie in.
const window = 150

// simple makes a polygon of the judge from rings, and tells whether the judge finds it valid: rings that do not meet
// themselves, holes inside.
func simple(rings ...[]geom.Point) (sf.Polygon, bool) {
	lines := make([]sf.LineString, len(rings))
	for i, ring := range rings {
		var c []float64
		for _, p := range append(slices.Clone(ring), ring[0]) {
			c = append(c, float64(p.X), float64(p.Y))
		}
		lines[i] = sf.NewLineString(sf.NewSequence(c, sf.DimXY))
	}
	p := sf.NewPolygon(lines)
	return p, p.Validate() == nil
}

// star draws a ring around a centre: any angles, simple but for rounding.
func star(rng *rand.Rand, centre geom.Point, low, high float64) []geom.Point {
	n := 3 + rng.IntN(9)
	angles := make([]float64, n)
	for i := range angles {
		angles[i] = rng.Float64() * 2 * math.Pi
	}
	slices.Sort(angles)
	ring := make([]geom.Point, n)
	for i, a := range angles {
		r := low + (high-low)*rng.Float64()
		ring[i] = geom.Point{X: centre.X + int64(math.Round(r*math.Cos(a))), Y: centre.Y + int64(math.Round(r*math.Sin(a)))}
	}
	return ring
}

// skyline draws a Manhattan ring: columns that hang together, with tops and bottoms at random, possibly upright.
func skyline(rng *rand.Rand, centre geom.Point, size int64) []geom.Point {
	n := 1 + rng.IntN(5)
	xs := []int64{0}
	for range n {
		xs = append(xs, xs[len(xs)-1]+1+rng.Int64N(size/int64(n)))
	}
	var over, under []geom.Point
	for i := range n {
		top, bottom := 1+rng.Int64N(size/2), -1-rng.Int64N(size/2)
		over = append(over, geom.Point{X: xs[i], Y: top}, geom.Point{X: xs[i+1], Y: top})
		under = append(under, geom.Point{X: xs[i], Y: bottom}, geom.Point{X: xs[i+1], Y: bottom})
	}
	slices.Reverse(over)
	ring := append(under, over...)
	upright := rng.IntN(2) == 0
	for i, p := range ring {
		if upright {
			p.X, p.Y = p.Y, p.X
		}
		ring[i] = geom.Point{X: centre.X + p.X, Y: centre.Y + p.Y}
	}
	return slices.Compact(ring)
}

func square(rng *rand.Rand, centre geom.Point, size int64) []geom.Point {
	x1, y1 := centre.X-1-rng.Int64N(size/2), centre.Y-1-rng.Int64N(size/2)
	x2, y2 := centre.X+1+rng.Int64N(size/2), centre.Y+1+rng.Int64N(size/2)
	return []geom.Point{{X: x1, Y: y1}, {X: x2, Y: y1}, {X: x2, Y: y2}, {X: x1, Y: y2}}
}

// around tells whether a ring runs counter-clockwise.
func around(ring []geom.Point) bool {
	var twice int64
	for i, p := range ring {
		q := ring[(i+1)%len(ring)]
		twice += p.X*q.Y - q.X*p.Y
	}
	return twice > 0
}

// oriented gives a ring that runs counter-clockwise, or clockwise.
func oriented(ring []geom.Point, counter bool) []geom.Point {
	ring = slices.Clone(ring)
	if around(ring) != counter {
		slices.Reverse(ring)
	}
	return ring
}

// bridged draws rings as one outline: from the first ring to each other one and back on the same line.
func bridged(rng *rand.Rand, rings ...[]geom.Point) []geom.Point {
	outline := append(slices.Clone(rings[0]), rings[0][0])
	for _, ring := range rings[1:] {
		k := rng.IntN(len(ring))
		turned := append(slices.Clone(ring[k:]), ring[:k]...)
		outline = append(outline, turned...)
		outline = append(outline, turned[0], rings[0][0])
	}
	return outline
}

// draw makes a random figure within the window.
func draw(t testing.TB, rng *rand.Rand) figure {
	for {
		c := geom.Point{X: rng.Int64N(121) - 60, Y: rng.Int64N(121) - 60}
		size := 8 + rng.Int64N(60)
		var f figure
		ok := false
		one := func(rings ...[]geom.Point) {
			p, valid := simple(rings...)
			f.parts, ok = []sf.Polygon{p}, valid
		}
		switch rng.IntN(9) {
		case 0, 1: // any angle
			ring := star(rng, c, float64(size)/8, float64(size))
			f.outline = ring
			one(ring)
		case 2: // Manhattan
			ring := skyline(rng, c, size)
			f.outline = ring
			one(ring)
		case 3:
			ring := square(rng, c, size)
			f.outline = ring
			one(ring)
		case 4: // a thin triangle
			ring := []geom.Point{c, {X: c.X + rng.Int64N(80) - 40, Y: c.Y + rng.Int64N(80) - 40}, {X: c.X + rng.Int64N(80) - 40, Y: c.Y + rng.Int64N(80) - 40}}
			f.outline = ring
			one(ring)
		case 5: // holes, even-odd, joined by a line there and back that may lie anywhere
			outer := star(rng, c, float64(size)*0.7, float64(size))
			rings := [][]geom.Point{outer, star(rng, geom.Point{X: c.X + size/4, Y: c.Y}, 2, float64(size)/5)}
			if rng.IntN(2) == 0 {
				rings = append(rings, star(rng, geom.Point{X: c.X - size/4, Y: c.Y}, 2, float64(size)/5))
			}
			f.outline = bridged(rng, rings...)
			one(rings...)
		case 6: // a Manhattan hole
			outer, hole := square(rng, c, size+20), square(rng, c, size/2)
			f.outline = bridged(rng, outer, hole)
			one(outer, hole)
		case 7: // two triangles that meet where the outline crosses itself
			u := geom.Point{X: rng.Int64N(81) - 40, Y: rng.Int64N(81) - 40}
			v := geom.Point{X: rng.Int64N(81) - 40, Y: rng.Int64N(81) - 40}
			at := func(p geom.Point, k int64) geom.Point { return geom.Point{X: c.X + k*p.X, Y: c.Y + k*p.Y} }
			f.outline = []geom.Point{at(u, -1), at(u, 1), at(v, 1), at(v, -1)}
			p, valid := simple([]geom.Point{c, at(u, 1), at(v, 1)})
			q, alike := simple([]geom.Point{c, at(v, -1), at(u, -1)})
			f.parts, ok = []sf.Polygon{p, q}, valid && alike
		case 8: // non-zero: two rings the same way round fill all that either fills, wherever they overlap
			f.fill = geom.NonZero
			counter := rng.IntN(2) == 0
			r1 := oriented(star(rng, c, float64(size)/4, float64(size)), counter)
			r2 := oriented(star(rng, geom.Point{X: c.X + rng.Int64N(41) - 20, Y: c.Y + rng.Int64N(41) - 20}, float64(size)/4, float64(size)), counter)
			f.outline = bridged(rng, r1, r2)
			p, valid := simple(r1)
			q, alike := simple(r2)
			f.parts, ok = []sf.Polygon{p, q}, valid && alike
		}
		if ok {
			f.outline = redrawn(rng, f.outline)
			return f
		}
	}
}

// redrawn begins an outline elsewhere, turns it round, closes it, and repeats points.
func redrawn(rng *rand.Rand, outline []geom.Point) []geom.Point {
	k := rng.IntN(len(outline))
	out := append(slices.Clone(outline[k:]), outline[:k]...)
	if rng.IntN(2) == 0 {
		slices.Reverse(out)
	}
	if rng.IntN(4) == 0 {
		k := rng.IntN(len(out))
		out = slices.Insert(out, k, out[k])
	}
	if rng.IntN(2) == 0 {
		out = append(out, out[0])
	}
	return out
}

// frame says how the package under test gets a figure: grown, moved far away, and in local coordinates of a placement.
type frame struct {
	grow     int64 // a power of two
	far      geom.Point
	local    geom.Placement
	asPlaced bool // a Manhattan figure keeps its edges, and is treated as any other
}

// turned applies an orientation by its definition: mirror about the x axis, then quarter turns.
func turned(turn uint8, p geom.Point) geom.Point {
	if turn >= 4 {
		p.Y = -p.Y
	}
	for range turn % 4 {
		p = geom.Point{X: -p.Y, Y: p.X}
	}
	return p
}

// unturned undoes turned.
func unturned(turn uint8, p geom.Point) geom.Point {
	for range turn % 4 {
		p = geom.Point{X: p.Y, Y: -p.X}
	}
	if turn >= 4 {
		p.Y = -p.Y
	}
	return p
}

// built is a figure in the form that the package under test works with.
type built struct {
	rects []geom.Rect
	poly  *geom.Polygon
	at    geom.Placement
}

// build makes that form.
func build(t testing.TB, f figure, fr frame) built {
	t.Helper()
	placed := make([]geom.Point, len(f.outline))
	for i, p := range f.outline {
		placed[i] = geom.Point{X: p.X*fr.grow + fr.far.X, Y: p.Y*fr.grow + fr.far.Y}
	}
	if !fr.asPlaced {
		if rects, ok := geom.Rectangles(nil, placed, f.fill); ok {
			return built{rects: rects}
		}
	}
	local := make([]geom.Point, len(placed))
	for i, p := range placed {
		local[i] = unturned(fr.local.Turn, geom.Point{X: p.X - fr.local.X, Y: p.Y - fr.local.Y})
	}
	return built{poly: geom.NewPolygon(local, f.fill), at: fr.local}
}

// relation compares two figures part by part.
func relation(a, b built, s int64) geom.Relation {
	best := geom.Far
	for _, r := range a.rects {
		for _, q := range b.rects {
			best = max(best, geom.RectsRelation(r, q, s))
		}
	}
	mixed := func(p built, rects []geom.Rect) {
		for i := range p.poly.Bands() {
			for _, r := range rects {
				best = max(best, geom.BandRectRelation(p.poly, i, p.at, r, s))
			}
		}
	}
	switch {
	case a.poly != nil && b.poly != nil:
		for i := range a.poly.Bands() {
			for j := range b.poly.Bands() {
				best = max(best, geom.BandRelation(a.poly, i, a.at, b.poly, j, b.at, s))
			}
		}
	case a.poly != nil:
		mixed(a, b.rects)
	case b.poly != nil:
		mixed(b, a.rects)
	}
	return best
}

// parts gives the form as the measures of whole shapes want it.
func (b built) into(p *geom.Parts) {
	p.Rects = append(p.Rects, b.rects...)
	if b.poly != nil {
		p.Polygons = append(p.Polygons, geom.Placed{Polygon: b.poly, At: b.at})
	}
}

// judged is the distance that the judge finds, 0 where the figures touch or overlap.
func judged(t testing.TB, a, b figure) float64 {
	t.Helper()
	best := math.Inf(1)
	for _, p := range a.parts {
		for _, q := range b.parts {
			d, ok := sf.Distance(p.AsGeometry(), q.AsGeometry())
			if !ok {
				t.Fatal("the judge finds an empty figure")
			}
			best = min(best, d)
		}
	}
	return best
}
