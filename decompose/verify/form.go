package verify

import (
	"math"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file turns a figure as drawn into what it covers: its points in half database units, then one rectangle, several, or a
// polygon with slanted edges.

// form is a figure in the coordinates of its structure, or as placed where the placement is not exact.
type form struct {
	points  []geom.Point // closed outline
	fill    geom.Fill
	rects   []geom.Rect   // of a Manhattan outline, without common area
	polygon *geom.Polygon // of any other
	box     geom.Rect
}

// hasArea says whether the figure covers anything. One that does not is no figure.
func (f *form) hasArea() bool { return f.polygon != nil || len(f.rects) > 0 }

// newForm works out what an outline covers.
func newForm(points []geom.Point, fill geom.Fill) form {
	f := form{points: points, fill: fill}
	if len(points) < 3 {
		return f
	}
	if rects, ok := geom.Rectangles(nil, points, fill); ok {
		f.rects = rects
		for i, r := range rects {
			if i == 0 {
				f.box = r
			}
			f.box = f.box.Union(r)
		}
		return f
	}
	if p := geom.NewPolygon(points, fill); p.HasArea() {
		f.polygon = p
		f.box = p.Box()
	}
	return f
}

// oddWidth says whether the sides of a figure lie on half units: those of a path of odd width do.
func oddWidth(o *gds.Outline) bool { return o.Path && o.Width&1 != 0 }

// outline gives the points of a figure in half database units of its structure. Vertices of slanted paths that are on no half
// unit are rounded to whole units by geom.PathOutline. Half units are kept only where halves says so; otherwise a vertex
// midway between two units goes to the lower one.
func outline(lib *gds.Library, fig *gds.Figure, halves bool) (points []geom.Point, fill geom.Fill) {
	if fig.Outline == 0 {
		return corners(rectOf(fig.Box)), geom.EvenOdd
	}
	o := &lib.Outlines[fig.Outline-1]
	raw := lib.Points[o.First : o.First+uint64(o.Count)]
	line := make([]geom.Point, len(raw))
	for i, p := range raw {
		line[i] = geom.Point{X: 2 * int64(p.X), Y: 2 * int64(p.Y)}
	}
	if !o.Path {
		return line, geom.EvenOdd
	}
	end := geom.PathEnd{Type: o.PathType, Begin: 2 * int64(o.Begin), Finish: 2 * int64(o.Finish)}
	points, _, ok := geom.PathOutline(nil, line, 2*int64(o.Width), end, 2)
	if !ok {
		return nil, geom.NonZero
	}
	if !halves {
		for i := range points {
			points[i].X &^= 1
			points[i].Y &^= 1
		}
	}
	return points, geom.NonZero
}

// spread is by how much the coordinates of a path are stretched before it gets its outline, where the outline is to be placed
// at an odd angle or a fractional magnification: so the outline is rounded at its place, and once.
const spread = 1024

// outlineAt gives the points of a figure under a placement that is not rigid, in half database units of the top; false where
// they leave the plane.
func outlineAt(lib *gds.Library, fig *gds.Figure, at gds.Transform, halves bool) (points []geom.Point, fill geom.Fill, ok bool) {
	var o gds.Outline
	if fig.Outline != 0 {
		o = lib.Outlines[fig.Outline-1]
	}
	scale := 2.0 // of points
	if o.Path {
		scale = spread
		var line []geom.Point
		for _, p := range lib.Points[o.First : o.First+uint64(o.Count)] {
			line = append(line, geom.Point{X: spread * int64(p.X), Y: spread * int64(p.Y)})
		}
		width := float64(o.Width) * spread
		if o.Width < 0 { // absolute: the magnification does not count
			width /= at.Scale()
		}
		end := geom.PathEnd{Type: o.PathType, Begin: spread * int64(o.Begin), Finish: spread * int64(o.Finish)}
		points, _, _ = geom.PathOutline(nil, line, int64(math.Round(width)), end, 1)
		fill = geom.NonZero
	} else {
		points, fill = outline(lib, fig, halves)
	}
	for i, p := range points {
		x, y := at.ApplyFloat(float64(p.X)/scale, float64(p.Y)/scale)
		for _, c := range [2]float64{x, y} {
			if c < math.MinInt32 || c > math.MaxInt32 {
				return nil, fill, false
			}
		}
		points[i] = geom.Point{X: nearest(x, halves), Y: nearest(y, halves)}
	}
	return points, fill, true
}

// nearest rounds a coordinate in database units to a whole one and gives it in half units. A half is kept where halves are.
func nearest(v float64, halves bool) int64 {
	if half := math.RoundToEven(2 * v); halves && math.Abs(2*v-half) < 1e-6 {
		return int64(half)
	}
	return 2 * int64(math.RoundToEven(v))
}

func rectOf(r gds.Rect) geom.Rect {
	return geom.Rect{X1: 2 * int64(r.X1), Y1: 2 * int64(r.Y1), X2: 2 * int64(r.X2), Y2: 2 * int64(r.Y2)}
}

func corners(r geom.Rect) []geom.Point {
	return []geom.Point{{X: r.X1, Y: r.Y1}, {X: r.X2, Y: r.Y1}, {X: r.X2, Y: r.Y2}, {X: r.X1, Y: r.Y2}}
}
