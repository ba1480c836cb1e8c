package gds

import (
	"bytes"
	"compress/gzip"
	"encoding/binary"
	"hash/crc32"
	"io"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"testing/iotest"

	"github.com/google/go-cmp/cmp"
)

// stream writes a library with body between its head and its end.
func stream(t testing.TB, body func(w *Writer)) []byte {
	t.Helper()
	var b bytes.Buffer
	w := NewWriter(&b, WriterOptions{})
	body(w)
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// top writes a library of one structure TOP.
func top(t testing.TB, body func(w *Writer)) []byte {
	t.Helper()
	return stream(t, func(w *Writer) {
		w.BeginStructure("TOP")
		body(w)
		w.EndStructure()
	})
}

// mustIndex indexes a stream that has no fault.
func mustIndex(t testing.TB, data []byte, want Interest) *Library {
	t.Helper()
	lib, err := Index(bytes.NewReader(data), int64(len(data)), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	return lib
}

// metal is an interest in the figures of 19/0 (class 1), 19/5 (2) and 65535/40000 (3), and the labels of 19/10 (7).
func metal() Interest {
	return Interest{Figures: map[LayerType]uint8{{19, 0}: 1, {19, 5}: 2, {65535, 40000}: 3}, Labels: map[LayerType]uint8{{19, 10}: 7}}
}

// figure is a figure in one piece, for comparison.
type figure struct {
	Structure string
	Box       Rect
	Class     uint8
	Plain     bool
	Outline   Outline // without First
	Points    []Point
}

// figuresOf takes the figures out of an index.
func figuresOf(lib *Library) []figure {
	var out []figure
	for _, st := range lib.Structures {
		for _, f := range lib.Figures[st.FirstFigure:st.EndFigure] {
			g := figure{Structure: st.Name, Box: f.Box, Class: f.Class, Plain: f.Outline == 0}
			if f.Outline != 0 {
				g.Outline = lib.Outlines[f.Outline-1]
				g.Points = lib.Points[g.Outline.First : g.Outline.First+uint64(g.Outline.Count)]
				g.Outline.First = 0
			}
			out = append(out, g)
		}
	}
	return out
}

// openLayouts gives the unpacked streams of the open layouts, by file name.
func openLayouts(t testing.TB) map[string][]byte {
	t.Helper()
	paths, err := filepath.Glob("../testdata/open/*.gds.gz")
	if err != nil || len(paths) == 0 {
		t.Fatalf("no open layouts: %v", err)
	}
	layouts := map[string][]byte{}
	for _, path := range paths {
		f, err := os.Open(path)
		if err != nil {
			t.Fatal(err)
		}
		z, err := gzip.NewReader(f)
		if err != nil {
			t.Fatal(err)
		}
		data, err := io.ReadAll(z)
		if err != nil {
			t.Fatal(err)
		}
		f.Close()
		layouts[filepath.Base(path)] = data
	}
	return layouts
}

// allLayers is an interest in every layer that the figures of a stream are on.
func allLayers(t testing.TB, data []byte) Interest {
	want := Interest{Figures: map[LayerType]uint8{}, Labels: map[LayerType]uint8{}}
	var layer LayerType
	for _, r := range slowRecords(t, data) {
		switch r.Kind {
		case LAYER:
			layer.Layer = binary.BigEndian.Uint16(r.Data)
		case DATATYPE:
			layer.Type = binary.BigEndian.Uint16(r.Data)
			if want.Figures[layer] == 0 {
				want.Figures[layer] = uint8(1 + len(want.Figures)%255)
			}
		case TEXTTYPE:
			layer.Type = binary.BigEndian.Uint16(r.Data)
			want.Labels[layer] = 1
		}
	}
	return want
}

// TestIndexOpenLayouts holds the index of real layouts against the slow twin: figures on all their layers, checksums,
// references, labels.
func TestIndexOpenLayouts(t *testing.T) {
	for name, data := range openLayouts(t) {
		want := allLayers(t, data)
		var told int64
		lib, err := Index(bytes.NewReader(data), int64(len(data)), want, func(n int64) { told = n })
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		// DeepEqual first: cmp takes seconds for so many figures.
		if slow, got := slowFigures(t, data, want), figuresOf(lib); !reflect.DeepEqual(slow, got) {
			t.Fatalf("%s: figures differ: %.2000s", name, cmp.Diff(slow, got))
		}
		if len(lib.Figures) == 0 || len(lib.Structures) == 0 {
			t.Fatalf("%s: there is nothing in it", name)
		}
		if told != int64(len(data)) || lib.Bytes != told {
			t.Errorf("%s: %d bytes were told, %d counted, of %d", name, told, lib.Bytes, len(data))
		}
		unknown, err := Index(bytes.NewReader(data), -1, want, nil)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if !reflect.DeepEqual(lib, unknown) {
			t.Errorf("%s: the index depends on whether the size is known", name)
		}
		checkStructures(t, name, data, lib, want)
	}
}

// checkStructures holds structures and references of an index against the records of the stream.
func checkStructures(t *testing.T, name string, data []byte, lib *Library, want Interest) {
	var layer LayerType
	at, ref, label := -1, 0, 0
	elements := int32(0)
	var begin int64
	for _, r := range slowRecords(t, data) {
		switch r.Kind {
		case BGNSTR:
			at++
			begin = r.Offset
			elements = 0
		case STRNAME:
			if got := lib.Structures[at].Name; got != strings.TrimRight(string(r.Data), "\x00") {
				t.Errorf("%s: structure %d is called %q", name, at, got)
			}
		case SREF, AREF:
			if lib.Refs[ref].Array != (r.Kind == AREF) {
				t.Errorf("%s: reference %d is an array: %v", name, ref, lib.Refs[ref].Array)
			}
		case SNAME:
			target := lib.Refs[ref].Target
			sname := strings.TrimRight(string(r.Data), "\x00")
			if target >= 0 && lib.Structures[target].Name != sname || target < 0 && lib.Missing[-1-target] != sname {
				t.Errorf("%s: reference %d goes to %d, not %s", name, ref, target, sname)
			}
			ref++
		case LAYER:
			layer.Layer = binary.BigEndian.Uint16(r.Data)
		case TEXTTYPE:
			layer.Type = binary.BigEndian.Uint16(r.Data)
		case STRING:
			if want.Labels[layer] != 0 {
				label++
			}
		case ENDEL:
			elements++
		case ENDSTR:
			st := lib.Structures[at]
			end := r.Offset + 4
			if st.Begin != begin || st.End != end || st.Elements != elements || int(st.EndRef) != ref || int(st.EndLabel) != label {
				t.Errorf("%s: structure %s is %+v", name, st.Name, st)
			}
			if sum := crc32.Checksum(data[begin:end], crc32.MakeTable(crc32.Castagnoli)); st.Sum != sum {
				t.Errorf("%s: structure %s has the sum %x, not %x", name, st.Name, st.Sum, sum)
			}
		case ENDLIB:
			if lib.End != r.Offset || at+1 != len(lib.Structures) || ref != len(lib.Refs) || label != len(lib.Labels) {
				t.Errorf("%s: ENDLIB at %d behind %d structures, %d references, %d labels", name, lib.End, len(lib.Structures), len(lib.Refs), len(lib.Labels))
			}
		}
	}
}

// TestIndexOpenCounts holds counts of asap7_srambank_128b that were measured by other means (two small programs in Go and
// C++ and a script on gdspy): 1,098 drawn figures on 18/0, which are 864,020 once flattened.
func TestIndexOpenCounts(t *testing.T) {
	data := openLayouts(t)["asap7_srambank_128b.gds.gz"]
	lib := mustIndex(t, data, Interest{Figures: map[LayerType]uint8{{18, 0}: 1}})
	if len(lib.Figures) != 1098 {
		t.Errorf("%d figures are drawn, not 1098", len(lib.Figures))
	}
	flat := make([]int64, len(lib.Structures))
	for i := range flat {
		flat[i] = -1
	}
	placed := make([]bool, len(lib.Structures))
	var count func(i int32) int64
	count = func(i int32) int64 {
		if flat[i] < 0 {
			st := &lib.Structures[i]
			n := int64(st.EndFigure - st.FirstFigure)
			for k := st.FirstRef; k < st.EndRef; k++ {
				ref := &lib.Refs[k]
				g := lib.Lattice(ref)
				if ref.Target >= 0 {
					placed[ref.Target] = true
					n += int64(g.Columns) * int64(g.Rows) * count(ref.Target)
				}
			}
			flat[i] = n
		}
		return flat[i]
	}
	total := int64(0)
	for i := range lib.Structures {
		count(int32(i))
	}
	for i, p := range placed {
		if !p {
			total += flat[i]
		}
	}
	if total != 864020 {
		t.Errorf("%d figures are there once flattened, not 864020", total)
	}
}

// TestRectangles holds which boundaries are plain rectangles: all starts and both senses of the four corners, closed or
// not, and what only looks like one.
func TestRectangles(t *testing.T) {
	corners := []Point{{-10, 5}, {30, 5}, {30, 45}, {-10, 45}}
	box := Rect{-10, 5, 30, 45}
	var closed, open [][]Point
	for start := range 4 {
		for _, sense := range []int{1, 3} {
			var p []Point
			for i := range 4 {
				p = append(p, corners[(start+sense*i)%4])
			}
			open = append(open, p)
			closed = append(closed, append(append([]Point{}, p...), p[0]))
		}
	}
	write := func(w *Writer, points []Point) {
		w.Record(BOUNDARY, nil)
		w.Record(LAYER, []byte{0, 19})
		w.Record(DATATYPE, []byte{0, 0})
		w.buf = appendXY(w.buf, points, false)
		w.Record(ENDEL, nil)
	}
	data := top(t, func(w *Writer) {
		for _, p := range append(append([][]Point{}, closed...), open...) {
			write(w, p)
		}
		w.Rectangle(LayerType{19, 0}, box)
		w.Property(1, "of a rectangle")
		w.Flags(1)
		w.Rectangle(LayerType{19, 0}, box)
		w.Rectangle(LayerType{19, 0}, Rect{math.MinInt32, math.MinInt32, math.MaxInt32, math.MaxInt32})
	})
	lib := mustIndex(t, data, metal())
	if len(lib.Figures) != 19 || len(lib.Outlines) != 0 {
		t.Fatalf("%d figures, %d outlines", len(lib.Figures), len(lib.Outlines))
	}
	for i, f := range lib.Figures[:18] {
		if f != (Figure{Box: box, Class: 1}) {
			t.Errorf("rectangle %d is %+v", i, f)
		}
	}
	if lib.Figures[18].Box != (Rect{math.MinInt32, math.MinInt32, math.MaxInt32, math.MaxInt32}) {
		t.Errorf("the whole plane is %+v", lib.Figures[18])
	}

	others := [][]Point{
		{{0, 0}},
		{{0, 0}, {10, 0}},
		{{0, 0}, {10, 0}, {0, 0}},
		{{0, 0}, {10, 0}, {10, 0}, {0, 0}, {0, 0}},                    // no height
		{{5, 0}, {5, 10}, {5, 10}, {5, 0}},                            // no width
		{{0, 0}, {10, 0}, {10, 10}, {0, 10}, {0, 1}},                  // five corners, not closed
		{{0, 0}, {10, 10}, {10, 0}, {0, 10}, {0, 0}},                  // a bow tie
		{{0, 0}, {10, 0}, {10, 10}, {1, 10}, {0, 0}},                  // slanted
		{{0, 0}, {0, 0}, {10, 0}, {10, 10}, {0, 10}, {0, 0}},          // a corner twice
		{{0, 0}, {10, 0}, {10, 10}, {0, 10}, {0, 10}, {0, 0}, {0, 0}}, // closed twice: one closing point goes
		{{0, 0}, {10, 0}, {10, 10}, {10, 0}, {0, 0}},                  // there and back
	}
	data = top(t, func(w *Writer) {
		for _, p := range others {
			write(w, p)
		}
	})
	lib = mustIndex(t, data, metal())
	if diff := cmp.Diff(slowFigures(t, data, metal()), figuresOf(lib)); diff != "" {
		t.Error(diff)
	}
	for i, f := range figuresOf(lib) {
		points := others[i]
		if n := len(points); n > 1 && points[0] == points[n-1] {
			points = points[:n-1]
		}
		if f.Plain || !cmp.Equal(f.Points, points) {
			t.Errorf("boundary %d is %+v", i, f)
		}
	}
}

// quirks is a library with everything that real files hold.
func quirks(t testing.TB) []byte {
	t.Helper()
	var b bytes.Buffer
	w := NewWriter(&b, WriterOptions{Version: 7})
	b.Reset()
	w.buf = w.buf[:0]
	w.Record(HEADER, []byte{0, 7})
	w.Record(BGNLIB, make([]byte, 24))
	w.Record(LIBDIRSIZE, []byte{0, 12})
	w.Record(SRFNAME, []byte("rules.srf"))
	w.Record(LIBSECUR, []byte{0, 1, 0, 2, 0, 3})
	w.Record(LIBNAME, []byte("quirks\x00\x00\x00"))
	w.Record(REFLIBS, make([]byte, 90))
	w.Record(FONTS, make([]byte, 176))
	w.Record(ATTRTABLE, []byte("attributes"))
	w.Record(GENERATIONS, []byte{0, 3})
	w.Record(FORMAT, []byte{0, 1})
	w.Record(MASK, []byte("1 5-7"))
	w.Record(MASK, []byte("0-64 ; 0-64"))
	w.Record(ENDMASKS, nil)
	w.Record(UNITS, []byte{0x3E, 0x41, 0x89, 0x37, 0x4B, 0xC6, 0xA7, 0xF0, 0x39, 0x44, 0xB8, 0x2F, 0xA0, 0x9B, 0x5A, 0x54})

	w.Record(BGNSTR, make([]byte, 24))
	w.Record(STRNAME, []byte("\xffcell \x01\n\x00\x00\x00\x00"))
	w.Record(STRCLASS, []byte{0, 1})
	w.Rectangle(LayerType{65535, 40000}, Rect{0, 0, 10, 10})
	w.Node(LayerType{19, 0}, []Point{{1, 2}, {3, 4}})
	w.Box(LayerType{19, 0}, Rect{0, 0, 10, 10})
	w.Box(LayerType{19, 0}, Rect{0, 0, 10, 20})
	w.Box(LayerType{20, 0}, Rect{0, 0, 10, 10})
	w.Text(LayerType{19, 10}, Point{5, 6}, "A")
	w.Text(LayerType{19, 11}, Point{5, 6}, "B")
	// All records of a path, in another order than the manual's, with flags behind the layer, and more than one property.
	w.Record(PATH, nil)
	w.Record(LAYER, []byte{0, 19})
	w.Record(PLEX, []byte{1, 0, 0, 1})
	w.Record(DATATYPE, []byte{0, 5})
	w.Record(ENDEXTN, []byte{0xFF, 0xFF, 0xFF, 0xF0})
	w.Record(BGNEXTN, []byte{0, 0, 0, 7})
	w.Record(WIDTH, []byte{0xFF, 0xFF, 0xFF, 0xEC})
	w.Record(PATHTYPE, []byte{0, 4})
	w.Record(ELFLAGS, []byte{0, 2})
	w.Record(ELKEY, []byte{0, 0, 0, 9})
	w.buf = appendXY(w.buf, []Point{{0, 0}, {100, 0}, {100, 0}, {100, 50}}, false)
	w.Record(PROPATTR, []byte{0, 1})
	w.Record(PROPVALUE, []byte("one\x00"))
	w.Record(PROPATTR, []byte{0, 1})
	w.Record(PROPVALUE, []byte("two\x00"))
	w.Record(ENDEL, nil)
	w.Path(LayerType{19, 0}, PathStyle{Type: 1, Width: 21}, []Point{{3, 3}})
	w.Path(LayerType{19, 0}, PathStyle{Type: 2}, []Point{{3, 3}, {9, 3}})
	w.Path(LayerType{20, 0}, PathStyle{Type: 3, Width: 21}, []Point{{3, 3}, {9, 3}}) // not of interest: passes
	w.Boundary(LayerType{19, 0}, staircase(9000))                                    // two XY records
	w.Boundary(LayerType{19, 0}, staircase(8190))                                    // the most that one XY record holds: 8191 points with the closing one
	w.EndStructure()

	w.BeginStructure("TOP")
	w.Record(TEXT, nil)
	w.Record(LAYER, []byte{0, 19})
	w.Record(TEXTTYPE, []byte{0, 10})
	w.Record(PRESENTATION, []byte{0, 5})
	w.Record(PATHTYPE, []byte{0, 1})
	w.Record(WIDTH, []byte{0xFF, 0xFF, 0, 0})
	w.Record(STRANS, []byte{0, 6})
	w.Record(MAG, []byte{0x40, 0x80, 0, 0, 0, 0, 0, 0})
	w.buf = appendXY(w.buf, []Point{{-1, -2}}, false)
	w.Record(STRING, []byte("B\x00\x00\x00"))
	w.Record(ENDEL, nil)
	cell := "\xffcell \x01\n"
	w.SRef(cell, Strans{}, Point{1, 2})
	w.SRef(cell, Strans{Mirror: true, Angle: 270}, Point{3, 4})
	w.SRef(cell, Strans{Mirror: true, Angle: 30, Magnification: 2.5, AbsoluteAngle: true, AbsoluteMagnification: true}, Point{5, 6})
	w.SRef("absent", Strans{Angle: -90}, Point{7, 8})
	w.SRef("LATER", Strans{AbsoluteAngle: true}, Point{9, 10})
	w.ARef(cell, Strans{Angle: 90}, 3, 2, Point{10, 20}, Point{10, 320}, Point{-190, 20})
	w.ARef(cell, Strans{}, 65535, 1, Point{0, 0}, Point{100, 7}, Point{1, 1})
	w.ARef("gone", Strans{Magnification: 3}, 1, 1, Point{0, 0}, Point{10, 10}, Point{-10, 20})
	w.SRef("absent", Strans{}, Point{0, 0})
	// Angle without STRANS.
	w.Record(SREF, nil)
	w.Record(SNAME, []byte("LATER\x00"))
	w.Record(ANGLE, []byte{0x42, 0xB4, 0, 0, 0, 0, 0, 0})
	w.buf = appendXY(w.buf, []Point{{2, 2}}, false)
	w.Record(ENDEL, nil)
	w.EndStructure()

	w.BeginStructure("LATER")
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	b.Write(make([]byte, 2048-b.Len()%2048))
	return b.Bytes()
}

// staircase is a boundary with n points.
func staircase(n int) []Point {
	points := []Point{{0, 0}}
	for i := int32(1); len(points) < n; i++ {
		points = append(points, Point{i, points[len(points)-1].Y}, Point{i, i})
	}
	return points[:n]
}

func TestIndexQuirks(t *testing.T) {
	data := quirks(t)
	for name, r := range map[string]io.Reader{"whole": bytes.NewReader(data), "half": iotest.HalfReader(bytes.NewReader(data)),
		"one byte": iotest.OneByteReader(bytes.NewReader(data))} {
		lib, err := Index(r, -1, metal(), nil)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if lib.UserUnit != 1e-3 || lib.DBU != 1e-9 || lib.Bytes != int64(len(data)) {
			t.Errorf("%s: units %v and %v, %d bytes", name, lib.UserUnit, lib.DBU, lib.Bytes)
		}
		checkStructures(t, name, data, lib, metal())
		figures := []figure{
			{Box: Rect{0, 0, 10, 10}, Class: 3, Plain: true},
			{Box: Rect{0, 0, 100, 50}, Class: 2, Outline: Outline{Count: 4, Path: true, PathType: 4, Width: -20, Begin: 7, Finish: -16},
				Points: []Point{{0, 0}, {100, 0}, {100, 0}, {100, 50}}},
			{Box: Rect{3, 3, 3, 3}, Class: 1, Outline: Outline{Count: 1, Path: true, PathType: 1, Width: 21}, Points: []Point{{3, 3}}},
			{Box: Rect{3, 3, 9, 3}, Class: 1, Outline: Outline{Count: 2, Path: true, PathType: 2}, Points: []Point{{3, 3}, {9, 3}}},
			{Box: Rect{0, 0, 4500, 4499}, Class: 1, Outline: Outline{Count: 9000}, Points: staircase(9000)},
			{Box: Rect{0, 0, 4095, 4094}, Class: 1, Outline: Outline{Count: 8190}, Points: staircase(8190)},
		}
		for i := range figures {
			figures[i].Structure = "\xffcell \x01\n"
		}
		if diff := cmp.Diff(figures, figuresOf(lib)); diff != "" {
			t.Errorf("%s: figures: %.3000s", name, diff)
		}
		if diff := cmp.Diff(map[LayerType]int{{19, 0}: 2}, lib.Boxes); diff != "" {
			t.Errorf("%s: boxes: %s", name, diff)
		}
		if diff := cmp.Diff([]Label{{Point{5, 6}, 7, "A"}, {Point{-1, -2}, 7, "B"}}, lib.Labels); diff != "" {
			t.Errorf("%s: labels: %s", name, diff)
		}
		if diff := cmp.Diff([]string{"absent", "gone"}, lib.Missing); diff != "" {
			t.Errorf("%s: missing: %s", name, diff)
		}
		refs := []Ref{
			{Target: 0, At: Point{1, 2}},
			{Target: 0, At: Point{3, 4}, Turn: 7},
			{Target: 0, At: Point{5, 6}, Turn: 4, Extra: 1},
			{Target: -1, At: Point{7, 8}, Turn: 3},
			{Target: 2, At: Point{9, 10}, Extra: 2},
			{Target: 0, At: Point{10, 20}, Turn: 1, Array: true, Extra: 3},
			{Target: 0, Array: true, Extra: 4},
			{Target: -2, Array: true, Extra: 5},
			{Target: -1},
			{Target: 2, At: Point{2, 2}, Turn: 2},
		}
		if diff := cmp.Diff(refs, lib.Refs); diff != "" {
			t.Errorf("%s: references: %s", name, diff)
		}
		placements := []Placement{
			{Columns: 1, Rows: 1, Mirror: true, Magnification: 2.5, Angle: 30, AbsoluteMagnification: true, AbsoluteAngle: true},
			{Columns: 1, Rows: 1, Magnification: 1, AbsoluteAngle: true, Exact: true},
			{Columns: 3, Rows: 2, ColumnEnd: Point{10, 320}, RowEnd: Point{-190, 20}, Magnification: 1, Angle: 90, Exact: true},
			{Columns: 65535, Rows: 1, ColumnEnd: Point{100, 7}, RowEnd: Point{1, 1}, Magnification: 1, Exact: true},
			{Columns: 1, Rows: 1, ColumnEnd: Point{10, 10}, RowEnd: Point{-10, 20}, Magnification: 3},
		}
		if diff := cmp.Diff(placements, lib.Placements); diff != "" {
			t.Errorf("%s: placements: %s", name, diff)
		}
	}
}

// TestIndexVersions holds that all versions that files carry are read.
func TestIndexVersions(t *testing.T) {
	for _, version := range []uint16{3, 5, 6, 7, 600} {
		var b bytes.Buffer
		w := NewWriter(&b, WriterOptions{Version: version})
		if err := w.Close(); err != nil {
			t.Fatal(err)
		}
		lib := mustIndex(t, b.Bytes(), Interest{})
		if len(lib.Structures) != 0 || lib.Bytes != int64(b.Len()) || lib.End != lib.Bytes-4 {
			t.Errorf("version %d: %+v", version, lib)
		}
	}
}

// TestGrow holds that an arena never shrinks, always gains room, and is sized by what is ahead where that is known.
func TestGrow(t *testing.T) {
	full := make([]Point, 1000)
	full[999] = Point{1, 2}
	for _, c := range []struct{ read, size, least, most int64 }{
		{100, -1, 1001, 5000},               // unknown size: by half
		{1 << 20, 1 << 30, 60000, 70000},    // a thousandth is read: 64 times at most
		{1 << 29, 1 << 30, 2000, 4000},      // half is read
		{1 << 30, 1 << 30, 1001, 5000},      // all is read
		{1<<30 + 5, 1 << 30, 1001, 5000},    // more is read than there should be
		{1 << 30, 1<<30 + 8, 1001, 1 << 18}, // hardly anything is left: no more than a buffer holds
	} {
		got := grow(full, 1, c.read, c.size, 8)
		if len(got) != 1000 || got[999] != (Point{1, 2}) || int64(cap(got)) < c.least || int64(cap(got)) > c.most {
			t.Errorf("after %d of %d bytes the room is %d", c.read, c.size, cap(got))
		}
	}
	if got := grow(full, 8190, 1<<30, 1<<30+8, 8); cap(got) < 1000+8190 {
		t.Errorf("8190 points were asked for; there is room for %d", cap(got)-len(got))
	}
}

// TestIndexMemory holds that the index of a stream without anything of interest takes no memory per element.
func TestIndexMemory(t *testing.T) {
	small, large := flatStream(t, 1000, 1), flatStream(t, 100000, 1)
	allocations := func(data []byte) float64 {
		return testing.AllocsPerRun(3, func() { mustIndex(t, data, Interest{}) })
	}
	if a, b := allocations(small), allocations(large); b > a+5 {
		t.Errorf("%v allocations for 1000 elements, %v for 100000", a, b)
	}
}

// TestClasses holds the table of layers at both ends of its range.
func TestClasses(t *testing.T) {
	want := map[LayerType]uint8{{0, 0}: 1, {0, 65535}: 2, {65535, 0}: 3, {65535, 65535}: 4, {19, 0}: 255}
	c := newClasses(want)
	for _, layer := range []uint16{0, 1, 19, 65534, 65535} {
		for _, typ := range []uint16{0, 1, 65534, 65535} {
			if got := c.class(layer, typ); got != want[LayerType{layer, typ}] {
				t.Errorf("%d/%d has class %d", layer, typ, got)
			}
		}
	}
	if newClasses(nil).class(7, 7) != 0 {
		t.Error("a layer has a class where none has")
	}
}
