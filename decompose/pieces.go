package decompose

import (
	"context"
	"fmt"
	"slices"

	"maskpair/decompose/exact"
	"maskpair/decompose/geom"
	"maskpair/decompose/stitch"
)

// This file finds where the shapes of broken groups can be cut, and makes the graph of their pieces. Coordinates are those of the
// canonical frame of the group, so that equal groups have equal candidates.
//
// Cutting a shape at all its candidates makes atoms; neighbouring atoms are joined by an edge that asks for the same mask and costs a
// stitch to break. A near pair of two shapes becomes the near pairs of their atoms, of which it is unresolved where any is.

// pieces are the atoms of one group.
type pieces struct {
	first   []int32         // first atom of each node; one more at the end
	cuts    []pieceCut      // candidates, by node and place
	boxes   []geom.Rect     // by atom: around it
	rects   [][]geom.Rect   // by atom: what a mask holds of it; nil for an atom that is a whole node
	pairs   [][][2]int32    // by near pair of the group: near atoms; nil where both nodes are whole
	reasons []stitch.Reason // by node
	held    int             // nodes that are under an order, given stitches, slanted or on half units
	shapes  *atomShapes     // outlines of atoms; nil: one spacing is all
}

// pieceCut is a candidate.
type pieceCut struct {
	node      int32
	box       geom.Rect
	alongX    bool
	low, high int32 // atoms
}

// length is the overlap along the wire.
func (c *pieceCut) length() int64 {
	if c.alongX {
		return c.box.X2 - c.box.X1
	}
	return c.box.Y2 - c.box.Y1
}

// findPieces finds the candidates of all broken groups.
func (s *solver) findPieces(ctx context.Context, jobs int) error {
	rules := s.l.rules.Stitch
	if rules == nil || len(s.groups) == 0 {
		return nil
	}
	parts := make(map[uint32]*geom.Parts, s.nodes)
	for i := range s.groups {
		for _, u := range s.groups[i].nodes {
			parts[u] = &geom.Parts{}
		}
	}
	s.findApart(parts)
	s.l.geometryOf(parts)
	keepOut, err := s.keepOut(ctx, parts)
	if err != nil {
		return err
	}
	tied := map[uint32]bool{}
	for _, t := range s.o.Ties {
		tied[t.A], tied[t.B] = true, true
	}
	return s.each(ctx, jobs, func(b *brokenGroup) {
		s.cutAll(b, parts, keepOut, tied)
		b.cutting = rules.Apply && len(b.pieces.cuts) > 0
	})
}

// placedRects gives the rectangles of a node in the canonical frame; slanted figures by the boxes of their bands.
func placedRects(parts *geom.Parts, back placement) []geom.Rect {
	out := make([]geom.Rect, 0, len(parts.Rects))
	for _, r := range parts.Rects {
		out = append(out, geom.Rect(back.applyBox(Box(r))))
	}
	for _, p := range parts.Polygons {
		for _, band := range p.Polygon.Bands() {
			out = append(out, geom.Rect(back.applyBox(Box(p.At.ApplyRect(band.Box)))))
		}
	}
	return out
}

func (s *solver) cutAll(b *brokenGroup, parts map[uint32]*geom.Parts, keepOut map[uint32][]geom.Rect, tied map[uint32]bool) {
	scale := s.l.flat.forms.scale
	rules := stitch.Rules{Spacing: s.l.rules.Reach() * scale, MinOverlap: s.l.rules.Stitch.MinOverlap * scale,
		MinPiece: s.l.rules.Stitch.MinPiece * scale, Grid: scale}
	n := len(b.nodes)
	p := &pieces{first: make([]int32, n+1), reasons: make([]stitch.Reason, n)}
	b.pieces = p
	rects := make([][]geom.Rect, n)
	for k, u := range b.nodes {
		rects[k] = placedRects(parts[u], b.canon.back)
	}
	near := make([][]int32, n)
	for _, e := range b.edges {
		near[e.U] = append(near[e.U], e.V)
		near[e.V] = append(near[e.V], e.U)
	}
	splits := make([]*stitch.Split, n)
	cutting := s.newCutting(b, parts, rects, near, rules)
	atoms := int32(0)
	for k, u := range b.nodes {
		p.first[k] = atoms
		atoms++
		if b.fixed != nil && b.fixed[k] >= 0 || tied[u] || s.l.isGiven(u) || len(parts[u].Polygons) > 0 || scale == 2 && onHalves(rects[k]) {
			p.held++
			continue
		}
		around := cutting.around(k, geom.Rect(boxAround(rects[k])))
		var kept []geom.Rect
		for _, r := range keepOut[u] {
			kept = append(kept, geom.Rect(b.canon.back.applyBox(Box(r))))
		}
		split, why := cutting.find(k, around, kept)
		p.reasons[k] = why
		if len(split.Cuts) == 0 {
			continue
		}
		splits[k] = &split
		for _, c := range split.Cuts {
			p.cuts = append(p.cuts, pieceCut{int32(k), c.Box, c.AlongX, p.first[k] + int32(c.Low), p.first[k] + int32(c.High)})
		}
		atoms = p.first[k] + int32(len(split.Cores))
	}
	p.first[n] = atoms
	if len(p.cuts) == 0 {
		return
	}
	p.rects, p.boxes = make([][]geom.Rect, atoms), make([]geom.Rect, atoms)
	for k, split := range splits {
		if split == nil {
			p.boxes[p.first[k]] = geom.Rect(boxAround(rects[k]))
			continue
		}
		for i := range split.Cores {
			atom := p.first[k] + int32(i)
			p.rects[atom] = split.Piece(i)
			p.boxes[atom] = geom.Rect(boxAround(p.rects[atom]))
		}
	}
	p.shapes = cutting.atomShapes(p)
	p.pairs = make([][][2]int32, len(b.edges))
	for i, e := range b.edges {
		if splits[e.U] == nil && splits[e.V] == nil {
			continue
		}
		p.pairs[i] = s.nearAtoms(b, int(e.U), int(e.V), rects, parts, rules.Spacing)
	}
}

func onHalves(rects []geom.Rect) bool {
	return slices.ContainsFunc(rects, func(r geom.Rect) bool { return (r.X1|r.Y1|r.X2|r.Y2)&1 != 0 })
}

// nearAtoms gives the near atoms of two nodes.
func (s *solver) nearAtoms(b *brokenGroup, k, m int, rects [][]geom.Rect, parts map[uint32]*geom.Parts, spacing int64) [][2]int32 {
	p := b.pieces
	var out [][2]int32
	for i := p.first[k]; i < p.first[k+1]; i++ {
		for j := p.first[m]; j < p.first[m+1]; j++ {
			if geom.RectsRelation(p.boxes[i], p.boxes[j], spacing) != geom.Far && s.atomsNear(b, k, m, i, j, rects, parts, spacing) {
				out = append(out, [2]int32{i, j})
			}
		}
	}
	return out
}

func (s *solver) atomsNear(b *brokenGroup, k, m int, i, j int32, rects [][]geom.Rect, parts map[uint32]*geom.Parts, spacing int64) bool {
	p := b.pieces
	if p.shapes != nil {
		return p.shapes.near(i, j)
	}
	ri, rj := p.rects[i], p.rects[j]
	if ri != nil && rj != nil {
		return rectsNear(ri, rj, spacing)
	}
	// One of the two is a whole node; only that can be slanted.
	if ri == nil {
		ri, rj, k, m = rj, ri, m, k
	}
	whole := parts[b.nodes[m]]
	if len(whole.Polygons) == 0 {
		return rectsNear(ri, rects[m], spacing)
	}
	forward := b.canon.back.inverse()
	for _, r := range ri {
		top := geom.Rect(forward.applyBox(Box(r)))
		for _, q := range whole.Rects {
			if geom.RectsRelation(top, q, spacing) != geom.Far {
				return true
			}
		}
		for _, q := range whole.Polygons {
			for n := range q.Polygon.Bands() {
				if geom.BandRectRelation(q.Polygon, n, q.At, top, spacing) != geom.Far {
					return true
				}
			}
		}
	}
	return false
}

func rectsNear(a, b []geom.Rect, spacing int64) bool {
	for _, r := range a {
		for _, q := range b {
			if geom.RectsRelation(r, q, spacing) != geom.Far {
				return true
			}
		}
	}
	return false
}

// pieceEdges fills a problem with the near atoms and the cuts of a group.
//
// A near pair costs once, however many of its atoms are on one mask. With two near atoms x, y of one node and v of the other, that is
// half of [x=v] + [y=v] + [x!=y]; for more see crowded.go.
func (b *brokenGroup) pieceEdges(problem *exact.Problem) {
	p := b.pieces
	for i, e := range b.edges {
		weight := b.weight(i, b.units)
		near := p.pairs[i]
		switch {
		case near == nil:
			problem.Edges = append(problem.Edges, exact.Edge{U: p.first[e.U], V: p.first[e.V], Weight: weight})
		case len(near) == 0:
		case len(near) == 1:
			problem.Edges = append(problem.Edges, exact.Edge{U: near[0][0], V: near[0][1], Weight: weight})
		case len(near) == 2 && (near[0][0] == near[1][0] || near[0][1] == near[1][1]):
			x, y := near[0][0], near[1][0]
			if x == y {
				x, y = near[0][1], near[1][1]
			}
			problem.Edges = append(problem.Edges, exact.Edge{U: near[0][0], V: near[0][1], Weight: weight / 2},
				exact.Edge{U: near[1][0], V: near[1][1], Weight: weight / 2}, exact.Edge{U: x, V: y, Weight: weight / 2, Same: true})
		default:
			b.crowds = append(b.crowds, newCrowd(i, near, weight))
		}
	}
	for _, c := range p.cuts {
		problem.Edges = append(problem.Edges, exact.Edge{U: c.low, V: c.high, Weight: b.units.stitch, Same: true})
	}
	for i := range b.crowds {
		c := &b.crowds[i]
		b.surplus += c.edges(problem, p.pairs[c.edge])
	}
}

// violated tells whether a near pair is on one mask, by the masks of atoms.
func (b *brokenGroup) violated(edge int, masks []uint8) bool {
	e := b.edges[edge]
	if !b.cutting || b.pieces.pairs[edge] == nil {
		return masks[b.atom(int(e.U))] == masks[b.atom(int(e.V))]
	}
	return slices.ContainsFunc(b.pieces.pairs[edge], func(q [2]int32) bool { return masks[q[0]] == masks[q[1]] })
}

// made gives the cuts that an assignment makes.
func (p *pieces) made(masks []uint8) []int {
	var out []int
	for i, c := range p.cuts {
		if masks[c.low] != masks[c.high] {
			out = append(out, i)
		}
	}
	return out
}

// leastCuts gives the least set of cuts that leaves no pair of the group unresolved, as indices of candidates; nil where none does. It
// is not known where that takes too much work.
func (s *solver) leastCuts(b *brokenGroup) (set []int, known bool) {
	if b.pieces == nil || len(b.pieces.cuts) == 0 {
		return nil, true
	}
	if !s.consistent(b, func(int) bool { return true }) {
		return nil, true // not even all cuts together are enough
	}
	trial := *b
	if !b.cutting {
		trial.cutting = true
		s.weigh(&trial, nil)
		trial.solution = s.solved(&trial, b.again())
		trial.masks = trial.spread(trial.solution.Masks)
	}
	if !trial.solution.Proved {
		return nil, false
	}
	return trial.pieces.made(trial.masks), true
}

// resolves tells whether a cut alone leaves no pair of the group unresolved that is not waived.
func (s *solver) resolves(b *brokenGroup, cut int) bool {
	return s.consistent(b, func(i int) bool { return i == cut })
}

// consistent tells whether no pair of a group that is not waived need be unresolved when some cuts may be made, at no cost.
func (s *solver) consistent(b *brokenGroup, may func(cut int) bool) bool {
	p := b.pieces
	atoms := int(p.first[len(b.nodes)])
	q := newParity(make([]uint32, atoms+1))
	for i, c := range p.cuts {
		if !may(i) {
			q.relate(uint32(c.low), uint32(c.high), 0)
		}
	}
	ok := true
	for k, m := range b.fixed {
		if m >= 0 {
			ok = q.relate(uint32(p.first[k]), uint32(atoms), uint32(m)) && ok
		}
	}
	if s.a.tied {
		local := make(map[uint32]uint32, len(b.nodes))
		for k, u := range b.nodes {
			local[u] = uint32(p.first[k])
		}
		for _, t := range b.ties {
			ok = q.relate(local[t.A], local[t.B], uint32(boolInt(t.Opposite))) && ok
		}
	}
	for i, e := range b.edges {
		if b.waived[i] {
			continue
		}
		if p.pairs[i] == nil {
			ok = q.relate(uint32(p.first[e.U]), uint32(p.first[e.V]), 1) && ok
			continue
		}
		for _, pair := range p.pairs[i] {
			ok = q.relate(uint32(pair[0]), uint32(pair[1]), 1) && ok
		}
	}
	return ok
}

// forbids words which rule leaves a component without a candidate.
func (p *pieces) forbids(nodes []int32, rules *Rules, l *LayerRules) string {
	last := stitch.NoWire
	for _, k := range nodes {
		last = max(last, p.reasons[k])
	}
	switch last {
	case stitch.Covered:
		return fmt.Sprintf("neighbours within %s cover every wire", rules.Length(float64(l.Reach())))
	case stitch.TooShort:
		return fmt.Sprintf("no wire is clear of neighbours over min_overlap (%s)", rules.Length(float64(l.Stitch.MinOverlap)))
	case stitch.KeptOut:
		return "keep_out figures lie where a wire is clear of neighbours"
	case stitch.SmallPart:
		return fmt.Sprintf("a piece would be shorter than min_piece (%s)", rules.Length(float64(l.Stitch.MinPiece)))
	case stitch.Refused:
		return "a cut would bring pieces of the shape too near to each other, or leave edges so short that other rules hold for them"
	case stitch.Useless:
		return "a cut would leave a piece without neighbours, or not part the shape"
	}
	if p.held > 0 {
		return "its shapes are under orders, stitched already, slanted, on half units, or no longer than wide"
	}
	return "its shapes are no longer than wide"
}
