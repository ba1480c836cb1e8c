package decompose

import (
	"math/rand/v2"
	"testing"
)

// twinLack is by how much the gap of two shapes must widen to reach the spacing: the least whole number that, added to their distance, does.
func twinLack(a, b twinShape) int64 {
	sq := twinGapSq(a, b)
	for lack := int64(1); ; lack++ {
		// distance + lack >= spacing, in whole numbers: the distance is at least spacing - lack.
		if rest := twinSpacing - lack; rest <= 0 || sq >= rest*rest {
			return lack
		}
	}
}

// TestRepairsAgainstEnumeration: the gaps to be widened are those that lack least in total, then the fewest, over all assignments; each lacks what is said; and with
// them out of the way, two masks can do what is left.
func TestRepairsAgainstEnumeration(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 13))
	const deck = "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = 20\n"
	most := 800
	if testing.Short() {
		most = 60
	}
	tried, several := 0, 0
	for tried < most {
		figures := bentLayout(rng)
		if tried%2 == 0 {
			figures = combLayout(rng)
		}
		components := twinComponents(figures)
		byBox := map[[4]int32]twinShape{}
		shapes := 0
		for _, c := range components {
			for _, s := range c {
				b := s.box()
				byBox[[4]int32{b.X1, b.Y1, b.X2, b.Y2}] = s
				shapes++
			}
		}
		if len(byBox) < shapes {
			continue // the report tells shapes by their boxes
		}
		shapeAt := func(b Box) twinShape {
			r := halves(b)
			return byBox[[4]int32{r.X1, r.Y1, r.X2, r.Y2}]
		}
		result, _ := decomposed(t, drawFigures(t, figures), deck, Options{Jobs: 1})
		for i := range result.Layers[0].Unresolved {
			u := &result.Layers[0].Unresolved[i]
			for _, p := range append(u.Pairs, u.Repair...) {
				if want := twinLack(shapeAt(p.A), shapeAt(p.B)); p.Widen != want || p.Rule != "same_mask_spacing" || p.Spacing != twinSpacing {
					t.Fatalf("%v: the pair %v, %v is to widen by %d under %s %d, want %d", figures, p.A, p.B, p.Widen, p.Rule, p.Spacing, want)
				}
			}
			if u.Repair == nil {
				continue // an equal component has it
			}
			tried++
			var mine []twinShape
			for _, c := range components {
				for _, s := range c {
					if s.box() == halves(u.Cycle[0].Box) {
						mine = c
					}
				}
			}
			if len(mine) > 14 {
				continue
			}
			least, fewest := int64(1)<<40, 0
			for m := range 1 << (len(mine) - 1) {
				sum, count := int64(0), 0
				for a := range mine {
					for b := range a {
						if m>>a&1 == m>>b&1 && twinNear(mine[a], mine[b]) {
							sum, count = sum+twinLack(mine[a], mine[b]), count+1
						}
					}
				}
				if sum < least || sum == least && count < fewest {
					least, fewest = sum, count
				}
			}
			sum := int64(0)
			for _, p := range u.Repair {
				sum += p.Widen
			}
			if sum != least || len(u.Repair) != fewest {
				t.Fatalf("%v: %d gaps widen by %d, enumeration has %d and %d", figures, len(u.Repair), sum, fewest, least)
			}
			if fewest > 1 {
				several++
			}
			if !twoColourable(mine, u.Repair) {
				t.Fatalf("%v: with the gaps of %v wide enough, two masks still cannot do it", figures, u.Repair)
			}
		}
	}
	if several < most/20 {
		t.Errorf("only %d components need several gaps", several)
	}
}

// twoColourable tells whether the near pairs of some shapes, but for those that are widened, ask for no odd cycle: masks are dealt from shape to shape.
func twoColourable(shapes []twinShape, widened []Pair) bool {
	near := func(a, b int) bool {
		if !twinNear(shapes[a], shapes[b]) {
			return false
		}
		for _, p := range widened {
			x, y := halves(p.A), halves(p.B)
			if shapes[a].box() == x && shapes[b].box() == y || shapes[a].box() == y && shapes[b].box() == x {
				return false
			}
		}
		return true
	}
	mask := make([]int, len(shapes)) // 0: none yet
	for first := range shapes {
		if mask[first] != 0 {
			continue
		}
		mask[first] = 1
		queue := []int{first}
		for len(queue) > 0 {
			a := queue[0]
			queue = queue[1:]
			for b := range shapes {
				if a == b || !near(a, b) {
					continue
				}
				if mask[b] == mask[a] {
					return false
				}
				if mask[b] == 0 {
					mask[b] = 3 - mask[a]
					queue = append(queue, b)
				}
			}
		}
	}
	return true
}
