package geom

// This file cuts Manhattan outlines into rectangles. The scan line of sweep.go says where filled and empty change places;
// between two changes a filled stretch grows into one rectangle, however many heights it passes.

// Cutter cuts outlines into rectangles. It keeps its scratch memory from call to call; the zero value is ready. One
// goroutine uses it at a time.
type Cutter struct {
	sweep  sweep
	ends   rankSet // ends of the filled stretches, in turn left and right
	opened []int64 // by rank of a left end: height from which the stretch has been as it is
	other  []Rect  // the same cut the other way
}

// bothWays is the number of points up to which an outline is cut along x and along y, and the fewer rectangles win.
const bothWays = 256

// IsManhattan tells whether every edge of the closed outline is axis-parallel.
func IsManhattan(outline []Point) bool {
	for i, q := range outline {
		p := outline[len(outline)-1]
		if i > 0 {
			p = outline[i-1]
		}
		if p.X != q.X && p.Y != q.Y {
			return false
		}
	}
	return true
}

// Rectangles is Cutter.Rectangles with a Cutter of its own.
func Rectangles(dst []Rect, outline []Point, fill Fill) ([]Rect, bool) {
	var c Cutter
	return c.Rectangles(dst, outline, fill)
}

// Rectangles appends to dst rectangles with disjoint interiors whose union is exactly what the closed outline fills. The
// outline may start anywhere, run either way, repeat points, close itself or not, and meet or cross itself. What it fills
// may be nothing. The result is false, and dst as it was, if an edge is slanted.
//
// The rectangles are slabs between horizontal cuts, or between vertical ones where that makes fewer of a small outline.
func (c *Cutter) Rectangles(dst []Rect, outline []Point, fill Fill) ([]Rect, bool) {
	if r, ok := plainRect(outline); ok {
		return append(dst, r), true
	}
	if lower, upper, ok := plainL(outline); ok {
		return append(dst, lower, upper), true
	}
	return c.scan(dst, outline, fill)
}

// scan cuts an outline of any form.
func (c *Cutter) scan(dst []Rect, outline []Point, fill Fill) ([]Rect, bool) {
	c.sweep.clear()
	if !c.sweep.addOutline(outline, false) {
		return dst, false
	}
	first := len(dst)
	dst = c.cut(dst, fill)
	if len(outline) > bothWays || len(dst) < first+2 {
		return dst, true
	}
	c.sweep.clear()
	c.sweep.addOutline(outline, true)
	c.other = c.cut(c.other[:0], fill)
	if first+len(c.other) < len(dst) {
		dst = dst[:first]
		for _, r := range c.other {
			dst = append(dst, Rect{r.Y1, r.X1, r.Y2, r.X2})
		}
	}
	return dst, true
}

// Disjoint appends to dst rectangles with disjoint interiors whose union is that of rects; rectangles without area are
// left out. So outlines with fills of their own are joined: cut each, then Disjoint.
func (c *Cutter) Disjoint(dst, rects []Rect) []Rect {
	c.sweep.clear()
	for _, r := range rects {
		c.sweep.addRect(r)
	}
	return c.cut(dst, NonZero)
}

// plainRect recognises four corners of a rectangle in turn, with or without the closing point.
func plainRect(outline []Point) (Rect, bool) {
	if len(outline) == 5 && outline[4] == outline[0] {
		outline = outline[:4]
	}
	if len(outline) != 4 {
		return Rect{}, false
	}
	a, b, c, d := outline[0], outline[1], outline[2], outline[3]
	if a.X == c.X || a.Y == c.Y {
		return Rect{}, false
	}
	if b == (Point{a.X, c.Y}) && d == (Point{c.X, a.Y}) || b == (Point{c.X, a.Y}) && d == (Point{a.X, c.Y}) {
		return Rect{min(a.X, c.X), min(a.Y, c.Y), max(a.X, c.X), max(a.Y, c.Y)}, true
	}
	return Rect{}, false
}

// plainL recognises the six corners of an L, with or without the closing point, and gives its slabs below and above the inner corner.
//
// Six edges that are upright and level in turn have three abscissas and three ordinates. Where a corner lies inside the box of all,
// the box has the other two of each: its neighbours then lie on sides of the box, the other three are corners of the box, and the
// outline is an L.
func plainL(outline []Point) (lower, upper Rect, ok bool) {
	if len(outline) == 7 && outline[6] == outline[0] {
		outline = outline[:6]
	}
	if len(outline) != 6 {
		return lower, upper, false
	}
	box, inner := Rect{outline[0].X, outline[0].Y, outline[0].X, outline[0].Y}, -1
	for _, p := range outline[1:] {
		box = Rect{min(box.X1, p.X), min(box.Y1, p.Y), max(box.X2, p.X), max(box.Y2, p.Y)}
	}
	for i, p := range outline {
		if p.X > box.X1 && p.X < box.X2 && p.Y > box.Y1 && p.Y < box.Y2 {
			inner = i
		}
	}
	if inner < 0 {
		return lower, upper, false
	}
	var p [6]Point // from the inner corner on
	for i := range p {
		p[i] = outline[(inner+i)%6]
	}
	if p[0].X != p[1].X { // the other way round, so that the first edge is upright
		p[1], p[2], p[4], p[5] = p[5], p[4], p[2], p[1]
	}
	if p[0].X != p[1].X || p[1].Y != p[2].Y || p[2].X != p[3].X || p[3].Y != p[4].Y || p[4].X != p[5].X || p[5].Y != p[0].Y {
		return lower, upper, false
	}
	lower, upper = box, box
	lower.Y2, upper.Y1 = p[0].Y, p[0].Y
	short := &upper
	if p[1].Y == box.Y1 {
		short = &lower
	}
	if p[5].X == box.X1 {
		short.X1 = p[0].X
	} else {
		short.X2 = p[0].X
	}
	return lower, upper, true
}

// cut runs the scan over the edges loaded into the sweep.
func (c *Cutter) cut(dst []Rect, fill Fill) []Rect {
	s := &c.sweep
	s.start(fill)
	c.ends.reset(len(s.xs))
	if cap(c.opened) < len(s.xs) {
		c.opened = make([]int64, len(s.xs))
	}
	c.opened = c.opened[:len(s.xs)]
	for {
		y, ok := s.next()
		if !ok {
			return dst
		}
		for _, ch := range s.changes {
			a, b := int(ch.a), int(ch.b)
			if ch.filled {
				dst = c.join(dst, a, b, y)
			} else {
				dst = c.part(dst, a, b, y)
			}
		}
	}
}

// closed appends the rectangle that the stretch [l, r) has grown into below y.
func (c *Cutter) closed(dst []Rect, l, r int, y int64) []Rect {
	if c.opened[l] == y {
		return dst
	}
	return append(dst, Rect{c.sweep.xs[l], c.opened[l], c.sweep.xs[r], y})
}

// join fills the empty stretch [a, b), and makes one stretch of it and of those that end at a and begin at b.
func (c *Cutter) join(dst []Rect, a, b int, y int64) []Rect {
	left := a
	if c.ends.has(a) {
		left = c.ends.prev(a - 1)
		dst = c.closed(dst, left, a, y)
	}
	if c.ends.has(b) {
		dst = c.closed(dst, b, c.ends.next(b+1), y)
	}
	c.ends.flip(a)
	c.ends.flip(b)
	c.opened[left] = y
	return dst
}

// part empties the stretch [a, b) of a filled one, which leaves what is left and right of it.
func (c *Cutter) part(dst []Rect, a, b int, y int64) []Rect {
	left, right := a, b
	if !c.ends.has(a) {
		left = c.ends.prev(a)
	}
	if !c.ends.has(b) {
		right = c.ends.next(b)
	}
	dst = c.closed(dst, left, right, y)
	c.ends.flip(a)
	c.ends.flip(b)
	if left < a {
		c.opened[left] = y
	}
	if b < right {
		c.opened[b] = y
	}
	return dst
}
