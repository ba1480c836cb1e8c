package cli

import (
	"bytes"
	"compress/gzip"
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"maskpair/decompose"
	"maskpair/decompose/survey"
	"maskpair/gds"
)

// surveyLayout is three bars 20 apart, placed in two columns, and a triangle of squares that is odd from a spacing of 31 on.
func surveyLayout(t *testing.T) []byte {
	t.Helper()
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{})
	wire := gds.LayerType{Layer: 10}
	w.BeginStructure("bars")
	for i := range int32(3) {
		w.Rectangle(wire, gds.Rect{X1: 40 * i, X2: 40*i + 20, Y2: 300})
	}
	w.EndStructure()
	w.BeginStructure("caf\xe9")
	w.ARef("bars", gds.Strans{}, 1, 2, gds.Point{}, gds.Point{X: 1000}, gds.Point{Y: 2000})
	for _, at := range [][2]int32{{3000, 0}, {3050, 0}, {3025, 50}} {
		w.Rectangle(wire, gds.Rect{X1: at[0], X2: at[0] + 20, Y1: at[1], Y2: at[1] + 20})
	}
	w.Text(gds.LayerType{Layer: 10, Type: 1}, gds.Point{}, "A")
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// surveying runs the command in a folder with the layout.
func surveying(t *testing.T, stdin []byte, args ...string) (status int, out, errs string) {
	t.Helper()
	dir := t.TempDir()
	data := surveyLayout(t)
	if err := os.WriteFile(filepath.Join(dir, "chip.gds"), data, 0o644); err != nil {
		t.Fatal(err)
	}
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	z.Write(data)
	z.Close()
	if err := os.WriteFile(filepath.Join(dir, "chip.gds.gz"), packed.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "cut.gds.gz"), packed.Bytes()[:packed.Len()/2], 0o644); err != nil {
		t.Fatal(err)
	}
	for i, a := range args {
		args[i] = strings.ReplaceAll(a, "@", dir+"/")
	}
	var o, e bytes.Buffer
	status = Run(context.Background(), append([]string{"survey"}, args...), bytes.NewReader(stdin), &o, &e)
	return status, o.String(), strings.ReplaceAll(e.String(), dir+"/", "@")
}

func TestSurveySays(t *testing.T) {
	status, out, errs := surveying(t, nil, "@chip.gds", "--layer", "10/0")
	if status != 0 || errs != "" {
		t.Fatalf("status %d, %q", status, errs)
	}
	squeezed := strings.Join(strings.Fields(out), " ")
	for _, want := range []string{
		"database unit 1 nm", "structures 2", `tops "caf\xe9"`, "depth 2", "references 0", "arrays 1", "placements 2",
		"10/0 6 9 all all 0 20 20 (all)", "10/1 0 0 1",
		"10/0: 9 figures in 9 shapes", "20 4 ####", // four gaps of 20 between bars
		"1 to 20 0 9 0 1", "21 to 30 4 5 0 3", // spacing, near pairs, components, odd, largest
	} {
		if !strings.Contains(squeezed, want) {
			t.Errorf("the survey does not say %q:\n%s", want, out)
		}
	}
}

// Packed, plain and from standard input, a layout is the same.
func TestSurveyReadsAll(t *testing.T) {
	strip := func(out string) string { _, rest, _ := strings.Cut(out, ":"); return rest }
	_, plain, _ := surveying(t, nil, "@chip.gds")
	_, packed, _ := surveying(t, nil, "@chip.gds.gz")
	_, piped, _ := surveying(t, surveyLayout(t), "-")
	if strip(plain) != strip(packed) || strip(plain) != strip(piped) || plain == "" {
		t.Errorf("plain %q, packed %q, piped %q", plain, packed, piped)
	}
}

func TestSurveyJSON(t *testing.T) {
	status, out, errs := surveying(t, nil, "@chip.gds", "--layer", "10/0", "--json")
	if status != 0 {
		t.Fatal(errs)
	}
	var got struct {
		Tops   []string
		Layers []struct {
			Layer string
			Flat  int64
		}
		Gaps struct {
			Spacings []struct {
				From int64 `json:"from_dbu"`
				Odd  int64 `json:"odd_components"`
			}
		}
	}
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	if len(got.Tops) != 1 || got.Tops[0] != "café" || len(got.Layers) != 2 || got.Layers[0].Layer != "10/0" || got.Layers[0].Flat != 9 {
		t.Errorf("%+v", got)
	}
	odd := int64(0)
	for _, s := range got.Gaps.Spacings {
		odd = max(odd, s.Odd)
		if s.From <= 30 && s.Odd > 0 {
			t.Errorf("odd at a spacing of %d", s.From)
		}
	}
	if odd == 0 {
		t.Error("no spacing is odd, but the triangle is from 31 on")
	}
}

// The deck that is printed is one, and does for the layout what it says.
func TestDeckStarter(t *testing.T) {
	status, out, errs := surveying(t, nil, "@chip.gds", "--layer", "10/0", "--deck-starter")
	if status != 0 {
		t.Fatal(errs)
	}
	deck, err := decompose.ParseDeck("deck.toml", []byte(out))
	if err != nil {
		t.Fatalf("%v in\n%s", err, out)
	}
	l := deck.Layers[0]
	if len(deck.Layers) != 1 || l.Drawn[0] != (gds.LayerType{Layer: 10}) || l.MaskA != (gds.LayerType{Layer: 10, Type: 2}) || l.MaskB != (gds.LayerType{Layer: 10, Type: 3}) {
		t.Errorf("layers %+v: 10/1 holds a text, so that the masks are 10/2 and 10/3", l)
	}
	// At 30 two masks do it, from 31 on the triangle is odd.
	if l.SameMask.Value != 30 {
		t.Errorf("spacing %g", l.SameMask.Value)
	}
	for _, r := range deck.Remarks() {
		t.Errorf("%s: %s", r.Key, r.Text)
	}
	// The parts that are commented out are a deck as well.
	open := strings.NewReplacer("# stitch", "stitch", "# [layer.stitch]", "[layer.stitch]", "# min_overlap", "min_overlap", "# min_piece", "min_piece", "# apply", "apply").Replace(out)
	if deck, err = decompose.ParseDeck("deck.toml", []byte(open)); err != nil || deck.Layers[0].Stitch == nil || deck.Marks.Stitch == nil || len(deck.Remarks()) > 0 {
		t.Errorf("with the stitch lines: %v", err)
	}
}

// Where two masks cannot do even what is nearest, the starter has the most at which nothing else is near.
func TestSuggestion(t *testing.T) {
	for _, c := range []struct {
		steps []survey.Step
		want  int64
	}{
		{[]survey.Step{{From: 1, To: 20}, {From: 21, To: 40, NearPairs: 5, Odd: 1}, {From: 41, To: 84, NearPairs: 9, Odd: 1}}, 40},
		{[]survey.Step{{From: 1, To: 20}, {From: 21, To: 40, NearPairs: 5}, {From: 41, To: 84, NearPairs: 9, Odd: 1}}, 40},
		{[]survey.Step{{From: 1, To: 20}, {From: 21, To: 40, NearPairs: 5}, {From: 41, To: 84, NearPairs: 9}}, 84},
		{[]survey.Step{{From: 1, To: 20}}, 20},
		{nil, 1},
	} {
		if got, why := suggest(&survey.Gaps{Steps: c.steps}); got != c.want {
			t.Errorf("%v: %d (%s), want %d", c.steps, got, why, c.want)
		}
	}
}

func TestSurveyRefuses(t *testing.T) {
	for _, c := range []struct {
		args   []string
		status int
		says   string
	}{
		{nil, 2, "no layout given"},
		{[]string{"@chip.gds", "@chip.gds"}, 2, "one layout too many"},
		{[]string{"@chip.gds", "--layer", "x"}, 2, "layer/datatype"},
		{[]string{"@chip.gds", "--layer", "7/0"}, 2, "has no figure there"},
		{[]string{"@chip.gds", "--layer", "10/1"}, 2, "has no figure there"}, // a text alone
		{[]string{"@chip.gds", "--deck-starter"}, 2, "needs --layer"},
		{[]string{"@chip.gds", "--layer", "10/0", "--deck-starter", "--json"}, 2, "give one of them"},
		{[]string{"-", "--layer", "10/0"}, 2, "reads the layout twice"},
		{[]string{"@chip.gds", "--jobs", "0"}, 2, "--jobs"},
		{[]string{"@none.gds"}, 3, "@none.gds: no such file"},
		{[]string{"@"}, 3, "folder"},
		{[]string{"@cut.gds.gz"}, 3, "@cut.gds.gz"},
	} {
		status, out, errs := surveying(t, nil, c.args...)
		if status != c.status || !strings.Contains(errs, c.says) || out != "" || strings.Count(errs, "\n") != 1 {
			t.Errorf("%q: status %d, says %q", c.args, status, errs)
		}
	}
}
