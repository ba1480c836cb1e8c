package decompose

import (
	"sync"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
)

// This file says of a pair that stays on one mask which rule by what faces what made it: between which edges, how far they are apart,
// and by how much the gap must widen. Of several places that break a rule, the one that lacks most is told, because mending it last
// leaves nothing.

// facingNames words pairs by the rules of a layer. Any number of goroutines may use it.
type facingNames struct {
	rules  *facing.Rules
	mu     sync.Mutex
	shapes map[uint32]*facing.Shape // by node
}

// newFacingNames gives nil for a layer without such rules.
func newFacingNames(l *layout) *facingNames {
	rules := l.facingRules()
	if rules == nil {
		return nil
	}
	return &facingNames{rules: rules, shapes: map[uint32]*facing.Shape{}}
}

// of gives the outline of a node, of a large one only what can be seen from a box.
func (f *facingNames) of(node uint32, parts *geom.Parts, from Box) *facing.Shape {
	if len(parts.Rects) >= largeOutline {
		seen := geom.Parts{Polygons: parts.Polygons}
		sight := f.rules.Sight()
		for _, r := range parts.Rects {
			if r.X1-from.X2 <= sight && from.X1-r.X2 <= sight && r.Y1-from.Y2 <= sight && from.Y1-r.Y2 <= sight {
				seen.Rects = append(seen.Rects, r)
			}
		}
		return outlineOf(seen)
	}
	f.mu.Lock()
	defer f.mu.Unlock()
	s := f.shapes[node]
	if s == nil {
		s = outlineOf(*parts)
		f.shapes[node] = s
	}
	return s
}

// outlineOf makes the outline of some parts.
func outlineOf(parts geom.Parts) *facing.Shape {
	var m facing.Maker
	s := new(facing.Shape)
	m.Parts(s, parts)
	return s
}

// byFacing fills in what the rules say of a near pair; of a shape that is cut, the pieces count that are on the mask of the other. It is
// false where no rule makes the two near.
func (e *explainer) byFacing(b *brokenGroup, edge int, u, v uint32, out *Pair) bool {
	best, found := facing.Approach{}, false
	offer := func(p, q *facing.Shape) {
		if a, near := e.facing.rules.Nearest(p, q); near && (!found || a.Worse(&best)) {
			best, found = a, true
		}
	}
	if !b.cutting || b.pieces.pairs[edge] == nil {
		offer(e.facing.of(u, e.parts[u], e.boxes[v]), e.facing.of(v, e.parts[v], e.boxes[u]))
	} else {
		forward := b.canon.back.inverse()
		piece := func(atom int32, n, other uint32) *facing.Shape {
			rects := b.pieces.rects[atom]
			if rects == nil {
				return e.facing.of(n, e.parts[n], e.boxes[other])
			}
			return outlineOf(geom.Parts{Rects: placedAll(rects, forward)})
		}
		turned := b.nodes[b.edges[edge].U] != u
		for _, q := range b.pieces.pairs[edge] {
			if b.masks[q[0]] != b.masks[q[1]] {
				continue
			}
			if turned {
				q[0], q[1] = q[1], q[0]
			}
			offer(piece(q[0], u, v), piece(q[1], v, u))
		}
	}
	if found {
		e.l.tell(&best, out)
	}
	return found
}

// tell puts a place into a pair whose boxes are known.
func (l *layout) tell(a *facing.Approach, out *Pair) {
	scale := l.flat.forms.scale
	k := 2 / scale
	spot := func(p geom.Point) Spot { return Spot{p.X * k, p.Y * k} }
	out.Rule, out.Spacing = a.Rule.String(), a.Spacing/scale
	out.EdgeA, out.EdgeB = Edge{spot(a.A[0]), spot(a.A[1])}, Edge{spot(a.B[0]), spot(a.B[1])}
	out.From, out.To = spot(a.From), spot(a.To)
	out.DistanceSq = a.DistanceSq / float64(scale*scale)
	out.Gap = gapBox(edgeBox(out.EdgeA), edgeBox(out.EdgeB), out.From, out.To)
	out.Widen = lacks(out.Spacing, out.DistanceSq)
}

func edgeBox(e Edge) Box {
	return Box{min(e[0].X, e[1].X), min(e[0].Y, e[1].Y), max(e[0].X, e[1].X), max(e[0].Y, e[1].Y)}
}

// placedAll places rectangles.
func placedAll(rects []geom.Rect, at placement) []geom.Rect {
	out := make([]geom.Rect, len(rects))
	for i, r := range rects {
		out[i] = geom.Rect(at.applyBox(Box(r)))
	}
	return out
}
