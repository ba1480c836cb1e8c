package cli

import (
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"maskpair/cli/report"
	"maskpair/gds"
)

// These tests run the command verify on small streams: statuses, report, summary.

// verifyBench is a folder with an output, its input and a deck.
type verifyBench struct {
	t   *testing.T
	dir string
}

// row writes squares of 20 in a row, 20 apart, each on a layer.
func row(t *testing.T, layers ...gds.LayerType) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	w.BeginStructure("chip")
	for i, l := range layers {
		x := int32(40 * i)
		w.Rectangle(l, gds.Rect{X1: x, X2: x + 20, Y2: 20})
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func newVerifyBench(t *testing.T) *verifyBench {
	b := &verifyBench{t, t.TempDir()}
	drawn, a, c := gds.LayerType{Layer: 19}, gds.LayerType{Layer: 19, Type: 1}, gds.LayerType{Layer: 19, Type: 2}
	b.write("in.gds", row(t, drawn, drawn, drawn))
	b.write("out.gds", row(t, a, c, a))
	b.write("bad.gds", row(t, a, a, c))
	b.write("deck.toml", []byte(testDeck))
	b.write("orders.toml", []byte("[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [10, 10]\n"))
	b.write("wrong.toml", []byte("[[anchor]]\nlayer = \"metal1\"\nmask = \"B\"\nat = [10, 10]\n"))
	b.write("missing.toml", []byte("[[anchor]]\nlayer = \"metal1\"\nmask = \"B\"\nat = [10, 500]\n"))
	b.write("cut.gds", row(t, a)[:90])
	return b
}

func (b *verifyBench) path(name string) string { return filepath.Join(b.dir, name) }

func (b *verifyBench) write(name string, data []byte) {
	b.t.Helper()
	if err := os.WriteFile(b.path(name), data, 0o644); err != nil {
		b.t.Fatal(err)
	}
}

// run runs the program; "@" before an argument stands for the folder.
func (b *verifyBench) run(stdin io.Reader, args ...string) (status int, out, errw string) {
	var o, e bytes.Buffer
	placed := []string{"verify"}
	for _, a := range args {
		if rest, ok := strings.CutPrefix(a, "@"); ok {
			a = b.path(rest)
		}
		placed = append(placed, a)
	}
	status = Run(context.Background(), placed, stdin, &o, &e)
	return status, o.String(), e.String()
}

func TestVerifyStatus(t *testing.T) {
	b := newVerifyBench(t)
	for _, c := range []struct {
		name   string
		args   []string
		status int
		says   string // in what is printed to standard error
	}{
		{"all holds", []string{"@out.gds", "--deck", "@deck.toml"}, 0, ": all holds."},
		{"with the drawn layout", []string{"@out.gds", "--deck", "@deck.toml", "--drawn", "@in.gds", "--anchors", "@orders.toml"}, 0, ": all holds."},
		{"a pair", []string{"@bad.gds", "--deck", "@deck.toml"}, 1, "same-mask spacing 36 nm                 1 fault"},
		{"an order", []string{"@out.gds", "--deck", "@deck.toml", "--anchors", "@wrong.toml"}, 1, "is ordered on mask B and is on mask A"},
		{"not the input", []string{"@out.gds", "--deck", "@deck.toml", "--drawn", "@bad.gds"}, 1, "a figure that arrived on mask A is not there any more"},
		{"an order that misses", []string{"@out.gds", "--deck", "@deck.toml", "--anchors", "@missing.toml"}, 2, "missing.toml:1: anchor number 1: hits no shape"},
		{"no deck", []string{"@out.gds"}, 2, "no rule deck given"},
		{"no layout", []string{"--deck", "@deck.toml"}, 2, "no layout given"},
		{"two layouts", []string{"@out.gds", "@in.gds", "--deck", "@deck.toml"}, 2, "one layout too many"},
		{"both from standard input", []string{"-", "--drawn", "-", "--deck", "@deck.toml"}, 2, "--drawn"},
		{"an empty option", []string{"@out.gds", "--deck", "@deck.toml", "--drawn", ""}, 2, "--drawn is empty"},
		{"a deck that is none", []string{"@out.gds", "--deck", "@orders.toml"}, 2, "orders.toml:1"},
		{"report over the layout", []string{"@out.gds", "--deck", "@deck.toml", "--report", "@out.gds", "--force"}, 2, "never overwritten"},
		{"report over the drawn layout", []string{"@out.gds", "--deck", "@deck.toml", "--drawn", "@in.gds", "--report", "@in.gds", "--force"}, 2, "never overwritten"},
		{"cut off", []string{"@cut.gds", "--deck", "@deck.toml"}, 3, "cut.gds"},
		{"not there", []string{"@nowhere.gds", "--deck", "@deck.toml"}, 3, "nowhere.gds"},
		{"drawn layout not there", []string{"@out.gds", "--deck", "@deck.toml", "--drawn", "@nowhere.gds"}, 3, "nowhere.gds"},
		{"report into a folder that is not there", []string{"@out.gds", "--deck", "@deck.toml", "--report", "@no/r.json"}, 4, "does not exist"},
	} {
		status, out, errw := b.run(strings.NewReader(""), c.args...)
		if status != c.status || !strings.Contains(errw, c.says) || out != "" {
			t.Errorf("%s: status %d, want %d; standard output %q, standard error:\n%s\nwant %q in it", c.name, status, c.status, out, errw, c.says)
		}
		if status >= 2 && strings.Count(errw, "\n") != 1 {
			t.Errorf("%s: an error of more or less than one line:\n%s", c.name, errw)
		}
		if status < 2 && !strings.HasSuffix(errw, report.Caution+"\n") {
			t.Errorf("%s: the caution is not the last line:\n%s", c.name, errw)
		}
	}
}

// The layout may come packed and over standard input.
func TestVerifyStandardInput(t *testing.T) {
	b := newVerifyBench(t)
	plain, err := os.ReadFile(b.path("out.gds"))
	if err != nil {
		t.Fatal(err)
	}
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	z.Write(plain)
	z.Close()
	status, _, errw := b.run(&packed, "-", "--deck", "@deck.toml", "--drawn", "@in.gds")
	if status != 0 || !strings.Contains(errw, "standard input: all holds.") {
		t.Errorf("status %d:\n%s", status, errw)
	}
	if status, _, errw := b.run(strings.NewReader(""), "@out.gds", "--deck", "@deck.toml", "--quiet"); status != 0 || errw != "" {
		t.Errorf("--quiet: status %d, printed %q", status, errw)
	}
}

func TestVerifyReport(t *testing.T) {
	b := newVerifyBench(t)
	if status, _, errw := b.run(nil, "@bad.gds", "--deck", "@deck.toml", "--drawn", "@in.gds", "--report", "@r.json"); status != 1 {
		t.Fatalf("status %d: %s", status, errw)
	}
	text, err := os.ReadFile(b.path("r.json"))
	if err != nil {
		t.Fatal(err)
	}
	var got struct {
		OK     bool
		Faults int
		Masked struct {
			SHA256 string
			Bytes  int
		}
		Drawn  struct{ Bytes int }
		Top    []string
		Layers []struct {
			Name   string
			Shapes int
		}
		Checks []struct {
			Check, Layer string
			OK           bool
			Faults       int
			Places       []struct {
				Top, What  string
				Box, Other []float64
			}
		}
		Caution string
	}
	if err := json.Unmarshal(text, &got); err != nil {
		t.Fatal(err)
	}
	size := func(name string) int {
		info, err := os.Stat(b.path(name))
		if err != nil {
			t.Fatal(err)
		}
		return int(info.Size())
	}
	if got.OK || got.Faults != 1 || got.Masked.Bytes != size("bad.gds") || len(got.Masked.SHA256) != 64 || got.Drawn.Bytes != size("in.gds") ||
		!slices.Equal(got.Top, []string{"chip"}) || len(got.Layers) != 1 || got.Layers[0].Shapes != 3 || got.Caution != report.Caution {
		t.Errorf("the report says %s", text)
	}
	failed := 0
	for _, c := range got.Checks {
		if c.OK != (c.Faults == 0) {
			t.Errorf("check %s: ok is %v with %d faults", c.Check, c.OK, c.Faults)
		}
		if c.OK {
			continue
		}
		failed++
		// Boxes are database units: the squares from 0 and from 40 on.
		if c.Check != "same_mask" || c.Layer != "metal1" || len(c.Places) != 1 || c.Places[0].Top != "chip" ||
			!slices.Equal(c.Places[0].Box, []float64{0, 0, 20, 20}) || !slices.Equal(c.Places[0].Other, []float64{40, 0, 60, 20}) ||
			c.Places[0].What != "20 nm apart on mask A; 36 nm is needed" {
			t.Errorf("check %+v", c)
		}
	}
	if failed != 1 {
		t.Errorf("%d checks do not hold, want 1", failed)
	}
	if status, _, errw := b.run(nil, "@out.gds", "--deck", "@deck.toml", "--report", "@r.json"); status != 2 || !strings.Contains(errw, "--force") {
		t.Errorf("a report that exists: status %d, %s", status, errw)
	}
	if again, err := os.ReadFile(b.path("r.json")); err != nil || !bytes.Equal(again, text) {
		t.Errorf("a report that exists was touched (%v)", err)
	}
	if status, out, _ := b.run(nil, "@out.gds", "--deck", "@deck.toml", "--report", "-", "--quiet"); status != 0 || !json.Valid([]byte(out)) {
		t.Errorf("a report on standard output: status %d, %s", status, out)
	}
}

// Each check has one line, aligned; faults stand below it with top and place, and only the first few.
func TestVerifySummary(t *testing.T) {
	b := newVerifyBench(t)
	a := gds.LayerType{Layer: 19, Type: 1}
	b.write("bad.gds", row(t, a, a, a, a, a, a))
	status, _, errw := b.run(nil, "@bad.gds", "--deck", "@deck.toml")
	if status != 1 {
		t.Errorf("status %d", status)
	}
	const want = `  metal1  each shape on one mask, or stitched     ok
  metal1  nothing left on the drawn layer         ok
  metal1  stitches by the rules                   ok
  metal1  same-mask spacing 36 nm                 5 faults
      (0, 0) to (20, 20) nm and (40, 0) to (60, 20) nm in chip: 20 nm apart on mask A; 36 nm is needed
      (40, 0) to (60, 20) nm and (80, 0) to (100, 20) nm in chip: 20 nm apart on mask A; 36 nm is needed
      (80, 0) to (100, 20) nm and (120, 0) to (140, 20) nm in chip: 20 nm apart on mask A; 36 nm is needed
      and 2 more
  metal1  anchors, ties, markers and labels held  ok
  metal1: 6 shapes, 6 figures on A, 0 on B
  not compared with what was drawn; --drawn does that
@bad.gds: does not hold, 5 faults.
`
	if got := strings.ReplaceAll(errw, b.path("bad.gds"), "@bad.gds"); got != want+report.Caution+"\n" {
		t.Errorf("the summary is\n%swant\n%s", got, want+report.Caution)
	}
}
