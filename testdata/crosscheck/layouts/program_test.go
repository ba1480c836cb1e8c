package layouts

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// This file runs the program.

// layer is what the checks read of a report.
type layer struct {
	Spacing    int64                  `json:"same_mask_spacing_dbu"`
	Figures    int                    `json:"figures"`
	Shapes     int                    `json:"shapes"`
	NearPairs  int                    `json:"near_pairs"`
	Components int                    `json:"components"`
	Odd        int                    `json:"unresolved_components"`
	Unresolved int                    `json:"unresolved_pairs"`
	LowerBound int                    `json:"lower_bound"`
	Proved     bool                   `json:"proved_optimal"`
	Rounded    int                    `json:"rounded_figures"`
	MaskArea   struct{ A, B float64 } `json:"mask_area_dbu2"`
}

// The masks are on layers of their own, above all that the layouts use.
const maskA, maskB = 101, 102

// decompose runs the program on one deck layer, and gives its report and the path of its output.
func decompose(t testing.TB, program, input string, drawn [][2]int, spacing float64, unit string) (layer, string) {
	t.Helper()
	dir := t.TempDir()
	deck, output, report := filepath.Join(dir, "deck.toml"), filepath.Join(dir, "out.gds"), filepath.Join(dir, "report.json")
	var list []string
	for _, d := range drawn {
		list = append(list, fmt.Sprintf("\"%d/%d\"", d[0], d[1]))
	}
	text := fmt.Sprintf("unit = %q\n[[layer]]\nname = \"drawn\"\ndrawn = [%s]\nmask_a = \"%d/%d\"\nmask_b = \"%d/%d\"\nsame_mask_spacing = %g\n",
		unit, strings.Join(list, ", "), drawn[0][0], maskA, drawn[0][0], maskB, spacing)
	if err := os.WriteFile(deck, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command(program, "decompose", input, "--deck", deck, "--output", output, "--report", report, "--quiet").CombinedOutput()
	var exit *exec.ExitError
	if err != nil && (!errors.As(err, &exit) || exit.ExitCode() != 1) {
		t.Fatalf("%v\n%s", err, out)
	}
	data, err := os.ReadFile(report)
	if err != nil {
		t.Fatal(err)
	}
	var r struct{ Layers []layer }
	if err := json.Unmarshal(data, &r); err != nil || len(r.Layers) != 1 {
		t.Fatalf("report: %v\n%.500s", err, data)
	}
	if status := exit != nil; status != (r.Layers[0].Unresolved > 0) {
		t.Errorf("%d unresolved pairs, but exit status 1: %v", r.Layers[0].Unresolved, status)
	}
	return r.Layers[0], output
}
