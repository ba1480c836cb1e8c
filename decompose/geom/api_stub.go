package geom

// Polygon is an any-angle figure cut into bands.
type Polygon struct{}

// Band is a part of a polygon.
type Band struct {
	Box Rect
}

// NewPolygon cuts an outline into bands.
func NewPolygon(outline []Point, fill Fill) *Polygon { return &Polygon{} }

// Bands of the polygon; read only.
func (p *Polygon) Bands() []Band { return nil }

// Box is the bounding box of the filled area.
func (p *Polygon) Box() Rect { return Rect{} }

// HasArea tells whether the polygon covers anything; exact.
func (p *Polygon) HasArea() bool { return false }

// Area is the filled area (float: crossings may have fractional places).
func (p *Polygon) Area() float64 { return 0 }

// BandRelation compares band i of p with band j of q as placed.
func BandRelation(p *Polygon, i int, pp Placement, q *Polygon, j int, qp Placement, s int64) Relation {
	return Far
}

// BandRectRelation compares band i of p as placed with a rectangle of the plane.
func BandRectRelation(p *Polygon, i int, pp Placement, r Rect, s int64) Relation { return Far }

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
