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

// Corner is a corner of a merged outline.
type Corner struct {
	At     Point
	Convex bool
}

// Outline is the boundary of a union of rectangles: loop i is Corners[Start[i]:Start[i+1]], interior on the left.
type Outline struct {
	Corners []Corner
	Start   []int32
}

// Merge gives the outline of the union of rectangles.
func Merge(rects []Rect) Outline { return Outline{} }
