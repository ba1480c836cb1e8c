package decompose

import (
	"slices"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
	"maskpair/decompose/stitch"
)

// This file knows what a cut does to spacings. Pieces have outlines of their own: a cut makes new tips, it makes sides shorter, and
// squares that made a part wide may no longer fit. And pieces of one shape that are on one mask, but no longer hang together there,
// must keep their spacing from each other.
//
// So that atoms can be judged one by one, whichever of them end up on one mask together, a cut is a candidate only where it changes no
// edge that faces anything within reach; the new ends lie where nothing is within reach. What nearness an atom has then comes from
// edges that are of the same kind in every piece that it can be part of. And a cut is no candidate if two atoms that it does not
// join would be near to each other.

// cutting finds out which cuts the shapes of a broken group allow. Coordinates are those of the canonical frame.
type cutting struct {
	s        *solver
	b        *brokenGroup
	rules    *facing.Rules // nil: one spacing for all
	spacing  int64         // the largest
	stitches stitch.Rules
	kinds    *stitch.Kinds // with one spacing for all
	parts    map[uint32]*geom.Parts
	rects    [][]geom.Rect // by node of the group
	near     [][]int32     // by node of the group
	shapes   map[uint32]*facing.Shape
	maker    facing.Maker
}

func (s *solver) newCutting(b *brokenGroup, parts map[uint32]*geom.Parts, rects [][]geom.Rect, near [][]int32, rules stitch.Rules) *cutting {
	c := &cutting{s: s, b: b, rules: s.l.facingRules(), stitches: rules, spacing: rules.Spacing, parts: parts, rects: rects, near: near, shapes: map[uint32]*facing.Shape{}}
	if c.rules == nil {
		rules.Refuse = c.tooNear
		c.kinds = stitch.NewKinds(rules)
	}
	return c
}

// find gives the candidates of a node. Where one spacing is all, shapes that recur are looked at once.
func (c *cutting) find(k int, around, keepOut []geom.Rect) (stitch.Split, stitch.Reason) {
	if c.kinds != nil {
		return c.kinds.Find(c.rects[k], around, keepOut)
	}
	rules := c.stitches
	rules.Refuse = c.refuse(k)
	return stitch.Find(c.rects[k], around, keepOut, rules)
}

// findApart notes, for the nodes of broken groups, what is within the largest spacing though no rule makes it near, and asks for its
// geometry.
func (s *solver) findApart(parts map[uint32]*geom.Parts) {
	s.apart = map[uint32][]uint32{}
	note := func(u, v uint32) {
		if _, ok := s.of(u); !ok {
			return
		}
		s.apart[u] = append(s.apart[u], v)
		if parts[v] == nil {
			parts[v] = &geom.Parts{}
		}
	}
	for _, p := range s.l.far {
		note(p.a, p.b)
		note(p.b, p.a)
	}
}

// around gives the rectangles of other nodes that can be within the largest spacing of a node's box.
func (c *cutting) around(k int, box geom.Rect) []geom.Rect {
	var out []geom.Rect
	add := func(rects []geom.Rect) {
		for _, r := range rects {
			if geom.RectsRelation(r, box, c.spacing) != geom.Far {
				out = append(out, r)
			}
		}
	}
	for _, v := range c.near[k] {
		add(c.rects[v])
	}
	for _, v := range c.s.apart[c.b.nodes[k]] {
		add(placedRects(c.parts[v], c.b.canon.back))
	}
	return out
}

// shape gives the outline of a node.
func (c *cutting) shape(node uint32) *facing.Shape {
	s := c.shapes[node]
	if s == nil {
		s = new(facing.Shape)
		back := geom.Placement{Turn: uint8(c.b.canon.back.turn), X: c.b.canon.back.x, Y: c.b.canon.back.y}
		placed := geom.Parts{Rects: placedAll(c.parts[node].Rects, c.b.canon.back)}
		for _, p := range c.parts[node].Polygons {
			placed.Polygons = append(placed.Polygons, geom.Placed{Polygon: p.Polygon, At: back.After(p.At)})
		}
		c.maker.Parts(s, placed)
		c.shapes[node] = s
	}
	return s
}

// tooNear names the cuts that are no candidates with one spacing for all.
func (c *cutting) tooNear(s *stitch.Split) []geom.Rect {
	pieces := make([][]geom.Rect, len(s.Cores))
	for i := range pieces {
		pieces[i] = s.Piece(i)
	}
	return tooNearEachOther(s, func(i, j int) bool { return rectsNear(pieces[i], pieces[j], c.spacing) })
}

// refuse names the cuts of node k that are no candidates under rules by what faces what.
func (c *cutting) refuse(k int) func(s *stitch.Split) []geom.Rect {
	return func(s *stitch.Split) []geom.Rect {
		atoms := make([]*facing.Shape, len(s.Cores))
		for i := range atoms {
			atoms[i] = new(facing.Shape)
			c.maker.Rects(atoms[i], s.Piece(i))
		}
		bad := c.changed(k, s, atoms)
		for _, b := range tooNearEachOther(s, func(i, j int) bool { return c.rules.Near(atoms[i], atoms[j]) }) {
			if !slices.Contains(bad, b) {
				bad = append(bad, b)
			}
		}
		return bad
	}
}

// changed names a cut of each atom that has edges which are no longer what they were.
func (c *cutting) changed(k int, s *stitch.Split, atoms []*facing.Shape) []geom.Rect {
	var others []*facing.Shape
	for _, v := range c.near[k] {
		others = append(others, c.shape(c.b.nodes[v]))
	}
	for _, v := range c.s.apart[c.b.nodes[k]] {
		others = append(others, c.shape(v))
	}
	whole := c.shape(c.b.nodes[k])
	var bad []geom.Rect
	for i, atom := range atoms {
		var overlaps []geom.Rect
		for _, cut := range s.Cuts {
			if cut.Low == i || cut.High == i {
				overlaps = append(overlaps, cut.Box)
			}
		}
		if len(overlaps) == 0 || c.rules.Keeps(whole, atom, overlaps, others) {
			continue
		}
		if last := overlaps[len(overlaps)-1]; !slices.Contains(bad, last) {
			bad = append(bad, last)
		}
	}
	return bad
}

// tooNearEachOther names a cut for each two atoms that are near to each other and not joined by a cut: the last on the way between them.
func tooNearEachOther(s *stitch.Split, near func(i, j int) bool) []geom.Rect {
	n := len(s.Cores)
	if n < 3 {
		return nil
	}
	back := make([]int, n) // the cut by which an atom was reached from atom i
	next := make([][]int, n)
	for c, cut := range s.Cuts {
		next[cut.Low] = append(next[cut.Low], c)
		next[cut.High] = append(next[cut.High], c)
	}
	other := func(c, i int) int { return s.Cuts[c].Low + s.Cuts[c].High - i }
	var bad []geom.Rect
	for i := range n {
		queue := []int{i}
		for k := range back {
			back[k] = -1
		}
		for len(queue) > 0 {
			at := queue[0]
			queue = queue[1:]
			for _, c := range next[at] {
				to := other(c, at)
				if to == i || back[to] >= 0 {
					continue
				}
				back[to] = c
				queue = append(queue, to)
				// Two steps away or farther; each two atoms once.
				if at != i && to > i && near(i, to) && !slices.Contains(bad, s.Cuts[c].Box) {
					bad = append(bad, s.Cuts[c].Box)
				}
			}
		}
	}
	return bad
}

// atomShapes are the outlines of the atoms of a group.
type atomShapes struct {
	rules *facing.Rules
	of    []*facing.Shape
}

// atomShapes makes them; nil where one spacing is all.
func (c *cutting) atomShapes(p *pieces) *atomShapes {
	if c.rules == nil {
		return nil
	}
	a := &atomShapes{c.rules, make([]*facing.Shape, len(p.rects))}
	for k, u := range c.b.nodes {
		for i := p.first[k]; i < p.first[k+1]; i++ {
			if p.rects[i] == nil {
				a.of[i] = c.shape(u)
			} else {
				a.of[i] = new(facing.Shape)
				c.maker.Rects(a.of[i], p.rects[i])
			}
		}
	}
	return a
}

func (a *atomShapes) near(i, j int32) bool { return a.rules.Near(a.of[i], a.of[j]) }
