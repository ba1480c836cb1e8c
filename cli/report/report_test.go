package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose"
)

// sample is a report with something in every list.
func sample() *Report {
	box := decompose.Box{X1: -21, Y1: 0, X2: 40, Y2: 81} // half units
	pair := decompose.Pair{
		A: box, B: decompose.Box{X1: 60, Y1: 0, X2: 80, Y2: 80}, DistanceSq: 100.25,
		From: decompose.Spot{X: 40, Y: 1}, To: decompose.Spot{X: 60, Y: 1}, Widen: 26, Rule: "tip_to_tip", Spacing: 36,
		EdgeA: decompose.Edge{{X: 40, Y: 0}, {X: 40, Y: 81}}, EdgeB: decompose.Edge{{X: 60, Y: 0}, {X: 60, Y: 80}}, Top: "chip", Mask: decompose.B,
	}
	return &Report{
		Input: Input{Name: "chip.gds", SHA256: "ab12", Bytes: 4096, DBU: 1e-9, Tops: []string{"chip", "na\"me", "caf\xe9"}},
		Run:   Run{Version: "v1", Jobs: 2, Seconds: 1.5, Stages: []Stage{{"reading", 0.25, 1 << 20, []Work{{"bytes", 4096}, {"figures", 7}}}}, Peak: 3 << 20, Estimate: 2 << 20},
		Rules: &decompose.Rules{DBU: 1e-9, Unit: "nm", UnitDBU: 1},
		Result: &decompose.Result{
			Tops: []string{"chip"},
			Layers: []decompose.LayerResult{{
				Name: "metal1", Spacing: 36, Figures: 1234567, AlreadyMaskedFigures: 12, RoundedFigures: 3, Shapes: 1000, NearPairs: 999,
				Components: 500, UnresolvedComponents: 4, JointClashes: 1, UnresolvedPairs: 5, WaivedPairs: 1, AnyMaskPairs: 2, LowerBound: 4,
				AreaA: 600, AreaB: 400.5, Stitches: 7, StitchesBound: 6, AnchoredShapes: 8, MovedShapes: 9, BaselineShapes: 10, Wishes: 6, WishesKept: 5,
				Unresolved: []decompose.Unresolved{{
					Top: "chip", Component: 17, Shapes: 5, Cause: decompose.OddCycle,
					Cycle: []decompose.CycleShape{{Box: box, Mask: decompose.A}, {Box: box, Mask: decompose.B}, {Box: box, Mask: decompose.B}},
					Pairs: []decompose.Pair{pair}, Candidates: []decompose.StitchCandidate{{Box: box, Overlap: 10, Resolves: true}},
					LeastStitches: []int{0}, NotComputed: []string{"repair"}, LowerBound: 1, Proved: true, Group: 1, Cell: "knot", CellTransform: "turned by 90 degrees", CellPlace: decompose.Spot{X: 3, Y: -4},
				}, {
					Top: "chip", Component: 18, Cause: decompose.OrderClash, NoCandidate: "a shape under an order is never cut", Group: 2,
					Pairs: []decompose.Pair{pair, pair},
				}, {
					Top: "chip", Component: 19, Group: 1, Pairs: []decompose.Pair{pair},
				}, {
					Top: "chip", Component: 20, Group: 1, Pairs: []decompose.Pair{pair},
				}},
				Waived:  []decompose.WaivedPair{{Pair: pair, Name: "old", Reason: "measured"}},
				AnyMask: []decompose.Pair{pair},
				Moved:   []decompose.MovedShape{{Top: "chip", Box: box, Was: decompose.A, Now: decompose.B, Why: "a new neighbour"}},
			}, {
				Name: "metal2", Spacing: 40, ProvedOptimal: true, AimsProved: true,
			}},
		},
		Warnings: []string{"a BOX on 19/0"},
	}
}

// object is JSON read back.
type object map[string]any

func parse(t *testing.T, r *Report) object {
	t.Helper()
	var b bytes.Buffer
	if err := WriteJSON(&b, r); err != nil {
		t.Fatal(err)
	}
	var o object
	if err := json.Unmarshal(b.Bytes(), &o); err != nil {
		t.Fatalf("%v in\n%s", err, b.String())
	}
	return o
}

// The keys are typed from the page that promises them.
var (
	topKeys   = []string{"input", "run", "layers"}
	inputKeys = []string{"sha256", "bytes", "dbu_m", "top"}
	layerKeys = []string{"name", "same_mask_spacing_dbu", "figures", "already_masked_figures", "shapes", "near_pairs", "components",
		"unresolved_components", "joint_clashes", "unresolved_pairs", "waived_pairs", "any_mask_pairs", "lower_bound", "proved_optimal",
		"mask_area_dbu2", "stitches", "anchored_shapes", "moved_shapes", "baseline_shapes", "wishes", "wishes_kept", "unresolved", "waived"}
	areaKeys       = []string{"a", "b"}
	unresolvedKeys = []string{"top", "component", "cause", "cycle", "pairs", "stitch_candidates", "least_stitches", "group"}
	cycleKeys      = []string{"box", "mask"}
	pairKeys       = []string{"a", "b", "distance_sq_dbu2", "from", "to", "widen_dbu"}
	candidateKeys  = []string{"box", "overlap_dbu", "resolves"}
)

func TestJSONHasEveryKey(t *testing.T) {
	has := func(where string, v any, keys []string) {
		t.Helper()
		m, ok := v.(map[string]any)
		if !ok {
			t.Fatalf("%s is %v, want an object", where, v)
		}
		for _, k := range keys {
			if v, ok := m[k]; !ok || v == nil {
				t.Errorf("%s has no %q", where, k)
			}
		}
	}
	item := func(v any, key string) any { return v.(map[string]any)[key].([]any)[0] }
	o := parse(t, sample())
	has("the report", map[string]any(o), topKeys)
	has("input", o["input"], inputKeys)
	for i, layer := range o["layers"].([]any) {
		where := fmt.Sprintf("layer %d", i)
		has(where, layer, layerKeys)
		has(where+" area", layer.(map[string]any)["mask_area_dbu2"], areaKeys)
		for _, u := range layer.(map[string]any)["unresolved"].([]any) {
			has(where+" unresolved", u, unresolvedKeys)
		}
	}
	layer := o["layers"].([]any)[0]
	u := item(layer, "unresolved")
	has("cycle", item(u, "cycle"), cycleKeys)
	has("pair", item(u, "pairs"), pairKeys)
	has("candidate", item(u, "stitch_candidates"), candidateKeys)
	has("waived", item(layer, "waived"), pairKeys)
}

func TestJSONValues(t *testing.T) {
	o := parse(t, sample())
	if d := cmp.Diff(map[string]any{"sha256": "ab12", "bytes": 4096.0, "dbu_m": 1e-9, "top": []any{"chip", `na"me`, "café"}}, o["input"]); d != "" {
		t.Errorf("input differs (-want +got):\n%s", d)
	}
	layer := o["layers"].([]any)[0].(map[string]any)
	for key, want := range map[string]any{
		"name": "metal1", "same_mask_spacing_dbu": 36.0, "figures": 1234567.0, "already_masked_figures": 12.0, "shapes": 1000.0, "near_pairs": 999.0,
		"components": 500.0, "unresolved_components": 4.0, "joint_clashes": 1.0, "unresolved_pairs": 5.0, "waived_pairs": 1.0, "any_mask_pairs": 2.0,
		"lower_bound": 4.0, "proved_optimal": false, "mask_area_dbu2": map[string]any{"a": 600.0, "b": 400.5}, "stitches": 7.0, "stitches_lower_bound": 6.0, "aims_proved": false,
		"anchored_shapes": 8.0, "moved_shapes": 9.0, "baseline_shapes": 10.0, "wishes": 6.0, "wishes_kept": 5.0, "rounded_figures": 3.0,
	} {
		if d := cmp.Diff(want, layer[key]); d != "" {
			t.Errorf("%s differs (-want +got):\n%s", key, d)
		}
	}
	box := []any{-10.5, 0.0, 20.0, 40.5} // -21, 0, 40, 81 halves
	pair := map[string]any{"a": box, "b": []any{30.0, 0.0, 40.0, 40.0}, "distance_sq_dbu2": 100.25, "from": []any{20.0, 0.5}, "to": []any{30.0, 0.5},
		"widen_dbu": 26.0, "rule": "tip_to_tip", "spacing_dbu": 36.0, "edge_a": []any{20.0, 0.0, 20.0, 40.5}, "edge_b": []any{30.0, 0.0, 30.0, 40.0}, "mask": "B"}
	want := map[string]any{
		"top": "chip", "component": 17.0, "shapes": 5.0, "cause": "odd_cycle", "repair": []any{},
		"cycle": []any{map[string]any{"box": box, "mask": "A"}, map[string]any{"box": box, "mask": "B"}, map[string]any{"box": box, "mask": "B"}},
		"pairs": []any{pair}, "stitch_candidates": []any{map[string]any{"box": box, "overlap_dbu": 10.0, "resolves": true, "made": false}},
		"least_stitches": []any{0.0}, "no_candidate": "", "not_computed": []any{"repair"}, "lower_bound": 1.0, "proved_optimal": true, "group": 1.0,
		"cell": "knot", "cell_transform": "turned by 90 degrees", "cell_place": []any{1.5, -2.0},
	}
	if d := cmp.Diff(want, layer["unresolved"].([]any)[0]); d != "" {
		t.Errorf("the first unresolved component differs (-want +got):\n%s", d)
	}
	clash := layer["unresolved"].([]any)[1].(map[string]any)
	if clash["cause"] != "order_clash" || len(clash["least_stitches"].([]any)) != 0 || len(clash["cycle"].([]any)) != 0 {
		t.Errorf("the clash of orders came out as %v", clash)
	}
}

func TestJSONNumbers(t *testing.T) {
	for _, c := range []struct {
		value float64
		want  string
	}{
		{0, "0"}, {600, "600"}, {400.5, "400.5"}, {1e15, "1000000000000000"}, {-0.25, "-0.25"}, {1e-9, "1e-09"}, {1e-3, "0.001"},
	} {
		var b bytes.Buffer
		j := newJSONWriter(&b)
		j.number(c.value)
		if err := j.close(); err != nil || b.String() != c.want+"\n" {
			t.Errorf("%g is written %q (%v), want %q", c.value, b.String(), err, c.want)
		}
	}
	for _, c := range []struct {
		halves int64
		want   string
	}{{0, "0"}, {1, "0.5"}, {-1, "-0.5"}, {-2, "-1"}, {-3, "-1.5"}, {1 << 32, "2147483648"}, {1<<32 - 1, "2147483647.5"}} {
		var b bytes.Buffer
		j := newJSONWriter(&b)
		j.half(c.halves)
		if err := j.close(); err != nil || b.String() != c.want+"\n" {
			t.Errorf("%d halves are written %q (%v), want %q", c.halves, b.String(), err, c.want)
		}
	}
}

func TestJSONWithoutRunIsStable(t *testing.T) {
	a, b := sample(), sample()
	b.Run = Run{Version: "v2", Jobs: 9, Seconds: 7, Peak: 1}
	x, y := parse(t, a), parse(t, b)
	delete(x, "run")
	delete(y, "run")
	if d := cmp.Diff(x, y); d != "" {
		t.Errorf("two runs differ outside of run:\n%s", d)
	}
}

// full takes so many bytes and then fails.
type full struct{ left int }

var errFull = errors.New("full")

func (f *full) Write(p []byte) (int, error) {
	if f.left -= len(p); f.left < 0 {
		return 0, errFull
	}
	return len(p), nil
}

func TestJSONReportsAFullDisk(t *testing.T) {
	r := sample()
	r.Result.Layers[0].Unresolved = make([]decompose.Unresolved, 2000) // more than one buffer
	for _, left := range []int{0, 1 << 17} {
		if err := WriteJSON(&full{left}, r); !errors.Is(err, errFull) {
			t.Errorf("with %d bytes left: %v, want that the disk is full", left, err)
		}
	}
}

func summarise(t *testing.T, r *Report) string {
	t.Helper()
	var b bytes.Buffer
	if err := WriteSummary(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// rowOf gives the words of the table's row with a label.
func rowOf(t *testing.T, text, label string) []string {
	t.Helper()
	for line := range strings.Lines(text) {
		if rest, ok := strings.CutPrefix(strings.TrimSpace(line), label+"  "); ok {
			return strings.Fields(rest)
		}
	}
	t.Errorf("no row %q in\n%s", label, text)
	return nil
}

func TestSummaryTable(t *testing.T) {
	text := summarise(t, sample())
	for label, want := range map[string][]string{
		"same-mask spacing":        {"36", "nm", "40", "nm"},
		"figures":                  {"1,234,567", "0"},
		"already on a mask":        {"12", "0"},
		"rounded to the grid":      {"3", "0"},
		"shapes":                   {"1,000", "0"},
		"near pairs":               {"999", "0"},
		"components":               {"500", "0"},
		"unresolved pairs":         {"5", "0"},
		"least possible":           {"not", "proved,", "at", "least", "4", "0"},
		"waived":                   {"1", "0"},
		"stitches":                 {"7", "0"},
		"fewest stitches":          {"not", "proved,", "at", "least", "6", "0"},
		"moved to the other mask":  {"9", "0"},
		"wishes kept":              {"5", "of", "6", "0"},
		"area on A":                {"0.0006", "um2", "0", "um2"}, // 600 nm2
		"area on B":                {"0.0004005", "um2", "0", "um2"},
		"imbalance":                {"19.9", "%", "none"}, // 199.5 of 1000.5
		"too near on any masks":    {"2", "0"},
		"that two masks cannot do": {"4", "0"},
	} {
		if got := rowOf(t, text, label); cmp.Diff(want, got) != "" {
			t.Errorf("row %q is %q, want %q", label, got, want)
		}
	}
}

func TestSummaryGroupsWorstFirst(t *testing.T) {
	text := summarise(t, sample())
	for _, want := range []string{
		"chip.gds does not fit on two masks as drawn. Unresolved near pairs: metal1 5.",
		"3 times: an odd cycle of 3 shapes, 1 pair left on one mask",
		"at (1.5, -2) nm in cell knot",
		"the pair: from (20, 0.5) to (30, 0.5) nm in top chip, on mask B; widen the gap by 26 nm",
		"1 stitch would do, over (-10.5, 0) to (20, 40.5) nm",
		"once: orders that clash over 0 shapes, 2 pairs left on one mask",
		"no stitch: a shape under an order is never cut",
		"1.50 s, 3 MiB of memory at most, 2 workers",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("the summary has no %q:\n%s", want, text)
		}
	}
	if three, two := strings.Index(text, "3 times:"), strings.Index(text, "once:"); three > two {
		t.Errorf("the group with three pairs comes behind the one with two:\n%s", text)
	}
}

func TestSummaryIsShort(t *testing.T) {
	r := sample()
	list := make([]decompose.Unresolved, 5000)
	for i := range list {
		list[i] = decompose.Unresolved{Top: "chip", Group: int64(i / 2)}
	}
	r.Result.Layers[0].Unresolved = list
	text := summarise(t, r)
	if n := strings.Count(text, "\n"); n > 80 {
		t.Errorf("the summary has %d lines", n)
	}
	if want := "2,492 more kinds"; !strings.Contains(text, want) { // 2500 less the eight shown
		t.Errorf("the summary has no %q:\n%s", want, text)
	}
}

func TestSummaryOfSuccess(t *testing.T) {
	r := sample()
	r.Result.Layers = r.Result.Layers[1:]
	r.Input.Name = "-"
	text := summarise(t, r)
	if !strings.HasPrefix(text, "The layout fits on two masks: nothing is unresolved.\n") {
		t.Errorf("the summary begins otherwise:\n%s", text)
	}
	for _, absent := range []string{"stitches", "waived", "wishes", "moved", "least possible"} {
		if strings.Contains(text, absent) {
			t.Errorf("the summary speaks of %q, of which there are none:\n%s", absent, text)
		}
	}
}

func TestAmounts(t *testing.T) {
	for n, want := range map[int64]string{0: "0", 7: "7", 999: "999", 1000: "1,000", 12345: "12,345", 1234567: "1,234,567", math.MaxInt64: "9,223,372,036,854,775,807"} {
		if got := Count(n); got != want {
			t.Errorf("number %d is %q, want %q", n, got, want)
		}
	}
	for n, want := range map[int64]string{5: "5 B", 2048: "2 KiB", 3 << 20: "3 MiB", 3 << 29: "1.50 GiB"} {
		if got := Bytes(n); got != want {
			t.Errorf("%d bytes are %q, want %q", n, got, want)
		}
	}
}

func BenchmarkWriteJSON(b *testing.B) {
	r := sample()
	u := r.Result.Layers[0].Unresolved[0]
	for range 10000 {
		r.Result.Layers[0].Unresolved = append(r.Result.Layers[0].Unresolved, u)
	}
	var size countingWriter
	if err := WriteJSON(&size, r); err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(size))
	b.ReportAllocs()
	for b.Loop() {
		var w countingWriter
		if err := WriteJSON(&w, r); err != nil {
			b.Fatal(err)
		}
	}
}

type countingWriter int64

func (c *countingWriter) Write(p []byte) (int, error) {
	*c += countingWriter(len(p))
	return len(p), nil
}
