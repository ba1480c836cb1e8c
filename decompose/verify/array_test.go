package verify

import (
	"math/rand/v2"
	"testing"

	"maskpair/gds"
)

// split cuts a grid of cells at random into arrays and single places, each cell in one of them.
func splitGrid(rng *rand.Rand, columns, rows int32) [][4]int32 { // first column and row, columns, rows
	if columns*rows == 1 || rng.IntN(3) == 0 {
		return [][4]int32{{0, 0, columns, rows}}
	}
	var out [][4]int32
	if columns > 1 && (rows == 1 || rng.IntN(2) == 0) {
		k := 1 + rng.Int32N(columns-1)
		out = splitGrid(rng, k, rows)
		for _, p := range splitGrid(rng, columns-k, rows) {
			out = append(out, [4]int32{p[0] + k, p[1], p[2], p[3]})
		}
		return out
	}
	k := 1 + rng.Int32N(rows-1)
	out = splitGrid(rng, columns, k)
	for _, p := range splitGrid(rng, columns, rows-k) {
		out = append(out, [4]int32{p[0], p[1] + k, p[2], p[3]})
	}
	return out
}

// An array cut into parts is made up of them; with a part moved, stretched or doubled for another it is not. Lattices are
// straight, rotated, skewed, and such whose steps lie on one line or are no whole units.
func TestArraysMadeUpOfParts(t *testing.T) {
	rng := rand.New(rand.NewPCG(13, 14))
	for round := range 3000 {
		columns, rows := 1+rng.Int32N(6), 1+rng.Int32N(6)
		at := gds.Point{X: rng.Int32N(1000) - 500, Y: rng.Int32N(1000) - 500}
		cx, cy, rx, ry := int32(40), int32(0), int32(0), int32(30)
		switch round % 4 {
		case 1:
			cx, cy, rx, ry = 30, 40, -40, 30
		case 2:
			cx, cy, rx, ry = 30, 7, -11, 45
		case 3:
			cx, cy, rx, ry = 30, 0, 1000, 0
		}
		array := func(at gds.Point, columns, rows int32) grid {
			return grid{at, gds.Placement{Columns: columns, Rows: rows,
				ColumnEnd: gds.Point{X: at.X + columns*cx, Y: at.Y + columns*cy}, RowEnd: gds.Point{X: at.X + rows*rx, Y: at.Y + rows*ry}}}
		}
		whole := array(at, columns, rows)
		var parts []grid
		for _, p := range splitGrid(rng, columns, rows) {
			parts = append(parts, array(gds.Point{X: at.X + p[0]*cx + p[1]*rx, Y: at.Y + p[0]*cy + p[1]*ry}, p[2], p[3]))
		}
		rng.Shuffle(len(parts), func(i, k int) { parts[i], parts[k] = parts[k], parts[i] })
		if same, err := whole.madeUpOf(parts); err != nil || !same {
			t.Fatalf("%v is not made up of %v (%v)", whole, parts, err)
		}
		i := rng.IntN(len(parts))
		broken := append([]grid(nil), parts...)
		switch {
		case rng.IntN(3) == 0:
			broken[i].at.X++
			broken[i].p.ColumnEnd.X++
			broken[i].p.RowEnd.X++
		case broken[i].p.Columns > 1 && rng.IntN(2) == 0:
			broken[i].p.ColumnEnd.Y += broken[i].p.Columns
		case len(parts) > 1 && parts[i].size() == parts[(i+1)%len(parts)].size():
			broken[i] = parts[(i+1)%len(parts)]
		default:
			continue
		}
		if same, err := whole.madeUpOf(broken); err != nil || same {
			t.Fatalf("%v is made up of %v (%v)", whole, broken, err)
		}
	}
}

// Steps that are no whole units: every place is rounded by itself, so that single references can stand for them.
func TestArrayOfFractionalSteps(t *testing.T) {
	whole := grid{gds.Point{}, gds.Placement{Columns: 4, Rows: 1, ColumnEnd: gds.Point{X: 10}, RowEnd: gds.Point{Y: 5}}}
	single := func(x int32) grid { return grid{gds.Point{X: x}, gds.Placement{Columns: 1, Rows: 1}} }
	// 0, 2.5, 5, 7.5: ties go to the even unit.
	if same, err := whole.madeUpOf([]grid{single(0), single(2), single(5), single(8)}); err != nil || !same {
		t.Errorf("places 0, 2, 5, 8 do not make up the array (%v)", err)
	}
	if same, err := whole.madeUpOf([]grid{single(0), single(3), single(5), single(8)}); err != nil || same {
		t.Errorf("places 0, 3, 5, 8 make up the array (%v)", err)
	}
}
