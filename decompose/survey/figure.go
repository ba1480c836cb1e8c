package survey

import (
	"encoding/binary"
	"math"

	"maskpair/gds"
)

// This file looks at one element, record by record: what it is, how wide, whether its sides are axis-parallel.

// figure is the element at hand.
type figure struct {
	kind     gds.Kind
	layer    gds.LayerType
	layered  bool // LAYER was read
	round    bool // a path with round ends
	skew     bool // has a side that is not axis-parallel
	points   int64
	first    uint64 // first point, as in the stream: x above y
	last     uint64 // last point so far
	width    uint32 // of a rectangle or path; 0: none
	named    bool   // SNAME was read
	target   int32
	times    uint64 // placements of a reference
	turnsOdd bool   // a reference with a magnification or an odd angle
}

// elementRecord takes a record of an element.
func (x *scan) elementRecord(rec *gds.Record) error {
	e := &x.el
	switch rec.Kind {
	case gds.LAYER, gds.DATATYPE, gds.TEXTTYPE, gds.BOXTYPE, gds.NODETYPE:
		if rec.Type != gds.Int2 || len(rec.Data) != 2 {
			return x.sized(rec)
		}
		if rec.Kind == gds.LAYER {
			e.layer.Layer, e.layered = uint16At(rec.Data), true
		} else {
			e.layer.Type = uint16At(rec.Data)
		}
	case gds.XY:
		if rec.Type != gds.Int4 || len(rec.Data)&7 != 0 {
			return x.fault(rec, "%w: XY length %d is not a multiple of 8, or its data are no four-byte integers", gds.ErrLength, len(rec.Data))
		}
		if e.kind == gds.BOUNDARY || e.kind == gds.PATH {
			e.outline(rec.Data)
		} else {
			e.points += int64(len(rec.Data) / 8)
		}
	case gds.WIDTH:
		if err := x.sized(rec); err != nil {
			return err
		}
		e.width = magnitude(int32At(rec.Data))
	case gds.PATHTYPE:
		if err := x.sized(rec); err != nil {
			return err
		}
		e.round = uint16At(rec.Data) == 1
	case gds.SNAME, gds.COLROW, gds.MAG, gds.ANGLE:
		return x.referenceRecord(rec)
	case gds.ENDEL:
		return x.endElement(rec)
	case gds.BOUNDARY, gds.PATH, gds.SREF, gds.AREF, gds.TEXT, gds.BOX, gds.NODE, gds.BGNSTR, gds.ENDSTR, gds.ENDLIB:
		return x.fault(rec, "%w: %v cannot stand in a %v, which has no ENDEL yet", gds.ErrOrder, rec.Kind, e.kind)
	}
	return nil
}

// magnitude is |v|, also of the least of all.
func magnitude(v int32) uint32 {
	if v < 0 {
		return uint32(-int64(v))
	}
	return uint32(v)
}

// outline takes the points of one XY record of a boundary or path.
func (e *figure) outline(xy []byte) {
	if len(xy) == 0 {
		return
	}
	if e.points == 0 {
		e.first = binary.BigEndian.Uint64(xy)
		if e.kind == gds.BOUNDARY {
			e.width = rectangleWidth(xy)
			if e.width != 0 {
				e.points, e.last = int64(len(xy)/8), e.first
				return
			}
		}
		e.last = e.first
	} else {
		e.width = pathOnly(e)
	}
	e.points += int64(len(xy) / 8)
	last := e.last
	for ; len(xy) > 0; xy = xy[8:] {
		p := binary.BigEndian.Uint64(xy)
		if p>>32 != last>>32 && uint32(p) != uint32(last) {
			e.skew = true
		}
		last = p
	}
	e.last = last
}

// pathOnly gives the width of a path, and none for a boundary that goes on in another record: it is no rectangle.
func pathOnly(e *figure) uint32 {
	if e.kind == gds.PATH {
		return e.width
	}
	return 0
}

// rectangleWidth gives the short side of a boundary that is one axis-parallel rectangle: four corners in turn, closed or not. It
// is 0 for every other.
func rectangleWidth(xy []byte) uint32 {
	if len(xy) != 40 && len(xy) != 32 {
		return 0
	}
	p0, p1 := binary.BigEndian.Uint64(xy), binary.BigEndian.Uint64(xy[8:])
	p2, p3 := binary.BigEndian.Uint64(xy[16:]), binary.BigEndian.Uint64(xy[24:])
	if len(xy) == 40 && binary.BigEndian.Uint64(xy[32:]) != p0 {
		return 0
	}
	upright := (p0^p1)>>32|(p2^p3)>>32 == 0 && uint32(p1^p2)|uint32(p3^p0) == 0
	level := uint32(p0^p1)|uint32(p2^p3) == 0 && (p1^p2)>>32|(p3^p0)>>32 == 0
	if !upright && !level {
		return 0
	}
	dx := int64(int32(p0>>32)) - int64(int32(p2>>32))
	dy := int64(int32(p0)) - int64(int32(p2))
	return uint32(min(max(dx, -dx), max(dy, -dy))) // at most 2^32 - 1
}

// referenceRecord takes a record that only references have (and texts, where it says nothing of interest).
func (x *scan) referenceRecord(rec *gds.Record) error {
	e := &x.el
	if e.kind != gds.SREF && e.kind != gds.AREF {
		return nil
	}
	if err := x.sized(rec); err != nil {
		return err
	}
	switch rec.Kind {
	case gds.SNAME:
		name := rec.Data
		for len(name) > 0 && name[len(name)-1] == 0 {
			name = name[:len(name)-1]
		}
		if len(name) == 0 {
			return x.fault(rec, "%w: SNAME is empty", gds.ErrValue)
		}
		if x.lastRef < 0 || x.names[x.lastRef] != string(name) {
			x.lastRef = x.number(name)
		}
		e.target, e.named = x.lastRef, true
	case gds.COLROW:
		columns, rows := uint64(uint16At(rec.Data)), uint64(uint16At(rec.Data[2:]))
		if columns == 0 || rows == 0 {
			return x.fault(rec, "%w: COLROW says %d columns and %d rows: both must be 1 or more", gds.ErrValue, columns, rows)
		}
		if e.kind == gds.AREF {
			e.times = columns * rows
		}
	case gds.MAG:
		e.turnsOdd = e.turnsOdd || gds.DecodeReal8(rec.Data) != 1
	case gds.ANGLE:
		// As in gds: what misses a quarter turn by less than 1e-10 degrees is meant to be one.
		e.turnsOdd = e.turnsOdd || math.Abs(math.Remainder(gds.DecodeReal8(rec.Data), 90)) > 1e-10
	}
	return nil
}

// endElement counts the element that ENDEL ends.
func (x *scan) endElement(rec *gds.Record) error {
	e := &x.el
	x.state = inside
	if e.kind == gds.SREF || e.kind == gds.AREF {
		return x.endReference(rec)
	}
	if e.points == 0 || !e.layered {
		x.state = element
		missing := gds.XY
		if !e.layered {
			missing = gds.LAYER
		}
		return x.fault(rec, "%w: %v is missing", gds.ErrMissing, missing)
	}
	c := x.count()
	switch e.kind {
	case gds.BOUNDARY:
		c.boundaries++
		switch {
		case e.width != 0:
			c.rectangles++
			c.manhattan++
		case !e.skew && (e.first>>32 == e.last>>32 || uint32(e.first) == uint32(e.last)): // the closing side too
			c.manhattan++
		}
	case gds.PATH:
		c.paths++
		if !e.skew && !e.round {
			c.manhattan++
		}
	case gds.TEXT:
		c.texts++
		return nil
	case gds.BOX:
		c.boxes++
		return nil
	case gds.NODE:
		c.nodes++
		return nil
	}
	if e.width != 0 {
		if c.smallest == 0 || e.width < c.smallest {
			c.smallest = e.width
		}
		if !c.widths.count(e.width) {
			c.widthsCut = true
		}
	}
	return nil
}

// endReference keeps a reference; one more to the same target joins the one before.
func (x *scan) endReference(rec *gds.Record) error {
	e := &x.el
	if !e.named || e.points == 0 {
		x.state = element
		missing := gds.XY
		if !e.named {
			missing = gds.SNAME
		}
		return x.fault(rec, "%w: %v is missing", gds.ErrMissing, missing)
	}
	if e.kind == gds.AREF {
		x.out.Arrays++
	} else {
		x.out.References++
	}
	if e.turnsOdd {
		x.out.OddReferences++
	}
	if n := len(x.refs); n > x.structure.firstRef && x.refs[n-1].target == e.target {
		x.refs[n-1].times = add(x.refs[n-1].times, e.times)
		return nil
	}
	x.refs = append(x.refs, reference{e.target, e.times})
	return nil
}
