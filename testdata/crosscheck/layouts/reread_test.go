package layouts

import (
	"cmp"
	"compress/gzip"
	"io"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"maskpair/testdata/crosscheck/outside"
)

// This file lets libGDSII 0.2 read what the program writes of open layouts.

// flat is what libgdsii/dump.cc says of the flattened stream: polygons by layer, whatever their datatype.
type flat struct {
	Flat []struct {
		Layer    int
		Polygons [][]float64
	}
}

// polygons gives the polygons of each layer in an order of their own.
func (f *flat) polygons() map[int][][]float64 {
	out := map[int][][]float64{}
	for _, l := range f.Flat {
		out[l.Layer] = l.Polygons
		slices.SortFunc(l.Polygons, func(a, b []float64) int { return cmp.Or(cmp.Compare(len(a), len(b)), slices.Compare(a, b)) })
	}
	return out
}

// TestLibGDSIIReadsTheOutput: a mask is a datatype of the same layer here, which libGDSII does not tell apart. So it must see
// exactly the polygons of the input, on every layer.
func TestLibGDSIIReadsTheOutput(t *testing.T) {
	program := outside.Maskpair(t)
	outside.Packages(t, "libgdsii-dev", "g++")
	dump := outside.Compile(t, "../stream/libgdsii/dump.cc", "GDSII")
	for _, c := range []struct {
		layout  string
		layer   int
		spacing float64
	}{{"asap7_cells_R", 19, 36}, {"ihp_stdcell", 8, 240}} {
		input := unpacked(t, filepath.Join("../../open", c.layout+".gds.gz"))
		r, output := decompose(t, program, input, [][2]int{{c.layer, 0}}, c.spacing, "nm")
		before, after := outside.AskProgram[string, flat](t, dump, input), outside.AskProgram[string, flat](t, dump, output)
		want, got := before.polygons(), after.polygons()
		if len(want) != len(got) || len(want[c.layer]) < r.Figures {
			t.Errorf("%s: %d layers before, %d after, %d polygons on the drawn layer", c.layout, len(want), len(got), len(want[c.layer]))
		}
		for layer := range want {
			if !slices.EqualFunc(want[layer], got[layer], slices.Equal) {
				t.Errorf("%s: layer %d has other polygons in the output (%d before, %d after)", c.layout, layer, len(want[layer]), len(got[layer]))
			}
		}
	}
}

// unpacked gives the path of the unpacked file.
func unpacked(t testing.TB, path string) string {
	t.Helper()
	packed, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer packed.Close()
	z, err := gzip.NewReader(packed)
	if err != nil {
		t.Fatal(err)
	}
	data, err := io.ReadAll(z)
	if err != nil {
		t.Fatal(err)
	}
	name := filepath.Join(t.TempDir(), "in.gds")
	if err := os.WriteFile(name, data, 0o600); err != nil {
		t.Fatal(err)
	}
	return name
}
