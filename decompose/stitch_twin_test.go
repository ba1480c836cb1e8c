package decompose

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"
	"time"

	"maskpair/gds"
)

// This file holds cutting against enumeration. What the pieces are is worked out here from the candidates that the report names, on a
// grid of all coordinates; which cuts are made, and how few pairs stay, is then tried over all assignments.

// twinRules are those of the deck below, in database units.
const (
	twinSpacing = 20
	twinOverlap = 4
	twinPieces  = 6 // least extent of a piece
)

func twinDeck(apply bool) string {
	return fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = %d\n"+
		"[layer.stitch]\nmin_overlap = %d\nmin_piece = %d\napply = %v\n", twinSpacing, twinOverlap, twinPieces, apply)
}

// wireLayout draws rows of random wires that are all shapes of their own: neighbouring rows are 12 apart (near), others at least 34 (far),
// and wires of one row from 8 to 77 apart. Now and then a wire leads across the rows beside the others.
func wireLayout(rng *rand.Rand) []gds.Rect {
	var out []gds.Rect
	rows := 2 + rng.Int32N(3)
	right := int32(0)
	for row := range rows {
		x := rng.Int32N(30)
		for range 1 + rng.IntN(3) {
			w := 20 + rng.Int32N(140)
			out = append(out, gds.Rect{X1: x, Y1: 22 * row, X2: x + w, Y2: 22*row + 10})
			right = max(right, x+w)
			x += w + 8 + rng.Int32N(70)
		}
	}
	if rng.IntN(3) == 0 {
		x := right + 8 + rng.Int32N(10)
		out = append(out, gds.Rect{X1: x, Y1: 0, X2: x + 10, Y2: 22*rows - 12})
	}
	return out
}

// bentLayout draws wires along both axes on tracks 22 apart. Where they meet they are one shape: Ls, Ts, combs, rings; and a wire is drawn
// as one figure, or as two that abut or overlap.
func bentLayout(rng *rand.Rand) []gds.Rect {
	var out []gds.Rect
	for range 4 + rng.IntN(7) {
		at, from := 22*rng.Int32N(5), 11*rng.Int32N(12)
		to := from + 15 + rng.Int32N(100)
		parts := [][2]int32{{from, to}}
		if rng.IntN(3) == 0 {
			middle := (from + to) / 2
			parts = [][2]int32{{from, middle + rng.Int32N(5)}, {middle, to}}
		}
		upright := rng.IntN(3) == 0
		for _, p := range parts {
			r := gds.Rect{X1: p[0], Y1: at, X2: p[1], Y2: at + 10}
			if upright {
				r = gds.Rect{X1: r.Y1, Y1: r.X1, X2: r.Y2, Y2: r.X2}
			}
			out = append(out, r)
		}
	}
	return out
}

// combLayout draws two combs whose teeth come near to each other in several places, with squares between the tips: pairs of shapes of
// which many pieces are near.
func combLayout(rng *rand.Rand) []gds.Rect {
	columns := 3 + rng.Int32N(2)
	out := []gds.Rect{{X1: 0, Y1: 0, X2: 45 * columns, Y2: 10}, {X1: 0, Y1: 70, X2: 45*columns + 3, Y2: 80}}
	tooth := func() int32 { return [4]int32{0, 20, 24, 24}[rng.IntN(4)] }
	for c := range columns {
		x := 45 * c
		if h := tooth(); h > 0 {
			out = append(out, gds.Rect{X1: x, Y1: 10, X2: x + 10, Y2: 10 + h})
		}
		if h := tooth(); h > 0 {
			out = append(out, gds.Rect{X1: x, Y1: 70 - h, X2: x + 10, Y2: 70})
		}
		if rng.IntN(2) == 0 {
			out = append(out, gds.Rect{X1: x + 18, Y1: 32, X2: x + 28, Y2: 46})
		}
	}
	return out
}

// twinShape is a set of figures that hang together.
type twinShape []gds.Rect

func (s twinShape) box() gds.Rect {
	out := s[0]
	for _, r := range s {
		out = gds.Rect{X1: min(out.X1, r.X1), Y1: min(out.Y1, r.Y1), X2: max(out.X2, r.X2), Y2: max(out.Y2, r.Y2)}
	}
	return out
}

// twinGapSq is the squared distance of two sets of rectangles.
func twinGapSq(a, b []gds.Rect) int64 {
	least := int64(1) << 62
	for _, p := range a {
		for _, q := range b {
			dx, dy := int64(max(p.X1-q.X2, q.X1-p.X2, 0)), int64(max(p.Y1-q.Y2, q.Y1-p.Y2, 0))
			least = min(least, dx*dx+dy*dy)
		}
	}
	return least
}

func twinNear(a, b []gds.Rect) bool { return twinGapSq(a, b) < twinSpacing*twinSpacing }

// gathered puts what is joined in one set, by steps from each item to those that are not in a set yet.
func gathered[T any](items []T, joined func(a, b T) bool) [][]T {
	var out [][]T
	in := make([]bool, len(items))
	for i := range items {
		if in[i] {
			continue
		}
		in[i] = true
		set := []T{items[i]}
		for at := 0; at < len(set); at++ {
			for k := range items {
				if !in[k] && joined(set[at], items[k]) {
					in[k] = true
					set = append(set, items[k])
				}
			}
		}
		out = append(out, set)
	}
	return out
}

// twinComponents gives the shapes of a layout by what is near to what.
func twinComponents(figures []gds.Rect) [][]twinShape {
	var shapes []twinShape
	for _, set := range gathered(figures, func(a, b gds.Rect) bool { return twinGapSq([]gds.Rect{a}, []gds.Rect{b}) == 0 }) {
		shapes = append(shapes, set)
	}
	return gathered(shapes, func(a, b twinShape) bool { return twinNear(a, b) })
}

func drawFigures(t *testing.T, figures []gds.Rect) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{LibName: "twin", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
	w.BeginStructure("top")
	for _, r := range figures {
		w.Rectangle(gds.LayerType{Layer: 1}, r)
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// halves gives a box of the report, in half units, in whole ones.
func halves(b Box) gds.Rect {
	return gds.Rect{X1: int32(b.X1 / 2), Y1: int32(b.Y1 / 2), X2: int32(b.X2 / 2), Y2: int32(b.Y2 / 2)}
}

func holds(a, b gds.Rect) bool { return a.X1 <= b.X1 && b.X2 <= a.X2 && a.Y1 <= b.Y1 && b.Y2 <= a.Y2 }

// twinPiece is a piece of a shape.
type twinPiece struct {
	shape int
	rects []gds.Rect
}

// twinCut cuts the shapes of a component at some candidates. A shape without its overlaps falls into cores; a piece is a core with the
// overlaps beside it.
func twinCut(t *testing.T, shapes []twinShape, candidates []StitchCandidate) (pieces []twinPiece, cuts [][2]int) {
	t.Helper()
	used := 0
	for i, s := range shapes {
		var boxes []gds.Rect
		for _, c := range candidates {
			if b := halves(c.Box); twinGapSq(s, []gds.Rect{b}) == 0 {
				boxes = append(boxes, b)
			}
		}
		used += len(boxes)
		var xs, ys []int32
		for _, r := range append(slices.Clone(s), boxes...) {
			xs, ys = append(xs, r.X1, r.X2), append(ys, r.Y1, r.Y2)
		}
		slices.Sort(xs)
		slices.Sort(ys)
		xs, ys = slices.Compact(xs), slices.Compact(ys)
		var cells []gds.Rect // of the shape outside the overlaps
		laps := make([][]gds.Rect, len(boxes))
		for x := range len(xs) - 1 {
			for y := range len(ys) - 1 {
				cell := gds.Rect{X1: xs[x], Y1: ys[y], X2: xs[x+1], Y2: ys[y+1]}
				if !slices.ContainsFunc(s, func(r gds.Rect) bool { return holds(r, cell) }) {
					continue
				}
				if k := slices.IndexFunc(boxes, func(b gds.Rect) bool { return holds(b, cell) }); k >= 0 {
					laps[k] = append(laps[k], cell)
				} else {
					cells = append(cells, cell)
				}
			}
		}
		first := len(pieces)
		for _, core := range gathered(cells, func(a, b gds.Rect) bool { return twinGapSq([]gds.Rect{a}, []gds.Rect{b}) == 0 }) {
			pieces = append(pieces, twinPiece{i, core})
		}
		var mine [][2]int
		for _, lap := range laps {
			var at []int
			for k := first; k < len(pieces); k++ {
				if twinGapSq(lap, pieces[k].rects) == 0 {
					at = append(at, k)
				}
			}
			if len(at) != 2 {
				t.Fatalf("%v: the candidate %v has %d parts of the shape at its ends, not two", s, lap, len(at))
			}
			mine = append(mine, [2]int(at))
		}
		if len(pieces)-first != len(boxes)+1 {
			t.Fatalf("%v: %d cuts part the shape in %d", s, len(boxes), len(pieces)-first)
		}
		for k, lap := range laps { // after all cores are told apart
			for _, p := range mine[k] {
				pieces[p].rects = append(pieces[p].rects, lap...)
			}
		}
		for a := first; a < len(pieces); a++ {
			for b := first; b < a; b++ {
				if !slices.Contains(mine, [2]int{b, a}) && twinNear(pieces[a].rects, pieces[b].rects) {
					t.Fatalf("%v: two pieces that no cut joins are near to each other: %v, %v", s, pieces[b].rects, pieces[a].rects)
				}
			}
		}
		cuts = append(cuts, mine...)
	}
	if used != len(candidates) {
		t.Fatalf("%d of %d candidates lie on the shapes", used, len(candidates))
	}
	return pieces, cuts
}

// checkCandidate holds a candidate against the rules of stitches.
func checkCandidate(t *testing.T, shapes []twinShape, c *StitchCandidate) {
	t.Helper()
	b := halves(c.Box)
	if c.Overlap != twinOverlap || b.X2-b.X1 != twinOverlap && b.Y2-b.Y1 != twinOverlap {
		t.Fatalf("the candidate %v overlaps by %d", b, c.Overlap)
	}
	on := 0
	for _, s := range shapes {
		if gap := twinGapSq(s, []gds.Rect{b}); gap == 0 {
			on++
		} else if gap < twinSpacing*twinSpacing {
			t.Fatalf("the candidate %v is near to another shape %v", b, s)
		}
	}
	if on != 1 {
		t.Fatalf("the candidate %v lies on %d shapes", b, on)
	}
	pieces, _ := twinCut(t, shapes, []StitchCandidate{*c})
	for k := range pieces {
		for m := range k {
			if pieces[k].shape != pieces[m].shape {
				continue
			}
			for _, p := range [2]twinPiece{pieces[k], pieces[m]} {
				if e := twinShape(p.rects).box(); e.X2-e.X1 < twinPieces && b.X2-b.X1 == twinOverlap && b.Y2-b.Y1 != twinOverlap ||
					e.Y2-e.Y1 < twinPieces && b.Y2-b.Y1 == twinOverlap && b.X2-b.X1 != twinOverlap {
					t.Fatalf("the candidate %v leaves a piece within %v", b, e)
				}
			}
		}
	}
}

// twinBest tries all assignments of pieces: fewest unresolved pairs, then fewest cuts.
func twinBest(pieces []twinPiece, cuts [][2]int) (pairs, stitches int) {
	type pair struct{ a, b int }
	near := map[pair][]pair{} // by shapes: pieces
	for i := range pieces {
		for k := range i {
			if pieces[i].shape != pieces[k].shape && twinNear(pieces[i].rects, pieces[k].rects) {
				w := pair{pieces[k].shape, pieces[i].shape}
				near[w] = append(near[w], pair{k, i})
			}
		}
	}
	var lists [][]pair
	for _, l := range near {
		lists = append(lists, l)
	}
	pairs, stitches = 1<<30, 1<<30
	for m := range 1 << (len(pieces) - 1) {
		p, c := 0, 0
		for _, list := range lists {
			for _, q := range list {
				if m>>q.a&1 == m>>q.b&1 {
					p++
					break
				}
			}
		}
		if p > pairs {
			continue
		}
		for _, q := range cuts {
			if m>>q[0]&1 != m>>q[1]&1 {
				c++
			}
		}
		if p < pairs || c < stitches {
			pairs, stitches = p, c
		}
	}
	return pairs, stitches
}

// crowdedPairs counts the pairs of shapes with more than two near pieces.
func crowdedPairs(pieces []twinPiece) int {
	count := map[[2]int]int{}
	for i := range pieces {
		for k := range i {
			if pieces[i].shape != pieces[k].shape && twinNear(pieces[i].rects, pieces[k].rects) {
				count[[2]int{pieces[k].shape, pieces[i].shape}]++
			}
		}
	}
	crowded := 0
	for _, n := range count {
		crowded += boolInt(n > 2)
	}
	return crowded
}

func TestCutsAgainstEnumeration(t *testing.T) {
	t.Run("wires", func(t *testing.T) { cutsAgainstEnumeration(t, wireLayout, 0) })
	t.Run("bent", func(t *testing.T) { cutsAgainstEnumeration(t, bentLayout, 0) })
	t.Run("combs", func(t *testing.T) { cutsAgainstEnumeration(t, combLayout, 5) })
}

// cutsAgainstEnumeration tries layouts, of which so many in a hundred must have crowded pairs.
func cutsAgainstEnumeration(t *testing.T, draw func(*rand.Rand) []gds.Rect, crowds int) {
	rng := rand.New(rand.NewPCG(20, 26))
	tried, cut, left, resolvable, crowded, bent := 0, 0, 0, 0, 0, 0
	most := 1000
	if testing.Short() {
		most = 60
	}
	const mostPieces = 15
	for tried < most {
		figures := draw(rng)
		components := twinComponents(figures)
		byBox := map[gds.Rect]int{} // of a shape: component
		shapes := 0
		for i, c := range components {
			for _, s := range c {
				byBox[s.box()] = i
				shapes++
			}
		}
		if len(byBox) < shapes {
			continue // the report tells shapes by their boxes
		}
		stream := drawFigures(t, figures)
		plain, _ := decomposed(t, stream, twinDeck(false), Options{Jobs: 1})
		l := &plain.Layers[0]
		if len(l.Unresolved) == 0 {
			continue
		}
		wantPairs, wantStitches := 0, 0
		candidates, skip := 0, false
		for i := range l.Unresolved {
			u := &l.Unresolved[i]
			mine := components[byBox[halves(u.Cycle[0].Box)]]
			for k := range u.Candidates {
				checkCandidate(t, mine, &u.Candidates[k])
			}
			pieces, cuts := twinCut(t, mine, u.Candidates)
			if skip = len(pieces) > mostPieces; skip {
				break
			}
			candidates += len(cuts)
			crowded += crowdedPairs(pieces)
			for _, c := range cuts {
				bent += boolInt(len(mine[pieces[c[0]].shape]) > 1)
			}
			p, c := twinBest(pieces, cuts)
			wantPairs, wantStitches = wantPairs+p, wantStitches+c
			if none, _ := twinBest(twinCut(t, mine, nil)); none != len(u.Pairs) {
				t.Fatalf("%v: %d pairs left without cuts, %d need be", figures, len(u.Pairs), none)
			}
			if (p == 0) != (len(u.LeastStitches) > 0) || p == 0 && len(u.LeastStitches) != c || len(u.NotComputed) > 0 {
				t.Fatalf("%v: the least set is %v of %v; enumeration leaves %d pairs with %d cuts", figures, u.LeastStitches, u.Candidates, p, c)
			}
			for k, cand := range u.Candidates {
				if got, _ := twinBest(twinCut(t, mine, u.Candidates[k:k+1])); (got == 0) != cand.Resolves {
					t.Fatalf("%v: candidate %v resolves: %v; enumeration leaves %d pairs", figures, cand.Box, cand.Resolves, got)
				}
			}
			if p == 0 {
				resolvable++
			}
		}
		if skip {
			continue
		}
		tried++
		left += wantPairs
		if candidates == 0 {
			continue
		}
		applied, _ := decomposed(t, stream, twinDeck(true), Options{Jobs: 1})
		m := &applied.Layers[0]
		if int(m.UnresolvedPairs) != wantPairs || int(m.Stitches) != wantStitches {
			t.Fatalf("%v: %d pairs left and %d cuts made, want %d and %d", figures, m.UnresolvedPairs, m.Stitches, wantPairs, wantStitches)
		}
		if int(m.LowerBound) != wantPairs || !m.ProvedOptimal || int(m.StitchesBound) != wantStitches || !m.AimsProved {
			t.Fatalf("%v: lower bound %d of %d, %d of %d stitches, proved %v, %v", figures, m.LowerBound, wantPairs, m.StitchesBound, wantStitches, m.ProvedOptimal, m.AimsProved)
		}
		cut += wantStitches
	}
	if cut < most/100 || left < most/2 || resolvable < most/100 || crowded < most/100*crowds {
		t.Errorf("the layouts are too tame: %d cuts, %d pairs left, %d components resolved, %d crowded pairs", cut, left, resolvable, crowded)
	}
	t.Logf("%d layouts, %d cuts, %d pairs left, %d components resolved, %d crowded pairs, %d candidates on shapes of several figures", tried, cut, left, resolvable, crowded, bent)
}
