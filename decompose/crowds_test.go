package decompose

import (
	"testing"

	"maskpair/gds"
)

// TestGridOfContacts: 40 by 40 contacts of which each is near to the eight around it. The treewidth is about 40; the number comes with a bound less than a tenth below it. A row on A and the
// next on B leaves the pairs along the rows, 40*39, so no more may stay.
func TestGridOfContacts(t *testing.T) {
	side := int64(40)
	if testing.Short() {
		side = 16 // the race detector makes the work many times as long
	}
	var figures []gds.Rect
	for x := range int32(side) {
		for y := range int32(side) {
			figures = append(figures, gds.Rect{X1: 20 * x, Y1: 20 * y, X2: 20*x + 10, Y2: 20*y + 10})
		}
	}
	// 10 apart along the axes, 14.1 across.
	deck := "unit = \"nm\"\n[[layer]]\nname = \"m\"\ndrawn = \"1/0\"\nmask_a = \"2/0\"\nmask_b = \"3/0\"\nsame_mask_spacing = 15\n"
	result, _ := decomposed(t, drawFigures(t, figures), deck, Options{})
	l := &result.Layers[0]
	if want := 2*side*(side-1) + 2*(side-1)*(side-1); l.NearPairs != want {
		t.Fatalf("%d near pairs, want %d", l.NearPairs, want)
	}
	if l.UnresolvedPairs > side*(side-1) || 10*(l.UnresolvedPairs-l.LowerBound) >= l.UnresolvedPairs || l.LowerBound > l.UnresolvedPairs {
		t.Errorf("%d pairs stay, at least %d", l.UnresolvedPairs, l.LowerBound)
	}
	if l.ProvedOptimal != (l.UnresolvedPairs == l.LowerBound) || l.Unresolved[0].LowerBound != l.LowerBound || len(l.Unresolved[0].Cycle) != 3 {
		t.Errorf("proved %v, %+v", l.ProvedOptimal, l.Unresolved[0].Cycle)
	}
}
