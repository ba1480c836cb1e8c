package verify

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
	"slices"

	"maskpair/gds"
)

// This file reads the elements of one structure, record by record, at its place in the stream. The first pass of package gds
// has checked the grammar; what does not follow it now has changed since.

// record is one record: its kind, its head as it stands, and what it holds.
type record struct {
	kind gds.Kind
	raw  []byte // head and data
}

func (r *record) data() []byte { return r.raw[4:] }

// element is an element of a structure, or what stands before the first one.
type element struct {
	offset  int64
	size    int64
	kind    gds.Kind
	records []record // from the one that opens the element to ENDEL
	buf     []byte
}

// reader reads a structure.
type reader struct {
	src   io.ReaderAt
	name  string // of the stream
	at    int64  // offset of buf[pos] in the stream
	end   int64  // of the structure
	buf   []byte
	pos   int
	count int // elements read
}

// errChanged says that a stream is not what it was in the first pass.
func (r *reader) changed() error {
	return fmt.Errorf("%s: %w at byte %d", r.name, gds.ErrChanged, r.at)
}

// window is the size of the pieces in which a structure is read.
const window = 1 << 18

// open goes to the start of a structure.
func (r *reader) open(src *layout, st *gds.Structure) {
	r.src, r.name, r.at, r.end, r.count = src.data, src.name, st.Begin, st.End, 0
	r.buf, r.pos = r.buf[:0], 0
}

// need makes sure that n bytes are at hand.
func (r *reader) need(n int) error {
	if len(r.buf)-r.pos >= n {
		return nil
	}
	if int64(n) > r.end-r.at {
		return r.changed()
	}
	have := copy(r.buf, r.buf[r.pos:])
	want := min(int64(max(window, n)), r.end-r.at)
	r.buf = slices.Grow(r.buf[:have], int(want)-have)[:want]
	r.pos = 0
	got, err := r.src.ReadAt(r.buf[have:], r.at+int64(have))
	if got < len(r.buf)-have {
		if err == io.EOF || err == io.ErrUnexpectedEOF || err == nil {
			return r.changed()
		}
		return fmt.Errorf("%s: %w", r.name, err)
	}
	return nil
}

// record reads the next record; it is valid until the next call.
func (r *reader) record() (record, error) {
	if err := r.need(4); err != nil {
		return record{}, err
	}
	length := int(binary.BigEndian.Uint16(r.buf[r.pos:]))
	if length < 4 || length&1 != 0 {
		return record{}, r.changed()
	}
	if err := r.need(length); err != nil {
		return record{}, err
	}
	raw := r.buf[r.pos : r.pos+length]
	if n, fixed := gds.Kind(raw[2]).Length(); fixed && n != length-4 && gds.Kind(raw[2]).Type() == gds.DataType(raw[3]) {
		return record{}, r.changed()
	}
	r.pos += length
	r.at += int64(length)
	return record{gds.Kind(raw[2]), raw}, nil
}

// peek gives the kind of the next record.
func (r *reader) peek() (gds.Kind, error) {
	if err := r.need(4); err != nil {
		return 0, err
	}
	return gds.Kind(r.buf[r.pos+2]), nil
}

// elementKind says whether a record opens an element.
func elementKind(k gds.Kind) bool {
	switch k {
	case gds.BOUNDARY, gds.PATH, gds.SREF, gds.AREF, gds.TEXT, gds.NODE, gds.BOX:
		return true
	}
	return false
}

// head reads what stands before the first element, BGNSTR to the last record before it.
func (r *reader) head(e *element) error {
	e.begin(r.at)
	for {
		kind, err := r.peek()
		if err != nil || elementKind(kind) || kind == gds.ENDSTR {
			e.finish(r.at)
			return err
		}
		rec, err := r.record()
		if err != nil {
			return err
		}
		e.add(rec)
	}
}

// next reads the next element; false at the end of the structure.
func (r *reader) next(e *element) (bool, error) {
	kind, err := r.peek()
	if err != nil {
		return false, err
	}
	if kind == gds.ENDSTR {
		if rec, err := r.record(); err != nil || len(rec.raw) != 4 || r.at != r.end {
			return false, r.changed()
		}
		return false, nil
	}
	if !elementKind(kind) {
		return false, r.changed()
	}
	e.begin(r.at)
	e.kind = kind
	r.count++
	for {
		rec, err := r.record()
		if err != nil {
			return false, err
		}
		e.add(rec)
		if rec.kind == gds.ENDEL {
			e.finish(r.at)
			return true, nil
		}
	}
}

func (e *element) begin(at int64) {
	e.offset, e.kind, e.records, e.buf = at, 0, e.records[:0], e.buf[:0]
}

// add copies a record. While an element grows its buffer may move; finish sets the records right.
func (e *element) add(rec record) {
	e.records = append(e.records, record{kind: rec.kind})
	e.buf = append(e.buf, rec.raw...)
}

func (e *element) finish(at int64) {
	e.size = at - e.offset
	b := e.buf
	for i := range e.records {
		n := int(binary.BigEndian.Uint16(b))
		e.records[i].raw = b[:n:n]
		b = b[n:]
	}
}

// same says whether two elements are equal byte for byte.
func (e *element) same(f *element) bool { return bytes.Equal(e.buf, f.buf) }

// sameBut says whether two elements are equal but for the data of some kinds of records, which stand in the same places.
func (e *element) sameBut(f *element, kinds ...gds.Kind) bool {
	if len(e.records) != len(f.records) {
		return false
	}
	for i := range e.records {
		p, q := &e.records[i], &f.records[i]
		if slices.Contains(kinds, p.kind) && p.kind == q.kind && p.raw[3] == q.raw[3] {
			continue
		}
		if !bytes.Equal(p.raw, q.raw) {
			return false
		}
	}
	return true
}

// sameWithout says whether two elements have the same records in the same order, those of some kinds aside.
func (e *element) sameWithout(f *element, kinds ...gds.Kind) bool {
	i, k := 0, 0
	for {
		for i < len(e.records) && slices.Contains(kinds, e.records[i].kind) {
			i++
		}
		for k < len(f.records) && slices.Contains(kinds, f.records[k].kind) {
			k++
		}
		if i == len(e.records) || k == len(f.records) {
			return i == len(e.records) && k == len(f.records)
		}
		if !bytes.Equal(e.records[i].raw, f.records[k].raw) {
			return false
		}
		i++
		k++
	}
}

// find gives the data of the first record of a kind, nil where there is none.
func (e *element) find(kind gds.Kind) []byte {
	for i := range e.records {
		if e.records[i].kind == kind {
			return e.records[i].data()
		}
	}
	return nil
}

// layer gives the layer and the type of a figure.
func (e *element) layer() gds.LayerType {
	var l gds.LayerType
	for i := range e.records {
		switch r := &e.records[i]; r.kind {
		case gds.LAYER:
			l.Layer = binary.BigEndian.Uint16(r.data())
		case gds.DATATYPE:
			l.Type = binary.BigEndian.Uint16(r.data())
		}
	}
	return l
}

// figure says whether the element is a BOUNDARY or a PATH.
func (e *element) figure() bool { return e.kind == gds.BOUNDARY || e.kind == gds.PATH }

// reference says whether the element places a structure.
func (e *element) reference() bool { return e.kind == gds.SREF || e.kind == gds.AREF }

// target gives the name of the structure that a reference places.
func (e *element) target() string {
	return string(bytes.TrimRight(e.find(gds.SNAME), "\x00"))
}

// points gives the points of all XY records.
func (e *element) points(dst []gds.Point) []gds.Point {
	for i := range e.records {
		if e.records[i].kind != gds.XY {
			continue
		}
		for b := e.records[i].data(); len(b) >= 8; b = b[8:] {
			dst = append(dst, gds.Point{X: int32(binary.BigEndian.Uint32(b)), Y: int32(binary.BigEndian.Uint32(b[4:]))})
		}
	}
	return dst
}

// number gives a record of a two- or four-byte integer, 0 where there is none.
func (e *element) number(kind gds.Kind) int32 {
	switch b := e.find(kind); len(b) {
	case 2:
		return int32(int16(binary.BigEndian.Uint16(b)))
	case 4:
		return int32(binary.BigEndian.Uint32(b))
	}
	return 0
}
