package gds

// This file says where the elements of an array lie.

// Lattice is the grid of an array. Where Exact, element (c, r) lies at the array's origin plus c times Column plus r times
// Row; otherwise each place is rounded by itself, see Placement.Element.
type Lattice struct {
	Columns, Rows    int32
	ColumnX, ColumnY int64 // step from one column to the next, whole units; meaningful where Exact
	RowX, RowY       int64 // step from one row to the next
	Exact            bool  // both steps are whole units
}

// PlacementOf gives what a reference says beyond its turn and place, or nil.
func (l *Library) PlacementOf(ref *Ref) *Placement {
	if ref.Extra == 0 {
		return nil
	}
	return &l.Placements[ref.Extra-1]
}

// Lattice gives the grid of a reference: 1 by 1, exact, for a single placement.
func (l *Library) Lattice(ref *Ref) Lattice {
	p := l.PlacementOf(ref)
	if p == nil {
		return Lattice{Columns: 1, Rows: 1, Exact: true}
	}
	return p.Lattice(ref.At)
}

// Lattice gives the grid of an array whose origin is at.
func (p *Placement) Lattice(at Point) Lattice {
	g := Lattice{Columns: p.Columns, Rows: p.Rows, Exact: true}
	columns, rows := int64(p.Columns), int64(p.Rows)
	if columns > 1 {
		dx, dy := int64(p.ColumnEnd.X)-int64(at.X), int64(p.ColumnEnd.Y)-int64(at.Y)
		g.ColumnX, g.ColumnY = dx/columns, dy/columns
		g.Exact = dx%columns == 0 && dy%columns == 0
	}
	if rows > 1 {
		dx, dy := int64(p.RowEnd.X)-int64(at.X), int64(p.RowEnd.Y)-int64(at.Y)
		g.RowX, g.RowY = dx/rows, dy/rows
		g.Exact = g.Exact && dx%rows == 0 && dy%rows == 0
	}
	return g
}

// Element gives the place of an element of the array whose origin is at: at + column*(ColumnEnd-at)/Columns +
// row*(RowEnd-at)/Rows, where the exact sum of the two quotients is rounded to the nearest whole unit, ties to even. So the
// elements of an array can be written as single references at the very same places.
func (p *Placement) Element(at Point, column, row int32) (x, y int64) {
	c, r := int64(column), int64(row)
	columns, rows := int64(p.Columns), int64(p.Rows)
	x = step(c*(int64(p.ColumnEnd.X)-int64(at.X)), columns, r*(int64(p.RowEnd.X)-int64(at.X)), rows)
	y = step(c*(int64(p.ColumnEnd.Y)-int64(at.Y)), columns, r*(int64(p.RowEnd.Y)-int64(at.Y)), rows)
	return x + int64(at.X), y + int64(at.Y)
}

// step gives a/m + b/n as a whole number, ties to even; m, n > 0.
// Spans are below 2^33 and counts at most 2^16, so that a and b stay below 2^49, and the fraction's parts below 2^33.
func step(a, m, b, n int64) int64 {
	whole := a/m + b/n
	a, b = a%m, b%n
	if a == 0 && b == 0 {
		return whole
	}
	over, under := a*n+b*m, m*n // |over| < 2*under
	whole += over / under
	over %= under
	if over < 0 {
		over += under
		whole--
	}
	if twice := 2 * over; twice > under || twice == under && whole&1 != 0 {
		whole++
	}
	return whole
}
