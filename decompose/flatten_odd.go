package decompose

import (
	"math"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file flattens what lies under a magnification or an odd angle: such a figure gets its form at its place, rounded once.

// oddFigure is a figure under a magnification or an odd angle: its form is worked out at its place.
type oddFigure struct {
	ordinal uint32
	form    form // work units of the top; rectangles in oddFigures.rects
}

// oddFigures are those of one top.
type oddFigures struct {
	figures []oddFigure
	forms   *forms // nil: there are no figures
	rounded int64
	box     Box
}

// collectOdd finds the figures of a top that are placed by a magnification or an odd angle and works out their forms.
func (f *flat) collectOdd(top int, odd *oddFigures) error {
	odd.box = emptyBox
	t := f.h.tops[top]
	if !f.h.odd[t] {
		return nil
	}
	odd.forms = &forms{grid: f.forms.grid}
	return f.collectOddIn(odd, t, gds.Identity(), false, f.first[top])
}

// collectOddIn collects under a structure placed at a place; below tells whether a magnification or an odd angle is on the way
// there, even where the place itself has neither, since two of them cancel out.
func (f *flat) collectOddIn(odd *oddFigures, s int32, at gds.Transform, below bool, ordinal uint64) error {
	if f.all[s] == 0 || !below && !f.h.odd[s] {
		return nil
	}
	st := &f.lib.Structures[s]
	if below {
		next := ordinal
		for i := st.FirstFigure; i < st.EndFigure; i++ {
			if !f.figure(i) {
				continue
			}
			if err := f.placeOdd(odd, s, i, at, uint32(next)); err != nil {
				return err
			}
			next++
		}
	}
	ordinal += uint64(f.own[s])
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		n := elements(f.lib, ref)
		inner := below || !rigid(f.lib, ref)
		if !inner && !f.h.odd[ref.Target] {
			ordinal += uint64(n) * f.all[ref.Target]
			continue
		}
		p := f.lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if p != nil {
			columns, rows = p.Columns, p.Rows
		}
		for row := range rows {
			for column := range columns {
				if err := f.collectOddIn(odd, ref.Target, gds.Compose(at, ref, p, column, row), inner, ordinal); err != nil {
					return err
				}
				ordinal += f.all[ref.Target]
			}
		}
	}
	return nil
}

// fine is by how much coordinates are spread before a path under a magnification or an odd angle gets its outline, so that it
// is rounded only once, at its place.
const fine = 1 << 10

func (f *flat) placeOdd(odd *oddFigures, s int32, i uint32, at gds.Transform, ordinal uint32) error {
	fig := &f.lib.Figures[i]
	var local []geom.Point
	spread, fill := float64(1), geom.EvenOdd
	switch {
	case fig.Outline == 0:
		b := fig.Box
		local = []geom.Point{{X: int64(b.X1), Y: int64(b.Y1)}, {X: int64(b.X2), Y: int64(b.Y1)}, {X: int64(b.X2), Y: int64(b.Y2)}, {X: int64(b.X1), Y: int64(b.Y2)}}
	case !f.lib.Outlines[fig.Outline-1].Path:
		o := &f.lib.Outlines[fig.Outline-1]
		for _, p := range f.lib.Points[o.First : o.First+uint64(o.Count)] {
			local = append(local, geom.Point{X: int64(p.X), Y: int64(p.Y)})
		}
	default:
		o := &f.lib.Outlines[fig.Outline-1]
		var centre []geom.Point
		for _, p := range f.lib.Points[o.First : o.First+uint64(o.Count)] {
			centre = append(centre, geom.Point{X: fine * int64(p.X), Y: fine * int64(p.Y)})
		}
		width := float64(o.Width) * fine
		if width < 0 {
			width = -width / at.Scale()
		}
		end := geom.PathEnd{Type: o.PathType, Begin: fine * int64(o.Begin), Finish: fine * int64(o.Finish)}
		local, _, _ = geom.PathOutline(nil, centre, int64(math.Round(width)), end, 1)
		spread, fill = fine, geom.NonZero
	}
	scale := float64(f.forms.scale)
	points := make([]geom.Point, len(local))
	rounded := false
	for k, p := range local {
		x, y := at.ApplyFloat(float64(p.X)/spread, float64(p.Y)/spread)
		for _, v := range [2]float64{x, y} {
			if v < math.MinInt32 || v > math.MaxInt32 {
				return &InputError{Structure: f.h.name(s), Msg: "a figure under a magnification or an odd angle leaves the 32-bit plane; move the layout nearer to the origin"}
			}
		}
		wx, wy := f.forms.nearest(x), f.forms.nearest(y)
		rounded = rounded || math.Abs(float64(wx)-x*scale) > 1e-6 || math.Abs(float64(wy)-y*scale) > 1e-6
		points[k] = geom.Point{X: wx, Y: wy}
	}
	if rounded {
		odd.rounded++
	}
	made := odd.forms.make(points, fill)
	if !made.hasArea() {
		made = odd.forms.corners(points)
	}
	odd.box = odd.box.join(made.box)
	odd.figures = append(odd.figures, oddFigure{ordinal, made})
	return nil
}

// nearest rounds a coordinate to whole database units, in work units; a half that is exact stays where figures lie on halves.
func (g grid) nearest(v float64) int64 {
	if g.halves {
		if half := math.RoundToEven(2 * v); math.Abs(2*v-half) < 1e-6 {
			return int64(half)
		}
	}
	return int64(math.RoundToEven(v)) * g.scale
}
