package stitch

import (
	"cmp"
	"slices"

	"maskpair/decompose/geom"
)

// Rules are the rules of stitches, in the units of the coordinates.
type Rules struct {
	Spacing    int64 // same-mask spacing
	MinOverlap int64 // a cut overlaps by exactly this
	MinPiece   int64 // least extent of a piece along the wire that is cut
	Grid       int64 // overlaps lie on multiples of it
	// Refuse, where not nil, names cuts by their boxes that are no candidates for other reasons, looking at all that are left.
	Refuse func(s *Split) []geom.Rect
}

// Cut is a place where the shape can be cut: the box is the overlap of the two pieces, MinOverlap long.
type Cut struct {
	Box       geom.Rect
	AlongX    bool // the wire runs along x
	Low, High int  // cores on its two sides
}

// Split is a shape cut at all its candidates: the cores are what is left of it outside the overlaps. Cores and cuts form a tree. With
// no cuts there is one core.
type Split struct {
	Cores [][]geom.Rect
	Cuts  []Cut
}

// Reason says which rule keeps a shape from having a candidate: the one that came last, after all others were met.
type Reason uint8

// Reasons, in the order in which the rules are looked at.
const (
	NoWire    Reason = iota // no stretch with one cross-section that is longer than it is wide
	Covered                 // neighbours within the spacing leave no part of a wire uncovered
	TooShort                // an uncovered part is shorter than MinOverlap
	KeptOut                 // keep-out figures leave too little
	SmallPart               // a piece would be shorter than MinPiece
	Useless                 // no neighbour is near to one of the pieces, or the pieces hang together another way
	Refused                 // Rules.Refuse
	None                    // there are candidates
)

// Piece gives the rectangles of core i with the overlaps of its cuts: what a mask holds of it.
func (s *Split) Piece(i int) []geom.Rect {
	out := slices.Clone(s.Cores[i])
	for _, c := range s.Cuts {
		if c.Low == i || c.High == i {
			out = append(out, c.Box)
		}
	}
	return out
}

// Find gives the candidates of a shape. Shape, neighbours and keepOut are rectangles that may overlap; neighbours are those of other
// shapes within the spacing.
func Find(shape, neighbours, keepOut []geom.Rect, rules Rules) (Split, Reason) {
	var cutter geom.Cutter
	rects := cutter.Disjoint(nil, shape)
	f := &finder{rects: rects, neighbours: neighbours, rules: rules}
	cuts := f.along(rects, neighbours, keepOut, true)
	turned := f.along(cutter.Disjoint(nil, turnAll(shape)), turnAll(neighbours), turnAll(keepOut), false)
	for _, c := range turned {
		c.Box = turn(c.Box)
		if !slices.ContainsFunc(cuts, func(d Cut) bool { return meet(c.Box, d.Box) }) {
			cuts = append(cuts, c)
		}
	}
	slices.SortFunc(cuts, func(a, b Cut) int { return compareRects(a.Box, b.Box) })
	for len(cuts) > 0 {
		s, bad := f.part(cuts)
		if len(bad) == 0 && rules.Refuse != nil {
			if bad = rules.Refuse(&s); len(bad) > 0 {
				f.reached(Refused)
			}
		}
		if len(bad) == 0 {
			return s, None
		}
		cuts = slices.DeleteFunc(slices.Clone(cuts), func(c Cut) bool { return slices.Contains(bad, c.Box) })
	}
	return Split{Cores: [][]geom.Rect{rects}}, f.reason
}

func compareRects(a, b geom.Rect) int {
	return cmp.Or(cmp.Compare(a.X1, b.X1), cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.X2, b.X2), cmp.Compare(a.Y2, b.Y2))
}

func meet(a, b geom.Rect) bool {
	return a.X1 <= b.X2 && b.X1 <= a.X2 && a.Y1 <= b.Y2 && b.Y1 <= a.Y2
}

type finder struct {
	rects      []geom.Rect
	neighbours []geom.Rect
	rules      Rules
	reason     Reason
}

func (f *finder) reached(r Reason) { f.reason = max(f.reason, r) }

// along finds cuts of wires that run along x in the coordinates given.
func (f *finder) along(rects, neighbours, keepOut []geom.Rect, alongX bool) []Cut {
	s, l := f.rules.Spacing, f.rules.MinOverlap
	var out []Cut
	for _, w := range wires(rects) {
		if w.x2-w.x1 < w.y2-w.y1 || w.x2-w.x1 <= l {
			continue
		}
		f.reached(Covered)
		var covered []cover
		for _, r := range neighbours {
			if r.Y1-s < w.y2 && r.Y2+s > w.y1 && r.X1-s < w.x2 && r.X2+s > w.x1 {
				covered = append(covered, cover{r.X1 - s, r.X2 + s})
			}
		}
		parts := uncovered(w, covered)
		if len(keepOut) > 0 {
			if slices.ContainsFunc(parts, func(p cover) bool { return p.x2-p.x1 >= l }) {
				f.reached(KeptOut)
			}
			for _, r := range keepOut {
				// An overlap must not even touch it: a unit more is kept clear on both sides.
				if r.Y1 <= w.y2 && r.Y2 >= w.y1 && r.X1 <= w.x2 && r.X2 >= w.x1 {
					covered = append(covered, cover{r.X1 - 1, r.X2 + 1})
				}
			}
			parts = uncovered(w, covered)
		}
		for _, p := range parts {
			x := floorTo(p.x1+(p.x2-p.x1-l)/2, f.rules.Grid)
			if x < p.x1 {
				x += f.rules.Grid
			}
			if x+l > p.x2 {
				f.reached(TooShort)
				continue
			}
			out = append(out, Cut{Box: geom.Rect{X1: x, Y1: w.y1, X2: x + l, Y2: w.y2}, AlongX: alongX})
		}
	}
	return out
}

// cover is a part of a wire: an open interval where it is covered, a closed one where it is not.
type cover struct{ x1, x2 int64 }

// uncovered gives the parts of a wire, longer than nothing, that are not covered; it sorts what it is given.
func uncovered(w wire, covered []cover) []cover {
	slices.SortFunc(covered, func(a, b cover) int { return cmp.Compare(a.x1, b.x1) })
	var out []cover
	at := w.x1
	for _, c := range covered {
		if end := min(c.x1, w.x2); end > at {
			out = append(out, cover{at, end})
		}
		at = max(at, c.x2)
	}
	if w.x2 > at {
		out = append(out, cover{at, w.x2})
	}
	return out
}

func floorTo(x, grid int64) int64 {
	r := x % grid
	if r < 0 {
		r += grid
	}
	return x - r
}

// part cuts the shape at all cuts at once, and names cuts that are no candidates: they do not part the shape in two, leave a piece too
// short, or a piece without a neighbour.
func (f *finder) part(cuts []Cut) (Split, []geom.Rect) {
	s := Split{Cuts: slices.Clone(cuts)}
	s.Cores = connect(subtract(f.rects, cuts))
	var bad []geom.Rect
	for i := range s.Cuts {
		c := &s.Cuts[i]
		c.Low, c.High = s.beside(c, true), s.beside(c, false)
		if c.Low < 0 || c.High < 0 || c.Low == c.High || s.meetsOther(i) {
			f.reached(Useless)
			bad = append(bad, c.Box)
		}
	}
	if bad != nil {
		return s, bad
	}
	near := make([]bool, len(s.Cores))
	for i := range s.Cores {
		near[i] = f.anyNear(s.Piece(i))
	}
	at := make([][]int, len(s.Cores)) // cuts by core
	for i, c := range s.Cuts {
		at[c.Low] = append(at[c.Low], i)
		at[c.High] = append(at[c.High], i)
	}
	for i := range s.Cuts {
		c := &s.Cuts[i]
		low, parted := s.side(i, at)
		if !parted {
			f.reached(Useless)
			bad = append(bad, c.Box)
			continue
		}
		ok := [2]bool{}
		boxes := [2]geom.Rect{c.Box, c.Box}
		for k, core := range s.Cores {
			side := 1
			if low[k] {
				side = 0
			}
			ok[side] = ok[side] || near[k]
			for _, r := range core {
				boxes[side] = join(boxes[side], r)
			}
		}
		extent := min(boxes[0].Y2-boxes[0].Y1, boxes[1].Y2-boxes[1].Y1)
		if c.AlongX {
			extent = min(boxes[0].X2-boxes[0].X1, boxes[1].X2-boxes[1].X1)
		}
		switch {
		case !ok[0] || !ok[1]:
			f.reached(Useless)
			bad = append(bad, c.Box)
		case extent < f.rules.MinPiece:
			f.reached(SmallPart)
			bad = append(bad, c.Box)
		}
	}
	return s, bad
}

func join(a, b geom.Rect) geom.Rect {
	return geom.Rect{X1: min(a.X1, b.X1), Y1: min(a.Y1, b.Y1), X2: max(a.X2, b.X2), Y2: max(a.Y2, b.Y2)}
}

// side tells which cores lie on the lower side of cut i when only that cut is made, and whether it parts the shape. at lists the cuts
// of each core.
func (s *Split) side(i int, at [][]int) (low []bool, parted bool) {
	low = make([]bool, len(s.Cores))
	low[s.Cuts[i].Low] = true
	queue := []int{s.Cuts[i].Low}
	for len(queue) > 0 {
		k := queue[0]
		queue = queue[1:]
		for _, j := range at[k] {
			if j == i {
				continue
			}
			for _, to := range [2]int{s.Cuts[j].Low, s.Cuts[j].High} {
				if !low[to] {
					low[to] = true
					queue = append(queue, to)
				}
			}
		}
	}
	return low, !low[s.Cuts[i].High]
}

// meetsOther tells whether an overlap meets a core that is not at its ends, or an earlier overlap: their pieces could come to be on
// opposite masks and would touch without overlapping.
func (s *Split) meetsOther(i int) bool {
	c := &s.Cuts[i]
	for k, core := range s.Cores {
		if k != c.Low && k != c.High && slices.ContainsFunc(core, func(r geom.Rect) bool { return meet(r, c.Box) }) {
			return true
		}
	}
	return slices.ContainsFunc(s.Cuts[:i], func(d Cut) bool { return meet(d.Box, c.Box) })
}

// beside gives the core at the lower or upper end of an overlap; -1 where there is none.
func (s *Split) beside(c *Cut, lower bool) int {
	for k, core := range s.Cores {
		for _, r := range core {
			b := c.Box
			if !c.AlongX {
				b, r = turn(b), turn(r)
			}
			if r.Y1 < b.Y2 && b.Y1 < r.Y2 && (lower && r.X2 == b.X1 || !lower && r.X1 == b.X2) {
				return k
			}
		}
	}
	return -1
}

// anyNear tells whether a neighbour is within the spacing of a piece.
func (f *finder) anyNear(piece []geom.Rect) bool {
	for _, r := range piece {
		for _, n := range f.neighbours {
			if geom.RectsRelation(r, n, f.rules.Spacing) != geom.Far {
				return true
			}
		}
	}
	return false
}

// subtract takes the overlaps out of the shape.
func subtract(rects []geom.Rect, cuts []Cut) []geom.Rect {
	var out []geom.Rect
	for _, r := range rects {
		rest := []geom.Rect{r}
		for _, c := range cuts {
			b := c.Box
			if b.X1 >= r.X2 || b.X2 <= r.X1 || b.Y1 >= r.Y2 || b.Y2 <= r.Y1 {
				continue
			}
			var left []geom.Rect
			for _, q := range rest {
				left = without(left, q, b)
			}
			rest = left
		}
		out = append(out, rest...)
	}
	return out
}

// without appends what is left of q outside b.
func without(dst []geom.Rect, q, b geom.Rect) []geom.Rect {
	if b.X1 >= q.X2 || b.X2 <= q.X1 || b.Y1 >= q.Y2 || b.Y2 <= q.Y1 {
		return append(dst, q)
	}
	if q.X1 < b.X1 {
		dst = append(dst, geom.Rect{X1: q.X1, Y1: q.Y1, X2: b.X1, Y2: q.Y2})
	}
	if b.X2 < q.X2 {
		dst = append(dst, geom.Rect{X1: b.X2, Y1: q.Y1, X2: q.X2, Y2: q.Y2})
	}
	x1, x2 := max(q.X1, b.X1), min(q.X2, b.X2)
	if q.Y1 < b.Y1 {
		dst = append(dst, geom.Rect{X1: x1, Y1: q.Y1, X2: x2, Y2: b.Y1})
	}
	if b.Y2 < q.Y2 {
		dst = append(dst, geom.Rect{X1: x1, Y1: b.Y2, X2: x2, Y2: q.Y2})
	}
	return dst
}

// connect groups rectangles that touch; groups are ordered by their least rectangle.
func connect(rects []geom.Rect) [][]geom.Rect {
	slices.SortFunc(rects, compareRects)
	group := make([]int, len(rects))
	for i := range group {
		group[i] = i
	}
	var find func(int) int
	find = func(i int) int {
		for group[i] != i {
			group[i] = group[group[i]]
			i = group[i]
		}
		return i
	}
	var active []int
	for i, r := range rects {
		active = slices.DeleteFunc(active, func(k int) bool { return rects[k].X2 < r.X1 })
		for _, k := range active {
			if meet(rects[k], r) {
				a, b := find(i), find(k)
				group[max(a, b)] = min(a, b)
			}
		}
		active = append(active, i)
	}
	var out [][]geom.Rect
	number := map[int]int{}
	for i, r := range rects {
		root := find(i)
		n, ok := number[root]
		if !ok {
			n = len(out)
			number[root] = n
			out = append(out, nil)
		}
		out[n] = append(out[n], r)
	}
	return out
}
