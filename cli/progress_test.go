package cli

import (
	"bytes"
	"os"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"github.com/google/go-cmp/cmp"

	"maskpair/cli/report"
	"maskpair/decompose"
)

// handClock is a clock that goes when told.
func handClock() (c *Clock, wait func(time.Duration)) {
	at := time.Date(2020, 1, 1, 0, 0, 0, 0, time.UTC)
	c = &Clock{now: func() time.Time { return at }, begun: at, stage: at}
	return c, func(d time.Duration) { at = at.Add(d) }
}

// wordsOf gives what a screen was told to show, without the codes that move and clear.
func wordsOf(screen *bytes.Buffer) string {
	return strings.NewReplacer("\r", "\n", "\x1b[2K", "", "\x1b[K", "", "\x1b[0K", "").Replace(screen.String())
}

func TestClockNotesStages(t *testing.T) {
	c, wait := handClock()
	c.Stage("read")
	wait(2 * time.Second)
	c.Stage("pairs")
	wait(3 * time.Second)
	c.Stage("read")
	wait(1500 * time.Millisecond)
	peak := int64(5 << 20)
	c.memory = func() int64 { return peak }
	c.Work("pairs", "compared", 3)
	c.Work("read", "bytes", 10)
	c.Work("pairs", "near", 1)
	c.Work("pairs", "compared", 4)
	stages, seconds := c.stop()
	want := []report.Stage{{Name: "read", Seconds: 3.5, Peak: peak, Work: []report.Work{{Things: "bytes", Count: 10}}},
		{Name: "pairs", Seconds: 3, Work: []report.Work{{Things: "compared", Count: 7}, {Things: "near", Count: 1}}}}
	if diff := cmp.Diff(want, stages); diff != "" || seconds != 6.5 {
		t.Errorf("%g s: %s", seconds, diff)
	}
}

func TestClockShowsWhereItIs(t *testing.T) {
	screen := &bytes.Buffer{}
	c, _ := handClock()
	c.gauge = &gauge{w: screen}
	shows := func(want ...string) {
		t.Helper()
		got := wordsOf(screen)
		for _, w := range want {
			if !strings.Contains(got, w) {
				t.Errorf("the screen shows %q, want %q in it", got, w)
			}
		}
		screen.Reset()
	}
	c.Stage("read")
	shows("maskpair: read")
	c.Progress(1<<20, 4<<20)
	shows("maskpair: read", "25%", "1.0/4.0 MiB")
	c.Progress(3<<20, 4<<20)
	shows("75%")
	c.Stage("pairs")
	c.Count(500, 1000, "figures")
	shows("maskpair: pairs, figures", "50%", "500/1000")
	c.Count(1000, 1000, "figures")
	c.Count(200, 1000, "figures") // the next layer
	shows("20%")
	c.Count(1234, 0, "figures")
	shows("maskpair: pairs, figures", "1234")
	c.stop()
	if !strings.HasSuffix(screen.String(), "\x1b[2K\r") {
		t.Errorf("at the end the line is not cleared: %q", screen)
	}
	screen.Reset()
	c.Progress(1, 2)
	if screen.Len() > 0 {
		t.Errorf("behind the end the screen shows %q", screen)
	}
}

// A run that has just begun shows nothing.
func TestClockIsQuietAtFirst(t *testing.T) {
	screen := &bytes.Buffer{}
	c, _ := handClock()
	c.gauge = &gauge{w: screen, from: time.Now().Add(time.Hour), head: "head\n"}
	c.Stage("read")
	c.Progress(1, 2)
	c.stop()
	if screen.Len() > 0 {
		t.Errorf("the screen shows %q", screen)
	}
}

// What is decomposed stands once above the stages, and stays when the line below it is cleared.
func TestClockHead(t *testing.T) {
	screen := &bytes.Buffer{}
	c, _ := handClock()
	c.gauge = &gauge{w: screen}
	d, err := decompose.ParseDeck("deck.toml", []byte(testDeck))
	if err != nil {
		t.Fatal(err)
	}
	c.Head("chip.gds: " + layersOf(d))
	for _, stage := range []string{"read", "pairs", "solve"} {
		c.Stage(stage)
		c.Progress(0, 0)
	}
	c.stop()
	if text, want := screen.String(), "maskpair: chip.gds: metal1 (19/0)\n"; !strings.HasPrefix(text, want) || strings.Count(text, "\n") != 1 {
		t.Errorf("the screen shows %q, want %q first", text, want)
	}
}

func TestClockLineDoesNotWrap(t *testing.T) {
	screen := &bytes.Buffer{}
	c, _ := handClock()
	c.gauge = &gauge{w: screen}
	c.Stage(strings.Repeat("long ", 40))
	c.Progress(900<<20, 1000<<20)
	for line := range strings.Lines(wordsOf(screen)) {
		if n := utf8.RuneCountInString(strings.TrimSpace(line)); n > 79 {
			t.Errorf("%d characters: %q", n, line)
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
		if c.gauge != nil {
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
