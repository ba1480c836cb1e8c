package geom

import "slices"

// Equal tells whether two polygons were made of the same outline. It may be false for polygons that cover the same and were drawn
// from another corner or the other way round.
func (p *Polygon) Equal(q *Polygon) bool {
	return p == q || p.fill == q.fill && p.swapped == q.swapped && slices.Equal(p.edges, q.edges)
}
