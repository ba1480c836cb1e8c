package cli_test

import (
	"bytes"
	"context"
	"os"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"maskpair/gds"
)

// These tests interrupt the program, or change its input, at every step and at any time.

// countdown is a context that does something at the n-th time that it is asked for its state, and then, if it is to, ends.
type countdown struct {
	context.Context
	left atomic.Int64
	act  func()
}

func newCountdown(n int64, act func(cancel func())) *countdown {
	ctx, cancel := context.WithCancel(context.Background())
	c := &countdown{Context: ctx, act: func() { act(cancel) }}
	c.left.Store(n)
	return c
}

func (c *countdown) tick() {
	if c.left.Add(-1) == 0 {
		c.act()
	}
}

func (c *countdown) Err() error {
	c.tick()
	return c.Context.Err()
}

func (c *countdown) Done() <-chan struct{} {
	c.tick()
	return c.Context.Done()
}

// interruptBench is a folder with a layout that takes a while, an earlier output, and TMPDIR in it.
func interruptBench(t *testing.T) (f folder, args []string) {
	o := openLayouts()[1]
	f = newFolder(t)
	t.Setenv("TMPDIR", f.dir)
	f.write("in.gds", o.stream(t))
	f.write("deck.toml", []byte(o.deck().TOML(o.dbu*1e-9)))
	return f, []string{"decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--report", "@report.json", "--force", "--quiet"}
}

func TestInterruptAtEachStep(t *testing.T) {
	f, args := interruptBench(t)
	if status, said := f.run(args...); status != 1 {
		t.Fatalf("status %d, it said %s", status, said)
	}
	want := f.read("out.gds")
	interrupted, steps := 0, []int64{}
	for n := int64(1); ; n += 1 + n/8 {
		f.write("out.gds", []byte("earlier"))
		f.write("report.json", []byte("earlier"))
		ctx := newCountdown(n, func(cancel func()) { cancel() })
		begun := time.Now()
		status, said := f.runContext(ctx, args...)
		if took := time.Since(begun); status == 4 && took > patience {
			t.Errorf("step %d: it ended after %v", n, took)
		}
		if got := f.names(); got != "deck.toml in.gds out.gds report.json" {
			t.Fatalf("step %d: status %d, the folder holds %s", n, status, got)
		}
		switch out := f.read("out.gds"); {
		case status == 4 && strings.Contains(said, "interrupted"):
			if string(out) != "earlier" || string(f.read("report.json")) != "earlier" {
				t.Fatalf("step %d: interrupted, but the earlier output is gone", n)
			}
			interrupted++
		case status == 1:
			if !bytes.Equal(out, want) {
				t.Fatalf("step %d: another output than without an interrupt", n)
			}
		default:
			t.Fatalf("step %d: status %d, it said %s", n, status, said)
		}
		steps = append(steps, n)
		if ctx.left.Load() > 0 {
			break // the run was through before its time came
		}
	}
	t.Logf("interrupted at %d of the steps %v", interrupted, steps)
	if interrupted < 5 {
		t.Errorf("only %d runs were interrupted", interrupted)
	}
}

// TestInterruptAtAnyTime cancels after a while, wherever the run is then.
func TestInterruptAtAnyTime(t *testing.T) {
	f, args := interruptBench(t)
	begun := time.Now()
	if status, said := f.run(args...); status != 1 {
		t.Fatalf("status %d, it said %s", status, said)
	}
	whole := time.Since(begun)
	want := f.read("out.gds")
	const parts = 24
	for i := range parts {
		f.write("out.gds", []byte("earlier"))
		ctx, cancel := context.WithTimeout(context.Background(), whole*time.Duration(i)/parts)
		status, said := f.runContext(ctx, args...)
		cancel()
		out := f.read("out.gds")
		if status == 4 && string(out) != "earlier" || status == 1 && !bytes.Equal(out, want) || status != 1 && status != 4 {
			t.Errorf("after %d/%d of the time: status %d, %d bytes of output; it said %s", i, parts, status, len(out), said)
		}
		if got := f.names(); got != "deck.toml in.gds out.gds report.json" {
			t.Errorf("after %d/%d of the time: the folder holds %s", i, parts, got)
		}
	}
}

// TestInputChanges changes the input while it is worked on. The program must notice, or the change must have come too late
// to matter.
func TestInputChanges(t *testing.T) {
	o := openLayouts()[0]
	stream := o.stream(t)
	// A coordinate in the middle of the file: the last byte of the first XY record behind it.
	at := len(stream) / 2
	for !bytes.Equal(stream[at:at+4], []byte{0, 44, byte(gds.XY), byte(gds.Int4)}) {
		at++
	}
	at += 43
	stealthy := func(change func(f folder, data []byte)) func(f folder) {
		return func(f folder) {
			info, err := os.Stat(f.path("in.gds"))
			if err != nil {
				t.Error(err)
				return
			}
			change(f, bytes.Clone(stream))
			os.Chtimes(f.path("in.gds"), info.ModTime(), info.ModTime())
		}
	}
	overwrite := func(f folder, data []byte) {
		w, err := os.OpenFile(f.path("in.gds"), os.O_WRONLY, 0)
		if err != nil {
			t.Error(err)
			return
		}
		defer w.Close()
		w.WriteAt(data, 0)
	}
	for name, change := range map[string]func(f folder){
		"a byte is another": func(f folder) {
			data := bytes.Clone(stream)
			data[at] ^= 1
			overwrite(f, data)
		},
		"a byte is another and the time is the same": stealthy(func(f folder, data []byte) {
			data[at] ^= 1
			overwrite(f, data)
		}),
		"a byte of the head is another and the time is the same": stealthy(func(f folder, data []byte) {
			data[20] ^= 1
			overwrite(f, data)
		}),
		"cut off":                 func(f folder) { os.Truncate(f.path("in.gds"), int64(at)) },
		"cut off to nothing":      func(f folder) { os.Truncate(f.path("in.gds"), 0) },
		"replaced by another":     func(f folder) { os.Remove(f.path("in.gds")); f.write("in.gds", smallStreams()["array"]) },
		"longer than it was":      func(f folder) { f.write("in.gds", append(bytes.Clone(stream), make([]byte, 2048)...)) },
		"rewritten as it was":     stealthy(func(f folder, data []byte) { overwrite(f, data) }),
		"removed from its folder": func(f folder) { os.Remove(f.path("in.gds")) },
	} {
		t.Run(name, func(t *testing.T) {
			f := newFolder(t)
			t.Setenv("TMPDIR", f.dir)
			f.write("deck.toml", []byte(o.deck().TOML(o.dbu*1e-9)))
			f.write("in.gds", stream)
			args := []string{"decompose", "@in.gds", "--deck", "@deck.toml", "--output", "@out.gds", "--quiet"}
			if status, said := f.run(args...); status != 1 {
				t.Fatalf("status %d, it said %s", status, said)
			}
			want := f.read("out.gds")
			noticed, steps, stride := 0, 0, int64(3)
			if testing.Short() {
				stride = 1
			}
			for n := int64(1); ; n += 1 + n/stride {
				steps++
				f.write("in.gds", stream)
				os.Remove(f.path("out.gds"))
				ctx := newCountdown(n, func(func()) { change(f) })
				status, said := f.runContext(ctx, args...)
				switch {
				case ctx.left.Load() > 0 && status != 1:
					t.Fatalf("step %d, without a change: status %d, it said %s", n, status, said)
				case ctx.left.Load() > 0:
				case status == 3:
					noticed++
					if _, err := os.Stat(f.path("out.gds")); err == nil || strings.Count(said, "\n") != 1 || strings.Contains(said, "a fault in the program") {
						t.Fatalf("step %d: status 3, it said %s; there is an output: %v", n, said, err == nil)
					}
				case status == 1:
					if got := f.read("out.gds"); !bytes.Equal(got, want) {
						// Changed before it was read at all: then the output must be that of the changed file.
						now := f.read("in.gds")
						if err := o.deck().Restores(now, got); err != nil {
							t.Fatalf("step %d: done, with an output that is neither that of the input as it was nor as it is: %v", n, err)
						}
					}
				default:
					t.Fatalf("step %d: status %d, it said %s", n, status, said)
				}
				if ctx.left.Load() > 0 {
					break
				}
			}
			t.Logf("noticed at %d of %d steps", noticed, steps)
			// A file that is removed or replaced as a whole stays open as it was; one that is changed in place does not.
			if inPlace := strings.Contains(name, "byte") || strings.Contains(name, "cut") || strings.Contains(name, "longer"); inPlace && noticed < steps/2 {
				t.Error("hardly ever noticed")
			}
			os.Remove(f.path("in.gds"))
			os.Remove(f.path("out.gds"))
			if got := f.names(); got != "deck.toml" {
				t.Errorf("it left the files %s", got)
			}
		})
	}
}
