package decompose

import (
	"context"
	"fmt"
	"math"
	"slices"
	"sync/atomic"

	"maskpair/decompose/geom"
	"maskpair/gds/arena"
)

// layout is one deck layer, flattened and searched: its shapes, and which of them are near.
//
// Ordinals number flat figures, nodes number what goes on a mask as a whole. A node is a shape, or one piece of a shape that arrived
// stitched. Shapes are numbered top by top (tops by name), and within a top in the order in which the sweep meets them, so that
// numbers depend on the geometry and not on the order of elements in the file.
type layout struct {
	rules   *LayerRules
	number  int // of the deck layer
	classes *classes
	flat    *flat
	nodeOf  *arena.Array[uint32] // by ordinal
	shapes  int
	nodes   int
	first   []uint32              // first node of each top, by rank of the top; one more at the end
	area    []float64             // by node, square work units
	areas   *arena.Array[float64] // room for it
	near    *neighbours
	box     []Box               // by node, once boxes was called
	room    arena.Slab          // memory that is given back when the layer has its result
	settled int64               // bytes in use once near pairs are known, the room included
	spare   int64               // of the room, what was left then
	odd     []oddFigures        // by top
	tags    *arena.Array[uint8] // by ordinal: what arrived on a mask; nil where nothing did
	given   *givenStitches      // nil: none
	cuts    *cuts               // nil: no shape of the layer can be cut
	hits    []hit               // what looks for shapes, and the flat figures it touches; empty once orders were made of them
	look    *lookout
	memory  *memory     // nil: no baseline
	far     []farPair   // pairs within the largest spacing that no rule makes near, as far as anything asks for them
	self    []selfPlace // where shapes come near to themselves, where the deck asks for it
}

// builder flattens and searches a deck layer. Its arrays are reused from top to top.
type builder struct {
	ctx      context.Context
	jobs     int
	l        *layout
	limit    atomic.Int64       // near pairs of figures that may still be kept
	both     *arena.Array[item] // room of items and scratch
	items    []item
	scratch  []item
	others   *arena.Array[item] // what looks for shapes and is no seeker
	bands    *arena.Array[band]
	room     pairRoom
	near     [][]uint64 // near pairs, in blocks
	done     built
	areas    geom.AreaScratch
	merged   []merged               // by worker
	sorted   []item                 // of the window at hand
	seekers  []item                 // likewise; see seek.go
	filled   int                    // sorted items before copies were dropped
	slanted  map[uint32]*geom.Parts // shapes of the top at hand that have slanted figures
	joined   bool                   // the shapes of the top at hand are settled: a window is only looked at again
	polygons []*geom.Polygon
	opt      *Options
	kept     []topRects // where pairs must be judged by what faces what
}

// newLayout builds one deck layer; sought says what looks for its shapes, nil: nothing.
func newLayout(ctx context.Context, h *hierarchy, sel *selection, rules *LayerRules, number int, sought *sought, opt *Options) (*layout, error) {
	opt.stage(stageFlatten)
	g := gridOf(h.lib, sel)
	if sought.needsHalves(h) {
		g.scale = 2
	}
	f, err := newFlat(h, sel, g)
	if err != nil {
		return nil, err
	}
	l := &layout{rules: rules, number: number, flat: f, odd: make([]oddFigures, len(h.tops)), first: make([]uint32, len(h.tops)+1)}
	if l.look, err = newLookout(h, sought, g); err != nil {
		return nil, err
	}
	if sought != nil && sought.baseline != nil {
		e, err := newEarlier(sought.baseline, sought.masks, g)
		if err != nil {
			return nil, err
		}
		e.wantSame = sought.wantSame
		l.memory = &memory{e: e}
	}
	if err := l.look.number(f.total); err != nil {
		return nil, err
	}
	before := bytesAlways + indexBytes(h.lib) + opt.held
	if l.memory != nil {
		before += indexBytes(l.memory.e.lib)
	}
	if err := l.checkMemory(opt, before); err != nil {
		return nil, err
	}
	b := &builder{ctx: ctx, jobs: opt.jobs(), l: l, opt: opt, merged: make([]merged, opt.jobs())}
	defer b.free()
	b.limit.Store(opt.mostPairs())
	l.nodeOf = arena.New[uint32](int(f.total))
	l.areas = arena.New[float64](int(f.total))
	l.area = l.areas.Data[:0]
	sets := newUnionBy(opt.jobs(), l.nodeOf.Data)
	if err := b.collectOdd(); err != nil {
		return nil, err
	}
	l.findTags()
	most, mostBands, mostLooking, looking := 0, 0, 0, 0
	for i := range h.tops {
		items, bands := b.size(i)
		more, moreBands := l.look.size(i)
		most, mostBands = max(most, items+more), max(mostBands, bands+moreBands)
		mostLooking, looking = max(mostLooking, more), looking+more
	}
	// What looks for shapes mostly finds room in one of the arrays, and touches one figure: room that is not touched takes no memory.
	b.both, b.others, b.bands = arena.New[item](2*most), arena.New[item](mostLooking), arena.New[band](mostBands)
	b.items, b.scratch = b.both.Data[:most:most], b.both.Data[most:]
	l.hits = arena.Make[hit](0, looking)
	shapes := uint32(0)
	for rank, top := range h.byName {
		l.first[rank] = shapes
		if f.all[h.tops[top]] == 0 {
			l.memory.lose(top)
			continue
		}
		n, err := b.top(top, sets, shapes)
		if err != nil {
			return nil, err
		}
		shapes = n
	}
	l.first[len(h.tops)] = shapes
	l.shapes, l.nodes = int(shapes), int(shapes)
	arena.Hand(&l.room, b.both)
	b.others.Free()
	b.bands.Free()
	if l.given != nil {
		l.given.apply(l)
	}
	b.done.tell(opt)
	opt.stage(stagePairs)
	l.near = gather(&l.room, b.near, l.nodeOf.Data, l.nodes, l.given)
	b.room.free()
	l.settled = before + l.formBytes() + int64(f.total)*bytesPerFigure + int64(l.nodes)*bytesPerArea + int64(l.room.Size())
	l.spare = int64(l.room.Left())
	if err := l.judgeFacing(ctx, b.kept, opt.jobs()); err != nil {
		return nil, err
	}
	if err := l.findSameShape(ctx, b.kept, opt.jobs()); err != nil {
		return nil, err
	}
	return l, nil
}

// smallTop is the number of flat items below which a top goes through all stages in one: looking at the clock would cost more than
// they do.
const smallTop = 1 << 12

// stage tells that a stage of a top begins.
func (b *builder) stage(top int, name string) {
	if f := b.l.flat; f.items[f.h.tops[top]] < smallTop {
		name = stagePairs
	}
	b.opt.stage(name)
}

// arrays gives the builder's two arrays of items: the one that holds the sorted items of the window at hand, and the other.
func (b *builder) arrays() (busy, idle []item) {
	busy, idle = b.items, b.scratch
	if len(b.sorted) > 0 && len(idle) > 0 && &b.sorted[0] == &idle[0] {
		return idle, busy
	}
	return busy, idle
}

func (b *builder) free() {
	b.both.Free()
	b.others.Free()
	b.bands.Free()
	b.room.free()
	for i := range b.kept {
		b.kept[i].free()
	}
}

// free gives back what a layout holds.
func (l *layout) free() {
	l.nodeOf.Free()
	l.areas.Free()
	l.tags.Free()
	l.leave()
}

// leave gives back what is needed only until the layer has its result: near pairs, boxes, and what was cut from the layout's room.
func (l *layout) leave() {
	l.near, l.box = nil, nil
	l.room.Free()
}

// collectOdd works out what is placed by a magnification or an odd angle, top by top.
func (b *builder) collectOdd() error {
	for top := range b.l.odd {
		odd := &b.l.odd[top]
		if err := b.l.flat.collectOdd(top, odd); err != nil {
			return err
		}
		b.l.flat.rounded += odd.rounded
	}
	return nil
}

// size gives the number of items and bands of a top, but for what looks for shapes.
func (b *builder) size(top int) (items, bands int) {
	f := b.l.flat
	t := f.h.tops[top]
	if f.all[t] == 0 {
		return 0, 0
	}
	items, bands = int(f.items[t]), int(f.bands[t])
	for i := range b.l.odd[top].figures {
		fm := &b.l.odd[top].figures[i].form
		items += int(fm.pieces())
		if fm.polygon != nil {
			bands += int(fm.pieces())
		}
	}
	return items, bands
}

// top searches one top and numbers its shapes from `shapes` on; it returns the next number.
func (b *builder) top(top int, sets union, shapes uint32) (uint32, error) {
	f := b.l.flat
	windows := b.windows(top)
	b.joined = false
	for _, win := range windows {
		if err := b.prepare(top, win); err != nil {
			return 0, err
		}
		b.stage(top, stagePairs)
		if err := b.search(sets, win); err != nil {
			return 0, err
		}
	}
	b.stage(top, stageShapes)
	from, to := uint32(f.first[top]), uint32(f.first[top]+f.all[f.h.tops[top]])
	sets.point(from, to)
	b.joined = true
	if err := b.onBoth(top, sets, from, to); err != nil {
		return 0, err
	}
	begin := shapes
	b.slanted = map[uint32]*geom.Parts{}
	for _, win := range windows {
		if len(windows) > 1 {
			if err := b.prepare(top, win); err != nil {
				return 0, err
			}
		}
		shapes = b.numberShapes(sets, shapes)
	}
	sets.settle(from, to)
	b.l.area = b.l.area[:shapes]
	for _, win := range windows {
		if len(windows) > 1 {
			win.box = win.core
			if err := b.prepare(top, win); err != nil {
				return 0, err
			}
		}
		b.measure(begin, shapes)
	}
	b.measureSlanted(top)
	if len(windows) == 1 && (b.l.judgedRules() != nil || b.l.rules.SameShapeReport) {
		b.keepRects(begin, shapes, windows[0])
	}
	if err := b.recall(top, begin, shapes, windows); err != nil {
		return 0, err
	}
	return shapes, b.ctx.Err()
}

// windows cuts a top where its extent in work units does not fit 32 bits: only then, so nearly always there is one. Neighbouring
// windows overlap by the spacing, so that each near pair lies within one of them.
func (b *builder) windows(top int) []window {
	box := b.l.flat.box[b.l.flat.h.tops[top]].join(b.l.odd[top].box)
	reach := b.l.rules.Reach() * b.l.flat.forms.scale
	if box.X2-box.X1 <= math.MaxUint32-2 && box.Y2-box.Y1 <= math.MaxUint32-2 {
		return []window{{originX: box.X1 + (box.X2-box.X1)/2, originY: box.Y1 + (box.Y2-box.Y1)/2}}
	}
	cut := func(low, high int64) [][2]int64 {
		var out [][2]int64
		for at := low; at <= high; at += 1 << 31 {
			out = append(out, [2]int64{at, min(at+1<<31, high)})
		}
		return out
	}
	var out []window
	for _, y := range cut(box.Y1, box.Y2) {
		for _, x := range cut(box.X1, box.X2) {
			core := Box{x[0], y[0], x[1], y[1]}
			reach := min(reach, 1<<30)
			out = append(out, window{originX: x[0] + 1<<30, originY: y[0] + 1<<30, clip: true, core: core,
				box: Box{x[0] - reach, y[0] - reach, x[1] + reach, y[1] + reach}})
		}
	}
	for i := range out {
		w := &out[i]
		w.core = w.core.shift(-w.originX, -w.originY)
		w.box = w.box.shift(-w.originX, -w.originY)
	}
	return out
}

func (b Box) shift(x, y int64) Box { return Box{b.X1 + x, b.Y1 + y, b.X2 + x, b.Y2 + y} }

// prepare flattens a window of a top and sorts its items.
func (b *builder) prepare(top int, win window) error {
	b.stage(top, stageFlatten)
	f := b.l.flat
	nItem, nBand, err := f.flatten(b.ctx, top, f.first[top], win, b.items, b.bands.Data, b.jobs)
	if err != nil {
		return err
	}
	w := flattener{f: f, win: win, items: b.items, bands: b.bands.Data, nItem: nItem, nBand: nBand}
	b.polygons = slices.Clip(f.polygons)
	b.polygons = w.oddFigures(&b.l.odd[top], placement{0, -win.originX, -win.originY}, 0, b.polygons)
	b.stage(top, stageSort)
	b.sorted = sortItems(b.items[:w.nItem], b.scratch[:w.nItem], b.jobs)
	sets := union(b.l.nodeOf.Data)
	b.seekers = nil
	if b.joined {
		sets = nil
	} else if err := b.lookers(top, &w); err != nil {
		return err
	}
	sorted := b.sorted
	b.filled = len(sorted)
	b.sorted = dropCopiesBy(b.jobs, sorted, sets, uint32(f.total), b.l.keptTags())
	b.done.items += int64(len(sorted) + len(b.seekers))
	b.done.copies += int64(len(sorted) - len(b.sorted))
	return nil
}

// lookers flattens and sorts what looks for shapes of a window, in the array that the sorted items have left: seekers stay there, what can
// be none joins the items. w has flattened the figures.
func (b *builder) lookers(top int, w *flattener) error {
	b.stage(top, stageFlatten)
	f := b.l.flat
	_, idle := b.arrays()
	v := flattener{f: f, win: w.win, items: idle, bands: w.bands, nBand: w.nBand}
	var err error
	if b.polygons, err = b.l.look.emit(b.ctx, top, f.box[f.h.tops[top]].join(b.l.odd[top].box), &v, b.polygons, b.jobs); err != nil {
		return err
	}
	b.stage(top, stageSort)
	seekers, others := splitSeekers(idle[:v.nItem], b.others.Data, b.spacing())
	others = sortItems(others, idle[len(seekers):v.nItem], b.jobs)
	b.sorted = mergeItems(b.sorted, others)
	sortInPlace(seekers, byUpper(), b.jobs)
	b.seekers = seekers
	return nil
}

// spacing is the largest distance below which figures are near, in work units.
func (b *builder) spacing() int64 { return b.l.rules.Reach() * b.l.flat.forms.scale }

// search sweeps the window at hand.
func (b *builder) search(sets union, win window) error {
	scale := b.l.flat.forms.scale
	s := &sweep{items: b.sorted, seekers: b.seekers, hitRoom: hitRoom(b.l.hits, len(b.seekers)), bands: b.bands.Data, polygons: b.polygons, spacing: b.spacing(),
		anyMask: b.l.rules.AnyMask * scale, figures: uint32(b.l.flat.total), tags: b.l.keptTags(), room: &b.room, progress: b.opt.counted(int64(len(b.sorted)), "figures")}
	sinks, err := s.run(b.ctx, sets, b.jobs, &b.limit)
	if err == errTooManyPairs {
		return &LimitError{Msg: fmt.Sprintf("layer %s: so many figures are nearer to each other than %d database units that their pairs do not fit the memory that this run may use",
			b.l.rules.Name, b.l.rules.Reach()), Remedy: "check the spacing, or allow more with --memory"}
	}
	if err != nil {
		return err
	}
	b.l.hits = joinHits(b.l.hits, sinks)
	for i := range sinks {
		b.done.add(&sinks[i].done)
		b.near = append(b.near, sinks[i].near.blocks...)
	}
	return nil
}

// point makes each ordinal of a range point straight at its root, which is never greater.
func (u union) point(from, to uint32) {
	for i := from; i < to; i++ {
		u[i] = u[u[i]]
	}
}

// numbered marks an entry that is the number of a shape, not an ordinal.
const numbered = 1 << 31

// settle replaces the entries of a range by the numbers of their shapes.
func (u union) settle(from, to uint32) {
	for i := from; i < to; i++ {
		if u[i]&numbered == 0 {
			u[i] = u[u[i]]
		}
	}
	for i := from; i < to; i++ {
		u[i] &^= numbered
	}
}

// ordinal gives the flat figure of an item; false for a probe.
func (b *builder) ordinal(it *item) (uint32, bool) {
	id := it.ID
	if isBand(id) {
		id = b.bands.Data[id&^bandBit].ordinal
	}
	return id, id < uint32(b.l.flat.total)
}

// numberShapes numbers the shapes of the window at hand that have no number yet.
func (b *builder) numberShapes(sets union, shapes uint32) uint32 {
	b.done.numbered += int64(len(b.sorted))
	for i := range b.sorted {
		o, ok := b.ordinal(&b.sorted[i])
		if !ok {
			continue
		}
		number := sets[o]
		if number&numbered == 0 {
			root := number
			if sets[root]&numbered == 0 {
				sets[root] = shapes | numbered
				shapes++
			}
			number = sets[root]
		}
		if isBand(b.sorted[i].ID) && b.slanted[number&^numbered] == nil {
			b.slanted[number&^numbered] = &geom.Parts{}
		}
	}
	return shapes
}

// measure adds up the merged area of the shapes with numbers from begin to end, but for those with slanted figures.
func (b *builder) measure(begin, end uint32) {
	count := arena.New[uint32](int(end-begin) + 1)
	defer count.Free()
	b.done.numbered += 2 * int64(len(b.sorted))
	n := count.Data
	node := b.l.nodeOf.Data
	for i := range b.sorted {
		if o, ok := b.ordinal(&b.sorted[i]); ok {
			n[node[o]-begin]++
		}
	}
	// Shapes of several rectangles are gathered, each in a stretch of its own. Parts of the shapes are measured at once.
	const alone = math.MaxUint32
	const partItems = 1 << 14
	type part struct {
		shape int
		from  uint32 // in group
	}
	parts := []part{{}}
	at := uint32(0)
	for k := range n {
		if at-parts[len(parts)-1].from >= partItems {
			parts = append(parts, part{k, at})
		}
		if n[k] > 1 && b.slanted[begin+uint32(k)] == nil {
			n[k], at = at, at+n[k]
		} else {
			n[k] = alone
		}
	}
	_, idle := b.arrays()
	group := idle[:at]
	for i := range b.sorted {
		it := &b.sorted[i]
		o, ok := b.ordinal(it)
		if !ok {
			continue
		}
		if k := node[o] - begin; n[k] != alone {
			group[n[k]] = *it
			n[k]++
		} else if len(b.slanted) == 0 || b.slanted[node[o]] == nil {
			b.l.area[node[o]] += float64(int64(it.X2)-int64(it.X1)) * float64(int64(it.Y2)-int64(it.Y1))
		}
	}
	parts = append(parts, part{shape: len(n)})
	inTurn(b.jobs, len(parts)-1, func(worker, i int) {
		from := parts[i].from
		for k := parts[i].shape; k < parts[i+1].shape; k++ {
			if n[k] != alone {
				b.l.area[begin+uint32(k)] += float64(b.merged[worker].area(group[from:n[k]]))
				from = n[k]
			}
		}
	})
}

// measureSlanted gives the shapes of a top that have slanted figures their areas.
func (b *builder) measureSlanted(top int) {
	if len(b.slanted) == 0 {
		return
	}
	b.l.geometryIn([]int{top}, b.slanted)
	for shape, parts := range b.slanted {
		b.l.area[shape] = geom.UnionAreaPolygons(*parts)
	}
}
