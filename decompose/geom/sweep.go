package geom

import (
	"cmp"
	"slices"
)

// This file is the scan line under Rectangles, Disjoint and Merge: it goes up through the vertical edges of Manhattan
// outlines and tells, height by height, over which stretches filled and empty change places.
//
// The line is a row of places, the distinct x of all vertical edges in order ("ranks"). A place holds the sum of the
// directions of the edges that cross the line there, and the winding number to its right. Only stretches whose winding
// number changes are walked, so the work is n log n plus the number of edges that the outline itself crosses there.

// turn is an end of a vertical edge: from height y on, the directions at a place sum to d more.
type turn struct {
	y    int64
	x, d int32
}

// change is a stretch [a, b) of ranks that becomes filled or empty.
type change struct {
	a, b   int32
	filled bool
}

// upright is a vertical edge, y1 < y2; d is 1 where it runs down, -1 where it runs up.
type upright struct {
	x, y1, y2 int64
	d         int32
}

type sweep struct {
	uprights []upright
	xs       []int64 // place of each rank, ascending
	turns    []turn  // by y, then x
	at       int     // next turn
	mask     int32   // 1 for even-odd (sums are kept to their last bit), else all ones
	weight   []int32 // by rank: sum of directions of the edges that cross the line there
	wind     []int32 // by rank, valid where active: winding number to the right
	active   rankSet // ranks whose weight is not 0
	changes  []change
}

// addOutline adds the vertical edges of a closed outline, transposed if asked; false if an edge is slanted.
func (s *sweep) addOutline(outline []Point, transposed bool) bool {
	if len(outline) == 0 {
		return true
	}
	s.uprights = slices.Grow(s.uprights, len(outline)/2+1)
	p := outline[len(outline)-1]
	for _, q := range outline {
		if p.X != q.X && p.Y != q.Y {
			return false
		}
		x, y1, y2 := p.X, p.Y, q.Y
		along := p.X == q.X
		if transposed {
			x, y1, y2 = p.Y, p.X, q.X
			along = p.Y == q.Y
		}
		if along && y1 < y2 {
			s.uprights = append(s.uprights, upright{x, y1, y2, -1})
		} else if along && y1 > y2 {
			s.uprights = append(s.uprights, upright{x, y2, y1, 1})
		}
		p = q
	}
	return true
}

// addRect adds a rectangle, its outline counter-clockwise.
func (s *sweep) addRect(r Rect) {
	if r.X1 < r.X2 && r.Y1 < r.Y2 {
		s.uprights = append(s.uprights, upright{r.X1, r.Y1, r.Y2, 1}, upright{r.X2, r.Y1, r.Y2, -1})
	}
}

// clear forgets the edges.
func (s *sweep) clear() { s.uprights = s.uprights[:0] }

// start readies the scan over the edges added since clear.
func (s *sweep) start(fill Fill) {
	s.xs, s.turns, s.at = s.xs[:0], s.turns[:0], 0
	s.mask = -1
	if fill == EvenOdd {
		s.mask = 1
	}
	s.xs, s.turns = slices.Grow(s.xs, len(s.uprights)), slices.Grow(s.turns, 2*len(s.uprights))
	for _, u := range s.uprights {
		s.xs = append(s.xs, u.x)
	}
	slices.Sort(s.xs)
	s.xs = slices.Compact(s.xs)
	for _, u := range s.uprights {
		k, _ := slices.BinarySearch(s.xs, u.x)
		s.turns = append(s.turns, turn{u.y1, int32(k), u.d}, turn{u.y2, int32(k), -u.d})
	}
	slices.SortFunc(s.turns, func(a, b turn) int {
		if a.y != b.y {
			return cmp.Compare(a.y, b.y)
		}
		return cmp.Compare(a.x, b.x)
	})
	n := len(s.xs)
	s.weight = zeroed(s.weight, n)
	s.wind = zeroed(s.wind, n)
	s.active.reset(n)
}

func zeroed(v []int32, n int) []int32 {
	if cap(v) < n {
		return make([]int32, n)
	}
	v = v[:n]
	clear(v)
	return v
}

// next goes on to the next height with edge ends; false at the end. The changes there are in s.changes, left to right,
// apart or of opposite kinds where they meet.
//
// Outlines are closed, so the directions that a height adds sum to 0: left and right of a walked stretch nothing changes.
func (s *sweep) next() (y int64, ok bool) {
	s.changes = s.changes[:0]
	if s.at == len(s.turns) {
		return 0, false
	}
	y = s.turns[s.at].y
	end := s.at
	for end < len(s.turns) && s.turns[end].y == y {
		end++
	}
	for s.at < end {
		s.walk(end)
	}
	return y, true
}

// walk takes the turns from s.at on, until the winding number is as before.
func (s *sweep) walk(end int) {
	r := int(s.turns[s.at].x)
	var was, now int32
	if p := s.active.prev(r - 1); p >= 0 {
		was = s.wind[p]
		now = was
	}
	for {
		w := s.weight[r]
		was = (was + w) & s.mask
		for s.at < end && int(s.turns[s.at].x) == r {
			w = (w + s.turns[s.at].d) & s.mask
			s.at++
		}
		now = (now + w) & s.mask
		if w != s.weight[r] {
			s.weight[r] = w
			if w != 0 {
				s.active.add(r)
			} else {
				s.active.remove(r)
			}
		}
		s.wind[r] = now
		if was == now {
			return
		}
		to := s.active.next(r + 1)
		if s.at < end && (to < 0 || int(s.turns[s.at].x) < to) {
			to = int(s.turns[s.at].x)
		}
		if (was != 0) != (now != 0) {
			if k := len(s.changes) - 1; k >= 0 && int(s.changes[k].b) == r && s.changes[k].filled == (now != 0) {
				s.changes[k].b = int32(to)
			} else {
				s.changes = append(s.changes, change{int32(r), int32(to), now != 0})
			}
		}
		r = to
	}
}
