package main

import (
	"path/filepath"
	"testing"
)

// What must come out follows from the drawing: wires 20 apart alternate, so the bus beyond the gap has to turn over (6 wires) when two
// lanes close the gap, and the clock (3 wires) when the guard ties it to the mirror, whose left finger is pinned.
func TestWalk(t *testing.T) {
	dir := t.TempDir()
	list, err := block().Run(dir)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []struct{ shapes, known, moved, kept int }{
		{41, 0, 0, 2}, // 3 + 8 + 6 lanes, 3 mirrors of 5 + 2, 3 clock wires
		{43, 41, 6, 1},
		{44, 43, 3, 0},
		{44, 44, 0, 0},
	} {
		o := &list[i]
		if o.Shapes != want.shapes || o.Known != want.known || o.MovedN != want.moved || o.Kept != want.kept || o.Pairs != 0 {
			t.Errorf("round %d: %+v, want %+v", i, *o, want)
		}
	}
	for _, m := range list[1].Moved {
		if m.Box[0] < 520 || m.Box[1] != 0 {
			t.Errorf("the first edit moved %v, which is not in the bus beyond the gap", m.Box)
		}
	}
	for _, m := range list[2].Moved {
		if m.Box[0] < 240 || m.Box[2] > 340 || m.Box[1] != 700 {
			t.Errorf("the second edit moved %v, which is not in the clock", m.Box)
		}
	}
	if err := block().Stale(".", dir, list, filepath.Join("..", "..", "README.md")); err != nil {
		t.Error(err)
	}
}
