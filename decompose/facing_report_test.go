package decompose

import (
	"bytes"
	"slices"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"maskpair/gds"
)

// halves gives a point and an edge in half units, as results have them.
func at2(x, y int64) Spot              { return Spot{2 * x, 2 * y} }
func edge2(x1, y1, x2, y2 int64) Edge  { return Edge{at2(x1, y1), at2(x2, y2)} }
func box2(x1, y1, x2, y2 int64) Box    { return Box{2 * x1, 2 * y1, 2 * x2, 2 * y2} }
func onlyLayer(r *Result) *LayerResult { return &r.Layers[0] }
func ignoreMasks() cmp.Option          { return cmpopts.IgnoreFields(Pair{}, "Mask", "MaskB") }

// A ring of three wires: two level ones in line, tip against tip 40 apart, and a long one 30 above both. Sides keep 36, tips 44: so all
// three gaps are too small, and one must stay. By plain distance 40 would be far enough and there would be no ring.
//
//	   0         100  140        240
//	50 +-------------------------+ 50-60: the long wire
//	20 +---------+     +---------+ 0-20
//	 0 +---------+     +---------+
func TestTheRuleOfAPairIsTold(t *testing.T) {
	stream := drawnRects(t, whole(0, 0, 100, 20), whole(140, 0, 240, 20), whole(0, 50, 240, 60))
	if res, _ := decomposed(t, stream, facingDeck(36, ""), Options{Jobs: 1}); onlyLayer(res).NearPairs != 2 || onlyLayer(res).UnresolvedPairs != 0 {
		t.Fatalf("by one spacing of 36: %d near pairs, %d unresolved", onlyLayer(res).NearPairs, onlyLayer(res).UnresolvedPairs)
	}
	res, _ := decomposed(t, stream, facingDeck(36, "[layer.spacing]\ntip_to_side = 40\ntip_to_tip = 44\ntip_width = 20\n"), Options{Jobs: 1})
	l := onlyLayer(res)
	if l.NearPairs != 3 || l.UnresolvedPairs != 1 || len(l.Unresolved) != 1 || !l.ProvedOptimal {
		t.Fatalf("%d near pairs, %d unresolved in %d components", l.NearPairs, l.UnresolvedPairs, len(l.Unresolved))
	}
	tips := Pair{A: box2(0, 0, 100, 20), B: box2(140, 0, 240, 20), DistanceSq: 1600, From: at2(100, 10), To: at2(140, 10), Gap: box2(100, 0, 140, 20),
		Widen: 4, Rule: "tip_to_tip", Spacing: 44, EdgeA: edge2(100, 0, 100, 20), EdgeB: edge2(140, 0, 140, 20), Top: "top"}
	sides := func(a Box, from, to int64) Pair {
		return Pair{A: a, B: box2(0, 50, 240, 60), DistanceSq: 900, From: at2((from+to)/2, 20), To: at2((from+to)/2, 50), Gap: box2(from, 20, to, 50),
			Widen: 6, Rule: "side_to_side", Spacing: 36, EdgeA: edge2(from, 20, to, 20), EdgeB: edge2(0, 50, 240, 50), Top: "top"}
	}
	possible := []Pair{tips, sides(tips.A, 0, 100), sides(tips.B, 140, 240)}
	i := slices.IndexFunc(possible, func(p Pair) bool { return cmp.Equal(p, l.Unresolved[0].Pairs[0], ignoreMasks()) })
	if i < 0 {
		t.Errorf("the pair that stays is none of the three:\n%+v", l.Unresolved[0].Pairs[0])
	}
	// The cheapest gap to widen is that between the tips: 4, against 6.
	if d := cmp.Diff([]Pair{tips}, l.Unresolved[0].Repair, ignoreMasks()); d != "" {
		t.Errorf("the cheapest repair (want, got):\n%s", d)
	}
}

// Figures that were drawn in parts are judged by what they are together: two wires of 200 by 20 in pieces of 20 by 20, side by side at 38.
// Each piece alone would be all tips, and 44 would be asked for.
func TestMergedFiguresMakeNoTips(t *testing.T) {
	var rects []gds.Rect
	for x := int32(0); x < 200; x += 20 {
		rects = append(rects, whole(x, 0, x+20, 20), whole(x+5, 58, x+25, 78))
	}
	rules := "[layer.spacing]\ntip_to_side = 44\ntip_to_tip = 44\ntip_width = 20\n"
	res, _ := decomposed(t, drawnRects(t, rects...), facingDeck(36, rules), Options{Jobs: 2})
	if l := onlyLayer(res); l.Shapes != 2 || l.NearPairs != 0 {
		t.Errorf("%d shapes, %d near pairs; want 2 and 0", l.Shapes, l.NearPairs)
	}
	res, _ = decomposed(t, drawnRects(t, rects[0], rects[1]), facingDeck(36, rules), Options{Jobs: 2})
	if l := onlyLayer(res); l.Shapes != 2 || l.NearPairs != 1 {
		t.Errorf("of each wire the first piece: %d shapes, %d near pairs; want 2 and 1", l.Shapes, l.NearPairs)
	}
}

// The numbers of a published manual: design rule manual of the ASAP7 predictive 7 nm kit, PDK release 1p7, rules for the first metal. Its
// edges are sides above 36 nm and tips up to that; M1.S.1 asks for 18 nm side to side, M1.S.2 for 25 nm tip to side, M1.S.3 for 27 nm
// tip to tip where both are from 24 to 36 nm, M1.S.6 for 20 nm corner to corner. (M1.S.4 and M1.S.5 ask for 31 nm where a tip is
// below 24 nm: a deck of its own here.) In the kit these are rules for all of the metal; here they stand for one mask.
func TestPublishedManual(t *testing.T) {
	manual := "[layer.spacing]\nside_to_side = 18\ntip_to_side = 25\ntip_to_tip = 27\ncorner_to_corner = 20\ntip_width = 36\n"
	narrow := "[layer.spacing]\nside_to_side = 18\ntip_to_side = 25\ntip_to_tip = 31\ncorner_to_corner = 20\ntip_width = 23\n"
	for _, c := range []struct {
		name  string
		rules string
		b     func(gap int32) gds.Rect // beside a wire of 100 by 30 (by 18 with the second deck)
		from  int32                    // the least gap that is enough
	}{
		{"M1.S.1 side to side", manual, func(g int32) gds.Rect { return whole(0, 30+g, 100, 60+g) }, 18},
		{"M1.S.2 tip to side", manual, func(g int32) gds.Rect { return whole(100+g, -50, 140+g, 80) }, 25},
		{"M1.S.2 with an edge of 36", manual, func(g int32) gds.Rect { return whole(32, 30+g, 68, 200+g) }, 25},
		{"M1.S.1 with an edge of 37", manual, func(g int32) gds.Rect { return whole(32, 30+g, 69, 200+g) }, 18},
		{"M1.S.3 tip to tip", manual, func(g int32) gds.Rect { return whole(100+g, 0, 200+g, 24) }, 27},
		{"M1.S.4 narrow tip to tip", narrow, func(g int32) gds.Rect { return whole(100+g, 0, 200+g, 18) }, 31},
		{"M1.S.6 corner to corner, 12 across and 16 up", manual, func(g int32) gds.Rect { return whole(100+g-8, 46, 200, 76) }, 20},
		{"M1.S.6 corner to corner, straight up", manual, func(g int32) gds.Rect { return whole(100, 30+g, 200, 60+g) }, 20},
	} {
		a := whole(0, 0, 100, 30)
		if c.rules == narrow {
			a.Y2 = 18
		}
		for gap, want := range map[int32]int64{c.from - 1: 1, c.from: 0} {
			res, _ := decomposed(t, drawnRects(t, a, c.b(gap)), facingDeck(18, c.rules), Options{Jobs: 1})
			if got := onlyLayer(res).NearPairs; got != want {
				t.Errorf("%s, %d nm: %d near pairs, want %d", c.name, gap, got, want)
			}
		}
	}
}

// Several drawn layers are one: wires on two of them that touch are one shape, and near pairs go across.
func TestSeveralDrawnLayersAsOne(t *testing.T) {
	stream := written(t, func(w *gds.Writer) {
		w.BeginStructure("top")
		w.Rectangle(gds.LayerType{Layer: 19}, whole(0, 0, 50, 20))
		w.Rectangle(gds.LayerType{Layer: 19, Type: 20}, whole(50, 0, 100, 20)) // touches it
		w.Rectangle(gds.LayerType{Layer: 19, Type: 20}, whole(0, 50, 100, 70)) // 30 above both
		w.Rectangle(gds.LayerType{Layer: 19, Type: 21}, whole(0, 25, 100, 45)) // not drawn for this deck
		w.EndStructure()
	})
	deck := "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = [\"19/0\", \"19/20\"]\nmask_a = \"19/1\"\nmask_b = \"19/2\"\nsame_mask_spacing = 36\n" +
		"[layer.spacing]\ntip_to_tip = 50\ntip_width = 20\n"
	res, out := decomposed(t, stream, deck, Options{Jobs: 1})
	if l := onlyLayer(res); l.Figures != 3 || l.Shapes != 2 || l.NearPairs != 1 || l.UnresolvedPairs != 0 {
		t.Errorf("%d figures, %d shapes, %d near pairs, %d unresolved; want 3, 2, 1, 0", l.Figures, l.Shapes, l.NearPairs, l.UnresolvedPairs)
	}
	on := map[gds.LayerType]int{}
	lib, err := gds.Index(bytes.NewReader(out), int64(len(out)), gds.Interest{Figures: map[gds.LayerType]uint8{
		{Layer: 19}: 1, {Layer: 19, Type: 20}: 2, {Layer: 19, Type: 1}: 3, {Layer: 19, Type: 2}: 4, {Layer: 19, Type: 21}: 5}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	for i := range lib.Figures {
		on[[]gds.LayerType{{}, {Layer: 19}, {Layer: 19, Type: 20}, {Layer: 19, Type: 1}, {Layer: 19, Type: 2}, {Layer: 19, Type: 21}}[lib.Figures[i].Class]]++
	}
	a, b := on[gds.LayerType{Layer: 19, Type: 1}], on[gds.LayerType{Layer: 19, Type: 2}]
	if a+b != 3 || a*b != 2 || on[gds.LayerType{Layer: 19, Type: 21}] != 1 {
		t.Errorf("figures by layer: %v; want two on one mask, one on the other, and 19/21 as it was", on)
	}
}

// A pair below any_mask_spacing is counted, listed and marked whatever its masks; by plain distance, and also where no rule by what faces
// what makes the pair near. 3, 4 and 5: the corners (50, 20) and (53, 24).
func TestPairsBelowAnyMaskSpacing(t *testing.T) {
	stream := drawnRects(t, whole(0, 0, 50, 20), whole(53, 24, 103, 44), whole(0, 26, 40, 46), whole(200, 0, 250, 20), whole(200, 30, 250, 50))
	for name, rules := range map[string]string{"one spacing": "", "by what faces what": "[layer.spacing]\ncorner_to_corner = 4\n"} {
		deck := facingDeck(36, "any_mask_spacing = 6\n"+rules) + "[marks]\nany_mask = \"90/4\"\n"
		res, out := decomposed(t, stream, deck, Options{Jobs: 1})
		l := onlyLayer(res)
		want := []Pair{{A: box2(0, 0, 50, 20), B: box2(53, 24, 103, 44), DistanceSq: 25, From: at2(50, 20), To: at2(53, 24), Gap: box2(50, 20, 53, 24),
			Widen: 1, Rule: "any_mask_spacing", Spacing: 6, Top: "top"}}
		if d := cmp.Diff(want, l.AnyMask, ignoreMasks()); d != "" || l.AnyMaskPairs != 1 {
			t.Errorf("%s: %d pairs, listed (want, got):\n%s", name, l.AnyMaskPairs, d)
		}
		lib, err := gds.Index(bytes.NewReader(out), int64(len(out)), gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: 90, Type: 4}: 1}}, nil)
		if err != nil {
			t.Fatal(err)
		}
		if len(lib.Figures) != 1 || lib.Figures[0].Box != whole(50, 20, 53, 24) {
			t.Errorf("%s: marks %v, want the gap alone", name, lib.Figures)
		}
	}
}
