package verify

import (
	"bytes"
	"context"
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose"
	"maskpair/gds"
)

// These tests judge small streams written by hand. What must hold and what not follows from the interface alone: 36 units are
// the spacing, figures are on 19/0, masks on 19/1 and 19/2.

const deckHead = `unit = "nm"
[[layer]]
name = "metal1"
drawn = "19/0"
mask_a = "19/1"
mask_b = "19/2"
same_mask_spacing = 36
`

var (
	drawn19 = gds.LayerType{Layer: 19}
	maskA19 = gds.LayerType{Layer: 19, Type: 1}
	maskB19 = gds.LayerType{Layer: 19, Type: 2}
)

// stream writes a stream.
func stream(t testing.TB, write func(w *gds.Writer)) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	write(w)
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// chip writes a stream of one structure.
func chip(t testing.TB, write func(w *gds.Writer)) []byte {
	t.Helper()
	return stream(t, func(w *gds.Writer) {
		w.BeginStructure("chip")
		write(w)
		w.EndStructure()
	})
}

func rect(x1, y1, x2, y2 int32) gds.Rect { return gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2} }

// judgeStreams verifies; drawn may be nil, anchors empty.
func judgeStreams(t testing.TB, deck, anchors string, masked, drawn []byte) (*Result, error) {
	t.Helper()
	d, err := decompose.ParseDeck("deck.toml", []byte(deck))
	if err != nil {
		t.Fatal(err)
	}
	in := Input{Masked: InMemory("out.gds", masked), Deck: d}
	if drawn != nil {
		in.Drawn = InMemory("in.gds", drawn)
	}
	if anchors != "" {
		in.AnchorsName, in.Anchors = "anchors.toml", []byte(anchors)
	}
	return Verify(context.Background(), in)
}

// faults gives the checks that do not hold.
func faults(res *Result) map[Kind]int64 {
	out := map[Kind]int64{}
	for _, c := range res.Checks {
		if c.Faults > 0 {
			out[c.Kind] += c.Faults
		}
	}
	return out
}

func expect(t *testing.T, name string, res *Result, err error, want map[Kind]int64) {
	t.Helper()
	if err != nil {
		t.Errorf("%s: %v", name, err)
		return
	}
	if want == nil {
		want = map[Kind]int64{}
	}
	if d := cmp.Diff(want, faults(res)); d != "" {
		t.Errorf("%s: faults differ (-want +got):\n%s", name, d)
		for _, c := range res.Checks {
			for _, p := range c.Places {
				t.Logf("%s %s: %+v", name, c.Kind, p)
			}
		}
	}
	if res.OK() != (len(want) == 0) {
		t.Errorf("%s: OK is %v", name, res.OK())
	}
}

// Spacing on masks: distances worked out by hand.
func TestSpacing(t *testing.T) {
	const any18 = deckHead + "any_mask_spacing = 18\n"
	for _, c := range []struct {
		name   string
		deck   string
		figure func(w *gds.Writer)
		want   map[Kind]int64
	}{
		{"exactly the spacing", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(56, 0, 76, 20))
		}, nil},
		{"one unit nearer", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(55, 0, 75, 20))
		}, map[Kind]int64{SameMask: 1}},
		{"one unit nearer on the other mask", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(55, 0, 75, 20))
		}, nil},
		{"corners, 15 and 20 apart: 25", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskB19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(35, 40, 60, 60))
		}, map[Kind]int64{SameMask: 1}},
		{"corners, 21.6 squared and 28.8 squared would be 36; 22 and 29 are more", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskB19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(42, 49, 60, 60))
		}, nil},
		{"nothing shields", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(28, -50, 32, 80))
			w.Rectangle(maskA19, rect(40, 0, 60, 20))
		}, map[Kind]int64{SameMask: 1}},
		{"figures of one shape", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 100, 20))
			w.Rectangle(maskA19, rect(0, 20, 20, 60))
			w.Rectangle(maskA19, rect(40, 20, 60, 60)) // 20 from the last one, but joined by the first
		}, nil},
		{"a pair counts once", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(0, 20, 20, 40))
			w.Rectangle(maskA19, rect(30, 0, 50, 20))
			w.Rectangle(maskA19, rect(30, 20, 50, 40))
		}, map[Kind]int64{SameMask: 1}},
		{"any mask, exactly", any18, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(38, 0, 60, 20))
		}, nil},
		{"any mask, one unit nearer", any18, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(37, 0, 60, 20))
		}, map[Kind]int64{AnyMask: 1}},
		{"any mask and same mask", any18, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(37, 0, 60, 20))
		}, map[Kind]int64{SameMask: 1, AnyMask: 1}},
		{"a slanted edge, 36 from a corner", deckHead, func(w *gds.Writer) {
			// The edge from (60, 0) to (0, 80) is on the line 4x + 3y = 240; the corner (84, 28) is (336+84-240)/5 = 36 from it.
			w.Boundary(maskA19, []gds.Point{{X: 0, Y: 0}, {X: 60, Y: 0}, {X: 0, Y: 80}})
			w.Rectangle(maskA19, rect(84, 28, 100, 100))
			w.Rectangle(maskB19, rect(500, 0, 501, 1))
		}, nil},
		{"a slanted edge, less than 36 from a corner", deckHead, func(w *gds.Writer) {
			w.Boundary(maskA19, []gds.Point{{X: 0, Y: 0}, {X: 60, Y: 0}, {X: 0, Y: 80}})
			w.Rectangle(maskA19, rect(83, 28, 100, 100))
		}, map[Kind]int64{SameMask: 1}},
		{"a path of odd width, 35.5 apart", deckHead, func(w *gds.Writer) {
			w.Path(maskA19, gds.PathStyle{Width: 21}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}}) // up to 10.5
			w.Rectangle(maskA19, rect(0, 46, 100, 60))
		}, map[Kind]int64{SameMask: 1}},
		{"a path of odd width, 36.5 apart", deckHead, func(w *gds.Writer) {
			w.Path(maskA19, gds.PathStyle{Width: 21}, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}})
			w.Rectangle(maskA19, rect(0, 47, 100, 60))
		}, nil},
		{"in a hole", deckHead, func(w *gds.Writer) {
			w.Boundary(maskA19, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}, {X: 100, Y: 100}, {X: 0, Y: 100}, {X: 0, Y: 0},
				{X: 10, Y: 10}, {X: 10, Y: 90}, {X: 90, Y: 90}, {X: 90, Y: 10}, {X: 10, Y: 10}})
			w.Rectangle(maskA19, rect(45, 45, 55, 55)) // 35 from the rim of the hole
		}, map[Kind]int64{SameMask: 1}},
		{"at the ends of the plane", deckHead, func(w *gds.Writer) {
			const far = 1<<31 - 1
			w.Rectangle(maskA19, rect(-far-1, -far-1, -far+19, -far+19))
			w.Rectangle(maskA19, rect(far-20, far-20, far, far))
			w.Rectangle(maskA19, rect(far-75, far-20, far-55, far))
		}, map[Kind]int64{SameMask: 1}},
		{"left on the drawn layer", deckHead, func(w *gds.Writer) {
			w.Rectangle(drawn19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(100, 0, 120, 20))
		}, map[Kind]int64{OnMasks: 1, DrawnLayer: 1}},
		{"left in part", deckHead, func(w *gds.Writer) {
			w.Rectangle(drawn19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(20, 0, 40, 20))
		}, map[Kind]int64{OnMasks: 1, DrawnLayer: 1}},
		{"without area on the drawn layer", deckHead, func(w *gds.Writer) {
			w.Boundary(drawn19, []gds.Point{{X: 0, Y: 0}, {X: 20, Y: 0}, {X: 0, Y: 0}})
			w.Path(drawn19, gds.PathStyle{Width: 0}, []gds.Point{{X: 0, Y: 0}, {X: 20, Y: 0}})
			w.Box(drawn19, rect(0, 0, 10, 10))
		}, nil},
		{"one shape on both masks", deckHead, func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(maskB19, rect(20, 20, 40, 40)) // a shared corner
		}, map[Kind]int64{OnMasks: 1}},
		{"keep_drawn", deckHead + "keep_drawn = true\n", func(w *gds.Writer) {
			w.Rectangle(drawn19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.Rectangle(drawn19, rect(40, 0, 60, 20))
			w.Rectangle(maskB19, rect(40, 0, 60, 20))
		}, nil},
		{"keep_drawn, not on a mask", deckHead + "keep_drawn = true\n", func(w *gds.Writer) {
			w.Rectangle(drawn19, rect(0, 0, 20, 20))
			w.Rectangle(maskA19, rect(0, 0, 20, 19))
		}, map[Kind]int64{DrawnLayer: 1}},
	} {
		res, err := judgeStreams(t, c.deck, "", chip(t, c.figure), nil)
		expect(t, c.name, res, err, c.want)
	}
}

// Placements: the same pair in every orientation, magnified, turned by an odd angle, over tops.
func TestSpacingUnderPlacements(t *testing.T) {
	pairAt := func(gap int32, place func(w *gds.Writer)) []byte {
		return stream(t, func(w *gds.Writer) {
			w.BeginStructure("pair")
			w.Rectangle(maskA19, rect(0, 0, 20, 40))
			w.Rectangle(maskA19, rect(20+gap, 10, 40+gap, 30))
			w.EndStructure()
			w.BeginStructure("chip")
			place(w)
			w.EndStructure()
		})
	}
	for _, mirror := range []bool{false, true} {
		for _, angle := range []float64{0, 90, 180, 270} {
			place := func(w *gds.Writer) {
				w.SRef("pair", gds.Strans{Mirror: mirror, Angle: angle}, gds.Point{X: 1000, Y: -77})
			}
			res, err := judgeStreams(t, deckHead, "", pairAt(36, place), nil)
			expect(t, "turned, 36", res, err, nil)
			res, err = judgeStreams(t, deckHead, "", pairAt(35, place), nil)
			expect(t, "turned, 35", res, err, map[Kind]int64{SameMask: 1})
		}
	}
	for _, c := range []struct {
		name  string
		gap   int32
		place func(w *gds.Writer)
		want  map[Kind]int64
	}{
		{"magnified twice, 18", 18, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Magnification: 2}, gds.Point{}) }, nil},
		{"magnified twice, 17", 17, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Magnification: 2}, gds.Point{}) }, map[Kind]int64{SameMask: 1}},
		{"magnified by 1.5, 24", 24, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Magnification: 1.5}, gds.Point{}) }, nil},
		{"magnified by 1.5, 22: 33", 22, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Magnification: 1.5}, gds.Point{}) }, map[Kind]int64{SameMask: 1}},
		// Under 30 degrees corners are rounded by up to half a unit each way; 40 is safe, 30 is near.
		{"30 degrees, 40", 40, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Angle: 30}, gds.Point{}) }, nil},
		{"30 degrees, 30", 30, func(w *gds.Writer) { w.SRef("pair", gds.Strans{Angle: 30}, gds.Point{}) }, map[Kind]int64{SameMask: 1}},
		{"an array, twice each", 30, func(w *gds.Writer) {
			w.ARef("pair", gds.Strans{}, 3, 2, gds.Point{}, gds.Point{X: 600}, gds.Point{Y: 400})
		}, map[Kind]int64{SameMask: 6}},
		{"array elements among each other", 36, func(w *gds.Writer) { // 76 wide, steps of 111: 35 apart
			w.ARef("pair", gds.Strans{}, 4, 1, gds.Point{}, gds.Point{X: 4 * 111}, gds.Point{Y: 400})
		}, map[Kind]int64{SameMask: 3}},
		{"a missing structure", 36, func(w *gds.Writer) {
			w.SRef("pair", gds.Strans{}, gds.Point{})
			w.SRef("nowhere", gds.Strans{}, gds.Point{})
		}, nil},
	} {
		res, err := judgeStreams(t, deckHead, "", pairAt(c.gap, c.place), nil)
		expect(t, c.name, res, err, c.want)
	}
	// Figures of different tops do not see each other.
	tops := stream(t, func(w *gds.Writer) {
		for _, name := range []string{"one", "two"} {
			w.BeginStructure(name)
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.EndStructure()
		}
	})
	res, err := judgeStreams(t, deckHead, "", tops, nil)
	expect(t, "two tops", res, err, nil)
	if err == nil && res.Layers[0].Shapes != 2 {
		t.Errorf("two tops have %d shapes, want 2", res.Layers[0].Shapes)
	}
}

// Stitches: a wire of 20 by 200 along x, cut at its middle.
func TestStitches(t *testing.T) {
	const deck = deckHead + "[layer.stitch]\nmin_overlap = 10\nmin_piece = 50\nkeep_out = [\"15/0\"]\napply = true\n"
	keepOut := gds.LayerType{Layer: 15}
	for _, c := range []struct {
		name   string
		figure func(w *gds.Writer)
		want   map[Kind]int64
	}{
		{"proper", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
		}, nil},
		{"upright", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 20, 105))
			w.Rectangle(maskB19, rect(0, 95, 20, 200))
		}, nil},
		{"overlap of 9", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 104, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
		{"no overlap", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 100, 20))
			w.Rectangle(maskB19, rect(100, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
		{"a piece of 49", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 49, 20))
			w.Rectangle(maskB19, rect(39, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
		{"a piece of 50", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 50, 20))
			w.Rectangle(maskB19, rect(40, 0, 200, 20))
		}, nil},
		{"one piece under the other", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 200, 20))
			w.Rectangle(maskB19, rect(100, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
		{"the same twice", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 200, 20))
			w.Rectangle(maskB19, rect(0, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
		{"keep_out touches the corner of the overlap", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
			w.Rectangle(keepOut, rect(105, 20, 120, 40))
		}, map[Kind]int64{Stitches: 1}},
		{"keep_out beside the overlap", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
			w.Rectangle(keepOut, rect(106, 20, 120, 40))
		}, nil},
		{"two pieces of one mask too near", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 80, 20))
			w.Rectangle(maskB19, rect(70, 0, 125, 20))
			w.Rectangle(maskA19, rect(115, 0, 200, 20)) // 35 from the first
		}, map[Kind]int64{Stitches: 1}},
		{"two pieces of one mask far enough", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 80, 20))
			w.Rectangle(maskB19, rect(70, 0, 126, 20))
			w.Rectangle(maskA19, rect(116, 0, 200, 20))
		}, nil},
		{"a piece too near another shape", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
			w.Rectangle(maskB19, rect(120, 30, 200, 50))
		}, map[Kind]int64{SameMask: 1}},
		{"the cut that helps", func(w *gds.Writer) {
			w.Rectangle(maskA19, rect(0, 0, 105, 20))
			w.Rectangle(maskB19, rect(95, 0, 200, 20))
			w.Rectangle(maskB19, rect(0, 30, 50, 50))
			w.Rectangle(maskA19, rect(150, 30, 200, 50))
		}, nil},
		{"at a slanted figure", func(w *gds.Writer) {
			w.Boundary(maskA19, []gds.Point{{X: 0, Y: 0}, {X: 100, Y: 0}, {X: 110, Y: 20}, {X: 0, Y: 20}})
			w.Rectangle(maskB19, rect(90, 0, 200, 20))
		}, map[Kind]int64{Stitches: 1}},
	} {
		res, err := judgeStreams(t, deck, "", chip(t, c.figure), nil)
		expect(t, c.name, res, err, c.want)
	}
	proper := chip(t, func(w *gds.Writer) {
		w.Rectangle(maskA19, rect(0, 0, 105, 20))
		w.Rectangle(maskB19, rect(95, 0, 200, 20))
	})
	res, err := judgeStreams(t, deckHead, "", proper, nil)
	expect(t, "no [layer.stitch]", res, err, map[Kind]int64{OnMasks: 1})
	drawn := chip(t, func(w *gds.Writer) { w.Rectangle(drawn19, rect(0, 0, 200, 20)) })
	res, err = judgeStreams(t, deck, "", proper, drawn)
	expect(t, "drawn in one", res, err, nil)
	res, err = judgeStreams(t, strings.Replace(deck, "apply = true", "apply = false", 1), "", proper, drawn)
	expect(t, "drawn in one, not to be cut", res, err, map[Kind]int64{OnMasks: 1, Elements: 1})
	res, err = judgeStreams(t, strings.Replace(deck, "apply = true", "apply = false", 1), "", proper, proper)
	expect(t, "arrived stitched", res, err, nil)
	res, err = judgeStreams(t, deck, "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [10, 10]\n", proper, drawn)
	expect(t, "cut under an order", res, err, map[Kind]int64{Orders: 1})
	res, err = judgeStreams(t, deck, "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [10, 10]\n", proper, proper)
	expect(t, "arrived stitched, under an order", res, err, nil)
	res, err = judgeStreams(t, deck, "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [10, 10]\nwish = true\n", proper, drawn)
	expect(t, "a wish does not forbid a cut", res, err, nil)
	if err == nil && (res.Layers[0].Stitched != 1 || res.Layers[0].Overlaps != 1 || res.Layers[0].WishesKept != 1) {
		t.Errorf("counts are %+v, want one shape stitched by one overlap, and the wish kept", res.Layers[0])
	}
}

// What the anchor file, markers and labels order. The layout: cell "two" has a shape at (0, 0) on A and one at (60, 0) on B;
// it is placed upright, mirrored about the y axis, and as variant with the masks the other way round.
func TestOrders(t *testing.T) {
	const deck = deckHead + "anchor_a = \"19/11\"\nanchor_b = \"19/12\"\nanchor_label = \"19/10\"\n"
	layout := func(more func(w *gds.Writer)) []byte {
		return stream(t, func(w *gds.Writer) {
			for _, cell := range []struct {
				name string
				a, b gds.LayerType
			}{{"two", maskA19, maskB19}, {"two$2", maskB19, maskA19}} {
				w.BeginStructure(cell.name)
				w.Rectangle(cell.a, rect(0, 0, 20, 20))
				w.Rectangle(cell.b, rect(60, 0, 80, 20))
				w.EndStructure()
			}
			w.BeginStructure("chip")
			w.SRef("two", gds.Strans{}, gds.Point{})
			w.SRef("two", gds.Strans{Mirror: true, Angle: 180}, gds.Point{X: -1000})
			w.SRef("two$2", gds.Strans{}, gds.Point{X: 1000})
			if more != nil {
				more(w)
			}
			w.EndStructure()
		})
	}
	const (
		anchor = "[[anchor]]\nlayer = \"metal1\"\n"
		tie    = "[[tie]]\nlayer = \"metal1\"\n"
		waiver = "[[waiver]]\nlayer = \"metal1\"\nreason = \"measured\"\n"
	)
	for _, c := range []struct {
		name    string
		anchors string
		more    func(w *gds.Writer)
		want    map[Kind]int64
		err     string // part of the error
	}{
		{name: "at, held", anchors: anchor + "mask = \"A\"\nat = [20, 20]\n"},
		{name: "at, not held", anchors: anchor + "mask = \"B\"\nat = [20, 20]\n", want: map[Kind]int64{Orders: 1}},
		{name: "at, beside", anchors: anchor + "mask = \"A\"\nat = [21, 20]\n", err: "anchor number 1: hits no shape of layer metal1; the shape nearest to (21, 20) nm in chip is (0, 0) to (20, 20) nm, 1 nm away"},
		{name: "box, held", anchors: anchor + "mask = \"A\"\nbox = [-30, -30, 59, 40]\n"},
		{name: "box, not held for one", anchors: anchor + "mask = \"A\"\nbox = [-30, -30, 60, 40]\n", want: map[Kind]int64{Orders: 1}},
		// In the cell and its variant, at three placements; one is the other way round.
		{name: "cell", anchors: anchor + "mask = \"A\"\nat = [10, 10]\ncell = \"two\"\n", want: map[Kind]int64{Orders: 1}},
		{name: "variant alone", anchors: anchor + "mask = \"B\"\nat = [10, 10]\ncell = \"two$2\"\n"},
		{name: "no such cell", anchors: anchor + "mask = \"B\"\nat = [10, 10]\ncell = \"three\"\n", err: "structure three is not in the stream"},
		{name: "contradiction on a shape", anchors: anchor + "mask = \"B\"\nat = [10, 10]\n" + anchor + "name = \"bias\"\nmask = \"A\"\nbox = [0, 0, 5, 5]\n",
			err: "these orders contradict each other: anchors.toml:1: anchor number 1 (on B) at (10, 10) nm in chip; anchors.toml:5: anchor \"bias\" (on A)"},
		{name: "contradiction over ties", anchors: anchor + "mask = \"A\"\nat = [10, 10]\n" + tie + "masks = \"same\"\nat = [[0, 0], [80, 20]]\n" + anchor + "mask = \"B\"\nat = [70, 10]\n",
			err: "contradict each other"},
		{name: "tie, held", anchors: tie + "masks = \"opposite\"\nat = [[0, 0], [80, 20]]\n"},
		{name: "tie, not held", anchors: tie + "masks = \"same\"\nat = [[0, 0], [80, 20]]\n", want: map[Kind]int64{Orders: 1}},
		{name: "tie in the cell", anchors: tie + "masks = \"opposite\"\nat = [[0, 0], [80, 20]]\ncell = \"two\"\n"},
		{name: "tie that misses with one end", anchors: tie + "masks = \"same\"\nat = [[0, 0], [90, 20]]\n", err: "tie number 1: hits no shape of layer metal1; the shape nearest to (90, 20) nm in chip is (60, 0) to (80, 20) nm, 10 nm away"},
		{name: "tie of a shape to itself", anchors: tie + "masks = \"opposite\"\nat = [[0, 0], [20, 20]]\n", err: "contradict each other"},
		{name: "alike, not held", anchors: "[[anchor]]\ncell = \"two\"\nalike = true\n", want: map[Kind]int64{Orders: 2}},
		{name: "alike, of the variant alone", anchors: "[[anchor]]\ncell = \"two$2\"\nalike = true\n"},
		{name: "alike, no such cell", anchors: "[[anchor]]\ncell = \"three\"\nalike = true\n", err: "structure three is not in the stream"},
		{name: "marker, held", more: func(w *gds.Writer) { w.Rectangle(gds.LayerType{Layer: 19, Type: 11}, rect(20, 0, 30, 10)) }},
		{name: "marker, not held", more: func(w *gds.Writer) { w.Rectangle(gds.LayerType{Layer: 19, Type: 12}, rect(20, 0, 30, 10)) }, want: map[Kind]int64{Orders: 1}},
		{name: "marker on nothing", more: func(w *gds.Writer) { w.Rectangle(gds.LayerType{Layer: 19, Type: 12}, rect(21, 0, 30, 10)) }},
		{name: "slanted marker, its box touches and it does not", more: func(w *gds.Writer) {
			w.Boundary(gds.LayerType{Layer: 19, Type: 12}, []gds.Point{{X: 10, Y: 50}, {X: 50, Y: 10}, {X: 50, Y: 50}})
		}},
		{name: "two markers that contradict", more: func(w *gds.Writer) {
			w.Rectangle(gds.LayerType{Layer: 19, Type: 11}, rect(20, 0, 30, 10))
			w.Rectangle(gds.LayerType{Layer: 19, Type: 12}, rect(-5, 0, 0, 10))
		}, err: "these orders contradict each other: marker for A on 19/11"},
		{name: "label, held", more: func(w *gds.Writer) { w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 20, Y: 20}, "A") }},
		{name: "label, not held", more: func(w *gds.Writer) { w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 20, Y: 20}, "B") }, want: map[Kind]int64{Orders: 1}},
		{name: "another label", more: func(w *gds.Writer) { w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 20, Y: 20}, "BIAS") }},
		{name: "label beside", more: func(w *gds.Writer) { w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 21, Y: 20}, "B") }},
		{name: "a pair that is waived", anchors: waiver + "at = [[0, 0], [40, 0]]\n", more: func(w *gds.Writer) { w.Rectangle(maskA19, rect(40, 0, 44, 20)) }},
		{name: "another pair is waived", anchors: waiver + "at = [[0, 0], [80, 0]]\n", more: func(w *gds.Writer) { w.Rectangle(maskA19, rect(40, 0, 44, 20)) }, want: map[Kind]int64{SameMask: 1}},
		{name: "a waiver that misses", anchors: waiver + "at = [[0, 0], [40, 0]]\n", err: "waiver number 1: hits no shape"},
		{name: "a broken anchor file", anchors: "[[anchors]]\n", err: "anchors.toml:1"},
	} {
		res, err := judgeStreams(t, deck, c.anchors, layout(c.more), nil)
		if c.err == "" {
			expect(t, c.name, res, err, c.want)
			continue
		}
		if err == nil || !strings.Contains(err.Error(), c.err) {
			t.Errorf("%s: error is %v, want one with %q", c.name, err, c.err)
		}
		var order *OrderError
		var deckErr *decompose.DeckError
		if !errors.As(err, &order) && !errors.As(err, &deckErr) {
			t.Errorf("%s: the error is a %T", c.name, err)
		}
	}
}

// Counts that are no faults: anchored shapes, wishes one by one per shape, waived pairs, markers and labels without a shape.
func TestOrderCounts(t *testing.T) {
	const deck = deckHead + "anchor_a = \"19/11\"\nanchor_label = \"19/10\"\n"
	masked := chip(t, func(w *gds.Writer) {
		w.Rectangle(maskA19, rect(0, 0, 20, 20))
		w.Rectangle(maskA19, rect(0, 40, 20, 60)) // 20 from the first: waived
		w.Rectangle(maskB19, rect(100, 0, 120, 20))
		w.Rectangle(gds.LayerType{Layer: 19, Type: 11}, rect(5, 5, 6, 6))
		w.Rectangle(gds.LayerType{Layer: 19, Type: 11}, rect(500, 5, 600, 6))
		w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 5, Y: 50}, "A")
		w.Text(gds.LayerType{Layer: 19, Type: 10}, gds.Point{X: 400, Y: 50}, "B")
	})
	res, err := judgeStreams(t, deck, `
[[anchor]]
layer = "metal1"
mask = "A"
box = [0, 0, 200, 200]
wish = true
[[waiver]]
layer = "metal1"
at = [[0, 0], [0, 60]]
reason = "measured"
`, masked, nil)
	expect(t, "counts", res, err, nil)
	if err != nil {
		return
	}
	got := res.Layers[0]
	if len(got.WaivedPlaces) != 1 {
		t.Errorf("%d waived pairs are told, want 1", len(got.WaivedPlaces))
	}
	got.WaivedPlaces = nil
	want := LayerCounts{Name: "metal1", FiguresA: 2, FiguresB: 1, Shapes: 3, Waived: 1, Anchored: 2, Wishes: 3, WishesKept: 2,
		MarkersWithoutShape: 1, LabelsWithoutShape: 1}
	if d := cmp.Diff(want, got); d != "" {
		t.Errorf("counts differ (-want +got):\n%s", d)
	}
	if len(res.Warnings) != 2 {
		t.Errorf("warnings are %q, want one on a marker and one on a label", res.Warnings)
	}
}

// What cannot be judged is an error of the right kind that names the culprit.
func TestInputErrors(t *testing.T) {
	for _, c := range []struct {
		name   string
		deck   string
		masked []byte
		says   string
	}{
		{"a loop", deckHead, stream(t, func(w *gds.Writer) {
			w.BeginStructure("one")
			w.SRef("two", gds.Strans{}, gds.Point{})
			w.EndStructure()
			w.BeginStructure("two")
			w.SRef("one", gds.Strans{}, gds.Point{})
			w.EndStructure()
		}), "out.gds: structure one is placed inside itself: one > two > one"},
		{"out of the plane", deckHead, stream(t, func(w *gds.Writer) {
			w.BeginStructure("unit")
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.EndStructure()
			w.BeginStructure("chip")
			w.SRef("unit", gds.Strans{}, gds.Point{X: 1<<31 - 20})
			w.EndStructure()
		}), "a figure of structure unit, placed at (2147483628, 0) in chip, leaves the 32-bit plane"},
		{"doubling 40 deep", deckHead, stream(t, func(w *gds.Writer) {
			w.BeginStructure("c0")
			w.Rectangle(maskA19, rect(0, 0, 20, 20))
			w.EndStructure()
			for i := range 40 {
				w.BeginStructure("c" + string(rune('a'+i)))
				below := "c0"
				if i > 0 {
					below = "c" + string(rune('a'+i-1))
				}
				w.SRef(below, gds.Strans{}, gds.Point{})
				w.SRef(below, gds.Strans{}, gds.Point{X: 100})
				w.EndStructure()
			}
		}), "places 1099511627776 figures of one deck layer; at most 134217728"},
		{"cut off", deckHead, chip(t, func(w *gds.Writer) {})[:100], "out.gds"},
	} {
		_, err := judgeStreams(t, c.deck, "", c.masked, nil)
		if err == nil || !strings.Contains(err.Error(), c.says) || strings.Contains(err.Error(), "\n") {
			t.Errorf("%s: error is %v, want one line with %q", c.name, err, c.says)
		}
		var order *OrderError
		if errors.As(err, &order) {
			t.Errorf("%s: the user's files are blamed: %v", c.name, err)
		}
	}
}

// Distances in messages are in the deck's unit.
func TestPairsAreTold(t *testing.T) {
	res, err := judgeStreams(t, deckHead, "", chip(t, func(w *gds.Writer) {
		w.Rectangle(maskA19, rect(0, 0, 20, 20))
		w.Rectangle(maskA19, rect(23, 24, 50, 60)) // 3 and 4: 5
		w.Boundary(maskB19, []gds.Point{{X: 1000, Y: 0}, {X: 1060, Y: 0}, {X: 1000, Y: 80}})
		w.Rectangle(maskB19, rect(1060, 60, 1100, 100)) // (4*60 + 3*60 - 240) / 5 = 36 from the slanted edge; 3/5 less a unit down
		w.Rectangle(maskB19, rect(1060, 59, 1100, 60))
	}), nil)
	expect(t, "pairs", res, err, map[Kind]int64{SameMask: 2})
	if err != nil {
		return
	}
	places := res.Check(SameMask, "metal1").Places
	want := []Place{
		{Top: "chip", Box: &decompose.Box{X2: 40, Y2: 40}, Other: &decompose.Box{X1: 46, Y1: 48, X2: 100, Y2: 120}, Text: "5 nm apart on mask A; 36 nm is needed"},
		{Top: "chip", Box: &decompose.Box{X1: 2000, X2: 2120, Y2: 160}, Other: &decompose.Box{X1: 2120, Y1: 118, X2: 2200, Y2: 200}, Text: "35.4 nm apart on mask B; 36 nm is needed"},
	}
	if d := cmp.Diff(want, places); d != "" {
		t.Errorf("places differ (-want +got):\n%s", d)
	}
}
