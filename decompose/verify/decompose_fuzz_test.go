package verify_test

import (
	"bytes"
	"context"
	"testing"
	"time"

	"maskpair/anchor"
	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
)

// fuzzDeck has two layers, one of them cut where that helps.
const fuzzDeck = `unit = "nm"
[[layer]]
name = "m1"
drawn = "1/0"
mask_a = "1/1"
mask_b = "1/2"
same_mask_spacing = 20
[layer.stitch]
min_overlap = 4
min_piece = 6
apply = true
[[layer]]
name = "v1"
drawn = ["2/0", "2/5"]
mask_a = "2/1"
mask_b = "2/2"
same_mask_spacing = 9
`

// fuzzSeeds are small streams: a row with an odd cycle, a hierarchy in all orientations with a path and a slanted figure, masks that
// came with the layout.
func fuzzSeeds(tb testing.TB) [][]byte {
	tb.Helper()
	var out [][]byte
	draw := func(fill func(w *gds.Writer)) {
		var b bytes.Buffer
		w := gds.NewWriter(&b, gds.WriterOptions{LibName: "seed", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
		fill(w)
		if err := w.Close(); err != nil {
			tb.Fatal(err)
		}
		out = append(out, b.Bytes())
	}
	m1, v1 := gds.LayerType{Layer: 1}, gds.LayerType{Layer: 2}
	draw(func(w *gds.Writer) {
		w.BeginStructure("row")
		for i := range int32(3) {
			w.Rectangle(m1, gds.Rect{X1: 15 * i, Y1: 0, X2: 15*i + 10, Y2: 10})
		}
		w.Rectangle(m1, gds.Rect{X1: 0, Y1: 20, X2: 200, Y2: 30})
		w.EndStructure()
	})
	draw(func(w *gds.Writer) {
		w.BeginStructure("leaf")
		w.Rectangle(v1, gds.Rect{X1: 0, Y1: 0, X2: 6, Y2: 4})
		w.Path(m1, gds.PathStyle{Type: 2, Width: 5}, []gds.Point{{X: 0, Y: 30}, {X: 40, Y: 30}, {X: 40, Y: 60}})
		w.Boundary(m1, []gds.Point{{X: 60, Y: 0}, {X: 80, Y: 10}, {X: 60, Y: 20}})
		w.EndStructure()
		w.BeginStructure("top")
		w.ARef("leaf", gds.Strans{}, 3, 2, gds.Point{}, gds.Point{X: 36, Y: 0}, gds.Point{X: 0, Y: 160})
		w.SRef("leaf", gds.Strans{Mirror: true, Angle: 90}, gds.Point{X: 300, Y: 0})
		w.SRef("leaf", gds.Strans{Angle: 30, Magnification: 1.5}, gds.Point{X: 600, Y: 0})
		w.EndStructure()
	})
	draw(func(w *gds.Writer) {
		w.BeginStructure("masked")
		w.Rectangle(gds.LayerType{Layer: 1, Type: 1}, gds.Rect{X1: 0, Y1: 0, X2: 10, Y2: 10})
		w.Rectangle(m1, gds.Rect{X1: 15, Y1: 0, X2: 25, Y2: 10})
		w.Rectangle(gds.LayerType{Layer: 1, Type: 2}, gds.Rect{X1: 0, Y1: 15, X2: 10, Y2: 25})
		w.EndStructure()
	})
	return out
}

// FuzzDecompose runs whole decompositions of streams that nobody drew. What is refused is refused without a panic; what is accepted
// must pass the second pair of eyes: everything but the spacing of pairs that two masks cannot do.
func FuzzDecompose(f *testing.F) {
	for _, s := range fuzzSeeds(f) {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, stream []byte) {
		if len(stream) > 1<<14 {
			t.Skip("longer than the seeds need")
		}
		fuzzOne(t, stream)
	})
}

func fuzzOne(t *testing.T, stream []byte) {
	deck, err := decompose.ParseDeck("deck.toml", []byte(fuzzDeck))
	if err != nil {
		t.Fatal(err)
	}
	want, err := deck.Interest()
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), want, nil)
	if err != nil {
		return
	}
	rules, err := deck.Resolve(lib.DBU)
	if err != nil {
		return
	}
	run, err := decompose.New(lib, rules, decompose.Options{Jobs: 1, Memory: 256 << 20})
	if err != nil {
		return
	}
	defer run.Close()
	result, err := run.Decompose(context.Background(), &anchor.Sources{})
	if err != nil {
		return
	}
	var out bytes.Buffer
	if err := run.Write(context.Background(), &out, bytes.NewReader(stream), nil); err != nil {
		t.Fatalf("accepted, but not written: %v", err)
	}
	judged, err := verify.Verify(context.Background(), verify.Input{Masked: verify.InMemory("out.gds", out.Bytes()), Drawn: verify.InMemory("in.gds", stream), Deck: deck})
	if err != nil {
		t.Fatalf("the output cannot be judged: %v", err)
	}
	unresolved := int64(0)
	for i := range result.Layers {
		unresolved += result.Layers[i].UnresolvedPairs
	}
	for _, c := range judged.Checks {
		if c.Faults > 0 && !(c.Kind == verify.SameMask && c.Faults <= unresolved) {
			t.Errorf("%+v", *c)
		}
	}
}
