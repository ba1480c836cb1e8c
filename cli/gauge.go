package cli

import (
	"io"
	"time"

	"github.com/schollz/progressbar/v3"
)

// This file shows on a terminal which stage is going on, how far it is, and how long it will take. The module progressbar draws.

const (
	quietTime  = 400 * time.Millisecond // a run that is shorter shows nothing
	redrawTime = 100 * time.Millisecond
	// A bar and the name of a stage are so wide at most, so that with counts and times the line does not wrap on any usual terminal.
	barWidth  = 10
	nameWidth = 12
)

// gauge is the line of the stage that is going on.
type gauge struct {
	w      io.Writer
	from   time.Time     // before, nothing is shown
	pause  time.Duration // between two drawings of a bar
	head   string        // a line that stands above the stages; written once
	name   string
	things string // that the bar counts; "": bytes
	of     int64  // the whole that the bar has, -1 where it is not known
	bar    *progressbar.ProgressBar
}

// stage begins a stage.
func (g *gauge) stage(name string) {
	g.clear()
	g.name = name
	if g.start(-1, "") {
		g.bar.RenderBlank()
	}
}

// show tells how much of the stage is done; of is 0 or less where the whole is not known.
func (g *gauge) show(done, of int64, things string) {
	if of <= 0 {
		of = -1
	}
	if g.bar == nil || g.of != of || g.things != things || g.bar.IsFinished() {
		g.clear()
		if !g.start(of, things) {
			return
		}
	}
	if of > 0 {
		done = min(done, of)
	}
	g.bar.Set64(done)
}

// start makes the bar; it is false where the run has not gone on for long enough.
func (g *gauge) start(of int64, things string) bool {
	if time.Now().Before(g.from) {
		return false
	}
	io.WriteString(g.w, g.head)
	g.head = ""
	g.of, g.things = of, things
	name := g.name[:min(len(g.name), nameWidth)]
	if things != "" {
		name += ", " + things
	}
	g.bar = progressbar.NewOptions64(of,
		progressbar.OptionSetWriter(g.w),
		progressbar.OptionSetDescription(program+": "+name),
		progressbar.OptionSetWidth(barWidth),
		progressbar.OptionThrottle(g.pause),
		progressbar.OptionSetPredictTime(true),
		progressbar.OptionShowCount(),
		progressbar.OptionShowBytes(things == "" && of > 0),
		progressbar.OptionUseIECUnits(true),
		progressbar.OptionSetSpinnerChangeInterval(0), // no drawing between two calls
		progressbar.OptionUseANSICodes(true),
		progressbar.OptionClearOnFinish(),
	)
	return true
}

// clear takes the bar off the screen.
func (g *gauge) clear() {
	if g.bar != nil {
		g.bar.Clear()
		g.bar = nil
	}
}
