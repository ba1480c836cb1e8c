package verify

import (
	"math/rand/v2"
	"testing"

	"maskpair/decompose"
	"maskpair/decompose/geom"
	"maskpair/gds"
)

// The deck of these tests: sides 36, tips against sides 40, tips against each other 44, corners 38; 20 is the longest tip.
const facingDeck = deckHead + `[layer.spacing]
side_to_side = 36
tip_to_side = 40
tip_to_tip = 44
corner_to_corner = 38
tip_width = 20
`

const wideDeck = facingDeck + "wide = [{ width = 100, spacing = 60 }]\n"

// Worked by hand from the interface; gaps are whole numbers, Pythagorean triples for corners.
func TestFacingByHand(t *testing.T) {
	for _, c := range []struct {
		name   string
		deck   string
		figure func(w *gds.Writer)
		near   bool
	}{
		{"side by side, 36", facingDeck, boxes(rect(0, 0, 20, 100), rect(56, 0, 76, 100)), false},
		{"side by side, 35", facingDeck, boxes(rect(0, 0, 20, 100), rect(55, 0, 75, 100)), true},
		{"tip to side, 40", facingDeck, boxes(rect(0, 0, 20, 100), rect(-50, 140, 50, 160)), false},
		{"tip to side, 39", facingDeck, boxes(rect(0, 0, 20, 100), rect(-50, 139, 50, 160)), true},
		{"tip to tip, 44", facingDeck, boxes(rect(0, 0, 20, 100), rect(0, 144, 20, 200)), false},
		{"tip to tip, 43", facingDeck, boxes(rect(0, 0, 20, 100), rect(0, 143, 20, 200)), true},
		{"a tip of 21 is a side", facingDeck, boxes(rect(0, 0, 21, 100), rect(0, 136, 21, 200)), false},
		{"tips that overlap by 1", facingDeck, boxes(rect(0, 0, 20, 100), rect(19, 143, 39, 200)), true},
		{"tips that overlap by 0: corners, 43", facingDeck, boxes(rect(0, 0, 20, 100), rect(20, 143, 40, 200)), false},
		{"tips that overlap by 0: corners, 37", facingDeck, boxes(rect(0, 0, 20, 100), rect(20, 137, 40, 200)), true},
		{"corners at 24 and 32: 40", facingDeck, boxes(rect(0, 0, 20, 100), rect(44, 132, 80, 200)), false},
		{"corners at 21 and 28: 35", facingDeck, boxes(rect(0, 0, 20, 100), rect(41, 128, 80, 200)), true},
		{"corners at 23 and 30: 37.8", facingDeck, boxes(rect(0, 0, 20, 100), rect(43, 130, 80, 200)), true},
		{"corners at 23 and 31: 38.6", facingDeck, boxes(rect(0, 0, 20, 100), rect(43, 131, 80, 200)), false},
		// Two figures make one edge of 40: no tip.
		{"figures that would make false tips", facingDeck, boxes(rect(0, 0, 20, 100), rect(20, 0, 40, 100), rect(0, 136, 100, 156)), false},
		// A notch's bottom is 20 long, between two concave corners: no tip, and what stands in it is a tip.
		{"a tip in a notch, 40", facingDeck, boxes(rect(0, 0, 300, 50), rect(0, 50, 100, 60), rect(200, 50, 300, 60), rect(140, 90, 160, 200)), false},
		{"a tip in a notch, 39", facingDeck, boxes(rect(0, 0, 300, 50), rect(0, 50, 100, 60), rect(200, 50, 300, 60), rect(140, 89, 160, 200)), true},
		{"nothing shields", facingDeck, boxesAnd(boxes(rect(0, 0, 20, 100), rect(0, 143, 20, 200)), func(w *gds.Writer) { w.Rectangle(maskB19, rect(-100, 118, 100, 120)) }), true},
		{"wide, 60", wideDeck, boxes(rect(0, 0, 100, 200), rect(160, 0, 180, 200)), false},
		{"wide, 59", wideDeck, boxes(rect(0, 0, 100, 200), rect(159, 0, 179, 200)), true},
		{"99 is not wide", wideDeck, boxes(rect(0, 0, 99, 200), rect(136, 0, 156, 200)), false},
		{"a thin arm of a wide plate", wideDeck, boxes(rect(0, 0, 100, 200), rect(0, 200, 20, 400), rect(-60, 260, -40, 400)), false},
		{"the plate beside its arm", wideDeck, boxes(rect(0, 0, 100, 200), rect(0, 200, 20, 400), rect(-60, 199, -40, 400)), true},
		{"wide by two figures", wideDeck, boxes(rect(0, 0, 50, 200), rect(50, 0, 100, 200), rect(159, 0, 179, 200)), true},
		{"a plate with a hole is not wide", wideDeck, boxes(rect(0, 0, 50, 200), rect(51, 0, 100, 200), rect(0, 199, 100, 200), rect(0, 0, 100, 1), rect(150, 0, 170, 200)), false},
	} {
		res, err := judgeStreams(t, c.deck, "", chip(t, c.figure), nil)
		want := map[Kind]int64{}
		if c.near {
			want[SameMask] = 1
		}
		expect(t, c.name, res, err, want)
	}
}

func boxes(rects ...gds.Rect) func(w *gds.Writer) {
	return func(w *gds.Writer) {
		for _, r := range rects {
			w.Rectangle(maskA19, r)
		}
	}
}

func boxesAnd(first, then func(w *gds.Writer)) func(w *gds.Writer) {
	return func(w *gds.Writer) {
		first(w)
		then(w)
	}
}

// Slanted edges are judged by the plain spacing (36) where they come nearest; flat sides of the same figure by their kinds. A
// deck in which sides may be nearer than that tells the two apart.
func TestFacingSlanted(t *testing.T) {
	deck := deckHead + "[layer.spacing]\nside_to_side = 30\ncorner_to_corner = 30\n"
	// An octagon of 100 by 100 with sides of 40 and corners cut by 30.
	octagon := []gds.Point{{X: 30, Y: 0}, {X: 70, Y: 0}, {X: 100, Y: 30}, {X: 100, Y: 70}, {X: 70, Y: 100}, {X: 30, Y: 100}, {X: 0, Y: 70}, {X: 0, Y: 30}}
	for _, c := range []struct {
		name  string
		other gds.Rect
		near  bool
	}{
		{"a wire before the flat side, 30", rect(130, -100, 150, 200), false},
		{"a wire before the flat side, 29", rect(129, -100, 150, 200), true},
		// The corner of the rectangle sees the slanted edge x + y = 170 at right angles: (x + y - 170) / sqrt(2).
		{"a corner before the slanted side, 36.8", rect(111, 111, 200, 200), false},
		{"a corner before the slanted side, 35.4", rect(110, 110, 200, 200), true},
		// A tip beside the flat side's corner at (100, 70): no overlap in projection with the flat side.
		{"beside the flat side, by the corner with the slanted edge, 37", rect(137, 71, 200, 75), false},
		{"beside the flat side, by the corner with the slanted edge, 35", rect(134, 71, 200, 75), true},
		{"overlapping the flat side by 1, 34", rect(134, 69, 200, 90), false},
	} {
		res, err := judgeStreams(t, deck, "", chip(t, func(w *gds.Writer) {
			w.Boundary(maskA19, octagon)
			w.Rectangle(maskA19, c.other)
		}), nil)
		want := map[Kind]int64{}
		if c.near {
			want[SameMask] = 1
		}
		expect(t, c.name, res, err, want)
	}
	// Where all rules are one number, what faces what makes no difference.
	rng := rand.New(rand.NewPCG(41, 42))
	same := deckHead + "[layer.spacing]\nside_to_side = 36\n"
	seen := [2]int{}
	for range 400 {
		masked := chip(t, func(w *gds.Writer) {
			for k := range 2 {
				var points []gds.Point
				for range 3 + rng.IntN(4) {
					points = append(points, gds.Point{X: int32(90*k) + 5*rng.Int32N(20), Y: 5 * rng.Int32N(20)})
				}
				w.Boundary(maskA19, points)
			}
		})
		plain, err := judgeStreams(t, deckHead, "", masked, nil)
		if err != nil {
			t.Fatal(err)
		}
		res, err := judgeStreams(t, same, "", masked, nil)
		expect(t, "one number", res, err, faults(plain))
		seen[min(1, len(faults(plain)))]++
		if t.Failed() {
			return
		}
	}
	if min(seen[0], seen[1]) < 50 {
		t.Errorf("%d far, %d near: the test is one-sided", seen[0], seen[1])
	}
}

// cells is a bitmap of unit squares.
type cells [][]bool

const cellField = 24

func (c cells) at(x, y int64) bool {
	return x >= 0 && y >= 0 && x < cellField && y < cellField && c[x][y]
}

// slowNear judges two bitmaps by the rules, edge by edge and corner by corner, from the definitions: an edge is a run of cell
// borders as long as can be.
func slowNear(r *facing, p, q cells) bool {
	type edge struct {
		axis         int // 0: level
		at, from, to int64
		out          int64
		tip          bool
	}
	type corner struct{ x, y, right, up int64 }
	edgesOf := func(c cells) (edges []edge) {
		for axis := range 2 {
			at := func(u, v int64) bool { // u along the edge, v across
				if axis == 0 {
					return c.at(u, v)
				}
				return c.at(v, u)
			}
			for v := int64(0); v <= cellField; v++ {
				for _, out := range []int64{1, -1} {
					inside, outside := v-1, v
					if out < 0 {
						inside, outside = v, v-1
					}
					is := func(u int64) bool { return at(u, inside) && !at(u, outside) }
					for u := int64(0); u < cellField; u++ {
						if !is(u) || u > 0 && is(u-1) {
							continue
						}
						to := u
						for is(to) {
							to++
						}
						tip := to-u <= r.tipWidth && !at(u-1, inside) && !at(to, inside)
						edges = append(edges, edge{axis, v, u, to, out, tip})
					}
				}
			}
		}
		return edges
	}
	cornersOf := func(c cells) (out []corner) {
		for x := int64(0); x <= cellField; x++ {
			for y := int64(0); y <= cellField; y++ {
				for _, right := range []int64{1, -1} {
					for _, up := range []int64{1, -1} {
						cell := func(dx, dy int64) bool { // dx, dy 1: on that side of the point
							cx, cy := x, y
							if dx < 0 {
								cx--
							}
							if dy < 0 {
								cy--
							}
							return c.at(cx, cy)
						}
						// Filled in the quarter inside, and not beside it.
						if cell(-right, -up) && !cell(right, -up) && !cell(-right, up) {
							out = append(out, corner{x, y, right, up})
						}
					}
				}
			}
		}
		return out
	}
	holds := func(c cells, e edge, from, to, width int64) bool {
		for u := from - width; u <= to; u++ {
			if u+width <= from || u >= to {
				continue
			}
			full := true
			for i := range width {
				for k := range width {
					v := e.at - 1 - k
					if e.out < 0 {
						v = e.at + k
					}
					if e.axis == 0 {
						full = full && c.at(u+i, v)
					} else {
						full = full && c.at(v, u+i)
					}
				}
			}
			if full {
				return true
			}
		}
		return false
	}
	for _, e := range edgesOf(p) {
		for _, f := range edgesOf(q) {
			gap, from, to := (f.at-e.at)*e.out, max(e.from, f.from), min(e.to, f.to)
			if e.axis != f.axis || e.out != -f.out || gap <= 0 || from >= to {
				continue
			}
			limit := r.ofKinds(e.tip, f.tip)
			for _, w := range r.wide {
				if holds(p, e, from, to, w.width) || holds(q, f, from, to, w.width) {
					limit = max(limit, w.spacing)
				}
			}
			if gap < limit {
				return true
			}
		}
	}
	for _, c := range cornersOf(p) {
		for _, d := range cornersOf(q) {
			dx, dy := (d.x-c.x)*c.right, (d.y-c.y)*c.up
			if c.right == -d.right && c.up == -d.up && dx >= 0 && dy >= 0 && dx*dx+dy*dy < r.corner*r.corner {
				return true
			}
		}
	}
	return false
}

// Random pieces of rectangles on a small field, under random rules: the fast way, the way with fractions and the slow one over
// cells must agree. A square of a width that fits with its side anywhere also fits with it on whole units, since all outlines
// are on whole units; so the slow one needs to look at these alone.
func TestFacingAgainstCells(t *testing.T) {
	rng := rand.New(rand.NewPCG(43, 44))
	some := [2]int{}
	for round := 0; some[0]+some[1] < 3000; round++ {
		spacing := func() int64 { return 2 + rng.Int64N(6) }
		r := &facing{sideToSide: spacing(), tipToSide: spacing(), tipToTip: spacing(), corner: spacing(), other: spacing(), tipWidth: rng.Int64N(4)}
		for range rng.IntN(3) {
			r.wide = append(r.wide, wideRule{2 + rng.Int64N(4), spacing()})
		}
		r.least = min(r.sideToSide, r.tipToSide, r.tipToTip, r.corner, r.other)
		r.most = max(r.sideToSide, r.tipToSide, r.tipToTip, r.corner, r.other)
		for _, w := range r.wide {
			r.most = max(r.most, w.spacing)
		}
		f := &flat{}
		var maps [2]cells
		var lists [2][]item
		for k := range 2 {
			maps[k] = make(cells, cellField)
			for x := range maps[k] {
				maps[k][x] = make([]bool, cellField)
			}
			for range 1 + rng.IntN(4) {
				x, y := rng.Int64N(cellField-6), rng.Int64N(cellField-6)
				b := geom.Rect{X1: x, Y1: y, X2: x + 1 + rng.Int64N(6), Y2: y + 1 + rng.Int64N(6)}
				lists[k] = append(lists[k], item{b, uint32(len(f.figs)), wholeRect})
				f.figs = append(f.figs, figure{box: b, form: formRect})
				for x := b.X1; x < b.X2; x++ {
					for y := b.Y1; y < b.Y2; y++ {
						maps[k][x][y] = true
					}
				}
			}
		}
		// Only pieces that do not touch are judged.
		touch := false
		for _, a := range lists[0] {
			for _, b := range lists[1] {
				touch = touch || rectRelation(a.box, b.box, 0) == geom.Touch
			}
		}
		if touch {
			continue
		}
		fast, exact := false, false
		for i := range lists[0] {
			for k := range lists[1] {
				a, b := &lists[0][i], &lists[1][k]
				if rectRelation(a.box, b.box, r.most) != geom.Near {
					continue
				}
				pl := newPlace(r, a, b)
				inWindow := func(list []item) (out []item) {
					for _, it := range list {
						if it.box.Meets(pl.window) {
							out = append(out, it)
						}
					}
					return out
				}
				pl.p, pl.q = inWindow(lists[0]), inWindow(lists[1])
				fast = fast || r.near(f, &pl)
				exact = exact || r.slantedNear(f, &pl)
			}
		}
		want := slowNear(r, maps[0], maps[1])
		if fast != want || exact != want {
			t.Fatalf("round %d, rules %+v: %v and %v: near is %v, with fractions %v, over cells %v", round, r, lists[0], lists[1], fast, exact, want)
		}
		if want {
			some[1]++
		} else {
			some[0]++
		}
	}
	if min(some[0], some[1]) < 300 {
		t.Errorf("%d far, %d near: the test is one-sided", some[0], some[1])
	}
}

// What the deck says comes into the rule in half units, and what it leaves out is the plain spacing.
func TestNewFacing(t *testing.T) {
	deck, err := decompose.ParseDeck("deck.toml", []byte(deckHead+"[layer.spacing]\ntip_to_tip = 44\ntip_width = 20\nwide = [{ width = 100, spacing = 60 }]\n"))
	if err != nil {
		t.Fatal(err)
	}
	rules, err := deck.Resolve(0.5e-9)
	if err != nil {
		t.Fatal(err)
	}
	got := newFacing(&rules.Layers[0])
	if got.sideToSide != 144 || got.tipToSide != 144 || got.tipToTip != 176 || got.corner != 144 || got.other != 144 || got.tipWidth != 80 ||
		len(got.wide) != 1 || got.wide[0] != (wideRule{400, 240}) || got.least != 144 || got.most != 240 {
		t.Errorf("rules are %+v", got)
	}
}
