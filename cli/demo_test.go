package cli

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"strings"
	"testing"

	"maskpair/cli/report"
	"maskpair/gds"
)

// runDemo runs the demo with the real stages into the folder "new".
func runDemo(t *testing.T) *bench {
	t.Helper()
	b := newBench(t)
	b.step = runDecompose
	b.want(0, b.run("demo", "@new"), "does not fit on two masks")
	return b
}

func TestDemoWritesItsFiles(t *testing.T) {
	b := runDemo(t)
	entries, err := os.ReadDir(b.path("new"))
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
		if !strings.Contains(b.out.String(), e.Name()) {
			t.Errorf("it does not speak of %s", e.Name())
		}
	}
	if got := strings.Join(names, " "); got != "anchors.toml deck.toml layout.gds layout.svg masks.gds masks.svg report.html report.json" {
		t.Errorf("the folder holds %s", got)
	}
	if !strings.Contains(b.out.String(), report.Caution) {
		t.Errorf("it does not give the caution")
	}
}

// The counts are those of the drawing, by hand: 2 rows of 16 lines; 3 pads; 3 amplifiers of 3 wires, of which 2 are anchored;
// 12 gates of 6 figures, whose rails make 3 shapes; 2 knots of 5 wires. Near pairs: 15 a row of lines, 2 an amplifier, 5 a knot;
// in a gate one of the outer rail with the wire beside it, two of that with the short ones, two of these with the next wire, and
// one of that with the rail in the middle. Components: 2 rows, 3 pads, 3 amplifiers, all gates, 2 knots.
func TestDemoNumbers(t *testing.T) {
	b := runDemo(t)
	var r struct {
		Layers []struct {
			Figures              int
			AlreadyMaskedFigures int `json:"already_masked_figures"`
			Shapes               int
			NearPairs            int `json:"near_pairs"`
			Components           int
			UnresolvedComponents int `json:"unresolved_components"`
			UnresolvedPairs      int `json:"unresolved_pairs"`
			LowerBound           int `json:"lower_bound"`
			AnchoredShapes       int `json:"anchored_shapes"`
			Unresolved           []struct{ Cycle []struct{} }
		}
	}
	if err := json.Unmarshal([]byte(b.read("new/report.json")), &r); err != nil {
		t.Fatal(err)
	}
	l := r.Layers[0]
	got := []int{l.Figures, l.AlreadyMaskedFigures, l.Shapes, l.NearPairs, l.Components, l.UnresolvedComponents, l.UnresolvedPairs, l.LowerBound, l.AnchoredShapes}
	want := []int{32 + 3 + 9 + 72 + 10, 0, 32 + 3 + 9 + 3 + 48 + 10, 30 + 6 + 10 + 12*6, 2 + 3 + 3 + 1 + 2, 2, 2, 2, 6}
	if fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("the report counts %v, want %v", got, want)
	}
	for _, u := range l.Unresolved {
		if len(u.Cycle) != 5 {
			t.Errorf("an odd cycle of %d, want 5", len(u.Cycle))
		}
	}
}

// What the demo says of its cells must be so in the masks.
func TestDemoMasks(t *testing.T) {
	b := runDemo(t)
	read := func(name string) *gds.Library {
		stream := b.read("new/" + name)
		want := gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: demoWire}: 1, {Layer: demoWire, Type: 1}: 2, {Layer: demoWire, Type: 2}: 3, {Layer: demoMark}: 4}}
		lib, err := gds.Index(strings.NewReader(stream), int64(len(stream)), want, nil)
		if err != nil {
			t.Fatal(err)
		}
		return lib
	}
	classes := func(lib *gds.Library, name string) (found []uint8) {
		for _, s := range lib.Structures {
			if s.Name == name {
				for _, f := range lib.Figures[s.FirstFigure:s.EndFigure] {
					found = append(found, f.Class)
				}
			}
		}
		return found
	}
	lib := read("masks.gds")
	if got := classes(lib, "amplifier"); !bytes.Equal(got, []uint8{2, 3, 2}) {
		t.Errorf("the amplifier is on %v, want its pair on A (2) and the wire between on B (3)", got)
	}
	var variants, arrays, marks int
	for _, s := range lib.Structures {
		if strings.HasPrefix(s.Name, "amplifier$") || strings.HasPrefix(s.Name, "gate$") {
			t.Errorf("%s: the cell needs no variant", s.Name)
		}
		if strings.HasPrefix(s.Name, "line") {
			variants++
		}
		for _, f := range lib.Figures[s.FirstFigure:s.EndFigure] {
			switch f.Class {
			case 1:
				t.Errorf("%s has a figure on no mask", s.Name)
			case 4:
				marks++
			}
		}
	}
	for i := range lib.Refs {
		if lib.Refs[i].Array {
			arrays++
		}
	}
	if variants != 2 || arrays != 2 {
		t.Errorf("%d variants of the line and %d arrays, want 2 and 2: an array of double pitch for each mask", variants, arrays)
	}
	if marks != 2 {
		t.Errorf("%d gaps are marked, want one of each knot", marks)
	}
}

func TestDemoFolder(t *testing.T) {
	b := runDemo(t)
	b.write("new/notes", "mine")
	masks := b.read("new/masks.gds")
	b.want(2, b.run("demo", "@new"), "holds something already", "--force")
	b.write("new/masks.gds", "old")
	b.want(0, b.run("demo", "--force", "@new"))
	if b.read("new/masks.gds") != masks || b.read("new/notes") != "mine" {
		t.Errorf("--force must replace the files of the demo, and no others")
	}
}

// The command that the demo recommends gives the same bytes, and with apply = true in the deck, one cut in each knot.
func TestDemoByHand(t *testing.T) {
	b := runDemo(t)
	args := []string{"decompose", "@new/layout.gds", "--deck", "@new/deck.toml", "--anchors", "@new/anchors.toml", "--output"}
	b.want(1, b.run(append(args, "@again.gds")...))
	if b.read("again.gds") != b.read("new/masks.gds") {
		t.Errorf("the output differs from that of the demo")
	}
	b.write("new/deck.toml", strings.Replace(demoDeck, "apply = false", "apply = true", 1))
	b.want(0, b.run(append(args, "@mended.gds", "--report", "@mended.json")...), "fits on two masks")
	var r struct{ Layers []struct{ Stitches int } }
	if err := json.Unmarshal([]byte(b.read("mended.json")), &r); err != nil {
		t.Fatal(err)
	}
	if n := r.Layers[0].Stitches; n != 2 {
		t.Errorf("%d stitches, want one in each knot", n)
	}
	b.want(0, b.run("verify", "@mended.gds", "--deck", "@new/deck.toml", "--anchors", "@new/anchors.toml", "--drawn", "@new/layout.gds"), "all holds")
}
