package survey

import (
	"bytes"
	"compress/gzip"
	"context"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"

	"github.com/google/go-cmp/cmp"

	"maskpair/gds"
)

var (
	wire  = gds.LayerType{Layer: 10, Type: 0}
	cut   = gds.LayerType{Layer: 11, Type: 3}
	words = gds.LayerType{Layer: 10, Type: 251}
)

// stream writes a stream; draw fills it.
func stream(t testing.TB, draw func(w *gds.Writer)) []byte {
	t.Helper()
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{})
	draw(w)
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

func scanned(t testing.TB, data []byte) *Survey {
	t.Helper()
	s, err := Scan(context.Background(), bytes.NewReader(data), nil)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// The expectations of this test are counted by hand from the drawing.
func TestScanCounts(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("leaf")
		w.Rectangle(wire, gds.Rect{X1: 0, Y1: 0, X2: 20, Y2: 400})
		w.Rectangle(wire, gds.Rect{X1: 40, Y1: 0, X2: 440, Y2: 30})
		w.Boundary(wire, []gds.Point{{X: 0, Y: 500}, {X: 50, Y: 500}, {X: 50, Y: 550}, {X: 20, Y: 550}, {X: 20, Y: 520}, {X: 0, Y: 520}}) // Manhattan
		w.Boundary(wire, []gds.Point{{X: 0, Y: 600}, {X: 50, Y: 600}, {X: 0, Y: 650}})                                                    // slanted in its middle side
		w.Boundary(wire, []gds.Point{{X: 0, Y: 600}, {X: 50, Y: 600}, {X: 50, Y: 620}, {X: 60, Y: 620}, {X: 60, Y: 640}})                 // slanted in its closing side
		w.Text(words, gds.Point{}, "A")
		w.EndStructure()
		w.BeginStructure("mid")
		w.Path(cut, gds.PathStyle{Width: 12}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}, {X: 100, Y: 70}})
		w.Path(cut, gds.PathStyle{Width: -12, Type: 1}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}}) // round ends
		w.Path(cut, gds.PathStyle{Width: 14}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 10}})          // slanted
		w.Box(cut, gds.Rect{X2: 5, Y2: 5})
		w.Node(cut, []gds.Point{{X: 1, Y: 1}})
		w.SRef("leaf", gds.Strans{}, gds.Point{})
		w.SRef("leaf", gds.Strans{Angle: 90}, gds.Point{X: 1000})
		w.EndStructure()
		w.BeginStructure("chip")
		w.ARef("mid", gds.Strans{}, 3, 2, gds.Point{}, gds.Point{X: 6000}, gds.Point{Y: 4000})
		w.SRef("leaf", gds.Strans{Magnification: 2}, gds.Point{})
		w.SRef("leaf", gds.Strans{Angle: 30}, gds.Point{})
		w.SRef("elsewhere", gds.Strans{}, gds.Point{})
		w.Rectangle(wire, gds.Rect{X1: 0, Y1: 0, X2: 7, Y2: 7})
		w.EndStructure()
		w.BeginStructure("spare")
		w.Rectangle(wire, gds.Rect{X1: -9, Y1: 0, X2: 0, Y2: 7})
		w.EndStructure()
	})
	// leaf is placed 3*2*2 + 2 = 14 times, mid 6 times.
	want := &Survey{
		UserUnit: 1e-3, DBU: 1e-9, Bytes: int64(len(data)), Structures: 4, Tops: []string{"chip", "spare"}, Depth: 3,
		References: 5, Arrays: 1, OddReferences: 2, Placements: 6 + 12 + 2, Missing: []string{"elsewhere"},
		Layers: []Layer{
			{Layer: wire, Boundaries: 7, Flat: 5*14 + 2, Manhattan: 3*14 + 2, Rectangles: 2*14 + 2, Smallest: 7,
				Widths: []Width{{20, 14}, {30, 14}, {7, 2}}},
			{Layer: words, Texts: 1},
			{Layer: cut, Paths: 3, Flat: 18, Manhattan: 6, Smallest: 12, Widths: []Width{{12, 12}, {14, 6}}, Boxes: 1, Nodes: 1},
		},
	}
	if diff := cmp.Diff(want, scanned(t, data)); diff != "" {
		t.Error(diff)
	}
	one, err := Scan(context.Background(), iotest.OneByteReader(bytes.NewReader(data)), nil)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want, one); diff != "" {
		t.Errorf("byte by byte: %s", diff)
	}
}

// A structure that places the one before 65535 * 65535 times, four levels of it: 2^128 placements and a bit less.
func TestScanSaturates(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Rectangle(wire, gds.Rect{X2: 1, Y2: 1})
		w.EndStructure()
		for _, pair := range []string{"ba", "cb", "dc", "ed"} {
			w.BeginStructure(pair[:1])
			w.ARef(pair[1:], gds.Strans{}, 65535, 65535, gds.Point{}, gds.Point{X: 65535}, gds.Point{Y: 65535})
			w.EndStructure()
		}
	})
	s := scanned(t, data)
	if s.Placements != Most || s.Layers[0].Flat != Most || s.Layers[0].Widths[0].Flat != Most {
		t.Errorf("placements %d, flat %d, widths %v; all should stop at %d", s.Placements, s.Layers[0].Flat, s.Layers[0].Widths, uint64(Most))
	}
	if s.Depth != 5 || s.Layers[0].Boundaries != 1 {
		t.Errorf("depth %d, drawn %d", s.Depth, s.Layers[0].Boundaries)
	}
}

func TestSaturatingArithmetic(t *testing.T) {
	for _, c := range []struct{ a, b, sum, product uint64 }{
		{0, 0, 0, 0}, {0, Most, Most, 0}, {1, Most, Most, Most}, {1, Most - 1, Most, Most - 1}, {Most, Most, Most, Most},
		{1 << 32, 1 << 32, 1 << 33, Most}, {1 << 32, 1<<32 - 1, 1<<33 - 1, math.MaxUint64 - (1<<32 - 1)},
	} {
		for _, swap := range []bool{false, true} {
			if swap {
				c.a, c.b = c.b, c.a
			}
			if got := add(c.a, c.b); got != c.sum {
				t.Errorf("add(%d, %d) = %d, want %d", c.a, c.b, got, c.sum)
			}
			if got := multiply(c.a, c.b); got != c.product {
				t.Errorf("multiply(%d, %d) = %d, want %d", c.a, c.b, got, c.product)
			}
		}
	}
}

func TestRectangleWidth(t *testing.T) {
	const low, high = math.MinInt32, math.MaxInt32
	for _, c := range []struct {
		name   string
		points []gds.Point
		want   uint32
	}{
		{"level first", []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 0}, {X: 9, Y: 4}, {X: 0, Y: 4}}, 4},
		{"upright first", []gds.Point{{X: 0, Y: 0}, {X: 0, Y: 9}, {X: 4, Y: 9}, {X: 4, Y: 0}}, 4},
		{"whole plane", []gds.Point{{X: low, Y: low}, {X: high, Y: low}, {X: high, Y: high}, {X: low, Y: high}}, math.MaxUint32},
		{"no height", []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 0}, {X: 9, Y: 0}, {X: 0, Y: 0}}, 0},
		{"crossed", []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 4}, {X: 9, Y: 0}, {X: 0, Y: 4}}, 0},
		{"slanted", []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 1}, {X: 9, Y: 4}, {X: 0, Y: 4}}, 0},
		{"five corners", []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 0}, {X: 9, Y: 4}, {X: 5, Y: 4}, {X: 0, Y: 4}}, 0},
	} {
		var xy []byte
		for _, p := range c.points {
			xy = append(xy, byte(p.X>>24), byte(p.X>>16), byte(p.X>>8), byte(p.X), byte(p.Y>>24), byte(p.Y>>16), byte(p.Y>>8), byte(p.Y))
		}
		if got := rectangleWidth(xy); got != c.want {
			t.Errorf("%s, open: %d, want %d", c.name, got, c.want)
		}
		if got := rectangleWidth(append(xy, xy[:8]...)); got != c.want {
			t.Errorf("%s, closed: %d, want %d", c.name, got, c.want)
		}
	}
}

// More widths than are told apart: the least is exact, and it is said that rare ones are missing.
func TestWidthsCut(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		for i := range int32(mostWidths + 100) {
			w.Rectangle(wire, gds.Rect{X2: 20000 - i, Y2: 30000})
			w.Rectangle(wire, gds.Rect{X2: 20000, Y2: 30000})
		}
		w.EndStructure()
		w.BeginStructure("b")
		w.Rectangle(wire, gds.Rect{X2: 1, Y2: 30000})
		w.EndStructure()
	})
	l := scanned(t, data).Layers[0]
	if !l.WidthsCut || l.Smallest != 1 || l.Widths[0] != (Width{20000, mostWidths + 101}) {
		t.Errorf("cut %v, least %d, commonest %v", l.WidthsCut, l.Smallest, l.Widths)
	}
}

func TestScanRefuses(t *testing.T) {
	record := func(kind gds.Kind, data ...byte) []byte {
		return append([]byte{0, byte(len(data) + 4), byte(kind), byte(kind.Type())}, data...)
	}
	good := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Rectangle(wire, gds.Rect{X2: 4, Y2: 5})
		w.EndStructure()
	})
	within := func(insert ...byte) []byte { // before the element
		at := bytes.Index(good, record(gds.BOUNDARY))
		return join(good[:at], insert, good[at:])
	}
	for _, c := range []struct {
		name  string
		data  []byte
		cause error
		says  string
	}{
		{"empty", nil, io.ErrUnexpectedEOF, "the file is empty"},
		{"text", []byte("# no layout at all, but long enough to be one"), gds.ErrNotStream, "HEADER"},
		{"short text", []byte("x"), gds.ErrNotStream, "HEADER"},
		{"cut off", good[:len(good)-10], io.ErrUnexpectedEOF, "structure a"},
		{"trailing", append(bytes.Clone(good), 7), gds.ErrTrailing, ""},
		{"element in element", within(record(gds.PATH)...), gds.ErrOrder, "structure a, element 1 (PATH)"},
		{"ENDEL alone", within(record(gds.ENDEL)...), gds.ErrOrder, "structure a"},
		{"BGNSTR in structure", within(record(gds.BGNSTR, make([]byte, 24)...)...), gds.ErrOrder, "ENDSTR"},
		{"no XY", within(join(record(gds.BOUNDARY), record(gds.LAYER, 0, 1), record(gds.ENDEL))...), gds.ErrMissing, "XY is missing"},
		{"no LAYER", within(join(record(gds.BOUNDARY), record(gds.XY, make([]byte, 8)...), record(gds.ENDEL))...), gds.ErrMissing, "LAYER is missing"},
		{"odd XY", within(join(record(gds.BOUNDARY), record(gds.XY, make([]byte, 12)...))...), gds.ErrLength, "XY length 12"},
		{"long LAYER", within(join(record(gds.BOUNDARY), record(gds.LAYER, 0, 0, 0, 0))...), gds.ErrLength, "LAYER length 4 is not 2"},
		{"no SNAME", within(join(record(gds.SREF), record(gds.XY, make([]byte, 8)...), record(gds.ENDEL))...), gds.ErrMissing, "SNAME is missing"},
		{"no columns", within(join(record(gds.AREF), record(gds.COLROW, 0, 0, 0, 1))...), gds.ErrValue, "0 columns"},
		{"twice", stream(t, func(w *gds.Writer) {
			for range 2 {
				w.BeginStructure("a")
				w.EndStructure()
			}
		}), gds.ErrTwice, "structure a"},
		{"loop", stream(t, func(w *gds.Writer) {
			for _, pair := range []string{"ab", "bc", "cb"} {
				w.BeginStructure(pair[:1])
				w.SRef(pair[1:], gds.Strans{}, gds.Point{})
				w.EndStructure()
			}
		}), nil, "loop b > c > b"},
		{"no UNITS", join(record(gds.HEADER, 2, 88), record(gds.ENDLIB)), gds.ErrMissing, "UNITS is missing"},
	} {
		_, err := Scan(context.Background(), bytes.NewReader(c.data), nil)
		if err == nil {
			t.Errorf("%s: no error", c.name)
			continue
		}
		if c.cause != nil && !errors.Is(err, c.cause) {
			t.Errorf("%s: %v: the cause is not %v", c.name, err, c.cause)
		}
		if !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v: does not say %q", c.name, err, c.says)
		}
	}
}

func join(parts ...[]byte) []byte { return bytes.Join(parts, nil) }

// Every prefix of a stream is refused, and none brings the scan down.
func TestScanPrefixes(t *testing.T) {
	good := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Path(wire, gds.PathStyle{Type: 4, Width: 3, Begin: 1, Finish: 1}, []gds.Point{{X: 1, Y: 2}, {X: 3, Y: 2}})
		w.SRef("b", gds.Strans{Angle: 90, Magnification: 3}, gds.Point{})
		w.EndStructure()
	})
	for n := range good {
		if _, err := Scan(context.Background(), bytes.NewReader(good[:n]), nil); err == nil {
			t.Fatalf("the first %d of %d bytes were accepted", n, len(good))
		}
	}
}

func TestScanStops(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	data := stream(t, func(w *gds.Writer) {})
	if _, err := Scan(ctx, bytes.NewReader(data), nil); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
}

// openLayout unpacks an open layout, see the folder for its licence.
func openLayout(t testing.TB, name string) []byte {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "testdata", "open", name+".gds.gz"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	data, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// The index of package gds, walked placement by placement, is the slow twin of the counts.
func TestScanAgainstIndex(t *testing.T) {
	for _, name := range []string{"asap7_srambank_32b", "asap7_cells_R", "ihp_stdcell"} {
		data := openLayout(t, name)
		s := scanned(t, data)
		want := gds.Interest{Figures: map[gds.LayerType]uint8{}}
		var classes []gds.LayerType
		for i := range s.Layers {
			classes = append(classes, s.Layers[i].Layer)
			want.Figures[s.Layers[i].Layer] = uint8(len(classes))
		}
		lib, err := gds.Index(bytes.NewReader(data), int64(len(data)), want, nil)
		if err != nil {
			t.Fatal(err)
		}
		flat, rectangles := map[gds.LayerType]uint64{}, map[gds.LayerType]uint64{}
		placements := uint64(0)
		var walk func(structure int32)
		walk = func(structure int32) {
			st := &lib.Structures[structure]
			for _, f := range lib.Figures[st.FirstFigure:st.EndFigure] {
				flat[classes[f.Class-1]]++
				if f.Outline == 0 {
					rectangles[classes[f.Class-1]]++
				}
			}
			for _, r := range lib.Refs[st.FirstRef:st.EndRef] {
				g := lib.Lattice(&r)
				for range int(g.Columns) * int(g.Rows) {
					placements++
					if r.Target >= 0 {
						walk(r.Target)
					}
				}
			}
		}
		for i := range lib.Structures {
			for _, top := range s.Tops {
				if lib.Structures[i].Name == top {
					walk(int32(i))
				}
			}
		}
		if s.Structures != len(lib.Structures) || s.Placements != placements || s.DBU != lib.DBU {
			t.Errorf("%s: %d structures, %d placements, unit %g; the index has %d, %d, %g", name, s.Structures, s.Placements, s.DBU, len(lib.Structures), placements, lib.DBU)
		}
		for i := range s.Layers {
			l := &s.Layers[i]
			if l.Flat != flat[l.Layer] || l.Rectangles != rectangles[l.Layer] {
				t.Errorf("%s %v: %d flat, %d rectangles; the index has %d and %d", name, l.Layer, l.Flat, l.Rectangles, flat[l.Layer], rectangles[l.Layer])
			}
		}
	}
}

func FuzzScan(f *testing.F) {
	f.Add(stream(f, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Rectangle(wire, gds.Rect{X2: 4, Y2: 5})
		w.SRef("b", gds.Strans{Mirror: true}, gds.Point{})
		w.EndStructure()
	}))
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > 1<<16 {
			return
		}
		s, err := Scan(context.Background(), bytes.NewReader(data), nil)
		if (s == nil) == (err == nil) {
			t.Fatalf("survey %v with error %v", s, err)
		}
		if s != nil && (s.Bytes > int64(len(data)) || !(s.DBU > 0)) {
			t.Fatalf("%d bytes of %d, unit %g", s.Bytes, len(data), s.DBU)
		}
	})
}

// A flat file of rectangles, as most of a large file is: 64 bytes each.
func BenchmarkScan(b *testing.B) {
	data := stream(b, func(w *gds.Writer) {
		w.BeginStructure("a")
		for i := range int32(1 << 18) {
			w.Rectangle(gds.LayerType{Layer: uint16(i >> 10)}, gds.Rect{X1: i, X2: i + 20 + i&3, Y2: 400})
		}
		w.EndStructure()
	})
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Scan(context.Background(), bytes.NewReader(data), nil); err != nil {
			b.Fatal(err)
		}
	}
}
