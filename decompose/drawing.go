package decompose

import (
	"cmp"
	"math"
	"slices"

	"maskpair/decompose/geom"
)

// This file gathers what a picture of an unresolved component needs beyond the result: the outlines of the shapes of its cycle and of
// those around, where neighbours in the cycle come nearest, and which shapes an anchor holds. It is worked out for a few components
// only, and only when asked (Options.Drawings).

// Drawing is what pictures of a deck layer show.
type Drawing struct {
	Maps     []TileMap
	Pictures map[int]*Picture // by index into LayerResult.Unresolved: those that stand for the worst groups
}

// Picture is one unresolved component, or what matters of it. Coordinates are half units of its top.
type Picture struct {
	Window Box            // what is worth looking at
	Shapes []PictureShape // those of the cycle in its order, then others of the component, then those around, by place
	Links  []PictureLink  // from each shape of the cycle to the next; of an odd cycle also from the last to the first
	More   int            // shapes in the window that are left out
}

// PictureShape is a shape, or the part of a cut shape that is on one mask, as far as it lies in the window and a little beyond.
type PictureShape struct {
	Mask   Mask
	Step   int  // place in the cycle, from 1; 0: not in it
	Member bool // of the component
	Cut    bool // a part of a cut shape
	Anchor string
	Box    Box
	// Outlines make up the shape together; each is a set of closed rings, filled by the even-odd rule.
	Outlines [][][]Spot
}

// PictureLink is where two shapes that follow each other in the cycle come nearest. From and To are steps; the link is not Known
// where the picture leaves it out because the cycle is long.
type PictureLink struct {
	From, To   int
	At, Other  Spot
	DistanceSq float64 // square database units
	Known      bool
}

const (
	stepsDrawn  = 40  // of a long cycle: so many around a pair that stays
	othersDrawn = 60  // shapes that are not in the cycle
	othersSeen  = 600 // of these the best are drawn
)

// sketch is a picture in the making, in work units.
type sketch struct {
	entry  *Unresolved
	top    int
	nodes  []uint32 // of the component
	cycle  []uint32 // nodes of the cycle, by step; none where they were not found
	drawn  []bool   // by step
	window Box
	others []uint32
	more   int
	out    *Picture
}

// draw makes the drawing of a layer with at most so many pictures.
func (l *layout) draw(a *assignment, o *Orders, res *LayerResult, most int) *Drawing {
	d := &Drawing{Maps: l.maps(a, res), Pictures: map[int]*Picture{}}
	groups := res.Groups()
	var sketches []*sketch
	byComponent := map[uint32]*sketch{}
	for _, g := range groups[:min(len(groups), most)] {
		u := &res.Unresolved[g.Shown]
		s := &sketch{entry: u, out: &Picture{}}
		sketches = append(sketches, s)
		byComponent[uint32(u.Component)] = s
		d.Pictures[g.Shown] = s.out
	}
	if len(sketches) == 0 {
		return d
	}
	for u, c := range a.component {
		if s := byComponent[c]; s != nil {
			s.nodes = append(s.nodes, uint32(u))
		}
	}
	parts := map[uint32]*geom.Parts{}
	for _, s := range sketches {
		s.top = l.topOf(s.nodes[0])
		s.findCycle(l)
		s.chooseSteps()
		for i, u := range s.cycle {
			if s.drawn[i] {
				parts[u] = &geom.Parts{}
			}
		}
	}
	l.geometryOf(parts)
	for _, s := range sketches {
		s.link(l, parts)
		s.frame(l)
	}
	l.lookAround(a, sketches)
	rest := map[uint32]*geom.Parts{}
	for _, s := range sketches {
		for _, u := range s.others {
			if parts[u] == nil {
				parts[u] = &geom.Parts{}
				rest[u] = parts[u]
			}
		}
	}
	l.geometryOf(rest)
	anchors := l.anchorsOf(o, parts)
	for _, s := range sketches {
		s.fill(l, a, parts, anchors)
	}
	return d
}

// findCycle finds the nodes of the cycle by their boxes, and where several have one box, by which of them are near to each other.
func (s *sketch) findCycle(l *layout) {
	boxes := l.boxes()
	byBox := map[Box][]uint32{}
	for _, u := range s.nodes {
		b := l.half(boxes[u])
		byBox[b] = append(byBox[b], u)
	}
	cycle := s.entry.Cycle
	found := make([]uint32, len(cycle))
	tries := 0
	var extend func(i int) bool
	extend = func(i int) bool {
		if i == len(cycle) {
			return len(cycle) < 3 || s.entry.Cause == OrderClash || l.nearTo(found[i-1], found[0])
		}
		for _, u := range byBox[cycle[i].Box] {
			if tries++; tries > 1<<16 {
				return false
			}
			if i > 0 && !l.nearTo(found[i-1], u) || slices.Contains(found[:i], u) {
				continue
			}
			found[i] = u
			if extend(i + 1) {
				return true
			}
		}
		return false
	}
	if extend(0) {
		s.cycle = found
	}
}

// nearTo tells whether two nodes are a near pair.
func (l *layout) nearTo(u, v uint32) bool {
	if u > v {
		u, v = v, u
	}
	for _, e := range l.near.of(u) {
		if e>>1 == v {
			return true
		}
	}
	return false
}

// chooseSteps chooses the steps of the cycle that are drawn: all, or of a long one those around the first pair that stays.
func (s *sketch) chooseSteps() {
	n := len(s.cycle)
	s.drawn = make([]bool, n)
	if n <= stepsDrawn {
		for i := range s.drawn {
			s.drawn[i] = true
		}
		return
	}
	at := 0
	for i := range n {
		if next := (i + 1) % n; s.entry.Cycle[i].Mask == s.entry.Cycle[next].Mask && (next > 0 || s.entry.Cause == OddCycle) {
			at = i
			break
		}
	}
	for k := range stepsDrawn {
		i := at - stepsDrawn/2 + 1 + k
		if s.entry.Cause == OddCycle {
			s.drawn[(i+n)%n] = true
		} else if i >= 0 && i < n {
			s.drawn[i] = true
		}
	}
}

// link finds where the steps come nearest.
func (s *sketch) link(l *layout, parts map[uint32]*geom.Parts) {
	n := len(s.cycle)
	links := n
	if s.entry.Cause == OrderClash || n < 3 {
		links = max(0, n-1)
	}
	unit := float64(l.flat.forms.scale * l.flat.forms.scale)
	k := 2 / l.flat.forms.scale
	for i := range links {
		next := (i + 1) % n
		link := PictureLink{From: i + 1, To: next + 1}
		if s.drawn[i] && s.drawn[next] {
			from, to, sq := geom.Closest(*parts[s.cycle[i]], *parts[s.cycle[next]])
			link.At, link.Other = Spot{from.X * k, from.Y * k}, Spot{to.X * k, to.Y * k}
			link.DistanceSq, link.Known = sq/unit, true
		}
		s.out.Links = append(s.out.Links, link)
	}
}

// frame chooses the window: the places where the drawn steps come nearest, the shapes there as far as they are not long, and some
// room around.
func (s *sketch) frame(l *layout) {
	scale := l.flat.forms.scale
	work := func(p Spot) Box { return Box{p.X * scale / 2, p.Y * scale / 2, p.X * scale / 2, p.Y * scale / 2} }
	reach := l.rules.Reach() * scale
	hull := emptyBox
	for _, k := range s.out.Links {
		if k.Known {
			hull = hull.join(work(k.At)).join(work(k.Other))
		}
	}
	if hull == emptyBox { // no cycle to show: the first pair, or all of the component
		if len(s.entry.Pairs) > 0 {
			p := &s.entry.Pairs[0]
			hull = work(p.From).join(work(p.To))
		} else {
			for _, u := range s.nodes {
				hull = hull.join(l.boxes()[u])
			}
		}
	}
	grown := func(b Box, by int64) Box { return Box{b.X1 - by, b.Y1 - by, b.X2 + by, b.Y2 + by} }
	limit, around := grown(hull, 6*reach), grown(hull, 3*reach/2)
	for i, u := range s.cycle {
		if !s.drawn[i] {
			continue
		}
		b := l.boxes()[u]
		hull = hull.join(Box{max(b.X1, limit.X1), max(b.Y1, limit.Y1), min(b.X2, limit.X2), min(b.Y2, limit.Y2)})
	}
	for i := range s.entry.Pairs {
		p := &s.entry.Pairs[i]
		if at := work(p.From).join(work(p.To)); at.touches(around) {
			hull = hull.join(at)
		}
	}
	s.window = grown(hull, max(1, reach*5/8))
	s.out.Window = l.half(s.window)
}

// touches tells whether two closed boxes have a point in common.
func (b Box) touches(c Box) bool { return b.X1 <= c.X2 && c.X1 <= b.X2 && b.Y1 <= c.Y2 && c.Y1 <= b.Y2 }

// lookAround finds the nodes in the windows that are not in the cycles. A word of 64 columns over all windows passes by most nodes.
func (l *layout) lookAround(a *assignment, sketches []*sketch) {
	hull := emptyBox
	for _, s := range sketches {
		hull = hull.join(s.window)
	}
	columns := func(b Box) uint64 {
		first, last := tileOf(b.X1, hull.X1, hull.X2, 64), tileOf(b.X2, hull.X1, hull.X2, 64)
		return ^uint64(0) >> (63 - last + first) << first
	}
	rows := func(b Box) uint64 {
		first, last := tileOf(b.Y1, hull.Y1, hull.Y2, 64), tileOf(b.Y2, hull.Y1, hull.Y2, 64)
		return ^uint64(0) >> (63 - last + first) << first
	}
	var taken [64]uint64 // by row: columns with a window
	for _, s := range sketches {
		c, r := columns(s.window), rows(s.window)
		for i := range taken {
			if r>>i&1 != 0 {
				taken[i] |= c
			}
		}
	}
	for n, b := range l.boxes() {
		if !b.touches(hull) {
			continue
		}
		c, r := columns(b), rows(b)
		some := false
		for i := range taken {
			some = some || r>>i&1 != 0 && taken[i]&c != 0
		}
		if !some {
			continue
		}
		top := l.topOf(uint32(n))
		for _, s := range sketches {
			if s.top != top || !b.touches(s.window) || slices.Contains(s.cycle, uint32(n)) {
				continue
			}
			if len(s.others) < othersSeen {
				s.others = append(s.others, uint32(n))
			} else {
				s.more++
			}
		}
	}
	for _, s := range sketches {
		component := uint32(s.entry.Component)
		middle := Spot{s.window.X1/2 + s.window.X2/2, s.window.Y1/2 + s.window.Y2/2}
		far := func(u uint32) float64 {
			b := l.boxes()[u]
			dx := max(0, b.X1-middle.X, middle.X-b.X2)
			dy := max(0, b.Y1-middle.Y, middle.Y-b.Y2)
			return math.Hypot(float64(dx), float64(dy))
		}
		slices.SortStableFunc(s.others, func(u, v uint32) int {
			return cmp.Or(boolInt(a.component[v] == component)-boolInt(a.component[u] == component), cmp.Compare(far(u), far(v)),
				compareBoxes(l.boxes()[u], l.boxes()[v]))
		})
		if more := len(s.others) - othersDrawn; more > 0 {
			s.more += more
			s.others = s.others[:othersDrawn]
		}
		s.out.More = s.more
	}
}

// anchorsOf words the anchors of the nodes in pictures.
func (l *layout) anchorsOf(o *Orders, wanted map[uint32]*geom.Parts) map[uint32]string {
	words := map[uint32]string{}
	for _, an := range o.Anchors {
		if _, ok := wanted[an.Node]; !ok || words[an.Node] != "" {
			continue
		}
		words[an.Node] = "on " + an.Mask.String()
		if o.DescribeAnchor != nil {
			words[an.Node] = o.DescribeAnchor(an)
		}
	}
	return words
}

// fill puts the outlines into the picture.
func (s *sketch) fill(l *layout, a *assignment, parts map[uint32]*geom.Parts, anchors map[uint32]string) {
	var merger geom.Merger
	// Edges that a cut at the rim makes must not show.
	rim := l.rules.Reach() * l.flat.forms.scale
	clip := geom.Rect{X1: s.window.X1 - rim, Y1: s.window.Y1 - rim, X2: s.window.X2 + rim, Y2: s.window.Y2 + rim}
	add := func(u uint32, step int) {
		shape := PictureShape{Mask: Mask(a.mask.Data[u]), Step: step, Anchor: anchors[u], Box: l.half(l.boxes()[u]),
			Member: a.component[u] == uint32(s.entry.Component)}
		if cut := l.cutOf(u); cut != nil {
			for m, held := range cut.held {
				piece := shape
				piece.Cut = true
				if m == 1 {
					piece.Mask = piece.Mask.Other()
				}
				piece.Outlines = l.outlines(&merger, geom.Parts{Rects: held}, clip)
				s.out.Shapes = append(s.out.Shapes, piece)
			}
			return
		}
		shape.Outlines = l.outlines(&merger, *parts[u], clip)
		s.out.Shapes = append(s.out.Shapes, shape)
	}
	for i, u := range s.cycle {
		if s.drawn[i] {
			add(u, i+1)
		}
	}
	for _, u := range s.others {
		add(u, 0)
	}
}

// cutOf gives how a node is cut, or nil.
func (l *layout) cutOf(u uint32) *cutShape {
	if l.cuts == nil {
		return nil
	}
	return l.cuts.shapes[u]
}

// outlines gives what makes up a shape as far as it lies in the clip, in half units.
func (l *layout) outlines(merger *geom.Merger, parts geom.Parts, clip geom.Rect) [][][]Spot {
	k := 2 / l.flat.forms.scale
	var merged [][]Spot
	var outline geom.Outline
	merger.Merge(&outline, clipRects(parts.Rects, clip))
	for i := range outline.Loops() {
		var ring []Spot
		for _, c := range outline.Loop(i) {
			ring = append(ring, Spot{c.At.X * k, c.At.Y * k})
		}
		merged = append(merged, ring)
	}
	var out [][][]Spot
	if len(merged) > 0 {
		out = append(out, merged)
	}
	for _, p := range parts.Polygons {
		if b := p.At.ApplyRect(p.Polygon.Box()); b.X1 > clip.X2 || b.X2 < clip.X1 || b.Y1 > clip.Y2 || b.Y2 < clip.Y1 {
			continue
		}
		rings := chains(p)
		for _, ring := range rings {
			for i := range ring {
				ring[i] = Spot{ring[i].X * k, ring[i].Y * k}
			}
		}
		out = append(out, rings)
	}
	return out
}

// chains joins the edges of a placed polygon to closed rings, end to end.
func chains(p geom.Placed) [][]Spot {
	type edge struct{ a, b Spot }
	var edges []edge
	at := map[Spot][]int{}
	p.Polygon.Edges(func(a, b geom.Point) bool {
		a, b = p.At.Apply(a), p.At.Apply(b)
		e := edge{Spot{a.X, a.Y}, Spot{b.X, b.Y}}
		at[e.a] = append(at[e.a], len(edges))
		at[e.b] = append(at[e.b], len(edges))
		edges = append(edges, e)
		return true
	})
	used := make([]bool, len(edges))
	var out [][]Spot
	for first := range edges {
		if used[first] {
			continue
		}
		used[first] = true
		ring := []Spot{edges[first].a}
		for end := edges[first].b; end != edges[first].a; {
			ring = append(ring, end)
			next := -1
			for _, i := range at[end] {
				if !used[i] {
					next = i
					break
				}
			}
			if next < 0 {
				break
			}
			used[next] = true
			if edges[next].a == end {
				end = edges[next].b
			} else {
				end = edges[next].a
			}
		}
		out = append(out, ring)
	}
	return out
}
