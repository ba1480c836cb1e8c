package geom

// Placed is a polygon with its place.
type Placed struct {
	Polygon *Polygon
	At      Placement
}

// Parts is a figure or shape: rectangles and placed polygons.
type Parts struct {
	Rects    []Rect
	Polygons []Placed
}

// Closest gives points of a and b that come nearest, rounded to whole units, and the squared distance.
func Closest(a, b Parts) (from, to Point, distanceSq float64) { return }

// UnionAreaPolygons is the area that rectangles and polygons cover together.
func UnionAreaPolygons(parts Parts) float64 { return 0 }
