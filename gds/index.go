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
	return index(r, size, want, progress, true)
}

// index is Index; without sums the stream cannot be copied by what it gives.
func index(r io.Reader, size int64, want Interest, progress func(bytes int64), sums bool) (*Library, error) {
	x := newIndexer(r, size, want)
	x.s.progress, x.s.sums = progress, sums
	if size >= manyBytes {
		room := arena.New[byte](2 * bufferSize) // on one large page
		defer room.Free()
		x.s.buf = room.Data[:bufferSize]
	}
	if err := x.library(); err != nil {
		return nil, err
	}
	x.resolve()
	return x.lib, nil
}

// manyBytes is the size of a stream from which its buffers have memory from the system: to touch it costs less.
const manyBytes = 1 << 18

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
	x.lib = &Library{Boxes: map[LayerType]int{}}
	if size > 0 {
		// No element is shorter than 32 bytes.
		x.lib.Figures = arena.Make[Figure](0, int(min(size/32+1, 1<<18)))
		x.lib.Points = arena.Make[Point](0, int(min(size/8+1, 1<<18)))
	}
	return x
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
