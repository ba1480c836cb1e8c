package twin

import (
	"fmt"
	"math"

	"maskpair/gds"
)

// This file flattens a layout: every element at every place that the hierarchy gives it.

// placement takes points of a cell to the top: mirrored about the x axis, magnified, turned and moved, in this order. While
// all turns are quarter turns and all magnifications whole it counts in whole units; else in floats, which decide nothing: what
// they leave near the middle between two units makes a layout open.
type placement struct {
	mirror     bool
	scale      float64 // what a width that is not absolute is multiplied with
	angle      float64 // degrees, counter-clockwise
	exact      bool
	a, b, c, d int64 // where exact: (x, y) goes to (a*x + b*y + x0, c*x + d*y + y0)
	x, y       int64
	fa, fb     float64 // else the same in floats
	fc, fd     float64
	fx, fy     float64
}

var upright = placement{exact: true, a: 1, d: 1, scale: 1}

// within gives the placement of what s and the place (x, y) put into a cell that p places. An absolute magnification or angle
// stands in place of what the parents add up to; where something lies and whether it is mirrored is not touched by it (GDSII
// Stream Format Manual 6.0, STRANS).
func (p placement) within(s gds.Strans, x, y int64) placement {
	mag := s.Magnification
	if mag == 0 {
		mag = 1
	}
	q := placement{mirror: p.mirror != s.Mirror, scale: p.scale * mag, angle: p.angle + s.Angle}
	if p.mirror {
		q.angle = p.angle - s.Angle
	}
	if s.AbsoluteMagnification {
		q.scale = mag
	}
	if s.AbsoluteAngle {
		q.angle = s.Angle
	}
	q.angle = math.Mod(q.angle, 360)
	if quarters := q.angle / 90; p.exact && quarters == math.Trunc(quarters) && q.scale == math.Trunc(q.scale) && q.scale < 1<<20 {
		q.exact = true
		q.a, q.d = int64(q.scale), int64(q.scale)
		if q.mirror {
			q.d = -q.d
		}
		for range (int64(quarters) + 4) % 4 {
			q.a, q.b, q.c, q.d = -q.c, -q.d, q.a, q.b // a quarter turn more: (x, y) to (-y, x)
		}
		q.x, q.y = p.a*x+p.b*y+p.x, p.c*x+p.d*y+p.y
		return q
	}
	sin, cos := math.Sincos(q.angle * math.Pi / 180)
	if quarters := q.angle / 90; quarters == math.Trunc(quarters) {
		sin, cos = math.Round(sin), math.Round(cos)
	}
	q.fa, q.fb, q.fc, q.fd = q.scale*cos, -q.scale*sin, q.scale*sin, q.scale*cos
	if q.mirror {
		q.fb, q.fd = -q.fb, -q.fd
	}
	if p.exact {
		q.fx, q.fy = float64(p.a*x+p.b*y+p.x), float64(p.c*x+p.d*y+p.y)
	} else {
		q.fx, q.fy = p.fa*float64(x)+p.fb*float64(y)+p.fx, p.fc*float64(x)+p.fd*float64(y)+p.fy
	}
	return q
}

// apply gives the place of a point in floats.
func (p placement) apply(q gds.Point) (x, y float64) {
	if p.exact {
		ix, iy := p.whole(q)
		return float64(ix), float64(iy)
	}
	fx, fy := float64(q.X), float64(q.Y)
	return p.fa*fx + p.fb*fy + p.fx, p.fc*fx + p.fd*fy + p.fy
}

// whole gives the place of a point under an exact placement.
func (p placement) whole(q gds.Point) (x, y int64) {
	return p.a*int64(q.X) + p.b*int64(q.Y) + p.x, p.c*int64(q.X) + p.d*int64(q.Y) + p.y
}

// Flat is an element at a place.
type Flat struct {
	*Element
	Top    string
	at     placement
	within int // the placement of the watched cell that holds it, from 1; 0: none
}

// Key names the element at its place, without its layer: equal keys are equal figures with equal records.
func (f *Flat) Key() string {
	k := []byte(fmt.Sprintf("%v %q %q", f.Kind, f.Rest, f.Text))
	if f.Kind == Path || f.Kind == Text {
		k = fmt.Appendf(k, " x%v", f.at.scale)
	}
	if f.Kind == Text {
		k = fmt.Appendf(k, " %v %v %v %v %v %v %v %v", f.at.a, f.at.b, f.at.c, f.at.d, f.at.fa, f.at.fb, f.at.fc, f.at.fd)
	}
	for _, p := range f.Points {
		if f.at.exact {
			x, y := f.at.whole(p)
			k = fmt.Appendf(k, " %d,%d", x, y)
		} else {
			x, y := f.at.apply(p)
			k = fmt.Appendf(k, " %v,%v", x, y)
		}
	}
	return string(k)
}

// ErrTooMany says that a layout is larger than the caller wants to see.
type ErrTooMany struct{ Limit int }

func (e ErrTooMany) Error() string {
	return fmt.Sprintf("more than %d flat elements or placements", e.Limit)
}

// flattener goes down a layout.
type flattener struct {
	l     *Layout
	cells map[string]*Cell
	left  int
	limit int
	open  string // why places are not certain
	watch string // a cell whose placements are numbered
	seen  int    // of them
	emit  func(Flat)
}

// Flatten gives every element that is no reference at every place under every top, depth first. References to cells that are
// not there give nothing. Not more than limit elements and placements are gone through.
func (l *Layout) Flatten(limit int, emit func(Flat)) (open string, err error) {
	return l.flatten(l.Tops(), "", limit, emit)
}

// flatten goes down from some cells, and numbers the placements of another that it comes across.
func (l *Layout) flatten(tops []string, watch string, limit int, emit func(Flat)) (open string, err error) {
	f := flattener{l: l, cells: map[string]*Cell{}, left: limit, limit: limit, watch: watch, emit: emit}
	for i := range l.Cells {
		f.cells[l.Cells[i].Name] = &l.Cells[i]
	}
	for _, top := range tops {
		if f.cells[top] == nil {
			return "", fmt.Errorf("there is no cell %s", top)
		}
		if err := f.down(top, f.cells[top], upright, 0, 0); err != nil {
			return "", err
		}
	}
	return f.open, nil
}

func (f *flattener) down(top string, c *Cell, at placement, depth, within int) error {
	if c.Name == f.watch && c.Name != top {
		f.seen++
		within = f.seen
	}
	if depth > len(f.l.Cells) {
		return fmt.Errorf("a loop of references at %s", c.Name)
	}
	for i := range c.Elements {
		e := &c.Elements[i]
		if f.left--; f.left < 0 {
			return ErrTooMany{f.limit}
		}
		if e.Kind < Reference {
			f.emit(Flat{e, top, at, within})
			continue
		}
		child := f.cells[e.Text]
		if child == nil {
			continue
		}
		for row := range max(1, e.Rows) {
			for column := range max(1, e.Columns) {
				if f.left--; f.left < 0 {
					return ErrTooMany{f.limit}
				}
				x, y := f.element(e, column, row)
				if err := f.down(top, child, at.within(e.Strans, x, y), depth+1, within); err != nil {
					return err
				}
			}
		}
	}
	return nil
}

// element gives the place of an element of an array in the cell that holds the array.
func (f *flattener) element(e *Element, column, row int) (x, y int64) {
	o := e.Points[0]
	x, y = int64(o.X), int64(o.Y)
	if e.Kind != Array {
		return x, y
	}
	part := func(from, columnEnd, rowEnd int32) int64 {
		// The sum of the two quotients has the denominator columns*rows.
		columns, rows := int64(e.Columns), int64(e.Rows)
		n := int64(column)*(int64(columnEnd)-int64(from))*rows + int64(row)*(int64(rowEnd)-int64(from))*columns
		d := columns * rows
		q := floorDiv(2*n+d, 2*d)
		if 2*n+d == 2*d*q && d > 1 && n%d != 0 {
			f.open = "an element of an array lies in the middle between two units"
		}
		return q
	}
	return x + part(o.X, e.Points[1].X, e.Points[2].X), y + part(o.Y, e.Points[1].Y, e.Points[2].Y)
}

func floorDiv(a, b int64) int64 {
	q := a / b
	if a%b != 0 && (a < 0) != (b < 0) {
		q--
	}
	return q
}
