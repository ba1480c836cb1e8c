package twin

import (
	"fmt"
	"math"

	"maskpair/gds"
)

// This file flattens a layout: every element at every place that the hierarchy gives it.

// placement takes points of a cell to the top. While all turns are quarter turns and all magnifications whole it counts in
// whole units; else in floats, which decide nothing: what they leave near the middle between two units makes a layout open.
type placement struct {
	exact      bool
	a, b, c, d int64 // (x, y) goes to (a*x + b*y + x0, c*x + d*y + y0)
	x, y       int64
	fa, fb     float64
	fc, fd     float64
	fx, fy     float64
	scale      float64 // what a width that is not absolute is multiplied with
}

var upright = placement{exact: true, a: 1, d: 1, scale: 1}

// floats gives the placement counted in floats.
func (p placement) floats() placement {
	if p.exact {
		p.fa, p.fb, p.fc, p.fd = float64(p.a), float64(p.b), float64(p.c), float64(p.d)
		p.fx, p.fy = float64(p.x), float64(p.y)
		p.exact = false
	}
	return p
}

// within gives the placement of what s and the place (x, y) put into a cell that p places.
func (p placement) within(s gds.Strans, x, y int64) placement {
	mag := s.Magnification
	if mag == 0 {
		mag = 1
	}
	quarters := s.Angle / 90
	if p.exact && quarters == math.Trunc(quarters) && mag == math.Trunc(mag) && mag < 1<<20 && !s.AbsoluteMagnification && !s.AbsoluteAngle {
		m := int64(mag)
		q := placement{exact: true, a: 1, d: 1}
		if s.Mirror {
			q.d = -1
		}
		for range ((int64(quarters) % 4) + 4) % 4 {
			q.a, q.b, q.c, q.d = -q.c, -q.d, q.a, q.b // a quarter turn more: (x, y) to (-y, x)
		}
		return placement{
			exact: true, scale: p.scale * mag,
			a: m * (p.a*q.a + p.b*q.c), b: m * (p.a*q.b + p.b*q.d),
			c: m * (p.c*q.a + p.d*q.c), d: m * (p.c*q.b + p.d*q.d),
			x: p.a*x + p.b*y + p.x, y: p.c*x + p.d*y + p.y,
		}
	}
	f := p.floats()
	sin, cos := math.Sincos(s.Angle * math.Pi / 180)
	if quarters == math.Trunc(quarters) {
		sin, cos = math.Round(sin), math.Round(cos)
	}
	qa, qb, qc, qd := mag*cos, -mag*sin, mag*sin, mag*cos
	if s.Mirror {
		qb, qd = -qb, -qd
	}
	fx, fy := float64(x), float64(y)
	return placement{
		scale: p.scale * mag,
		fa:    f.fa*qa + f.fb*qc, fb: f.fa*qb + f.fb*qd,
		fc: f.fc*qa + f.fd*qc, fd: f.fc*qb + f.fd*qd,
		fx: f.fa*fx + f.fb*fy + f.fx, fy: f.fc*fx + f.fd*fy + f.fy,
	}
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
	Top string
	at  placement
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
	emit  func(Flat)
}

// Flatten gives every element that is no reference at every place under every top, depth first. References to cells that are
// not there give nothing. Not more than limit elements and placements are gone through.
func (l *Layout) Flatten(limit int, emit func(Flat)) (open string, err error) {
	f := flattener{l: l, cells: map[string]*Cell{}, left: limit, limit: limit, emit: emit}
	for i := range l.Cells {
		f.cells[l.Cells[i].Name] = &l.Cells[i]
	}
	for _, top := range l.Tops() {
		if err := f.down(top, f.cells[top], upright, 0); err != nil {
			return "", err
		}
	}
	return f.open, nil
}

func (f *flattener) down(top string, c *Cell, at placement, depth int) error {
	if depth > len(f.l.Cells) {
		return fmt.Errorf("a loop of references at %s", c.Name)
	}
	for i := range c.Elements {
		e := &c.Elements[i]
		if f.left--; f.left < 0 {
			return ErrTooMany{f.limit}
		}
		if e.Kind < Reference {
			f.emit(Flat{e, top, at})
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
				if e.Strans.AbsoluteMagnification || e.Strans.AbsoluteAngle {
					f.open = "an absolute magnification or angle"
				}
				x, y := f.element(e, column, row)
				if err := f.down(top, child, at.within(e.Strans, x, y), depth+1); err != nil {
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
