package cli_test

import (
	"bytes"
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"maskpair/cli"
	"maskpair/gds"
	"maskpair/testdata/twin"
)

// These tests run the whole program on layouts made at random, and hold output and report against the brute-force twin.

// folder is a place for the files of runs.
type folder struct {
	t   testing.TB
	dir string
}

func newFolder(t testing.TB) folder { return folder{t, t.TempDir()} }

// quickFolder is a folder in memory, where the system has such: thousands of runs would else wait for the disk each time
// that the program brings its output there.
func quickFolder(t testing.TB) folder {
	t.Helper()
	dir, err := os.MkdirTemp("/dev/shm", "maskpair-test-")
	if err != nil {
		return newFolder(t)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	return folder{t, dir}
}

func (f folder) path(name string) string { return filepath.Join(f.dir, name) }

func (f folder) write(name string, data []byte) {
	f.t.Helper()
	if err := os.WriteFile(f.path(name), data, 0o644); err != nil {
		f.t.Fatal(err)
	}
}

func (f folder) read(name string) []byte {
	f.t.Helper()
	data, err := os.ReadFile(f.path(name))
	if err != nil {
		f.t.Fatal(err)
	}
	return data
}

// names lists the folder.
func (f folder) names() string {
	f.t.Helper()
	entries, err := os.ReadDir(f.dir)
	if err != nil {
		f.t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	return strings.Join(names, " ")
}

// run runs the program; "@" before an argument stands for the folder. It gives the exit status and what was printed.
func (f folder) run(args ...string) (status int, said string) {
	return f.runContext(context.Background(), args...)
}

func (f folder) runContext(ctx context.Context, args ...string) (status int, said string) {
	f.t.Helper()
	placed := make([]string, len(args))
	for i, a := range args {
		placed[i] = a
		if rest, ok := strings.CutPrefix(a, "@"); ok {
			placed[i] = f.path(rest)
		}
	}
	var out, errw bytes.Buffer
	status = cli.Run(ctx, placed, strings.NewReader(""), &out, &errw)
	return status, out.String() + errw.String()
}

// judge runs the program on a layout and tells what is wrong with what it did.
func judge(f folder, l *twin.Layout, d *twin.Deck, jobs int) error {
	stream := l.Bytes()
	s, err := twin.Solve(stream, d)
	if err != nil {
		return fmt.Errorf("the twin: %v", err)
	}
	f.write("in.gds", stream)
	f.write("deck.toml", []byte(d.TOML(l.DBU)))
	status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--force", "--jobs", fmt.Sprint(jobs))
	defer os.Remove(f.path("out.gds"))
	defer os.Remove(f.path("report.json"))
	return judgeRun(f, s, stream, status, said)
}

// judgeRun judges what a run did to in.gds.
func judgeRun(f folder, s *twin.Solution, stream []byte, status int, said string) error {
	least := 0
	for _, l := range s.Layers {
		if l.Least > 0 && least != twin.Unknown {
			least += l.Least
		}
		if l.Least == twin.Unknown {
			least = twin.Unknown
		}
	}
	if strings.Contains(said, "a fault in the program itself") {
		return fmt.Errorf("it said: %s", said)
	}
	switch {
	case s.Open != "" && status >= 2:
		return nil
	case s.Status != 0:
		if status != s.Status {
			return fmt.Errorf("status %d, want %d: %s; it said: %s", status, s.Status, s.Why, said)
		}
		return nil
	case status > 1, s.Open == "" && least != twin.Unknown && (status == 1) != (least > 0):
		return fmt.Errorf("status %d with at least %d unresolved pairs; it said: %s", status, least, said)
	}
	out := f.read("out.gds")
	v, err := s.Check(out)
	if err != nil {
		return err
	}
	if err := s.Deck.Restores(stream, out); err != nil {
		return err
	}
	r, err := twin.ParseReport(f.read("report.json"))
	if err != nil {
		return fmt.Errorf("the report: %v", err)
	}
	if err := s.CheckReport(r, v); err != nil || s.Only != "" {
		return err // verify judges all tops
	}
	return verify(f, s, v)
}

// verify tells whether the command verify agrees about out.gds.
func verify(f folder, s *twin.Solution, v *twin.Verdict) error {
	want := 0
	for i, l := range s.Layers {
		if v.Unresolved[i] > 0 || l.AnyMask > 0 {
			want = 1
		}
	}
	status, said := f.run("verify", "@out.gds", "--deck", "@deck.toml", "--drawn", "@in.gds")
	if status > 1 || s.Open == "" && status != want {
		return fmt.Errorf("verify: status %d, want %d; it said: %s", status, want, said)
	}
	return nil
}

// TestAbsoluteTurns has placements whose magnification or angle is absolute below others that magnify or turn: what they place
// may stand upright again, or keep its size.
func TestAbsoluteTurns(t *testing.T) {
	place := func(cell string, at gds.Point, s gds.Strans) twin.Element {
		return twin.Element{Kind: twin.Reference, Text: cell, Points: []gds.Point{at}, Strans: s}
	}
	inner := []gds.Strans{{AbsoluteAngle: true}, {AbsoluteAngle: true, Angle: 90}, {AbsoluteMagnification: true}, {AbsoluteAngle: true, AbsoluteMagnification: true, Mirror: true}, {Magnification: 0.5}}
	outer := []gds.Strans{{Angle: 90}, {Mirror: true, Angle: 270}, {Magnification: 3}, {Magnification: 2, Angle: 180}, {Angle: 30}}
	f := newFolder(t)
	for _, in := range inner {
		for _, out := range outer {
			l := &twin.Layout{DBU: 1e-9, Cells: []twin.Cell{
				{Name: "leaf", Elements: []twin.Element{faultRect(0, 0, 30, 4)}},
				{Name: "middle", Elements: []twin.Element{place("leaf", gds.Point{X: 5, Y: 5}, in)}},
				{Name: "top", Elements: []twin.Element{place("middle", gds.Point{}, out), faultRect(-5, 20, 10, 24), faultRect(0, -20, 3, -10)}},
			}}
			d := twin.Deck{Layers: []twin.Layer{faultDeck.Layers[0]}}
			d.Layers[0].Spacing = 12
			if err := judge(f, l, &d, 1); err != nil {
				t.Errorf("%+v inside %+v: %v", in, out, err)
			}
		}
	}
}

// TestTwinTop takes one structure alone, a top or not.
func TestTwinTop(t *testing.T) {
	f := quickFolder(t)
	taken := 0
	for seed := range layouts(400) {
		r := rand.New(rand.NewPCG(seed, 8))
		l, d := twin.Random(r)
		only := l.Cells[r.IntN(len(l.Cells))].Name
		judgeOnly := func(l *twin.Layout) error {
			stream := l.Bytes()
			if whole, err := twin.Solve(stream, d); err != nil || whole.Status != 0 || whole.Open != "" {
				return nil // what the other tops have wrong may be refused or not
			}
			s, err := twin.SolveTop(stream, d, only)
			if err != nil {
				return nil // a smaller layout may have lost the structure
			}
			f.write("in.gds", stream)
			f.write("deck.toml", []byte(d.TOML(l.DBU)))
			status, said := f.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--force", "--top", only)
			defer os.Remove(f.path("out.gds"))
			defer os.Remove(f.path("report.json"))
			taken++
			return judgeRun(f, s, stream, status, said)
		}
		if err := judgeOnly(l); err != nil {
			l, first := twin.Shrink(l, err, judgeOnly)
			t.Fatalf("seed %d, --top %s: %v\nsmallest: %v\n%v\n%s", seed, only, err, first, l, d.TOML(l.DBU))
		}
	}
	if taken < 20 {
		t.Errorf("only %d layouts were judged", taken)
	}
}

// layoutsVariable is the environment variable that makes random tests longer: it multiplies their numbers of layouts.
const layoutsVariable = "MASKPAIR_TEST_LAYOUTS"

// layouts gives a number of layouts, fewer in a short run.
func layouts(n int) uint64 {
	if testing.Short() {
		n /= 10
	}
	if times, err := strconv.Atoi(os.Getenv(layoutsVariable)); err == nil {
		n *= times
	}
	return uint64(n)
}

// TestTwin compares whole runs with the twin.
func TestTwin(t *testing.T) {
	f := quickFolder(t)
	failures := 0
	for seed := range layouts(1200) {
		if failures == 5 {
			t.Fatal("and so on")
		}
		r := rand.New(rand.NewPCG(seed, 1))
		l, d := twin.Random(r)
		if err := judge(f, l, d, 1+int(seed%3)); err != nil {
			failures++
			l, first := twin.Shrink(l, err, func(l *twin.Layout) error { return judge(f, l, d, 1+int(seed%3)) })
			t.Errorf("seed %d: %v\nsmallest: %v\n%v\n%s", seed, err, first, l, d.TOML(l.DBU))
		}
	}
}
