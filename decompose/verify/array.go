package verify

import (
	"cmp"
	"encoding/binary"
	"fmt"
	"slices"

	"maskpair/gds"
)

// This file compares references. A reference may name a variant of what it named; an array may have become several arrays and
// single references, with all other records, that lie exactly where its elements lay.

// reference takes a reference.
func (c *comparer) reference() (*mismatch, error) {
	e := &c.was
	name := e.target()
	f, err := c.here(0)
	if err != nil {
		return nil, err
	}
	if f != nil && f.kind == e.kind && c.places(f, name) {
		if f.target() == name && f.same(e) || f.target() != name && f.sameBut(e, gds.SNAME) {
			c.take(1)
			return nil, nil
		}
	}
	if e.kind == gds.AREF {
		n, err := c.split(name)
		if err != nil {
			return nil, err
		}
		if n > 0 {
			c.take(n)
			return nil, nil
		}
	}
	return c.differs(c.references, "is lost or changed"), nil
}

// places says whether a reference places a structure of the input or a variant of it.
func (c *comparer) places(f *element, name string) bool {
	got := f.target()
	return got == name || c.variants[name][got]
}

// split says how many elements are the parts of the array at hand; 0 where they do not make it up.
func (c *comparer) split(name string) (int, error) {
	e := &c.was
	whole := gridOf(e)
	total, n := int64(0), 0
	var parts []grid
	for total < whole.size() {
		f, err := c.here(n)
		if err != nil {
			return 0, err
		}
		if f == nil || !f.reference() || !c.places(f, name) || !f.sameWithout(e, gds.SREF, gds.AREF, gds.SNAME, gds.COLROW, gds.XY) {
			return 0, nil
		}
		parts = append(parts, gridOf(f))
		total += parts[n].size()
		n++
	}
	if total > whole.size() {
		return 0, nil
	}
	same, err := whole.madeUpOf(parts)
	if err != nil {
		return 0, fmt.Errorf("%s: element %d at byte %d: %w", c.drawn.name, c.before.count, e.offset, err)
	}
	if !same {
		return 0, nil
	}
	return n, nil
}

// grid is where a reference puts its structure.
type grid struct {
	at gds.Point
	p  gds.Placement
}

func gridOf(e *element) grid {
	points := e.points(nil)
	g := grid{at: points[0], p: gds.Placement{Columns: 1, Rows: 1}}
	if e.kind == gds.AREF && len(points) == 3 {
		b := e.find(gds.COLROW)
		g.p.Columns, g.p.Rows = int32(binary.BigEndian.Uint16(b)), int32(binary.BigEndian.Uint16(b[2:]))
		g.p.ColumnEnd, g.p.RowEnd = points[1], points[2]
	}
	return g
}

func (g *grid) size() int64 { return int64(g.p.Columns) * int64(g.p.Rows) }

// element gives the place of an element.
func (g *grid) element(column, row int32) place {
	if column|row == 0 {
		return place{int64(g.at.X), int64(g.at.Y)}
	}
	x, y := g.p.Element(g.at, column, row)
	return place{x, y}
}

type place struct{ x, y int64 }

// mostPlacesListed is the most elements of an array whose places are listed; arrays on a lattice of whole steps that span the
// plane take a bit for each element instead.
const mostPlacesListed = 1 << 26

// madeUpOf says whether the parts, which have as many elements as the whole, lie where its elements lie, each place as often.
func (g *grid) madeUpOf(parts []grid) (bool, error) {
	if l := g.p.Lattice(g.at); l.Exact && short(l.ColumnX, l.ColumnY, l.RowX, l.RowY) && l.ColumnX*l.RowY != l.ColumnY*l.RowX {
		return g.filledBy(parts, &l), nil
	}
	if g.size() > mostPlacesListed {
		return false, fmt.Errorf("an array of %d elements without whole steps is more than can be compared (%d)", g.size(), mostPlacesListed)
	}
	list := func(grids []grid) []place {
		out := make([]place, 0, g.size())
		for i := range grids {
			for row := range grids[i].p.Rows {
				for column := range grids[i].p.Columns {
					out = append(out, grids[i].element(column, row))
				}
			}
		}
		slices.SortFunc(out, func(p, q place) int { return cmp.Or(cmp.Compare(p.x, q.x), cmp.Compare(p.y, q.y)) })
		return out
	}
	return slices.Equal(list([]grid{*g}), list(parts)), nil
}

// short says whether steps are below 2^28.
func short(steps ...int64) bool {
	for _, v := range steps {
		if v >= 1<<28 || v <= -1<<28 {
			return false
		}
	}
	return true
}

// filledBy does the same on a lattice whose steps span the plane: each place is one element, and each must be taken once.
// Steps are below 2^28 and differences of places below 2^34, so that the sum of two products is below 2^63.
func (g *grid) filledBy(parts []grid, l *gds.Lattice) bool {
	taken := make([]uint64, (g.size()+63)/64)
	det := l.ColumnX*l.RowY - l.ColumnY*l.RowX
	for i := range parts {
		for row := range parts[i].p.Rows {
			for column := range parts[i].p.Columns {
				p := parts[i].element(column, row)
				dx, dy := p.x-int64(g.at.X), p.y-int64(g.at.Y)
				c, r := dx*l.RowY-dy*l.RowX, dy*l.ColumnX-dx*l.ColumnY
				if c%det != 0 || r%det != 0 {
					return false
				}
				c, r = c/det, r/det
				if c < 0 || r < 0 || c >= int64(g.p.Columns) || r >= int64(g.p.Rows) {
					return false
				}
				k := r*int64(g.p.Columns) + c
				if taken[k/64]&(1<<(k%64)) != 0 {
					return false
				}
				taken[k/64] |= 1 << (k % 64)
			}
		}
	}
	return true
}
