package gds

import (
	"encoding/binary"
	"math"
)

// This file takes one element apart: from BOUNDARY, PATH, SREF, AREF, TEXT, NODE or BOX to ENDEL, all of it in memory. Both
// passes use it: the index to check and to keep, the copy to find what is to be changed.

// element is what an element says. Slices are parts of what was parsed.
type element struct {
	kind          Kind
	seen          uint64 // kinds of records that were met
	layer         LayerType
	layerAt       int // offset of the data of LAYER in the element
	typeAt        int // of DATATYPE, TEXTTYPE, BOXTYPE or NODETYPE
	name          []byte
	xy            []byte // data of the first XY
	xyAt          int    // offset of the first XY record
	xyRecords     int
	points        int // of all XY records
	text          []byte
	strans        uint16
	magnification float64
	angle         float64
	columns, rows uint16
	pathType      int16
	width         int32
	begin, finish int32
	faultAt       int // offset in the element of the record that is wrong
	faultRecord   Kind
}

// rule is the grammar of one kind of element.
type rule struct {
	allowed uint64 // records that may stand in it, ENDEL aside
	first   uint64 // records that must stand before XY
	last    uint64 // records that must be there at ENDEL
	points  int    // exact number of points; 0: one or more
}

const (
	flagRecords     = 1<<ELFLAGS | 1<<PLEX
	propertyRecords = 1<<PROPATTR | 1<<PROPVALUE
	oldRecords      = 1<<SPACING | 1<<UINTEGER | 1<<USTRING | 1<<ELKEY | 1<<LINKTYPE | 1<<LINKKEYS | 1<<RESERVED
	anyElement      = flagRecords | propertyRecords | oldRecords | 1<<XY
	turnRecords     = 1<<STRANS | 1<<MAG | 1<<ANGLE

	// repeatable records may stand more than once: properties, and XY in a row.
	repeatable = propertyRecords | oldRecords | 1<<XY
	// longXY are the elements whose points may take several XY records.
	longXY = 1<<BOUNDARY | 1<<PATH | 1<<NODE
	// behindXY are the records that may stand behind XY.
	behindXY = propertyRecords | oldRecords | 1<<XY | 1<<STRING

	elementKinds = 1<<BOUNDARY | 1<<PATH | 1<<SREF | 1<<AREF | 1<<TEXT | 1<<NODE | 1<<BOX
)

// rules is the grammar of the elements; it is never written to.
var rules = [kinds]rule{
	BOUNDARY: {anyElement | 1<<LAYER | 1<<DATATYPE, 1<<LAYER | 1<<DATATYPE, 1 << XY, 0},
	PATH: {anyElement | 1<<LAYER | 1<<DATATYPE | 1<<PATHTYPE | 1<<WIDTH | 1<<BGNEXTN | 1<<ENDEXTN,
		1<<LAYER | 1<<DATATYPE, 1 << XY, 0},
	SREF: {anyElement | turnRecords | 1<<SNAME, 1 << SNAME, 1 << XY, 1},
	AREF: {anyElement | turnRecords | 1<<SNAME | 1<<COLROW, 1<<SNAME | 1<<COLROW, 1 << XY, 3},
	TEXT: {anyElement | turnRecords | 1<<LAYER | 1<<TEXTTYPE | 1<<PRESENTATION | 1<<PATHTYPE | 1<<WIDTH | 1<<STRING |
		1<<BGNEXTN | 1<<ENDEXTN, 1<<LAYER | 1<<TEXTTYPE, 1<<XY | 1<<STRING, 1},
	NODE: {anyElement | 1<<LAYER | 1<<NODETYPE, 1<<LAYER | 1<<NODETYPE, 1 << XY, 0},
	BOX:  {anyElement | 1<<LAYER | 1<<BOXTYPE, 1<<LAYER | 1<<BOXTYPE, 1 << XY, 0},
}

// heads is the only head that a record of fixed length can have, by kind; 0 for the others. It is never written to.
var heads = func() (heads [256]uint32) {
	for k := range Kind(kinds) {
		if n, fixed := k.Length(); fixed && !formats[k].old {
			heads[k] = uint32(4+n)<<16 | uint32(k)<<8 | uint32(k.Type())
		}
	}
	return heads
}()

// checkRecord checks the head of a record, its first four bytes, against the table.
func checkRecord(head uint32) error {
	if kind := Kind(head >> 8); head == heads[kind] {
		return nil
	}
	return checkHead(int(head>>16), Kind(head>>8), DataType(head))
}

// checkHead is checkRecord for records of any length, and for what is wrong.
func checkHead(length int, kind Kind, data DataType) error {
	if err := checkLength(length); err != nil {
		return err
	}
	if kind >= kinds {
		return faultf(ErrKind, "%v is no record of the format", kind)
	}
	f := &formats[kind]
	if f.old {
		return nil
	}
	if data != f.data {
		return faultf(ErrType, "%v holds data of type %d (%v), not %d (%v)", kind, uint8(data), data, uint8(f.data), f.data)
	}
	if f.length != variable && length-4 != f.length {
		return faultf(ErrLength, "%v length %d is not %d", kind, length-4, f.length)
	}
	return nil
}

// parse takes the element at the start of b apart. It gives the size of the element, or 0 where b ends before it does. b
// begins with the whole record that opens an element.
func (e *element) parse(b []byte) (size int, err error) {
	*e = element{kind: Kind(b[2]), magnification: 1}
	at, whole, err := e.walk(b)
	if err != nil {
		e.faultAt, e.faultRecord = at, Kind(b[at+2])
		return 0, err
	}
	if !whole {
		return 0, nil
	}
	return at, nil
}

// walk goes through the records of the element. It gives where it ends (whole), where b ends before it, or which record is
// wrong.
func (e *element) walk(b []byte) (at int, whole bool, err error) {
	rule := &rules[e.kind]
	at = 4
	last := e.kind
	for {
		if len(b)-at < 4 {
			return at, false, nil
		}
		head := binary.BigEndian.Uint32(b[at:])
		length, kind := int(head>>16), Kind(head>>8)
		if err := checkRecord(head); err != nil {
			return at, false, err
		}
		if last == PROPATTR && kind != PROPVALUE {
			return at, false, faultf(ErrMissing, "PROPATTR must be followed by PROPVALUE, not by %v", kind)
		}
		bit := kind.bit()
		if kind == ENDEL {
			if missing := rule.last &^ e.seen; missing != 0 {
				return at, false, faultf(ErrMissing, "%v is missing", firstKind(missing))
			}
			return at + length, true, nil
		}
		if rule.allowed&bit == 0 {
			return at, false, faultf(ErrOrder, "%v cannot stand in %v, which has no ENDEL yet", kind, e.kind)
		}
		if e.seen&bit&^repeatable != 0 {
			return at, false, faultf(ErrOrder, "%v stands twice", kind)
		}
		if e.seen&(1<<XY) != 0 && behindXY&bit == 0 {
			return at, false, faultf(ErrOrder, "%v stands behind XY", kind)
		}
		if len(b)-at < length {
			return at, false, nil
		}
		if err := e.record(rule, kind, last, b[at+4:at+length], at); err != nil {
			return at, false, err
		}
		e.seen |= bit
		last = kind
		at += length
	}
}

// record takes one record of the element.
func (e *element) record(rule *rule, kind, last Kind, data []byte, at int) error {
	switch kind {
	case LAYER:
		e.layer.Layer = binary.BigEndian.Uint16(data)
		e.layerAt = at + 4
	case DATATYPE, TEXTTYPE, BOXTYPE, NODETYPE:
		e.layer.Type = binary.BigEndian.Uint16(data)
		e.typeAt = at + 4
	case XY:
		return e.takeXY(rule, last, data, at)
	case WIDTH:
		e.width = int32(binary.BigEndian.Uint32(data))
	case PATHTYPE:
		e.pathType = int16(binary.BigEndian.Uint16(data))
	case BGNEXTN:
		e.begin = int32(binary.BigEndian.Uint32(data))
	case ENDEXTN:
		e.finish = int32(binary.BigEndian.Uint32(data))
	case SNAME:
		e.name = trimNUL(data)
		if len(e.name) == 0 {
			return faultf(ErrValue, "SNAME is empty")
		}
	case STRANS:
		e.strans = binary.BigEndian.Uint16(data)
	case MAG:
		e.magnification = DecodeReal8(data)
		if !(e.magnification > 0) {
			return faultf(ErrValue, "MAG %v is not above zero", e.magnification)
		}
	case ANGLE:
		e.angle = DecodeReal8(data)
	case COLROW:
		e.columns, e.rows = binary.BigEndian.Uint16(data), binary.BigEndian.Uint16(data[2:])
		if e.columns == 0 || e.rows == 0 {
			return faultf(ErrValue, "COLROW says %d columns and %d rows: both must be 1 or more", e.columns, e.rows)
		}
	case STRING:
		e.text = trimNUL(data)
	case PROPVALUE:
		if last != PROPATTR {
			return faultf(ErrOrder, "PROPVALUE without PROPATTR")
		}
	case PROPATTR:
		if e.seen&(1<<XY) == 0 {
			return faultf(ErrOrder, "PROPATTR stands before XY")
		}
	}
	return nil
}

// takeXY takes an XY record.
func (e *element) takeXY(rule *rule, last Kind, data []byte, at int) error {
	if len(data)&7 != 0 {
		return faultf(ErrLength, "XY length %d is not a multiple of 8", len(data))
	}
	if missing := rule.first &^ e.seen; missing != 0 {
		return faultf(ErrMissing, "%v is missing before XY", firstKind(missing))
	}
	if e.xyRecords == 0 {
		e.xy, e.xyAt = data, at
	} else if last != XY || longXY&e.kind.bit() == 0 {
		return faultf(ErrOrder, "XY stands twice")
	}
	e.xyRecords++
	e.points += len(data) / 8
	if rule.points != 0 && e.points != rule.points {
		return faultf(ErrLength, "XY of %v has %d points, not %d", e.kind, e.points, rule.points)
	}
	if e.points == 0 {
		return faultf(ErrLength, "XY has no points")
	}
	if e.points > math.MaxInt32 {
		return faultf(ErrTooMany, "more than %d points", math.MaxInt32)
	}
	return nil
}

// firstKind gives the first kind of a set.
func firstKind(set uint64) Kind {
	for k := range Kind(kinds) {
		if set&k.bit() != 0 {
			return k
		}
	}
	return kinds
}

// trimNUL takes the padding off a string.
func trimNUL(b []byte) []byte {
	for len(b) > 0 && b[len(b)-1] == 0 {
		b = b[:len(b)-1]
	}
	return b
}

// pointAt reads the point at the start of b.
func pointAt(b []byte) Point {
	v := binary.BigEndian.Uint64(b)
	return Point{int32(v >> 32), int32(v)}
}

// rectangle says whether the points in xy are one axis-parallel rectangle with area: its four corners in either sense from
// any start, closed or not.
func rectangle(xy []byte) (Rect, bool) {
	if len(xy) != 40 && len(xy) != 32 {
		return Rect{}, false
	}
	p0, p1 := binary.BigEndian.Uint64(xy), binary.BigEndian.Uint64(xy[8:])
	p2, p3 := binary.BigEndian.Uint64(xy[16:]), binary.BigEndian.Uint64(xy[24:])
	if len(xy) == 40 && binary.BigEndian.Uint64(xy[32:]) != p0 {
		return Rect{}, false
	}
	// The upper half of a point is x, the lower y. Sides one and three are upright and the others level, or the reverse.
	upright := (p0^p1)>>32|(p2^p3)>>32 == 0 && uint32(p1^p2)|uint32(p3^p0) == 0
	level := uint32(p0^p1)|uint32(p2^p3) == 0 && (p1^p2)>>32|(p3^p0)>>32 == 0
	if !upright && !level {
		return Rect{}, false
	}
	x0, y0, x2, y2 := int32(p0>>32), int32(p0), int32(p2>>32), int32(p2)
	if x0 == x2 || y0 == y2 {
		return Rect{}, false
	}
	return Rect{min(x0, x2), min(y0, y2), max(x0, x2), max(y0, y2)}, true
}
