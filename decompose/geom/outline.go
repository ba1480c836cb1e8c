package geom

// This file gives the merged outline of rectangles, for rules on the edges and corners of whole shapes. The scan line of
// sweep.go says where filled and empty change places: those stretches are the level edges. Their ends are the corners, and
// at one x, from below, the corners are in turn the lower and the upper end of an upright edge.

// Corner is a corner of a merged outline. It is convex where the outline turns left, that is, where the filled angle is 90
// degrees, else concave (270 degrees).
type Corner struct {
	At     Point
	Convex bool
}

// Outline is the boundary of a union of rectangles, in closed loops: loop i is Corners[Start[i]:Start[i+1]], and an edge
// runs from each corner to the next, the last to the first. Edges are level and upright in turn, as long as can be, and
// have the filled area on their left: outer loops run counter-clockwise, loops around holes clockwise.
//
// Where two filled quarters meet in a point, loops touch there and do not cross: the point is a convex corner of either
// quarter.
type Outline struct {
	Corners []Corner
	Start   []int32
}

// Loops gives the number of loops.
func (o *Outline) Loops() int { return max(0, len(o.Start)-1) }

// Loop gives the corners of loop i.
func (o *Outline) Loop(i int) []Corner { return o.Corners[o.Start[i]:o.Start[i+1]] }

// Merger finds merged outlines. It keeps its scratch memory from call to call; the zero value is ready. One goroutine uses
// it at a time.
type Merger struct {
	sweep  sweep
	levels []level
	ends   []int32 // ends of levels by rank, from below: 2*level, and 1 more for the right end
	from   []int32 // by rank: first of its ends
	mate   []int32 // by end: the other end of the upright edge
	seen   []bool  // by level
}

// level is a level edge over the ranks [a, b); up tells whether it has the filled area above.
type level struct {
	y    int64
	a, b int32
	up   bool
}

// Merge is Merger.Merge with a Merger of its own.
func Merge(rects []Rect) Outline {
	var m Merger
	var out Outline
	m.Merge(&out, rects)
	return out
}

// Merge replaces out with the outline of the union of the rectangles. Rectangles without area count for nothing. Loops
// come from below, then from the left, by their lowest and then leftmost corner, which is their first.
func (m *Merger) Merge(out *Outline, rects []Rect) {
	out.Corners, out.Start = out.Corners[:0], append(out.Start[:0], 0)
	if len(rects) == 1 && rects[0].X1 < rects[0].X2 && rects[0].Y1 < rects[0].Y2 {
		r := rects[0]
		out.Corners = append(out.Corners, Corner{Point{r.X1, r.Y1}, true}, Corner{Point{r.X2, r.Y1}, true}, Corner{Point{r.X2, r.Y2}, true}, Corner{Point{r.X1, r.Y2}, true})
		out.Start = append(out.Start, 4)
		return
	}
	m.scan(rects)
	m.pair()
	for first := range m.levels {
		if m.seen[first] {
			continue
		}
		for i := first; !m.seen[i]; {
			m.seen[i] = true
			i = m.follow(out, i)
		}
		if m.levels[first].up {
			// The walk went off at the right end; the left one, the leftmost of the two, came last.
			loop := out.Corners[out.Start[len(out.Start)-1]:]
			last := loop[len(loop)-1]
			copy(loop[1:], loop)
			loop[0] = last
		}
		out.Start = append(out.Start, int32(len(out.Corners)))
	}
}

// scan collects the level edges, from below and from the left.
func (m *Merger) scan(rects []Rect) {
	m.levels = m.levels[:0]
	m.sweep.clear()
	for _, r := range rects {
		m.sweep.addRect(r)
	}
	m.sweep.start(NonZero)
	for {
		y, ok := m.sweep.next()
		if !ok {
			return
		}
		for _, c := range m.sweep.changes {
			m.levels = append(m.levels, level{y, c.a, c.b, c.filled})
		}
	}
}

// pair finds the upright edges. At one place of one height two ends can meet, with the quarters left above and right below
// filled, or the other two; the end with the filled area below then belongs to the edge from below.
func (m *Merger) pair() {
	n := len(m.levels)
	m.from = zeroed(m.from, len(m.sweep.xs)+1)
	m.ends, m.mate = zeroed(m.ends, 2*n), zeroed(m.mate, 2*n)
	if cap(m.seen) < n {
		m.seen = make([]bool, n)
	}
	m.seen = m.seen[:n]
	clear(m.seen)
	for _, l := range m.levels {
		m.from[l.a]++
		m.from[l.b]++
	}
	sum := int32(0)
	for x, k := range m.from {
		m.from[x] = sum
		sum += k
	}
	// from[x] now moves from the first to behind the last end at x as they are filled in
	for i, l := range m.levels {
		for side, x := range [2]int32{l.a, l.b} {
			k := m.from[x]
			m.from[x]++
			m.ends[k] = int32(2*i + side)
		}
	}
	begin := int32(0)
	for _, end := range m.from[:len(m.sweep.xs)] {
		for k := begin; k < end; k += 2 {
			// ends[k] is a lower end, ends[k+1] an upper one; at one height the one with the area below goes first
			if k+2 < end && m.at(k+1).y == m.at(k+2).y && m.at(k+1).up {
				m.ends[k+1], m.ends[k+2] = m.ends[k+2], m.ends[k+1]
			}
			p, q := m.ends[k], m.ends[k+1]
			m.mate[p], m.mate[q] = q, p
		}
		begin = end
	}
}

// at gives the level edge whose end is the k-th.
func (m *Merger) at(k int32) *level { return &m.levels[m.ends[k]/2] }

// follow appends the corners at the end of level edge i and at the end of the upright edge there, and gives the next one.
func (m *Merger) follow(out *Outline, i int) int {
	l := m.levels[i]
	leave, x, ahead := 2*i+1, l.b, int64(1) // runs right
	if !l.up {
		leave, x, ahead = 2*i, l.a, -1
	}
	next := int(m.mate[leave] / 2)
	n := m.levels[next]
	rise := sign(n.y - l.y)
	on := int64(1)
	if !n.up {
		on = -1
	}
	out.Corners = append(out.Corners,
		Corner{Point{m.sweep.xs[x], l.y}, ahead*rise > 0},
		Corner{Point{m.sweep.xs[x], n.y}, -rise*on > 0})
	return next
}
