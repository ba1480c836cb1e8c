package cli_test

import (
	"bytes"
	"compress/gzip"
	"encoding/json"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"maskpair/gds"
	"maskpair/testdata/twin"
)

// These tests hold the program to what a result must not depend on: the number of workers, the order of elements and
// structures in the file, and that a result is an input again.

// openLayout is a layout of testdata/open with a deck for it.
type openLayout struct {
	file    string
	layer   gds.LayerType
	spacing float64 // nm
	dbu     float64 // nm
}

// The spacings are some at which the layouts have odd cycles, and some at which they have none.
func openLayouts() []openLayout {
	list := []openLayout{
		{"asap7_cells_R", gds.LayerType{Layer: 19}, 20, 0.25},
		{"asap7_cells_R", gds.LayerType{Layer: 19}, 36, 0.25},
		{"asap7_cells_R", gds.LayerType{Layer: 17}, 40, 0.25},
		{"ihp_stdcell", gds.LayerType{Layer: 8}, 200, 1},
	}
	if !testing.Short() {
		list = append(list,
			openLayout{"asap7_srambank_32b", gds.LayerType{Layer: 18}, 54, 0.25},
			openLayout{"asap7_srambank_32b", gds.LayerType{Layer: 19}, 36, 0.25})
	}
	return list
}

func (o openLayout) String() string {
	return fmt.Sprintf("%s_%d_%g", o.file, o.layer.Layer, o.spacing)
}

// deck gives a deck whose masks are datatypes that the layouts do not have.
func (o openLayout) deck() *twin.Deck {
	mask := func(n uint16) gds.LayerType { return gds.LayerType{Layer: o.layer.Layer, Type: n} }
	return &twin.Deck{Layers: []twin.Layer{{Name: "layer", Drawn: []gds.LayerType{o.layer}, Masks: [2]gds.LayerType{mask(201), mask(202)}, Spacing: int64(o.spacing / o.dbu)}}}
}

// stream gives the layout unpacked.
func (o openLayout) stream(t testing.TB) []byte {
	t.Helper()
	packed, err := os.Open(filepath.Join("..", "testdata", "open", o.file+".gds.gz"))
	if err != nil {
		t.Fatal(err)
	}
	defer packed.Close()
	z, err := gzip.NewReader(packed)
	if err != nil {
		t.Fatal(err)
	}
	stream, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	return stream
}

// result is what a run wrote.
type result struct {
	out    []byte
	report map[string]json.RawMessage // without what may differ from run to run
}

// decompose runs the program; ok is false where it refuses the layout.
func (f folder) decompose(stream []byte, deck string, jobs int) (r result, ok bool) {
	f.t.Helper()
	f.write("in.gds", stream)
	f.write("deck.toml", []byte(deck))
	defer os.Remove(f.path("out.gds"))
	defer os.Remove(f.path("report.json"))
	status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--jobs", fmt.Sprint(jobs))
	if status > 1 {
		if !bytes.HasPrefix([]byte(said), []byte("maskpair: ")) || bytes.Contains([]byte(said), []byte("a fault in the program")) {
			f.t.Fatalf("status %d, it said: %s", status, said)
		}
		return result{}, false
	}
	r.out = f.read("out.gds")
	if err := json.Unmarshal(f.read("report.json"), &r.report); err != nil {
		f.t.Fatal(err)
	}
	delete(r.report, "run")
	return r, true
}

// sameReport tells whether two reports are the same, apart from the input's checksum where that may differ.
func sameReport(a, b result, but ...string) bool {
	for key, text := range a.report {
		if !slices.Contains(but, key) && !bytes.Equal(text, b.report[key]) {
			return false
		}
	}
	return len(a.report) == len(b.report)
}

// eachLayout gives every open layout, and so many random ones that the program takes.
func eachLayout(t *testing.T, random int, check func(t testing.TB, f folder, name string, stream []byte, d *twin.Deck, dbu float64)) {
	for _, o := range openLayouts() {
		t.Run(o.String(), func(t *testing.T) {
			check(t, newFolder(t), o.String(), o.stream(t), o.deck(), o.dbu*1e-9)
		})
	}
	t.Run("random", func(t *testing.T) {
		f := quickFolder(t)
		for seed := range layouts(random) {
			r := rand.New(rand.NewPCG(seed, 2))
			l, d := twin.Random(r)
			check(t, f, fmt.Sprint("seed ", seed), l.Bytes(), d, l.DBU)
		}
	})
}

func TestJobsMakeNoDifference(t *testing.T) {
	eachLayout(t, 200, func(t testing.TB, f folder, name string, stream []byte, d *twin.Deck, dbu float64) {
		one, ok := f.decompose(stream, d.TOML(dbu), 1)
		for jobs := 2; jobs <= 3; jobs++ {
			more, same := f.decompose(stream, d.TOML(dbu), jobs)
			if ok != same {
				t.Fatalf("%s: refused with %d jobs or with 1, but not with both", name, jobs)
			}
			if !bytes.Equal(one.out, more.out) {
				t.Fatalf("%s: %d jobs give another output than 1", name, jobs)
			}
			if !sameReport(one, more) {
				t.Fatalf("%s: %d jobs give another report than 1", name, jobs)
			}
		}
	})
}

func TestOrderMakesNoDifference(t *testing.T) {
	eachLayout(t, 400, func(t testing.TB, f folder, name string, stream []byte, d *twin.Deck, dbu float64) {
		first, ok := f.decompose(stream, d.TOML(dbu), 2)
		shuffled, err := twin.Shuffle(stream, rand.New(rand.NewPCG(7, 7)))
		if err != nil {
			t.Fatal(err)
		}
		second, same := f.decompose(shuffled, d.TOML(dbu), 2)
		if ok != same {
			t.Fatalf("%s: refused in one order of elements and structures, but not in another", name)
		}
		if !ok || len(stream) > 10<<20 {
			return // the masks of each place of so large a layout take too much memory to list
		}
		was, err := d.FigureMasks(first.out)
		if err != nil {
			t.Fatal(err)
		}
		is, err := d.FigureMasks(second.out)
		if err != nil {
			t.Fatal(err)
		}
		if k, other := difference(was, is); k != "" {
			t.Fatalf("%s: with elements and structures in another order a place gets another mask:\n%s\n%s", name, k, other)
		}
	})
}

// difference gives the first entries in which two lists differ, or nothing.
func difference(a, b []string) (one, other string) {
	for i := range max(len(a), len(b)) {
		switch {
		case i >= len(a):
			return "nothing", b[i]
		case i >= len(b):
			return a[i], "nothing"
		case a[i] != b[i]:
			return a[i], b[i]
		}
	}
	return "", ""
}

func TestNothingElseChanges(t *testing.T) {
	eachLayout(t, 0, func(t testing.TB, f folder, name string, stream []byte, d *twin.Deck, dbu float64) {
		r, ok := f.decompose(stream, d.TOML(dbu), 2)
		if !ok {
			t.Fatalf("%s was refused", name)
		}
		if err := d.Restores(stream, r.out); err != nil {
			t.Fatalf("%s: %v", name, err)
		}
	})
}

func TestResultAsInput(t *testing.T) {
	taken := 0
	eachLayout(t, 400, func(t testing.TB, f folder, name string, stream []byte, d *twin.Deck, dbu float64) {
		d.Marks = nil // what marks there are would be figures on a layer of marks
		for i := range d.Layers {
			d.Layers[i].Redo, d.Layers[i].KeepDrawn = false, false
		}
		r, ok := f.decompose(stream, d.TOML(dbu), 2)
		if !ok {
			return
		}
		taken++
		again, ok := f.decompose(r.out, d.TOML(dbu), 2)
		if !ok {
			t.Fatalf("%s: the program refuses its own output", name)
		}
		if !bytes.Equal(r.out, again.out) {
			t.Fatalf("%s: the output comes out of the program otherwise than it went in", name)
		}
	})
	if taken < 20 {
		t.Errorf("only %d layouts were taken", taken)
	}
}
