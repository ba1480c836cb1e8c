package decompose

import (
	"bytes"
	"context"
	"slices"
	"testing"
	"time"

	"maskpair/gds"
)

// twinDrawing is a small hierarchy; what is changed in it is said by its fields.
type twinDrawing struct {
	swapped bool      // the first two figures of the cell come in the other order
	move    int32     // of a figure of the cell
	corner  int32     // of the polygon in the top
	at      gds.Point // of the single placement
	rows    uint16    // of the array
	extra   bool      // one more figure, far away
}

func (d twinDrawing) stream(t *testing.T) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{LibName: "twin", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
	layer := gds.LayerType{Layer: 1}
	w.BeginStructure("cell")
	rects := []gds.Rect{{X1: 0, Y1: 0, X2: 10, Y2: 10}, {X1: 20, Y1: 0, X2: 30, Y2: 10}, {X1: 40 + d.move, Y1: 0, X2: 50 + d.move, Y2: 10}}
	if d.swapped {
		rects[0], rects[1] = rects[1], rects[0]
	}
	for _, r := range rects {
		w.Rectangle(layer, r)
	}
	w.EndStructure()
	w.BeginStructure("top")
	w.SRef("cell", gds.Strans{}, gds.Point{X: 200 + d.at.X, Y: d.at.Y})
	w.Boundary(layer, []gds.Point{{X: 300, Y: 0}, {X: 330 + d.corner, Y: 0}, {X: 330 + d.corner, Y: 10}, {X: 310, Y: 10}, {X: 310, Y: 30}, {X: 300, Y: 30}})
	w.Path(layer, gds.PathStyle{Width: 10}, []gds.Point{{X: 305, Y: 45}, {X: 345, Y: 45}})
	w.ARef("cell", gds.Strans{}, 2, 3+d.rows, gds.Point{Y: 100}, gds.Point{X: 140, Y: 100}, gds.Point{Y: 100 + 20*int32(3+d.rows)})
	if d.extra {
		w.Rectangle(layer, gds.Rect{X1: 5000, Y1: 5000, X2: 5010, Y2: 5010})
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

const unitDeck = "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = 15\n"

// remembering decomposes a layout after a baseline, and tells whether the two were twins.
func remembering(t *testing.T, stream, baseline []byte) (r *Run, twin bool) {
	t.Helper()
	d, err := ParseDeck("deck.toml", []byte(unitDeck))
	if err != nil {
		t.Fatal(err)
	}
	onMasks, err := d.BaselineInterest()
	if err != nil {
		t.Fatal(err)
	}
	lib, err := gds.Index(bytes.NewReader(baseline), int64(len(baseline)), onMasks, nil)
	if err != nil {
		t.Fatal(err)
	}
	r = runOf(t, stream, unitDeck, Options{})
	if err := r.Remember("baseline", lib); err != nil {
		t.Fatal(err)
	}
	if _, err := r.Decompose(context.Background(), nil); err != nil {
		t.Fatal(err)
	}
	l := r.layers[0]
	pair := twins{f: l.flat, masks: l.memory.e.masks, known: map[[2]int32][]uint8{}}
	return r, pair.same(l.flat.h.tops[0], l.memory.e.h.tops[0])
}

// An unedited layout is its result's twin and remembers the masks of the result; so it does when places decide because figures were
// drawn in another order. What is edited is no twin.
func TestTwinsRememberWhatPlacesSay(t *testing.T) {
	drawn := twinDrawing{}.stream(t)
	first := runOf(t, drawn, unitDeck, Options{})
	if _, err := first.Decompose(context.Background(), nil); err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := first.Write(context.Background(), &out, bytes.NewReader(drawn), nil); err != nil {
		t.Fatal(err)
	}
	want := make([]recalled, len(first.masks[0].Data))
	for u, m := range first.masks[0].Data {
		want[u] = recalled(1+m) | recalledSome | recalledSame
	}
	if !slices.Contains(first.masks[0].Data, uint8(A)) || !slices.Contains(first.masks[0].Data, uint8(B)) {
		t.Fatal("the layout is on one mask alone and shows nothing")
	}
	for _, c := range []struct {
		name       string
		d          twinDrawing
		twin, same bool // same: nothing has another place
	}{
		{"as it was", twinDrawing{}, true, true},
		{"another order", twinDrawing{swapped: true}, false, true},
		{"a figure moved", twinDrawing{move: 1}, false, false},
		{"a polygon stretched", twinDrawing{corner: 2}, false, false},
		{"a placement moved", twinDrawing{at: gds.Point{Y: 1}}, false, false},
		{"a longer array", twinDrawing{rows: 1}, false, false},
		{"one more figure", twinDrawing{extra: true}, false, false},
	} {
		r, twin := remembering(t, c.d.stream(t), out.Bytes())
		if twin != c.twin {
			t.Errorf("%s: twins %v, want %v", c.name, twin, c.twin)
		}
		if got := r.layers[0].memory.nodes; c.same && !slices.Equal(got, want) {
			t.Errorf("%s: remembers %v, want %v", c.name, got, want)
		}
	}
}
