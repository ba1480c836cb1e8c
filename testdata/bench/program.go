package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"maskpair/testdata/layouts"
)

// This file runs the program and the commands that it is compared with. Memory and page faults are those that the system counted
// for the process. Linux begins the peak of a new process with that of its parent, so this command itself stays small: layouts are
// drawn without being held, and of a report only the head is read.

// program is the program as built.
type program struct{ dir, path string }

// build builds it.
func build(dir string) (*program, error) {
	p := &program{dir: dir, path: filepath.Join(dir, "maskpair")}
	out, err := exec.Command("go", "build", "-o", p.path, "./cli/maskpair").CombinedOutput()
	if err != nil {
		return nil, fmt.Errorf("the program cannot be built: %v\n%s", err, out)
	}
	return p, nil
}

// usage is what the system counted for a process that has ended.
type usage struct {
	peak           int64 // bytes
	faults, majors int64 // page faults, and those that had to wait for the disk
}

// run is one run of the program.
type run struct {
	seconds float64
	cpu     float64 // seconds of all processors, least of the runs: what other work on the machine changes least
	usage
	account
}

// account is what the head of a report tells.
type account struct {
	stages   []stage
	estimate int64 // bytes that the program expected to need
	counts   reportCounts
}

type stage struct {
	Name    string
	Seconds float64
	Peak    int64 `json:"peak_bytes"` // by the end of the stage
}

// examine measures a subject.
func (p *program) examine(s subject, o *options) (finding, error) {
	f := finding{subject: s}
	out := filepath.Join(p.dir, "out.gds")
	defer os.Remove(out)
	var err error
	if f.sha256sum, err = best(o.runs, func() (float64, error) { return timed("sha256sum", s.in) }); err != nil {
		return f, err
	}
	twin := filepath.Join(p.dir, "copy.gds")
	defer os.Remove(twin)
	f.copying, err = best(o.runs, func() (float64, error) {
		a, err := timed("cp", s.in, twin)
		if err != nil {
			return 0, err
		}
		b, err := timed("sync", twin)
		return a + b, err
	})
	if err != nil {
		return f, err
	}
	os.Remove(twin)
	for _, k := range []struct {
		jobs int
		to   *run
	}{{1, &f.one}, {o.jobs, &f.many}} {
		if *k.to, err = p.fastest(o.runs, s, k.jobs, out); err != nil {
			return f, err
		}
	}
	if info, err := os.Stat(out); err == nil {
		f.output = info.Size()
	}
	if err := f.settle(); err != nil {
		return f, err
	}
	if o.again {
		later := filepath.Join(p.dir, "later.gds")
		defer os.Remove(later)
		if f.again, err = p.fastest(o.runs, s, o.jobs, later, "--baseline", out); err != nil {
			return f, err
		}
	}
	if o.slowpath != "" {
		f.slowpath, err = timed("/usr/bin/python3", o.slowpath, s.in, s.deck, filepath.Join(p.dir, "slow.gds"))
		os.Remove(filepath.Join(p.dir, "slow.gds"))
	}
	return f, err
}

// settle holds the counts of the program against those of the layout.
func (f *finding) settle() error {
	got := f.many.counts
	if got != f.one.counts {
		return fmt.Errorf("one worker counts %+v, several %+v", f.one.counts, got)
	}
	want := got
	if f.counts.Figures != layouts.Unknown {
		want.figures = f.counts.Figures
	}
	if f.counts.Shapes != layouts.Unknown {
		want.shapes, want.nearPairs = f.counts.Shapes, f.counts.NearPairs
	}
	if got != want {
		return fmt.Errorf("the program counts %+v, the layout has %+v", got, want)
	}
	f.counts.Figures = got.figures
	return nil
}

// fastest gives the fastest of some runs, with the least processor time of any.
func (p *program) fastest(runs int, s subject, jobs int, out string, more ...string) (run, error) {
	var fastest run
	least := math.Inf(1)
	for range runs {
		r, err := p.run(s, jobs, out, more...)
		if err != nil {
			return r, err
		}
		least = min(least, r.cpu)
		if fastest.seconds == 0 || r.seconds < fastest.seconds {
			fastest = r
		}
	}
	fastest.cpu = least
	return fastest, nil
}

// run runs the program once. Its status may be 1: something unresolved.
func (p *program) run(s subject, jobs int, out string, more ...string) (run, error) {
	report := filepath.Join(p.dir, "report.json")
	defer os.Remove(report)
	args := append([]string{"decompose", s.in, "--deck", s.deck, "--output", out, "--report", report, "--jobs", strconv.Itoa(jobs), "--quiet", "--force"}, more...)
	c := exec.Command(p.path, args...)
	var said bytes.Buffer
	c.Stderr = &said
	began := time.Now()
	err := c.Run()
	r := run{seconds: time.Since(began).Seconds()}
	var exit *exec.ExitError
	if err != nil && !(errors.As(err, &exit) && exit.ExitCode() == 1) {
		return r, fmt.Errorf("%v: %s", err, strings.TrimSpace(said.String()))
	}
	r.usage = usageOf(c.ProcessState)
	r.cpu = (c.ProcessState.UserTime() + c.ProcessState.SystemTime()).Seconds()
	f, err := os.Open(report)
	if err != nil {
		return r, err
	}
	defer f.Close()
	r.account, err = readHead(f)
	return r, err
}

// reportCounts are the counts of the first layer of a report.
type reportCounts struct{ figures, shapes, nearPairs int64 }

// readHead reads the stages and the first layer's counts of a report, and no further.
func readHead(r io.Reader) (a account, err error) {
	d := json.NewDecoder(r)
	var body struct {
		Stages   []stage
		Estimate int64 `json:"estimated_bytes"`
	}
	c := &a.counts
	var layer bool
	err = members(d, map[string]func() error{
		"run": func() error { return d.Decode(&body) },
		"layers": func() error {
			if _, err := d.Token(); err != nil || !d.More() {
				return errors.Join(err, errors.New("has no layer"))
			}
			layer = true
			return members(d, map[string]func() error{
				"figures":    func() error { return d.Decode(&c.figures) },
				"shapes":     func() error { return d.Decode(&c.shapes) },
				"near_pairs": func() error { return d.Decode(&c.nearPairs) },
			})
		},
	})
	if err == nil && !layer {
		err = errors.New("has no layer")
	}
	if err != nil {
		err = fmt.Errorf("the report: %w", err)
	}
	a.stages, a.estimate = body.Stages, body.Estimate
	return a, err
}

// members goes through the object that is next, calls for each wanted key what reads its value, and stops when all were seen
// or the object ends.
func members(d *json.Decoder, wanted map[string]func() error) error {
	if _, err := d.Token(); err != nil {
		return err
	}
	for seen := 0; seen < len(wanted) && d.More(); {
		key, err := d.Token()
		if err != nil {
			return err
		}
		name, _ := key.(string)
		read := wanted[name]
		if read == nil {
			read = func() error { return d.Decode(new(json.RawMessage)) }
		} else {
			seen++
		}
		if err := read(); err != nil {
			return err
		}
	}
	return nil
}

// timed runs a command and gives its seconds.
func timed(name string, args ...string) (float64, error) {
	began := time.Now()
	if out, err := exec.Command(name, args...).CombinedOutput(); err != nil {
		return 0, fmt.Errorf("%s: %v: %s", name, err, out)
	}
	return time.Since(began).Seconds(), nil
}

// best gives the smallest of some measurements.
func best(runs int, once func() (float64, error)) (float64, error) {
	var all []float64
	for range runs {
		v, err := once()
		if err != nil {
			return 0, err
		}
		all = append(all, v)
	}
	return slices.Min(all), nil
}
