package decompose

import (
	"maskpair/decompose/geom"
	"maskpair/gds"
	"maskpair/gds/arena"
)

// This file turns drawn figures that are no plain rectangle into forms: the rectangles of a Manhattan figure, or an any-angle polygon
// cut in bands. A form is worked out once per drawn figure, in the coordinates of its structure, and placed as often as the
// hierarchy says.

// form is one outline ready to be placed, in work units.
type form struct {
	first, count uint32        // rectangles, in forms.rects
	polygon      *geom.Polygon // nil: the rectangles are the figure
	box          Box
}

// hasArea tells whether the figure covers anything. One that does not is no figure.
func (f *form) hasArea() bool { return f.count > 0 || f.polygon != nil }

// pieces is the number of flat items that a placement of the form makes.
func (f *form) pieces() int64 {
	if f.polygon != nil {
		return int64(len(f.polygon.Bands()))
	}
	return int64(f.count)
}

// grid says in which units a layer is worked on.
type grid struct {
	scale  int64 // work units per database unit: 2 where something lies on half units, else 1
	halves bool  // figures lie on half units: what is placed there exactly is not rounded
}

// gridOf gives the grid of some figures: with halves where a path of odd width is among them.
func gridOf(lib *gds.Library, sel *selection) grid {
	for i := range lib.Figures {
		if o := lib.Figures[i].Outline; o != 0 && sel.tag[lib.Figures[i].Class] != none && needsHalves(&lib.Outlines[o-1]) {
			return grid{2, true}
		}
	}
	return grid{scale: 1}
}

// forms holds the forms of all outlines of one selection.
type forms struct {
	grid
	of      []form
	rects   []geom.Rect
	cutter  geom.Cutter
	rounded []bool // by outline: its own vertices were rounded
}

// needsHalves tells whether an outline has sides on half units: a path of odd width.
func needsHalves(o *gds.Outline) bool {
	return o.Path && o.Width&1 != 0
}

// halfUnit is the grid of outlines in half database units: a rounded vertex comes to lie on a whole unit.
const halfUnit = 2

// newForms works out the forms of the selected figures.
func newForms(lib *gds.Library, sel *selection, g grid) *forms {
	f := &forms{grid: g, of: arena.Make[form](len(lib.Outlines), len(lib.Outlines)), rounded: arena.Make[bool](len(lib.Outlines), len(lib.Outlines))}
	var points []geom.Point
	guess := 0 // a rectangle for every two corners, which nearly all outlines keep to
	for i := range lib.Figures {
		if o := lib.Figures[i].Outline; o != 0 && sel.tag[lib.Figures[i].Class] != none {
			guess += int(lib.Outlines[o-1].Count) / 2
		}
	}
	f.rects = arena.Make[geom.Rect](0, guess)
	for i := range lib.Figures {
		o := lib.Figures[i].Outline
		if o == 0 || sel.tag[lib.Figures[i].Class] == none {
			continue
		}
		var fill geom.Fill
		var rounded bool
		points, fill, rounded = outlinePoints(points[:0], lib, &lib.Outlines[o-1])
		if f.scale == 1 {
			for k := range points {
				points[k].X >>= 1
				points[k].Y >>= 1
			}
		}
		f.rounded[o-1] = rounded
		f.of[o-1] = f.make(points, fill)
	}
	return f
}

// make gives the form of an outline in work units.
func (f *forms) make(points []geom.Point, fill geom.Fill) form {
	if len(points) < 3 {
		return form{}
	}
	first := len(f.rects)
	rects, manhattan := f.cutter.Rectangles(f.rects, points, fill)
	f.rects = rects
	if manhattan {
		made := form{first: uint32(first), count: uint32(len(f.rects) - first)}
		if made.count > 0 {
			made.box = boxAround(f.rects[first:])
		}
		return made
	}
	p := geom.NewPolygon(points, fill)
	if !p.HasArea() {
		return form{}
	}
	b := p.Box()
	return form{polygon: p, box: Box{b.X1, b.Y1, b.X2, b.Y2}}
}

// corners gives the form of a figure that loses its area when it is rounded at its place: it still is a figure, and is where its
// corners are.
func (f *forms) corners(points []geom.Point) form {
	made := form{first: uint32(len(f.rects)), count: uint32(len(points))}
	for _, p := range points {
		f.rects = append(f.rects, geom.Rect{X1: p.X, Y1: p.Y, X2: p.X, Y2: p.Y})
	}
	made.box = boxAround(f.rects[made.first:])
	return made
}

func boxAround(rects []geom.Rect) Box {
	b := Box(rects[0])
	for _, r := range rects[1:] {
		b = Box{min(b.X1, r.X1), min(b.Y1, r.Y1), max(b.X2, r.X2), max(b.Y2, r.Y2)}
	}
	return b
}

// outlinePoints appends the outline of a boundary or path in half database units of its structure.
func outlinePoints(dst []geom.Point, lib *gds.Library, o *gds.Outline) (points []geom.Point, fill geom.Fill, rounded bool) {
	raw := lib.Points[o.First : o.First+uint64(o.Count)]
	if !o.Path {
		for _, p := range raw {
			dst = append(dst, geom.Point{X: 2 * int64(p.X), Y: 2 * int64(p.Y)})
		}
		return dst, geom.EvenOdd, false
	}
	centre := make([]geom.Point, len(raw))
	for i, p := range raw {
		centre[i] = geom.Point{X: 2 * int64(p.X), Y: 2 * int64(p.Y)}
	}
	width := int64(o.Width)
	if width < 0 {
		width = -width
	}
	end := geom.PathEnd{Type: o.PathType, Begin: 2 * int64(o.Begin), Finish: 2 * int64(o.Finish)}
	points, rounded, ok := geom.PathOutline(dst, centre, 2*width, end, halfUnit)
	if !ok {
		return dst, geom.NonZero, false
	}
	return points, geom.NonZero, rounded
}
