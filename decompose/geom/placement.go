package geom

// This file moves figures about: the eight orientations that keep axis-parallel edges axis-parallel, and a shift.

// Placement turns local coordinates into the plane: first the orientation, then the shift by (X, Y).
//
// Turn 0 to 3 are quarter turns counter-clockwise; 4 to 7 mirror about the x axis first (y becomes -y) and then make
// Turn-4 quarter turns, as STRANS and ANGLE do (GDSII Stream Format Manual 6.0, STRANS).
type Placement struct {
	Turn uint8
	X, Y int64
}

// turned applies the orientation alone.
func turned(turn uint8, p Point) Point {
	if turn&4 != 0 {
		p.Y = -p.Y
	}
	switch turn & 3 {
	case 1:
		return Point{-p.Y, p.X}
	case 2:
		return Point{-p.X, -p.Y}
	case 3:
		return Point{p.Y, -p.X}
	}
	return p
}

// Apply gives the place of a local point.
func (t Placement) Apply(p Point) Point {
	p = turned(t.Turn, p)
	return Point{p.X + t.X, p.Y + t.Y}
}

// ApplyRect gives the place of a local rectangle.
func (t Placement) ApplyRect(r Rect) Rect {
	p, q := t.Apply(Point{r.X1, r.Y1}), t.Apply(Point{r.X2, r.Y2})
	return Rect{min(p.X, q.X), min(p.Y, q.Y), max(p.X, q.X), max(p.Y, q.Y)}
}

// Inverse leads back from the plane to local coordinates.
func (t Placement) Inverse() Placement {
	turn := t.Turn & 7
	if turn < 4 {
		turn = -turn & 3 // a mirrored orientation undoes itself
	}
	p := turned(turn, Point{t.X, t.Y})
	return Placement{turn, -p.X, -p.Y}
}

// After is the placement that applies inner first and t to the outcome.
func (t Placement) After(inner Placement) Placement {
	turn := (t.Turn & 3) + (inner.Turn & 3)
	if t.Turn&4 != 0 { // mirroring turns the inner turn round
		turn = (t.Turn & 3) - (inner.Turn & 3)
	}
	p := t.Apply(Point{inner.X, inner.Y})
	return Placement{turn&3 | (t.Turn^inner.Turn)&4, p.X, p.Y}
}
