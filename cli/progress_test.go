package cli

import (
	"bytes"
	"os"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"maskpair/cli/report"
	"maskpair/decompose"
)

// handClock is a clock that goes when told, and writes into a buffer.
func handClock() (c *Clock, screen *bytes.Buffer, wait func(time.Duration)) {
	at := time.Date(2020, 1, 1, 0, 0, 0, 0, time.UTC)
	screen = &bytes.Buffer{}
	c = &Clock{screen: screen, now: func() time.Time { return at }, begun: at, stage: at}
	return c, screen, func(d time.Duration) { at = at.Add(d) }
}

// last gives what the screen shows: what follows the last return to its left edge.
func last(screen *bytes.Buffer) string {
	text := screen.String()
	return strings.TrimPrefix(text[strings.LastIndexByte(text, '\r')+1:], "\x1b[K")
}

func TestClockShowsWhereItIs(t *testing.T) {
	c, screen, wait := handClock()
	c.Stage("read")
	wait(200 * time.Millisecond)
	c.Progress(1<<20, 4<<20)
	if screen.Len() > 0 {
		t.Errorf("after 0.2 s the screen has %q", screen)
	}
	wait(800 * time.Millisecond)
	c.Progress(1<<20, 4<<20)
	if got, want := last(screen), "maskpair: read 25 % of 4 MiB, 3 s left"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	before := screen.Len()
	wait(50 * time.Millisecond)
	c.Progress(2<<20, 4<<20)
	if screen.Len() != before {
		t.Error("the line is written again after 0.05 s")
	}
	wait(time.Second)
	c.Stage("pairs")
	wait(time.Second)
	c.Count(1000, 1000000, "figures") // a thousandth: too early to say
	if got, want := last(screen), "maskpair: pairs 0 % of 1,000,000 figures"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	wait(time.Second)
	c.Count(1234, 0, "figures")
	if got, want := last(screen), "maskpair: pairs 1,234 figures"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	wait(time.Second)
	c.Stage("read")
	wait(time.Second)
	peak := int64(5 << 20)
	c.memory = func() int64 { return peak }
	c.Work("pairs", "compared", 3)
	c.Work("read", "bytes", 10)
	c.Work("pairs", "near", 1)
	c.Work("pairs", "compared", 4)
	stages, seconds := c.stop()
	if last(screen) != "" {
		t.Errorf("at the end the screen shows %q", last(screen))
	}
	want := []report.Stage{{Name: "read", Seconds: 3.05, Peak: peak, Work: []report.Work{{Things: "bytes", Count: 10}}},
		{Name: "pairs", Seconds: 3, Work: []report.Work{{Things: "compared", Count: 7}, {Things: "near", Count: 1}}}}
	if diff := cmp.Diff(want, stages); diff != "" || seconds != 6.05 {
		t.Errorf("%g s: %s", seconds, diff)
	}
	c.Progress(1, 2) // behind the end nothing is written
	if last(screen) != "" {
		t.Errorf("behind the end the screen shows %q", last(screen))
	}
}

// What is decomposed stands once above the stages, and stays when the line below it is cleared.
func TestClockHead(t *testing.T) {
	c, screen, wait := handClock()
	d, err := decompose.ParseDeck("deck.toml", []byte(testDeck))
	if err != nil {
		t.Fatal(err)
	}
	c.Head("chip.gds: " + layersOf(d))
	c.Stage("read")
	for range 3 {
		wait(time.Second)
		c.Progress(0, 0)
	}
	c.stop()
	text := strings.NewReplacer("\r", "", "\x1b[K", "").Replace(screen.String())
	if want := "maskpair: chip.gds: metal1 (19/0)\nmaskpair: read"; !strings.HasPrefix(text, want) || strings.Count(text, "\n") != 1 {
		t.Errorf("the screen shows %q, want %q first", text, want)
	}
}

func TestClockLineDoesNotWrap(t *testing.T) {
	c, screen, wait := handClock()
	wait(time.Second)
	c.Stage(strings.Repeat("long ", 40))
	if n := len(last(screen)); n > 79 {
		t.Errorf("%d characters", n)
	}
}

func TestLeft(t *testing.T) {
	for _, c := range []struct {
		gone  time.Duration
		share float64
		want  string
	}{
		{time.Second, 0.01, ""}, {time.Second, 1, ""}, {100 * time.Millisecond, 0.5, ""}, {time.Second, 0.9, ", a moment left"},
		{10 * time.Second, 0.5, ", 10 s left"}, {time.Minute, 0.1, ", 9 min left"}, {time.Hour, 0.1, ", 9 h left"}, {10 * time.Second, 0.3, ", 24 s left"},
	} {
		if got := left(c.gone, c.share); got != c.want {
			t.Errorf("%v, %g: %q, want %q", c.gone, c.share, got, c.want)
		}
	}
}

// Nothing but a terminal is written to while work goes on.
func TestClockIsSilentElsewhere(t *testing.T) {
	f, err := os.CreateTemp(t.TempDir(), "")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for _, c := range []*Clock{newClock(f, false), newClock(&bytes.Buffer{}, false)} {
		if c.screen != nil {
			t.Error("a file or buffer is taken for a terminal")
		}
	}
}

func TestPaint(t *testing.T) {
	var b bytes.Buffer
	for _, c := range []struct {
		p    painter
		want string
	}{{false, "one\ntwo\nthree"}, {true, inkBad + "one" + inkOff + "\ntwo\nthree"}} {
		b.Reset()
		w := &firstLine{w: &b, ink: inkBad, p: c.p}
		for _, part := range []string{"one\ntw", "o\nthree"} {
			if n, err := w.Write([]byte(part)); n != len(part) || err != nil {
				t.Fatalf("%d, %v", n, err)
			}
		}
		if b.String() != c.want {
			t.Errorf("%q, want %q", b.String(), c.want)
		}
	}
	b.Reset()
	w := &firstLine{w: &b, ink: inkGood, p: true}
	w.Write([]byte("a"))
	w.Write([]byte("b\nc"))
	if plain := strings.NewReplacer(inkGood, "", inkOff, "").Replace(b.String()); plain != "ab\nc" {
		t.Errorf("without colours: %q", plain)
	}
}

func TestPaints(t *testing.T) {
	null, err := os.OpenFile(os.DevNull, os.O_WRONLY, 0) // a character device, as a terminal is
	if err != nil {
		t.Fatal(err)
	}
	defer null.Close()
	env := func(set map[string]string) func(string) string { return func(k string) string { return set[k] } }
	if !isTerminal(null) {
		t.Skip("this system's null device is no character device")
	}
	if !paints(null, env(nil)) {
		t.Error("a terminal is not coloured")
	}
	for _, set := range []map[string]string{{"NO_COLOR": "1"}, {"TERM": "dumb"}} {
		if paints(null, env(set)) {
			t.Errorf("coloured in spite of %v", set)
		}
	}
	if paints(&bytes.Buffer{}, env(nil)) {
		t.Error("what is no terminal is coloured")
	}
}
