package gds

import (
	"encoding/binary"
	"math"

	"maskpair/gds/arena"
)

// This file is what the index keeps of an element of interest: figures, outlines, references and labels, each in one arena
// of the library.

// grow gives a full arena more room. Where the size of the stream is known it looks ahead: what the rest of the stream
// holds if it is like what was read; room that stays untouched costs no memory. least is the fewest bytes that an item
// takes in the stream. There is room for at least need more.
func grow[T any](s []T, need int, read, size, least int64) []T {
	have := int64(len(s))
	room := have + have/2 + 1024
	if size > read && read > 0 {
		ahead := int64(float64(have)*float64(size)/float64(read)*1.02) + 1024
		room = max(room, min(ahead, 64*have))
		room = min(room, have+(size-read)/least+bufferSize/least+1024)
	}
	room = max(room, have+int64(need))
	grown := arena.Make[T](len(s), int(room))
	copy(grown, s)
	return grown
}

// keep keeps of an element what is of interest. b is the element.
func (x *indexer) keep(b []byte) error {
	e := &x.el
	switch e.kind {
	case BOUNDARY:
		if class := x.figures.class(e.layer.Layer, e.layer.Type); class != 0 {
			return x.figure(class, b)
		}
	case PATH:
		if class := x.figures.class(e.layer.Layer, e.layer.Type); class != 0 {
			if e.pathType < 0 || e.pathType == 3 || e.pathType > 4 {
				return faultf(ErrValue, "path type %d is none of 0, 1, 2 and 4", e.pathType)
			}
			return x.figure(class, b)
		}
	case SREF, AREF:
		return x.reference()
	case TEXT:
		if class := x.labels.class(e.layer.Layer, e.layer.Type); class != 0 {
			return x.label(class)
		}
	case BOX:
		if x.figures.class(e.layer.Layer, e.layer.Type) != 0 {
			x.lib.Boxes[e.layer]++
		}
	}
	return nil
}

// figure keeps a boundary or a path.
func (x *indexer) figure(class uint8, b []byte) error {
	lib, e := x.lib, &x.el
	if len(lib.Figures) == cap(lib.Figures) {
		if err := x.moreFigures(x.s.end - x.s.pos); err != nil {
			return err
		}
	}
	var o Outline
	if e.kind == PATH {
		o = Outline{Path: true, PathType: uint8(e.pathType), Width: e.width}
		if e.pathType == 4 {
			o.Begin, o.Finish = e.begin, e.finish
		}
	} else if e.xyRecords == 1 {
		if r, ok := rectangle(e.xy); ok {
			lib.Figures = append(lib.Figures, Figure{Box: r, Class: class})
			return nil
		}
	}
	x.outline(class, o, e.xy, b[e.xyAt+4+len(e.xy):], e.xyRecords-1)
	return nil
}

// outline keeps a figure with its points: xy is the data of its first XY record, rest begins with as many more as it has.
func (x *indexer) outline(class uint8, o Outline, xy, rest []byte, more int) {
	lib := x.lib
	o.First = uint64(len(lib.Points))
	x.addPoints(xy)
	for ; more > 0; more-- {
		length := int(binary.BigEndian.Uint16(rest))
		x.addPoints(rest[4:length])
		rest = rest[length:]
	}
	points := lib.Points[o.First:]
	if n := len(points); !o.Path && n > 1 && points[0] == points[n-1] {
		points = points[:n-1]
		lib.Points = lib.Points[:len(lib.Points)-1]
	}
	o.Count = uint32(len(points))
	if len(lib.Outlines) == cap(lib.Outlines) {
		lib.Outlines = grow(lib.Outlines, 1, x.s.place(), x.size, 32)
	}
	lib.Outlines = append(lib.Outlines, o)
	lib.Figures = append(lib.Figures, Figure{Box: bounds(points), Outline: uint32(len(lib.Outlines)), Class: class})
}

// addPoints appends the points of an XY record to the arena.
func (x *indexer) addPoints(xy []byte) {
	points := x.lib.Points
	if need := len(xy) / 8; cap(points)-len(points) < need {
		points = grow(points, need, x.s.place(), x.size, 8)
	}
	at := len(points)
	points = points[:at+len(xy)/8]
	for i := at; i < len(points); i++ {
		points[i] = pointAt(xy)
		xy = xy[8:]
	}
	x.lib.Points = points
}

// bounds gives the bounding box of one or more points.
func bounds(points []Point) Rect {
	r := Rect{points[0].X, points[0].Y, points[0].X, points[0].Y}
	for _, p := range points[1:] {
		r.X1, r.X2 = min(r.X1, p.X), max(r.X2, p.X)
		r.Y1, r.Y2 = min(r.Y1, p.Y), max(r.Y2, p.Y)
	}
	return r
}

// The bits of STRANS, counted in the manual from the left.
const (
	stransMirror        = 0x8000
	stransMagnification = 0x0004
	stransAngle         = 0x0002
)

// reference keeps an SREF or AREF. Until the end of the stream, its Target is the number of the name.
func (x *indexer) reference() error {
	lib, e := x.lib, &x.el
	if len(lib.Refs) >= math.MaxInt32 {
		return faultf(ErrTooMany, "more than %d references", math.MaxInt32)
	}
	if x.lastRef < 0 || x.names[x.lastRef] != string(e.name) {
		x.lastRef = x.number(e.name)
	}
	ref := Ref{Target: x.lastRef, At: pointAt(e.xy), Array: e.kind == AREF}
	quarter, whole := quarterTurns(e.angle)
	ref.Turn = uint8(quarter)
	mirror := e.strans&stransMirror != 0
	if mirror {
		ref.Turn |= uint8(Mirrored)
	}
	exact := whole && e.magnification == 1
	if !exact {
		ref.Turn &= uint8(Mirrored)
	}
	absolute := e.strans & (stransMagnification | stransAngle)
	if ref.Array || !exact || absolute != 0 {
		p := Placement{Columns: 1, Rows: 1, Mirror: mirror, Magnification: e.magnification, Angle: e.angle, Exact: exact,
			AbsoluteMagnification: absolute&stransMagnification != 0, AbsoluteAngle: absolute&stransAngle != 0}
		if ref.Array {
			p.Columns, p.Rows = int32(e.columns), int32(e.rows)
			p.ColumnEnd, p.RowEnd = pointAt(e.xy[8:]), pointAt(e.xy[16:])
		}
		lib.Placements = append(lib.Placements, p)
		ref.Extra = uint32(len(lib.Placements))
	}
	if len(lib.Refs) == cap(lib.Refs) {
		lib.Refs = grow(lib.Refs, 1, x.s.place(), x.size, 26)
	}
	lib.Refs = append(lib.Refs, ref)
	return nil
}

// label keeps a TEXT.
func (x *indexer) label(class uint8) error {
	e := &x.el
	text, ok := x.texts[string(e.text)]
	if !ok {
		text = string(e.text)
		x.texts[text] = text
	}
	x.lib.Labels = append(x.lib.Labels, Label{At: pointAt(e.xy), Class: class, Text: text})
	return nil
}

// number gives the number of a name.
func (x *indexer) number(name []byte) int32 {
	if id, ok := x.ids[string(name)]; ok {
		return id
	}
	id := int32(len(x.names))
	x.names = append(x.names, string(name))
	x.ids[x.names[id]] = id
	x.defined = append(x.defined, -1)
	return id
}

// resolve turns the numbers of names into targets.
func (x *indexer) resolve() {
	for i := range x.lib.Refs {
		id := x.lib.Refs[i].Target
		if x.defined[id] == -1 {
			x.lib.Missing = append(x.lib.Missing, x.names[id])
			x.defined[id] = int32(-1 - len(x.lib.Missing)) // -2 - i: -1 means not yet met
		}
		if target := x.defined[id]; target >= 0 {
			x.lib.Refs[i].Target = target
		} else {
			x.lib.Refs[i].Target = target + 1
		}
	}
}
