package gds

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"strings"
	"testing"
	"time"
)

// TestWriterBytes holds a small library against its bytes, laid out by hand from the manual.
func TestWriterBytes(t *testing.T) {
	var b bytes.Buffer
	w := NewWriter(&b, WriterOptions{LibName: "LIB", Version: 5, Time: time.Date(2026, 3, 4, 5, 6, 7, 0, time.UTC)})
	w.BeginStructure("A")
	w.Rectangle(LayerType{1, 2}, Rect{-1, 0, 2, 3})
	w.SRef("A", Strans{Mirror: true, Angle: 90}, Point{5, -1})
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	dates := "07EA 0003 0004 0005 0006 0007 07EA 0003 0004 0005 0006 0007"
	want := "0006 0002 0005" + "001C 0102" + dates + "0008 0206 4C49 4200" +
		"0014 0305 3E41 8937 4BC6 A7F0 3944 B82F A09B 5A54" +
		"001C 0502" + dates + "0006 0606 4100" +
		"0004 0800" + "0006 0D02 0001" + "0006 0E02 0002" +
		"002C 1003 FFFFFFFF 00000000 00000002 00000000 00000002 00000003 FFFFFFFF 00000003 FFFFFFFF 00000000" + "0004 1100" +
		"0004 0A00" + "0006 1206 4100" + "0006 1A01 8000" + "000C 1C05 425A 0000 0000 0000" + "000C 1003 00000005 FFFFFFFF" + "0004 1100" +
		"0004 0700" + "0004 0400"
	if got, want := strings.ToUpper(hexOf(b.Bytes())), strings.ReplaceAll(want, " ", ""); got != want {
		t.Errorf("the stream is\n%s\nnot\n%s", got, want)
	}
}

func hexOf(b []byte) string {
	const digits = "0123456789ABCDEF"
	var s strings.Builder
	for _, c := range b {
		s.WriteByte(digits[c>>4])
		s.WriteByte(digits[c&15])
	}
	return s.String()
}

// TestWriterElements holds that what the writer writes is what the index reads; quirks and layouts of other tests rest on
// the writer as well.
func TestWriterElements(t *testing.T) {
	data := top(t, func(w *Writer) {
		w.Property(3, "odd")
		w.Flags(1)
		w.Plex(-5)
		w.Text(LayerType{19, 10}, Point{1, 2}, "A")
		w.Path(LayerType{19, 0}, PathStyle{Type: 4, Width: -7, Begin: -1, Finish: 2}, []Point{{0, 0}, {1, 1}})
		w.ARef("X", Strans{Magnification: 0.5, AbsoluteMagnification: true}, 2, 3, Point{0, 0}, Point{2, 0}, Point{0, 3})
	})
	var kinds []Kind
	for _, r := range slowRecords(t, data) {
		kinds = append(kinds, r.Kind)
	}
	want := []Kind{HEADER, BGNLIB, LIBNAME, UNITS, BGNSTR, STRNAME,
		TEXT, ELFLAGS, PLEX, LAYER, TEXTTYPE, XY, STRING, PROPATTR, PROPVALUE, ENDEL,
		PATH, LAYER, DATATYPE, PATHTYPE, WIDTH, BGNEXTN, ENDEXTN, XY, ENDEL,
		AREF, SNAME, STRANS, MAG, COLROW, XY, ENDEL, ENDSTR, ENDLIB}
	if len(kinds) != len(want) {
		t.Fatalf("the records are %v", kinds)
	}
	for i := range want {
		if kinds[i] != want[i] {
			t.Fatalf("record %d is %v, not %v", i, kinds[i], want[i])
		}
	}
	lib := mustIndex(t, data, metal())
	if len(lib.Labels) != 1 || len(lib.Figures) != 1 || len(lib.Refs) != 1 {
		t.Errorf("the index is %+v", lib)
	}
	if p := lib.PlacementOf(&lib.Refs[0]); p.Magnification != 0.5 || !p.AbsoluteMagnification || p.Columns != 2 || p.Rows != 3 {
		t.Errorf("the array is %+v", p)
	}
}

// TestWriterLong holds that long strings and long lists of points are cut as the format wants, or refused.
func TestWriterLong(t *testing.T) {
	for n, ok := range map[int]bool{65529: true, 65530: true, 65531: false} {
		var b bytes.Buffer
		w := NewWriter(&b, WriterOptions{})
		w.BeginStructure(strings.Repeat("n", n))
		w.EndStructure()
		err := w.Close()
		if (err == nil) != ok || (w.Err() == nil) != ok {
			t.Errorf("a name of %d bytes: %v", n, err)
		}
		if ok {
			if lib := mustIndex(t, b.Bytes(), Interest{}); len(lib.Structures[0].Name) != n {
				t.Errorf("a name of %d bytes came back with %d", n, len(lib.Structures[0].Name))
			}
		}
	}
	for _, n := range []int{1, 2, 8189, 8190, 8191, 8192, 16381, 16382, 16383, 30000} {
		data := top(t, func(w *Writer) {
			w.Boundary(LayerType{19, 0}, staircase(n))
			w.Path(LayerType{19, 5}, PathStyle{}, staircase(n))
		})
		points := map[Kind]int{}
		var element Kind
		for _, r := range slowRecords(t, data) {
			if r.Kind == BOUNDARY || r.Kind == PATH {
				element = r.Kind
			}
			if r.Kind == XY {
				points[element] += len(r.Data) / 8
				if len(r.Data) > 65528 {
					t.Errorf("an XY record of %d bytes", len(r.Data))
				}
			}
		}
		if points[BOUNDARY] != n+1 || points[PATH] != n {
			t.Errorf("%d points became %d of a boundary and %d of a path", n, points[BOUNDARY], points[PATH])
		}
	}
}

func TestWriterFaults(t *testing.T) {
	for name, f := range map[string]func(w *Writer){
		"no points":      func(w *Writer) { w.Boundary(LayerType{}, nil) },
		"a huge scale":   func(w *Writer) { w.SRef("A", Strans{Magnification: math.Inf(1)}, Point{}) },
		"a long value":   func(w *Writer) { w.Property(1, strings.Repeat("x", 70000)) },
		"a long payload": func(w *Writer) { w.Record(XY, make([]byte, 65531)) },
	} {
		var b bytes.Buffer
		w := NewWriter(&b, WriterOptions{})
		f(w)
		if w.Err() == nil || w.Close() == nil {
			t.Errorf("%s: no error", name)
		}
	}
	w := NewWriter(&limited{100}, WriterOptions{})
	w.BeginStructure("A")
	w.EndStructure()
	if err := w.Close(); !errors.Is(err, errFull) {
		t.Errorf("a full disk: %v", err)
	}
}

// TestAppendRectangle holds the quick way of writing a rectangle against the general one.
func TestAppendRectangle(t *testing.T) {
	for _, r := range []Rect{{0, 0, 1, 1}, {-5, -7, 11, 13}, {math.MinInt32, math.MinInt32, math.MaxInt32, math.MaxInt32}} {
		layer := LayerType{65535, 40000}
		want := AppendBoundary([]byte("x"), layer, []Point{{r.X1, r.Y1}, {r.X2, r.Y1}, {r.X2, r.Y2}, {r.X1, r.Y2}})
		if got := AppendRectangle([]byte("x"), layer, r); !bytes.Equal(got, want) {
			t.Errorf("%v is written as %x, not %x", r, got, want)
		}
	}
	if got := binary.BigEndian.Uint16(appendRecord(nil, STRING, []byte("abc"))); got != 8 {
		t.Errorf("a string of 3 bytes makes a record of %d", got)
	}
}
