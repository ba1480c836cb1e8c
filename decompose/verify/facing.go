package verify

import (
	"cmp"
	"errors"
	"slices"

	"maskpair/decompose"
	"maskpair/decompose/geom"
)

// This file is the rule by what faces what. It judges places: where items of two pieces come near each other, all that the two
// pieces have in a window around the place is joined, and the edges and corners of the two outlines are held against each
// other. The window is wide enough to tell tips from sides, and to hold the squares that make a part wide, for everything
// that may face in the place itself; what faces farther off is the matter of another place.
//
// How the interface is read: axis-parallel edges face each other where each is on the outer side of the other and their
// projections overlap by more than 0. Convex corners between axis-parallel edges face each other where each lies in the
// closed outer quarter of the other. A part is wide where a square of the width fits into the piece with a side on the edge,
// along more than 0 of what faces. All else with a slanted edge is judged where it is nearest, see slanted.go.

// facing are the spacings by what faces what, in half units.
type facing struct {
	sideToSide, tipToSide, tipToTip, corner, other int64
	tipWidth                                       int64 // longest edge that is a tip; 0: there are none
	wide                                           []wideRule
	least, most                                    int64 // of all spacings
}

type wideRule struct{ width, spacing int64 }

func newFacing(l *decompose.LayerRules) *facing {
	r := l.ByFacing
	f := &facing{sideToSide: 2 * r.SideToSide, tipToSide: 2 * r.TipToSide, tipToTip: 2 * r.TipToTip, corner: 2 * r.CornerToCorner,
		other: 2 * l.Spacing, tipWidth: 2 * r.TipWidth}
	f.least = min(f.sideToSide, f.tipToSide, f.tipToTip, f.corner, f.other)
	f.most = max(f.sideToSide, f.tipToSide, f.tipToTip, f.corner, f.other)
	for _, w := range r.Wide {
		f.wide = append(f.wide, wideRule{2 * w.Width, 2 * w.Spacing})
		f.most = max(f.most, 2*w.Spacing)
	}
	return f
}

// margin is how far around a place one must see: farther than a tip is long, and than a part that a rule calls wide.
func (r *facing) margin() int64 {
	m := r.tipWidth
	for _, w := range r.wide {
		m = max(m, w.width)
	}
	return m + 2
}

// nearPlace is where two items come near each other.
type nearPlace struct {
	a, b   item
	core   geom.Rect // what can face lies in it
	window geom.Rect
	p, q   []item // of the two pieces, in the window
}

// newPlace gives the place of two items under a rule. What is nearer to b than the largest spacing is the core's part of a, and
// the other way round.
func newPlace(r *facing, a, b *item) nearPlace {
	core := meeting(a.box, grown(b.box, r.most)).Union(meeting(b.box, grown(a.box, r.most)))
	return nearPlace{a: *a, b: *b, core: core, window: grown(core, r.margin())}
}

func grown(b geom.Rect, by int64) geom.Rect {
	return geom.Rect{X1: b.X1 - by, Y1: b.Y1 - by, X2: b.X2 + by, Y2: b.Y2 + by}
}

// facingPairs finds the pairs of pieces on one mask that are near under the rule.
func (j *judge) facingPairs(r *facing, near pairs) error {
	f := j.flat
	from := uint32(0)
	for _, end := range j.keptEnd {
		items := j.kept[from:end]
		from = end
		var places []nearPlace
		judgePlaces := func() error {
			if err := j.look(items, places); err != nil {
				return err
			}
			for i := range places {
				if i&0xFF == 0 && j.v.ctx.Err() != nil {
					return j.v.ctx.Err()
				}
				pl := &places[i]
				key := j.pairKey(j.pieceOf[pl.a.fig], j.pieceOf[pl.b.fig])
				if _, known := near[key]; !known && r.near(f, pl) {
					near.add(key, &pl.a, &pl.b)
				}
			}
			places = places[:0]
			return nil
		}
		var failed error
		err := search(j.v.ctx, items, r.most, func(a, b *item) {
			if t := f.figs[a.fig].tag; !t.mask() || t != f.figs[b.fig].tag {
				return
			}
			p, q := j.pieceOf[a.fig], j.pieceOf[b.fig]
			if p == q || f.relation(a, b, r.most) != geom.Near {
				return
			}
			key := j.pairKey(p, q)
			switch {
			case !hasArea(a) || !hasArea(b): // what rounding has left of a figure: there is no outline to look at
				if f.relation(a, b, r.other) == geom.Near {
					near.add(key, a, b)
				}
			case f.relation(a, b, r.least) == geom.Near:
				near.add(key, a, b) // whatever rule the nearest place is judged by
			default:
				places = append(places, newPlace(r, a, b))
				if len(places) == mostNearPlaces && failed == nil {
					failed = judgePlaces()
				}
			}
		})
		if err = errors.Join(err, failed); err != nil {
			return err
		}
		if err := judgePlaces(); err != nil {
			return err
		}
	}
	return nil
}

// mostNearPlaces is how many places are looked at together.
const mostNearPlaces = 1 << 17

func hasArea(it *item) bool {
	return it.box.X1 < it.box.X2 && it.box.Y1 < it.box.Y2 || it.band != wholeRect
}

// look gathers for each place what its two pieces have in its window.
func (j *judge) look(items []item, places []nearPlace) error {
	if len(places) == 0 {
		return nil
	}
	// Items and windows go through one search; windows are told by their band.
	const isWindow = -2
	all := make([]item, 0, len(items)+len(places))
	for i := range items {
		if it := &items[i]; j.flat.figs[it.fig].tag.mask() && hasArea(it) {
			all = append(all, *it)
		}
	}
	for i := range places {
		all = append(all, item{places[i].window, uint32(i), isWindow})
	}
	sortItems(all)
	return search(j.v.ctx, all, 0, func(a, b *item) {
		if a.band == isWindow {
			a, b = b, a
		}
		if a.band == isWindow || b.band != isWindow {
			return
		}
		pl := &places[b.fig]
		switch j.pieceOf[a.fig] {
		case j.pieceOf[pl.a.fig]:
			pl.p = append(pl.p, *a)
		case j.pieceOf[pl.b.fig]:
			pl.q = append(pl.q, *a)
		}
	})
}

// near says whether the two pieces are near in a place.
func (r *facing) near(f *flat, pl *nearPlace) bool {
	for _, list := range [2][]item{pl.p, pl.q} {
		for i := range list {
			if list[i].band != wholeRect {
				return r.slantedNear(f, pl)
			}
		}
	}
	p, q := outlineIn(pl, pl.p), outlineIn(pl, pl.q)
	for axis := range 2 {
		for i := range p.edges[axis] {
			for k := range q.edges[axis] {
				if r.edgesNear(p, q, axis, &p.edges[axis][i], &q.edges[axis][k]) {
					return true
				}
			}
		}
	}
	for _, c := range p.corners {
		for _, d := range q.corners {
			if c.right == -d.right && c.up == -d.up && (d.at.X-c.at.X)*c.right >= 0 && (d.at.Y-c.at.Y)*c.up >= 0 &&
				rectRelation(pointOf(c.at), pointOf(d.at), r.corner) != geom.Far {
				return true
			}
		}
	}
	return false
}

func pointOf(p geom.Point) geom.Rect { return geom.Rect{X1: p.X, Y1: p.Y, X2: p.X, Y2: p.Y} }

// localOutline is what a piece without slanted edges there has of an outline in a window.
type localOutline struct {
	edges   [2][]localEdge // level ones, then upright ones
	corners []localCorner
	rects   []geom.Rect // within the window
}

// localEdge is an axis-parallel edge: a level one at height at, from one x to another; an upright one with x and y exchanged.
type localEdge struct {
	at, from, to int64
	out          int64   // 1: the outside is above (right), -1: below (left)
	ends         [2]bool // convex corners, at from and at to
}

// localCorner is a convex corner: its outer quarter lies to the right (1) or left (-1) and up (1) or down (-1).
type localCorner struct {
	at        geom.Point
	right, up int64
}

// edgesNear says whether two edges along one axis face each other and are too near.
func (r *facing) edgesNear(p, q *localOutline, axis int, e, f *localEdge) bool {
	from, to := max(e.from, f.from), min(e.to, f.to)
	gap := (f.at - e.at) * e.out
	if e.out != -f.out || gap <= 0 || gap >= r.most || from >= to {
		return false
	}
	if gap < r.ofKinds(r.tip(e), r.tip(f)) {
		return true
	}
	for _, w := range r.wide {
		if gap < w.spacing && (p.holds(axis, e, from, to, w.width) || q.holds(axis, f, from, to, w.width)) {
			return true
		}
	}
	return false
}

// ofKinds gives the spacing of two edges that face each other, tips or sides.
func (r *facing) ofKinds(tip, other bool) int64 {
	switch {
	case tip && other:
		return r.tipToTip
	case tip || other:
		return r.tipToSide
	}
	return r.sideToSide
}

func (r *facing) tip(e *localEdge) bool {
	return e.ends[0] && e.ends[1] && e.to-e.from <= r.tipWidth
}

// outlineIn joins what a piece has in the window of a place. Edges and corners are kept where they meet the core.
func outlineIn(pl *nearPlace, items []item) *localOutline {
	o := &localOutline{}
	for i := range items {
		if m := meeting(items[i].box, pl.window); m.X1 < m.X2 && m.Y1 < m.Y2 {
			o.rects = append(o.rects, m)
		}
	}
	o.edges[0] = levelEdges(o.rects, pl.window, pl.core)
	o.edges[1] = levelEdges(turnedAll(o.rects), turned(pl.window), turned(pl.core))
	for _, e := range o.edges[0] {
		for side, convex := range e.ends {
			c := localCorner{geom.Point{X: e.from, Y: e.at}, -1, e.out}
			if side == 1 {
				c.at.X, c.right = e.to, 1
			}
			if convex && pl.core.Contains(c.at) {
				o.corners = append(o.corners, c)
			}
		}
	}
	return o
}

// turned exchanges x and y.
func turned(r geom.Rect) geom.Rect { return geom.Rect{X1: r.Y1, Y1: r.X1, X2: r.Y2, Y2: r.X2} }

func turnedAll(rects []geom.Rect) []geom.Rect {
	out := make([]geom.Rect, len(rects))
	for i, r := range rects {
		out[i] = turned(r)
	}
	return out
}

// levelEdges gives the level edges of the union of rectangles that meet the core. All rectangles lie in the window; an edge on
// its rim is none, and an end on the rim is no corner.
func levelEdges(rects []geom.Rect, window, core geom.Rect) []localEdge {
	var heights []int64
	for _, r := range rects {
		heights = append(heights, r.Y1, r.Y2)
	}
	slices.Sort(heights)
	heights = slices.Compact(heights)
	var out []localEdge
	for _, y := range heights {
		if y <= window.Y1 || y >= window.Y2 || y < core.Y1 || y > core.Y2 {
			continue
		}
		above := filledAt(rects, func(r *geom.Rect) bool { return r.Y1 <= y && y < r.Y2 })
		below := filledAt(rects, func(r *geom.Rect) bool { return r.Y1 < y && y <= r.Y2 })
		out = appendEdges(out, y, 1, below, above, window)
		out = appendEdges(out, y, -1, above, below, window)
	}
	return slices.DeleteFunc(out, func(e localEdge) bool { return e.to < core.X1 || e.from > core.X2 })
}

// filledAt gives the stretches that the rectangles which count fill, from left to right, each as long as can be.
func filledAt(rects []geom.Rect, counts func(r *geom.Rect) bool) [][2]int64 {
	var spans [][2]int64
	for i := range rects {
		if counts(&rects[i]) {
			spans = append(spans, [2]int64{rects[i].X1, rects[i].X2})
		}
	}
	slices.SortFunc(spans, func(a, b [2]int64) int { return cmp.Compare(a[0], b[0]) })
	out := spans[:0]
	for _, s := range spans {
		if n := len(out); n > 0 && s[0] <= out[n-1][1] {
			out[n-1][1] = max(out[n-1][1], s[1])
			continue
		}
		out = append(out, s)
	}
	return out
}

// appendEdges appends the edges at a height where the inner side is filled and the outer is not. An edge ends in a convex
// corner where its inner side ends.
func appendEdges(out []localEdge, y, outward int64, inner, outer [][2]int64, window geom.Rect) []localEdge {
	for _, s := range inner {
		from := s[0]
		add := func(to int64) {
			if from < to {
				e := localEdge{at: y, from: from, to: to, out: outward}
				e.ends[0] = from == s[0] && from > window.X1
				e.ends[1] = to == s[1] && to < window.X2
				out = append(out, e)
			}
		}
		for _, o := range outer {
			if o[1] <= from || o[0] >= s[1] {
				continue
			}
			add(o[0])
			from = max(from, o[1])
		}
		add(s[1])
	}
	return out
}

// holds says whether a square of a width fits into a piece with a side on an edge, along more than 0 of a part of it.
func (o *localOutline) holds(axis int, e *localEdge, from, to, width int64) bool {
	rects := o.rects
	if axis == 1 {
		rects = turnedAll(rects)
	}
	// The strip as deep as the square, inwards from the edge, and the stretches over which it is filled all the way.
	strip := geom.Rect{X1: from - width, Y1: e.at - width, X2: to + width, Y2: e.at}
	if e.out < 0 {
		strip.Y1, strip.Y2 = e.at, e.at+width
	}
	rects = within(nil, rects, strip)
	var cuts []int64
	for _, r := range rects {
		cuts = append(cuts, r.X1, r.X2)
	}
	slices.Sort(cuts)
	cuts = slices.Compact(cuts)
	begin, open := int64(0), false
	for i := range cuts {
		full := i+1 < len(cuts) && filledDown(rects, cuts[i], cuts[i+1], strip)
		switch {
		case full && !open:
			begin, open = cuts[i], true
		case !full && open:
			open = false
			if end := cuts[i]; end-begin >= width && begin < to && end > from {
				return true
			}
		}
	}
	return false
}

// filledDown says whether rectangles fill a strip between two of their cuts, over all of its height.
func filledDown(rects []geom.Rect, x1, x2 int64, strip geom.Rect) bool {
	var spans [][2]int64
	for _, r := range rects {
		if r.X1 <= x1 && x2 <= r.X2 {
			spans = append(spans, [2]int64{r.Y1, r.Y2})
		}
	}
	slices.SortFunc(spans, func(a, b [2]int64) int { return cmp.Compare(a[0], b[0]) })
	reach := strip.Y1
	for _, s := range spans {
		if s[0] > reach {
			return false
		}
		reach = max(reach, s[1])
	}
	return reach >= strip.Y2
}
