package decompose

import (
	"strings"
	"testing"

	"maskpair/gds"
)

// An odd ring of three shapes: the wire (0, 0)-(200, 10), a hook over its left end, and a bracket over all the rest whose arm comes back
// to the hook. Grown by 30, hook and bracket leave x from 36 to 44 of the wire uncovered, so the only cut is at 38 to 42, and the left
// piece is 42 long.
//
//	80 +-----------------------------+
//	70 +-------------------------+   |  the arm
//	60 +--+                      |   |
//	   |  |  hook                |   |
//	35 |  +---+        +---------+   |
//	25 +------+        +-------------+  bracket
//	10    +--------------------------+
//	 0    +--------------------------+  the wire
//	  -40 0   6        74           200
var ringOfWires = []gds.Rect{
	whole(0, 0, 200, 10),
	whole(-40, 25, 6, 35), whole(-40, 25, -30, 60),
	whole(74, 25, 200, 35), whole(190, 25, 200, 80), whole(-40, 70, 200, 80),
}

const cutRules = "[layer.stitch]\nmin_overlap = 4\nmin_piece = 10\napply = true\n"

// onWire counts the candidates that cut across the wire, whose top is at y = 10.
func onWire(t *testing.T, rules string, rects []gds.Rect) int {
	t.Helper()
	res, _ := decomposed(t, drawnRects(t, rects...), facingDeck(20, cutRules+rules), Options{Jobs: 1})
	l := onlyLayer(res)
	if l.NearPairs != 3 || len(l.Unresolved) != 1 {
		t.Fatalf("%s: %d near pairs, %d components unresolved; want a ring of three", rules, l.NearPairs, len(l.Unresolved))
	}
	n := 0
	for _, c := range l.Unresolved[0].Candidates {
		if c.Box.Y2 == 20 {
			n++
			if c.Box.X1 != 76 || c.Box.X2 != 84 {
				t.Errorf("%s: the cut is at %v", rules, c.Box)
			}
		}
	}
	return n
}

// With tips up to 41 the left piece's long side is a side, as it was. With tips up to 42 it becomes a tip, and faces the hook: the pieces
// would be judged by another rule than the wire, so there is no candidate.
func TestACutMustNotMakeTipsOfSides(t *testing.T) {
	for tipWidth, want := range map[string]int{"41": 1, "42": 0} {
		if got := onWire(t, "[layer.spacing]\ntip_to_side = 30\ntip_width = "+tipWidth+"\n", ringOfWires); got != want {
			t.Errorf("tips up to %s: %d candidates on the wire, want %d", tipWidth, got, want)
		}
	}
}

// The same with a wire 60 wide, in which squares of up to 60 fit; into the left piece, 42 long, squares of 42.
func TestACutMustNotMakeWidePartsNarrow(t *testing.T) {
	ring := append([]gds.Rect{whole(0, -50, 200, 10)}, ringOfWires[1:]...)
	for width, want := range map[string]int{"42": 1, "43": 0, "60": 0, "61": 1} {
		if got := onWire(t, "[layer.spacing]\nwide = [{ width = "+width+", spacing = 30 }]\n", ring); got != want {
			t.Errorf("wide from %s: %d candidates on the wire, want %d", width, got, want)
		}
	}
}

// The legs of a U are 20 apart. Each could be cut in the middle of its uncovered part, but then the two upper ends would be pieces of their
// own, on one mask, and 20 is less than 36. With legs 36 apart both cuts are candidates.
func TestPiecesOfOneShapeKeepTheirSpacing(t *testing.T) {
	for legs, want := range map[int32]int{20: 1, 36: 2} {
		x := 10 + legs // of the right leg
		rects := []gds.Rect{
			whole(0, 0, 10, 300), whole(0, 0, x+10, 10), whole(x, 0, x+10, 300),
			// beside each leg an upper and a lower shape, near to each other away from the leg
			whole(-30, 200, -20, 300), whole(-30, 0, -20, 100), whole(-100, 0, -20, 60), whole(-120, 0, -60, 250),
			whole(x+30, 200, x+40, 300), whole(x+30, 0, x+40, 100), whole(x+30, 0, x+110, 60), whole(x+70, 0, x+130, 250),
		}
		for _, spacing := range []string{"", "[layer.spacing]\ntip_to_tip = 36\ntip_width = 10\ncorner_to_corner = 35\n"} {
			res, _ := decomposed(t, drawnRects(t, rects...), facingDeck(36, strings.ReplaceAll(cutRules, "true", "false")+spacing), Options{Jobs: 1})
			l := onlyLayer(res)
			if len(l.Unresolved) != 1 {
				t.Fatalf("legs %d apart: %d unresolved components", legs, len(l.Unresolved))
			}
			got := 0
			for _, c := range l.Unresolved[0].Candidates {
				if c.Box.X1 == 0 || c.Box.X1 == int64(2*x) {
					got++
				}
			}
			if got != want {
				t.Errorf("legs %d apart: %d candidates on them, want %d (%v)", legs, got, want, l.Unresolved[0].Candidates)
			}
		}
	}
}
