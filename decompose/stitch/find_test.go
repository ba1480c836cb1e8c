package stitch

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"maskpair/decompose/geom"
)

func r(x1, y1, x2, y2 int64) geom.Rect { return geom.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2} }

// A wire 200 long and 20 wide, spacing 30. Neighbours face its ends; grown by 30 they cover x < 50 and x > 150, so that [50, 150] is
// uncovered, and the overlap of 10 lies centred in it: [95, 105].
func TestCutLiesCentredInTheUncoveredPart(t *testing.T) {
	wire := []geom.Rect{r(0, 0, 200, 20)}
	near := []geom.Rect{r(0, 40, 20, 60), r(180, 40, 200, 60)}
	s, why := Find(wire, near, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1})
	if why != None {
		t.Fatalf("no candidate: reason %d", why)
	}
	want := []Cut{{Box: r(95, 0, 105, 20), AlongX: true, Low: 0, High: 1}}
	if diff := cmp.Diff(want, s.Cuts); diff != "" {
		t.Errorf("cuts differ (-want +got):\n%s", diff)
	}
	if diff := cmp.Diff([][]geom.Rect{{r(0, 0, 95, 20)}, {r(105, 0, 200, 20)}}, s.Cores); diff != "" {
		t.Errorf("cores differ (-want +got):\n%s", diff)
	}
}

// The same wire drawn as three overlapping figures has the same candidate.
func TestFiguresOfAShapeDoNotMatter(t *testing.T) {
	near := []geom.Rect{r(0, 40, 20, 60), r(180, 40, 200, 60)}
	rules := Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1}
	one, _ := Find([]geom.Rect{r(0, 0, 200, 20)}, near, nil, rules)
	three, _ := Find([]geom.Rect{r(0, 0, 100, 20), r(60, 0, 140, 20), r(100, 0, 200, 20)}, near, nil, rules)
	if diff := cmp.Diff(one.Cuts, three.Cuts); diff != "" {
		t.Errorf("cuts differ (-one figure +three):\n%s", diff)
	}
}

func TestReasons(t *testing.T) {
	rules := Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1}
	wire := []geom.Rect{r(0, 0, 200, 20)}
	ends := []geom.Rect{r(0, 40, 20, 60), r(180, 40, 200, 60)}
	for _, c := range []struct {
		name        string
		shape, near []geom.Rect
		keepOut     []geom.Rect
		rules       Rules
		want        Reason
	}{
		{"a square has a wire both ways, all covered", []geom.Rect{r(0, 0, 20, 20)}, []geom.Rect{r(0, 30, 20, 50)}, nil, rules, Covered},
		{"a neighbour all along", wire, []geom.Rect{r(0, 40, 200, 60)}, nil, rules, Covered},
		{"9 uncovered: [50,59]", wire, []geom.Rect{r(0, 40, 20, 60), r(89, 40, 200, 60)}, nil, rules, TooShort},
		{"10 uncovered are enough: [50,60]", wire, []geom.Rect{r(0, 40, 20, 60), r(90, 40, 200, 60)}, nil, rules, None},
		{"keep-out over the whole part", wire, ends, []geom.Rect{r(45, 5, 155, 10)}, rules, KeptOut},
		{"keep-out touches the wire from outside", wire, ends, []geom.Rect{r(45, 20, 155, 30)}, rules, KeptOut},
		{"keep-out a unit away", wire, ends, []geom.Rect{r(45, 21, 155, 30)}, rules, None},
		{"pieces of 105 where 106 are asked for", wire, ends, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 106, Grid: 1}, SmallPart},
		{"pieces of 105 where 105 are asked for", wire, ends, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 105, Grid: 1}, None},
		{"nothing near the right piece", wire, ends[:1], nil, rules, Useless},
	} {
		if _, got := Find(c.shape, c.near, c.keepOut, c.rules); got != c.want {
			t.Errorf("%s: reason %d, want %d", c.name, got, c.want)
		}
	}
}

// An L: neighbours at both ends leave the arms uncovered towards the corner. The arm along x is free on [50, 180] (its wire ends where
// the other arm begins), that along y on [20, 150]; the piece in the middle has no neighbour, so one of the two cuts is dropped.
func TestArmsOfAnL(t *testing.T) {
	shape := []geom.Rect{r(0, 0, 200, 20), r(180, 0, 200, 200)}
	near := []geom.Rect{r(0, 40, 20, 60), r(140, 180, 160, 200)}
	s, why := Find(shape, near, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1})
	if why != None || len(s.Cuts) != 2 {
		t.Fatalf("reason %d, cuts %v; want one on each arm", why, s.Cuts)
	}
}

// A ring hangs together the other way round, whichever wire is cut.
func TestARingHasNoCandidate(t *testing.T) {
	ring := []geom.Rect{r(0, 0, 200, 20), r(0, 180, 200, 200), r(0, 0, 20, 200), r(180, 0, 200, 200)}
	near := []geom.Rect{r(0, -40, 20, -20), r(180, -40, 200, -20)}
	if s, why := Find(ring, near, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1}); why != Useless {
		t.Errorf("reason %d, cuts %v", why, s.Cuts)
	}
}

// On a grid of 2 (half units) the overlap begins on an even coordinate: [95, 105] becomes [94, 104].
func TestOverlapsLieOnTheGrid(t *testing.T) {
	wire := []geom.Rect{r(0, 1, 200, 21)}
	near := []geom.Rect{r(0, 40, 20, 60), r(180, 40, 200, 60)}
	s, _ := Find(wire, near, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 2})
	if len(s.Cuts) != 1 || s.Cuts[0].Box.X1 != 94 {
		t.Errorf("cuts %v, want one that begins at 94", s.Cuts)
	}
}

// The wire that is cut at [95, 105] meets, by the upper right corner of the overlap, a square that hangs on to the shape's right end by
// a wire of its own, cut as well: its core would touch the left piece at that corner alone.
func TestAnOverlapMeetsNoOtherCore(t *testing.T) {
	shape := []geom.Rect{r(0, 0, 200, 20), r(105, 20, 125, 40)}
	near := []geom.Rect{r(0, 40, 20, 60), r(180, 40, 200, 60)}
	s, _ := Find(shape, near, nil, Rules{Spacing: 30, MinOverlap: 10, MinPiece: 20, Grid: 1})
	for _, c := range s.Cuts {
		for k, core := range s.Cores {
			for _, q := range core {
				if k != c.Low && k != c.High && meet(q, c.Box) {
					t.Errorf("the overlap %v meets %v of core %d", c.Box, q, k)
				}
			}
		}
	}
}
