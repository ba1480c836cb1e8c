package cli

import (
	"io"
	"slices"
	"sync"
	"time"

	"maskpair/cli/report"
)

// This file times the stages of a run, and passes on how far they are.

// Clock notes the stages of a run. Its methods may be called from several goroutines; Stage begins a stage and ends the one
// before.
type Clock struct {
	mu     sync.Mutex
	gauge  *gauge // nil: nothing is shown
	now    func() time.Time
	begun  time.Time // the run
	stage  time.Time // the stage
	name   string
	stages []report.Stage
	memory func() int64 // most memory that the process had in use so far; nil: not known
}

// newClock starts the clock of a run. It shows the stages on w if that is a terminal.
func newClock(w io.Writer, quiet bool) *Clock {
	c := &Clock{now: time.Now, memory: peakMemory}
	c.begun = c.now()
	c.stage = c.begun
	if !quiet && isTerminal(w) {
		c.gauge = &gauge{w: w, from: c.begun.Add(quietTime), pause: redrawTime}
	}
	return c
}

// Head sets the line that stands above the stages of a run that is long enough to show them.
func (c *Clock) Head(line string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.gauge != nil {
		c.gauge.head = program + ": " + line + "\n"
	}
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
	if c.gauge != nil {
		c.gauge.stage(name)
	}
}

// Progress tells how many bytes of the stage are done; of is the whole, 0 or less where that is not known.
func (c *Clock) Progress(done, of int64) {
	c.tell(done, of, "")
}

// Count tells how many things of the stage are done; of is the whole, 0 or less where that is not known.
func (c *Clock) Count(done, of int64, things string) {
	c.tell(done, of, things)
}

func (c *Clock) tell(done, of int64, things string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.gauge != nil {
		c.gauge.show(done, of, things)
	}
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

// stop ends the last stage and clears the line. It gives the stages and the seconds of the whole run.
func (c *Clock) stop() ([]report.Stage, float64) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.end()
	if c.gauge != nil {
		c.gauge.clear()
		c.gauge = nil
	}
	return c.stages, c.now().Sub(c.begun).Seconds()
}
