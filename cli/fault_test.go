package cli_test

import (
	"bytes"
	"compress/gzip"
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"strings"
	"testing"
	"time"

	"maskpair/cli"
	"maskpair/gds"
	"maskpair/testdata/twin"
)

// These tests bring the program into trouble: damaged streams, bombs, interrupts, inputs that change, runs that meet. What
// must hold is always the same: no panic, no hang, no wrong success, nothing lost and nothing left behind.

// patience is how long a run may take before it counts as hanging. It guards against a run without end, and says nothing of how fast one
// is: the longest takes seconds, and a machine a hundred times slower, or as busy, is no fault.
const patience = 8 * time.Minute

var (
	faultDrawn = gds.LayerType{Layer: 7}
	faultDeck  = twin.Deck{Layers: []twin.Layer{{Name: "m", Drawn: []gds.LayerType{faultDrawn}, Masks: [2]gds.LayerType{{Layer: 7, Type: 1}, {Layer: 7, Type: 2}}, Spacing: 5}}}
)

// faultRect is a drawn rectangle.
func faultRect(x1, y1, x2, y2 int32) twin.Element {
	return twin.Element{Kind: twin.Boundary, Layer: faultDrawn, Points: []gds.Point{{X: x1, Y: y1}, {X: x2, Y: y1}, {X: x2, Y: y2}, {X: x1, Y: y2}}}
}

// smallStreams are a few streams of a few hundred bytes, which have all kinds of elements between them. The first has a shape
// that needs either mask, so that a variant comes out.
func smallStreams() map[string][]byte {
	leaf := twin.Cell{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}}
	return map[string][]byte{
		"array": (&twin.Layout{Cells: []twin.Cell{leaf, {Name: "top", Elements: []twin.Element{
			{Kind: twin.Array, Text: "leaf", Columns: 3, Rows: 1, Points: []gds.Point{{}, {X: 24}, {Y: 9}}},
		}}}}).Bytes(),
		"turned": (&twin.Layout{Cells: []twin.Cell{leaf, {Name: "top", Elements: []twin.Element{
			{Kind: twin.Reference, Text: "leaf", Strans: gds.Strans{Mirror: true, Angle: 90}, Points: []gds.Point{{X: 9, Y: 9}}},
			{Kind: twin.Path, Layer: faultDrawn, Style: gds.PathStyle{Width: 3, Type: 4, Begin: 1, Finish: 2}, Points: []gds.Point{{X: 1, Y: 5}, {X: 1, Y: 20}, {X: 9, Y: 20}}},
		}}}}).Bytes(),
		"others": (&twin.Layout{Cells: []twin.Cell{{Name: "top", Elements: []twin.Element{
			{Kind: twin.Boundary, Layer: faultDrawn, Points: []gds.Point{{}, {X: 9}, {X: 4, Y: 7}}, Properties: []twin.Property{{Attribute: 1, Value: "n"}}},
			{Kind: twin.Text, Layer: faultDrawn, Points: []gds.Point{{X: 1, Y: 1}}, Text: "A"},
			{Kind: twin.Box, Layer: faultDrawn, Points: []gds.Point{{}, {X: 1, Y: 1}}},
			{Kind: twin.Reference, Text: "gone", Points: []gds.Point{{}}},
		}}}}).Bytes(),
	}
}

// faultBench is a folder with the deck, whose other files are named.
func faultBench(t testing.TB) folder {
	f := quickFolder(t)
	f.write("deck.toml", []byte(faultDeck.TOML(1e-9)))
	return f
}

// judgeStream runs the program on any bytes. What it takes must be right by the twin; what it refuses must be refused in one
// line, with nothing left. It gives the exit status.
func judgeStream(f folder, stream []byte) (int, error) {
	f.write("in.gds", stream)
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--quiet", "--memory", "1GiB")
	defer os.Remove(f.path("out.gds"))
	defer os.Remove(f.path("report.json"))
	switch {
	case ctx.Err() != nil:
		return status, fmt.Errorf("it took more than %v", patience)
	case strings.Contains(said, "a fault in the program itself"):
		return status, fmt.Errorf("it said: %s", said)
	case status >= 2:
		if !strings.HasPrefix(said, "maskpair: ") || strings.Count(said, "\n") != 1 {
			return status, fmt.Errorf("status %d with %q, want one line", status, said)
		}
		if got := f.names(); got != "deck.toml in.gds" {
			return status, fmt.Errorf("status %d left the files %s", status, got)
		}
		return status, nil
	}
	return status, judgeTaken(f, stream, status, said)
}

// judgeTaken judges a stream that the program took.
func judgeTaken(f folder, stream []byte, status int, said string) error {
	if err := faultDeck.Restores(stream, f.read("out.gds")); err != nil {
		return err
	}
	r, err := twin.ParseReport(f.read("report.json"))
	if err != nil {
		return err
	}
	// A damaged UNITS record changes how many database units the spacing is.
	d := twin.Deck{Layers: []twin.Layer{faultDeck.Layers[0]}}
	d.Layers[0].Spacing = *r.Layers[0].Spacing
	if nm := float64(d.Layers[0].Spacing) * r.Input.DBU * 1e9; math.Abs(nm-5) > 1e-4 { // a unit is told in floats, so all but whole numbers pass
		return fmt.Errorf("a spacing of %d database units, which is %g nm, not 5", d.Layers[0].Spacing, nm)
	}
	s, err := twin.Solve(stream, &d)
	var large twin.ErrTooMany
	if errors.As(err, &large) {
		return nil // too large for the twin, not for the program
	}
	if err != nil {
		return fmt.Errorf("status %d, but the twin finds %v", status, err)
	}
	return judgeRun(f, s, stream, status, said)
}

func TestTruncation(t *testing.T) {
	for name, stream := range smallStreams() {
		f := faultBench(t)
		for n := range len(stream) {
			if testing.Short() && n%5 != 0 {
				continue
			}
			status, err := judgeStream(f, stream[:n])
			if err != nil || status != 3 {
				t.Fatalf("%s, cut off after %d of %d bytes: status %d, %v; want status 3", name, n, len(stream), status, err)
			}
		}
		if status, err := judgeStream(f, stream); err != nil || status > 1 {
			t.Fatalf("%s, whole: status %d, %v", name, status, err)
		}
	}
}

func TestTruncationOfPackedInput(t *testing.T) {
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	z.Write(smallStreams()["array"])
	z.Close()
	f := faultBench(t)
	for n := range packed.Len() {
		status, err := judgeStream(f, packed.Bytes()[:n])
		if err != nil || status != 3 {
			t.Fatalf("cut off after %d of %d bytes: status %d, %v; want status 3", n, packed.Len(), status, err)
		}
	}
}

func TestEveryBitFlipped(t *testing.T) {
	for name, stream := range smallStreams() {
		f := faultBench(t)
		taken := 0
		step := 7
		if name == "array" {
			step = 1
		}
		if testing.Short() {
			step = 47
		}
		for bit := 0; bit < 8*len(stream); bit += step {
			broken := bytes.Clone(stream)
			broken[bit/8] ^= 1 << (bit % 8)
			status, err := judgeStream(f, broken)
			if err != nil {
				t.Errorf("%s, bit %d of byte %d flipped: status %d, %v", name, bit%8, bit/8, status, err)
			}
			if status <= 1 {
				taken++
			}
		}
		// Dates, names and coordinates may be anything.
		if taken == 0 {
			t.Errorf("%s: not one damaged stream was taken", name)
		}
	}
}

// refused runs the program on a layout that it must refuse with status 3 and these words.
func refused(t *testing.T, stream []byte, words ...string) {
	t.Helper()
	f := faultBench(t)
	f.write("in.gds", stream)
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--memory", "1GiB")
	if status != 3 || strings.Count(said, "\n") != 1 {
		t.Errorf("status %d, it said %q; want status 3 and one line", status, said)
	}
	for _, w := range append(words, "in.gds: ") {
		if !strings.Contains(said, w) {
			t.Errorf("it said %q, want %q in it", said, w)
		}
	}
	if got := f.names(); got != "deck.toml in.gds" {
		t.Errorf("it left the files %s", got)
	}
}

// place is a reference.
func place(name string, x, y int32) twin.Element {
	return twin.Element{Kind: twin.Reference, Text: name, Points: []gds.Point{{X: x, Y: y}}}
}

func TestLoops(t *testing.T) {
	leaf := twin.Cell{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}}
	loop := func(cells ...twin.Cell) []byte { return (&twin.Layout{Cells: append(cells, leaf)}).Bytes() }
	cell := func(name string, places ...string) twin.Cell {
		c := twin.Cell{Name: name}
		for _, p := range places {
			c.Elements = append(c.Elements, place(p, 0, 0))
		}
		return c
	}
	refused(t, loop(cell("ouro", "ouro", "leaf")), "ouro")
	refused(t, loop(cell("top", "head"), cell("head", "tail", "leaf"), cell("tail", "head")), "head", "tail")
	refused(t, loop(cell("head", "tail"), cell("tail", "head", "leaf")), "head", "tail") // no top at all
	refused(t, loop(cell("top", "leaf"), cell("head", "tail"), cell("tail", "head")), "head", "tail")
}

func TestDefinedTwice(t *testing.T) {
	leaf := twin.Cell{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}}
	refused(t, (&twin.Layout{Cells: []twin.Cell{leaf, leaf}}).Bytes(), "leaf")
}

// bomb is a chain of cells that each place the next twice.
func bomb(depth int, last ...twin.Element) *twin.Layout {
	l := &twin.Layout{}
	for i := range depth {
		next := fmt.Sprint("c", i+1)
		l.Cells = append(l.Cells, twin.Cell{Name: fmt.Sprint("c", i), Elements: []twin.Element{place(next, 0, 0), place(next, 1<<(i%28), 9)}})
	}
	l.Cells = append(l.Cells, twin.Cell{Name: fmt.Sprint("c", depth), Elements: last})
	return l
}

func TestBombs(t *testing.T) {
	t.Run("doubling", func(t *testing.T) { refused(t, bomb(40, faultRect(0, 0, 4, 4)).Bytes(), "c0", "--top") })
	t.Run("doubling beyond 64 bits", func(t *testing.T) { refused(t, bomb(300, faultRect(0, 0, 4, 4)).Bytes(), "c0") })
	t.Run("doubling without a drawn figure", func(t *testing.T) {
		other := twin.Element{Kind: twin.Text, Layer: faultDrawn, Points: []gds.Point{{}}, Text: "A"}
		f := faultBench(t)
		l := bomb(40, other)
		l.Cells = append(l.Cells, twin.Cell{Name: "other", Elements: []twin.Element{faultRect(0, 0, 4, 4)}})
		f.write("in.gds", l.Bytes())
		ctx, cancel := context.WithTimeout(context.Background(), patience)
		defer cancel()
		if status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"); status != 0 {
			t.Errorf("status %d, it said %s", status, said)
		}
	})
	t.Run("array", func(t *testing.T) {
		refused(t, (&twin.Layout{Cells: []twin.Cell{
			{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}},
			{Name: "top", Elements: []twin.Element{{Kind: twin.Array, Text: "leaf", Columns: 32767, Rows: 32767,
				Points: []gds.Point{{}, {X: 32767 * 10}, {Y: 32767 * 10}}}}},
		}}).Bytes(), "1073676289", "--top", "--memory")
	})
	t.Run("array of arrays", func(t *testing.T) {
		array := func(name, of string) twin.Cell {
			return twin.Cell{Name: name, Elements: []twin.Element{{Kind: twin.Array, Text: of, Columns: 65535, Rows: 65535,
				Points: []gds.Point{{}, {X: 65535 * 10}, {Y: 65535 * 10}}}}}
		}
		refused(t, (&twin.Layout{Cells: []twin.Cell{{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}},
			array("a", "leaf"), array("b", "a"), array("c", "b"), array("top", "c")}}).Bytes(), "top")
	})
}

// TestDeepChain has as many levels as cells, which no walk may take a stack for that has an end.
func TestDeepChain(t *testing.T) {
	const depth = 20000
	l := &twin.Layout{}
	for i := range depth {
		l.Cells = append(l.Cells, twin.Cell{Name: fmt.Sprint("c", i), Elements: []twin.Element{place(fmt.Sprint("c", i+1), 1, 0)}})
	}
	l.Cells = append(l.Cells, twin.Cell{Name: fmt.Sprint("c", depth), Elements: []twin.Element{faultRect(0, 0, 4, 4)}})
	f := faultBench(t)
	f.write("in.gds", l.Bytes())
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	if status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"); status != 0 {
		t.Errorf("status %d, it said %s", status, said)
	} else if err := faultDeck.Restores(l.Bytes(), f.read("out.gds")); err != nil {
		t.Error(err)
	}
}

// TestSpacingAsLargeAsTheChip takes spacings up to far beyond the plane: all shapes are near each other then.
func TestSpacingAsLargeAsTheChip(t *testing.T) {
	f := quickFolder(t)
	for seed := range layouts(12) {
		r := rand.New(rand.NewPCG(seed, 5))
		taste := twin.RandomTaste(r)
		taste.Flat, taste.Layers = 12, 1
		l, d := taste.Layout(r)
		for _, spacing := range []int64{1 << 10, 1<<31 - 1, 1 << 32, 1<<33 + 1} {
			d.Layers[0].Spacing, d.Layers[0].AnyMask = spacing, 0
			f.write("in.gds", l.Bytes())
			f.write("deck.toml", []byte(d.TOML(l.DBU)))
			s, err := twin.Solve(l.Bytes(), d)
			if err != nil {
				t.Fatal(err)
			}
			status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--force", "--quiet")
			if status == 2 && strings.Contains(said, "same_mask_spacing") {
				continue // more than the program works with, by number
			}
			if err := judgeRun(f, s, l.Bytes(), status, said); err != nil {
				t.Fatalf("seed %d, spacing %d: %v\n%v", seed, spacing, err, l)
			}
		}
	}
}

// TestCrowd has very many shapes that are all near each other: the pairs grow with their square, the assignments beyond all
// bounds. It must end, with what it knows.
func TestCrowd(t *testing.T) {
	side := 40
	if testing.Short() {
		side = 16 // for the race detector, which makes the work ten times as long
	}
	step := int32(side) * 10
	l := &twin.Layout{Cells: []twin.Cell{
		{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 4, 4)}},
		{Name: "top", Elements: []twin.Element{{Kind: twin.Array, Text: "leaf", Columns: side, Rows: side, Points: []gds.Point{{}, {X: step}, {Y: step}}}}},
	}}
	d := twin.Deck{Layers: []twin.Layer{faultDeck.Layers[0]}}
	d.Layers[0].Spacing = 1000
	f := faultBench(t)
	f.write("in.gds", l.Bytes())
	f.write("deck.toml", []byte(d.TOML(1e-9)))
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--memory", "2GiB")
	if ctx.Err() != nil {
		t.Fatalf("it took more than %v; it said: %s", patience, said)
	}
	if status != 1 {
		t.Fatalf("status %d, it said %s", status, said)
	}
	r, err := twin.ParseReport(f.read("report.json"))
	if err != nil {
		t.Fatal(err)
	}
	// A complete graph of n shapes leaves n(n-1)/2 - floor(n*n/4) pairs (Edwards).
	n := side * side
	least := n*(n-1)/2 - n*n/4
	x := r.Layers[0]
	if *x.NearPairs != n*(n-1)/2 || *x.UnresolvedPairs != least || *x.LowerBound != least || !*x.ProvedOptimal {
		t.Errorf("%d near pairs, %d unresolved, lower bound %d, proved %v; the least is %d", *x.NearPairs, *x.UnresolvedPairs, *x.LowerBound, *x.ProvedOptimal, least)
	}
	// With a quarter of a KiB for each pair it is refused by number.
	if status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--memory", fmt.Sprint(n*(n-1)/2/4, "KiB")); status != 3 || !strings.Contains(said, "--memory") {
		t.Errorf("status %d with little memory, it said %s", status, said)
	}
}

// TestLongRecords has records as long as they can be, and one that claims to be longer than the file.
func TestLongRecords(t *testing.T) {
	whole := smallStreams()["array"]
	end := len(whole) - 4 // ENDLIB
	claim := append(bytes.Clone(whole[:end]), 0xFF, 0xFF, byte(gds.BGNSTR), byte(gds.Int2))
	refused(t, claim)
	refused(t, append(claim, make([]byte, 1000)...))
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	w.BeginStructure("top")
	points := make([]gds.Point, 8190) // with the closing one as many as a record holds
	for i := range points {
		points[i] = gds.Point{X: int32(i/2) * 20, Y: int32((i+1)/2%2) * 10}
	}
	points[len(points)-1] = gds.Point{X: points[len(points)-2].X, Y: -20}
	points[0] = gds.Point{Y: -20}
	w.Boundary(faultDrawn, points)
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	f := faultBench(t)
	f.write("in.gds", b.Bytes())
	if status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"); status != 0 {
		t.Errorf("status %d, it said %s", status, said)
	} else if err := faultDeck.Restores(b.Bytes(), f.read("out.gds")); err != nil {
		t.Error(err)
	}
}

// TestLongPath has a path whose points take many records: a staircase, so that every point counts.
func TestLongPath(t *testing.T) {
	n := 300_000
	if testing.Short() {
		n = 30_000
	}
	points := make([]gds.Point, n)
	for i := range points {
		points[i] = gds.Point{X: int32((i+1)/2) * 10, Y: int32(i/2) * 10}
	}
	l := &twin.Layout{Cells: []twin.Cell{{Name: "top", Elements: []twin.Element{
		{Kind: twin.Path, Layer: faultDrawn, Style: gds.PathStyle{Width: 4}, Points: points},
		faultRect(-20, -20, -10, -10),
	}}}}
	stream := l.Bytes()
	f := faultBench(t)
	f.write("in.gds", stream)
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	status, said := f.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json")
	if status != 0 {
		t.Fatalf("status %d, it said %s", status, said)
	}
	if err := faultDeck.Restores(stream, f.read("out.gds")); err != nil {
		t.Error(err)
	}
	r, err := twin.ParseReport(f.read("report.json"))
	if err != nil {
		t.Fatal(err)
	}
	// Each of the n-1 segments adds 10 by 4; the ends are flush, and each of the n-2 corners has its outer quarter (2 by 2)
	// more and its inner one twice.
	want := float64(40*(n-1)) + 100
	if got := *r.Layers[0].Area.A + *r.Layers[0].Area.B; got != want || *r.Layers[0].Shapes != 2 {
		t.Errorf("%d shapes with an area of %v, want 2 with %v", *r.Layers[0].Shapes, got, want)
	}
}

// ----------------------------------------------------------------------------------------------- outputs that cannot be

func TestOutputIsInput(t *testing.T) {
	stream := smallStreams()["array"]
	for name, link := range map[string]func(from, to string) error{"symbolic link": os.Symlink, "hard link": os.Link} {
		f := faultBench(t)
		f.write("in.gds", stream)
		if err := link(f.path("in.gds"), f.path("out.gds")); err != nil {
			t.Logf("%s: %v", name, err)
			continue
		}
		for _, out := range []string{"@in.gds", "@out.gds", "@./in.gds"} {
			for _, role := range []string{"--output", "--report"} {
				status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", role, out, "--force")
				if status != 2 || !strings.Contains(said, "never overwritten") {
					t.Errorf("%s, %s %s: status %d, it said %s", name, role, out, status, said)
				}
				if !bytes.Equal(f.read("in.gds"), stream) {
					t.Fatalf("%s, %s %s: the input was overwritten", name, role, out)
				}
			}
		}
		if got := f.names(); got != "deck.toml in.gds out.gds" {
			t.Errorf("%s: it left the files %s", name, got)
		}
	}
}

// narrow is a writer that takes so many bytes and then fails.
type narrow struct{ left int }

var errNarrow = errors.New("no reader is left")

func (n *narrow) Write(p []byte) (int, error) {
	if len(p) > n.left {
		return 0, errNarrow
	}
	n.left -= len(p)
	return len(p), nil
}

func TestOutputToPipe(t *testing.T) {
	f := faultBench(t)
	stream := smallStreams()["array"]
	f.write("in.gds", stream)
	t.Setenv("TMPDIR", f.dir)
	if status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"); status != 0 {
		t.Fatalf("status %d, it said %s", status, said)
	}
	want := f.read("out.gds")
	os.Remove(f.path("out.gds"))
	var out, said bytes.Buffer
	args := []string{"decompose", "-", "--deck", f.path("deck.toml"), "--output", "-", "--quiet"}
	status := cli.Run(context.Background(), args, bytes.NewReader(stream), &out, &said)
	if status != 0 || !bytes.Equal(out.Bytes(), want) {
		t.Errorf("from pipe to pipe: status %d, %d bytes, want the same as from file to file; it said %s", status, out.Len(), said.String())
	}
	for _, left := range []int{0, 1, len(want) - 1} {
		said.Reset()
		status := cli.Run(context.Background(), args, bytes.NewReader(stream), &narrow{left}, &said)
		if status != 4 || !strings.Contains(said.String(), "standard output: cannot be written") {
			t.Errorf("a pipe that takes %d bytes: status %d, it said %s", left, status, said.String())
		}
	}
	if got := f.names(); got != "deck.toml in.gds" {
		t.Errorf("it left the files %s", got)
	}
}

// TestInputBreaks has an input that fails in the middle of a read.
func TestInputBreaks(t *testing.T) {
	f := faultBench(t)
	t.Setenv("TMPDIR", f.dir)
	stream := smallStreams()["array"]
	for n := range len(stream) {
		var said bytes.Buffer
		in := io.MultiReader(bytes.NewReader(stream[:n]), broken{})
		status := cli.Run(context.Background(), []string{"decompose", "-", "--deck", f.path("deck.toml"), "--output", f.path("out.gds")}, in, io.Discard, &said)
		if status != 3 || !strings.Contains(said.String(), "standard input") || strings.Contains(said.String(), "a fault in the program") {
			t.Fatalf("broken after %d bytes: status %d, it said %s", n, status, said.String())
		}
	}
	if got := f.names(); got != "deck.toml" {
		t.Errorf("it left the files %s", got)
	}
}

type broken struct{}

func (broken) Read([]byte) (int, error) { return 0, errors.New("the line is cut") }
