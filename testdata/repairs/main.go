// Command repairs prints what stitches do on the open layouts: for each layout and spacing what two masks leave unresolved as drawn,
// what they leave when the least set of stitches is cut, how many kinds of components there are, and how long it took. The rules of
// the stitches are invented. Run it from the top folder of the project:
//
//	go run ./testdata/repairs
package main

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"time"

	"maskpair/cli"
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
		Proved               bool  `json:"proved_optimal"`
		Stitches             int64 `json:"stitches"`
		Unresolved           []struct {
			Group int64 `json:"group"`
		} `json:"unresolved"`
	} `json:"layers"`
	seconds float64
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
	fmt.Println("| layout | layer | spacing, nm | unresolved components | kinds | unresolved pairs | with stitches | stitches | s without, with |")
	fmt.Println("|---|---|---|---|---|---|---|---|---|")
	for _, r := range runs {
		before, err := r.decompose(dir, false)
		if err != nil {
			return err
		}
		after, err := r.decompose(dir, true)
		if err != nil {
			return err
		}
		l, m := before.Layers[0], after.Layers[0]
		kinds := map[int64]bool{}
		for _, u := range l.Unresolved {
			kinds[u.Group] = true
		}
		fmt.Printf("| %s | %d/0 | %g | %d | %d | %s | %s | %d | %.2f, %.2f |\n", r.layout, r.layer, r.spacing, l.UnresolvedComponents, len(kinds),
			bounded(l.UnresolvedPairs, l.LowerBound, l.Proved), bounded(m.UnresolvedPairs, m.LowerBound, m.Proved), m.Stitches, before.seconds, after.seconds)
	}
	return nil
}

// bounded words a number with its bound, where it is not proved.
func bounded(pairs, bound int64, proved bool) string {
	if proved {
		return fmt.Sprint(pairs)
	}
	return fmt.Sprintf("%d (at least %d)", pairs, bound)
}

func (r *run) decompose(dir string, apply bool) (*account, error) {
	deck := fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"%d/0\"\nmask_a = \"%d/1001\"\nmask_b = \"%d/1002\"\nsame_mask_spacing = %g\n[layer.stitch]\nmin_overlap = %g\nmin_piece = %g\napply = %v\n",
		r.layer, r.layer, r.layer, r.spacing, r.overlap, r.piece, apply)
	deckPath, reportPath := filepath.Join(dir, "deck.toml"), filepath.Join(dir, "report.json")
	if err := os.WriteFile(deckPath, []byte(deck), 0o644); err != nil {
		return nil, err
	}
	var said strings.Builder
	begun := time.Now()
	status := cli.Run(context.Background(), []string{"decompose", filepath.Join("testdata", "open", r.layout+".gds.gz"), "--deck", deckPath,
		"--output", filepath.Join(dir, "out.gds"), "--report", reportPath, "--force", "--quiet"}, strings.NewReader(""), &said, &said)
	if status > 1 {
		return nil, fmt.Errorf("%s at %g: status %d: %s", r.layout, r.spacing, status, said.String())
	}
	data, err := os.ReadFile(reportPath)
	if err != nil {
		return nil, err
	}
	a := &account{}
	if err := json.Unmarshal(data, a); err != nil {
		return nil, err
	}
	a.seconds = time.Since(begun).Seconds()
	return a, nil
}
