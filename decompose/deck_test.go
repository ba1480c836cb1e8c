package decompose

import (
	"errors"
	"fmt"
	"math/big"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/gds"
)

// fullDeck has every key that a deck may have.
const fullDeck = `unit = "nm"                    # of every length below

[[layer]]
name   = "metal1"
drawn  = "19/0"
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
any_mask_spacing = 18
already_masked = "redo"
anchor_a = "19/11"
anchor_b = "19/12"
anchor_label = "19/10"
keep_drawn = true
same_shape = "report"
[layer.spacing]
side_to_side = 38
tip_to_side = 40
tip_to_tip = 44
tip_width = 20
wide = [{ width = 200, spacing = 80 }, { width = 100, spacing = 60 }]
[layer.stitch]
min_overlap = 10
min_piece = 20
keep_out = ["15/0", "18/0"]
apply = true

[[layer]]
name = "contact"
drawn = ["18/0", "18/5"]
mask_a = "18/1"
mask_b = "18/2"
same_mask_spacing = 54.5
anchor_a = "19/11"

[marks]
unresolved = "230/0"
cycle = "230/1"
stitch = "230/2"
moved = "230/3"
any_mask = "230/4"
replace = true
`

func streamLayer(l, d uint16) gds.LayerType { return gds.LayerType{Layer: l, Type: d} }

func streamLayerPtr(l, d uint16) *gds.LayerType { t := streamLayer(l, d); return &t }

func TestResolveFullDeck(t *testing.T) {
	deck, err := ParseDeck("deck.toml", []byte(fullDeck))
	if err != nil {
		t.Fatal(err)
	}
	got, err := deck.Resolve(0.5e-9)
	if err != nil {
		t.Fatal(err)
	}
	want := &Rules{
		DBU: 0.5e-9, Unit: "nm", UnitDBU: 2,
		Layers: []LayerRules{{
			Name: "metal1", Drawn: []gds.LayerType{streamLayer(19, 0)}, MaskA: streamLayer(19, 1), MaskB: streamLayer(19, 2),
			Spacing: 72, AnyMask: 36, Redo: true, AnchorA: streamLayerPtr(19, 11), AnchorB: streamLayerPtr(19, 12), AnchorLabel: streamLayerPtr(19, 10),
			KeepDrawn: true, SameShapeReport: true,
			ByFacing: &FacingRules{SideToSide: 76, TipToSide: 80, TipToTip: 88, CornerToCorner: 72, TipWidth: 40,
				Wide: []WideRule{{200, 120}, {400, 160}}},
			Stitch: &StitchRules{MinOverlap: 20, MinPiece: 40, KeepOut: []gds.LayerType{streamLayer(15, 0), streamLayer(18, 0)}, Apply: true},
		}, {
			Name: "contact", Drawn: []gds.LayerType{streamLayer(18, 0), streamLayer(18, 5)}, MaskA: streamLayer(18, 1), MaskB: streamLayer(18, 2),
			Spacing: 109, AnchorA: streamLayerPtr(19, 11),
		}},
		Marks: MarkRules{Unresolved: streamLayerPtr(230, 0), Cycle: streamLayerPtr(230, 1), Stitch: streamLayerPtr(230, 2), Moved: streamLayerPtr(230, 3), AnyMask: streamLayerPtr(230, 4), Replace: true},
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("rules differ (-want +got):\n%s", d)
	}
	if r := got.Layers[0].Reach(); r != 160 {
		t.Errorf("reach of metal1 is %d, want 160 (the widest rule)", r)
	}
	if r := got.Layers[1].Reach(); r != 109 {
		t.Errorf("reach of contact is %d, want 109 (its plain spacing)", r)
	}
}

func TestMinPieceDefaultsToOverlap(t *testing.T) {
	rules := resolveDeck(t, minimalDeck+"[layer.stitch]\nmin_overlap = 10\n", 1e-9)
	if got := rules.Layers[0].Stitch.MinPiece; got != 10 {
		t.Errorf("min_piece is %d where the deck has none, want 10: a piece holds its overlap", got)
	}
}

// minimalDeck is the least deck there is, seven lines long.
const minimalDeck = `unit = "nm"
[[layer]]
name = "metal1"
drawn = "19/0"
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
`

func resolveDeck(t *testing.T, text string, dbu float64) *Rules {
	t.Helper()
	deck, err := ParseDeck("deck.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	rules, err := deck.Resolve(dbu)
	if err != nil {
		t.Fatal(err)
	}
	return rules
}

func TestDeckErrors(t *testing.T) {
	swap := func(old, new string) string {
		if !strings.Contains(minimalDeck, old) {
			t.Fatalf("the least deck has no %q", old)
		}
		return strings.Replace(minimalDeck, old, new, 1)
	}
	add := func(lines string) string { return minimalDeck + lines }
	for _, c := range []struct {
		name, text string
		line       int
		key        string
		says       string // part of the message
	}{
		{"syntax", swap(`"19/1"`, `"19/1`), 5, "layer.mask_a", "correct the TOML"},
		{"key twice", add("name = \"m\"\n"), 8, "layer.name", "correct the TOML"},
		{"nothing", "", 1, "unit", "missing"},
		{"no layer", "unit = \"nm\"\n", 1, "layer", "missing"},
		{"a table, not a list", swap("[[layer]]", "[layer]"), 2, "layer", "[[layer]]"},
		{"empty list", "unit = \"nm\"\nlayer = []\n", 2, "layer", "at least one"},
		{"unit", swap(`"nm"`, `"mm"`), 1, "unit", `"nm" or "um"`},
		{"unit type", swap(`"nm"`, `7`), 1, "unit", "is a number"},
		{"top key", "units = \"nm\"\n" + minimalDeck, 1, "units", "did you mean unit?"},
		{"layer key", swap("same_mask_spacing", "same_mask_spacings"), 7, "layer metal1: same_mask_spacings", "did you mean same_mask_spacing?"},
		{"far key", add("colour = 1\n"), 8, "layer metal1: colour", "the keys here are"},
		{"two unknown keys", add("zz = 1\nxx = 1\n"), 8, "layer metal1: zz", "unknown"},
		{"no name", swap("name = \"metal1\"\n", ""), 2, "layer number 1: name", "missing"},
		{"empty name", swap(`"metal1"`, `""`), 3, "layer number 1: name", "empty"},
		{"no mask", swap("mask_b = \"19/2\"\n", ""), 2, "layer metal1: mask_b", "missing"},
		{"drawn type", swap(`"19/0"`, `19`), 4, "layer metal1: drawn", "is a number"},
		{"drawn list type", swap(`"19/0"`, `["19/0", 5]`), 4, "layer metal1: drawn", "is a number"},
		{"drawn none", swap(`"19/0"`, `[]`), 4, "layer metal1: drawn", "names no layer"},
		{"no datatype", swap(`"19/1"`, `"19"`), 5, "layer metal1: mask_a", "two numbers from 0 to 65535"},
		{"layer too high", swap(`"19/1"`, `"65536/0"`), 5, "layer metal1: mask_a", "65535"},
		{"layer negative", swap(`"19/1"`, `"-1/0"`), 5, "layer metal1: mask_a", "65535"},
		{"three parts", swap(`"19/1"`, `"19/1/0"`), 5, "layer metal1: mask_a", "65535"},
		{"spacing type", swap("= 36", `= "36"`), 7, "layer metal1: same_mask_spacing", "is a string"},
		{"spacing zero", swap("= 36", "= 0"), 7, "layer metal1: same_mask_spacing", "more than 0"},
		{"spacing negative", swap("= 36", "= -36"), 7, "layer metal1: same_mask_spacing", "more than 0"},
		{"spacing nan", swap("= 36", "= nan"), 7, "layer metal1: same_mask_spacing", "finite"},
		{"spacing infinite", swap("= 36", "= inf"), 7, "layer metal1: same_mask_spacing", "finite"},
		{"spacing a date", swap("= 36", "= 2000-01-01"), 7, "layer metal1: same_mask_spacing", "write a number"},
		{"any above same", add("any_mask_spacing = 37\n"), 8, "layer metal1: any_mask_spacing", "at most"},
		{"already", add("already_masked = \"keep\"\n"), 8, "layer metal1: already_masked", `"anchor" or "redo"`},
		{"same shape", add("same_shape = true\n"), 8, "layer metal1: same_shape", `"ignore" or "report"`},
		{"bool", add("keep_drawn = 1\n"), 8, "layer metal1: keep_drawn", "true or false"},
		{"masks alike", swap(`"19/2"`, `"19/1"`), 6, "layer metal1: mask_b", "also layer metal1: mask_a (line 5)"},
		{"drawn is a mask", swap(`"19/0"`, `["19/0", "19/2"]`), 6, "layer metal1: mask_b", "also layer metal1: drawn (line 4)"},
		{"drawn twice", swap(`"19/0"`, `["19/0", "19/0"]`), 4, "layer metal1: drawn", "also layer metal1: drawn"},
		{"marker is drawn", add("anchor_a = \"19/0\"\n"), 8, "layer metal1: anchor_a", "also layer metal1: drawn"},
		{"markers alike", add("anchor_a = \"19/8\"\nanchor_b = \"19/8\"\n"), 9, "layer metal1: anchor_b", "also layer metal1: anchor_a (line 8)"},
		{"mark is a mask", add("\n[marks]\ncycle = \"19/1\"\n"), 10, "marks.cycle", "also layer metal1: mask_a"},
		{"marks alike", add("[marks]\ncycle = \"7/1\"\nmoved = \"7/1\"\n"), 10, "marks.moved", "also marks.cycle (line 9)"},
		{"mark is a marker", add("anchor_a = \"7/1\"\n[marks]\ncycle = \"7/1\"\n"), 10, "marks.cycle", "also layer metal1: anchor_a"},
		{"mark type", add("[marks]\ncycle = [\"7/1\"]\n"), 9, "marks.cycle", "is a list"},
		{"mark key", add("[marks]\ncycles = \"7/1\"\n"), 9, "marks.cycles", "did you mean cycle?"},
		{"marks no table", "marks = 5\n" + minimalDeck, 1, "marks", "is a number"},
		{"second layer", add(`[[layer]]
name = "metal2"
mask_a = "20/1"
drawn = "20/0"
mask_b = "19/2"
same_mask_spacing = 40
`), 12, "layer metal2: mask_b", "also layer metal1: mask_b (line 6)"},
		{"same name", add(`[[layer]]
mask_a = "20/1"
drawn = "20/0"
mask_b = "20/2"
name = "metal1"
same_mask_spacing = 40
`), 12, "layer metal1: name", "line 3 has the same name"},
		{"spacing key", add("[layer.spacing]\ntip_to_tips = 40\n"), 9, "layer metal1: spacing.tip_to_tips", "did you mean tip_to_tip?"},
		{"spacing value", add("[layer.spacing]\nside_to_side = 0\n"), 9, "layer metal1: spacing.side_to_side", "more than 0"},
		{"tip without width", add("[layer.spacing]\ntip_to_side = 40\n"), 8, "layer metal1: spacing.tip_width", "tip_to_side needs it"},
		{"tip to tip without width", add("spacing = { side_to_side = 40, tip_to_tip = 40 }\n"), 8, "layer metal1: spacing.tip_width", "tip_to_tip needs it"},
		{"wide key", add("[layer.spacing]\nwide = [\n  { width = 100, spacing = 60 },\n  { width = 200, space = 60 },\n]\n"), 11, "layer metal1: spacing.wide.space", "unknown key"},
		{"wide incomplete", add("[[layer.spacing.wide]]\nwidth = 3\nspacing = 4\n[[layer.spacing.wide]]\nspacing = 60\n"), 11, "layer metal1: spacing.wide.width", "missing"},
		{"wide no tables", add("[layer.spacing]\nwide = [100, 60]\n"), 9, "layer metal1: spacing.wide", "list of tables"},
		{"stitch key", add("[layer.stitch]\n\n# a comment\nmin_overlaps = 40\n"), 11, "layer metal1: stitch.min_overlaps", "did you mean min_overlap?"},
		{"stitch without overlap", add("[layer.stitch]\napply = true\n"), 8, "layer metal1: stitch.min_overlap", "missing"},
		{"keep_out", add("[layer.stitch]\nmin_overlap = 1\nkeep_out = [\"15\"]\n"), 10, "layer metal1: stitch.keep_out", "two numbers"},
		{"spacing no table", add("spacing = 3\n"), 8, "layer metal1: spacing", "as a table"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := ParseDeck("deck.toml", []byte(c.text))
			var e *DeckError
			if !errors.As(err, &e) {
				t.Fatalf("got %v, want a *DeckError", err)
			}
			if e.Line != c.line || e.Key != c.key || e.File != "deck.toml" {
				t.Errorf("blames %s line %d key %q, want deck.toml line %d key %q (%v)", e.File, e.Line, e.Key, c.line, c.key, e)
			}
			if !strings.Contains(e.Msg, c.says) || strings.Contains(e.Error(), "\n") {
				t.Errorf("says %q, want one line with %q", e.Error(), c.says)
			}
			if head := fmt.Sprintf("deck.toml:%d: %s: ", c.line, c.key); !strings.HasPrefix(e.Error(), head) {
				t.Errorf("says %q, want it to begin with %q", e.Error(), head)
			}
		})
	}
}

func TestLayersThatMayBeShared(t *testing.T) {
	// A keep_out layer may be any layer; texts are no figures, so a label layer may be a drawn one.
	resolveDeck(t, minimalDeck+"anchor_label = \"19/0\"\n[layer.stitch]\nmin_overlap = 10\nkeep_out = [\"19/1\", \"15/0\", \"15/0\"]\n", 1e-9)
}

func TestWholeDatabaseUnits(t *testing.T) {
	for _, c := range []struct {
		unit, length string
		dbu          float64
		want         int64 // 0: refused
	}{
		{"nm", "36", 1e-9, 36},
		{"nm", "36.0", 1e-9, 36},
		{"nm", "36.5", 1e-9, 0},
		{"nm", "36.5", 0.5e-9, 73},
		{"nm", "36", 0.25e-9, 144},
		{"nm", "35", 5e-9, 7},
		{"nm", "36", 5e-9, 0},
		{"nm", "36", 2.5e-9, 0},
		{"nm", "37.5", 2.5e-9, 15},
		{"um", "0.036", 1e-9, 36},
		{"um", "0.0365", 1e-9, 0},
		{"um", "0.0365", 1e-10, 365},
		{"um", "1.1", 1e-9, 1100}, // 1.1*1000 is no whole number in binary
		{"um", "2000000", 1e-9, 2000000000},
		{"um", "1999999.9995", 1e-9, 0}, // half a unit off, far out
		{"um", "1999999.999", 1e-9, 1999999999},
		{"um", "3000000", 1e-9, 0},               // longer than the plane
		{"nm", "36", float64(float32(1e-9)), 36}, // a unit written in single precision
		{"nm", "2000000001", float64(float32(1e-9)), 2000000001},
		{"um", "0.127", 2.54e-8, 5}, // a thousandth of a mil
	} {
		text := strings.Replace(minimalDeck, "36", c.length, 1)
		text = strings.Replace(text, `"nm"`, `"`+c.unit+`"`, 1)
		deck, err := ParseDeck("deck.toml", []byte(text))
		if err != nil {
			t.Fatal(err)
		}
		rules, err := deck.Resolve(c.dbu)
		var e *DeckError
		switch {
		case c.want == 0 && (!errors.As(err, &e) || e.Line != 7 || e.Key != "layer metal1: same_mask_spacing"):
			t.Errorf("%s %s in units of %g m: got %v, want it refused at line 7, same_mask_spacing", c.length, c.unit, c.dbu, err)
		case c.want != 0 && err != nil:
			t.Errorf("%s %s in units of %g m: %v", c.length, c.unit, c.dbu, err)
		case c.want != 0 && rules.Layers[0].Spacing != c.want:
			t.Errorf("%s %s in units of %g m is %d, want %d", c.length, c.unit, c.dbu, rules.Layers[0].Spacing, c.want)
		}
	}
}

func TestResolveRefusesOddUnits(t *testing.T) {
	deck, err := ParseDeck("deck.toml", []byte(minimalDeck))
	if err != nil {
		t.Fatal(err)
	}
	for _, dbu := range []float64{0, -1e-9, 1e9} {
		if _, err := deck.Resolve(dbu); err == nil || !strings.Contains(err.Error(), "UNITS") {
			t.Errorf("a database unit of %g m: got %v, want an error that names UNITS", dbu, err)
		}
	}
}

// Every thousandth and half in the plane must come through exactly: compared with rational arithmetic.
func TestHalfUnitsAgainstRationals(t *testing.T) {
	for _, c := range []struct {
		unit  string
		dbu   float64
		ratio *big.Rat
	}{
		{"um", 1e-9, big.NewRat(1000, 1)},
		{"nm", 1e-9, big.NewRat(1, 1)},
		{"nm", 2.5e-9, big.NewRat(2, 5)},
		{"nm", 0.25e-9, big.NewRat(4, 1)},
	} {
		rules := resolveDeck(t, strings.Replace(strings.Replace(minimalDeck, "36", "40", 1), `"nm"`, `"`+c.unit+`"`, 1), c.dbu)
		step := new(big.Rat).Quo(big.NewRat(1, 8), c.ratio) // an eighth of a unit
		for i := int64(0); i < 4000; i++ {
			// Spread over the plane in both directions, by an odd stride so that all eighths occur.
			eighths := (i - 2000) * 8589931
			exact := new(big.Rat).Mul(step, big.NewRat(eighths, 1))
			v, _ := exact.Float64()
			half, ok := rules.HalfUnits(v)
			if wantOK := eighths%4 == 0; ok != wantOK || ok && half != eighths/4 {
				t.Fatalf("%s %s in units of %g m: %d half units, %v; want %d eighths of a unit", exact.FloatString(9), c.unit, c.dbu, half, ok, eighths)
			}
		}
	}
}

func TestLengthWords(t *testing.T) {
	for _, c := range []struct {
		unit       string
		ratio, dbu float64
		want       string
	}{
		{"nm", 1, 36, "36 nm"},
		{"nm", 1, -0.5, "-0.5 nm"},
		{"nm", 0.4, 1, "2.5 nm"},
		{"um", 1000, 36, "0.036 um"},
		{"um", 1000, 2147483647.5, "2147483.6475 um"},
		{"nm", 1, 2147483647, "2147483647 nm"},
		{"nm", 3, 1, "0.333333333333 nm"},
		{"nm", 1, 0, "0 nm"},
	} {
		r := &Rules{Unit: c.unit, UnitDBU: c.ratio}
		if got := r.Length(c.dbu); got != c.want {
			t.Errorf("%g units of 1/%g %s: %q, want %q", c.dbu, c.ratio, c.unit, got, c.want)
		}
	}
}

func TestKeyLines(t *testing.T) {
	text := "\ufeff# head\r\n" + // 1
		"a = 1\r\n" + // 2
		"'b c' = \"x # = [\\\" ]\" # note\n" + // 3
		"c.d = '''\n" + // 4
		"e = 5\n" + // 5
		"'''\n" + // 6
		"f = [ # note ]\n" + // 7
		"  1,\n" + // 8
		"  { g = 2,\n" + // 9
		"    h = [3] } ]\n" + // 10
		"[[t]]\n" + // 11
		"[t.u]\n" + // 12
		"v = 1\n" + // 13
		"[[t]]\n" + // 14
		"[t.u]\n" + // 15
		"\"v\" = \"\"\"\\\\\"\"\"\n" + // 16
		"w = 2000-01-01 00:00:00\n" // 17
	root := keyLines(text)
	item := func(n *lineNode, i int) *lineNode { return n.items[i] }
	for _, c := range []struct {
		path string
		node *lineNode
		line int
	}{
		{"a", root.keys["a"], 2},
		{"b c", root.keys["b c"], 3},
		{"c.d", root.keys["c"].keys["d"], 4},
		{"f", root.keys["f"], 7},
		{"f[0]", item(root.keys["f"], 0), 8},
		{"f[1].g", item(root.keys["f"], 1).keys["g"], 9},
		{"f[1].h", item(root.keys["f"], 1).keys["h"], 10},
		{"t[0]", item(root.keys["t"], 0), 11},
		{"t[0].u", item(root.keys["t"], 0).keys["u"], 12},
		{"t[0].u.v", item(root.keys["t"], 0).keys["u"].keys["v"], 13},
		{"t[1].u.v", item(root.keys["t"], 1).keys["u"].keys["v"], 16},
		{"t[1].u.w", item(root.keys["t"], 1).keys["u"].keys["w"], 17},
	} {
		if c.node == nil || c.node.line != c.line {
			t.Errorf("%s: got %+v, want line %d", c.path, c.node, c.line)
		}
	}
	if root.keys["e"] != nil {
		t.Error("a line within a string was taken for a key")
	}
}

// Any text ends in a deck with at least one layer, or in an error of one line that names the file.
func FuzzParseDeck(f *testing.F) {
	f.Add(fullDeck)
	f.Add(minimalDeck)
	f.Add("layer = [{")
	f.Fuzz(func(t *testing.T, text string) {
		keyLines(text) // must end, whatever the text
		deck, err := ParseDeck("deck.toml", []byte(text))
		if err != nil {
			if s := err.Error(); !strings.HasPrefix(s, "deck.toml") || strings.Contains(s, "\n") {
				t.Errorf("error is %q", s)
			}
			return
		}
		if len(deck.Layers) == 0 {
			t.Error("a deck without layers was accepted")
		}
	})
}
