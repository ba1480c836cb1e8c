package cli_test

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"os"
	"strings"
	"testing"

	"maskpair/cli"
	"maskpair/testdata/orders"
	"maskpair/testdata/twin"
)

// These tests run the whole program on small layouts with orders, wishes and baselines, and hold it against all assignments.

// account is what the report says.
type account struct {
	Layers []struct {
		Shapes   int  `json:"shapes"`
		Pairs    int  `json:"unresolved_pairs"`
		Waived   int  `json:"waived_pairs"`
		Bound    int  `json:"lower_bound"`
		Proved   bool `json:"proved_optimal"`
		Anchored int  `json:"anchored_shapes"`
		Moved    int  `json:"moved_shapes"`
		Baseline int  `json:"baseline_shapes"`
		Wishes   int  `json:"wishes"`
		Kept     int  `json:"wishes_kept"`
		List     []struct {
			Why string `json:"why"`
		} `json:"moved"`
	} `json:"layers"`
}

// layout decomposes in.gds with anchors.toml and deck.toml and gives the output from standard output: nothing waits for a disk then.
func (f folder) layout(baseline []byte, more ...string) (status int, out []byte, said string) {
	f.t.Helper()
	args := []string{"decompose", f.path("in.gds"), "--deck", f.path("deck.toml"), "--anchors", f.path("anchors.toml"), "--output", "-"}
	if baseline != nil {
		f.write("base.gds", baseline)
		args = append(args, "--baseline", f.path("base.gds"))
	}
	for _, a := range more {
		if rest, ok := strings.CutPrefix(a, "@"); ok {
			a = f.path(rest)
		}
		args = append(args, a)
	}
	var stdout, stderr bytes.Buffer
	status = cli.Run(context.Background(), args, strings.NewReader(""), &stdout, &stderr)
	return status, stdout.Bytes(), stderr.String()
}

// ordered runs a layout with orders and tells what is wrong with what the program did. It gives the output, nil where there is none.
func ordered(f folder, stream []byte, entries []orders.Entry, baseline []byte, redo bool, jobs int) ([]byte, error) {
	want, err := orders.SolveSlow(stream, entries, baseline, redo)
	if err != nil {
		return nil, err
	}
	if want.Open != "" {
		return nil, nil
	}
	f.write("in.gds", stream)
	f.write("deck.toml", []byte(orders.SketchDeck(redo)))
	f.write("anchors.toml", []byte(orders.FileOf(entries)))
	args := []string{"--report", "@report.json", "--jobs", fmt.Sprint(jobs)}
	status, out, said := f.layout(baseline, args...)
	defer os.Remove(f.path("report.json"))
	if want.Status != 0 {
		if status != want.Status {
			return nil, fmt.Errorf("status %d, want %d: %s; it said: %s", status, want.Status, want.Why, said)
		}
		return nil, nil
	}
	pairs := 0
	for i := range want.Layers {
		pairs += want.Layers[i].Best[0]
	}
	if status > 1 || (status == 1) != (pairs > 0) {
		return nil, fmt.Errorf("status %d with %d unresolved pairs; it said: %s", status, pairs, said)
	}
	if err := want.Judge(out); err != nil {
		return nil, err
	}
	var got account
	if err := json.Unmarshal(f.read("report.json"), &got); err != nil {
		return nil, err
	}
	for i := range want.Layers {
		w, g := &want.Layers[i], &got.Layers[i]
		for _, c := range []struct {
			what      string
			got, want int
		}{
			{"shapes", g.Shapes, w.Shapes}, {"unresolved pairs", g.Pairs, w.Best[0]}, {"waived pairs", g.Waived, w.Best[1] - w.Best[0]},
			{"anchored shapes", g.Anchored, w.Anchored}, {"moved shapes", g.Moved, w.Best[2]}, {"moved shapes in the list", len(g.List), w.Best[2]},
			{"baseline shapes", g.Baseline, w.Baseline}, {"wishes", g.Wishes, w.Wishes}, {"wishes kept", g.Kept, w.Wishes - w.Best[3]},
			{"lower bound", g.Bound, w.Best[0]},
		} {
			if c.got != c.want {
				return nil, fmt.Errorf("layer %d: %s %d, want %d", i, c.what, c.got, c.want)
			}
		}
		if !g.Proved {
			return nil, fmt.Errorf("layer %d: not proved", i)
		}
		for _, m := range g.List {
			if m.Why == "" {
				return nil, fmt.Errorf("layer %d: a shape moved and nothing says why", i)
			}
		}
	}
	return out, nil
}

// again runs a layout once more and tells where the output is not the same bytes.
func again(f folder, what string, stream []byte, entries []orders.Entry, baseline, out []byte, redo bool) error {
	f.write("in.gds", stream)
	f.write("deck.toml", []byte(orders.SketchDeck(redo)))
	f.write("anchors.toml", []byte(orders.FileOf(entries)))
	status, got, said := f.layout(baseline)
	if status > 1 {
		return fmt.Errorf("%s: status %d; it said: %s", what, status, said)
	}
	if !bytes.Equal(got, out) {
		return fmt.Errorf("%s: other bytes than before", what)
	}
	return nil
}

// TestOrders compares runs with orders, wishes and baselines with all assignments, and looks for the same bytes where nothing changed.
func TestOrders(t *testing.T) {
	f := quickFolder(t)
	done, failures := 0, 0
	for seed := range layouts(1200) {
		if failures == 5 {
			t.Fatal("and so on")
		}
		r := rand.New(rand.NewPCG(seed, 11))
		s := orders.RandomSketch(r)
		redo := r.IntN(5) == 0
		jobs := 1 + r.IntN(2)
		fail := func(err error, entries []orders.Entry) {
			failures++
			t.Errorf("seed %d: %v\n%v\n%s", seed, err, s, orders.FileOf(entries))
		}
		entries, err := orders.RandomEntries(s.Bytes(), r.IntN(7), r)
		if err != nil {
			t.Fatal(err)
		}
		out, err := ordered(f, s.Bytes(), entries, nil, redo, jobs)
		if err != nil {
			fail(err, entries)
			continue
		}
		if out == nil {
			continue
		}
		done++
		if err := again(f, "its own output as baseline", s.Bytes(), entries, out, out, redo); err != nil {
			fail(err, entries)
			continue
		}
		if !redo {
			if err := again(f, "its output as input", out, entries, nil, out, redo); err != nil {
				fail(err, entries)
				continue
			}
		}
		s = s.Edit(r)
		if entries, err = orders.RandomEntries(s.Bytes(), r.IntN(5), r); err != nil {
			t.Fatal(err)
		}
		if _, err := ordered(f, s.Bytes(), entries, out, redo, jobs); err != nil {
			fail(fmt.Errorf("after an edit: %v", err), entries)
		}
	}
	if t.Logf("%d layouts", done); done < int(layouts(1200))/4 {
		t.Errorf("only %d layouts could be compared", done)
	}
}

// TestOrdersVerified gives orders to layouts of any kind (slants, paths, odd placements, half units) and lets verify look whether they are
// held; it has code of its own for what a place hits.
func TestOrdersVerified(t *testing.T) {
	f := quickFolder(t)
	done, failures := 0, 0
	for seed := range layouts(1000) {
		if failures == 5 {
			t.Fatal("and so on")
		}
		r := rand.New(rand.NewPCG(seed, 21))
		l, d := twin.Random(r)
		var layers []orders.Layer
		for _, k := range d.Layers {
			layers = append(layers, orders.Layer{Name: k.Name, Drawn: k.Drawn, Masks: k.Masks, Spacing: k.Spacing})
		}
		stream := l.Bytes()
		entries, err := orders.RandomEntriesFor(stream, layers, 1+r.IntN(5), r)
		if err != nil {
			continue // a stream that is to be refused
		}
		f.write("in.gds", stream)
		f.write("deck.toml", []byte(d.TOML(l.DBU)))
		f.write("anchors.toml", []byte(orders.FileFor(entries, layers, l.DBU)))
		status, out, said := f.layout(nil)
		if strings.Contains(said, "a fault in the program itself") {
			failures++
			t.Errorf("seed %d: %s\n%v\n%s", seed, said, l, orders.FileFor(entries, layers, l.DBU))
		}
		if status > 1 {
			continue
		}
		done++
		f.write("out.gds", out)
		if status, said := f.run("verify", "@out.gds", "--deck", "@deck.toml", "--drawn", "@in.gds", "--anchors", "@anchors.toml"); status > 1 || !held(said) {
			failures++
			t.Errorf("seed %d: verify says, with status %d: %s\n%v\n%s\n%s", seed, status, said, l, d.TOML(l.DBU), orders.FileFor(entries, layers, l.DBU))
		}
		if bytes.Contains([]byte(d.TOML(l.DBU)), []byte("[marks]")) || strings.Contains(d.TOML(l.DBU), "redo") || strings.Contains(d.TOML(l.DBU), "keep_drawn") {
			continue
		}
		if status, again, said := f.layout(out); status > 1 || !bytes.Equal(again, out) {
			failures++
			t.Errorf("seed %d: with its own output as baseline, status %d and other bytes: %s\n%v\n%s\n%s", seed, status, said, l, d.TOML(l.DBU), orders.FileFor(entries, layers, l.DBU))
		}
		f.write("in.gds", out)
		if status, again, said := f.layout(nil); status > 1 || !bytes.Equal(again, out) {
			failures++
			t.Errorf("seed %d: with its own output as input, status %d and other bytes: %s\n%v\n%s\n%s", seed, status, said, l, d.TOML(l.DBU), orders.FileFor(entries, layers, l.DBU))
		}
	}
	if t.Logf("%d layouts", done); done < int(layouts(1000))/5 {
		t.Errorf("only %d layouts had orders that can be kept", done)
	}
}

// held tells whether verify found the orders held, and nothing wrong with the rest but near pairs.
func held(said string) bool {
	for _, line := range strings.Split(said, "\n") {
		if strings.Contains(line, "anchors, ties, markers and labels held") && !strings.HasSuffix(strings.TrimSpace(line), "ok") {
			return false
		}
	}
	return strings.Contains(said, "anchors, ties, markers and labels held")
}
