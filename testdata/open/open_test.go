package open

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"maskpair/cli"
)

// readCases reads the table: file, layer, nm, and the five counts.
func readCases(t *testing.T) [][]string {
	t.Helper()
	text, err := os.ReadFile("cases.tsv")
	if err != nil {
		t.Fatal(err)
	}
	var cases [][]string
	for _, line := range strings.Split(string(text), "\n") {
		if line == "" || strings.HasPrefix(line, "#") {
			continue
		}
		fields := strings.Split(line, "\t")
		if len(fields) != 8 {
			t.Fatalf("%q has %d fields, want 8", line, len(fields))
		}
		cases = append(cases, fields)
	}
	return cases
}

// The program must count on open layouts what the checkers counted.
func TestOpenLayouts(t *testing.T) {
	cases := readCases(t)
	if len(cases) < 14 {
		t.Fatalf("%d cases, want 14 at least", len(cases))
	}
	for _, c := range cases {
		name := strings.Join(c[:3], " ")
		if testing.Short() && strings.Contains(name, "srambank") {
			continue
		}
		dir := t.TempDir()
		layer, _, _ := strings.Cut(c[1], "/")
		deck := fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"wire\"\ndrawn = \"%s\"\nmask_a = \"%s/101\"\nmask_b = \"%s/102\"\nsame_mask_spacing = %s\n", c[1], layer, layer, c[2])
		if err := os.WriteFile(filepath.Join(dir, "deck.toml"), []byte(deck), 0o666); err != nil {
			t.Fatal(err)
		}
		report := filepath.Join(dir, "report.json")
		var said strings.Builder
		status := cli.Run(context.Background(), []string{"decompose", c[0] + ".gds.gz", "--deck", filepath.Join(dir, "deck.toml"), "--report", report, "--quiet"},
			strings.NewReader(""), io.Discard, &said)
		text, err := os.ReadFile(report)
		if err != nil {
			t.Fatalf("%s: %v; it said %s", name, err, said.String())
		}
		var r struct {
			Layers []struct {
				Figures, Shapes, Components int
				NearPairs                   int `json:"near_pairs"`
				Unresolved                  int `json:"unresolved_components"`
			}
		}
		if err := json.Unmarshal(text, &r); err != nil {
			t.Fatal(err)
		}
		l := r.Layers[0]
		got := []int{l.Figures, l.Shapes, l.NearPairs, l.Components, l.Unresolved}
		for i, n := range got {
			if c[3+i] != strconv.Itoa(n) {
				t.Errorf("%s: figures, shapes, near pairs, components, unresolved components are %v, want %v", name, got, c[3:])
				break
			}
		}
		if want := min(1, l.Unresolved); status != want {
			t.Errorf("%s: status %d, want %d", name, status, want)
		}
	}
}
