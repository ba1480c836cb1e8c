// Command repairs prints what stitches do on the open layouts: for each layout and spacing what two masks leave unresolved as drawn,
// what they leave when the least set of stitches is cut, how many kinds of components there are, and what that costs: user seconds without
// rules of stitches, and how many times that when stitches are only reported, and when they are cut. The rules of
// the stitches are invented. Run it from the top folder of the project:
//
//	go run ./testdata/repairs
package main

import (
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
)

// run is one row: a layout, a layer, spacings in nm.
type run struct {
	layout         string
	layer          int
	spacing        float64
	overlap, piece float64
}

// account is what is read of a report.
type account struct {
	Layers []struct {
		UnresolvedComponents int64 `json:"unresolved_components"`
		UnresolvedPairs      int64 `json:"unresolved_pairs"`
		LowerBound           int64 `json:"lower_bound"`
		Stitches             int64 `json:"stitches"`
		StitchesBound        int64 `json:"stitches_lower_bound"`
		Unresolved           []struct {
			Group int64 `json:"group"`
		} `json:"unresolved"`
	} `json:"layers"`
	seconds float64 // of the processor, in user mode
}

func main() {
	if err := table(); err != nil {
		fmt.Fprintln(os.Stderr, "repairs:", err)
		os.Exit(1)
	}
}

func table() error {
	runs := []run{
		{"asap7_cells_R", 19, 20, 5, 10}, {"asap7_cells_R", 19, 25, 5, 10}, {"asap7_cells_R", 19, 30, 5, 10}, {"asap7_cells_R", 19, 36, 5, 10},
		{"asap7_cells_R", 17, 40, 5, 10}, {"asap7_cells_R", 17, 60, 5, 10}, {"asap7_cells_R", 18, 40, 5, 10},
		{"ihp_stdcell", 6, 280, 40, 100}, {"ihp_stdcell", 8, 200, 40, 100}, {"ihp_stdcell", 8, 240, 40, 100},
		{"asap7_srambank_32b", 18, 54, 5, 10}, {"asap7_srambank_32b", 19, 36, 5, 10},
		{"asap7_srambank_128b", 18, 54, 5, 10}, {"asap7_srambank_128b", 19, 36, 5, 10},
	}
	dir, err := os.MkdirTemp("", "repairs")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	if said, err := exec.Command("go", "build", "-o", filepath.Join(dir, "maskpair"), "./cli/maskpair").CombinedOutput(); err != nil {
		return fmt.Errorf("the program does not build: %v: %s", err, said)
	}
	fmt.Println("| layout | layer | spacing, nm | unresolved components | kinds | unresolved pairs | with stitches | stitches | user s | reported, times | applied, times |")
	fmt.Println("|---|---|---|---|---|---|---|---|---|---|---|")
	for _, r := range runs {
		before, err := r.decompose(dir, plain)
		if err != nil {
			return err
		}
		told, err := r.decompose(dir, reported)
		if err != nil {
			return err
		}
		after, err := r.decompose(dir, applied)
		if err != nil {
			return err
		}
		l, m := before.Layers[0], after.Layers[0]
		kinds := map[int64]bool{}
		for _, u := range l.Unresolved {
			kinds[u.Group] = true
		}
		fmt.Printf("| %s | %d/0 | %g | %d | %d | %s | %s | %s | %.2f | %.1f | %.1f |\n", r.layout, r.layer, r.spacing, l.UnresolvedComponents, len(kinds),
			bounded(l.UnresolvedPairs, l.LowerBound), bounded(m.UnresolvedPairs, m.LowerBound), bounded(m.Stitches, m.StitchesBound),
			before.seconds, told.seconds/before.seconds, after.seconds/before.seconds)
	}
	return nil
}

// bounded words a number with its bound, where it is not proved.
func bounded(n, bound int64) string {
	if n == bound {
		return fmt.Sprint(n)
	}
	return fmt.Sprintf("%d (at least %d)", n, bound)
}

// The three ways in which a layout is run.
const (
	plain    = ""      // no rules of stitches
	reported = "false" // apply = false
	applied  = "true"
)

// decompose runs the program on the layout with the given value of apply.
func (r *run) decompose(dir, apply string) (*account, error) {
	deck := fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"%d/0\"\nmask_a = \"%d/1001\"\nmask_b = \"%d/1002\"\nsame_mask_spacing = %g\n",
		r.layer, r.layer, r.layer, r.spacing)
	if apply != plain {
		deck += fmt.Sprintf("[layer.stitch]\nmin_overlap = %g\nmin_piece = %g\napply = %s\n", r.overlap, r.piece, apply)
	}
	deckPath, reportPath := filepath.Join(dir, "deck.toml"), filepath.Join(dir, "report.json")
	if err := os.WriteFile(deckPath, []byte(deck), 0o644); err != nil {
		return nil, err
	}
	program := exec.Command(filepath.Join(dir, "maskpair"), "decompose", filepath.Join("testdata", "open", r.layout+".gds.gz"), "--deck", deckPath,
		"--output", filepath.Join(dir, "out.gds"), "--report", reportPath, "--force", "--quiet")
	said, err := program.CombinedOutput()
	if program.ProcessState == nil || program.ProcessState.ExitCode() > 1 {
		return nil, fmt.Errorf("%s at %g: %v: %s", r.layout, r.spacing, err, said)
	}
	data, err := os.ReadFile(reportPath)
	if err != nil {
		return nil, err
	}
	a := &account{}
	if err := json.Unmarshal(data, a); err != nil {
		return nil, err
	}
	a.seconds = program.ProcessState.UserTime().Seconds()
	return a, nil
}
