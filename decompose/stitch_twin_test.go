package decompose

import (
	"bytes"
	"math/rand/v2"
	"slices"
	"testing"
	"time"

	"maskpair/gds"
)

// This file holds cutting against enumeration. Wires are single rectangles that touch nothing, so that pieces are intervals, worked out
// here from the candidates that the report names; which cuts are made, and how few pairs stay, is then tried over all assignments.

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

func drawWires(t *testing.T, wires []gds.Rect) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{LibName: "twin", UserUnit: 1e-3, DBU: 1e-9, Time: time.Unix(0, 0)})
	w.BeginStructure("top")
	for _, r := range wires {
		w.Rectangle(gds.LayerType{Layer: 1}, r)
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// twinPiece is a piece of a wire.
type twinPiece struct {
	wire int
	box  gds.Rect
}

func nearRects(a, b gds.Rect, s int32) bool {
	dx, dy := max(a.X1-b.X2, b.X1-a.X2, 0), max(a.Y1-b.Y2, b.Y1-a.Y2, 0)
	return int64(dx)*int64(dx)+int64(dy)*int64(dy) < int64(s)*int64(s)
}

// twinCut cuts the wires of a component at its candidates.
func twinCut(t *testing.T, wires []gds.Rect, u *Unresolved) (pieces []twinPiece, cuts [][2]int) {
	t.Helper()
	for i, w := range wires {
		var boxes []gds.Rect
		for _, c := range u.Candidates {
			b := gds.Rect{X1: int32(c.Box.X1 / 2), Y1: int32(c.Box.Y1 / 2), X2: int32(c.Box.X2 / 2), Y2: int32(c.Box.Y2 / 2)}
			if b.X1 <= w.X2 && w.X1 <= b.X2 && b.Y1 <= w.Y2 && w.Y1 <= b.Y2 {
				boxes = append(boxes, b)
			}
		}
		// A wire is cut across; a square may be cut either way.
		alongX := w.X2-w.X1 > w.Y2-w.Y1 || w.X2-w.X1 == w.Y2-w.Y1 && len(boxes) > 0 && boxes[0].Y1 == w.Y1 && boxes[0].Y2 == w.Y2
		slices.SortFunc(boxes, func(a, b gds.Rect) int { return int(a.X1+a.Y1) - int(b.X1+b.Y1) })
		rest := w
		for _, b := range boxes {
			if alongX != (b.Y1 == w.Y1 && b.Y2 == w.Y2) {
				t.Fatalf("the candidate %v does not lie across the wire %v", b, w)
			}
			p := rest
			if alongX {
				p.X2, rest.X1 = b.X2, b.X1
			} else {
				p.Y2, rest.Y1 = b.Y2, b.Y1
			}
			cuts = append(cuts, [2]int{len(pieces), len(pieces) + 1})
			pieces = append(pieces, twinPiece{i, p})
		}
		pieces = append(pieces, twinPiece{i, rest})
	}
	return pieces, cuts
}

// twinBest tries all assignments of pieces: fewest unresolved pairs, then fewest cuts.
func twinBest(pieces []twinPiece, cuts [][2]int, s int32) (pairs, stitches int) {
	type pair struct{ a, b int }
	near := map[pair][]pair{} // by wires: pieces
	for i := range pieces {
		for k := range i {
			if pieces[i].wire != pieces[k].wire && nearRects(pieces[i].box, pieces[k].box, s) {
				w := pair{pieces[k].wire, pieces[i].wire}
				near[w] = append(near[w], pair{k, i})
			}
		}
	}
	pairs, stitches = 1<<30, 1<<30
	for m := range 1 << (len(pieces) - 1) {
		p, c := 0, 0
		for _, list := range near {
			if slices.ContainsFunc(list, func(q pair) bool { return m>>q.a&1 == m>>q.b&1 }) {
				p++
			}
		}
		for _, q := range cuts {
			if m>>q[0]&1 != m>>q[1]&1 {
				c++
			}
		}
		if p < pairs || p == pairs && c < stitches {
			pairs, stitches = p, c
		}
	}
	return pairs, stitches
}

func TestCutsAgainstEnumeration(t *testing.T) {
	rng := rand.New(rand.NewPCG(20, 26))
	const spacing = 20
	deck := func(apply string) string {
		return "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = 20\n" +
			"[layer.stitch]\nmin_overlap = 4\nmin_piece = 6\napply = " + apply + "\n"
	}
	tried, cut, left, resolvable := 0, 0, 0, 0
	most := 2000
	if testing.Short() {
		most = 200
	}
	for tried < most {
		wires := wireLayout(rng)
		stream := drawWires(t, wires)
		plain, _ := decomposed(t, stream, deck("false"), Options{Jobs: 1})
		l := &plain.Layers[0]
		if len(l.Unresolved) == 0 {
			continue
		}
		wantPairs, wantStitches := 0, 0
		skip := false
		for i := range l.Unresolved {
			u := &l.Unresolved[i]
			// The wires of the component: all wires, where it is the only one; else those that hang together with its cycle.
			mine := componentOf(wires, u, spacing)
			pieces, cuts := twinCut(t, mine, u)
			if len(pieces) > 16 {
				skip = true
				break
			}
			p, c := twinBest(pieces, cuts, spacing)
			wantPairs, wantStitches = wantPairs+p, wantStitches+c
			if none, _ := twinBest(uncut(mine), nil, spacing); none != len(u.Pairs) {
				t.Fatalf("%v: %d pairs left without cuts, %d need be", wires, len(u.Pairs), none)
			}
			if (p == 0) != (len(u.LeastStitches) > 0) || p == 0 && len(u.LeastStitches) != c {
				t.Fatalf("%v: the least set is %v of %v; enumeration leaves %d pairs with %d cuts", wires, u.LeastStitches, u.Candidates, p, c)
			}
			for k, cand := range u.Candidates {
				alone := *u
				alone.Candidates = u.Candidates[k : k+1]
				q, at := twinCut(t, mine, &alone)
				if got, _ := twinBest(q, at, spacing); (got == 0) != cand.Resolves {
					t.Fatalf("%v: candidate %v resolves: %v; enumeration leaves %d pairs", wires, cand.Box, cand.Resolves, got)
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
		if !slices.ContainsFunc(l.Unresolved, func(u Unresolved) bool { return len(u.Candidates) > 0 }) {
			left += wantPairs
			continue
		}
		applied, _ := decomposed(t, stream, deck("true"), Options{Jobs: 1})
		m := &applied.Layers[0]
		if int(m.UnresolvedPairs) != wantPairs || int(m.Stitches) != wantStitches {
			t.Fatalf("%v: %d pairs left and %d cuts made, want %d and %d", wires, m.UnresolvedPairs, m.Stitches, wantPairs, wantStitches)
		}
		if m.LowerBound > int64(wantPairs) || m.ProvedOptimal && m.LowerBound != int64(wantPairs) {
			t.Fatalf("%v: lower bound %d of %d, proved %v", wires, m.LowerBound, wantPairs, m.ProvedOptimal)
		}
		cut += wantStitches
		left += wantPairs
	}
	if cut < most/100 || left < most || resolvable < most/100 {
		t.Errorf("the layouts are too tame: %d cuts, %d pairs left, %d components resolved", cut, left, resolvable)
	}
	t.Logf("%d layouts, %d cuts, %d pairs left, %d components resolved", tried, cut, left, resolvable)
}

func uncut(wires []gds.Rect) []twinPiece {
	var out []twinPiece
	for i, w := range wires {
		out = append(out, twinPiece{i, w})
	}
	return out
}

// componentOf gives the wires that hang together with the cycle of an entry.
func componentOf(wires []gds.Rect, u *Unresolved, s int32) []gds.Rect {
	in := make([]bool, len(wires))
	for i, w := range wires {
		b := u.Cycle[0].Box
		in[i] = w == gds.Rect{X1: int32(b.X1 / 2), Y1: int32(b.Y1 / 2), X2: int32(b.X2 / 2), Y2: int32(b.Y2 / 2)}
	}
	for grown := true; grown; {
		grown = false
		for i := range wires {
			for k := range wires {
				if in[k] && !in[i] && nearRects(wires[i], wires[k], s) {
					in[i], grown = true, true
				}
			}
		}
	}
	var out []gds.Rect
	for i, w := range wires {
		if in[i] {
			out = append(out, w)
		}
	}
	return out
}
