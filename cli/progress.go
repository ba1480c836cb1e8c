package cli

import (
	"fmt"
	"io"
	"os"
	"slices"
	"sync"
	"time"

	"maskpair/cli/report"
)

// This file times the stages of a run and, on a terminal, says which one is going on.

// Clock notes the stages of a run. Its methods may be called from several goroutines; Stage begins a stage and ends the one
// before.
type Clock struct {
	mu     sync.Mutex
	screen io.Writer // nil: nothing is shown
	begun  time.Time // the run
	stage  time.Time // the stage
	name   string
	stages []report.Stage
	shown  time.Time // last time that the line was written
	line   bool      // there is a line to clear
}

const (
	quietTime  = 400 * time.Millisecond // a run that is shorter shows nothing
	redrawTime = 100 * time.Millisecond
)

// newClock starts the clock of a run. It shows the stages on w if that is a terminal.
func newClock(w io.Writer, quiet bool) *Clock {
	now := time.Now()
	c := &Clock{begun: now, stage: now}
	if f, ok := w.(*os.File); ok && !quiet {
		if info, err := f.Stat(); err == nil && info.Mode()&os.ModeCharDevice != 0 {
			c.screen = w
		}
	}
	return c
}

// Stage begins a stage; name says what is done: "reading".
func (c *Clock) Stage(name string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if name == c.name {
		return
	}
	c.end()
	c.name, c.stage = name, time.Now()
	c.draw("")
}

// Progress tells how much of the stage is done; of is the whole, 0 or less where that is not known.
func (c *Clock) Progress(done, of int64) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if of > 0 {
		c.draw(fmt.Sprintf(" %.0f %%", min(100, 100*float64(done)/float64(of))))
	}
}

// end notes the time of the stage that is going on; a stage may come again.
func (c *Clock) end() {
	if c.name == "" {
		return
	}
	seconds := time.Since(c.stage).Seconds()
	k := slices.IndexFunc(c.stages, func(s report.Stage) bool { return s.Name == c.name })
	if k < 0 {
		k = len(c.stages)
		c.stages = append(c.stages, report.Stage{Name: c.name})
	}
	c.stages[k].Seconds += seconds
	c.name = ""
}

// draw writes the line again, not too often.
func (c *Clock) draw(rest string) {
	now := time.Now()
	if c.screen == nil || now.Sub(c.begun) < quietTime || now.Sub(c.shown) < redrawTime {
		return
	}
	c.shown, c.line = now, true
	fmt.Fprintf(c.screen, "\r\x1b[K%s: %s%s", program, c.name, rest)
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
	return c.stages, time.Since(c.begun).Seconds()
}
