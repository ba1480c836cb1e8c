package verify

import (
	"fmt"

	"maskpair/decompose"
	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file judges one deck layer of the masked stream: its shapes and pieces, and what they are on.

// judge is the state of one deck layer.
type judge struct {
	v      *verifier
	number int // of the layer in the deck
	rules  *decompose.LayerRules
	flat   *flat
	counts *LayerCounts

	// Probes of each top stand behind its figures.
	probeList  []probe
	probeFirst []uint32 // by top: first of its probes
	probeFig   []uint32 // by top: the figure that it is
	labelCount []uint64

	kept    []item   // of all tops: the items that are searched, without exact copies
	keptEnd []uint32 // by top: end of its items
	hits    []hit    // of probes and markers
	meets   []meet   // where A and B touch
	shapeOf []uint32 // by figure; noShape for others
	pieceOf []uint32 // by figure on a mask: figures on one mask that hang together
	shapes  []shape
	pieces  []piece
	was     []bool // by figure: it arrived on this mask; nil where that is not known

	claims *claims
	tied   []bool // by unit: under alike
	waived map[[2]uint32]bool
	wishes map[wish]bool
	met    []bool // by figure: marker or label that hits a shape
}

const noShape = 1<<32 - 1

// shape is a set of figures that touch.
type shape struct {
	box      geom.Rect
	top      int32 // number of the top
	on       uint8 // 1 mask A, 2 mask B, 4 the drawn layer
	stitched bool  // on both masks, and allowed to be
	given    bool  // arrived so
}

const (
	onA    = 1
	onB    = 2
	onLeft = 4
)

// piece is a part of a shape on one mask.
type piece struct {
	box   geom.Rect
	shape uint32
	mask  tag
}

// meet is where an item on mask A and one on mask B touch.
type meet struct{ a, b item }

// layer judges a deck layer.
func (v *verifier) layer(i int) error {
	rules := &v.rules.Layers[i]
	f, err := newFlat(v.ctx, v.masked, v.roles.tags(rules))
	if err != nil {
		return err
	}
	v.res.Layers = append(v.res.Layers, LayerCounts{Name: rules.Name})
	j := &judge{v: v, number: i, rules: rules, flat: f, counts: &v.res.Layers[len(v.res.Layers)-1],
		wishes: map[wish]bool{}}
	f.watch = v.watched()
	for _, top := range v.masked.tree.tops {
		if err := f.place(top); err != nil {
			return err
		}
		if err := j.probes(top); err != nil {
			return err
		}
		f.end()
	}
	if err := j.touch(); err != nil {
		return err
	}
	var drawn *flat
	onMasks, left := v.res.open(OnMasks, rules.Name), v.res.open(DrawnLayer, rules.Name)
	stitches := v.res.open(Stitches, rules.Name)
	sameMask := v.res.open(SameMask, rules.Name)
	var anyMask, area *Check
	if rules.AnyMask > 0 {
		anyMask = v.res.open(AnyMask, rules.Name)
	}
	held := v.res.open(Orders, rules.Name)
	if v.drawn != nil {
		area = v.res.open(SameArea, rules.Name)
		if drawn, err = j.flattenDrawn(); err != nil {
			return err
		}
		if err := j.sameArea(area, left, drawn); err != nil {
			return err
		}
	}
	j.onMasks(onMasks)
	if err := j.leftOver(left); err != nil {
		return err
	}
	j.met = make([]bool, len(f.figs))
	j.tied = make([]bool, j.unitCount())
	if err := j.gather(); err != nil {
		return err
	}
	j.ordersHeld(held)
	if err := j.stitches(stitches, drawn); err != nil {
		return err
	}
	if err := j.spacing(sameMask, anyMask, stitches); err != nil {
		return err
	}
	j.count()
	return nil
}

// watched gives the structures whose placements come out alike; nil where there are none.
func (v *verifier) watched() []bool {
	if len(v.orders.file.Alike) == 0 {
		return nil
	}
	out := make([]bool, len(v.masked.lib.Structures))
	for i := range v.orders.file.Alike {
		for s, member := range v.orders.family(v, v.orders.file.Alike[i].Cell).members {
			out[s] = out[s] || member
		}
	}
	return out
}

// counted says whether figures of a tag make shapes. What keep_drawn keeps on the drawn layer does not: it is on a mask as well.
func (j *judge) counted(t tag) bool { return t.mask() || t == tagDrawn && !j.rules.KeepDrawn }

// isShape says whether a figure is part of a shape.
func (j *judge) isShape(fig uint32) bool { return j.shapeOf[fig] != noShape }

// touch finds the shapes and pieces of all tops, and what probes and markers hit.
func (j *judge) touch() error {
	f := j.flat
	shapes, pieces := newSets(len(f.figs)), newSets(len(f.figs))
	j.kept = make([]item, 0, len(f.figs))
	for top := range j.v.masked.tree.tops {
		from := len(j.kept)
		j.kept = j.topItems(j.kept, top, shapes, pieces)
		items := j.kept[from:]
		j.keptEnd = append(j.keptEnd, uint32(len(j.kept)))
		err := search(j.v.ctx, items, 0, func(a, b *item) { j.together(a, b, shapes, pieces) })
		if err != nil {
			return err
		}
	}
	j.name(shapes, pieces)
	return nil
}

// topItems appends the items of a top, sorted. Of rectangles that are equal and of one tag all but the first are joined to it
// and dropped: cells that abut draw many figures twice.
func (j *judge) topItems(dst []item, top int, shapes, pieces sets) []item {
	f := j.flat
	from := len(dst)
	for i := f.first[top]; i < f.first[top+1]; i++ {
		if t := f.figs[i].tag; t != tagDrawn || j.counted(t) {
			dst = f.itemsOf(dst, i)
		}
	}
	items := dst[from:]
	sortItems(items)
	out := items[:0]
	var first [tagProbe + 1]uint32 // by tag: the figure that has the box at hand, where have says so
	var have [tagProbe + 1]bool
	for i, it := range items {
		if i == 0 || it.box != items[i-1].box {
			have = [tagProbe + 1]bool{}
		}
		if t := f.figs[it.fig].tag; it.band == wholeRect && j.counted(t) {
			if have[t] {
				shapes.join(first[t], it.fig)
				pieces.join(first[t], it.fig)
				continue
			}
			first[t], have[t] = it.fig, true
		}
		out = append(out, it)
	}
	return dst[:from+len(out)]
}

// together takes two items whose boxes meet.
func (j *judge) together(a, b *item, shapes, pieces sets) {
	f := j.flat
	s, t := f.figs[a.fig].tag, f.figs[b.fig].tag
	switch {
	case a.fig == b.fig:
	case j.counted(s) && j.counted(t):
		if s == t && pieces.find(a.fig) == pieces.find(b.fig) || f.relation(a, b, 0) != geom.Touch {
			return
		}
		shapes.join(a.fig, b.fig)
		switch {
		case s == t:
			pieces.join(a.fig, b.fig)
		case s == tagA && t == tagB:
			j.meets = append(j.meets, meet{*a, *b})
		case s == tagB && t == tagA:
			j.meets = append(j.meets, meet{*b, *a})
		}
	case j.counted(s):
		if f.relation(a, b, 0) == geom.Touch {
			j.hits = append(j.hits, hit{b.fig, a.fig})
		}
	case j.counted(t):
		if f.relation(a, b, 0) == geom.Touch {
			j.hits = append(j.hits, hit{a.fig, b.fig})
		}
	}
}

// name numbers shapes and pieces.
func (j *judge) name(shapes, pieces sets) {
	f := j.flat
	j.shapeOf, j.pieceOf = make([]uint32, len(f.figs)), make([]uint32, len(f.figs))
	for top := range j.v.masked.tree.tops {
		for i := f.first[top]; i < f.first[top+1]; i++ {
			fig := &f.figs[i]
			j.shapeOf[i], j.pieceOf[i] = noShape, noShape
			if !j.counted(fig.tag) || fig.form == formNone {
				continue
			}
			// The root of a set is its least figure, and was numbered before.
			root := shapes.find(i)
			if root == i {
				j.shapes = append(j.shapes, shape{box: fig.box, top: int32(top)})
				j.shapeOf[i] = uint32(len(j.shapes) - 1)
			}
			k := j.shapeOf[root]
			j.shapeOf[i] = k
			sh := &j.shapes[k]
			sh.box = sh.box.Union(fig.box)
			switch fig.tag {
			case tagA:
				sh.on |= onA
			case tagB:
				sh.on |= onB
			default:
				sh.on |= onLeft
				continue
			}
			root = pieces.find(i)
			if root == i {
				j.pieces = append(j.pieces, piece{box: fig.box, shape: k, mask: fig.tag})
				j.pieceOf[i] = uint32(len(j.pieces) - 1)
			}
			p := j.pieceOf[root]
			j.pieceOf[i] = p
			j.pieces[p].box = j.pieces[p].box.Union(fig.box)
		}
	}
}

// onMasks makes the check that each shape is on one mask, or stitched where it may be. Whether a stitch follows the rules is
// the matter of stitch.go.
func (j *judge) onMasks(c *Check) {
	given := j.givenShapes()
	for k := range j.shapes {
		sh := &j.shapes[k]
		switch {
		case sh.on == onLeft:
			c.fault(j.placeOf(uint32(k), "is on no mask"))
		case sh.on&onLeft != 0:
			c.fault(j.placeOf(uint32(k), "is on a mask in part only"))
		case sh.on != onA|onB:
		case given != nil && given[k]:
			sh.stitched, sh.given = true, true
		case j.rules.Stitch == nil:
			c.fault(j.placeOf(uint32(k), "is on both masks, and the deck has no stitches for the layer"))
		case j.v.drawn != nil && !j.rules.Stitch.Apply:
			c.fault(j.placeOf(uint32(k), "is on both masks, did not arrive so, and the deck cuts nothing (apply is false)"))
		default:
			sh.stitched = true
		}
		if sh.stitched {
			j.counts.Stitched++
		}
	}
	j.counts.Shapes = int64(len(j.shapes))
}

// givenShapes says which shapes hold only figures that arrived on their masks; nil where that is not known or of no matter.
func (j *judge) givenShapes() []bool {
	if j.was == nil || j.rules.Redo {
		return nil
	}
	given := make([]bool, len(j.shapes))
	for k := range given {
		given[k] = true
	}
	for i, was := range j.was {
		if k := j.shapeOf[i]; k != noShape && !was {
			given[k] = false
		}
	}
	return given
}

// Units are what orders speak of: shapes, and behind them the pieces of shapes that arrived stitched.

func (j *judge) unitCount() int { return len(j.shapes) + len(j.pieces) }

func (j *judge) unit(fig uint32) uint32 {
	if k := j.shapeOf[fig]; !j.shapes[k].given {
		return k
	}
	return uint32(len(j.shapes)) + j.pieceOf[fig]
}

func (j *judge) unitShape(u uint32) uint32 {
	if n := uint32(len(j.shapes)); u >= n {
		return j.pieces[u-n].shape
	}
	return u
}

// unitMask gives the mask of a unit; tagNone where it is on none, or on both.
func (j *judge) unitMask(u uint32) tag {
	if n := uint32(len(j.shapes)); u >= n {
		return j.pieces[u-n].mask
	}
	switch j.shapes[u].on {
	case onA:
		return tagA
	case onB:
		return tagB
	}
	return tagNone
}

// count fills in what the layer holds.
func (j *judge) count() {
	for i := range j.flat.figs {
		if j.flat.figs[i].form == formNone {
			continue
		}
		switch j.flat.figs[i].tag {
		case tagA:
			j.counts.FiguresA++
		case tagB:
			j.counts.FiguresB++
		case tagDrawn:
			j.counts.Left++
		}
	}
	if n := j.counts.MarkersWithoutShape; n > 0 {
		j.v.warn("layer %s: %d markers touch no shape", j.rules.Name, n)
	}
	if n := j.counts.LabelsWithoutShape; n > 0 {
		j.v.warn("layer %s: %d labels lie on no shape", j.rules.Name, n)
	}
}

func (v *verifier) warn(format string, args ...any) {
	v.res.Warnings = append(v.res.Warnings, fmt.Sprintf(format, args...))
}

// placeOf tells the place of a shape.
func (j *judge) placeOf(k uint32, text string) Place {
	box := decompose.Box(j.shapes[k].box)
	return Place{Top: j.topText(int(j.shapes[k].top)), Box: &box, Text: text}
}

// topText gives the name of a top as it stands in the stream.
func (j *judge) topText(top int) string {
	return j.v.masked.lib.Structures[j.v.masked.tree.tops[top]].Name
}

// topName gives it for a message.
func (j *judge) topName(top int) string { return gds.Printable(j.topText(top)) }

// boxText words a box in the deck's unit.
func (j *judge) boxText(b geom.Rect) string {
	r := j.v.rules
	return fmt.Sprintf("(%s, %s) to (%s, %s) %s", r.Number(float64(b.X1)/2), r.Number(float64(b.Y1)/2), r.Number(float64(b.X2)/2), r.Number(float64(b.Y2)/2), r.Unit)
}

// spot words the place of a box in the deck's unit: its lower left corner.
func (j *judge) spot(b geom.Rect) string {
	r := j.v.rules
	return fmt.Sprintf("(%s, %s) %s", r.Number(float64(b.X1)/2), r.Number(float64(b.Y1)/2), r.Unit)
}
