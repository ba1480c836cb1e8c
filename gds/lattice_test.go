package gds

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

func TestLattice(t *testing.T) {
	lib := &Library{Placements: []Placement{
		{Columns: 3, Rows: 2, ColumnEnd: Point{310, 20}, RowEnd: Point{10, 220}},  // upright
		{Columns: 2, Rows: 5, ColumnEnd: Point{10, 60}, RowEnd: Point{-140, 20}},  // turned
		{Columns: 2, Rows: 2, ColumnEnd: Point{110, 40}, RowEnd: Point{50, 220}},  // skewed
		{Columns: 3, Rows: 1, ColumnEnd: Point{110, 20}, RowEnd: Point{10, 20}},   // 100 is no multiple of 3
		{Columns: 1, Rows: 1, ColumnEnd: Point{111, 27}, RowEnd: Point{13, 1001}}, // one element: no steps
		{Columns: 65535, Rows: 65535, ColumnEnd: Point{math.MaxInt32, math.MinInt32}, RowEnd: Point{math.MinInt32, math.MaxInt32}},
	}}
	for i, want := range []Lattice{
		{Columns: 3, Rows: 2, ColumnX: 100, RowY: 100, Exact: true},
		{Columns: 2, Rows: 5, ColumnY: 20, RowX: -30, Exact: true},
		{Columns: 2, Rows: 2, ColumnX: 50, ColumnY: 10, RowX: 20, RowY: 100, Exact: true},
		{Columns: 3, Rows: 1, ColumnX: 33},
		{Columns: 1, Rows: 1, Exact: true},
		{Columns: 65535, Rows: 65535, ColumnX: 32768, ColumnY: -32768, RowX: -32768, RowY: 32768},
	} {
		ref := &Ref{At: Point{10, 20}, Array: true, Extra: uint32(i + 1)}
		got := lib.Lattice(ref)
		if got.Exact && got != want || got.Exact != want.Exact || got.Columns != want.Columns || got.Rows != want.Rows {
			t.Errorf("lattice %d is %+v, not %+v", i, got, want)
		}
		if !got.Exact {
			continue
		}
		p := lib.PlacementOf(ref)
		for c := range p.Columns {
			for r := range p.Rows {
				x, y := p.Element(ref.At, c, r)
				wx := 10 + int64(c)*got.ColumnX + int64(r)*got.RowX
				wy := 20 + int64(c)*got.ColumnY + int64(r)*got.RowY
				if x != wx || y != wy {
					t.Errorf("lattice %d: element (%d, %d) lies at (%d, %d), not (%d, %d)", i, c, r, x, y, wx, wy)
				}
			}
		}
	}
	if got := lib.Lattice(&Ref{At: Point{7, 7}}); got != (Lattice{Columns: 1, Rows: 1, Exact: true}) {
		t.Errorf("the lattice of a single placement is %+v", got)
	}
	if lib.PlacementOf(&Ref{}) != nil {
		t.Error("a single placement has a Placement")
	}
}

// TestElementRounds holds the places of array elements against fractions, over the whole plane and the largest counts.
func TestElementRounds(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	ties := 0
	for i := range 100000 {
		coordinate := func() int32 {
			switch r.IntN(4) {
			case 0:
				return math.MaxInt32 - int32(r.IntN(2))
			case 1:
				return math.MinInt32 + int32(r.IntN(2))
			}
			return int32(r.IntN(200) - 100)
		}
		count := func() int32 {
			if i%2 == 0 {
				return 1 + int32(r.IntN(6))
			}
			return 65535 - int32(r.IntN(3))
		}
		l := level{ref: Ref{At: Point{coordinate(), coordinate()}}, p: &Placement{Columns: count(), Rows: count(),
			ColumnEnd: Point{coordinate(), coordinate()}, RowEnd: Point{coordinate(), coordinate()}}}
		l.column, l.row = l.p.Columns-1-int32(r.IntN(int(min(l.p.Columns, 9)))), int32(r.IntN(int(l.p.Rows)))
		x, y := l.p.Element(l.ref.At, l.column, l.row)
		wx, wy := l.place()
		if wx.Cmp(big.NewInt(x)) != 0 || wy.Cmp(big.NewInt(y)) != 0 {
			t.Fatalf("%+v %+v: element (%d, %d) lies at (%d, %d), not (%v, %v)", l.ref, *l.p, l.column, l.row, x, y, wx, wy)
		}
		if l.p.Columns == 2 && l.p.Rows == 1 && l.column == 1 && (l.p.ColumnEnd.X-l.ref.At.X)&1 != 0 {
			ties++
		}
	}
	if ties < 100 {
		t.Errorf("only %d places lay between two units", ties)
	}
}
