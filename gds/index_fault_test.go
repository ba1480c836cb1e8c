package gds

// This file holds what the index refuses, and what it says then.

import (
	"bytes"
	"errors"
	"io"
	"strings"
	"testing"
	"testing/iotest"
)

// TestIndexTruncated cuts a small file at every byte, and tells of each cut that it is one, where, and in which element.
func TestIndexTruncated(t *testing.T) {
	data := top(t, func(w *Writer) {
		w.Rectangle(LayerType{19, 0}, Rect{0, 0, 10, 10})
		w.Property(1, "p")
		w.Path(LayerType{19, 0}, PathStyle{Type: 4, Width: 3, Begin: 1, Finish: 2}, []Point{{0, 0}, {5, 5}})
		w.SRef("CELL", Strans{Mirror: true, Angle: 30, Magnification: 2}, Point{1, 1})
		w.Text(LayerType{19, 10}, Point{0, 0}, "A")
	})
	records := slowRecords(t, data)
	for n := range len(data) {
		for _, one := range []bool{false, true} {
			var r io.Reader = bytes.NewReader(data[:n])
			if one {
				r = iotest.OneByteReader(r)
			}
			lib, err := Index(r, int64(n), metal(), nil)
			var syntax *SyntaxError
			if lib != nil || !errors.Is(err, io.ErrUnexpectedEOF) || !errors.As(err, &syntax) {
				t.Fatalf("cut at %d: %v", n, err)
			}
			at, structure, element := int64(0), "", int64(0)
			inside := false
			for _, r := range records {
				if r.Offset > int64(n) || r.Offset+4+int64(len(r.Data)) > int64(n) && r.Offset < int64(n) || r.Offset == int64(n) {
					at = min(r.Offset, int64(n))
					break
				}
				switch {
				case r.Kind == STRNAME:
					structure = "TOP"
				case r.Kind == ENDSTR:
					structure = ""
				case elementKinds&r.Kind.bit() != 0:
					inside = true
					element++
				case r.Kind == ENDEL:
					inside = false
				}
			}
			if !inside { // an element of which not even the head is there
				element = syntax.Element
			}
			if syntax.Offset != at || syntax.Structure != structure || syntax.Element != element {
				t.Fatalf("cut at %d, in record at %d of element %d of %q: %v", n, at, element, structure, err)
			}
			if strings.ContainsAny(err.Error(), "\n\r") {
				t.Fatalf("cut at %d: the error has several lines: %q", n, err)
			}
		}
	}
}

// TestIndexFaults holds what is refused, and what the error says.
func TestIndexFaults(t *testing.T) {
	element := func(records ...any) func(w *Writer) { // kind, data, kind, data, ...
		return func(w *Writer) {
			for i := 0; i < len(records); i += 2 {
				data, _ := records[i+1].([]byte)
				w.Record(records[i].(Kind), data)
			}
		}
	}
	layer, typ, points := []byte{0, 19}, []byte{0, 0}, make([]byte, 40)
	for _, c := range []struct {
		body  func(w *Writer)
		cause error
		says  string // %d: the offset
	}{
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, make([]byte, 20), ENDEL, nil), ErrLength,
			"structure TOP, element 1 (BOUNDARY), byte 114: XY length 20 is not a multiple of 8"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, nil, ENDEL, nil), ErrLength, "XY has no points"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, ENDEL, nil), ErrMissing, "element 1 (BOUNDARY), byte 114: XY is missing"},
		{element(BOUNDARY, nil, LAYER, layer, XY, points, ENDEL, nil), ErrMissing, "DATATYPE is missing before XY"},
		{element(BOUNDARY, nil, XY, points, LAYER, layer, DATATYPE, typ, ENDEL, nil), ErrMissing, "LAYER is missing before XY"},
		{element(BOUNDARY, nil, LAYER, layer, LAYER, layer, DATATYPE, typ, XY, points, ENDEL, nil), ErrOrder, "LAYER stands twice"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, WIDTH, points[:4], XY, points, ENDEL, nil), ErrOrder, "WIDTH cannot stand in BOUNDARY"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, BOUNDARY, nil), ErrOrder, "BOUNDARY cannot stand in BOUNDARY, which has no ENDEL yet"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, ENDSTR, nil), ErrOrder, "ENDSTR cannot stand in BOUNDARY, which has no ENDEL yet"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, ELFLAGS, typ, ENDEL, nil), ErrOrder, "ELFLAGS stands behind XY"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, PROPATTR, typ, XY, points, ENDEL, nil), ErrMissing, "PROPATTR must be followed by PROPVALUE, not by XY"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, PROPATTR, typ, ENDEL, nil), ErrMissing, "PROPATTR must be followed by PROPVALUE"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, PROPVALUE, typ, ENDEL, nil), ErrOrder, "PROPVALUE without PROPATTR"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, PROPATTR, typ, PROPVALUE, typ, XY, points, ENDEL, nil), ErrOrder, "PROPATTR stands before XY"},
		{element(BOUNDARY, nil, LAYER, layer, DATATYPE, typ, XY, points, PROPATTR, typ, PROPVALUE, typ, XY, points, ENDEL, nil), ErrOrder, "XY stands twice"},
		{element(BOX, nil, LAYER, layer, BOXTYPE, typ, XY, points, XY, points, ENDEL, nil), ErrOrder, "XY stands twice"},
		{element(PATH, nil, LAYER, layer, DATATYPE, typ, PATHTYPE, []byte{0, 3}, XY, points, ENDEL, nil), ErrValue, "path type 3 is none of 0, 1, 2 and 4"},
		{element(PATH, nil, LAYER, layer, DATATYPE, typ, PATHTYPE, []byte{0xFF, 0xFF}, XY, points, ENDEL, nil), ErrValue, "path type -1"},
		{element(PATH, nil, LAYER, layer, DATATYPE, typ, WIDTH, typ, XY, points, ENDEL, nil), ErrLength, "WIDTH length 2 is not 4"},
		{element(SREF, nil, XY, points[:8], ENDEL, nil), ErrMissing, "SNAME is missing before XY"},
		{element(SREF, nil, SNAME, []byte{0, 0}, XY, points[:8], ENDEL, nil), ErrValue, "SNAME is empty"},
		{element(SREF, nil, SNAME, layer, XY, points[:16], ENDEL, nil), ErrLength, "XY of SREF has 2 points, not 1"},
		{element(SREF, nil, SNAME, layer, MAG, make([]byte, 8), XY, points[:8], ENDEL, nil), ErrValue, "MAG 0 is not above zero"},
		{element(SREF, nil, SNAME, layer, MAG, []byte{0xC1, 0x10, 0, 0, 0, 0, 0, 0}, XY, points[:8], ENDEL, nil), ErrValue, "MAG -1 is not above zero"},
		{element(AREF, nil, SNAME, layer, XY, points[:24], ENDEL, nil), ErrMissing, "COLROW is missing before XY"},
		{element(AREF, nil, SNAME, layer, COLROW, []byte{0, 0, 0, 5}, XY, points[:24], ENDEL, nil), ErrValue, "COLROW says 0 columns and 5 rows: both must be 1 or more"},
		{element(AREF, nil, SNAME, layer, COLROW, []byte{0, 1, 0, 5}, XY, points[:16], ENDEL, nil), ErrLength, "XY of AREF has 2 points, not 3"},
		{element(TEXT, nil, LAYER, layer, TEXTTYPE, typ, XY, points[:8], ENDEL, nil), ErrMissing, "STRING is missing"},
		{element(LAYER, layer), ErrOrder, "structure TOP, byte 98: LAYER stands where an element or the end of the structure (ENDSTR) must follow"},
		{element(ENDLIB, nil), ErrOrder, "byte 98: ENDLIB stands where an element"},
		{element(BGNSTR, make([]byte, 24)), ErrOrder, "byte 98: BGNSTR stands where an element"},
		{element(Kind(0x3C), nil), ErrKind, "byte 98: record 0x3c is no record of the format"},
		{func(w *Writer) { w.buf = append(w.buf, 0, 6, byte(LAYER), byte(Int4), 0, 0) }, ErrType,
			"LAYER holds data of type 3 (four-byte integer), not 2 (two-byte integer)"},
		{func(w *Writer) { w.buf = append(w.buf, 0, 4, byte(BOUNDARY), 0, 0, 3) }, ErrLength, "element 1 (BOUNDARY), byte 102: record length 3 is less than 4"},
		{func(w *Writer) {
			w.Rectangle(LayerType{1, 1}, Rect{0, 0, 1, 1})
			w.buf = append(w.buf, 0, 5, byte(BOUNDARY), 0, 0)
		}, ErrLength, "structure TOP, byte 162: record length 5 is odd"},
		{func(w *Writer) { w.Text(LayerType{1, 1}, Point{}, "x"); w.Record(STRCLASS, layer) }, ErrOrder, "STRCLASS stands where an element"},
		{func(w *Writer) { w.EndStructure(); w.BeginStructure("A"); w.EndStructure(); w.BeginStructure("TOP") }, ErrTwice,
			"structure TOP, byte 168: the structure is defined twice, at byte 62 and at byte 140"},
		{func(w *Writer) { w.EndStructure(); w.Record(BGNSTR, make([]byte, 24)); w.EndStructure() }, ErrMissing, "byte 130: STRNAME must follow BGNSTR, not ENDSTR"},
		{func(w *Writer) { w.EndStructure(); w.BeginStructure("") }, ErrValue, "byte 130: STRNAME is empty"},
		{func(w *Writer) { w.EndStructure(); w.Rectangle(LayerType{}, Rect{}) }, ErrOrder, "byte 102: BOUNDARY stands where a structure (BGNSTR) or the end of the library (ENDLIB) must follow"},
	} {
		data := top(t, c.body)
		_, err := Index(bytes.NewReader(data), int64(len(data)), metal(), nil)
		var syntax *SyntaxError
		if !errors.Is(err, c.cause) || !errors.As(err, &syntax) || !strings.Contains(err.Error(), c.says) {
			t.Errorf("the error is %q, not %q", err, c.says)
			continue
		}
		_, slowly := Index(iotest.OneByteReader(bytes.NewReader(data)), -1, metal(), nil)
		if slowly == nil || slowly.Error() != err.Error() {
			t.Errorf("byte by byte the error is %q, not %q", slowly, err)
		}
	}
}

// TestIndexHeadFaults holds what is refused at the head of a library.
func TestIndexHeadFaults(t *testing.T) {
	type rec struct {
		kind Kind
		data []byte
	}
	header, begin, name := rec{HEADER, []byte{0, 5}}, rec{BGNLIB, make([]byte, 24)}, rec{LIBNAME, []byte("LIB ")}
	units := rec{UNITS, []byte{0x3E, 0x41, 0x89, 0x37, 0x4B, 0xC6, 0xA7, 0xF0, 0x39, 0x44, 0xB8, 0x2F, 0xA0, 0x9B, 0x5A, 0x54}}
	end := rec{ENDLIB, nil}
	for _, c := range []struct {
		records []rec
		cause   error
		says    string
	}{
		{[]rec{header, begin, name, units, end}, nil, ""},
		{[]rec{begin, name, units, end}, ErrNotStream, "byte 0: this is no GDSII stream: it does not begin with a HEADER record"},
		{[]rec{header, name, units, end}, ErrOrder, "byte 6: LIBNAME stands before BGNLIB"},
		{[]rec{header, begin, units, end}, ErrMissing, "byte 54: LIBNAME is missing before ENDLIB"},
		{[]rec{header, begin, name, end}, ErrMissing, "byte 42: UNITS is missing before ENDLIB"},
		{[]rec{header, begin, name, {BGNSTR, make([]byte, 24)}}, ErrMissing, "UNITS is missing before BGNSTR"},
		{[]rec{header, end}, ErrMissing, "BGNLIB is missing before ENDLIB"},
		{[]rec{header, begin, header}, ErrOrder, "byte 34: HEADER cannot stand at the head of the library"},
		{[]rec{header, begin, begin}, ErrOrder, "byte 34: BGNLIB cannot stand at the head of the library"},
		{[]rec{header, begin, name, name}, ErrOrder, "LIBNAME stands twice"},
		{[]rec{header, begin, name, {BOUNDARY, nil}}, ErrOrder, "BOUNDARY cannot stand at the head of the library"},
		{[]rec{header, begin, name, {UNITS, make([]byte, 16)}, end}, ErrValue, "byte 42: UNITS says 0 and 0: both must be above zero"},
		{[]rec{header, begin, name, {UNITS, make([]byte, 8)}, end}, ErrLength, "byte 42: UNITS length 8 is not 16"},
		{[]rec{header, begin, name, {MASK, nil}}, ErrOrder, "MASK must stand between FORMAT and ENDMASKS"},
		{[]rec{header, begin, name, {FORMAT, []byte{0, 1}}, {ENDMASKS, nil}}, ErrOrder, "ENDMASKS without MASK"},
		{[]rec{header, begin, name, {FORMAT, []byte{0, 1}}, {MASK, nil}, units, end}, ErrMissing, "ENDMASKS is missing before ENDLIB"},
		{[]rec{header, begin, name, {Kind(0x77), nil}}, ErrKind, "byte 42: record 0x77 is no record of the format"},
	} {
		var data []byte
		for _, r := range c.records {
			data = appendRecord(data, r.kind, r.data)
		}
		_, err := Index(bytes.NewReader(data), int64(len(data)), Interest{}, nil)
		if c.cause == nil {
			if err != nil {
				t.Error(err)
			}
			continue
		}
		if !errors.Is(err, c.cause) || !strings.Contains(err.Error(), c.says) {
			t.Errorf("the error is %q, not %q", err, c.says)
		}
	}
	for _, text := range []string{"", "a", "this is a letter, not a layout", "%SEMI-OASIS\r\n", "\x1f\x8b\x08"} {
		_, err := Index(strings.NewReader(text), -1, Interest{}, nil)
		var syntax *SyntaxError
		if !errors.As(err, &syntax) || !errors.Is(err, ErrNotStream) && !errors.Is(err, io.ErrUnexpectedEOF) {
			t.Errorf("%q: %v", text, err)
		}
	}
	broken := errors.New("the disk is gone")
	data := top(t, func(w *Writer) { w.Rectangle(LayerType{19, 0}, Rect{0, 0, 1, 1}) })
	for n := range len(data) {
		if _, err := Index(io.MultiReader(bytes.NewReader(data[:n]), iotest.ErrReader(broken)), -1, metal(), nil); !errors.Is(err, broken) {
			t.Fatalf("a reader that fails at byte %d: %v", n, err)
		}
	}
}

// TestIndexLimit holds that more figures than the index can number are refused.
func TestIndexLimit(t *testing.T) {
	for _, path := range []bool{false, true} {
		data := top(t, func(w *Writer) {
			for i := range int32(5) {
				w.Rectangle(LayerType{20, 0}, Rect{0, 0, 1, 1})
				if path {
					w.Path(LayerType{19, 0}, PathStyle{}, []Point{{i, i}})
				} else {
					w.Rectangle(LayerType{19, 0}, Rect{i, 0, i + 1, 1})
				}
			}
		})
		for limit := range 7 {
			x := newIndexer(bytes.NewReader(data), -1, metal())
			x.limit = limit
			err := x.library()
			var syntax *SyntaxError
			if limit >= 5 {
				if err != nil || len(x.lib.Figures) != 5 {
					t.Errorf("limit %d: %v", limit, err)
				}
			} else if !errors.Is(err, ErrTooMany) || !errors.As(err, &syntax) || syntax.Element != int64(2*limit+2) {
				t.Errorf("limit %d: %v", limit, err)
			}
		}
	}
}
