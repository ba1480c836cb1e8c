package main

import "testing"

// By hand: the pair has 6 x 4 contacts, with the dummy column 7 x 4; the ring 2 x 11 + 2 x 6; the array 8 x 8. Near pairs are the gaps
// along rows and columns: 5*4 + 6*3 = 38 in the pair, 6*4 + 7*3 = 45 with the dummy column, 34 in the ring, 2*7*8 = 112 in the array.
// Diagonals are far enough. A checkerboard does all of it, so without orders nothing stays.
//
// In a row of the pair the first contact of a half is three steps from the first one of the other: where they are alike, a pair of the row
// stays. Four rows: at least four pairs, and the gaps between the halves are four. Where they are alike the other way than before, the 12
// contacts of one half have moved, whichever half it is. With a fourth step nothing stays. Memory goes by place: where the dummy column is
// now, and the first two columns of the half behind it, there were the three columns of that half before, each on the mask of the next one
// now. 12 again.
func TestRounds(t *testing.T) {
	s, dir := contacts(), t.TempDir()
	list, err := s.Run(dir)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []struct{ shapes, near, anchored, pairs, moved, status int }{
		{24 + 34 + 64, 38 + 34 + 112, 0, 0, 0, 0},
		{24 + 34 + 64, 38 + 34 + 112, 2, 4, 12, 1},
		{28 + 34 + 64, 45 + 34 + 112, 2, 0, 12, 0},
	} {
		l := &list[i]
		if l.Figures != want.shapes || l.Shapes != want.shapes || l.Near != want.near || l.Components != 3 || l.Anchored != want.anchored ||
			l.Pairs != want.pairs || l.MovedN != want.moved || l.Status != want.status || !l.ProvedLowest {
			t.Errorf("round %d: %+v, want %+v", i, *l, want)
		}
	}
	if err := s.Stale(".", dir, list); err != nil {
		t.Error(err)
	}
}
