package decompose

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/gds"
)

// What no mask can help: a U with a notch of 20, a C whose ends leave a gap of 30 (and whose bay of 100 is wide enough), a comb of three
// teeth 25 apart whose outer teeth, 60 apart, do not see each other, a staircase with corners 15 and 20 apart (25), and a slanted one.
func TestNotchesAndGapsInsideOneShape(t *testing.T) {
	u := []gds.Rect{whole(0, 0, 10, 100), whole(0, 0, 40, 10), whole(30, 0, 40, 100)}
	place := func(notch bool, box Box, a, b Edge, from, to Spot, sq float64, widen int64) SameShapePlace {
		return SameShapePlace{Top: "top", Box: box, Notch: notch, EdgeA: a, EdgeB: b, From: from, To: to, DistanceSq: sq, Widen: widen}
	}
	for _, c := range []struct {
		name  string
		rects []gds.Rect
		more  []gds.Point
		want  []SameShapePlace
	}{
		{"a notch", u, nil, []SameShapePlace{
			place(true, box2(0, 0, 40, 100), edge2(10, 10, 10, 100), edge2(30, 10, 30, 100), at2(10, 55), at2(30, 55), 400, 16)}},
		{"a notch of just the spacing", []gds.Rect{whole(0, 0, 10, 100), whole(0, 0, 56, 10), whole(46, 0, 56, 100)}, nil, nil},
		{"a gap beside a bay", []gds.Rect{whole(0, 0, 100, 10), whole(0, 0, 10, 150), whole(0, 140, 100, 150), whole(90, 0, 100, 60), whole(90, 90, 100, 150)}, nil,
			[]SameShapePlace{place(false, box2(0, 0, 100, 150), edge2(90, 60, 100, 60), edge2(90, 90, 100, 90), at2(95, 60), at2(95, 90), 900, 6)}},
		{"teeth that see their neighbours only", []gds.Rect{whole(0, 0, 70, 10), whole(0, 0, 5, 50), whole(30, 0, 40, 50), whole(65, 0, 70, 50)}, nil, []SameShapePlace{
			place(true, box2(0, 0, 70, 50), edge2(5, 10, 5, 50), edge2(30, 10, 30, 50), at2(5, 30), at2(30, 30), 625, 11),
			place(true, box2(0, 0, 70, 50), edge2(40, 10, 40, 50), edge2(65, 10, 65, 50), at2(40, 30), at2(65, 30), 625, 11)}},
		{"corners 15 and 20 apart", []gds.Rect{whole(0, 0, 60, 60), whole(75, 80, 200, 140), whole(0, 0, 10, 300), whole(0, 290, 200, 300), whole(190, 80, 200, 300)}, nil,
			[]SameShapePlace{place(false, box2(0, 0, 200, 300), Edge{at2(60, 60), at2(60, 60)}, Edge{at2(75, 80), at2(75, 80)}, at2(60, 60), at2(75, 80), 625, 11)}},
		// The sharp corner (70, 55) looks at the tooth's side at x = 40 from 30 away.
		{"a slanted tooth", []gds.Rect{whole(0, 0, 200, 10), whole(30, 0, 40, 100)}, []gds.Point{{X: 100, Y: 10}, {X: 120, Y: 10}, {X: 120, Y: 110}, {X: 70, Y: 55}},
			[]SameShapePlace{place(false, box2(0, 0, 200, 110), Edge{at2(70, 55), at2(70, 55)}, edge2(40, 10, 40, 100), at2(70, 55), at2(40, 55), 900, 6)}},
	} {
		t.Run(c.name, func(t *testing.T) {
			stream := written(t, func(w *gds.Writer) {
				w.BeginStructure("top")
				for _, r := range c.rects {
					w.Rectangle(layer1, r)
				}
				if c.more != nil {
					w.Boundary(layer1, c.more)
				}
				w.EndStructure()
			})
			res, _ := decomposed(t, stream, facingDeck(36, "same_shape = \"report\"\n"), Options{Jobs: 2})
			l := onlyLayer(res)
			if d := cmp.Diff(c.want, l.SameShape); d != "" || l.Shapes != 1 || l.UnresolvedPairs != 0 {
				t.Errorf("%d shapes, %d unresolved pairs; places (want, got):\n%s", l.Shapes, l.UnresolvedPairs, d)
			}
			if res, _ := decomposed(t, stream, facingDeck(36, ""), Options{Jobs: 2}); onlyLayer(res).SameShape != nil {
				t.Errorf("told without being asked for: %v", onlyLayer(res).SameShape)
			}
		})
	}
}
