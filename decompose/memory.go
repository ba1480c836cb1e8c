package decompose

import (
	"fmt"
	"math"

	"maskpair/decompose/geom"
	"maskpair/gds"
	"maskpair/gds/arena"
)

// This file and its neighbours (memory_*.go) let shapes remember: which mask covers more of the area of each shape in an earlier
// result. Memory goes by place, never by names or order, so it outlives any change of the hierarchy.
//
// A layout that is drawn as it was, figure by figure, needs no comparison of places (memory_twin.go). Else most of it is as it was,
// rectangle by rectangle: the rectangles of both are sorted and compared in one pass (memory_match.go), and only where they differ are
// touching neighbours looked for and areas measured (memory_cover.go).

// Baseline is an earlier result.
type Baseline struct {
	name string
	lib  *gds.Library
	h    *hierarchy
	tops []int // by top of the run: index into the tops of h, or -1
}

// Remember makes the run keep shapes on the masks that they have in an earlier result. The library must have been indexed with the
// deck's BaselineInterest, or its Interest; name is that of its file, for messages.
//
// Tops go together that have the same name, or that are the only ones of their streams. It is an *OrderError if none do, or if the
// database units differ.
func (r *Run) Remember(name string, lib *gds.Library) error {
	b, err := newBaseline(r.h, name, lib, r.opt.Top)
	if err != nil {
		return err
	}
	var unknown []string
	for _, i := range r.h.byName {
		if b.tops[i] < 0 {
			unknown = append(unknown, r.h.name(r.h.tops[i]))
		}
	}
	switch len(unknown) {
	case 0:
	case 1:
		r.warn("the baseline %s has no structure %s; its shapes have no memory", name, unknown[0])
	default:
		r.warn("the baseline %s does not have %d of the %d tops: %s; their shapes have no memory", name, len(unknown), len(b.tops), firstOf(unknown))
	}
	r.baseline = b
	return nil
}

// sameUnit is by what part database units may differ: they are decimals that some programs write in single precision.
const sameUnit = 1e-6

func newBaseline(h *hierarchy, name string, lib *gds.Library, only string) (*Baseline, error) {
	if math.Abs(lib.DBU-h.lib.DBU) > sameUnit*h.lib.DBU {
		return nil, &OrderError{Msg: fmt.Sprintf("the baseline %s has a database unit of %g m, the layout one of %g m; give a baseline with the same unit", name, lib.DBU, h.lib.DBU)}
	}
	all, err := newHierarchy(lib, "")
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	b := &Baseline{name: name, lib: lib, tops: make([]int, len(h.tops))}
	byName := make(map[string]int32, len(lib.Structures))
	for s := range lib.Structures {
		byName[lib.Structures[s].Name] = int32(s)
	}
	var roots []int32
	for i, t := range h.tops {
		b.tops[i] = -1
		s, ok := byName[h.name(t)]
		if !ok && len(h.tops) == 1 && len(all.tops) == 1 {
			s, ok = all.tops[0], true
		}
		if ok {
			b.tops[i] = len(roots)
			roots = append(roots, s)
		}
	}
	if len(roots) == 0 {
		what := "has no structure of the same name as a top of the layout"
		if only != "" {
			what = "has no structure " + only
		}
		return nil, &OrderError{Msg: fmt.Sprintf("the baseline %s %s; give an earlier result of the same layout", name, what)}
	}
	if b.h, err = newHierarchyUnder(lib, roots); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return b, nil
}

// earlier is what a layer needs of the baseline.
type earlier struct {
	*Baseline
	masks    [2]*flat // figures on A and on B; ordinals of the second go on behind those of the first
	odd      [2][]oddFigures
	polygons []*geom.Polygon // of both, but for those under odd placements
	wantSame bool            // also tell which shapes are just as they were
}

// newEarlier flattens the masks of a deck layer in the baseline.
func newEarlier(b *Baseline, masks [2]*selection, g grid) (*earlier, error) {
	e := &earlier{Baseline: b}
	g.halves = gridOf(b.lib, masks[A]).halves || gridOf(b.lib, masks[B]).halves
	behind := uint64(0)
	for m := range e.masks {
		f, err := newFlat(b.h, masks[m], g)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", b.name, err)
		}
		for i := range f.first {
			f.first[i] += behind
		}
		f.polygonBase = uint32(len(e.polygons))
		e.polygons = append(e.polygons, f.polygons...)
		e.masks[m] = f
		behind += f.total
		if behind > maxFlat {
			return nil, fmt.Errorf("%s: %w", b.name, &LimitError{Msg: fmt.Sprintf("more than %d flat figures on the masks of one deck layer", int64(maxFlat)), Remedy: byBlocks})
		}
		e.odd[m] = make([]oddFigures, len(b.h.tops))
		for top := range e.odd[m] {
			if err := f.collectOdd(top, &e.odd[m][top]); err != nil {
				return nil, fmt.Errorf("%s: %w", b.name, err)
			}
		}
	}
	return e, nil
}

// size gives the number of items and bands of a top of the baseline.
func (e *earlier) size(mask, top int) (items, bands int) {
	f := e.masks[mask]
	t := f.h.tops[top]
	if f.all[t] == 0 {
		return 0, 0
	}
	odd, oddBands := e.odd[mask][top].size()
	return int(f.items[t]) + odd, int(f.bands[t]) + oddBands
}

// size gives the number of items and bands of figures under odd placements.
func (o *oddFigures) size() (items, bands int) {
	for i := range o.figures {
		n := int(o.figures[i].form.pieces())
		items += n
		if o.figures[i].form.polygon != nil {
			bands += n
		}
	}
	return items, bands
}

// recalled says what a node was in the baseline.
type recalled uint8

const (
	// The low two bits are NoMemory, or 1 + the mask that covers more of the node.
	recalledMask recalled = 3
	// The node lies over a shape that was stitched.
	recalledCut recalled = 4
	// Something was there.
	recalledSome recalled = 8
	// A shape of just this extent was there.
	recalledSame recalled = 16
)

// memory is what the shapes of a layer remember.
type memory struct {
	e     *earlier
	nodes []recalled // by shape, as far as its top is done

	// What wantSame asks for beside: of shapes that were measured, which masks had some of them, and over which figures they lie; and
	// the figures that were looked at.
	covers map[uint32][2]bool
	laps   []lapped
	loose  []looseFigure
}

// looseFigure is a figure of the baseline that differs, or touches one that does; figures that hang together have one root.
type looseFigure struct{ ordinal, root uint32 }

// lose notes the figures of the baseline in a top that has none now.
func (m *memory) lose(top int) {
	if m == nil || !m.e.wantSame || m.e.tops[top] < 0 {
		return
	}
	for _, f := range m.e.masks {
		top := m.e.tops[top]
		for o := f.first[top]; o < f.first[top]+f.all[f.h.tops[top]]; o++ {
			m.loose = append(m.loose, looseFigure{uint32(o), uint32(o)})
		}
	}
}

// recall finds out what the shapes of the windows at hand were in the baseline. Their numbers run from begin to end; windows other than
// the whole top are cut to their cores.
func (b *builder) recall(top int, begin, end uint32, windows []window) error {
	m := b.l.memory
	if m == nil {
		return nil
	}
	m.nodes = append(m.nodes, make([]recalled, int(end)-len(m.nodes))...)
	if m.e.tops[top] < 0 {
		return nil
	}
	c := newComparison(b, m.e, m.e.tops[top], begin, end)
	defer c.free()
	if len(windows) == 1 && c.unchanged(top) {
		c.settle(m)
		return nil
	}
	for _, win := range windows {
		if len(windows) > 1 {
			win.box = win.core
			if err := b.prepare(top, win); err != nil {
				return err
			}
		}
		if err := c.window(win, len(windows) == 1); err != nil {
			return err
		}
	}
	c.settle(m)
	return nil
}

// comparison compares the shapes of one top with a top of the baseline.
type comparison struct {
	b          *builder
	e          *earlier
	top        int  // of the baseline
	whole      bool // the window at hand is the whole top
	begin, end uint32

	state []uint8                 // by shape: see memory_match.go
	own   *arena.Array[item]      // nil: the builder's arrays have room
	bands *arena.Array[band]      // of both masks
	on    [2][]item               // of the window at hand, sorted, without copies
	owner [2]*arena.Array[uint32] // by place in on: 1 + shape of the equal item of the layout
	polys []*geom.Polygon         // of the window at hand
	cover *cover                  // nil: nothing differed so far
}

func newComparison(b *builder, e *earlier, top int, begin, end uint32) *comparison {
	c := &comparison{b: b, e: e, top: top, begin: begin, end: end, state: make([]uint8, end-begin)}
	bands := 0
	for m := range c.e.masks {
		_, k := e.size(m, top)
		bands += k
	}
	c.bands = arena.New[band](bands)
	return c
}

func (c *comparison) free() {
	c.own.Free()
	for m := range c.owner {
		c.owner[m].Free()
	}
	c.bands.Free()
}

// room gives an array for the items of both masks: the one that the builder's sorted items have left, or an array of its own.
func (c *comparison) room() []item {
	onA, _ := c.e.size(int(A), c.top)
	onB, _ := c.e.size(int(B), c.top)
	if _, idle := c.b.arrays(); onA+onB <= len(idle) {
		return idle[:onA+onB]
	}
	if c.own == nil {
		c.own = arena.New[item](onA + onB)
	}
	return c.own.Data
}

// sort sorts items of the baseline: by radix where the copies that the builder has dropped left room for it.
func (c *comparison) sort(items []item) {
	busy, _ := c.b.arrays()
	if room := busy[len(c.b.sorted):max(c.b.filled, len(c.b.sorted))]; len(items) <= len(room) {
		copy(items, sortItems(items, room[:len(items)], c.b.jobs))
		return
	}
	sortInPlace(items, byLower(), c.b.jobs)
}

// flatten fills on with the items of a window of the baseline.
func (c *comparison) flatten(win window) error {
	c.polys = append([]*geom.Polygon(nil), c.e.polygons...)
	items := c.room()
	nBand := uint64(0)
	for m, f := range c.e.masks {
		c.on[m] = nil
		if f.all[f.h.tops[c.top]] == 0 {
			continue
		}
		// Bands of the second mask come behind those of the first.
		w := flattener{f: f, win: win, items: items, bands: c.bands.Data}
		if nBand == 0 {
			var err error
			if w.nItem, w.nBand, err = f.flatten(c.b.ctx, c.top, f.first[c.top], win, w.items, w.bands, c.b.jobs); err != nil {
				return err
			}
		} else {
			w.nBand = nBand
			w.walk(f.h.tops[c.top], placement{0, -win.originX, -win.originY}, f.first[c.top])
		}
		c.polys = w.oddFigures(&c.e.odd[m][c.top], placement{0, -win.originX, -win.originY}, 0, c.polys)
		nBand = w.nBand
		c.sort(items[:w.nItem])
		c.on[m] = dropCopies(items[:w.nItem], nil, bandBit, nil)
		items = items[len(c.on[m]):]
	}
	for m := range c.owner {
		c.owner[m].Free()
		c.owner[m] = arena.New[uint32](len(c.on[m]))
	}
	return nil
}

// Memory gives what the nodes remember: NoMemory, or 1 + mask. Nodes that are stitched now, or were in the baseline, cannot be moved and
// have no memory here; known counts all shapes that have one. It is nil without a baseline.
func (v *View) Memory() (memory []uint8, known int64) {
	l := v.layout
	if l.memory == nil {
		return nil, 0
	}
	memory = make([]uint8, l.nodes)
	for u, r := range l.memory.nodes {
		if r&recalledMask == 0 {
			continue
		}
		if l.given != nil {
			if _, stitched := l.given.shape[uint32(u)]; stitched {
				continue
			}
		}
		known++
		if r&recalledCut == 0 {
			memory[u] = uint8(r & recalledMask)
		}
	}
	return memory, known
}
