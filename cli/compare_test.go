package cli_test

import (
	"encoding/json"
	"math/rand/v2"
	"os"
	"slices"
	"strings"
	"testing"

	"maskpair/testdata/orders"
)

// pairOf makes two results of a small layout, the second after an edit; nil where they cannot be compared (a top is new or gone, or an
// input must be refused).
func pairOf(t *testing.T, f folder, r *rand.Rand) (s *orders.Sketch, in, earlier, later []byte) {
	t.Helper()
	s = orders.RandomSketch(r)
	decompose := func(stream []byte) []byte {
		f.write("in.gds", stream)
		f.write("deck.toml", []byte(orders.SketchDeck(false)))
		f.write("anchors.toml", nil)
		status, out, _ := f.layout(nil)
		if status > 1 {
			return nil
		}
		return out
	}
	before := s.Bytes()
	earlier = decompose(before)
	s = s.Edit(r)
	in = s.Bytes()
	a, err := orders.Tops(before)
	if err != nil {
		t.Fatal(err)
	}
	b, err := orders.Tops(in)
	if err != nil {
		t.Fatal(err)
	}
	if later = decompose(in); earlier == nil || later == nil || !slices.Equal(a, b) {
		return s, nil, nil, nil
	}
	return s, in, earlier, later
}

// TestCompare holds the command against a comparison square by square.
func TestCompare(t *testing.T) {
	f := quickFolder(t)
	done := 0
	for seed := range layouts(600) {
		r := rand.New(rand.NewPCG(seed, 12))
		s, _, earlier, later := pairOf(t, f, r)
		if earlier == nil {
			continue
		}
		want, err := orders.CompareSlow(earlier, later)
		if err != nil {
			t.Fatal(err)
		}
		f.write("earlier.gds", earlier)
		f.write("later.gds", later)
		status, said := f.run("compare", "@earlier.gds", "@later.gds", "--deck", "@deck.toml", "--report", "@compare.json")
		var got struct {
			Same   bool
			Layers []struct {
				Earlier    int `json:"earlier_shapes"`
				Later      int `json:"later_shapes"`
				Same       int `json:"same_shapes"`
				OnOther    int `json:"moved_shapes"`
				Moved      int
				Restitched int
				Reshaped   int
				New        int
				Gone       int
				Changes    []struct{ Kind, Top, Cell, Was, Now string }
				Cells      []map[string]any
			}
		}
		if status > 1 {
			t.Fatalf("seed %d: status %d: %s", seed, status, said)
		}
		if err := json.Unmarshal(f.read("compare.json"), &got); err != nil {
			t.Fatal(err)
		}
		os.Remove(f.path("compare.json"))
		same := true
		for i, w := range want {
			g := &got.Layers[i]
			same = same && w.Same == w.Later && w.Gone == 0
			if have := (orders.SlowComparison{Earlier: g.Earlier, Later: g.Later, Same: g.Same, Moved: g.Moved, Restitched: g.Restitched, Reshaped: g.Reshaped,
				New: g.New, Gone: g.Gone, OnOther: g.OnOther}); have != w {
				t.Errorf("seed %d, layer %d: %+v, want %+v\n%v", seed, i, have, w, s)
			}
			if len(g.Changes) != g.Moved+g.Restitched+g.Reshaped+g.New+g.Gone {
				t.Errorf("seed %d, layer %d: a list of %d changes beside %+v", seed, i, len(g.Changes), g)
			}
			for _, c := range g.Changes {
				if c.Top == "" || c.Cell == "" || (c.Was == "") != (c.Kind == "new") || (c.Now == "") != (c.Kind == "gone") {
					t.Errorf("seed %d, layer %d: change %+v", seed, i, c)
				}
			}
		}
		if got.Same != same || (status == 0) != same {
			t.Errorf("seed %d: same %v, status %d, want %v", seed, got.Same, status, same)
		}
		done++
		if t.Failed() {
			t.Fatal("and so on")
		}
	}
	if t.Logf("%d pairs", done); done < int(layouts(600))/4 {
		t.Errorf("only %d pairs could be compared", done)
	}
}

// TestFreeze holds frozen masks against the baseline square by square.
func TestFreeze(t *testing.T) {
	f := quickFolder(t)
	done, broken := 0, 0
	for seed := range layouts(600) {
		r := rand.New(rand.NewPCG(seed, 13))
		s, in, earlier, _ := pairOf(t, f, r)
		if earlier == nil {
			continue
		}
		slow, err := orders.SolveSlow(in, nil, earlier, false)
		if err != nil {
			t.Fatal(err)
		}
		if slow.Open != "" || slow.Status != 0 {
			continue
		}
		choice := r.IntN(3)
		frozen := [3][2]bool{{true, false}, {false, true}, {true, true}}[choice]
		f.write("in.gds", in)
		status, out, said := f.layout(earlier, "--freeze", [3]string{"A", "B", "both"}[choice], "--report", "@report.json")
		if status == 2 && strings.Contains(said, "frozen") && strings.Contains(said, "contradict") {
			continue // a marker, a label or a figure that arrives on a mask wants what is made otherwise
		}
		if status > 1 {
			t.Fatalf("seed %d: status %d: %s\n%v", seed, status, said, s)
		}
		want, err := slow.FrozenSlow(out, earlier, frozen)
		if err != nil {
			t.Fatalf("seed %d: %v\n%v", seed, err, s)
		}
		var got struct {
			Layers []struct {
				Pairs  int `json:"unresolved_pairs"`
				Moved  int `json:"moved_shapes"`
				Frozen []struct {
					Kind, Mask, Edit string
					Area             float64 `json:"area_dbu2"`
				}
			}
		}
		if err := json.Unmarshal(f.read("report.json"), &got); err != nil {
			t.Fatal(err)
		}
		os.Remove(f.path("report.json"))
		faults, pairs := 0, 0
		for i, w := range want {
			g := &got.Layers[i]
			have := orders.SlowFrozen{}
			for _, fault := range g.Frozen {
				faults++
				m := 0
				if fault.Mask == "B" {
					m = 1
				}
				switch fault.Kind {
				case "lost":
					have.Lost[m] += int(fault.Area)
				case "gained":
					have.Gained[m] += int(fault.Area)
				case "new":
					have.New++
				case "pair":
				default:
					t.Errorf("seed %d: a fault of kind %q", seed, fault.Kind)
				}
				if fault.Edit == "" {
					t.Errorf("seed %d: a fault without an edit: %+v", seed, fault)
				}
			}
			if have != w {
				t.Errorf("seed %d, layer %d, frozen %v: %+v, want %+v\n%v\n%s", seed, i, frozen, have, w, s, said)
			}
			pairs += g.Pairs
		}
		if (status == 1) != (faults+pairs > 0) {
			t.Errorf("seed %d: status %d with %d faults and %d pairs", seed, status, faults, pairs)
		}
		if faults > 0 {
			broken++
		}
		done++
		if t.Failed() {
			t.Fatal("and so on")
		}
	}
	if t.Logf("%d layouts, %d with faults", done, broken); done < int(layouts(600))/4 {
		t.Errorf("only %d layouts could be frozen", done)
	}
}

// TestCompareRefuses gives the command what it cannot compare.
func TestCompareRefuses(t *testing.T) {
	f := newFolder(t)
	f.write("deck.toml", []byte(orders.SketchDeck(false)))
	f.write("a.gds", orders.RandomSketch(rand.New(rand.NewPCG(1, 1))).Bytes())
	other := orders.RandomSketch(rand.New(rand.NewPCG(2, 2)))
	for i := range other.Cells {
		other.Cells[i].Name += "_other"
		for k := range other.Cells[i].Refs {
			other.Cells[i].Refs[k].To += "_other"
		}
	}
	other.Cells = append(other.Cells, orders.SketchCell{Name: "alone"})
	f.write("b.gds", other.Bytes())
	for _, c := range []struct {
		args   string
		status int
		says   string
	}{
		{"compare", 2, "two layouts are needed"},
		{"compare @a.gds", 2, "two layouts are needed"},
		{"compare @a.gds @a.gds @a.gds --deck @deck.toml", 2, "one layout too many"},
		{"compare @a.gds @a.gds", 2, "--deck"},
		{"compare - - --deck @deck.toml", 2, "standard input"},
		{"compare @a.gds @none.gds --deck @deck.toml", 3, "none.gds"},
		{"compare @a.gds @b.gds --deck @deck.toml", 2, "give an earlier result of the same layout"},
		{"compare @a.gds @a.gds --deck @deck.toml --jobs 0", 2, "--jobs"},
		{"compare @a.gds @a.gds --deck @deck.toml --report @deck.toml", 2, "deck.toml"},
	} {
		status, said := f.run(strings.Fields(c.args)...)
		if status != c.status || !strings.Contains(said, c.says) {
			t.Errorf("%s: status %d, want %d with %q; it said: %s", c.args, status, c.status, c.says, said)
		}
	}
	if status, said := f.run("compare", "@a.gds", "@a.gds", "--deck", "@deck.toml"); status != 0 || !strings.Contains(said, "the same shapes on the same masks") {
		t.Errorf("a layout and itself: status %d: %s", status, said)
	}
}
