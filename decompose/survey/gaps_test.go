package survey

import (
	"bytes"
	"context"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/gds"
)

// gapsOf surveys and searches a layer.
func gapsOf(t testing.TB, data []byte, layer gds.LayerType, limits Limits) *Gaps {
	t.Helper()
	s := scanned(t, data)
	l := s.Find(layer)
	if l == nil {
		t.Fatalf("nothing on %v", layer)
	}
	free := s.FreeLayers(layer)
	want, err := Want(layer, free)
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(data), int64(len(data)), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	g, err := FindGaps(context.Background(), lib, layer, free, l.Smallest, limits, nil)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// Bars 10 wide at distances of 7, 12 and 7; then a triangle of squares whose sides are 20 apart, twice, and the third 25 from
// either: all counted by hand. With a spacing up to 7 nothing is near; 8 to 12: two pairs; 13 to 20: three; 21 to 25: four (of
// the triangle, one); from 26 on the triangle is odd.
func TestGapsByHand(t *testing.T) {
	square := func(x, y int32) gds.Rect { return gds.Rect{X1: x, Y1: y, X2: x + 10, Y2: y + 10} }
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("bars")
		for _, x := range []int32{0, 17, 39, 56} {
			w.Rectangle(wire, gds.Rect{X1: x, Y1: 0, X2: x + 10, Y2: 300})
		}
		w.EndStructure()
		w.BeginStructure("triangle")
		w.Rectangle(wire, square(0, 0))
		w.Rectangle(wire, square(30, 0))
		w.Rectangle(wire, gds.Rect{X1: 0, Y1: 35, X2: 40, Y2: 45})
		w.EndStructure()
		w.BeginStructure("top")
		w.SRef("bars", gds.Strans{}, gds.Point{})
		w.SRef("triangle", gds.Strans{Angle: 90}, gds.Point{X: 5000})
		w.EndStructure()
	})
	g := gapsOf(t, data, wire, Limits{Jobs: 1, Searches: 60})
	want := []Step{
		{From: 1, To: 7, Components: 7, Largest: 1},
		{From: 8, To: 12, NearPairs: 2, Components: 5, Largest: 2},
		{From: 13, To: 20, NearPairs: 3, Components: 4, Largest: 4},
		{From: 21, To: 25, NearPairs: 4, Components: 3, Largest: 4},
		{From: 26, To: 40, NearPairs: 6, Components: 2, Odd: 1, Largest: 4},
	}
	// The bars one apart are 12+10+7 = 29 from each other, twice.
	want[4].To = 29
	want = append(want, Step{From: 30, To: 40, NearPairs: 8, Components: 2, Odd: 2, Largest: 4})
	if diff := cmp.Diff(want, g.Steps); diff != "" {
		t.Error(diff)
	}
	if len(g.Open) > 0 || g.Limited != "" || g.Figures != 7 || g.Shapes != 7 || g.Looked != 40 {
		t.Errorf("open %v, limited %q, %d figures in %d shapes, looked up to %d", g.Open, g.Limited, g.Figures, g.Shapes, g.Looked)
	}
	kinds := []Gap{{7, 8, 2}, {12, 13, 1}, {20, 21, 1}, {25, 26, 2}, {29, 30, 2}}
	if diff := cmp.Diff(kinds, g.Gaps()); diff != "" {
		t.Error(diff)
	}
}

func TestGapsOfOneShape(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Rectangle(wire, gds.Rect{X2: 10, Y2: 10})
		w.Rectangle(wire, gds.Rect{X1: 10, X2: 20, Y2: 10})
		w.EndStructure()
	})
	g := gapsOf(t, data, wire, Limits{Jobs: 1})
	if len(g.Gaps()) != 0 || g.Shapes != 1 || g.Figures != 2 {
		t.Errorf("gaps %v between %d shapes of %d figures", g.Gaps(), g.Shapes, g.Figures)
	}
}

// Two shapes so far apart that no spacing finds them end the search as well.
func TestGapsFarApart(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("a")
		w.Rectangle(wire, gds.Rect{X2: 10, Y2: 10})
		w.Rectangle(wire, gds.Rect{X1: 1 << 30, X2: 1<<30 + 10, Y2: 10})
		w.EndStructure()
	})
	if g := gapsOf(t, data, wire, Limits{Jobs: 1}); len(g.Gaps()) != 0 || g.Looked < largestSpacing {
		t.Errorf("gaps %v, looked up to %d", g.Gaps(), g.Looked)
	}
}

// A layer where all is near all: the search stops below, and says why.
func TestGapsLimited(t *testing.T) {
	data := stream(t, func(w *gds.Writer) {
		w.BeginStructure("dot")
		w.Rectangle(wire, gds.Rect{X2: 1, Y2: 1})
		w.EndStructure()
		w.BeginStructure("a")
		w.ARef("dot", gds.Strans{}, 60, 60, gds.Point{}, gds.Point{X: 60 * 2}, gds.Point{Y: 60 * 2})
		w.Rectangle(wire, gds.Rect{X1: 500, X2: 1000, Y2: 500}) // makes a large width usual for nobody
		w.EndStructure()
	})
	s := scanned(t, data)
	free := s.FreeLayers(wire)
	want, err := Want(wire, free)
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(data), int64(len(data)), want, nil)
	if err != nil {
		t.Fatal(err)
	}
	g, err := FindGaps(context.Background(), lib, wire, free, 500, Limits{Jobs: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if g.Limited == "" || len(g.Steps) < 2 || g.Steps[0].NearPairs != 0 || g.Steps[0].To != 1 {
		t.Errorf("limited %q, steps %v: dots are 1 apart, so spacing 2 finds pairs", g.Limited, g.Steps)
	}
	// Each of 60 rows has 59 pairs of neighbours one apart, and so has each column; corners are farther than 1.
	if k := g.Gaps(); len(k) == 0 || k[0].From != 1 || (k[0].Below == 2 && k[0].Pairs != 2*60*59+2*59*59) {
		t.Errorf("gaps %v", g.Gaps())
	}
}

func TestFreeLayers(t *testing.T) {
	s := &Survey{Layers: []Layer{{Layer: gds.LayerType{Layer: 4, Type: 65535}}, {Layer: gds.LayerType{Layer: 5}}, {Layer: gds.LayerType{Layer: 5, Type: 2}}, {Layer: gds.LayerType{Layer: 65535, Type: 65535}}}}
	for _, c := range []struct {
		at   gds.LayerType
		want [2]gds.LayerType
	}{
		{gds.LayerType{Layer: 5}, [2]gds.LayerType{{Layer: 5, Type: 1}, {Layer: 5, Type: 3}}},
		{gds.LayerType{Layer: 4, Type: 65535}, [2]gds.LayerType{{Layer: 5, Type: 1}, {Layer: 5, Type: 3}}},
		{gds.LayerType{Layer: 65535, Type: 65535}, [2]gds.LayerType{{Layer: 0, Type: 0}, {Layer: 0, Type: 1}}},
	} {
		if got := s.FreeLayers(c.at); got != c.want {
			t.Errorf("%v: %v, want %v", c.at, got, c.want)
		}
	}
	for i := range s.Layers {
		if s.Find(s.Layers[i].Layer) != &s.Layers[i] {
			t.Errorf("%v is not found", s.Layers[i].Layer)
		}
	}
	if s.Find(gds.LayerType{Layer: 5, Type: 1}) != nil {
		t.Error("found what is not there")
	}
}
