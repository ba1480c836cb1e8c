package geom

import (
	"cmp"
	"slices"
)

// This file measures the area that polygons and rectangles cover together.
//
// The rectangles are measured exactly; to that comes what the polygons cover beyond them. Polygons are taken in clusters
// whose boxes overlap, each with the rectangles that reach into them, so that a shape of many figures falls into many small
// tasks. A cluster is cut into slabs at the heights of its vertices. In a slab edges are straight lines from rim to rim.
// Sorted by where they leave, they fall into groups such that edges cross only within a group; a group that has crossings
// is cut again at their heights. Between two cuts no lines cross, and a walk from left to right that counts windings figure
// by figure tells at which of them covered and uncovered change.
//
// Places are numbers of 106 bits. A crossing that is off by a tiny height d misjudges an area of d*d times the difference
// of two slopes, so errors stay far below 1e-12 of the result. Edges that coincide, or pass through one point, need no
// care: whichever order they come in, the width between them is 0.

// Placed is a polygon with its place in the plane.
type Placed struct {
	Polygon *Polygon
	At      Placement
}

// Parts is a figure or a whole shape: rectangles and placed polygons of the plane.
type Parts struct {
	Rects    []Rect
	Polygons []Placed
}

// Area is the filled area in square units; its relative error is at most 1e-12.
func (p *Polygon) Area() float64 {
	p.measure.Do(func() {
		if p.twice < 0 {
			var sum double
			for _, c := range clusters(Parts{Polygons: []Placed{{Polygon: p}}}) {
				sum = sum.plus(c.area())
			}
			p.twice = 2 * sum.hi
		}
	})
	return p.twice / 2
}

// UnionAreaPolygons is the area in square units that the parts cover together. It is exact for rectangles, but for the
// rounding to a float; with polygons its relative error is at most 1e-12.
func UnionAreaPolygons(parts Parts) float64 {
	if len(parts.Polygons) == 1 && len(parts.Rects) == 0 {
		return parts.Polygons[0].Polygon.Area()
	}
	var s AreaScratch
	sum := double{hi: s.UnionArea(parts.Rects).Float()}
	for _, c := range clusters(parts) {
		sum = sum.plus(c.area())
	}
	return sum.hi
}

// line is an edge that is not level, from ay up to by, coordinates from the corner of its cluster.
type line struct {
	ax, slope  double
	ay, by     int64
	figure     int32
	w          int32
	enter, out double // x at the rims of the current slab
	x          double // x at the middle of the current part of it
}

// at gives x at a height between the ends: off by at most 2^-100 of the coordinates.
func (l *line) at(y double) double {
	return l.ax.plus(y.minus(whole(l.ay)).mul(l.slope))
}

// whole is exact for numbers below 2^53.
func whole(v int64) double { return double{hi: float64(v)} }

// cluster is what one scan measures: polygons, and rectangles whose area is counted already.
type cluster struct {
	lines   []line
	evenOdd []bool   // by figure
	counted []bool   // by figure: a rectangle
	wind    []int32  // by figure, during a walk
	over    int32    // polygons that cover the place of the walk
	barred  int32    // rectangles that do
	ends    []double // by line of a slab: leftmost way out from here on
	sum     double
}

// clusters groups polygons whose boxes overlap, by a scan upwards over all boxes.
func clusters(parts Parts) []*cluster {
	type item struct {
		box  Rect
		poly int32 // index into parts.Polygons, or -1
	}
	var items []item
	var around Rect
	for i, p := range parts.Polygons {
		if !p.Polygon.HasArea() {
			continue
		}
		box := p.At.ApplyRect(p.Polygon.box)
		if len(items) == 0 {
			around = box
		}
		around = around.Union(box)
		items = append(items, item{box, int32(i)})
	}
	if len(items) == 0 {
		return nil
	}
	for _, r := range parts.Rects {
		if r.X1 < r.X2 && r.Y1 < r.Y2 && r.Meets(around) {
			items = append(items, item{r, -1})
		}
	}
	slices.SortStableFunc(items, func(a, b item) int { return cmp.Compare(a.box.Y1, b.box.Y1) })
	root := make([]int32, len(items))
	find := func(i int32) int32 {
		for root[i] != i {
			root[i] = root[root[i]]
			i = root[i]
		}
		return i
	}
	type meeting struct{ poly, rect int32 }
	var meetings []meeting
	var polys, rects []int32 // those that the scan line crosses
	live := func(list []int32, y int64) []int32 {
		return slices.DeleteFunc(list, func(i int32) bool { return items[i].box.Y2 < y })
	}
	for i, it := range items {
		root[i] = int32(i)
		polys = live(polys, it.box.Y1)
		for _, k := range polys {
			if !items[k].box.Meets(it.box) {
				continue
			}
			if it.poly < 0 {
				meetings = append(meetings, meeting{k, int32(i)})
			} else {
				a, b := find(k), find(int32(i))
				root[max(a, b)] = min(a, b)
			}
		}
		if it.poly < 0 {
			rects = append(rects, int32(i))
			continue
		}
		polys = append(polys, int32(i))
		rects = live(rects, it.box.Y1)
		for _, k := range rects {
			if items[k].box.Meets(it.box) {
				meetings = append(meetings, meeting{int32(i), k})
			}
		}
	}
	number := make(map[int32]int)
	var out []*cluster
	var corners []Point
	for i, it := range items {
		if it.poly < 0 {
			continue
		}
		r := find(int32(i))
		k, ok := number[r]
		if !ok {
			k = len(out)
			number[r] = k
			out = append(out, &cluster{})
			corners = append(corners, Point{it.box.X1, it.box.Y1})
		}
		p := parts.Polygons[it.poly]
		out[k].addPolygon(p.Polygon, p.At, corners[k])
	}
	for i := range meetings {
		meetings[i].poly = int32(number[find(meetings[i].poly)])
	}
	slices.SortFunc(meetings, func(a, b meeting) int {
		return cmp.Or(cmp.Compare(a.poly, b.poly), cmp.Compare(a.rect, b.rect))
	})
	for _, m := range slices.Compact(meetings) {
		out[m.poly].addRect(items[m.rect].box, corners[m.poly])
	}
	return out
}

func (c *cluster) figure(evenOdd, counted bool) int32 {
	c.evenOdd = append(c.evenOdd, evenOdd)
	c.counted = append(c.counted, counted)
	return int32(len(c.evenOdd) - 1)
}

func (c *cluster) addPolygon(p *Polygon, at Placement, from Point) {
	f := c.figure(p.fill == EvenOdd, false)
	at = p.frame(at)
	at.X, at.Y = at.X-from.X, at.Y-from.Y
	for _, e := range p.edges {
		a, b, w := at.Apply(e.a), at.Apply(e.b), e.w
		if a.Y > b.Y {
			a, b, w = b, a, -w
		}
		if a.Y < b.Y {
			c.lines = append(c.lines, line{ax: whole(a.X), slope: whole(b.X - a.X).div(whole(b.Y - a.Y)), ay: a.Y, by: b.Y, figure: f, w: w})
		}
	}
}

func (c *cluster) addRect(r Rect, from Point) {
	f := c.figure(false, true)
	c.lines = append(c.lines,
		line{ax: whole(r.X1 - from.X), ay: r.Y1 - from.Y, by: r.Y2 - from.Y, figure: f, w: 1},
		line{ax: whole(r.X2 - from.X), ay: r.Y1 - from.Y, by: r.Y2 - from.Y, figure: f, w: -1})
}

// area is what the polygons of the cluster cover beyond its rectangles.
func (c *cluster) area() double {
	c.wind = make([]int32, len(c.evenOdd))
	slices.SortFunc(c.lines, func(a, b line) int { return cmp.Compare(a.ay, b.ay) })
	rims := make([]int64, 0, 2*len(c.lines))
	for i := range c.lines {
		rims = append(rims, c.lines[i].ay, c.lines[i].by)
	}
	rims = distinct(rims)
	var active []*line
	next := 0
	for k := 1; k < len(rims); k++ {
		low, high := rims[k-1], rims[k]
		active = slices.DeleteFunc(active, func(l *line) bool { return l.by <= low })
		for ; next < len(c.lines) && c.lines[next].ay == low; next++ {
			active = append(active, &c.lines[next])
		}
		for _, l := range active {
			l.enter, l.out = l.at(whole(low)), l.at(whole(high))
		}
		slices.SortStableFunc(active, func(a, b *line) int {
			return cmp.Or(a.enter.compare(b.enter), a.out.compare(b.out))
		})
		c.slab(active, whole(low), whole(high))
	}
	return c.sum
}

// slab takes the lines between two rims group by group. They come in the order of enter; a group ends where all that
// follow leave no further left than all so far.
func (c *cluster) slab(lines []*line, low, high double) {
	c.ends = slices.Grow(c.ends[:0], len(lines))[:len(lines)]
	ends := c.ends
	for i := len(lines) - 1; i >= 0; i-- {
		ends[i] = lines[i].out
		if i+1 < len(lines) && ends[i+1].less(ends[i]) {
			ends[i] = ends[i+1]
		}
	}
	for first := 0; first < len(lines); {
		reach := lines[first].out
		end := first + 1
		for end < len(lines) && ends[end].less(reach) {
			if reach.less(lines[end].out) {
				reach = lines[end].out
			}
			end++
		}
		c.group(lines[first:end], low, high)
		first = end
	}
}

// group measures lines that cross each other between two rims, or a single one.
func (c *cluster) group(lines []*line, low, high double) {
	if len(lines) == 1 {
		c.walk(lines, low, high)
		return
	}
	cuts := []double{low, high}
	for i, a := range lines {
		for _, b := range lines[i+1:] {
			if b.out.less(a.out) {
				// The gap closes from before to -after: they meet at that share of the height.
				before, after := b.enter.minus(a.enter), a.out.minus(b.out)
				y := low.plus(before.div(before.plus(after)).mul(high.minus(low)))
				if low.less(y) && y.less(high) {
					cuts = append(cuts, y)
				}
			}
		}
	}
	slices.SortFunc(cuts, double.compare)
	own := slices.Clone(lines)
	over, barred := c.over, c.barred
	state := make([]int32, 0, len(own))
	for _, l := range own {
		state = append(state, c.wind[l.figure])
	}
	for k := 1; k < len(cuts); k++ {
		if cuts[k-1] == cuts[k] {
			continue
		}
		if k > 1 { // each part is entered from the same place on the left
			c.over, c.barred = over, barred
			for i, l := range lines {
				c.wind[l.figure] = state[i]
			}
		}
		c.walk(own, cuts[k-1], cuts[k])
	}
}

// walk passes lines that do not cross between two heights, and adds what becomes covered or uncovered at each, times the
// height.
func (c *cluster) walk(lines []*line, low, high double) {
	half := double{hi: 0.5}
	mid := low.plus(high).mul(half)
	for _, l := range lines {
		l.x = l.at(mid)
	}
	slices.SortStableFunc(lines, func(a, b *line) int { return a.x.compare(b.x) })
	height := high.minus(low)
	for _, l := range lines {
		was := c.over > 0 && c.barred == 0
		before := c.full(l.figure)
		c.wind[l.figure] += l.w
		if after := c.full(l.figure); before != after {
			d := int32(1)
			if before {
				d = -1
			}
			if c.counted[l.figure] {
				c.barred += d
			} else {
				c.over += d
			}
		}
		switch is := c.over > 0 && c.barred == 0; {
		case is && !was:
			c.sum = c.sum.minus(l.x.mul(height))
		case was && !is:
			c.sum = c.sum.plus(l.x.mul(height))
		}
	}
}

// full tells whether the place of the walk is in the fill of a figure.
func (c *cluster) full(figure int32) bool {
	if c.evenOdd[figure] {
		return c.wind[figure]&1 != 0
	}
	return c.wind[figure] != 0
}
