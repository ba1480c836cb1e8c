package decompose

import (
	"context"
	"fmt"
	"math"
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds/arena"
)

// This file looks at shapes that arrive on both masks. One whose figures are all on masks, with every meeting of A and B an overlap of
// at least min_overlap, is a given stitch: it is kept as it is, and each of its pieces (figures of one mask that hang together) is a
// node of its own. Any other cannot be kept and is refused.

// givenStitches are those of one layer.
type givenStitches struct {
	laps   int64
	pieces []givenPiece
	shape  map[uint32]uint32 // of the nodes behind the shapes: node to shape
	meet   map[[2]uint32]bool
}

// givenPiece is a piece of a given stitch.
type givenPiece struct {
	figures []uint32 // ordinals, ascending
	area    float64
	node    uint32
	met     []int // pieces that it overlaps
}

// shapeOf gives the shape of a node.
func (l *layout) shapeOf(node uint32) uint32 {
	if l.given != nil {
		if s, ok := l.given.shape[node]; ok {
			return s
		}
	}
	return node
}

// isGiven tells whether a node is a piece of a given stitch.
func (l *layout) isGiven(node uint32) bool {
	if l.given == nil {
		return false
	}
	_, ok := l.given.shape[node]
	return ok
}

// findTags notes what arrives on a mask; nothing is kept where nothing does.
func (l *layout) findTags() {
	f := l.flat
	masked := false
	for _, s := range f.h.bottom {
		f.ownFigures(s, func(_, figure uint32) {
			masked = masked || f.sel.tag[f.lib.Figures[figure].Class] != drawn
		})
	}
	if !masked {
		return
	}
	l.tags = arena.New[uint8](int(f.total))
	for top := range f.h.tops {
		f.visit(top, func(s int32, _ placement, _ bool, first uint32) {
			f.ownFigures(s, func(k, figure uint32) { l.tags.Data[first+k] = uint8(f.sel.tag[f.lib.Figures[figure].Class]) })
		})
	}
}

// onBoth finds the shapes of a top that arrive on both masks and takes them apart. The roots of the ordinals are settled, the shapes
// not yet numbered; the window at hand is the whole top.
func (b *builder) onBoth(top int, sets union, from, to uint32) error {
	l := b.l
	if l.tags == nil || l.rules.Redo {
		return nil
	}
	seen := make([]uint8, to-from) // by root: bit 0 A, bit 1 B, bit 2 drawn
	for o := from; o < to; o++ {
		bit := uint8(4)
		switch tag(l.tags.Data[o]) {
		case onA:
			bit = 1
		case onB:
			bit = 2
		}
		seen[sets[o]-from] |= bit
	}
	if !slices.ContainsFunc(seen, func(s uint8) bool { return s&3 == 3 }) {
		return nil
	}
	var items []item
	for _, it := range b.sorted {
		o, ok := b.ordinal(&it)
		if !ok {
			continue
		}
		s := seen[sets[o]-from]
		if s&3 != 3 {
			continue
		}
		if s&4 != 0 || isBand(it.ID) {
			return b.refuse(top, sets, sets[o], "has figures on both masks and is no stitch that can be kept: it also has drawn or slanted figures")
		}
		items = append(items, it)
	}
	return b.takeApart(top, sets, items)
}

// refuse words why a shape that arrives on both masks cannot be kept.
func (b *builder) refuse(top int, sets union, root uint32, why string) error {
	box := emptyBox
	scale := float64(b.l.flat.forms.scale)
	l := b.l
	l.eachFigure(top, func(o uint32) bool { return sets[o] == root }, func(_, figure uint32, at placement, odd *oddFigure) {
		if odd != nil {
			box = box.join(odd.form.box)
		} else {
			box = box.join(l.flat.figureBox(figure, at))
		}
	})
	return &OrderError{Msg: fmt.Sprintf("layer %s: the shape at (%g, %g) to (%g, %g) database units in %s %s; put it on one mask, or set already_masked = \"redo\"",
		l.rules.Name, float64(box.X1)/scale, float64(box.Y1)/scale, float64(box.X2)/scale, float64(box.Y2)/scale, l.flat.h.name(l.flat.h.tops[top]), why)}
}

// takeApart makes pieces of the figures that arrive on one mask and hang together, and looks at where pieces meet.
func (b *builder) takeApart(top int, sets union, items []item) error {
	l := b.l
	touching := &sweep{items: slices.Clone(items), spacing: 1, figures: math.MaxInt32, keepTouched: true}
	for i := range touching.items {
		touching.items[i].ID = uint32(i) // the sweep tells which items touch
	}
	var none union
	sinks, err := touching.run(context.WithoutCancel(b.ctx), none, 1, &b.limit)
	if err != nil {
		return err
	}
	hang := newUnion(make(union, len(items)))
	byFigure := map[uint32]uint32{}
	for i, it := range items {
		if k, ok := byFigure[it.ID]; ok {
			hang.join(k, uint32(i))
		} else {
			byFigure[it.ID] = uint32(i)
		}
	}
	same := func(i, k uint32) bool { return l.tags.Data[items[i].ID] == l.tags.Data[items[k].ID] }
	for _, s := range sinks {
		for _, t := range s.touched {
			if same(t.probe, t.figure) {
				hang.join(t.probe, t.figure)
			}
		}
	}
	count := hang.number()
	first := len(l.givenOrNew().pieces)
	g := l.given
	g.pieces = append(g.pieces, make([]givenPiece, count)...)
	members := make([][]uint32, count) // items by piece
	for i, it := range items {
		p := &g.pieces[first+int(hang[i])]
		p.figures = append(p.figures, it.ID)
		members[hang[i]] = append(members[hang[i]], uint32(i))
	}
	for k := range members {
		p := &g.pieces[first+k]
		slices.Sort(p.figures)
		p.figures = slices.Compact(p.figures)
		p.area = b.areas.UnionArea(rectsOf(items, members[k])).Float()
	}
	// Where pieces of A and of B meet.
	meetings := map[[2]uint32][]hit{}
	for _, s := range sinks {
		for _, t := range s.touched {
			if same(t.probe, t.figure) {
				continue
			}
			i, k := t.probe, t.figure
			if tag(l.tags.Data[items[i].ID]) == onB {
				i, k = k, i
			}
			key := [2]uint32{hang[i], hang[k]}
			meetings[key] = append(meetings[key], hit{i, k})
		}
	}
	least := int64(0)
	if l.rules.Stitch != nil {
		least = l.rules.Stitch.MinOverlap * l.flat.forms.scale
	}
	for key, touches := range meetings {
		laps := b.laps(items, members[key[0]], members[key[1]], touches)
		for _, lap := range laps {
			if lap.length < max(least, 1) || lap.area == 0 {
				return b.refuse(top, sets, sets[items[touches[0].probe].ID], "arrives on both masks with pieces that overlap by less than min_overlap")
			}
			g.laps++
		}
		p, q := first+int(key[0]), first+int(key[1])
		g.pieces[p].met = append(g.pieces[p].met, q)
	}
	return nil
}

func (l *layout) givenOrNew() *givenStitches {
	if l.given == nil {
		l.given = &givenStitches{shape: map[uint32]uint32{}, meet: map[[2]uint32]bool{}}
	}
	return l.given
}

func rectsOf(items []item, which []uint32) []geom.Rect {
	out := make([]geom.Rect, len(which))
	for i, k := range which {
		out[i] = items[k].rect()
	}
	return out
}

// lap is one meeting of two pieces.
type lap struct {
	box    geom.Rect
	area   float64 // square work units
	length int64   // along the wire that is cut
}

// laps finds where two pieces meet: the parts of the intersection of their areas.
func (b *builder) laps(items []item, p, q []uint32, touches []hit) []lap {
	cut := make([]geom.Rect, len(touches))
	for i, t := range touches {
		r, s := items[t.probe].rect(), items[t.figure].rect()
		cut[i] = geom.Rect{X1: max(r.X1, s.X1), Y1: max(r.Y1, s.Y1), X2: min(r.X2, s.X2), Y2: min(r.Y2, s.Y2)}
	}
	parts := newUnion(make(union, len(cut)))
	for i := range cut {
		for k := range i {
			r, s := cut[i], cut[k]
			w, h := min(r.X2, s.X2)-max(r.X1, s.X1), min(r.Y2, s.Y2)-max(r.Y1, s.Y1)
			// A corner point that lies in an overlap is a part of it.
			if w >= 0 && h >= 0 && (w > 0 || h > 0 || isPoint(r) || isPoint(s)) {
				parts.join(uint32(i), uint32(k))
			}
		}
	}
	by := make([][]geom.Rect, parts.number())
	for i, r := range cut {
		by[parts[i]] = append(by[parts[i]], r)
	}
	pr, qr := rectsOf(items, p), rectsOf(items, q)
	var out []lap
	for _, rects := range by {
		l := lap{box: geom.Rect(boxAround(rects)), area: b.areas.UnionArea(rects).Float()}
		l.length = b.lapLength(pr, qr, l.box)
		out = append(out, l)
	}
	return out
}

func isPoint(r geom.Rect) bool { return r.X1 == r.X2 && r.Y1 == r.Y2 }

// lapLength measures an overlap along the wire that is cut: in the direction in which one piece goes on at one side and the other at
// the other side. Where neither direction tells, it is the shorter extent.
func (b *builder) lapLength(p, q []geom.Rect, box geom.Rect) int64 {
	alone := func(p, q []geom.Rect, strip geom.Rect) bool {
		both := b.areas.UnionArea(append(clipRects(p, strip), clipRects(q, strip)...))
		return both.Float() > b.areas.UnionArea(clipRects(q, strip)).Float()
	}
	across := func(low, high geom.Rect) bool {
		return alone(p, q, low) && alone(q, p, high) || alone(q, p, low) && alone(p, q, high)
	}
	length := int64(math.MaxInt64)
	if across(geom.Rect{X1: box.X1 - 1, Y1: box.Y1, X2: box.X1, Y2: box.Y2}, geom.Rect{X1: box.X2, Y1: box.Y1, X2: box.X2 + 1, Y2: box.Y2}) {
		length = min(length, box.X2-box.X1)
	}
	if across(geom.Rect{X1: box.X1, Y1: box.Y1 - 1, X2: box.X2, Y2: box.Y1}, geom.Rect{X1: box.X1, Y1: box.Y2, X2: box.X2, Y2: box.Y2 + 1}) {
		length = min(length, box.Y2-box.Y1)
	}
	if length == math.MaxInt64 {
		length = min(box.X2-box.X1, box.Y2-box.Y1)
	}
	return length
}

func clipRects(rects []geom.Rect, to geom.Rect) []geom.Rect {
	var out []geom.Rect
	for _, r := range rects {
		c := geom.Rect{X1: max(r.X1, to.X1), Y1: max(r.Y1, to.Y1), X2: min(r.X2, to.X2), Y2: min(r.Y2, to.Y2)}
		if c.X1 < c.X2 && c.Y1 < c.Y2 {
			out = append(out, c)
		}
	}
	return out
}

// apply makes nodes of the pieces: the first piece of a shape keeps its number, the others come behind all shapes.
func (g *givenStitches) apply(l *layout) {
	taken := map[uint32]bool{}
	for i := range g.pieces {
		p := &g.pieces[i]
		shape := l.nodeOf.Data[p.figures[0]]
		p.node = shape
		g.shape[shape] = shape
		if taken[shape] {
			p.node = uint32(l.nodes)
			g.shape[p.node] = shape
			l.nodes++
			l.area = append(l.area, 0)
		}
		taken[shape] = true
		l.area[p.node] = p.area
	}
	for i := range g.pieces {
		for _, o := range g.pieces[i].figures {
			l.nodeOf.Data[o] = g.pieces[i].node
		}
	}
	for i := range g.pieces {
		for _, k := range g.pieces[i].met {
			a, b := g.pieces[i].node, g.pieces[k].node
			g.meet[[2]uint32{min(a, b), max(a, b)}] = true
		}
	}
}

// keptTags gives what arrived on a mask where that matters for what hangs together; nil where all figures are alike.
func (l *layout) keptTags() []uint8 {
	if l.tags == nil || l.rules.Redo {
		return nil
	}
	return l.tags.Data
}
