package geom

import (
	"cmp"
	"math"
	"math/bits"
	"slices"
	"sync"
)

// This file cuts an any-angle figure into bands. Slabs across the longer axis of its box cut it; in each slab the edges
// leave gaps, columns that no edge enters; a gap is filled all over or empty all over. What lies between empty gaps is a
// band: its box, and all edges that reach into it. A ring thus has a left and a right band in each slab.
//
// Two properties make bands enough for every question about distances:
//   - each point of the figure lies in the box of a band, and each point of its boundary on an edge listed there;
//   - left of a band the slab is empty, so the winding number of a point in the box is that of the band's own edges.
//
// Long edges are listed in every slab that they cross; the number of slabs is held down so that all lists together stay
// within a few times n.

// Polygon is a figure with edges at any angle, in local coordinates. It does not change once made, and any number of
// goroutines may use it.
type Polygon struct {
	fill    Fill
	swapped bool // x and y change places inside: the slabs are upright
	edges   []edge
	bands   []Band
	lists   []int32 // indices into edges
	within  []Point // a point of each connected part of the boundary
	box     Rect
	twice   float64 // twice the area of a convex figure, else below 0 until measured
	measure sync.Once
}

// Band is a part of a polygon: all of it within Box, local coordinates.
type Band struct {
	Box              Rect
	first, end       int32 // its edges: lists[first:end]
	firstIn, afterIn int32 // within[firstIn:afterIn] lie in it
}

// NewPolygon makes the figure that a closed outline fills. The outline may start anywhere, run either way, repeat points,
// close itself or not, and meet or cross itself; its points are copied.
func NewPolygon(outline []Point, fill Fill) *Polygon {
	p := &Polygon{fill: fill}
	around := BoxOf(outline)
	if around.X2-around.X1 > around.Y2-around.Y1 {
		p.swapped = true
		turned := make([]Point, len(outline))
		for i, q := range outline {
			turned[i] = Point{q.Y, q.X}
		}
		outline = turned
	}
	asDrawn := true
	if twice, convex := convexTwice(outline); convex { // nothing overlaps
		p.edges, p.twice = directed(outline), twice.float()
	} else {
		p.edges, asDrawn = boundary(outline, fill)
		p.twice = -1
	}
	edges := p.edges
	if len(edges) == 0 {
		return p
	}
	box := Rect{edges[0].a.X, edges[0].a.Y, edges[0].a.X, edges[0].a.Y}
	for _, e := range edges {
		box = box.Union(Rect{min(e.a.X, e.b.X), e.a.Y, max(e.a.X, e.b.X), e.b.Y})
	}
	p.box = p.swap(box)
	cuts := slabs(edges, box, outline)
	if len(cuts) == 2 && p.twice >= 0 { // a convex figure as one band
		p.lists = make([]int32, len(edges))
		for i := range p.lists {
			p.lists[i] = int32(i)
		}
		p.within = []Point{edges[0].a}
		p.bands = []Band{{p.box, 0, int32(len(edges)), 0, 1}}
		return p
	}
	starts := p.cut(cuts)
	p.spread(p.parts(asDrawn), cuts, starts)
	return p
}

// Bands gives the bands of the polygon, none if it has no area. The slice is shared: read only.
func (p *Polygon) Bands() []Band { return p.bands }

// Box is the bounding box of the filled area, local coordinates.
func (p *Polygon) Box() Rect { return p.box }

// HasArea tells whether the polygon covers anything. It is exact, also for outlines whose signed area cancels.
func (p *Polygon) HasArea() bool { return len(p.edges) > 0 }

// Edges gives the boundary of the polygon piece by piece, local coordinates: every boundary point of the figure lies on a
// piece, and every piece in the figure (with NonZero also inside it).
func (p *Polygon) Edges(yield func(a, b Point) bool) {
	for _, e := range p.edges {
		if p.swapped {
			e.a, e.b = Point{e.a.Y, e.a.X}, Point{e.b.Y, e.b.X}
		}
		if !yield(e.a, e.b) {
			return
		}
	}
}

// swap turns rectangles between local coordinates and the frame in which edges are kept.
func (p *Polygon) swap(r Rect) Rect {
	if p.swapped {
		return Rect{r.Y1, r.X1, r.Y2, r.X2}
	}
	return r
}

// frame leads from the frame in which edges are kept to the plane, for a polygon placed at t. Exchanging x and y is
// mirroring about the x axis and a quarter turn.
func (p *Polygon) frame(t Placement) Placement {
	if p.swapped {
		return t.After(Placement{Turn: 5})
	}
	return t
}

// slabs chooses the heights at which a polygon is cut, first and last those of its box: quantiles of the vertices, so that
// each slab has few, and even steps where the figure fills little of its box, as a slanted wire does.
func slabs(edges []edge, box Rect, outline []Point) []int64 {
	const mostEven = 128
	n := len(edges)
	byVertex := min(n/8, 8+2*int(math.Sqrt(float64(n))))
	var twice float64 // signed area; only a guess where the outline crosses itself
	o := outline[0]
	for i, q := range outline[1:] {
		q0 := outline[i]
		twice += mul(q0.X-o.X, q.Y-o.Y).sub(mul(q.X-o.X, q0.Y-o.Y)).float()
	}
	width, height := float64(box.X2-box.X1), box.Y2-box.Y1
	even := int(min(width*float64(height)/max(math.Abs(twice)*2, 1), mostEven))
	even = int(min(int64(even), height))
	if byVertex < 2 && even < 2 {
		return []int64{box.Y1, box.Y2}
	}
	ys := make([]int64, 0, 2*n)
	for _, e := range edges {
		ys = append(ys, e.a.Y, e.b.Y)
	}
	slices.Sort(ys)
	for {
		cuts := []int64{box.Y1, box.Y2}
		for k := 1; k < byVertex; k++ {
			cuts = append(cuts, ys[k*len(ys)/byVertex])
		}
		for k := 1; k < even; k++ {
			cuts = append(cuts, box.Y1+height*int64(k)/int64(even))
		}
		cuts = distinct(cuts)
		listed := 0
		for _, e := range edges {
			low, high := slabRange(cuts, e)
			listed += high - low + 1
		}
		if listed <= 4*n+4*mostEven || len(cuts) == 2 {
			return cuts
		}
		byVertex, even = byVertex/2, even/2
	}
}

// slabRange gives the first and last slab that e touches; slab k is closed, from cuts[k] to cuts[k+1].
func slabRange(cuts []int64, e edge) (low, high int) {
	low, _ = slices.BinarySearch(cuts, e.a.Y)
	high, exact := slices.BinarySearch(cuts, e.b.Y)
	if !exact {
		high--
	}
	return max(low-1, 0), min(high, len(cuts)-2)
}

// piece is the part of an edge in a slab, rounded outwards.
type piece struct {
	box  Rect
	edge int32
}

// cut makes the bands; starts[k] is the number of the first band of slab k.
func (p *Polygon) cut(cuts []int64) (starts []int32) {
	slabCount := len(cuts) - 1
	fillTo := make([]int32, slabCount+1)
	for _, e := range p.edges {
		low, high := slabRange(cuts, e)
		for k := low; k <= high; k++ {
			fillTo[k+1]++
		}
	}
	for k := range slabCount {
		fillTo[k+1] += fillTo[k]
	}
	pieces := make([]piece, fillTo[slabCount])
	next := slices.Clone(fillTo[:slabCount])
	for i, e := range p.edges {
		low, high := slabRange(cuts, e)
		for k := low; k <= high; k++ {
			pieces[next[k]] = piece{clip(e, cuts[k], cuts[k+1]), int32(i)}
			next[k]++
		}
	}
	p.lists = make([]int32, len(pieces))
	starts = make([]int32, slabCount+1)
	for k := range slabCount {
		starts[k] = int32(len(p.bands))
		p.cutSlab(pieces[fillTo[k]:fillTo[k+1]], fillTo[k], cuts[k])
	}
	starts[slabCount] = int32(len(p.bands))
	return starts
}

// cutSlab makes the bands of one slab from the pieces in it, whose edges are listed from first on.
//
// A gap between pieces is free of edges over the whole height of the slab, so its winding number is that just above the
// lower rim, which edges cross that begin at it or below and end above it.
func (p *Polygon) cutSlab(pieces []piece, first int32, rim int64) {
	slices.SortFunc(pieces, func(a, b piece) int {
		if a.box.X1 != b.box.X1 {
			return cmp.Compare(a.box.X1, b.box.X1)
		}
		return cmp.Compare(a.edge, b.edge)
	})
	var wind int32
	open := false
	for i, c := range pieces {
		p.lists[first+int32(i)] = c.edge
		if open && c.box.X1 > p.bands[len(p.bands)-1].Box.X2 && !p.full(wind) {
			open = false
		}
		if !open {
			p.bands = append(p.bands, Band{Box: c.box, first: first + int32(i)})
			open = true
		}
		band := &p.bands[len(p.bands)-1]
		band.Box = band.Box.Union(c.box)
		band.end = first + int32(i) + 1
		if e := p.edges[c.edge]; e.a.Y <= rim && rim < e.b.Y {
			wind += e.w
		}
	}
}

// full tells whether points of this winding number are filled.
func (p *Polygon) full(wind int32) bool {
	if p.fill == EvenOdd {
		return wind&1 != 0
	}
	return wind != 0
}

// clip gives the box of the part of e between two heights that it reaches.
func clip(e edge, low, high int64) Rect {
	x1, x2, x3, x4 := e.a.X, e.a.X, e.b.X, e.b.X
	if e.a.Y < low {
		x1, x2 = along(e, low)
	}
	if e.b.Y > high {
		x3, x4 = along(e, high)
	}
	return Rect{min(x1, x3), max(e.a.Y, low), max(x2, x4), min(e.b.Y, high)}
}

// along gives the x of e at a height strictly between its ends, rounded down and up. The quotient is at most the width of
// the edge, so it fits.
func along(e edge, y int64) (floor, ceil int64) {
	dx, dy := e.b.X-e.a.X, e.b.Y-e.a.Y
	hi, lo := bits.Mul64(uint64(y-e.a.Y), uint64(max(dx, -dx)))
	q, rest := bits.Div64(hi, lo, uint64(dy))
	more := int64(0)
	if rest != 0 {
		more = 1
	}
	if dx < 0 {
		return e.a.X - int64(q) - more, e.a.X - int64(q)
	}
	return e.a.X + int64(q), e.a.X + int64(q) + more
}

// parts gives a point of each connected part of the boundary. An outline as drawn is connected; else pieces that share an
// end belong together. (Pieces that only cross may count as apart: a point more does no harm.)
func (p *Polygon) parts(asDrawn bool) []Point {
	if asDrawn {
		return []Point{p.edges[0].a}
	}
	type tip struct {
		at   Point
		edge int32
	}
	tips := make([]tip, 0, 2*len(p.edges))
	root := make([]int32, len(p.edges))
	for i, e := range p.edges {
		root[i] = int32(i)
		tips = append(tips, tip{e.a, int32(i)}, tip{e.b, int32(i)})
	}
	find := func(i int32) int32 {
		for root[i] != i {
			root[i] = root[root[i]]
			i = root[i]
		}
		return i
	}
	slices.SortFunc(tips, func(s, t tip) int { return before(s.at, t.at) })
	for i := 1; i < len(tips); i++ {
		if tips[i].at == tips[i-1].at {
			a, b := find(tips[i-1].edge), find(tips[i].edge)
			root[max(a, b)] = min(a, b)
		}
	}
	var out []Point
	for i, e := range p.edges {
		if find(int32(i)) == int32(i) {
			out = append(out, e.a)
		}
	}
	return out
}

// spread gives each point to a band that holds it.
func (p *Polygon) spread(points []Point, cuts []int64, starts []int32) {
	type given struct {
		band int32
		at   Point
	}
	var all []given
	for _, q := range points {
		k, exact := slices.BinarySearch(cuts, q.Y)
		if !exact {
			k--
		}
		k = min(k, len(cuts)-2)
		for b := starts[k]; b < starts[k+1]; b++ {
			if p.bands[b].Box.Contains(q) {
				all = append(all, given{b, q})
				break
			}
		}
	}
	slices.SortFunc(all, func(a, b given) int { return cmp.Compare(a.band, b.band) })
	next := 0
	for b := range p.bands {
		band := &p.bands[b]
		band.firstIn = int32(next)
		for next < len(all) && all[next].band == int32(b) {
			p.within = append(p.within, all[next].at)
			next++
		}
		band.afterIn = int32(next)
		band.Box = p.swap(band.Box)
	}
}

// holds tells whether a point in the box of band i, in the frame of the edges, is in the filled area; on the boundary
// either answer may come. A ray to the left crosses the edges that have the point on their right.
func (p *Polygon) holds(i int, q Point) bool {
	var wind int32
	band := &p.bands[i]
	for _, k := range p.lists[band.first:band.end] {
		if e := &p.edges[k]; e.a.Y <= q.Y && q.Y < e.b.Y && Orient(e.a, e.b, q) < 0 {
			wind += e.w
		}
	}
	return p.full(wind)
}
