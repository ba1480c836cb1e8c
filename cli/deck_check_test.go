package cli

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const deckOfRules = `unit = "nm"
[[layer]]
name = "metal1"
drawn = ["19/0", "19/20"]
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
any_mask_spacing = 18
same_shape = "report"
[layer.spacing]
tip_to_side = 40
tip_to_tip = 15
tip_width = 20
wide = [{ width = 100, spacing = 60 }]
[marks]
any_mask = "230/4"
`

func TestDeckCheck(t *testing.T) {
	path := filepath.Join(t.TempDir(), "deck.toml")
	if err := os.WriteFile(path, []byte(deckOfRules), 0o666); err != nil {
		t.Fatal(err)
	}
	run := func(args ...string) (status int, out, errs string) {
		var o, e bytes.Buffer
		status = Run(context.Background(), append([]string{"decompose"}, args...), strings.NewReader(""), &o, &e)
		return status, o.String(), e.String()
	}
	status, out, errs := run("--deck", path)
	if status != 0 || errs != "" {
		t.Fatalf("status %d, errors %q", status, errs)
	}
	for _, want := range []string{
		"metal1: what is drawn on 19/0, 19/20 goes on mask A (19/1) or mask B (19/2)",
		"side to side      36 nm  same_mask_spacing", // the deck has none of its own
		"tip to side       40 nm  tip_to_side        a tip is an edge of at most 20 nm between two convex corners",
		"wide              60 nm  wide               beside a part where a square of 100 nm fits",
		"nearer than 18 nm are wrong whatever the masks",
		"Notches and gaps inside one shape below 36 nm are listed",
		"230/4  gaps below any_mask_spacing",
		"deck.toml:12: warning: layer metal1: spacing.tip_to_tip: 15 nm is below any_mask_spacing (18 nm)",
	} {
		if !strings.Contains(out, want) {
			t.Errorf("%q is not told in:\n%s", want, out)
		}
	}
	if err := os.WriteFile(path, []byte(strings.Replace(deckOfRules, "tip_to_tip = 15", "tip_to_tip = 44", 1)), 0o666); err != nil {
		t.Fatal(err)
	}
	if _, out, _ := run("--deck", path); !strings.HasSuffix(out, "\nNo rules contradict each other.\n") || strings.Contains(out, "warning") {
		t.Errorf("a deck without contradictions: %q", out)
	}
	// With any other option a layout is missing; a deck that is wrong is an error as ever.
	if status, _, errs := run("--deck", path, "--output", "x.gds"); status != statusUsage || !strings.Contains(errs, "no layout given") {
		t.Errorf("with --output: status %d, %q", status, errs)
	}
	if err := os.WriteFile(path, []byte(deckOfRules+"none = \"1/1\"\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	if status, out, errs := run("--deck", path); status != statusUsage || out != "" || !strings.Contains(errs, "deck.toml:17") {
		t.Errorf("a deck with an unknown key: status %d, %q, %q", status, out, errs)
	}
}
