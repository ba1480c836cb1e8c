package anchor

import (
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose"
)

// rules has two layers; a deck unit is two database units, so a quarter of it is half of one.
func rules() *decompose.Rules {
	return &decompose.Rules{Unit: "nm", UnitDBU: 2, Layers: []decompose.LayerRules{{Name: "metal1"}, {Name: "metal2"}}}
}

func TestParseFile(t *testing.T) {
	const text = `# orders
[[anchor]]
layer = "metal1"
mask = "A"
at = [120, 340.25]
cell = "amp"
name = "bias"
wish = true

[[anchor]]
cell = "amp"
alike = true

[[anchor]]
layer = "metal2"
mask = "B"
alike = false
box = [10, 20, -5, 40]

[[tie]]
layer = "metal2"
masks = "opposite"
at = [[120, 340], [900, -340]]
cell = "amp"
name = "pair"
[[tie]]
layer = "metal1"
masks = "same"
at = [
  [1, 2],
  [3, 4],
]

[[waiver]]
layer = "metal1"
at = [[110, 300], [160, 300]]
reason = "measured, accepted"
`
	got, err := ParseFile("orders.toml", []byte(text), rules())
	if err != nil {
		t.Fatal(err)
	}
	spots := func(a, b, c, d int64) [2]decompose.Spot {
		return [2]decompose.Spot{{X: a, Y: b}, {X: c, Y: d}}
	}
	want := &File{
		Name: "orders.toml",
		Anchors: []Entry{
			{Index: 0, Line: 2, Layer: 0, Mask: decompose.A, Box: decompose.Box{X1: 480, Y1: 1361, X2: 480, Y2: 1361}, Cell: "amp", Name: "bias", Wish: true},
			{Index: 2, Line: 14, Layer: 1, Mask: decompose.B, Box: decompose.Box{X1: -20, Y1: 80, X2: 40, Y2: 160}},
		},
		Alike: []AlikeEntry{{Index: 1, Line: 10, Cell: "amp"}},
		Ties: []TieEntry{
			{Index: 0, Line: 20, Layer: 1, Opposite: true, At: spots(480, 1360, 3600, -1360), Cell: "amp", Name: "pair"},
			{Index: 1, Line: 26, Layer: 0, At: spots(4, 8, 12, 16)},
		},
		Waivers: []WaiverEntry{{Index: 0, Line: 34, Layer: 0, At: spots(440, 1200, 640, 1200), Reason: "measured, accepted"}},
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("file differs (-want +got):\n%s", d)
	}
	if s := got.Cite("anchor", "bias", 0, 2); s != `orders.toml:2: anchor "bias"` {
		t.Errorf("the named anchor is cited as %q", s)
	}
	if s := got.Cite("tie", "", 1, 26); s != "orders.toml:26: tie number 2" {
		t.Errorf("the nameless tie is cited as %q", s)
	}
}

func TestEmptyFile(t *testing.T) {
	got, err := ParseFile("orders.toml", nil, rules())
	if d := cmp.Diff(&File{Name: "orders.toml"}, got); err != nil || d != "" {
		t.Errorf("an empty file: %v, %s", err, d)
	}
}

func TestFileErrors(t *testing.T) {
	const good = "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [1, 2]\n"
	const tie = "[[tie]]\nlayer = \"metal1\"\nmasks = \"same\"\nat = [[1, 2], [3, 4]]\n"
	const waiver = "[[waiver]]\nlayer = \"metal1\"\nreason = \"x\"\nat = [[1, 2], [3, 4]]\n"
	swap := strings.NewReplacer
	for _, c := range []struct {
		name, text string
		line       int
		key        string
		says       string
	}{
		{"syntax", "[[anchor]]\nat = [1, 2\n[[tie]]\n", 3, "anchor.at", "correct the TOML"},
		{"kind", "[[anchors]]\n", 1, "anchors", "did you mean anchor?"},
		{"single table", "[anchor]\n", 1, "anchor", "[[anchor]]"},
		{"key", good + "wishes = true\n", 5, "anchor number 1: wishes", "did you mean wish?"},
		{"named", good + "name = \"bias\"\nkey = 1\n", 6, `anchor "bias": key`, "unknown key"},
		{"second", good + good + "\nx = 1\n", 10, "anchor number 2: x", "unknown key"},
		{"layer", swap("metal1", "metal3").Replace(good), 2, "anchor number 1: layer", `did you mean "metal1"?`},
		{"far layer", swap("metal1", "poly").Replace(good), 2, "anchor number 1: layer", "it has metal1, metal2"},
		{"layer type", swap(`"metal1"`, "1").Replace(good), 2, "anchor number 1: layer", "is a number"},
		{"no layer", swap("layer = \"metal1\"\n", "").Replace(good), 1, "anchor number 1: layer", "missing"},
		{"mask", swap(`"A"`, `"C"`).Replace(good), 3, "anchor number 1: mask", `"A" or "B"`},
		{"no mask", swap("mask = \"A\"\n", "").Replace(good), 1, "anchor number 1: mask", "missing"},
		{"no place", swap("at = [1, 2]\n", "").Replace(good), 1, "anchor number 1: at", "missing"},
		{"two places", good + "box = [1, 2, 3, 4]\n", 5, "anchor number 1: box", "beside at"},
		{"short place", swap("[1, 2]", "[1]").Replace(good), 4, "anchor number 1: at", "is a list of 1; write a list of 2 numbers"},
		{"place type", swap("[1, 2]", `[1, "2"]`).Replace(good), 4, "anchor number 1: at", "is a string"},
		{"place no list", swap("[1, 2]", "1").Replace(good), 4, "anchor number 1: at", "is a number"},
		{"short box", swap("at = [1, 2]", "box = [1, 2, 3]").Replace(good), 4, "anchor number 1: box", "list of 4 numbers"},
		{"eighth", swap("[1, 2]", "[1, 2.125]").Replace(good), 4, "anchor number 1: at", "2.125 nm is no whole number of half database units"},
		{"outside", swap("[1, 2]", "[1, 2e9]").Replace(good), 4, "anchor number 1: at", "within the plane (half a unit is 0.25 nm)"},
		{"alike, no cell", "[[anchor]]\nalike = true\n", 1, "anchor number 1: cell", "missing"},
		{"alike with a place", good + "alike = true\n", 2, "anchor number 1: layer", "no meaning beside alike"},
		{"alike type", good + "alike = 1\n", 5, "anchor number 1: alike", "true or false"},
		{"tie masks", swap(`"same"`, `"equal"`).Replace(tie), 3, "tie number 1: masks", `"same" or "opposite"`},
		{"tie without masks", swap("masks = \"same\"\n", "").Replace(tie), 1, "tie number 1: masks", "missing"},
		{"tie of one", swap("[[1, 2], [3, 4]]", "[[1, 2]]").Replace(tie), 4, "tie number 1: at", "list of 2 points"},
		{"tie of three", swap("[3, 4]]", "[3, 4], [5, 6]]").Replace(tie), 4, "tie number 1: at", "list of 2 points"},
		{"tie of numbers", swap("[[1, 2], [3, 4]]", "[1, 2]").Replace(tie), 4, "tie number 1: at", "is a number"},
		{"tie key", tie + "mask = \"A\"\n", 5, "tie number 1: mask", "did you mean masks?"},
		{"waiver without reason", swap("reason = \"x\"\n", "").Replace(waiver), 1, "waiver number 1: reason", "missing"},
		{"waiver without place", swap("at = [[1, 2], [3, 4]]\n", "").Replace(waiver), 1, "waiver number 1: at", "missing"},
		{"waiver key", waiver + "masks = \"same\"\n", 5, "waiver number 1: masks", "unknown key"},
		{"empty cell", tie + "cell = \"\"\n", 5, "tie number 1: cell", "empty"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := ParseFile("orders.toml", []byte(c.text), rules())
			var e *decompose.DeckError
			if !errors.As(err, &e) {
				t.Fatalf("got %v, want a *decompose.DeckError", err)
			}
			if e.File != "orders.toml" || e.Line != c.line || e.Key != c.key {
				t.Errorf("blames %s line %d key %q, want orders.toml line %d key %q (%v)", e.File, e.Line, e.Key, c.line, c.key, e)
			}
			if !strings.Contains(e.Msg, c.says) || strings.Contains(e.Error(), "\n") {
				t.Errorf("says %q, want one line with %q", e.Error(), c.says)
			}
		})
	}
}
