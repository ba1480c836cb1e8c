package main

import (
	"testing"

	"maskpair/examples/scenario"
)

// The rows hold 6 inverters, 3 nands, 3 xors and 3 latches. By hand:
//   - shapes: 4 rails, and 4, 5, 5 and 6 wires a cell: 4 + 24 + 15 + 15 + 18 = 76
//   - near pairs: 2, 4, 5 and 6 a cell: 12 + 12 + 15 + 18 = 57. The two ends in a latch are 52 apart: near where ends keep 60, so 60 then
//   - components: the rails, two of each inverter, one of each other cell: 4 + 12 + 9 = 25
//   - three wires of an xor are all near each other: one pair of each stays, and a cut of the wire that steps mends it
//   - where ends are near, they and a wire that runs along both are all near each other: one pair of each latch stays. No cut helps,
//     since nothing of the long wires is out of reach of what runs beside them
func TestRounds(t *testing.T) {
	s, dir := logicRow(), t.TempDir()
	list, err := s.Run(dir)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []struct{ near, pairs, stitches, status int }{
		{57, 3, 0, 1},
		{57, 0, 3, 0},
		{60, 3, 3, 1},
		{57, 0, 3, 0},
	} {
		l := &list[i]
		if l.Figures != 102 || l.Shapes != 76 || l.Components != 25 || l.Near != want.near || l.Pairs != want.pairs || l.Stitches != want.stitches ||
			l.Status != want.status || l.MovedN != 0 || !l.ProvedLowest {
			t.Errorf("round %d: %+v, want %+v", i, *l, want)
		}
	}
	blamed(t, &list[0], "xor", "same_mask_spacing", 16)
	blamed(t, &list[2], "latch", "tip_to_tip", 8)
	if err := s.Stale(".", dir, list); err != nil {
		t.Error(err)
	}
}

// blamed checks that each pair that stays is in a cell, breaks a rule, and lacks so much. Components that stitches mend have no pair.
func blamed(t *testing.T, l *scenario.Layer, cell, rule string, widen int) {
	t.Helper()
	for _, u := range l.Unresolved {
		if len(u.Pairs) == 0 && l.Stitches > 0 {
			continue
		}
		if u.Cause != "odd_cycle" || len(u.Cycle) != 3 || u.Cell != cell || len(u.Pairs) != 1 || u.Pairs[0].Rule != rule || u.Pairs[0].Widen != widen {
			t.Errorf("unresolved: %+v, want one pair of a cycle of 3 in %s that lacks %d by %s", u, cell, widen, rule)
		}
	}
}
