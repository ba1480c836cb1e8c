package decompose

import (
	"bytes"
	"compress/gzip"
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"testing"

	"maskpair/gds"
)

// openLayout unpacks one of the open layouts.
func openLayout(tb testing.TB, name string) []byte {
	tb.Helper()
	f, err := os.Open(filepath.Join("..", "testdata", "open", name+".gds.gz"))
	if err != nil {
		tb.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		tb.Fatal(err)
	}
	data, err := io.ReadAll(z)
	if err != nil {
		tb.Fatal(err)
	}
	return data
}

// oneLayer is a deck with one layer and one spacing in nm.
func oneLayer(layer int, spacing float64) string {
	return fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"%d/0\"\nmask_a = \"%d/1001\"\nmask_b = \"%d/1002\"\nsame_mask_spacing = %g\n",
		layer, layer, layer, spacing)
}

// runOf begins a run, which ends with the test.
func runOf(tb testing.TB, stream []byte, deck string, opt Options) *Run {
	tb.Helper()
	d, err := ParseDeck("deck.toml", []byte(deck))
	if err != nil {
		tb.Fatal(err)
	}
	want, err := d.Interest()
	if err != nil {
		tb.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), want, nil)
	if err != nil {
		tb.Fatal(err)
	}
	rules, err := d.Resolve(lib.DBU)
	if err != nil {
		tb.Fatal(err)
	}
	run, err := New(lib, rules, opt)
	if err != nil {
		tb.Fatal(err)
	}
	tb.Cleanup(run.Close)
	return run
}

// decomposed runs the way once and gives the result and the output.
func decomposed(tb testing.TB, stream []byte, deck string, opt Options) (*Result, []byte) {
	tb.Helper()
	run := runOf(tb, stream, deck, opt)
	result, err := run.Decompose(context.Background(), nil)
	if err != nil {
		tb.Fatal(err)
	}
	var out bytes.Buffer
	if err := run.Write(context.Background(), &out, bytes.NewReader(stream), nil); err != nil {
		tb.Fatal(err)
	}
	return result, out.Bytes()
}

// BenchmarkOpen runs the whole way on open layouts; bytes are those of the input.
func BenchmarkOpen(b *testing.B) {
	for _, c := range []struct {
		layout  string
		layer   int
		spacing float64
	}{
		{"asap7_srambank_128b", 18, 40}, {"asap7_srambank_128b", 18, 54}, {"asap7_srambank_128b", 19, 36}, {"asap7_cells_R", 19, 36},
	} {
		b.Run(fmt.Sprintf("%s_%d_%g", c.layout, c.layer, c.spacing), func(b *testing.B) {
			stream, deck := openLayout(b, c.layout), oneLayer(c.layer, c.spacing)
			b.SetBytes(int64(len(stream)))
			b.ReportAllocs()
			for b.Loop() {
				decomposed(b, stream, deck, Options{Jobs: 2})
			}
		})
	}
}

// BenchmarkStitches looks for stitches on an open layout whose odd components are large.
func BenchmarkStitches(b *testing.B) {
	stream := openLayout(b, "asap7_srambank_32b")
	deck := oneLayer(19, 36) + "[layer.stitch]\nmin_overlap = 5\nmin_piece = 10\n"
	for b.Loop() {
		decomposed(b, stream, deck, Options{Jobs: 2})
	}
}
