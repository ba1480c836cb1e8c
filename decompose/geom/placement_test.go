package geom

import "testing"

// What the eight orientations do to (2, 1), from the manual's order: mirror about the x axis, then turn counter-clockwise.
func TestPlacementOrientations(t *testing.T) {
	want := []Point{{2, 1}, {-1, 2}, {-2, -1}, {1, -2}, {2, -1}, {1, 2}, {-2, 1}, {-1, -2}}
	for turn, w := range want {
		at := Placement{uint8(turn), 10, 20}
		if got := at.Apply(Point{2, 1}); got != (Point{w.X + 10, w.Y + 20}) {
			t.Errorf("turn %d: %v, want %v", turn, got, Point{w.X + 10, w.Y + 20})
		}
		if got := at.Inverse().Apply(at.Apply(Point{2, 1})); got != (Point{2, 1}) {
			t.Errorf("turn %d there and back: %v", turn, got)
		}
		if got := at.ApplyRect(Rect{0, 0, 2, 1}); got.X2-got.X1+got.Y2-got.Y1 != 3 || !got.Contains(Point{10, 20}) || !got.Contains(at.Apply(Point{2, 1})) {
			t.Errorf("turn %d: box %v", turn, got)
		}
		for inner := range uint8(8) {
			in := Placement{inner, -7, 3}
			if got, want := at.After(in).Apply(Point{2, 1}), at.Apply(in.Apply(Point{2, 1})); got != want {
				t.Errorf("turn %d after %d: %v, want %v", turn, inner, got, want)
			}
		}
	}
}
