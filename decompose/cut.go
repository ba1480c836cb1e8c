package decompose

import (
	"cmp"
	"fmt"
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file cuts what is to be cut: it gives the figures of a cut shape to the masks, whole or in pieces, in the coordinates of their
// structures.

// cutShape is a node that is cut: what each mask holds of it, in work units of its top.
type cutShape struct {
	held [2][]geom.Rect // by mask relative to the node's mask: 0 the same, 1 the other
	area [2]float64     // square work units
	laps int64
}

// cuts are the cut shapes of a layer, and once the masks are final, its cut figures.
type cuts struct {
	shapes  map[uint32]*cutShape // by node
	figures map[uint32]int32     // by ordinal: below 0: wholly on mask -1-value, else index into forms
	forms   []cutForm
	byKey   map[string]int32
}

// cutForm is a figure in pieces, in database units of its structure.
type cutForm struct {
	pieces []gds.Piece
	sign   uint64 // what it is, whatever the order in the file
}

// cut notes which nodes of a group are cut by its masks.
func (s *solver) cut(b *brokenGroup) {
	if !b.cutting {
		return
	}
	if s.l.cuts == nil {
		s.l.cuts = &cuts{shapes: map[uint32]*cutShape{}}
	}
	var areas geom.AreaScratch
	p := b.pieces
	forward := b.canon.back.inverse()
	for k, u := range b.nodes {
		delete(s.l.cuts.shapes, u)
		first := b.masks[p.first[k]]
		if !slices.Contains(b.masks[p.first[k]:p.first[k+1]], first^1) {
			continue
		}
		cut := &cutShape{}
		for i := p.first[k]; i < p.first[k+1]; i++ {
			m := b.masks[i] ^ first
			for _, r := range p.rects[i] {
				cut.held[m] = append(cut.held[m], geom.Rect(forward.applyBox(Box(r))))
			}
		}
		for m := range cut.held {
			cut.area[m] = areas.UnionArea(cut.held[m]).Float()
		}
		s.l.cuts.shapes[u] = cut
	}
	for _, i := range p.made(b.masks) {
		u := b.nodes[p.cuts[i].node]
		s.l.cuts.shapes[u].laps++
	}
}

// areaOn gives the area that a node has on each mask.
func (l *layout) areaOn(u uint32, mask uint8) (a, b float64) {
	var on [2]float64
	on[mask] = l.area[u]
	if l.cuts != nil {
		if c := l.cuts.shapes[u]; c != nil {
			on[mask], on[mask^1] = c.area[0], c.area[1]
		}
	}
	return on[0], on[1]
}

// laps is the number of stitches made.
func (c *cuts) laps() int64 {
	if c == nil {
		return 0
	}
	n := int64(0)
	for _, s := range c.shapes {
		n += s.laps
	}
	return n
}

// cutFigures gives the figures of all cut shapes to the masks, which are final.
func (l *layout) cutFigures(mask []uint8) error {
	if l.cuts == nil || len(l.cuts.shapes) == 0 {
		return nil
	}
	c := l.cuts
	c.figures, c.byKey = map[uint32]int32{}, map[string]int32{}
	node := l.nodeOf.Data
	var failed error
	for top := range l.flat.h.tops {
		l.eachFigure(top, func(o uint32) bool { return c.shapes[node[o]] != nil },
			func(o, figure uint32, at placement, odd *oddFigure) {
				n := node[o]
				s := c.shapes[n]
				if odd != nil {
					failed = &InputError{Msg: fmt.Sprintf("layer %s: a shape with a figure under a magnification cannot be cut", l.rules.Name)}
					return
				}
				var p geom.Parts
				l.flat.parts(figure, at, &p)
				c.figures[o] = c.figure(l, s, p.Rects, at, mask[n])
			})
	}
	return failed
}

// figure cuts one figure of a cut shape; the shape's mask is given.
func (c *cuts) figure(l *layout, s *cutShape, rects []geom.Rect, at placement, mask uint8) int32 {
	var on [2][]geom.Rect
	var cutter geom.Cutter
	rects = cutter.Disjoint(nil, rects)
	for rel, held := range s.held {
		var inside []geom.Rect
		for _, r := range rects {
			for _, h := range held {
				q := geom.Rect{X1: max(r.X1, h.X1), Y1: max(r.Y1, h.Y1), X2: min(r.X2, h.X2), Y2: min(r.Y2, h.Y2)}
				if q.X1 < q.X2 && q.Y1 < q.Y2 {
					inside = append(inside, q)
				}
			}
		}
		on[mask^uint8(rel)] = inside
	}
	for m := range on {
		if len(on[m^1]) == 0 {
			return -1 - int32(m)
		}
	}
	back := at.inverse()
	var local [2][]geom.Rect
	for m := range on {
		for _, r := range on[m] {
			b := back.applyBox(Box(r))
			k := l.flat.forms.scale
			local[m] = append(local[m], geom.Rect{X1: b.X1 / k, Y1: b.Y1 / k, X2: b.X2 / k, Y2: b.Y2 / k})
		}
	}
	form := cutForm{pieces: readable(local, [2]gds.LayerType{l.rules.MaskA, l.rules.MaskB})}
	key := fmt.Sprint(form.pieces)
	if i, ok := c.byKey[key]; ok {
		return i
	}
	form.sign = mixString(key)
	c.byKey[key] = int32(len(c.forms))
	c.forms = append(c.forms, form)
	return int32(len(c.forms) - 1)
}

// outlinesOf gives polygons that cover rectangles with disjoint interiors: one for each loop where there are no holes, else the
// rectangles themselves.
func outlinesOf(rects []geom.Rect) [][]gds.Point {
	outline := geom.Merge(rects)
	var out [][]gds.Point
	holes := false
	for i := range outline.Loops() {
		loop := outline.Loop(i)
		points := make([]gds.Point, len(loop))
		twice := int64(0)
		for k, c := range loop {
			points[k] = gds.Point{X: int32(c.At.X), Y: int32(c.At.Y)}
			next := loop[(k+1)%len(loop)].At
			twice += (next.X - c.At.X) * (next.Y + c.At.Y - 2*loop[0].At.Y)
		}
		// The interior is on the left, so that an outer loop runs counter-clockwise and this sum is below 0.
		holes = holes || twice > 0
		out = append(out, points)
	}
	if holes {
		slices.SortFunc(rects, func(a, b geom.Rect) int { return cmp.Or(cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.X1, b.X1)) })
		out = out[:0]
		for _, r := range rects {
			x1, y1, x2, y2 := int32(r.X1), int32(r.Y1), int32(r.X2), int32(r.Y2)
			out = append(out, []gds.Point{{X: x1, Y: y1}, {X: x2, Y: y1}, {X: x2, Y: y2}, {X: x1, Y: y2}})
		}
	}
	return out
}
