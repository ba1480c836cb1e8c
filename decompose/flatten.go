package decompose

import (
	"context"
	"fmt"
	"math"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/geom"
	"maskpair/gds"
	"maskpair/gds/arena"
)

// This file flattens one selection of figures: it gives every placed figure its ordinal and turns it into items. Ordinals count
// depth first: the own figures of a structure in their order, then what its references place, element by element. Which figure of
// which placement an ordinal is follows from counts of subtrees alone, so nothing is stored for it.

// item is one rectangle of a flat figure, in work units relative to the window's origin.
type item struct {
	X1, Y1, X2, Y2 int32
	ID             uint32 // ordinal of the figure; with the band bit: index of the band
}

const (
	// bandBit marks the item of a band of an any-angle figure.
	bandBit = 1 << 31
	// maxFlat is the number of flat figures of one deck layer that ordinals can count.
	maxFlat = 1<<31 - 1
)

// band is one band of a placed any-angle figure: the item's rectangle only covers it.
type band struct {
	polygon uint32 // index into flat.polygons
	number  uint32 // of the polygon's bands
	ordinal uint32
	at      geom.Placement // work units, relative to the window's origin
}

// flat is one selection, counted and ready to be flattened top by top.
type flat struct {
	h     *hierarchy
	lib   *gds.Library
	sel   *selection
	forms *forms
	own   []uint32   // figures with area, by structure
	all   []uint64   // flat figures, by structure
	items []uint64   // flat items of what is placed exactly, by structure
	bands []uint64   // the bands among them
	box   []Box      // of the flat figures, by structure, in work units of the structure; only where all > 0
	first []uint64   // ordinal of the first figure, by top
	list  [][]uint32 // own figures with area, by structure; only of those placed more than once
	total uint64

	polygons    []*geom.Polygon
	polygonOf   []uint32 // by outline; 0: none, else 1 + index
	polygonBase uint32   // where the polygons begin in a list that several selections share
	rounded     int64    // flat figures that were rounded
	withoutArea int64    // drawn figures that cover nothing
}

// newFlat counts a selection under all tops. What is too much to number, or leaves the plane, is refused before anything is built.
func newFlat(h *hierarchy, sel *selection, g grid) (*flat, error) {
	n := len(h.lib.Structures)
	f := &flat{h: h, lib: h.lib, sel: sel, forms: newForms(h.lib, sel, g),
		own: make([]uint32, n), all: make([]uint64, n), items: make([]uint64, n), bands: make([]uint64, n), box: make([]Box, n)}
	f.polygonOf = arena.Make[uint32](len(h.lib.Outlines), len(h.lib.Outlines))
	for i := range f.forms.of {
		if p := f.forms.of[i].polygon; p != nil {
			f.polygons = append(f.polygons, p)
			f.polygonOf[i] = uint32(len(f.polygons))
		}
	}
	for _, s := range h.bottom {
		f.count(s)
	}
	f.listShared()
	f.first = make([]uint64, len(h.tops))
	for i, t := range h.tops {
		f.first[i] = f.total
		f.total = saturatingAdd(f.total, f.all[t])
		if f.all[t] > maxFlat || f.total > maxFlat {
			return nil, &LimitError{Msg: fmt.Sprintf("structure %s places %s figures of one deck layer, more than the %d that can be numbered",
				h.name(t), countText(f.all[t]), int64(maxFlat)), Remedy: byBlocks}
		}
		if f.all[t] > 0 {
			if err := f.inPlane(t); err != nil {
				return nil, err
			}
		}
	}
	return f, nil
}

// listShared lists the own figures of structures that are placed often, since their figures are gone through often.
func (f *flat) listShared() {
	f.list = make([][]uint32, len(f.own))
	for _, s := range f.h.bottom {
		if f.own[s] == 0 || f.h.placed[s] < 2 {
			continue
		}
		st := &f.lib.Structures[s]
		own := make([]uint32, 0, f.own[s])
		for i := st.FirstFigure; i < st.EndFigure; i++ {
			if f.figure(i) {
				own = append(own, i)
			}
		}
		f.list[s] = own
	}
}

func countText(n uint64) string {
	if n == saturated {
		return "more than 2^64"
	}
	return fmt.Sprint(n)
}

// figure tells whether a figure of the library is selected and covers something.
func (f *flat) figure(i uint32) bool {
	fig := &f.lib.Figures[i]
	return f.sel.tag[fig.Class] != none && (fig.Outline == 0 || f.forms.of[fig.Outline-1].hasArea())
}

// count adds up what is under a structure; its children are counted already.
func (f *flat) count(s int32) {
	st := &f.lib.Structures[s]
	var items, bands uint64
	box := emptyBox
	rounded := uint64(0)
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		fig := &f.lib.Figures[i]
		if f.sel.tag[fig.Class] == none {
			continue
		}
		if !f.figure(i) {
			f.withoutArea++
			continue
		}
		f.own[s]++
		if fig.Outline == 0 {
			items++
			box = box.join(f.scaled(fig.Box))
			continue
		}
		fm := &f.forms.of[fig.Outline-1]
		items += uint64(fm.pieces())
		if fm.polygon != nil {
			bands += uint64(fm.pieces())
		}
		if f.forms.rounded[fig.Outline-1] {
			rounded++
		}
		box = box.join(fm.box)
	}
	all := uint64(f.own[s])
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		n := uint64(elements(f.lib, ref))
		all = saturatingAdd(all, saturatingMul(n, f.all[ref.Target]))
		if !rigid(f.lib, ref) {
			continue
		}
		items = saturatingAdd(items, saturatingMul(n, f.items[ref.Target]))
		bands = saturatingAdd(bands, saturatingMul(n, f.bands[ref.Target]))
		box = box.join(f.latticeBox(ref))
	}
	f.all[s], f.items[s], f.bands[s], f.box[s] = all, items, bands, box
	f.rounded += int64(min(saturatingMul(rounded, f.h.placed[s]), math.MaxInt32))
}

func (f *flat) scaled(r gds.Rect) Box {
	k := f.forms.scale
	return Box{k * int64(r.X1), k * int64(r.Y1), k * int64(r.X2), k * int64(r.Y2)}
}

// latticeBox is the box of all that a reference places, in work units of the structure that holds it.
func (f *flat) latticeBox(ref *gds.Ref) Box {
	l := latticeOf(f.lib, ref)
	inner := f.box[ref.Target]
	if inner == emptyBox {
		return inner
	}
	box := emptyBox
	for _, c := range [2]int64{0, int64(l.Columns) - 1} {
		for _, r := range [2]int64{0, int64(l.Rows) - 1} {
			box = box.join(f.work(l.element(c, r)).applyBox(inner))
		}
	}
	return box
}

// work turns a placement in database units into one in work units.
func (f *flat) work(p placement) placement {
	return placement{p.turn, p.x * f.forms.scale, p.y * f.forms.scale}
}

// emptyBox is the box of nothing: joining it changes nothing.
var emptyBox = Box{math.MaxInt64, math.MaxInt64, math.MinInt64, math.MinInt64}

func (b Box) join(c Box) Box {
	return Box{min(b.X1, c.X1), min(b.Y1, c.Y1), max(b.X2, c.X2), max(b.Y2, c.Y2)}
}

// inPlane refuses a top whose figures leave the 32-bit plane, naming the placement at which they leave it.
func (f *flat) inPlane(top int32) error {
	if f.box[top] == emptyBox {
		return nil
	}
	lowest, highest := int64(math.MinInt32)*f.forms.scale, int64(math.MaxInt32)*f.forms.scale
	fits := func(b Box) bool {
		return b == emptyBox || b.X1 >= lowest && b.Y1 >= lowest && b.X2 <= highest && b.Y2 <= highest
	}
	if fits(f.box[top]) {
		return nil
	}
	s, at := top, placement{}
	for {
		st := &f.lib.Structures[s]
		next, name := int32(-1), ""
		var inner placement
	refs:
		for r := st.FirstRef; r < st.EndRef; r++ {
			ref := &f.lib.Refs[r]
			if ref.Target < 0 || f.all[ref.Target] == 0 || !rigid(f.lib, ref) || f.box[ref.Target] == emptyBox {
				continue
			}
			l := latticeOf(f.lib, ref)
			for _, c := range [2]int64{0, int64(l.Columns) - 1} {
				for _, row := range [2]int64{0, int64(l.Rows) - 1} {
					p := at.compose(f.work(l.element(c, row)))
					if !fits(p.applyBox(f.box[ref.Target])) {
						next, inner, name = ref.Target, p, fmt.Sprintf("reference %d (to %s)", r-st.FirstRef, f.h.name(ref.Target))
						break refs
					}
				}
			}
		}
		if next < 0 {
			return &InputError{Structure: f.h.name(s), Msg: fmt.Sprintf("a figure as placed under %s leaves the 32-bit plane; move the layout nearer to the origin", f.h.name(top))}
		}
		if f.own[next] > 0 || f.box[next] == emptyBox {
			return &InputError{Structure: f.h.name(s), Msg: fmt.Sprintf("%s, as placed under %s, puts figures outside the 32-bit plane; move the layout nearer to the origin", name, f.h.name(top))}
		}
		s, at = next, inner
	}
}

// window is the part of a top that is worked on at once: coordinates relative to its origin fit 32 bits.
type window struct {
	originX, originY int64
	clip             bool
	box, core        Box // relative to the origin; only with clip: what is looked at, and what belongs to this window alone
}

// flattener emits the items of one top and window. Several may fill disjoint parts of the same arrays.
type flattener struct {
	f     *flat
	win   window
	items []item
	bands []band
	nItem uint64
	nBand uint64
}

// task is a part of a top to be flattened, with where its items go: the own figures of a structure (no references), or some elements
// of one of its references, or some whole references.
type task struct {
	structure             int32
	at                    placement // work units, relative to the window's origin
	firstRef, endRef      uint32
	firstElement, endElem int64 // of the only reference; both 0: all
	ordinal               uint64
	item, band            uint64
}

// flatten fills items and bands with what a top places exactly, with ordinals from first on, and returns how many there are.
func (f *flat) flatten(ctx context.Context, top int, first uint64, win window, items []item, bands []band, jobs int) (nItem, nBand uint64, err error) {
	s := f.h.tops[top]
	at := placement{0, -win.originX, -win.originY}
	if win.clip || jobs < 2 || f.items[s] < 1<<16 {
		w := flattener{f: f, win: win, items: items, bands: bands}
		w.walk(s, at, first)
		return w.nItem, w.nBand, ctx.Err()
	}
	g, within := errgroup.WithContext(ctx)
	g.SetLimit(jobs)
	c := cutter{f: f, most: f.items[s]/64 + 1, emit: func(t task) {
		g.Go(safely(func() error {
			w := flattener{f: f, win: win, items: items, bands: bands, nItem: t.item, nBand: t.band}
			w.task(&t)
			return within.Err()
		}))
	}}
	c.cut(s, at, first, 0, 0)
	if err := g.Wait(); err != nil {
		return 0, 0, err
	}
	return f.items[s], f.bands[s], nil
}

// cutter cuts a subtree into tasks of about `most` items.
type cutter struct {
	f    *flat
	most uint64
	emit func(task)
}

func (c *cutter) cut(s int32, at placement, ordinal, item, band uint64) {
	f := c.f
	st := &f.lib.Structures[s]
	below, belowBands := uint64(0), uint64(0)
	for r := st.FirstRef; r < st.EndRef; r++ {
		if ref := &f.lib.Refs[r]; ref.Target >= 0 && rigid(f.lib, ref) {
			below += uint64(elements(f.lib, ref)) * f.items[ref.Target]
			belowBands += uint64(elements(f.lib, ref)) * f.bands[ref.Target]
		}
	}
	if f.own[s] > 0 {
		c.emit(task{structure: s, at: at, ordinal: ordinal, item: item, band: band})
	}
	ordinal += uint64(f.own[s])
	item += f.items[s] - below
	band += f.bands[s] - belowBands
	open := task{structure: s, at: at, firstRef: st.FirstRef, endRef: st.FirstRef, ordinal: ordinal, item: item, band: band}
	flush := func(next uint32) {
		if open.endRef > open.firstRef {
			c.emit(open)
		}
		open = task{structure: s, at: at, firstRef: next, endRef: next, ordinal: ordinal, item: item, band: band}
	}
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			open.endRef = r + 1
			continue
		}
		n := uint64(elements(f.lib, ref))
		each, eachBands, eachFlat := f.items[ref.Target], f.bands[ref.Target], f.all[ref.Target]
		if !rigid(f.lib, ref) {
			open.endRef = r + 1
			ordinal += n * eachFlat
			continue
		}
		if n*each <= c.most {
			open.endRef = r + 1
			ordinal, item, band = ordinal+n*eachFlat, item+n*each, band+n*eachBands
			if item-open.item > c.most {
				flush(r + 1)
			}
			continue
		}
		flush(r)
		if each > c.most {
			l := latticeOf(f.lib, ref)
			for e := int64(0); e < int64(n); e++ {
				c.cut(ref.Target, at.compose(f.work(l.element(e%int64(l.Columns), e/int64(l.Columns)))), ordinal, item, band)
				ordinal, item, band = ordinal+eachFlat, item+each, band+eachBands
			}
		} else {
			step := c.most/max(each, 1) + 1
			for e := uint64(0); e < n; e += step {
				m := min(step, n-e)
				c.emit(task{structure: s, at: at, firstRef: r, endRef: r + 1, firstElement: int64(e), endElem: int64(e + m), ordinal: ordinal, item: item, band: band})
				ordinal, item, band = ordinal+m*eachFlat, item+m*each, band+m*eachBands
			}
		}
		flush(r + 1)
	}
	flush(st.EndRef)
}

// task emits one task.
func (w *flattener) task(t *task) {
	switch {
	case t.endRef == t.firstRef:
		w.own(t.structure, t.at, uint32(t.ordinal))
	case t.endElem > 0:
		w.elements(&w.f.lib.Refs[t.firstRef], t.at, t.firstElement, t.endElem, t.ordinal)
	default:
		w.refs(t.at, t.firstRef, t.endRef, t.ordinal)
	}
}

// walk emits all that is under a structure.
func (w *flattener) walk(s int32, at placement, ordinal uint64) {
	if w.f.own[s] > 0 {
		w.own(s, at, uint32(ordinal))
		ordinal += uint64(w.f.own[s])
	}
	w.refs(at, w.f.lib.Structures[s].FirstRef, w.f.lib.Structures[s].EndRef, ordinal)
}

// refs emits what some references of a structure place.
func (w *flattener) refs(at placement, first, end uint32, ordinal uint64) {
	f := w.f
	for r := first; r < end; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		if ref.Extra == 0 {
			w.walk(ref.Target, at.compose(f.work(placement{gds.Orientation(ref.Turn), int64(ref.At.X), int64(ref.At.Y)})), ordinal)
			ordinal += f.all[ref.Target]
			continue
		}
		n := elements(f.lib, ref)
		if rigid(f.lib, ref) {
			w.elements(ref, at, 0, n, ordinal)
		}
		ordinal += uint64(n) * f.all[ref.Target]
	}
}

// elements emits what some elements of a reference place.
func (w *flattener) elements(ref *gds.Ref, at placement, first, end int64, ordinal uint64) {
	l := latticeOf(w.f.lib, ref)
	column, row := first%int64(l.Columns), first/int64(l.Columns)
	for e := first; e < end; e++ {
		w.walk(ref.Target, at.compose(w.f.work(l.element(column, row))), ordinal)
		ordinal += w.f.all[ref.Target]
		if column++; column == int64(l.Columns) {
			column, row = 0, row+1
		}
	}
}

// own emits the own figures of a structure.
func (w *flattener) own(s int32, at placement, ordinal uint32) {
	f := w.f
	st := &f.lib.Structures[s]
	scale := f.forms.scale
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		fig := &f.lib.Figures[i]
		if f.sel.tag[fig.Class] == none {
			continue
		}
		if fig.Outline == 0 {
			w.rectangle(at.applyBox(Box{scale * int64(fig.Box.X1), scale * int64(fig.Box.Y1), scale * int64(fig.Box.X2), scale * int64(fig.Box.Y2)}), ordinal)
			ordinal++
			continue
		}
		fm := &f.forms.of[fig.Outline-1]
		if !fm.hasArea() {
			continue
		}
		w.form(fm, &f.forms.rects, f.polygonOf[fig.Outline-1], at, ordinal)
		ordinal++
	}
}

// form emits one placed form.
func (w *flattener) form(fm *form, rects *[]geom.Rect, polygon uint32, at placement, ordinal uint32) {
	if fm.polygon == nil {
		for _, r := range (*rects)[fm.first : fm.first+fm.count] {
			w.rectangle(at.applyBox(Box(r)), ordinal)
		}
		return
	}
	place := geom.Placement{Turn: uint8(at.turn), X: at.x, Y: at.y}
	for k, b := range fm.polygon.Bands() {
		n := w.nItem
		w.rectangle(at.applyBox(Box(b.Box)), bandBit|uint32(w.nBand))
		if w.nItem > n {
			w.bands[w.nBand] = band{w.f.polygonBase + polygon - 1, uint32(k), ordinal, place}
			w.nBand++
		}
	}
}

// rectangle emits one item, clipped to the window where the window is clipped.
func (w *flattener) rectangle(b Box, id uint32) {
	if w.win.clip {
		c := w.win.box
		b = Box{max(b.X1, c.X1), max(b.Y1, c.Y1), min(b.X2, c.X2), min(b.Y2, c.Y2)}
		if b.X1 > b.X2 || b.Y1 > b.Y2 {
			return
		}
	}
	w.items[w.nItem] = item{int32(b.X1), int32(b.Y1), int32(b.X2), int32(b.Y2), id}
	w.nItem++
}
