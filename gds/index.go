package gds

import (
	"encoding/binary"
	"io"
	"math"

	"maskpair/gds/arena"
)

// This file is pass 1: it reads a stream once, checks its grammar, and keeps what is of interest. Elements that are plain
// boundaries (BOUNDARY, LAYER, DATATYPE, XY, ENDEL) are most of every layout and have a loop of their own; all others go
// through element.parse.

// Index reads a stream and gives its index. size is the length of the stream in bytes where it is known, else -1; it only
// serves to size memory. progress, where not nil, is told from time to time how many bytes were read.
//
// Faults of the stream are of type *SyntaxError; errors of r come as they are.
func Index(r io.Reader, size int64, want Interest, progress func(bytes int64)) (*Library, error) {
	x := newIndexer(r, size, want)
	x.s.progress = progress
	if err := x.library(); err != nil {
		return nil, err
	}
	x.resolve()
	return x.lib, nil
}

// maxFigures keeps the numbers of figures, and one past the last of them, in a uint32.
const maxFigures = math.MaxUint32 - 1

// indexer is the state of pass 1.
type indexer struct {
	s               *Scanner
	size            int64
	lib             *Library
	figures, labels *classes
	limit           int // of figures
	el              element
	cur             Structure
	elements        int64 // of cur

	ids     map[string]int32 // number of each name that was met
	names   []string         // by number
	defined []int32          // by number: the structure, or -1
	lastRef int32            // number of the name of the last reference
	texts   map[string]string
}

func newIndexer(r io.Reader, size int64, want Interest) *indexer {
	x := &indexer{s: NewScanner(r), size: size, figures: newClasses(want.Figures), labels: newClasses(want.Labels),
		limit: maxFigures, ids: map[string]int32{}, lastRef: -1, texts: map[string]string{}}
	x.s.sums = true
	x.lib = &Library{Boxes: map[LayerType]int{}}
	if size > 0 {
		// No element is shorter than 32 bytes.
		x.lib.Figures = arena.Make[Figure](0, int(min(size/32+1, 1<<18)))
		x.lib.Points = arena.Make[Point](0, int(min(size/8+1, 1<<18)))
	}
	return x
}

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

// library reads the whole stream.
func (x *indexer) library() error {
	if err := x.header(); err != nil {
		return err
	}
	x.lib.headSum = x.s.cut()
	for {
		kind, err := x.next()
		if err != nil {
			return err
		}
		if kind == ENDLIB {
			break
		}
		if err := x.structure(); err != nil {
			return err
		}
	}
	x.lib.End = x.s.place()
	x.s.Scan()
	x.s.padding()
	if x.s.err != nil {
		return x.s.err
	}
	x.lib.tailSum = x.s.cut()
	x.lib.Bytes = x.s.place()
	return nil
}

// next peeks at the next record between structures: BGNSTR or ENDLIB.
func (x *indexer) next() (Kind, error) {
	head, ok := x.s.head()
	if !ok {
		return 0, x.s.err
	}
	kind := Kind(head >> 8)
	err := checkRecord(head)
	if err == nil && kind != BGNSTR && kind != ENDLIB {
		err = faultf(ErrOrder, "%v stands where a structure (BGNSTR) or the end of the library (ENDLIB) must follow", kind)
	}
	if err != nil {
		return 0, &SyntaxError{Offset: x.s.place(), Record: kind, Err: err}
	}
	return kind, nil
}

// header reads from HEADER to UNITS and whatever else stands before the first structure.
func (x *indexer) header() error {
	s := x.s
	for s.end-s.pos < 4 {
		if !s.fill() {
			s.cutOff(4)
			return s.err
		}
	}
	if b := s.buf[s.pos:]; binary.BigEndian.Uint32(b) != 0x00060002 {
		return &SyntaxError{Err: faultf(ErrNotStream, "this is no GDSII stream: it does not begin with a HEADER record")}
	}
	const (
		once  = 1<<LIBDIRSIZE | 1<<SRFNAME | 1<<LIBSECUR | 1<<LIBNAME | 1<<REFLIBS | 1<<FONTS | 1<<ATTRTABLE | 1<<GENERATIONS | 1<<FORMAT | 1<<ENDMASKS | 1<<UNITS
		often = 1<<MASK | 1<<TAPENUM | 1<<TAPECODE | 1<<STYPTABLE | 1<<RESERVED
		must  = 1<<BGNLIB | 1<<LIBNAME | 1<<UNITS
	)
	seen := uint64(0)
	for {
		head, ok := s.head()
		if !ok {
			return s.err
		}
		offset := s.place()
		kind := Kind(head >> 8)
		err := checkRecord(head)
		bit := kind.bit()
		switch {
		case err != nil:
		case kind == HEADER && seen == 0, kind == BGNLIB && seen == 1<<HEADER:
		case kind == BGNSTR || kind == ENDLIB:
			if missing := must &^ seen; missing != 0 {
				err = faultf(ErrMissing, "%v is missing before %v", firstKind(missing), kind)
			} else if seen&(1<<MASK|1<<ENDMASKS) == 1<<MASK {
				err = faultf(ErrMissing, "ENDMASKS is missing before %v", kind)
			} else {
				return nil
			}
		case seen&(1<<BGNLIB) == 0:
			err = faultf(ErrOrder, "%v stands before BGNLIB", kind)
		case (once|often)&bit == 0:
			err = faultf(ErrOrder, "%v cannot stand at the head of the library", kind)
		case seen&bit&once != 0:
			err = faultf(ErrOrder, "%v stands twice", kind)
		case kind == MASK && (seen&(1<<FORMAT) == 0 || seen&(1<<ENDMASKS) != 0):
			err = faultf(ErrOrder, "MASK must stand between FORMAT and ENDMASKS")
		case kind == ENDMASKS && seen&(1<<MASK) == 0:
			err = faultf(ErrOrder, "ENDMASKS without MASK")
		}
		if err == nil {
			if !s.Scan() {
				return s.err
			}
			if kind == UNITS {
				err = x.units(s.data())
			}
		}
		if err != nil {
			return &SyntaxError{Offset: offset, Record: kind, Err: err}
		}
		seen |= bit
	}
}

// units reads UNITS.
func (x *indexer) units(data []byte) error {
	x.lib.UserUnit, x.lib.DBU = DecodeReal8(data), DecodeReal8(data[8:])
	if !(x.lib.UserUnit > 0) || !(x.lib.DBU > 0) {
		return faultf(ErrValue, "UNITS says %v and %v: both must be above zero", x.lib.UserUnit, x.lib.DBU)
	}
	return nil
}

// structure reads from BGNSTR to ENDSTR.
func (x *indexer) structure() error {
	s, lib := x.s, x.lib
	begin := s.place()
	x.cur = Structure{Begin: begin, FirstFigure: uint32(len(lib.Figures)), FirstRef: uint32(len(lib.Refs)),
		FirstLabel: uint32(len(lib.Labels))}
	x.elements = 0
	if !s.Scan() {
		return s.err
	}
	id, err := x.strname()
	if err != nil {
		return err
	}
	for {
		// Plain boundaries, as many as the buffer holds.
		rest, err := x.plain(s.buf[s.pos:s.end])
		s.pos = s.end - rest
		if err != nil {
			return x.elementFault(err, BOUNDARY, 0, BOUNDARY)
		}
		head, ok := s.head()
		if !ok {
			return x.inStructure(s.err)
		}
		kind := Kind(head >> 8)
		if err := checkRecord(head); err != nil {
			return x.fault(err, kind)
		}
		switch {
		case elementKinds&kind.bit() != 0:
			if err := x.element(); err != nil {
				return err
			}
		case kind == ENDSTR:
			s.Scan() // its four bytes are there
			return x.endStructure(id)
		case (kind == STRCLASS || kind == STRTYPE || kind == STYPTABLE || kind == RESERVED) && x.elements == 0:
			if !s.Scan() {
				return x.inStructure(s.err)
			}
		default:
			return x.fault(faultf(ErrOrder, "%v stands where an element or the end of the structure (ENDSTR) must follow", kind), kind)
		}
	}
}

// strname reads STRNAME and gives the number of the name.
func (x *indexer) strname() (int32, error) {
	s := x.s
	head, ok := s.head()
	if !ok {
		return 0, s.err
	}
	offset := s.place()
	kind := Kind(head >> 8)
	if err := checkRecord(head); err != nil {
		return 0, x.fault(err, kind)
	}
	if kind != STRNAME {
		return 0, x.fault(faultf(ErrMissing, "STRNAME must follow BGNSTR, not %v", kind), kind)
	}
	if !s.Scan() {
		return 0, s.err
	}
	name := trimNUL(s.data())
	if len(name) == 0 {
		return 0, &SyntaxError{Offset: offset, Record: STRNAME, Err: faultf(ErrValue, "STRNAME is empty")}
	}
	id := x.number(name)
	x.cur.Name = x.names[id]
	if other := x.defined[id]; other >= 0 {
		return 0, &SyntaxError{Offset: offset, Structure: x.cur.Name, Record: STRNAME, Err: faultf(ErrTwice,
			"the structure is defined twice, at byte %d and at byte %d", x.lib.Structures[other].Begin, x.cur.Begin)}
	}
	return id, nil
}

// endStructure keeps the structure that ENDSTR has just ended.
func (x *indexer) endStructure(id int32) error {
	lib := x.lib
	if len(lib.Structures) >= math.MaxInt32 {
		return x.fault(faultf(ErrTooMany, "more than %d structures", math.MaxInt32), ENDSTR)
	}
	x.cur.End = x.s.place()
	x.cur.Sum = x.s.cut()
	x.cur.Elements = int32(min(x.elements, math.MaxInt32))
	x.cur.EndFigure = uint32(len(lib.Figures))
	x.cur.EndRef = uint32(len(lib.Refs))
	x.cur.EndLabel = uint32(len(lib.Labels))
	x.defined[id] = int32(len(lib.Structures))
	lib.Structures = append(lib.Structures, x.cur)
	return nil
}

// fault places what is wrong with the next record, between elements.
func (x *indexer) fault(err error, kind Kind) error {
	return &SyntaxError{Offset: x.s.place(), Structure: x.cur.Name, Record: kind, Err: err}
}

// inStructure adds the structure to a fault that the scanner found.
func (x *indexer) inStructure(err error) error {
	if e, ok := err.(*SyntaxError); ok && e.Structure == "" {
		e.Structure = x.cur.Name
	}
	return err
}

// The first 20 bytes of a plain boundary are BOUNDARY, LAYER, DATATYPE and the head of XY.
const (
	plainHead     = 0x00040800_00060D02          // BOUNDARY, head of LAYER
	plainType     = 0x0000_00060E02_0000         // layer, head of DATATYPE, datatype
	plainTypeMask = 0x0000_FFFFFFFF_0000         // without the two values
	plainXY       = uint32(XY)<<8 | uint32(Int4) // length, kind, type
	plainEnd      = 4<<16 | uint32(ENDEL)<<8     // ENDEL
	plainShortest = 4 + 6 + 6 + (4 + 8) + 4      // one point
)

// plain takes plain boundaries from the start of b, up to what is none or not wholly there. It gives the length of what is
// left.
func (x *indexer) plain(b []byte) (rest int, err error) {
	lib := x.lib
	table := x.figures
	count := int64(0)
	for len(b) >= plainShortest {
		head, values := binary.BigEndian.Uint64(b), binary.BigEndian.Uint64(b[8:])
		xy := binary.BigEndian.Uint32(b[16:])
		if head != plainHead || values&plainTypeMask != plainType || xy&0xFFFF != plainXY {
			break
		}
		length := int(xy >> 16)
		size := 16 + length + 4
		if length < 12 || length&7 != 4 || size > len(b) || binary.BigEndian.Uint32(b[size-4:]) != plainEnd {
			break
		}
		if class := table.class(uint16(values>>48), uint16(values)); class != 0 {
			if len(lib.Figures) == cap(lib.Figures) {
				if err := x.moreFigures(len(b)); err != nil {
					x.elements += count
					return len(b), err
				}
			}
			xy := b[20 : size-4]
			if r, ok := rectangle(xy); ok {
				lib.Figures = append(lib.Figures, Figure{Box: r, Class: class})
			} else {
				x.outline(class, Outline{}, xy, nil, 0)
			}
		}
		count++
		b = b[size:]
	}
	x.elements += count
	return len(b), nil
}

// moreFigures makes room for a figure at least; unread is what of the buffer is not yet scanned.
func (x *indexer) moreFigures(unread int) error {
	lib := x.lib
	if len(lib.Figures) >= x.limit {
		return faultf(ErrTooMany, "more than %d figures on the layers of interest", x.limit)
	}
	lib.Figures = grow(lib.Figures, 1, x.s.base+int64(x.s.end-unread), x.size, 32)
	if cap(lib.Figures) > x.limit {
		lib.Figures = lib.Figures[:len(lib.Figures):x.limit]
	}
	return nil
}

// element takes the element at the scanner's place, and reads on where the buffer ends inside it.
func (x *indexer) element() error {
	s, e := x.s, &x.el
	for {
		size, err := e.parse(s.buf[s.pos:s.end])
		if err == nil && size == 0 {
			if s.fill() {
				continue
			}
			return x.cutElement()
		}
		if err != nil {
			return x.elementFault(err, e.kind, e.faultAt, e.faultRecord)
		}
		if err := x.keep(s.buf[s.pos : s.pos+size]); err != nil {
			return x.elementFault(err, e.kind, 0, e.kind)
		}
		x.elements++
		s.pos += size
		return nil
	}
}

// cutElement makes the fault of a stream that ends inside an element.
func (x *indexer) cutElement() error {
	s := x.s
	begin := s.pos
	// All whole records of the element are passed over, to the one where the stream ends.
	for s.end-s.pos >= 4 {
		length := int(binary.BigEndian.Uint16(s.buf[s.pos:]))
		if length < 4 || length > s.end-s.pos {
			break
		}
		s.pos += length
	}
	need := 4
	if s.end-s.pos >= 4 {
		need = int(binary.BigEndian.Uint16(s.buf[s.pos:]))
	}
	s.cutOff(need)
	if e, ok := s.err.(*SyntaxError); ok {
		e.Structure, e.Element, e.Kind = x.cur.Name, x.elements+1, Kind(s.buf[begin+2])
	}
	return s.err
}

// elementFault places what is wrong with a record of the element at the scanner's place.
func (x *indexer) elementFault(err error, kind Kind, at int, record Kind) error {
	return &SyntaxError{Offset: x.s.place() + int64(at), Structure: x.cur.Name, Element: x.elements + 1, Kind: kind,
		Record: record, Err: err}
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
