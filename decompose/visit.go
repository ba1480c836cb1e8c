package decompose

import (
	"slices"
	"sort"

	"maskpair/decompose/geom"
	"maskpair/gds/arena"
)

// This file goes from ordinals back to the hierarchy: which figure of which placement an ordinal is, what its place is, and which is
// the lowest cell that holds a set of them.

// visitor is called for each placement of a structure with own figures: their ordinals start at first. The placement is in work units
// of the top; placed is false below a magnification or an odd angle, where it is not known.
type visitor func(s int32, at placement, placed bool, first uint32)

// visit walks a top in the order of ordinals.
func (f *flat) visit(top int, fn visitor) {
	if f.all[f.h.tops[top]] > 0 {
		f.visitIn(f.h.tops[top], placement{}, true, f.first[top], fn)
	}
}

func (f *flat) visitIn(s int32, at placement, placed bool, ordinal uint64, fn visitor) {
	if f.own[s] > 0 {
		fn(s, at, placed, uint32(ordinal))
		ordinal += uint64(f.own[s])
	}
	st := &f.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		under := f.all[ref.Target]
		n := elements(f.lib, ref)
		if !placed || !rigid(f.lib, ref) {
			for range n {
				f.visitIn(ref.Target, placement{}, false, ordinal, fn)
				ordinal += under
			}
			continue
		}
		l := latticeOf(f.lib, ref)
		for row := range int64(l.Rows) {
			for column := range int64(l.Columns) {
				f.visitIn(ref.Target, at.compose(f.work(l.element(column, row))), true, ordinal, fn)
				ordinal += under
			}
		}
	}
}

// ownFigures calls fn for the figures with area of a structure, in the order of their ordinals.
func (f *flat) ownFigures(s int32, fn func(k uint32, figure uint32)) {
	if own := f.list[s]; own != nil {
		for k, i := range own {
			fn(uint32(k), i)
		}
		return
	}
	st := &f.lib.Structures[s]
	k := uint32(0)
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		if f.figure(i) {
			fn(k, i)
			k++
		}
	}
}

// parts gives the geometry of a figure as placed, in work units of the top.
func (f *flat) parts(figure uint32, at placement, dst *geom.Parts) {
	fig := &f.lib.Figures[figure]
	if fig.Outline == 0 {
		dst.Rects = append(dst.Rects, geom.Rect(at.applyBox(f.scaled(fig.Box))))
		return
	}
	f.forms.place(&f.forms.of[fig.Outline-1], at, dst)
}

// place appends a form as placed.
func (f *forms) place(fm *form, at placement, dst *geom.Parts) {
	if fm.polygon != nil {
		dst.Polygons = append(dst.Polygons, geom.Placed{Polygon: fm.polygon, At: geom.Placement{Turn: uint8(at.turn), X: at.x, Y: at.y}})
		return
	}
	for _, r := range f.rects[fm.first : fm.first+fm.count] {
		dst.Rects = append(dst.Rects, geom.Rect(at.applyBox(Box(r))))
	}
}

// find gives an odd figure by its ordinal.
func (o *oddFigures) find(ordinal uint32) *oddFigure {
	i, ok := slices.BinarySearchFunc(o.figures, ordinal, func(f oddFigure, n uint32) int { return int(f.ordinal) - int(n) })
	if !ok {
		return nil
	}
	return &o.figures[i]
}

// figureBox is the box of a figure as placed.
func (f *flat) figureBox(figure uint32, at placement) Box {
	fig := &f.lib.Figures[figure]
	if fig.Outline == 0 {
		return at.applyBox(f.scaled(fig.Box))
	}
	return at.applyBox(f.forms.of[fig.Outline-1].box)
}

// eachFigureOf calls fn for every flat figure of a top that belongs to some nodes, as eachFigure does.
func (l *layout) eachFigureOf(top int, nodes *bitset, fn func(ordinal, figure uint32, at placement, odd *oddFigure)) {
	f, node := l.flat, l.nodeOf.Data
	f.visit(top, func(s int32, at placement, placed bool, first uint32) {
		own := f.list[s]
		if own == nil || !placed {
			l.eachOwn(top, s, at, placed, first, func(o uint32) bool { return nodes.has(node[o]) }, fn)
			return
		}
		for k, n := range node[first:][:len(own)] {
			if nodes.has(n) {
				fn(first+uint32(k), own[k], at, nil)
			}
		}
	})
}

// eachFigure calls fn for every flat figure of a top: its ordinal, its drawn figure, and its box in work units of the top.
func (l *layout) eachFigure(top int, wanted func(ordinal uint32) bool, fn func(ordinal, figure uint32, at placement, odd *oddFigure)) {
	l.flat.visit(top, func(s int32, at placement, placed bool, first uint32) {
		l.eachOwn(top, s, at, placed, first, wanted, fn)
	})
}

// eachOwn is eachFigure for the own figures of one placement.
func (l *layout) eachOwn(top int, s int32, at placement, placed bool, first uint32, wanted func(ordinal uint32) bool,
	fn func(ordinal, figure uint32, at placement, odd *oddFigure)) {
	l.flat.ownFigures(s, func(k, figure uint32) {
		if !wanted(first + k) {
			return
		}
		if placed {
			fn(first+k, figure, at, nil)
			return
		}
		if odd := l.odd[top].find(first + k); odd != nil {
			fn(first+k, figure, at, odd)
		}
	})
}

// boxes gives the box of every node, in work units of its top. It is worked out at the first call.
func (l *layout) boxes() []Box {
	if l.box != nil {
		return l.box
	}
	l.box = l.boxesOf(nil, func(uint32, uint32) {})
	return l.box
}

// boxesOf gives the boxes of some nodes, by node; those of others are not told. It calls fn for each flat figure of these nodes, in the
// order of ordinals.
func (l *layout) boxesOf(nodes *bitset, fn func(ordinal, node uint32)) []Box {
	box := arena.CutDirty[Box](&l.room, l.nodes)
	for i := range box {
		box[i] = emptyBox
	}
	for top := range l.flat.h.tops {
		l.eachFigureOf(top, nodes, func(ordinal, figure uint32, at placement, odd *oddFigure) {
			n := l.nodeOf.Data[ordinal]
			b := &box[n]
			if odd != nil {
				*b = b.join(odd.form.box)
			} else {
				*b = b.join(l.flat.figureBox(figure, at))
			}
			fn(ordinal, n)
		})
	}
	return box
}

// geometryOf gathers the geometry of the nodes that are wanted, in work units of their tops.
func (l *layout) geometryOf(wanted map[uint32]*geom.Parts) {
	if len(wanted) == 0 {
		return
	}
	tops := make([]int, len(l.flat.h.tops))
	for top := range tops {
		tops[top] = top
	}
	l.geometryIn(tops, wanted)
}

// mostRecent is how many rectangles of a node a further one is compared with. Cells that abut draw the same figure again and again.
const mostRecent = 8

// geometryIn gathers the geometry of wanted nodes from some tops.
func (l *layout) geometryIn(tops []int, wanted map[uint32]*geom.Parts) {
	node := l.nodeOf.Data
	nodes := newBitset(l.nodes + len(l.area))
	for n := range wanted {
		nodes.add(n)
	}
	// By rank: the geometry, and how many rectangles it will have.
	parts, count := make([]*geom.Parts, nodes.makeRanks()), make([]int32, len(wanted))
	total := 0
	rankOf := func(ordinal uint32) int {
		k, _ := nodes.rank(node[ordinal])
		return k
	}
	for _, top := range tops {
		l.eachFigureOf(top, nodes, func(ordinal, figure uint32, at placement, odd *oddFigure) {
			n := l.flat.rectangles(figure, odd)
			count[rankOf(ordinal)] += int32(n)
			total += n
		})
	}
	room := arena.CutDirty[geom.Rect](&l.room, total)
	for n, p := range wanted {
		k, _ := nodes.rank(n)
		parts[k] = p
		if p.Rects == nil && count[k] > 0 {
			p.Rects, room = room[:0:count[k]], room[count[k]:]
		}
	}
	for _, top := range tops {
		l.eachFigureOf(top, nodes, func(ordinal, figure uint32, at placement, odd *oddFigure) {
			p := parts[rankOf(ordinal)]
			before := len(p.Rects)
			if odd != nil {
				l.odd[top].forms.place(&odd.form, placement{}, p)
			} else {
				l.flat.parts(figure, at, p)
			}
			if len(p.Rects) == before+1 && slices.Contains(p.Rects[max(0, before-mostRecent):before], p.Rects[before]) {
				p.Rects = p.Rects[:before] // drawn once more
			}
		})
	}
}

// rectangles is the number of rectangles that a figure is made of; none where it is a polygon.
func (f *flat) rectangles(figure uint32, odd *oddFigure) int {
	fm := (*form)(nil)
	switch o := f.lib.Figures[figure].Outline; {
	case odd != nil:
		fm = &odd.form
	case o == 0:
		return 1
	default:
		fm = &f.forms.of[o-1]
	}
	if fm.polygon != nil {
		return 0
	}
	return int(fm.count)
}

// frame is the lowest cell that holds some figures, as placed.
type frame struct {
	structure int32
	at        placement // work units of the top
	placed    bool      // false: below a magnification or an odd angle, the place is that of the cell above it
}

// frames finds frames; it keeps, for the structures that it met, where the ordinals of each reference start.
type frames struct {
	f      *flat
	starts map[int32][]uint64
}

func newFrames(f *flat) *frames { return &frames{f, map[int32][]uint64{}} }

// start gives, by reference of a structure, the first ordinal below the structure's own first.
func (fr *frames) start(s int32) []uint64 {
	if v, ok := fr.starts[s]; ok {
		return v
	}
	st := &fr.f.lib.Structures[s]
	v := make([]uint64, 0, st.EndRef-st.FirstRef+1)
	at := uint64(fr.f.own[s])
	for r := st.FirstRef; r < st.EndRef; r++ {
		v = append(v, at)
		if ref := &fr.f.lib.Refs[r]; ref.Target >= 0 {
			at += uint64(elements(fr.f.lib, ref)) * fr.f.all[ref.Target]
		}
	}
	v = append(v, at)
	fr.starts[s] = v
	return v
}

// of gives the lowest cell that holds all ordinals from first to last of a top.
func (fr *frames) of(top int, first, last uint32) frame {
	f := fr.f
	at := frame{structure: f.h.tops[top], placed: true}
	base := f.first[top]
	for {
		lo, hi := uint64(first)-base, uint64(last)-base
		if lo < uint64(f.own[at.structure]) {
			return at
		}
		start := fr.start(at.structure)
		k := sort.Search(len(start)-1, func(i int) bool { return start[i+1] > lo })
		if hi >= start[k+1] {
			return at
		}
		ref := &f.lib.Refs[f.lib.Structures[at.structure].FirstRef+uint32(k)]
		under := f.all[ref.Target]
		e := (lo - start[k]) / under
		if e != (hi-start[k])/under {
			return at
		}
		if at.placed && rigid(f.lib, ref) {
			l := latticeOf(f.lib, ref)
			at.at = at.at.compose(f.work(l.element(int64(e)%int64(l.Columns), int64(e)/int64(l.Columns))))
		} else {
			at.placed = false
		}
		at.structure = ref.Target
		base += start[k] + e*under
	}
}

// topOf gives the index of the top that a node lies in.
func (l *layout) topOf(node uint32) int {
	shape := l.shapeOf(node)
	rank := sort.Search(len(l.first)-1, func(i int) bool { return l.first[i+1] > shape })
	return l.flat.h.byName[rank]
}

// inTop turns work units into half database units, as results are given.
func (l *layout) half(b Box) Box {
	k := 2 / l.flat.forms.scale
	return Box{b.X1 * k, b.Y1 * k, b.X2 * k, b.Y2 * k}
}
