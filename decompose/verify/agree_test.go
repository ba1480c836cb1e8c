package verify_test

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"maskpair/cli"
	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
	"maskpair/testdata/orders"
	"maskpair/testdata/twin"
)

// These tests hold the report of decompose and what package verify finds in its output against each other, count by count. The
// two share no code that matters; where they agree over thousands of layouts, a fault would have to be in both.

// told is what the report of decompose says of a layer, and verify can count.
type told struct {
	Name     string
	Shapes   int64 `json:"shapes"`
	Pairs    int64 `json:"unresolved_pairs"`
	Waived   int64 `json:"waived_pairs"`
	AnyMask  int64 `json:"any_mask_pairs"`
	Stitches int64 `json:"stitches"`
	Anchored int64 `json:"anchored_shapes"`
	Wishes   int64 `json:"wishes"`
	Kept     int64 `json:"wishes_kept"`
}

// layoutsVariable is the environment variable that makes random tests longer: it multiplies their numbers of layouts.
const layoutsVariable = "MASKPAIR_TEST_LAYOUTS"

// layouts gives a number of layouts, fewer in a short run.
func layouts(n int) int {
	if testing.Short() {
		n /= 10
	}
	if times, err := strconv.Atoi(os.Getenv(layoutsVariable)); err == nil {
		n *= times
	}
	return n
}

// bench runs the program in a folder, in memory where the system has such.
type bench struct {
	dir      string
	stitches int64 // in all outputs so far
}

func newBench(t *testing.T) *bench {
	dir, err := os.MkdirTemp("/dev/shm", "maskpair-test-")
	if err != nil {
		dir = t.TempDir()
	} else {
		t.Cleanup(func() { os.RemoveAll(dir) })
	}
	return &bench{dir: dir}
}

func (b *bench) path(name string) string { return filepath.Join(b.dir, name) }

// agree decomposes a layout, verifies the output and compares. skip is set where decompose refuses the layout.
func (b *bench) agree(deck, anchors string, drawn []byte) (skip bool, err error) {
	for name, text := range map[string][]byte{"in.gds": drawn, "deck.toml": []byte(deck), "anchors.toml": []byte(anchors)} {
		if err := os.WriteFile(b.path(name), text, 0o666); err != nil {
			return false, err
		}
	}
	args := []string{"decompose", b.path("in.gds"), "--deck", b.path("deck.toml"), "--output", "-", "--report", b.path("report.json"), "--force", "--quiet"}
	if anchors != "" {
		args = append(args, "--anchors", b.path("anchors.toml"))
	}
	var out, said bytes.Buffer
	status := cli.Run(context.Background(), args, strings.NewReader(""), &out, &said)
	switch {
	case strings.Contains(said.String(), "a fault in the program itself"):
		return false, fmt.Errorf("decompose: %s", said.String())
	case status > 1:
		return true, nil
	}
	text, err := os.ReadFile(b.path("report.json"))
	if err != nil {
		return false, err
	}
	var report struct{ Layers []told }
	if err := json.Unmarshal(text, &report); err != nil {
		return false, err
	}
	d, err := decompose.ParseDeck("deck.toml", []byte(deck))
	if err != nil {
		return false, err
	}
	in := verify.Input{Masked: verify.InMemory("out.gds", out.Bytes()), Drawn: verify.InMemory("in.gds", drawn), Deck: d}
	if anchors != "" {
		in.AnchorsName, in.Anchors = "anchors.toml", []byte(anchors)
	}
	res, err := verify.Verify(context.Background(), in)
	if err != nil {
		return false, err
	}
	for i := range res.Layers {
		l := &res.Layers[i]
		faults := func(k verify.Kind) int64 {
			if c := res.Check(k, l.Name); c != nil {
				return c.Faults
			}
			return 0
		}
		got := told{l.Name, l.Shapes, faults(verify.SameMask), l.Waived, faults(verify.AnyMask), l.Overlaps, l.Anchored, l.Wishes, l.WishesKept}
		b.stitches += l.Overlaps
		if want := report.Layers[i]; got != want {
			return false, fmt.Errorf("verify counts %+v, decompose %+v; %s", got, want, tell(res, nil))
		}
	}
	for _, c := range res.Checks {
		if c.Faults > 0 && c.Kind != verify.SameMask && c.Kind != verify.AnyMask {
			return false, fmt.Errorf("%s does not hold: %s", c.Kind, tell(res, nil))
		}
	}
	// Alone, the output must look the same.
	in.Drawn = nil
	alone, err := verify.Verify(context.Background(), in)
	if err != nil {
		return false, fmt.Errorf("without the drawn layout: %w", err)
	}
	for i := range alone.Layers {
		if p, q := alone.Check(verify.SameMask, alone.Layers[i].Name).Faults, res.Check(verify.SameMask, alone.Layers[i].Name).Faults; p != q {
			return false, fmt.Errorf("without the drawn layout %d pairs, with it %d", p, q)
		}
	}
	return false, nil
}

// agreeOver runs a number of layouts, and gives the number of stitches in all of them.
func agreeOver(t *testing.T, n int, make func(r *rand.Rand) (deck, anchors string, drawn []byte, err error)) (stitches int64) {
	b := newBench(t)
	done, failures := 0, 0
	for seed := range n {
		r := rand.New(rand.NewPCG(uint64(seed), 51))
		deck, anchors, drawn, err := make(r)
		if err != nil {
			t.Fatal(err)
		}
		skip, err := b.agree(deck, anchors, drawn)
		if err != nil {
			failures++
			t.Errorf("seed %d: %v\n%s%s", seed, err, deck, anchors)
			if l, err := twin.Read(drawn); err == nil {
				t.Logf("%v", l)
			}
			if failures == 3 {
				t.Fatal("and so on")
			}
		}
		if !skip {
			done++
		}
	}
	if done < n/3 {
		t.Errorf("only %d of %d layouts could be decomposed", done, n)
	}
	return b.stitches
}

// Hierarchies in every orientation, paths, any angles, several tops and layers.
func TestAgreeOnRandomLayouts(t *testing.T) {
	agreeOver(t, layouts(400), func(r *rand.Rand) (string, string, []byte, error) {
		l, d := twin.Random(r)
		return d.TOML(l.DBU), "", l.Bytes(), nil
	})
}

// With anchors, ties, wishes, waivers, markers, labels and figures that arrive on masks.
func TestAgreeOnOrders(t *testing.T) {
	agreeOver(t, layouts(500), func(r *rand.Rand) (string, string, []byte, error) {
		s := orders.RandomSketch(r)
		entries, err := orders.RandomEntries(s.Bytes(), r.IntN(7), r)
		return orders.SketchDeck(r.IntN(4) == 0), orders.FileOf(entries), s.Bytes(), err
	})
}

// With spacing by what faces what: every spacing at random about the plain one.
func TestAgreeOnFacing(t *testing.T) {
	agreeOver(t, layouts(400), func(r *rand.Rand) (string, string, []byte, error) {
		l, d := twin.Random(r)
		for i := range d.Layers {
			d.Layers[i].Spacing = max(d.Layers[i].Spacing, 4)
		}
		deck := d.TOML(l.DBU)
		unit := l.DBU * 1e9 // the deck is in nm
		if unit == 0 {
			unit = 1
		}
		length := func(dbu int64) string { return strconv.FormatFloat(float64(dbu)*unit, 'g', 12, 64) }
		var text strings.Builder
		for k, part := range strings.Split(deck, "[[layer]]") {
			if k > 0 {
				text.WriteString("[[layer]]")
				marks := strings.Index(part, "[marks]")
				if marks < 0 {
					marks = len(part)
				}
				s := int64(d.Layers[k-1].Spacing)
				about := func() string { return length(max(1, s/2+r.Int64N(s+1))) }
				text.WriteString(part[:marks])
				fmt.Fprintf(&text, "[layer.spacing]\nside_to_side = %s\ntip_to_side = %s\ntip_to_tip = %s\ncorner_to_corner = %s\ntip_width = %s\n",
					about(), about(), about(), about(), length(1+r.Int64N(12)))
				if r.IntN(2) == 0 {
					fmt.Fprintf(&text, "wide = [{ width = %s, spacing = %s }]\n", length(3+r.Int64N(12)), about())
				}
				text.WriteString(part[marks:])
				continue
			}
			text.WriteString(part)
		}
		return text.String(), "", l.Bytes(), nil
	})
}

// With stitches cut in the output.
func TestAgreeOnStitches(t *testing.T) {
	stitches := agreeOver(t, layouts(300), func(r *rand.Rand) (string, string, []byte, error) {
		deck := deckHead + "any_mask_spacing = 4\n[layer.stitch]\nmin_overlap = 10\nmin_piece = 16\napply = true\nkeep_out = [\"15/0\"]\n"
		return deck, "", wires(t, r), nil
	})
	if stitches < int64(layouts(300))/10 {
		t.Errorf("%d stitches: the layouts ask for too few", stitches)
	}
}

// wires draws wires of 20 with squares beside them, in cells that are placed a few times.
func wires(t *testing.T, r *rand.Rand) []byte {
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	at := func(x, y, width, height int32) {
		w.Rectangle(drawn19, rect(x, y, x+width, y+height))
	}
	cells := 1 + r.IntN(3)
	for i := range cells {
		w.BeginStructure(fmt.Sprintf("cell%d", i))
		for k := range int32(1 + r.IntN(3)) {
			if r.IntN(3) == 0 {
				w.Property(2, "wire")
			}
			if r.IntN(2) == 0 {
				// A ring of five: squares beside the ends of a wire, and two beyond that join them. A cut in the middle of the
				// wire opens it.
				at(0, 150*k, 180+10*r.Int32N(3), 20)
				for i, dy := range []int32{45, 75, 75, 45} {
					at(50*int32(i)+5*r.Int32N(2), 150*k+dy, 20, 20)
				}
				continue
			}
			if r.IntN(2) == 0 {
				at(10*r.Int32N(5), 150*k, 60+10*r.Int32N(20), 20)
			} else {
				at(150*k, 10*r.Int32N(5), 20, 60+10*r.Int32N(20))
			}
			for range r.IntN(5) {
				at(20*r.Int32N(14), 150*k+45+5*r.Int32N(3), 20+10*r.Int32N(3), 20)
			}
		}
		w.EndStructure()
	}
	w.BeginStructure("top")
	for range 1 + r.IntN(4) {
		w.SRef(fmt.Sprintf("cell%d", r.IntN(cells)), gds.Strans{Mirror: r.IntN(2) == 0, Angle: 90 * float64(r.IntN(4))},
			gds.Point{X: 300 * r.Int32N(4), Y: 300 * r.Int32N(4)})
	}
	if r.IntN(2) == 0 {
		w.Rectangle(gds.LayerType{Layer: 15}, rect(0, 0, 200, 200))
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}
