package gds

import (
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"time"
)

// This file writes streams: the mirror of scanner.go, good for examples, tests and benchmarks of any size. It does not
// check the grammar, so that faulty streams can be written as well; what cannot be written at all is an error.

// WriterOptions say what stands at the head of a stream.
type WriterOptions struct {
	LibName  string    // "": LIB
	Version  uint16    // of HEADER; 0: 600
	UserUnit float64   // size of a database unit in user units; 0: 0.001
	DBU      float64   // size of a database unit in metres; 0: 1e-9
	Time     time.Time // written as time of change and of access everywhere; the zero time is written as zeros
}

// Strans says how a reference is mirrored, magnified and turned. The zero value writes no STRANS.
type Strans struct {
	Mirror                               bool    // about the x axis, before the turn
	Magnification                        float64 // 0 and 1: no MAG record
	Angle                                float64 // degrees, counter-clockwise; 0: no ANGLE record
	AbsoluteMagnification, AbsoluteAngle bool
}

// PathStyle says how a path is drawn.
type PathStyle struct {
	Type          int16 // 0: no PATHTYPE record
	Width         int32 // database units; negative: absolute
	Begin, Finish int32 // BGNEXTN and ENDEXTN, written for path type 4
}

// Writer writes a stream. The first error sticks: all later calls do nothing, and Err and Close give it.
type Writer struct {
	w        io.Writer
	buf      []byte
	err      error
	dates    [24]byte
	flags    []byte // ELFLAGS and PLEX of the next element
	property []byte // properties of the next element
}

// NewWriter gives a writer of a stream to w, and writes the head of the library.
func NewWriter(w io.Writer, o WriterOptions) *Writer {
	if o.LibName == "" {
		o.LibName = "LIB"
	}
	if o.Version == 0 {
		o.Version = 600
	}
	if o.UserUnit == 0 {
		o.UserUnit = 1e-3
	}
	if o.DBU == 0 {
		o.DBU = 1e-9
	}
	wr := &Writer{w: w, buf: make([]byte, 0, bufferSize+1<<17)}
	if t := o.Time; !t.IsZero() {
		for i, v := range []int{t.Year(), int(t.Month()), t.Day(), t.Hour(), t.Minute(), t.Second()} {
			binary.BigEndian.PutUint16(wr.dates[2*i:], uint16(v))
			binary.BigEndian.PutUint16(wr.dates[12+2*i:], uint16(v))
		}
	}
	wr.buf = appendInt2(wr.buf, HEADER, o.Version)
	wr.buf = appendRecord(wr.buf, BGNLIB, wr.dates[:])
	wr.text(LIBNAME, o.LibName)
	wr.buf = appendHead(wr.buf, UNITS, 16)
	wr.real8(o.UserUnit)
	wr.real8(o.DBU)
	return wr
}

// Err gives the first error.
func (w *Writer) Err() error { return w.err }

// Close ends the library and writes out what is held back. It does not close the writer below.
func (w *Writer) Close() error {
	w.buf = appendHead(w.buf, ENDLIB, 0)
	w.flush()
	return w.err
}

// BeginStructure begins a structure.
func (w *Writer) BeginStructure(name string) {
	w.buf = appendRecord(w.buf, BGNSTR, w.dates[:])
	w.text(STRNAME, name)
	w.spill()
}

// EndStructure ends a structure.
func (w *Writer) EndStructure() {
	w.buf = appendHead(w.buf, ENDSTR, 0)
	w.spill()
}

// Flags sets the ELFLAGS of the next element.
func (w *Writer) Flags(elflags uint16) { w.flags = appendInt2(w.flags, ELFLAGS, elflags) }

// Plex sets the PLEX of the next element.
func (w *Writer) Plex(plex int32) { w.flags = appendInt4(w.flags, PLEX, plex) }

// Property adds a property to the next element.
func (w *Writer) Property(attribute int16, value string) {
	w.property = appendInt2(w.property, PROPATTR, uint16(attribute))
	var err error
	if w.property, err = appendText(w.property, PROPVALUE, value); err != nil {
		w.fail(err)
	}
}

// Boundary writes a BOUNDARY. points come without the closing one.
func (w *Writer) Boundary(layer LayerType, points []Point) {
	w.begin(BOUNDARY)
	w.buf = appendLayer(w.buf, layer, DATATYPE)
	w.points(points, true)
	w.end()
}

// Rectangle writes a BOUNDARY that is a rectangle, from its lower left corner counter-clockwise.
func (w *Writer) Rectangle(layer LayerType, r Rect) {
	if len(w.flags)+len(w.property) == 0 {
		w.buf = AppendRectangle(w.buf, layer, r)
		w.spill()
		return
	}
	w.Boundary(layer, []Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}})
}

// Path writes a PATH.
func (w *Writer) Path(layer LayerType, style PathStyle, points []Point) {
	w.begin(PATH)
	w.buf = appendLayer(w.buf, layer, DATATYPE)
	if style.Type != 0 {
		w.buf = appendInt2(w.buf, PATHTYPE, uint16(style.Type))
	}
	w.buf = appendInt4(w.buf, WIDTH, style.Width)
	if style.Type == 4 {
		w.buf = appendInt4(w.buf, BGNEXTN, style.Begin)
		w.buf = appendInt4(w.buf, ENDEXTN, style.Finish)
	}
	w.points(points, false)
	w.end()
}

// Box writes a BOX; the type of layer is its boxtype.
func (w *Writer) Box(layer LayerType, r Rect) {
	w.begin(BOX)
	w.buf = appendLayer(w.buf, layer, BOXTYPE)
	w.points([]Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}}, true)
	w.end()
}

// Node writes a NODE; the type of layer is its nodetype.
func (w *Writer) Node(layer LayerType, points []Point) {
	w.begin(NODE)
	w.buf = appendLayer(w.buf, layer, NODETYPE)
	w.points(points, false)
	w.end()
}

// Text writes a TEXT; the type of layer is its texttype.
func (w *Writer) Text(layer LayerType, at Point, text string) {
	w.begin(TEXT)
	w.buf = appendLayer(w.buf, layer, TEXTTYPE)
	w.points([]Point{at}, false)
	w.text(STRING, text)
	w.end()
}

// SRef writes an SREF.
func (w *Writer) SRef(name string, s Strans, at Point) {
	w.begin(SREF)
	w.text(SNAME, name)
	w.strans(s)
	w.points([]Point{at}, false)
	w.end()
}

// ARef writes an AREF: element (c, r) lies at at + c*(columnEnd-at)/columns + r*(rowEnd-at)/rows.
func (w *Writer) ARef(name string, s Strans, columns, rows uint16, at, columnEnd, rowEnd Point) {
	w.begin(AREF)
	w.text(SNAME, name)
	w.strans(s)
	w.buf = appendColumnsRows(w.buf, columns, rows)
	w.points([]Point{at, columnEnd, rowEnd}, false)
	w.end()
}

// Record writes any record, with the data type that belongs to its kind. Data of odd length gets a NUL.
func (w *Writer) Record(kind Kind, data []byte) {
	if len(data) > maxData {
		w.fail(fmt.Errorf("%v of %d bytes: a record holds at most %d", kind, len(data), maxData))
		return
	}
	w.buf = appendRecord(w.buf, kind, data)
	w.spill()
}

func (w *Writer) begin(kind Kind) {
	w.buf = appendHead(w.buf, kind, 0)
	w.buf = append(w.buf, w.flags...)
	w.flags = w.flags[:0]
}

func (w *Writer) end() {
	w.buf = append(w.buf, w.property...)
	w.property = w.property[:0]
	w.buf = appendHead(w.buf, ENDEL, 0)
	w.spill()
}

func (w *Writer) points(points []Point, closed bool) {
	if len(points) == 0 {
		w.fail(fmt.Errorf("an element without points"))
	}
	w.buf = appendXY(w.buf, points, closed)
}

func (w *Writer) strans(s Strans) {
	var flags uint16
	if s.Mirror {
		flags |= stransMirror
	}
	if s.AbsoluteMagnification {
		flags |= stransMagnification
	}
	if s.AbsoluteAngle {
		flags |= stransAngle
	}
	magnified := s.Magnification != 0 && s.Magnification != 1
	if flags != 0 || magnified || s.Angle != 0 {
		w.buf = appendInt2(w.buf, STRANS, flags)
	}
	if magnified {
		w.buf = appendHead(w.buf, MAG, 8)
		w.real8(s.Magnification)
	}
	if s.Angle != 0 {
		w.buf = appendHead(w.buf, ANGLE, 8)
		w.real8(s.Angle)
	}
}

func (w *Writer) real8(f float64) {
	b, ok := EncodeReal8(f)
	if !ok {
		w.fail(fmt.Errorf("%v cannot be written as a real of the format", f))
	}
	w.buf = append(w.buf, b[:]...)
}

func (w *Writer) text(kind Kind, text string) {
	var err error
	if w.buf, err = appendText(w.buf, kind, text); err != nil {
		w.fail(err)
	}
}

// spill writes out the buffer once it is full.
func (w *Writer) spill() {
	if len(w.buf) >= bufferSize {
		w.flush()
	}
}

func (w *Writer) flush() {
	if w.err == nil {
		_, err := w.w.Write(w.buf)
		w.fail(err)
	}
	w.buf = w.buf[:0]
}

func (w *Writer) fail(err error) {
	if w.err == nil {
		w.err = err
	}
}

const (
	// maxData is the most data that a record holds: its length, an even number, is kept in 16 bits.
	maxData = math.MaxUint16 - 1 - 4
	// maxPoints is the most points that an XY record holds.
	maxPoints = maxData / 8
)

// appendHead appends the head of a record with the given number of data bytes.
func appendHead(b []byte, kind Kind, data int) []byte {
	length := 4 + data
	return append(b, byte(length>>8), byte(length), byte(kind), byte(kind.Type()))
}

// appendRecord appends a record of at most maxData bytes, padded to an even length.
func appendRecord(b []byte, kind Kind, data []byte) []byte {
	b = appendHead(b, kind, (len(data)+1)&^1)
	b = append(b, data...)
	if len(data)&1 != 0 {
		b = append(b, 0)
	}
	return b
}

func appendInt2(b []byte, kind Kind, v uint16) []byte {
	return binary.BigEndian.AppendUint16(appendHead(b, kind, 2), v)
}

func appendInt4(b []byte, kind Kind, v int32) []byte {
	return binary.BigEndian.AppendUint32(appendHead(b, kind, 4), uint32(v))
}

func appendColumnsRows(b []byte, columns, rows uint16) []byte {
	b = binary.BigEndian.AppendUint16(appendHead(b, COLROW, 4), columns)
	return binary.BigEndian.AppendUint16(b, rows)
}

// appendLayer appends LAYER and the record of the given kind.
func appendLayer(b []byte, layer LayerType, typ Kind) []byte {
	return appendInt2(appendInt2(b, LAYER, layer.Layer), typ, layer.Type)
}

func appendText(b []byte, kind Kind, text string) ([]byte, error) {
	if len(text) > maxData {
		return b, fmt.Errorf("%v of %d bytes: a record holds at most %d", kind, len(text), maxData)
	}
	b = appendHead(b, kind, (len(text)+1)&^1)
	b = append(b, text...)
	if len(text)&1 != 0 {
		b = append(b, 0)
	}
	return b, nil
}

// appendXY appends points as one XY record, or as several where one does not hold them. closed adds the first point again.
func appendXY(b []byte, points []Point, closed bool) []byte {
	total := len(points)
	if closed && total > 0 {
		total++
	}
	for at := 0; at < total; {
		n := min(total-at, maxPoints)
		b = appendHead(b, XY, 8*n)
		for _, p := range points[at:min(at+n, len(points))] {
			b = appendPoint(b, p)
		}
		at += n
		if at == total && closed {
			b = appendPoint(b, points[0])
		}
	}
	return b
}

func appendPoint(b []byte, p Point) []byte {
	return binary.BigEndian.AppendUint64(b, uint64(uint32(p.X))<<32|uint64(uint32(p.Y)))
}

// AppendBoundary appends a BOUNDARY element to b, for Copy.Tail. points come without the closing one; without any
// the element is none that a reader takes.
func AppendBoundary(b []byte, layer LayerType, points []Point) []byte {
	b = appendHead(b, BOUNDARY, 0)
	b = appendLayer(b, layer, DATATYPE)
	b = appendXY(b, points, true)
	return appendHead(b, ENDEL, 0)
}

// AppendRectangle appends a BOUNDARY element that is a rectangle, from its lower left corner counter-clockwise.
func AppendRectangle(b []byte, layer LayerType, r Rect) []byte {
	x1, x2 := uint64(uint32(r.X1))<<32, uint64(uint32(r.X2))<<32
	y1, y2 := uint64(uint32(r.Y1)), uint64(uint32(r.Y2))
	b = binary.BigEndian.AppendUint64(b, plainHead)
	b = binary.BigEndian.AppendUint64(b, uint64(layer.Layer)<<48|plainType|uint64(layer.Type))
	b = binary.BigEndian.AppendUint32(b, 44<<16|plainXY)
	b = binary.BigEndian.AppendUint64(b, x1|y1)
	b = binary.BigEndian.AppendUint64(b, x2|y1)
	b = binary.BigEndian.AppendUint64(b, x2|y2)
	b = binary.BigEndian.AppendUint64(b, x1|y2)
	b = binary.BigEndian.AppendUint64(b, x1|y1)
	return binary.BigEndian.AppendUint32(b, plainEnd)
}
