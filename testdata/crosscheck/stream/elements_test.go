package stream

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"testing"

	gocmp "github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// This file compares element by element: what package gds writes is read by the judges, what gdspy writes is read by package
// gds. The layout as drawn is the reference, so that no program is asked about itself.

func round(f float64) int64 { return int64(math.Round(f)) }

// cosSin gives cosine and sine of an angle in degrees, exact at quarter turns.
func cosSin(degrees float64) (float64, float64) {
	switch math.Mod(degrees, 360) {
	case 0:
		return 1, 0
	case 90:
		return 0, 1
	case 180:
		return -1, 0
	case 270:
		return 0, -1
	}
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	return cos, sin
}

// alike compares layouts. Steps of arrays are compared to a unit: the points of an AREF are whole units, so an odd angle
// rounds them.
func alike(want, got []cell) string {
	near := gocmp.Comparer(func(a, b [2]float64) bool { return math.Abs(a[0]-b[0]) <= 1 && math.Abs(a[1]-b[1]) <= 1 })
	return gocmp.Diff(plain(want), plain(got), near, cmpopts.EquateEmpty())
}

// exactSteps says that the steps of arrays along the axes are read as drawn, to a thousandth.
func exactSteps(want, got []cell) string {
	for i, c := range want {
		for k, r := range c.Refs {
			g := got[i].Refs[k]
			if math.Mod(r.Angle, 90) == 0 && (math.Abs(r.Column[0]-g.Column[0])+math.Abs(r.Column[1]-g.Column[1])+math.Abs(r.Row[0]-g.Row[0])+math.Abs(r.Row[1]-g.Row[1]) > 1e-3) {
				return fmt.Sprintf("structure %s: steps of %+v are read as %v and %v", c.Name, r, g.Column, g.Row)
			}
		}
	}
	return ""
}

// writing is a question to gdspy_write.py.
type writing struct {
	Path            string
	Unit, Precision float64 // metres
	Cells           []cell
}

var unitChoices = []gds.WriterOptions{{}, {UserUnit: 0.00025, DBU: 2.5e-10}, {UserUnit: 0.01, DBU: 1e-8, Version: 5, LibName: "L"}, {UserUnit: 1, DBU: 1e-9}}

func TestGdspyReadsWhatIsWritten(t *testing.T) {
	outside.Packages(t, "python3-gdspy", "python3-numpy")
	rng := rand.New(rand.NewPCG(32, 1))
	var files []string
	var drawn [][]cell
	for n := range 150 {
		cells := draw(rng, options{odd: n%2 == 0, paths: true})
		drawn, files = append(drawn, cells), append(files, write(t, cells, unitChoices[n%len(unitChoices)], extras(n%3)))
		got := read(index(t, files[n]))
		if diff := alike(cells, got); diff != "" {
			t.Fatalf("layout %d (-drawn +read by gds):\n%.3000s", n, diff)
		}
		if text := exactSteps(cells, got); text != "" {
			t.Fatalf("layout %d: %s", n, text)
		}
	}
	for n, got := range outside.Ask[[]string, [][]cell](t, "gdspy_read.py", files) {
		if diff := alike(drawn[n], got); diff != "" {
			t.Fatalf("layout %d (-drawn +read by gdspy):\n%.3000s", n, diff)
		}
		if text := exactSteps(drawn[n], got); text != "" {
			t.Fatalf("layout %d: %s", n, text)
		}
	}
}

func TestWhatGdspyWritesIsRead(t *testing.T) {
	outside.Packages(t, "python3-gdspy", "python3-numpy")
	rng := rand.New(rand.NewPCG(32, 2))
	dir := t.TempDir()
	var q []writing
	for n := range 150 {
		u := unitChoices[n%len(unitChoices)]
		unit, precision := 1e-6, 1e-9
		if u.DBU != 0 {
			unit, precision = u.DBU/u.UserUnit, u.DBU
		}
		q = append(q, writing{filepath.Join(dir, fmt.Sprint(n, ".gds")), unit, precision, draw(rng, options{odd: n%2 == 0, paths: true})})
	}
	// A polygon of more points than a record holds goes into several XY records.
	var ring []point
	for i := range int64(20000) {
		ring = append(ring, point{i, i % 7 * 3})
	}
	for _, b := range [][]point{ring[:8189], ring[:8190], ring[:8191], ring[:16380], ring} {
		q[0].Cells[0].Boundaries = append(q[0].Cells[0].Boundaries, boundary{1, 1, b})
	}
	if names := outside.Ask[[]writing, []string](t, "gdspy_write.py", q); len(names) != len(q) {
		t.Fatalf("%d answers to %d questions", len(names), len(q))
	}
	for n, w := range q {
		lib := index(t, w.Path)
		if math.Abs(lib.DBU-w.Precision) > 1e-12*w.Precision || math.Abs(lib.UserUnit-w.Precision/w.Unit) > 1e-12 {
			t.Errorf("layout %d: units %g and %g, not %g and %g", n, lib.UserUnit, lib.DBU, w.Precision/w.Unit, w.Precision)
		}
		got := read(lib)
		if diff := alike(w.Cells, got); diff != "" {
			t.Fatalf("layout %d (-drawn and written by gdspy +read by gds):\n%.3000s", n, diff)
		}
		if text := exactSteps(w.Cells, got); text != "" {
			t.Fatalf("layout %d: %s", n, text)
		}
	}
}

// element is an element as libGDSII reads it.
type element struct {
	Kind, Layer, Type, TextType, PathType int
	Width                                 int64
	Columns, Rows                         int
	Mirror                                bool
	AbsoluteMagnification, AbsoluteAngle  bool
	Magnification, Angle                  float64
	Name, Text                            string
	XY                                    []int64
	Attributes                            []int
	Values                                []string
}

// reading is the answer of libgdsii/dump.cc.
type reading struct {
	Units [2]float64
	Cells []struct {
		Name     string
		Elements []element
	}
	Flat []struct {
		Layer    int
		Polygons [][]float64
	}
}

// The kinds of elements by libGDSII's numbers.
const (
	libBoundary = iota
	libPath
	libSRef
	libARef
	libText
)

// told tells what libGDSII has read, as plain data. It keeps no extensions of paths of type 4.
func (r *reading) told() []cell {
	cells := make([]cell, len(r.Cells))
	for i, c := range r.Cells {
		cells[i].Name = c.Name
		for _, e := range c.Elements {
			var list []point
			for k := 0; k+1 < len(e.XY); k += 2 {
				list = append(list, point{e.XY[k], e.XY[k+1]})
			}
			switch e.Kind {
			case libBoundary:
				cells[i].Boundaries = append(cells[i].Boundaries, boundary{e.Layer, e.Type, list[:len(list)-1]})
			case libPath:
				cells[i].Paths = append(cells[i].Paths, path{Layer: e.Layer, Type: e.Type, PathType: e.PathType, Width: e.Width, Points: list})
			case libText:
				cells[i].Texts = append(cells[i].Texts, text{e.Layer, e.TextType, list[0], e.Text})
			case libSRef, libARef:
				s := ref{Name: e.Name, At: list[0], Mirror: e.Mirror, Magnification: e.Magnification, Angle: e.Angle}
				if e.Kind == libARef {
					s.Columns, s.Rows = e.Columns, e.Rows
					for d := range 2 {
						s.Column[d] = float64(list[1][d]-list[0][d]) / float64(e.Columns)
						s.Row[d] = float64(list[2][d]-list[0][d]) / float64(e.Rows)
					}
				}
				cells[i].Refs = append(cells[i].Refs, s)
			}
		}
	}
	return cells
}

// libGDSII 0.2 reads no bit of STRANS, and no BOX and no NODE; it is not asked about them.
func TestLibGDSIIReadsWhatIsWritten(t *testing.T) {
	outside.Packages(t, "libgdsii-dev", "g++")
	program := outside.Compile(t, "libgdsii/dump.cc", "GDSII")
	rng := rand.New(rand.NewPCG(32, 3))
	for n := range 80 {
		cells := draw(rng, options{odd: n%4 < 2, paths: true, plain: true, small: true})
		u := unitChoices[n%3]
		file := write(t, cells, u, extras(n%2))
		got := outside.AskProgram[string, reading](t, program, file)
		want := slices.Clone(cells)
		for i := range want {
			want[i].Paths = slices.Clone(want[i].Paths)
			for k := range want[i].Paths {
				want[i].Paths[k].Begin, want[i].Paths[k].Finish = 0, 0
			}
		}
		if diff := alike(want, got.told()); diff != "" {
			t.Fatalf("layout %d (-drawn +read by libGDSII):\n%.3000s", n, diff)
		}
		if text := exactSteps(want, got.told()); text != "" {
			t.Fatalf("layout %d: %s", n, text)
		}
		if extras(n%2) == attributes {
			decorated(t, cells, &got)
		}
	}
}

// decorated holds the properties that write adds against what libGDSII reads of them.
func decorated(t testing.TB, cells []cell, got *reading) {
	t.Helper()
	for i, c := range cells {
		k := 0
		for _, e := range got.Cells[i].Elements {
			if e.Kind != libBoundary {
				continue
			}
			if want := k%4 == 2; want != (len(e.Values) == 1) || want && (e.Attributes[0] != 1+k%100 || e.Values[0] != fmt.Sprintf("value %d", k)) {
				t.Fatalf("structure %s, boundary %d: properties %v %q", c.Name, k, e.Attributes, e.Values)
			}
			k++
		}
	}
}

// TestFilesReadAlike: gdspy and package gds read the same of a file that neither of them wrote.
func TestFilesReadAlike(t *testing.T) {
	stream := filepath.Join(t.TempDir(), "hand.gds")
	if err := os.WriteFile(stream, typed(t), 0o600); err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(mustOpen(t, stream), -1, gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: 19}: 1}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	outside.Packages(t, "python3-gdspy", "python3-numpy")
	got := outside.Ask[[]string, [][]cell](t, "gdspy_read.py", []string{stream})[0]
	if len(got) != 2 || len(got[0].Boundaries) != 1 || len(got[0].Paths) != 1 || len(got[1].Refs) != 2 {
		t.Fatalf("gdspy reads %+v", got)
	}
	if p, o := got[0].Paths[0], lib.Outlines[1]; p.PathType != int(o.PathType) || p.Width != int64(o.Width) || p.Begin != int64(o.Begin) || p.Finish != int64(o.Finish) {
		t.Errorf("path: gdspy %+v, gds %+v", p, o)
	}
	for i := range lib.Refs {
		if diff := alike([]cell{{Refs: []ref{got[1].Refs[i]}}}, []cell{{Refs: []ref{readRef(lib, &lib.Refs[i])}}}); diff != "" {
			t.Errorf("reference %d (-gdspy +gds):\n%s", i, diff)
		}
	}
}

func mustOpen(t testing.TB, name string) *os.File {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	return f
}
