package decompose

import (
	"math/rand/v2"
	"strconv"
	"testing"
)

func itoa(n int) string { return strconv.Itoa(n) }

func TestSplitCoversEachElementOnceWithItsWay(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for round := range 2000 {
		columns, rows := 1+rng.Int64N(12), 1+rng.Int64N(12)
		ways := make([]uint32, columns*rows)
		px, py := 1+rng.Int64N(6), 1+rng.Int64N(3)
		for i := range ways {
			switch c, r := int64(i)%columns, int64(i)/columns; rng.IntN(20) {
			case 0:
				ways[i] = rng.Uint32N(3)
			default:
				ways[i] = uint32((c%px + r%py) % 2)
			}
		}
		seen := make([]int, len(ways))
		for _, p := range splitArray(ways, columns, rows) {
			for r := range p.rows {
				for c := range p.columns {
					i := (p.row+r*p.rowStep)*columns + p.column + c*p.columnStep
					seen[i]++
					if ways[i] != p.way {
						t.Fatalf("round %d: element %d has way %d, its part %d", round, i, ways[i], p.way)
					}
				}
			}
		}
		for i, n := range seen {
			if n != 1 {
				t.Fatalf("round %d: element %d is in %d parts", round, i, n)
			}
		}
	}
}

// Alternating masks along a row take two arrays of double pitch, and a chessboard four.
func TestSplitKnowsMultiplesOfThePitch(t *testing.T) {
	row := make([]uint32, 100)
	board := make([]uint32, 100*60)
	sevenths := make([]uint32, 70)
	for i := range row {
		row[i] = uint32(i % 2)
	}
	for i := range board {
		board[i] = uint32((i%100 + i/100) % 2)
	}
	for i := range sevenths {
		sevenths[i] = uint32(boolInt(i%7 == 3))
	}
	for _, c := range []struct {
		name          string
		ways          []uint32
		columns, rows int64
		most          int
	}{{"row", row, 100, 1, 2}, {"column", row, 1, 100, 2}, {"chessboard", board, 100, 60, 4}, {"every seventh", sevenths, 70, 1, 7}} {
		if got := len(splitArray(c.ways, c.columns, c.rows)); got > c.most {
			t.Errorf("%s: %d parts, %d are enough", c.name, got, c.most)
		}
	}
}

func TestParityAgreesWithColouring(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 2))
	for round := range 2000 {
		n := 2 + rng.IntN(12)
		colour := make([]uint32, n)
		for i := range colour {
			colour[i] = rng.Uint32N(2)
		}
		p := newParity(make([]uint32, n))
		for range 2 * n {
			a, b := rng.IntN(n), rng.IntN(n)
			if !p.relate(uint32(a), uint32(b), colour[a]^colour[b]) {
				t.Fatalf("round %d: what a colouring says is refused", round)
			}
			ra, pa := p.find(uint32(a))
			rb, pb := p.find(uint32(b))
			if ra != rb || pa^pb != colour[a]^colour[b] {
				t.Fatalf("round %d: %d and %d are related as %d", round, a, b, pa^pb)
			}
			if a != b && p.relate(uint32(a), uint32(b), 1^colour[a]^colour[b]) {
				t.Fatalf("round %d: the contrary of what is known is taken", round)
			}
		}
	}
}
