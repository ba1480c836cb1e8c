package verify

import (
	"testing"

	"maskpair/gds"
)

// These tests hold a masked stream against a drawn one, both written by hand.

// pairOf writes a layout twice: as drawn, and as it comes out. The function gets a layer to put figures on: the drawn one, or
// the mask that it names.
func pairOf(t *testing.T, write func(w *gds.Writer, masked bool, on func(mask gds.LayerType) gds.LayerType)) (drawn, masked []byte) {
	for _, m := range []bool{false, true} {
		b := stream(t, func(w *gds.Writer) {
			write(w, m, func(mask gds.LayerType) gds.LayerType {
				if m {
					return mask
				}
				return drawn19
			})
		})
		if m {
			masked = b
		} else {
			drawn = b
		}
	}
	return drawn, masked
}

// What an output may do to its input, all at once: variants right behind their original, references to them, an array split
// into two of double pitch, records and properties kept, marks at the end of a top.
func TestCompareAllThatIsAllowed(t *testing.T) {
	drawn, masked := pairOf(t, func(w *gds.Writer, masked bool, on func(gds.LayerType) gds.LayerType) {
		unit := func(name string, mask gds.LayerType) {
			w.BeginStructure(name)
			w.Property(1, "first")
			w.Plex(7)
			w.Rectangle(on(mask), rect(0, 0, 20, 20))
			w.Box(gds.LayerType{Layer: 19}, rect(0, 0, 5, 5))
			w.Node(gds.LayerType{Layer: 19}, []gds.Point{{X: 1, Y: 1}})
			w.Text(gds.LayerType{Layer: 19}, gds.Point{X: 1, Y: 1}, "odd")
			w.Boundary(drawn19, []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 9}})
			w.EndStructure()
		}
		unit("unit", maskA19)
		if masked {
			unit("unit$2", maskB19)
		}
		w.BeginStructure("chip")
		w.Path(on(maskA19), gds.PathStyle{Type: 4, Width: 21, Begin: 3, Finish: -2}, []gds.Point{{X: 0, Y: 1000}, {X: 400, Y: 1000}, {X: 400, Y: 1300}})
		w.Boundary(on(maskB19), []gds.Point{{X: 0, Y: 950}, {X: 400, Y: 950}, {X: 390, Y: 970}})
		w.Boundary(gds.LayerType{Layer: 7, Type: 65535}, []gds.Point{{X: 0, Y: 0}, {X: 3, Y: 0}, {X: 3, Y: 3}})
		w.SRef("unit", gds.Strans{}, gds.Point{})
		w.Property(2, "second")
		if masked {
			w.SRef("unit$2", gds.Strans{Angle: 90}, gds.Point{X: 60})
		} else {
			w.SRef("unit", gds.Strans{Angle: 90}, gds.Point{X: 60})
		}
		w.SRef("elsewhere", gds.Strans{}, gds.Point{})
		w.Property(3, "third")
		if masked {
			w.ARef("unit", gds.Strans{Mirror: true}, 3, 2, gds.Point{Y: 300}, gds.Point{X: 240, Y: 300}, gds.Point{Y: 500})
			w.Property(3, "third")
			w.ARef("unit$2", gds.Strans{Mirror: true}, 2, 2, gds.Point{X: 40, Y: 300}, gds.Point{X: 200, Y: 300}, gds.Point{X: 40, Y: 500})
		} else {
			w.ARef("unit", gds.Strans{Mirror: true}, 5, 2, gds.Point{Y: 300}, gds.Point{X: 200, Y: 300}, gds.Point{Y: 500})
		}
		w.Rectangle(maskB19, rect(600, 0, 620, 20))
		if masked {
			w.Rectangle(gds.LayerType{Layer: 230}, rect(0, 0, 1, 1))
			w.Rectangle(gds.LayerType{Layer: 230, Type: 1}, rect(0, 0, 1, 1))
		}
		w.EndStructure()
	})
	const deck = deckHead + "[marks]\nunresolved = \"230/0\"\ncycle = \"230/1\"\n"
	res, err := judgeStreams(t, deck, "", masked, drawn)
	expect(t, "all that is allowed", res, err, nil)
	if err == nil && !res.Compared {
		t.Error("the result does not say that it was compared")
	}
	res, err = judgeStreams(t, deckHead, "", masked, drawn)
	expect(t, "marks that the deck does not name", res, err, map[Kind]int64{Elements: 1})
}

// Orders that are known only with the drawn layout at hand: what arrived on a mask stays there, and so does what touches it.
func TestCompareAlreadyMasked(t *testing.T) {
	drawn, masked := pairOf(t, func(w *gds.Writer, masked bool, on func(gds.LayerType) gds.LayerType) {
		w.BeginStructure("chip")
		w.Rectangle(maskB19, rect(0, 0, 20, 20))
		w.Rectangle(on(maskB19), rect(20, 0, 40, 20))
		w.EndStructure()
	})
	res, err := judgeStreams(t, deckHead, "", masked, drawn)
	expect(t, "stays", res, err, nil)
	if err == nil && res.Layers[0].Anchored != 1 {
		t.Errorf("%d shapes are anchored, want 1", res.Layers[0].Anchored)
	}
	moved := chip(t, func(w *gds.Writer) {
		w.Rectangle(maskA19, rect(0, 0, 20, 20))
		w.Rectangle(maskA19, rect(20, 0, 40, 20))
	})
	res, err = judgeStreams(t, deckHead, "", moved, drawn)
	expect(t, "moved", res, err, map[Kind]int64{SameArea: 1, Elements: 1})
	res, err = judgeStreams(t, deckHead+"already_masked = \"redo\"\n", "", moved, drawn)
	expect(t, "redo", res, err, nil)
	const anchor = "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [30, 10]\n"
	if _, err = judgeStreams(t, deckHead, anchor, masked, drawn); err == nil {
		t.Error("an anchor against a figure that arrived on the other mask is no error")
	}
}

// Pieces of a figure that was cut, at any angle elsewhere: they must cover it, no more and no less.
func TestComparePieces(t *testing.T) {
	const deck = deckHead + "[layer.stitch]\nmin_overlap = 10\napply = true\n"
	// A wire with a slanted end, cut where it is straight. The overlap touches no slanted edge, but a figure with one: that
	// no stitch is cut there is the rule, whether the pieces add up is what is looked at here.
	wire := []gds.Point{{X: 0, Y: 0}, {X: 200, Y: 0}, {X: 230, Y: 20}, {X: 0, Y: 20}}
	drawn := chip(t, func(w *gds.Writer) {
		w.Property(1, "net")
		w.Boundary(drawn19, wire)
	})
	cut := func(second []gds.Point, properties bool) []byte {
		return chip(t, func(w *gds.Writer) {
			w.Property(1, "net")
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			if properties {
				w.Property(1, "net")
			}
			w.Boundary(maskB19, second)
		})
	}
	right := []gds.Point{{X: 95, Y: 0}, {X: 200, Y: 0}, {X: 230, Y: 20}, {X: 95, Y: 20}}
	res, err := judgeStreams(t, deck, "", cut(right, true), drawn)
	expect(t, "right", res, err, map[Kind]int64{Stitches: 1})
	res, err = judgeStreams(t, deck, "", cut([]gds.Point{{X: 95, Y: 0}, {X: 199, Y: 0}, {X: 230, Y: 20}, {X: 95, Y: 20}}, true), drawn)
	expect(t, "a unit short", res, err, map[Kind]int64{Stitches: 1, SameArea: 1, Elements: 1})
	res, err = judgeStreams(t, deck, "", cut([]gds.Point{{X: 95, Y: 0}, {X: 201, Y: 0}, {X: 230, Y: 20}, {X: 95, Y: 20}}, true), drawn)
	expect(t, "a unit more", res, err, map[Kind]int64{Stitches: 1, SameArea: 1, Elements: 1})
	res, err = judgeStreams(t, deck, "", cut(right, false), drawn)
	expect(t, "a property lost", res, err, map[Kind]int64{Stitches: 1, Elements: 1})
}

// Earlier marks: with replace they are gone from the output.
func TestCompareMarks(t *testing.T) {
	mark := gds.LayerType{Layer: 230}
	write := func(figure gds.LayerType, marks ...gds.Rect) []byte {
		return chip(t, func(w *gds.Writer) {
			w.Rectangle(figure, rect(0, 0, 20, 20))
			for _, m := range marks {
				w.Rectangle(mark, m)
			}
		})
	}
	const deck = deckHead + "[marks]\nunresolved = \"230/0\"\nreplace = true\n"
	drawn := write(drawn19, rect(0, 0, 1, 1), rect(0, 0, 2, 2))
	res, err := judgeStreams(t, deck, "", write(maskA19), drawn)
	expect(t, "dropped", res, err, nil)
	res, err = judgeStreams(t, deck, "", write(maskA19, rect(0, 0, 3, 3)), drawn)
	expect(t, "new ones", res, err, nil)
	between := chip(t, func(w *gds.Writer) {
		w.Rectangle(mark, rect(0, 0, 1, 1))
		w.Rectangle(maskA19, rect(0, 0, 20, 20))
	})
	res, err = judgeStreams(t, deck, "", between, write(drawn19))
	expect(t, "before other elements", res, err, map[Kind]int64{Marks: 1})
	path := chip(t, func(w *gds.Writer) {
		w.Rectangle(maskA19, rect(0, 0, 20, 20))
		w.Path(mark, gds.PathStyle{Width: 2}, []gds.Point{{X: 0, Y: 0}, {X: 9, Y: 0}})
	})
	res, err = judgeStreams(t, deck, "", path, write(drawn19))
	expect(t, "a path", res, err, map[Kind]int64{Marks: 1})
	inCell := func(layer gds.LayerType, marked bool) []byte {
		return stream(t, func(w *gds.Writer) {
			w.BeginStructure("unit")
			w.Rectangle(layer, rect(0, 0, 20, 20))
			if marked {
				w.Rectangle(mark, rect(0, 0, 1, 1))
			}
			w.EndStructure()
			w.BeginStructure("chip")
			w.SRef("unit", gds.Strans{}, gds.Point{})
			w.EndStructure()
		})
	}
	res, err = judgeStreams(t, deck, "", inCell(maskA19, true), inCell(drawn19, false))
	expect(t, "in a cell", res, err, map[Kind]int64{Marks: 1})
	// Such marks in a cell that has nothing on masks must go as well.
	res, err = judgeStreams(t, deck, "", inCell(gds.LayerType{Layer: 3}, true), inCell(gds.LayerType{Layer: 3}, true))
	expect(t, "left in a cell", res, err, map[Kind]int64{Marks: 1})
}

// Names and order of variants.
func TestCompareVariants(t *testing.T) {
	write := func(names []string, layers []gds.LayerType, refs ...string) []byte {
		return stream(t, func(w *gds.Writer) {
			for i, name := range names {
				w.BeginStructure(name)
				w.Rectangle(layers[i], rect(0, 0, 20, 20))
				w.EndStructure()
			}
			w.BeginStructure("chip")
			for i, r := range refs {
				w.SRef(r, gds.Strans{}, gds.Point{X: int32(40 * i)})
			}
			w.EndStructure()
		})
	}
	both := []gds.LayerType{drawn19, drawn19}
	drawn := write([]string{"u"}, both, "u", "u", "u")
	ab := []gds.LayerType{maskA19, maskB19}
	for _, c := range []struct {
		name  string
		names []string
		refs  []string
		want  map[Kind]int64
	}{
		{"right", []string{"u", "u$2"}, []string{"u", "u$2", "u"}, nil},
		{"not the first free number", []string{"u", "u$3"}, []string{"u", "u$3", "u"}, map[Kind]int64{Structures: 1}},
		{"a number that starts with 0", []string{"u", "u$02"}, []string{"u", "u$02", "u"}, map[Kind]int64{Structures: 1, References: 1}},
		{"before its original", []string{"u$2", "u"}, []string{"u", "u$2", "u"}, map[Kind]int64{Structures: 1}},
		{"another name", []string{"u", "v"}, []string{"u", "v", "u"}, map[Kind]int64{Structures: 1, References: 1}},
		{"a variant that nothing places", []string{"u", "u$2"}, []string{"u", "u", "u"}, map[Kind]int64{Structures: 1, SameMask: 2, SameArea: 1}},
		{"an original that nothing places", []string{"u", "u$2"}, []string{"u$2", "u$2", "u$2"}, map[Kind]int64{Structures: 1, SameMask: 2, SameArea: 1}},
	} {
		res, err := judgeStreams(t, deckHead, "", write(c.names, ab, c.refs...), drawn)
		expect(t, c.name, res, err, c.want)
	}
	// (What nothing places is a top of its own, and nothing was drawn there.)
	// u$2 is a structure of the input: the variant of u is u$3, that of u$2 is u$2$2.
	drawn = write([]string{"u", "u$2"}, both, "u", "u", "u$2", "u$2")
	masked := func(third string) []byte {
		return write([]string{"u", third, "u$2", "u$2$2"}, []gds.LayerType{maskA19, maskB19, maskA19, maskB19}, "u", third, "u$2", "u$2$2")
	}
	res, err := judgeStreams(t, deckHead, "", masked("u$3"), drawn)
	expect(t, "taken numbers", res, err, nil)
	res, err = judgeStreams(t, deckHead, "", masked("u$4"), drawn)
	expect(t, "taken numbers, one too far", res, err, map[Kind]int64{Structures: 1})
	// A reference to u$2, which is not there, keeps the name from being free.
	write2 := func(variant string, layers ...gds.LayerType) []byte {
		names := []string{"u"}
		if len(layers) > 1 {
			names = append(names, variant)
		}
		return write(names, layers, "u", variant, "u", "u$2")
	}
	res, err = judgeStreams(t, deckHead, "", write2("u$3", ab...), write2("u", drawn19))
	expect(t, "a missing name", res, err, nil)
	res, err = judgeStreams(t, deckHead, "", write2("u$2", ab...), write2("u", drawn19))
	if err == nil && res.OK() {
		t.Error("a variant under the name of a missing structure passes")
	}
}
