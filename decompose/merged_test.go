package decompose

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/decompose/geom"
)

// The area of many rectangles is that of all at once, as package geom measures it: of bands that many reach above, of many on one
// height, and at the ends of the plane.
func TestMergedAreaInBands(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	var m merged
	var whole geom.AreaScratch
	talls := []int32{1, 50, 4000, 1 << 20}
	if testing.Short() {
		talls = talls[1:2]
	}
	for _, tall := range talls {
		for _, heights := range []int32{1, 7, 1 << 20} {
			items := make([]item, 3*bandItems+rng.IntN(bandItems))
			for i := range items {
				x, y := rng.Int32N(1<<20), rng.Int32N(heights)
				items[i] = item{X1: x, Y1: y, X2: x + 1 + rng.Int32N(100), Y2: y + 1 + rng.Int32N(tall)}
			}
			items[0] = item{X1: math.MinInt32, Y1: math.MinInt32, X2: math.MinInt32 + 5, Y2: math.MaxInt32}
			slices.SortFunc(items, func(a, b item) int { return int(int64(a.Y1) - int64(b.Y1)) })
			rects := make([]geom.Rect32, len(items))
			for i, it := range items {
				rects[i] = geom.Rect32{X1: it.X1, Y1: it.Y1, X2: it.X2, Y2: it.Y2}
			}
			if got, want := m.area(items), whole.UnionArea32(rects); got != want {
				t.Errorf("up to %d tall on %d heights: %d in bands, %d at once", tall, heights, got, want)
			}
		}
	}
}
