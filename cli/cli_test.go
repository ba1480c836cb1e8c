package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"testing"
	"time"

	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/gds"
)

// The tests of this package run the whole command line with a step in place of the layout work.

const testDeck = `unit = "nm"
[[layer]]
name = "metal1"
drawn = "19/0"
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
`

// bench is a folder with a layout and a deck, and what the program said.
type bench struct {
	t        *testing.T
	dir      string
	step     decomposeStep
	seen     *Options // what the step was given
	out, err bytes.Buffer
	stdout   io.Writer // nil: out
}

func newBench(t *testing.T) *bench {
	b := &bench{t: t, dir: t.TempDir()}
	b.write("in.gds", "drawn")
	b.write("deck.toml", testDeck)
	b.step = b.copies(0)
	return b
}

// path is not cleaned: a test may name a file in several ways.
func (b *bench) path(name string) string { return b.dir + "/" + name }

func (b *bench) write(name, text string) {
	b.t.Helper()
	if err := os.WriteFile(b.path(name), []byte(text), 0o644); err != nil {
		b.t.Fatal(err)
	}
}

func (b *bench) read(name string) string {
	b.t.Helper()
	text, err := os.ReadFile(b.path(name))
	if err != nil {
		b.t.Fatal(err)
	}
	return string(text)
}

// result is a report that leaves so many pairs unresolved.
func result(o *Options, unresolved int64) *report.Report {
	rules, err := o.Deck.Resolve(1e-9)
	if err != nil {
		panic(err)
	}
	return &report.Report{
		Rules:    rules,
		Result:   &decompose.Result{Layers: []decompose.LayerResult{{Name: "metal1", Spacing: 36, UnresolvedPairs: unresolved}}},
		Warnings: []string{"a BOX on 19/0"},
	}
}

// copies is a step that writes "masks" and leaves so many pairs.
func (b *bench) copies(unresolved int64) decomposeStep {
	return func(_ context.Context, o *Options, w *work) (*report.Report, error) {
		b.seen = o
		w.clock.Stage("reading")
		if w.out != nil {
			if _, err := io.WriteString(w.out, "masks"); err != nil {
				return nil, err
			}
		}
		return result(o, unresolved), nil
	}
}

// fails is a step that writes half of the output and fails.
func (b *bench) fails(err error) decomposeStep {
	return func(_ context.Context, _ *Options, w *work) (*report.Report, error) {
		if w.out != nil {
			io.WriteString(w.out, "mas")
		}
		return nil, err
	}
}

// run runs the program; "@" before an argument stands for the folder.
func (b *bench) run(args ...string) int { return b.runContext(context.Background(), args...) }

func (b *bench) runContext(ctx context.Context, args ...string) int {
	b.t.Helper()
	b.out.Reset()
	b.err.Reset()
	placed := make([]string, len(args))
	for i, a := range args {
		placed[i] = a
		if rest, ok := strings.CutPrefix(a, "@"); ok {
			placed[i] = b.path(rest)
		}
	}
	con := &console{in: strings.NewReader(""), out: &b.out, err: &b.err}
	if b.stdout != nil {
		con.out = b.stdout
	}
	return run(ctx, placed, con, steps{decompose: b.step})
}

// files lists the folder.
func (b *bench) files() string {
	b.t.Helper()
	entries, err := os.ReadDir(b.dir)
	if err != nil {
		b.t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	return strings.Join(names, " ")
}

// want checks the exit status, and for a failure that one line was printed that has all the words.
func (b *bench) want(status, got int, words ...string) {
	b.t.Helper()
	said := b.err.String()
	if got != status {
		b.t.Errorf("status %d, want %d; it said: %s", got, status, said)
	}
	if status >= 2 {
		if !strings.HasPrefix(said, "maskpair: ") || strings.Count(said, "\n") != 1 {
			b.t.Errorf("it said %q, want one line that begins with the program's name", said)
		}
	}
	for _, w := range words {
		if !strings.Contains(said, w) {
			b.t.Errorf("it said %q, want that to have %q", said, w)
		}
	}
}

func TestDecomposeWritesAll(t *testing.T) {
	b := newBench(t)
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@r.json"), "warning: a BOX on 19/0", "fits on two masks")
	if got := b.read("out.gds"); got != "masks" {
		t.Errorf("the output holds %q", got)
	}
	var r struct {
		Run struct {
			Jobs   int
			Stages []struct{ Name string }
		}
		Layers []struct{ Name string }
	}
	if err := json.Unmarshal([]byte(b.read("r.json")), &r); err != nil {
		t.Fatal(err)
	}
	if r.Run.Jobs < 1 || len(r.Run.Stages) != 1 || r.Run.Stages[0].Name != "reading" || len(r.Layers) != 1 || r.Layers[0].Name != "metal1" {
		t.Errorf("the report holds %+v", r)
	}
	if got := b.files(); got != "deck.toml in.gds out.gds r.json" {
		t.Errorf("the folder holds %s", got)
	}
	if b.out.Len() > 0 {
		t.Errorf("standard output got %q", b.out.String())
	}
}

func TestOutputHasTheUsualMode(t *testing.T) {
	b := newBench(t)
	plain, err := os.Create(b.path("plain"))
	if err != nil {
		t.Fatal(err)
	}
	plain.Close()
	mode := func(name string) os.FileMode {
		info, err := os.Stat(b.path(name))
		if err != nil {
			t.Fatal(err)
		}
		return info.Mode()
	}
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"))
	if got, want := mode("out.gds"), mode("plain"); got != want {
		t.Errorf("mode %v, want that of any new file, %v", got, want)
	}
	if err := os.Chmod(b.path("out.gds"), 0o640); err != nil {
		t.Fatal(err)
	}
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--force"))
	if got := mode("out.gds"); got != 0o640 {
		t.Errorf("mode %v, want that of the file that was replaced", got)
	}
}

func TestUnresolvedIsStatusOne(t *testing.T) {
	b := newBench(t)
	b.step = b.copies(3)
	b.want(1, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"), "Unresolved near pairs: metal1 3")
	if got := b.read("out.gds"); got != "masks" {
		t.Errorf("the output holds %q, want it written all the same", got)
	}
}

func TestWithoutOutput(t *testing.T) {
	b := newBench(t)
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml"))
	if got := b.files(); got != "deck.toml in.gds" {
		t.Errorf("the folder holds %s, want nothing new", got)
	}
}

func TestQuiet(t *testing.T) {
	b := newBench(t)
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--quiet"))
	if b.err.Len()+b.out.Len() > 0 {
		t.Errorf("it said %q and %q", b.err.String(), b.out.String())
	}
}

func TestArgumentOrder(t *testing.T) {
	for _, args := range [][]string{
		{"decompose", "@in.gds", "--deck", "@deck.toml", "--jobs", "3", "--quiet"},
		{"decompose", "--deck", "@deck.toml", "--quiet", "--jobs=3", "@in.gds"},
		{"decompose", "--quiet", "@in.gds", "--jobs", "3", "--deck", "@deck.toml"},
		{"decompose", "-quiet", "-jobs", "3", "-deck", "@deck.toml", "--", "@in.gds"},
	} {
		b := newBench(t)
		b.want(0, b.run(args...))
		if b.seen == nil || b.seen.Jobs != 3 || !b.seen.Quiet || b.seen.Input != b.path("in.gds") || b.seen.DeckPath != b.path("deck.toml") {
			t.Errorf("%v: the step was given %+v", args, b.seen)
		}
	}
}

func TestOptionsReachTheStep(t *testing.T) {
	b := newBench(t)
	b.write("anchors.toml", "[[anchor]]\nlayer = \"metal1\"\nmask = \"B\"\nat = [1, 2]\n")
	b.want(0, b.run("decompose", "-", "--deck", "@deck.toml", "--anchors", "@anchors.toml", "--baseline", "@early.gds", "--freeze", "both",
		"--top", "chip", "--memory", "4GiB", "--output", "-"))
	o := b.seen
	if o.Input != "-" || o.Output != "-" || o.Baseline != b.path("early.gds") || o.Freeze != FreezeA|FreezeB || o.Top != "chip" || o.Memory != 4<<30 || o.Jobs < 1 {
		t.Errorf("the step was given %+v", o)
	}
	rules, err := o.Deck.Resolve(1e-9)
	if err != nil {
		t.Fatal(err)
	}
	f, err := o.ParseAnchors(rules)
	if err != nil || len(f.Anchors) != 1 || f.Anchors[0].Mask != decompose.B || f.Name != b.path("anchors.toml") {
		t.Errorf("the anchor file came out as %+v, %v", f, err)
	}
	if b.out.String() != "masks" {
		t.Errorf("standard output got %q", b.out.String())
	}
}

func TestUsageErrors(t *testing.T) {
	deck := func(more ...string) []string {
		return append([]string{"decompose", "@in.gds", "--deck", "@deck.toml"}, more...)
	}
	for _, c := range []struct {
		args  []string
		words string
	}{
		{nil, "no command given"},
		{[]string{"decomposed"}, `"decomposed" is no command`},
		{[]string{"help", "decomposed"}, `"decomposed" is no command`},
		{[]string{"help", "nothing"}, "nothing"},
		{[]string{"--quiet", "decompose"}, "--quiet stands before the command"},
		{[]string{"decompose"}, "no layout given"},
		{[]string{"decompose", "@in.gds"}, "add --deck"},
		{[]string{"decompose", "", "--deck", "@deck.toml"}, "is empty"},
		{[]string{"decompose", "@in.gds", "@in.gds", "--deck", "@deck.toml"}, "one layout too many"},
		{[]string{"decompose", "@in.gds", "--deck", "@none.toml"}, "none.toml: no such file"},
		{[]string{"decompose", "@in.gds", "--deck", "@"}, "is a directory"},
		{[]string{"decompose", "@in.gds", "--deck", "@in.gds"}, "in.gds:1: "},
		{deck("--decks", "x"), "no option --decks"},
		{deck("--deck", "x"), "--deck is given twice"},
		{deck("--output"), "--output needs a value"},
		{deck("--output", "--quiet"), "--output needs a value"},
		{deck("--output", ""), "--output is empty"},
		{deck("--output="), "--output is empty"},
		{deck("--force=perhaps"), "perhaps"},
		{deck("--jobs", "0"), "--jobs 0"},
		{deck("--jobs", "-2"), "--jobs -2"},
		{deck("--jobs", "many"), "--jobs many"},
		{deck("--memory", "lots"), "--memory lots"},
		{deck("--freeze", "C", "--baseline", "@early.gds"), "--freeze C"},
		{deck("--freeze", "A"), "--freeze needs --baseline"},
		{deck("--baseline", "-"), "--baseline"},
		{deck("--anchors", "@none.toml"), "none.toml: no such file"},
		{deck("--output", "-", "--report", "-"), "standard output"},
		{deck("--output", "@x", "--report", "@x"), "is also"},
		{deck("--output", "@x", "--report", "@./x"), "is also"},
		{deck("--output", "@deck.toml", "--force"), "never overwritten"},
		{deck("--output", "@in.gds", "--force"), "never overwritten"},
		{deck("--report", "@in.gds", "--force"), "never overwritten"},
		{deck("--report", "@old", "--baseline", "@old", "--force"), "never overwritten"},
		{deck("--output", "@old"), "exists; give --force"},
		{deck("--report", "@old"), "exists; give --force"},
		{deck("--output", "@folder", "--force"), "is a folder"},
		{deck("--output", "@folder/"), "names a folder"},
		{deck("--output", "/dev/null", "--force"), "no regular file"},
		{[]string{"demo", "@a", "@b"}, "one folder too many"},
		{[]string{"demo", "@"}, "holds something already"},
		{[]string{"demo", "@in.gds"}, "new or empty"},
		{[]string{"demo", "--quiet", "@a"}, "no option --quiet"},
	} {
		t.Run(strings.Join(c.args, " "), func(t *testing.T) {
			b := newBench(t)
			b.write("old", "earlier")
			if err := os.Mkdir(b.path("folder"), 0o755); err != nil {
				t.Fatal(err)
			}
			before := b.files()
			b.want(2, b.run(c.args...), c.words)
			if b.seen != nil {
				t.Error("the layout was worked on")
			}
			if got := b.files(); got != before {
				t.Errorf("the folder holds %s, before it was %s", got, before)
			}
			if got := b.read("old") + b.read("in.gds") + b.read("deck.toml"); got != "earlierdrawn"+testDeck {
				t.Errorf("files were changed: %q", got)
			}
			if b.out.Len() > 0 {
				t.Errorf("standard output got %q", b.out.String())
			}
		})
	}
}

func TestDeckFaultNamesTheLine(t *testing.T) {
	b := newBench(t)
	b.write("deck.toml", strings.Replace(testDeck, "same_mask_spacing", "same_mask_spacings", 1))
	b.want(2, b.run("decompose", "@in.gds", "--deck", "@deck.toml"),
		"deck.toml:7: layer metal1: same_mask_spacings: unknown key; did you mean same_mask_spacing?")
}

func TestInputUnderAnotherName(t *testing.T) {
	b := newBench(t)
	if err := os.Symlink(b.path("in.gds"), b.path("soft.gds")); err != nil {
		t.Skip(err)
	}
	if err := os.Link(b.path("in.gds"), b.path("hard.gds")); err != nil {
		t.Skip(err)
	}
	for _, name := range []string{"@soft.gds", "@hard.gds"} {
		b.want(2, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", name, "--force"), "never overwritten")
		b.want(2, b.run("decompose", name, "--deck", "@deck.toml", "--output", "@in.gds", "--force"), "never overwritten")
	}
	if got := b.read("in.gds"); got != "drawn" {
		t.Errorf("the input holds %q", got)
	}
}

func TestForce(t *testing.T) {
	b := newBench(t)
	b.write("real.gds", "earlier")
	if err := os.Symlink("real.gds", b.path("out.gds")); err != nil {
		t.Skip(err)
	}
	if err := os.Symlink("nowhere", b.path("r.json")); err != nil {
		t.Skip(err)
	}
	b.want(2, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--report", "@r.json"), "exists")
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@r.json", "--force"))
	if got := b.read("real.gds"); got != "masks" {
		t.Errorf("behind the link is %q, want the output", got)
	}
	if info, err := os.Lstat(b.path("out.gds")); err != nil || info.Mode()&os.ModeSymlink == 0 {
		t.Errorf("the link is gone: %v, %v", info, err)
	}
	if !json.Valid([]byte(b.read("r.json"))) {
		t.Error("the report is no JSON")
	}
}

func TestBaselineMayBeReplaced(t *testing.T) {
	b := newBench(t)
	b.write("out.gds", "earlier")
	b.want(2, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--baseline", "@out.gds", "--output", "@out.gds"), "exists")
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--baseline", "@out.gds", "--output", "@out.gds", "--force"))
	if got := b.read("out.gds"); got != "masks" {
		t.Errorf("the output holds %q", got)
	}
}

func TestFailuresLeaveWhatWas(t *testing.T) {
	for _, c := range []struct {
		name   string
		err    error
		status int
	}{
		{"input", errors.New("in.gds: byte 12: record missing"), 3},
		{"stream", &gds.SyntaxError{Offset: 12, Err: io.ErrUnexpectedEOF}, 3},
		{"layout", &decompose.InputError{Structure: "top", Msg: "is placed in a loop"}, 3},
		{"memory", &decompose.LimitError{Msg: "too large", Remedy: "raise --memory"}, 3},
		{"deck", &decompose.DeckError{File: "deck.toml", Line: 7, Key: "x", Msg: "no whole number"}, 2},
		{"orders", &decompose.OrderError{Msg: "two anchors on one shape"}, 2},
		{"output", &writeError{"out.gds", errors.New("no space left on device")}, 4},
		{"spool", fmt.Errorf("in.gds: %w: no space left on device", gds.ErrSpool), 4},
		{"two lines", errors.New("one\ntwo"), 3},
	} {
		t.Run(c.name, func(t *testing.T) {
			for _, force := range []bool{false, true} {
				b := newBench(t)
				b.step = b.fails(c.err)
				args := []string{"decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@r.json"}
				if force {
					args = append(args, "--force")
					b.write("out.gds", "earlier")
				}
				before := b.files()
				b.want(c.status, b.run(args...), strings.Fields(c.err.Error())[0])
				if got := b.files(); got != before {
					t.Errorf("the folder holds %s, before it was %s", got, before)
				}
				if force && b.read("out.gds") != "earlier" {
					t.Error("the earlier output is gone")
				}
			}
		})
	}
}

func TestPanicIsOneLine(t *testing.T) {
	b := newBench(t)
	b.step = func(context.Context, *Options, *work) (*report.Report, error) { panic("index out of range") }
	b.want(3, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds"), "index out of range", "report it")
	if got := b.files(); got != "deck.toml in.gds" {
		t.Errorf("the folder holds %s", got)
	}
}

func TestFoldersThatCannotTakeTheOutput(t *testing.T) {
	b := newBench(t)
	b.want(4, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@none/out.gds"), "none does not exist; make it first")
	b.want(4, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@in.gds/out.gds"), "cannot be written")
	b.want(4, b.run("demo", "@none/demo"), "cannot be written")
	if b.seen != nil {
		t.Error("the layout was worked on before the place of the output was tried")
	}
	if os.Geteuid() == 0 {
		return // the super-user may write anywhere
	}
	if err := os.Mkdir(b.path("closed"), 0o555); err != nil {
		t.Fatal(err)
	}
	b.want(4, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@closed/out.gds"), "not writable")
}

// brokenPipe takes nothing.
type brokenPipe struct{}

func (brokenPipe) Write([]byte) (int, error) { return 0, errors.New("broken pipe") }

func TestStandardOutputThatFails(t *testing.T) {
	b := newBench(t)
	b.stdout = brokenPipe{}
	b.want(4, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "-", "--report", "@r.json"), "standard output: cannot be written: broken pipe")
	if got := b.files(); got != "deck.toml in.gds" {
		t.Errorf("the folder holds %s, want no report of what did not arrive", got)
	}
}

func TestStandardOutputComesWhole(t *testing.T) {
	b := newBench(t)
	b.step = b.fails(errors.New("cut off"))
	b.want(3, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "-"))
	if b.out.Len() > 0 {
		t.Errorf("standard output got %q of an output that failed", b.out.String())
	}
	b.step = b.copies(0)
	b.want(0, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--report", "-"))
	if !json.Valid(b.out.Bytes()) {
		t.Errorf("standard output got %q, want the report", b.out.String())
	}
}

func TestOutputThatComesUpMeanwhile(t *testing.T) {
	b := newBench(t)
	b.step = func(ctx context.Context, o *Options, w *work) (*report.Report, error) {
		b.write("out.gds", "of someone else")
		return b.copies(0)(ctx, o, w)
	}
	b.want(2, b.run("decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@r.json"), "meanwhile")
	if got := b.read("out.gds"); got != "of someone else" {
		t.Errorf("the file of someone else holds %q", got)
	}
	if got := b.files(); got != "deck.toml in.gds out.gds" {
		t.Errorf("the folder holds %s", got)
	}
}

func TestInterrupt(t *testing.T) {
	comesBack := func(ctx context.Context, o *Options, w *work) (*report.Report, error) {
		io.WriteString(w.out, "mas")
		<-ctx.Done()
		_, err := io.WriteString(w.out, "ks")
		return nil, err
	}
	block := make(chan struct{})
	defer close(block)
	hangs := func(_ context.Context, o *Options, w *work) (*report.Report, error) {
		io.WriteString(w.out, "mas")
		<-block // as a read from a pipe would
		return nil, nil
	}
	for name, step := range map[string]decomposeStep{"comes back": comesBack, "hangs": hangs} {
		t.Run(name, func(t *testing.T) {
			b := newBench(t)
			b.write("out.gds", "earlier")
			b.step = step
			ctx, cancel := context.WithCancel(context.Background())
			time.AfterFunc(20*time.Millisecond, cancel)
			b.want(4, b.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@r.json", "--force"), "interrupted")
			if got := b.files(); got != "deck.toml in.gds out.gds" || b.read("out.gds") != "earlier" {
				t.Errorf("the folder holds %s, the earlier output %q", got, b.read("out.gds"))
			}
		})
	}
}

// stuckPipe takes nothing and does not come back.
type stuckPipe struct{ until chan struct{} }

func (p stuckPipe) Write([]byte) (int, error) { <-p.until; return 0, errors.New("closed") }

func TestInterruptWhileStandardOutputHangs(t *testing.T) {
	b := newBench(t)
	spool := t.TempDir()
	t.Setenv("TMPDIR", spool)
	pipe := stuckPipe{make(chan struct{})}
	defer close(pipe.until)
	b.stdout = pipe
	ctx, cancel := context.WithCancel(context.Background())
	time.AfterFunc(20*time.Millisecond, cancel)
	b.want(4, b.runContext(ctx, "decompose", "@in.gds", "--deck", "@deck.toml", "--output", "-", "--report", "@r.json"), "interrupted")
	if got := b.files(); got != "deck.toml in.gds" {
		t.Errorf("the folder holds %s", got)
	}
	if left, err := os.ReadDir(spool); err != nil || len(left) > 0 {
		t.Errorf("the spool folder holds %v, %v", left, err)
	}
}

func TestHelpAndVersion(t *testing.T) {
	for _, c := range []struct {
		args  []string
		words []string
	}{
		{[]string{"--help"}, []string{"decompose", "demo", report.Caution}},
		{[]string{"decompose", "--help"}, []string{"--deck", "--freeze", "Example:", "Exit status:", report.Caution}},
		{[]string{"decompose", "@in.gds", "-h"}, []string{"--deck"}},
		{[]string{"help", "decompose"}, []string{"--deck"}},
		{[]string{"demo", "--help"}, []string{"DIR"}},
		{[]string{"--version"}, []string{"maskpair version "}},
	} {
		b := newBench(t)
		b.want(0, b.run(c.args...))
		for _, w := range c.words {
			if !strings.Contains(b.out.String(), w) {
				t.Errorf("%v: it said %q, want that to have %q", c.args, b.out.String(), w)
			}
		}
	}
}

func TestParseSize(t *testing.T) {
	for _, c := range []struct {
		text string
		want int64 // 0: refused
	}{
		{"4096", 4096}, {"1B", 1}, {"4GiB", 4294967296}, {"4G", 4294967296}, {"500MB", 500000000}, {"1.5KiB", 1536}, {"2 TB", 2000000000000},
		{"64K", 65536}, {"1kB", 1000}, {"3M", 3145728}, {"7MiB", 7340032},
		{"", 0}, {"GiB", 0}, {"-1", 0}, {"0", 0}, {"0.5", 0}, {"1e9", 0}, {"4 gigabytes", 0}, {"1.2.3", 0}, {"99999999TB", 0}, {"infB", 0}, {"0x10", 0},
	} {
		got, ok := parseSize(c.text)
		if ok != (c.want > 0) || ok && got != c.want {
			t.Errorf("%q is %d, %v; want %d", c.text, got, ok, c.want)
		}
	}
}
