package cli

import (
	"fmt"
	"io"
	"slices"
	"sync"
	"time"

	"maskpair/cli/report"
)

// This file times the stages of a run and, on a terminal, says which one is going on, how far it is, and how long it will take.

// Clock notes the stages of a run. Its methods may be called from several goroutines; Stage begins a stage and ends the one
// before.
type Clock struct {
	mu     sync.Mutex
	screen io.Writer // nil: nothing is shown
	now    func() time.Time
	begun  time.Time // the run
	stage  time.Time // the stage
	name   string
	stages []report.Stage
	memory func() int64 // most memory that the process had in use so far; nil: not known
	shown  time.Time    // last time that the line was written
	line   bool         // there is a line to clear
	head   string       // a line that stands above it; written once
}

const (
	quietTime  = 400 * time.Millisecond // a run that is shorter shows nothing
	redrawTime = 100 * time.Millisecond
	// Before so much of a stage is done, or so much time has gone, nobody can say how long it will take.
	leastShare = 0.02
	leastTime  = 800 * time.Millisecond
	// lineWidth is how long the line may be, so that it does not wrap on any usual terminal.
	lineWidth = 79
)

// newClock starts the clock of a run. It shows the stages on w if that is a terminal.
func newClock(w io.Writer, quiet bool) *Clock {
	c := &Clock{now: time.Now, memory: peakMemory}
	c.begun = c.now()
	c.stage = c.begun
	if !quiet && isTerminal(w) {
		c.screen = w
	}
	return c
}

// Head sets the line that stands above the stages of a run that is long enough to show them.
func (c *Clock) Head(line string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.head = program + ": " + line + "\n"
}

// Stage begins a stage; name says what is done: "read".
func (c *Clock) Stage(name string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if name == c.name {
		return
	}
	c.end()
	c.name, c.stage = name, c.now()
	c.draw("")
}

// Progress tells how many bytes of the stage are done; of is the whole, 0 or less where that is not known.
func (c *Clock) Progress(done, of int64) {
	c.tell(done, of, report.Bytes)
}

// Count tells how many things of the stage are done; of is the whole, 0 or less where that is not known.
func (c *Clock) Count(done, of int64, things string) {
	c.tell(done, of, func(n int64) string { return report.Count(n) + " " + things })
}

func (c *Clock) tell(done, of int64, word func(int64) string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.screen == nil {
		return
	}
	if of <= 0 {
		c.draw(" " + word(done))
		return
	}
	share := min(1, float64(done)/float64(of))
	c.draw(fmt.Sprintf(" %.0f %% of %s%s", 100*share, word(of), left(c.now().Sub(c.stage), share)))
}

// left words how long a stage will go on, if it goes on as it did.
func left(gone time.Duration, share float64) string {
	if share < leastShare || share >= 1 || gone < leastTime {
		return ""
	}
	rest := time.Duration(float64(gone) * (1 - share) / share)
	switch {
	case rest < time.Second:
		return ", a moment left"
	case rest < 100*time.Second:
		return fmt.Sprintf(", %d s left", (rest+time.Second-1)/time.Second)
	case rest < 100*time.Minute:
		return fmt.Sprintf(", %d min left", (rest+time.Minute-1)/time.Minute)
	}
	return fmt.Sprintf(", %d h left", (rest+time.Hour-1)/time.Hour)
}

// end notes the time of the stage that is going on; a stage may come again.
func (c *Clock) end() {
	if c.name == "" {
		return
	}
	s := c.find(c.name)
	s.Seconds += c.now().Sub(c.stage).Seconds()
	if c.memory != nil {
		s.Peak = c.memory()
	}
	c.name = ""
}

// find gives the notes of a stage, new ones where it has none.
func (c *Clock) find(name string) *report.Stage {
	k := slices.IndexFunc(c.stages, func(s report.Stage) bool { return s.Name == name })
	if k < 0 {
		k = len(c.stages)
		c.stages = append(c.stages, report.Stage{Name: name})
	}
	return &c.stages[k]
}

// Work notes how much of something a stage did; what is told of the same things adds up.
func (c *Clock) Work(stage, things string, n int64) {
	c.mu.Lock()
	defer c.mu.Unlock()
	s := c.find(stage)
	k := slices.IndexFunc(s.Work, func(w report.Work) bool { return w.Things == things })
	if k < 0 {
		k = len(s.Work)
		s.Work = append(s.Work, report.Work{Things: things})
	}
	s.Work[k].Count += n
}

// draw writes the line again, not too often.
func (c *Clock) draw(rest string) {
	if c.screen == nil {
		return
	}
	now := c.now()
	if now.Sub(c.begun) < quietTime || now.Sub(c.shown) < redrawTime {
		return
	}
	c.shown, c.line = now, true
	text := program + ": " + c.name + rest
	fmt.Fprintf(c.screen, "\r\x1b[K%s%s", c.head, text[:min(len(text), lineWidth)])
	c.head = ""
}

// stop ends the last stage and clears the line. It gives the stages and the seconds of the whole run.
func (c *Clock) stop() ([]report.Stage, float64) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.end()
	if c.line {
		fmt.Fprint(c.screen, "\r\x1b[K")
		c.line = false
	}
	c.screen = nil
	return c.stages, c.now().Sub(c.begun).Seconds()
}
