package decompose

import "maskpair/gds"

// placement is a placement in work units that does not magnify: one of the eight orientations and a shift.
type placement struct {
	turn gds.Orientation
	x, y int64
}

// orientation is a number from 0 to 7 as an orientation.
func orientation(n uint8) gds.Orientation { return gds.Orientation(n) }

// apply maps a point.
func (p placement) apply(x, y int64) (int64, int64) {
	x, y = p.turn.Apply(x, y)
	return x + p.x, y + p.y
}

// compose gives the placement that maps by inner first and by p then.
func (p placement) compose(inner placement) placement {
	x, y := p.apply(inner.x, inner.y)
	return placement{inner.turn.Then(p.turn), x, y}
}

// applyBox maps a box; its corners come out in order.
func (p placement) applyBox(b Box) Box {
	x1, y1 := p.apply(b.X1, b.Y1)
	x2, y2 := p.apply(b.X2, b.Y2)
	return Box{min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)}
}

// inverse gives the placement that undoes p.
func (p placement) inverse() placement {
	q := placement{turn: p.turn.Inverse()}
	x, y := q.apply(p.x, p.y)
	q.x, q.y = -x, -y
	return q
}

// lattice is where a reference puts its structure. Element (c, r) has number r*columns+c.
type lattice struct {
	gds.Lattice
	ref *gds.Ref
	at  *gds.Placement // nil: a single placement
}

func latticeOf(lib *gds.Library, ref *gds.Ref) lattice {
	return lattice{lib.Lattice(ref), ref, lib.PlacementOf(ref)}
}

// element gives the place of one element, in database units of the structure that holds the reference.
func (l *lattice) element(column, row int64) placement {
	p := placement{gds.Orientation(l.ref.Turn), int64(l.ref.At.X), int64(l.ref.At.Y)}
	switch {
	case l.at == nil:
	case l.Exact:
		p.x += column*l.ColumnX + row*l.RowX
		p.y += column*l.ColumnY + row*l.RowY
	default:
		p.x, p.y = l.at.Element(l.ref.At, int32(column), int32(row))
	}
	return p
}

// rigid tells whether a reference places by an orientation and a shift alone. With an absolute angle the turn depends on what
// holds the reference; an absolute magnification of 1 is none unless something above magnifies, which is not rigid itself.
func rigid(lib *gds.Library, ref *gds.Ref) bool {
	if ref.Extra == 0 {
		return true
	}
	p := &lib.Placements[ref.Extra-1]
	return p.Exact && !p.AbsoluteAngle
}

// elements is the number of placements that a reference makes.
func elements(lib *gds.Library, ref *gds.Ref) int64 {
	if ref.Extra == 0 {
		return 1
	}
	p := &lib.Placements[ref.Extra-1]
	return int64(p.Columns) * int64(p.Rows)
}
