package twin

import (
	"fmt"
	"math/big"
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/gds"
)

// These tests hold the twin itself against figures worked out by hand, and show that its judgement can fail.

var drawn = gds.LayerType{Layer: 19}

func oneLayer(spacing int64) *Deck {
	return &Deck{Layers: []Layer{{Name: "m", Drawn: []gds.LayerType{drawn}, Masks: [2]gds.LayerType{{Layer: 19, Type: 1}, {Layer: 19, Type: 2}}, Spacing: spacing}}}
}

func polygon(xy ...int32) Element {
	e := Element{Kind: Boundary, Layer: drawn}
	for i := 0; i < len(xy); i += 2 {
		e.Points = append(e.Points, gds.Point{X: xy[i], Y: xy[i+1]})
	}
	return e
}

func rect(x1, y1, x2, y2 int32) Element { return polygon(x1, y1, x2, y1, x2, y2, x1, y2) }

func path(width int32, kind int16, xy ...int32) Element {
	e := polygon(xy...)
	e.Kind, e.Style = Path, gds.PathStyle{Width: width, Type: kind}
	return e
}

func flat(elements ...Element) *Layout {
	return &Layout{Cells: []Cell{{Name: "top", Elements: elements}}}
}

// TestSolve has layouts with their numbers, counted by hand.
func TestSolve(t *testing.T) {
	for _, c := range []struct {
		name                                    string
		layout                                  *Layout
		spacing                                 int64
		figures, shapes, pairs, components, odd int
		least                                   int
		area                                    string // merged, of all
	}{
		{"a gap of exactly the spacing is far enough", flat(rect(0, 0, 10, 10), rect(15, 0, 20, 10)), 5, 2, 2, 0, 2, 0, 0, "150"},
		{"one unit less is near", flat(rect(0, 0, 10, 10), rect(14, 0, 20, 10)), 5, 2, 2, 1, 1, 0, 0, "160"},
		{"corner to corner 3, 4 is 5 apart", flat(rect(0, 0, 10, 10), rect(13, 14, 20, 20)), 5, 2, 2, 0, 2, 0, 0, "142"},
		{"corner to corner 3, 3 is nearer", flat(rect(0, 0, 10, 10), rect(13, 13, 20, 20)), 5, 2, 2, 1, 1, 0, 0, "149"},
		{"a shared corner makes one shape", flat(rect(0, 0, 10, 10), rect(10, 10, 20, 20)), 5, 2, 1, 0, 1, 0, 0, "200"},
		{"overlaps count once", flat(rect(0, 0, 10, 10), rect(5, 5, 15, 15)), 5, 2, 1, 0, 1, 0, 0, "175"},
		{"three mutually near: one pair stays", flat(rect(0, 0, 4, 4), rect(6, 0, 10, 4), rect(3, 6, 7, 10)), 5, 3, 3, 3, 1, 1, 1, "48"},
		{"four mutually near: two pairs stay", flat(rect(0, 0, 4, 4), rect(6, 0, 10, 4), rect(0, 6, 4, 10), rect(6, 6, 10, 10)), 5, 4, 4, 6, 1, 1, 2, "64"},
		{"inside a hole of a frame", flat(polygon(0, 0, 30, 0, 30, 30, 0, 30, 0, 0, 10, 10, 20, 10, 20, 20, 10, 20, 10, 10), rect(13, 13, 17, 17)), 4, 2, 2, 1, 1, 0, 0, "816"},
		{"inside its filled area", flat(polygon(0, 0, 30, 0, 30, 30, 0, 30, 0, 0, 10, 10, 20, 10, 20, 20, 10, 20, 10, 10), rect(2, 2, 4, 4)), 4, 2, 1, 0, 1, 0, 0, "800"},
		{"a line there and back is nothing", flat(polygon(0, 0, 10, 0, 10, 10, 30, 10, 10, 10, 0, 10), rect(25, 0, 30, 9)), 5, 2, 2, 0, 2, 0, 0, "145"},
		{"a figure without area is none", flat(polygon(0, 0, 10, 0, 20, 0), rect(5, 5, 6, 6)), 9, 1, 1, 0, 1, 0, 0, "1"},
		{"twice around covers nothing", flat(polygon(0, 0, 9, 0, 9, 9, 0, 9, 0, 0, 9, 0, 9, 9, 0, 9)), 9, 0, 0, 0, 0, 0, 0, "0"},
		{"a crossed outline is two triangles", flat(polygon(0, 0, 10, 10, 10, 0, 0, 10)), 9, 1, 1, 0, 1, 0, 0, "50"},
		{"a slanted edge: 3, 4, 5", flat(polygon(0, 0, 40, 30, 0, 30), polygon(30, 15, 38, 15, 34, 18)), 3, 2, 2, 0, 2, 0, 0, "612"},
		{"a path of odd width has its sides on halves", flat(path(3, 0, 0, 0, 10, 0), rect(0, 3, 10, 5)), 2, 2, 2, 1, 1, 0, 0, "50"},
		{"its ends reach out by half the width", flat(path(4, 2, 0, 0, 10, 0), rect(13, 0, 14, 1)), 2, 2, 2, 1, 1, 0, 0, "57"},
		{"a path turns with a square corner", flat(path(2, 0, 0, 0, 10, 0, 10, 10)), 2, 1, 1, 0, 1, 0, 0, "40"},
	} {
		s, err := Solve(c.layout.Bytes(), oneLayer(c.spacing))
		if err != nil || s.Open != "" || s.Status != 0 {
			t.Errorf("%s: %v, open %q, status %d", c.name, err, s.Open, s.Status)
			continue
		}
		l := &s.Layers[0]
		masks := make([]Mask, len(l.Shapes)) // all on A
		got := fmt.Sprint(l.Drawn, len(l.Shapes), len(l.Pairs), len(l.Components), l.Unresolved, l.Least, " ", l.area(masks, A).RatString())
		if want := fmt.Sprint(c.figures, c.shapes, c.pairs, c.components, c.odd, c.least, " ", c.area); got != want {
			t.Errorf("%s: figures, shapes, pairs, components, unresolved, least, area are %s, want %s", c.name, got, want)
		}
	}
}

// TestDistance holds the search with floats against plain fractions, at both ends of the plane.
func TestDistance(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	near := 0
	for range 2000 {
		base := []int64{0, 1 << 32, -1 << 32}[r.IntN(3)]
		polygon := func() *region {
			var out []grid
			for range 3 + r.IntN(4) {
				out = append(out, grid{base + r.Int64N(60), -base + r.Int64N(60)})
			}
			if r.IntN(4) == 0 {
				out[0].x = -base // very long edges
			}
			return newRegion(out, r.IntN(2) == 0)
		}
		a, b := polygon(), polygon()
		if a == nil || b == nil {
			continue
		}
		const limit = 20
		best := big.NewRat(limit*limit, 1)
		for _, e := range a.parts() {
			for _, f := range b.parts() {
				if d := segmentDistance(e, f); d.Cmp(best) < 0 {
					best = d
				}
			}
		}
		for _, e := range a.parts() {
			if b.contains(e.a) {
				best = new(big.Rat)
			}
		}
		for _, e := range b.parts() {
			if a.contains(e.a) {
				best = new(big.Rat)
			}
		}
		got := distance(a, b, limit)
		if got == nil {
			got = big.NewRat(limit*limit, 1)
		} else if got.Sign() > 0 {
			near++
		}
		if got.Cmp(best) != 0 {
			t.Fatalf("%v and %v: square distance %v, want %v", a.outline, b.outline, got, best)
		}
		if back := distance(b, a, limit); (back == nil) != (distance(a, b, limit) == nil) || back != nil && back.Cmp(got) != 0 {
			t.Fatalf("%v and %v: the distance back is another", a.outline, b.outline)
		}
	}
	if near < 50 {
		t.Errorf("only %d of the pairs are near", near)
	}
}

// TestRandom shows that random layouts are worth their while.
func TestRandom(t *testing.T) {
	var open, refused, unknown, odd, pairs, masked, tops, rounded int
	const n = 400
	for seed := range uint64(n) {
		l, d := Random(rand.New(rand.NewPCG(seed, 3)))
		s, err := Solve(l.Bytes(), d)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		count := func(sum *int, is bool) {
			if is {
				*sum++
			}
		}
		count(&open, s.Open != "")
		count(&refused, s.Status != 0)
		count(&tops, len(l.Tops()) > 1)
		for i := range s.Layers {
			x := &s.Layers[i]
			count(&unknown, x.Least == Unknown)
			count(&odd, x.Least > 0)
			count(&masked, x.Masked > 0)
			count(&rounded, x.Rounded > 0)
			pairs += len(x.Pairs)
		}
	}
	t.Logf("of %d layouts %d are open, %d to be refused, %d have several tops; of their layers %d have unresolved pairs, %d too large components, %d arrive on masks in part, %d are rounded; %d near pairs",
		n, open, refused, tops, odd, unknown, masked, rounded, pairs)
	if open > n/8 || unknown > n/15 || odd < n/6 || masked < n/20 || refused < n/100 || tops < n/10 || rounded < n/20 {
		t.Error("the random layouts are no longer a good mix")
	}
}

// TestCheckFails breaks a right output in many ways; none may pass.
func TestCheckFails(t *testing.T) {
	e := rect(0, 0, 10, 10)
	e.Properties = []Property{{1, "net"}}
	in := &Layout{Cells: []Cell{
		{Name: "leaf", Elements: []Element{e, rect(13, 0, 20, 10), {Kind: Box, Layer: drawn, Points: []gds.Point{{}, {X: 1, Y: 1}}}}},
		{Name: "top", Elements: []Element{
			{Kind: Reference, Text: "leaf", Points: []gds.Point{{}}},
			{Kind: Array, Text: "leaf", Columns: 2, Rows: 1, Points: []gds.Point{{X: 100}, {X: 300}, {X: 100, Y: 9}}},
			polygon(50, 50, 60, 50, 55, 60),
			{Kind: Text, Layer: drawn, Points: []gds.Point{{X: 1}}, Text: "A"},
		}},
	}}
	d := oneLayer(5)
	a, b := d.Layers[0].Masks[0], d.Layers[0].Masks[1]
	right := in.Clone()
	leaf, top := right.Cells[0].Elements, right.Cells[1].Elements
	leaf[0].Layer, leaf[1].Layer, top[2].Layer = a, b, b
	s, err := Solve(in.Bytes(), d)
	if err != nil {
		t.Fatal(err)
	}
	judge := func(out *Layout) error {
		if _, err := s.Check(out.Bytes()); err != nil {
			return err
		}
		return d.Restores(in.Bytes(), out.Bytes())
	}
	if err := judge(right); err != nil {
		t.Fatalf("the right output: %v", err)
	}
	// A variant is right as well.
	variant := right.Clone()
	other := Cell{Name: "leaf$2", Elements: slices.Clone(leaf)}
	other.Elements[0].Layer, other.Elements[1].Layer = b, a
	variant.Cells = slices.Insert(variant.Cells, 1, other)
	variant.Cells[2].Elements[1].Text = "leaf$2"
	if err := judge(variant); err != nil {
		t.Fatalf("an output with a variant: %v", err)
	}
	split := variant.Clone()
	split.Cells[2].Elements = slices.Replace(split.Cells[2].Elements, 1, 2,
		Element{Kind: Reference, Text: "leaf$2", Points: []gds.Point{{X: 100}}}, Element{Kind: Reference, Text: "leaf", Points: []gds.Point{{X: 200}}})
	if err := judge(split); err != nil {
		t.Fatalf("an output with a split array: %v", err)
	}
	for _, c := range []struct {
		name   string
		of     *Layout
		change func(*Layout)
	}{
		{"a figure moved by a unit", right, func(l *Layout) {
			l.Cells[1].Elements[2] = polygon(51, 50, 60, 50, 55, 60)
			l.Cells[1].Elements[2].Layer = b
		}},
		{"a near pair on one mask", right, func(l *Layout) { l.Cells[0].Elements[0].Layer = b }},
		{"a figure left as drawn", right, func(l *Layout) { l.Cells[1].Elements[2].Layer = drawn }},
		{"a figure lost", right, func(l *Layout) { l.Cells[1].Elements = slices.Delete(l.Cells[1].Elements, 2, 3) }},
		{"a figure doubled", right, func(l *Layout) { l.Cells[1].Elements = append(l.Cells[1].Elements, l.Cells[1].Elements[2]) }},
		{"a figure on both masks", right, func(l *Layout) {
			e := l.Cells[1].Elements[2]
			e.Layer = a
			l.Cells[1].Elements = append(l.Cells[1].Elements, e)
		}},
		{"a property gone", right, func(l *Layout) { l.Cells[0].Elements[0].Properties = nil }},
		{"a label gone", right, func(l *Layout) { l.Cells[1].Elements = l.Cells[1].Elements[:3] }},
		{"a BOX on a mask", right, func(l *Layout) { l.Cells[0].Elements[2].Layer = a }},
		{"elements in another order", right, func(l *Layout) { slices.Reverse(l.Cells[0].Elements) }},
		{"structures in another order", right, func(l *Layout) { slices.Reverse(l.Cells) }},
		{"a reference moved", right, func(l *Layout) { l.Cells[1].Elements[0].Points = []gds.Point{{X: 1}} }},
		{"an array one column short", right, func(l *Layout) { l.Cells[1].Elements[1].Columns = 1 }},
		{"a variant without its BOX", variant, func(l *Layout) { l.Cells[1].Elements = l.Cells[1].Elements[:2] }},
		{"a variant with a wrong number", variant, func(l *Layout) { l.Cells[1].Name, l.Cells[2].Elements[1].Text = "leaf$3", "leaf$3" }},
		{"a variant not behind its original", variant, func(l *Layout) { l.Cells[1], l.Cells[2] = l.Cells[2], l.Cells[1] }},
		{"a split array with an element twice", split, func(l *Layout) { l.Cells[2].Elements[2].Points = []gds.Point{{X: 100}} }},
		{"a rectangle from another corner", right, func(l *Layout) {
			l.Cells[0].Elements[1] = polygon(20, 0, 20, 10, 13, 10, 13, 0)
			l.Cells[0].Elements[1].Layer = b
		}},
		{"another top", right, func(l *Layout) { l.Cells = append(l.Cells, Cell{Name: "more"}) }},
	} {
		broken := c.of.Clone()
		c.change(broken)
		if judge(broken) == nil {
			t.Errorf("%s passes", c.name)
		}
	}
}

// TestRead writes and reads back. Boxes are written as two corners and read as a closed line, properties as part of the rest.
func TestRead(t *testing.T) {
	for seed := range uint64(100) {
		r := rand.New(rand.NewPCG(seed, 4))
		taste := RandomTaste(r)
		taste.Other, taste.Properties = 0, 0
		l, _ := taste.Layout(r)
		back, err := Read(l.Bytes())
		if err != nil {
			t.Fatal(err)
		}
		if got, want := back.String(), l.String(); got != want {
			t.Fatalf("seed %d: read back as\n%s\nwant\n%s", seed, got, want)
		}
	}
}
