package decompose

import (
	"cmp"
	"math"
	"slices"
	"sync/atomic"

	"maskpair/decompose/geom"
)

// This file measures where a layout and its baseline differ: which shapes of the one lie over which figures of the other, and how much
// of each shape was on which mask. Only what differs, and what touches that, is looked at.

// cover is what was found where the two differ, over all windows of a top.
type cover struct {
	sets  union    // by figure of the baseline (see figure): what touches
	masks []uint8  // by figure: 1 on A, 2 on B; 0: not looked at
	outer []bool   // by figure: some of what hangs together with it lies over no shape; only where that is wanted
	laps  []lapped // no two equal once settled
	area  map[uint32]*covered
	areas areas
}

// lapped is a shape that shares some area with a figure of the baseline.
type lapped struct{ shape, figure uint32 }

// covered is how much of a shape was on the masks.
type covered struct {
	on   [2]extent
	bare bool // some of it was on none; only where that is wanted
}

// former is an item of the baseline.
type former struct {
	mask uint8
	at   uint32 // in comparison.on
}

func (c *comparison) item(w former) *item { return &c.on[w.mask][w.at] }

// figure numbers the figures of the top of the baseline, those on B behind those on A.
func (c *comparison) figure(w former) uint32 {
	id := c.item(w).ID
	if isBand(id) {
		id = c.bands.Data[id&^bandBit].ordinal
	}
	first := uint32(c.e.masks[w.mask].first[c.top])
	if w.mask == uint8(B) {
		return id - first + uint32(c.figures(A))
	}
	return id - first
}

// ordinal is the inverse of figure: the ordinal of a figure of the baseline.
func (c *comparison) ordinal(figure uint32) uint32 {
	if onA := uint32(c.figures(A)); figure >= onA {
		return figure - onA + uint32(c.e.masks[B].first[c.top])
	}
	return figure + uint32(c.e.masks[A].first[c.top])
}

func (c *comparison) figures(m Mask) uint64 {
	f := c.e.masks[m]
	return f.all[f.h.tops[c.top]]
}

// differ looks at what differs in the window at hand.
func (c *comparison) differ() error {
	var lone []former
	total := 0
	for m, on := range c.on {
		total += len(on)
		for k := range on {
			if c.owner[m].Data[k] == 0 {
				lone = append(lone, former{uint8(m), uint32(k)})
			}
		}
	}
	if 2*len(lone) > total {
		for i := range c.state {
			c.state[i] |= stateDiffers
		}
	} else if len(lone) > 0 {
		now := c.around(lone)
		hits, _, err := c.touching(now, lone)
		if err != nil {
			return err
		}
		for _, h := range hits {
			c.state[c.shapeOf(now[h.probe])-c.begin] |= stateDiffers
		}
	}
	differs := false
	for i, s := range c.state {
		if s&(stateA|stateB) == stateA|stateB {
			c.state[i] |= stateDiffers
		}
		differs = differs || c.state[i]&stateDiffers != 0
	}
	if !differs && len(lone) == 0 {
		return nil
	}
	return c.measure()
}

// shapeOf gives the shape of an item of the window at hand.
func (c *comparison) shapeOf(i uint32) uint32 {
	o, _ := c.b.ordinal(&c.b.sorted[i])
	return c.b.l.nodeOf.Data[o]
}

// tiles is the side of the table by which items far from all that is looked for are left out.
const tiles = 1 << 10

// around gives the items of the layout that may touch some items of the baseline, and some more.
func (c *comparison) around(lone []former) []uint32 {
	box := emptyBox
	for _, w := range lone {
		it := c.item(w)
		box = box.join(Box{int64(it.X1), int64(it.Y1), int64(it.X2), int64(it.Y2)})
	}
	shiftX, shiftY := 0, 0
	for (box.X2-box.X1)>>shiftX >= tiles {
		shiftX++
	}
	for (box.Y2-box.Y1)>>shiftY >= tiles {
		shiftY++
	}
	// A row of the table has a bit for each tile.
	var table [tiles][tiles / 64]uint64
	over := func(it *item, fn func(row *[tiles / 64]uint64, x uint32) bool) bool {
		x1, x2 := max(int64(it.X1), box.X1), min(int64(it.X2), box.X2)
		y1, y2 := max(int64(it.Y1), box.Y1), min(int64(it.Y2), box.Y2)
		if x1 > x2 || y1 > y2 {
			return false
		}
		for y := (y1 - box.Y1) >> shiftY; y <= (y2-box.Y1)>>shiftY; y++ {
			for x := (x1 - box.X1) >> shiftX; x <= (x2-box.X1)>>shiftX; x++ {
				if fn(&table[y], uint32(x)) {
					return true
				}
			}
		}
		return false
	}
	for _, w := range lone {
		over(c.item(w), func(row *[tiles / 64]uint64, x uint32) bool {
			row[x/64] |= 1 << (x % 64)
			return false
		})
	}
	var now []uint32
	for i := range c.b.sorted {
		if _, ok := c.b.ordinal(&c.b.sorted[i]); ok && over(&c.b.sorted[i], func(row *[tiles / 64]uint64, x uint32) bool { return row[x/64]>>(x%64)&1 == 1 }) {
			now = append(now, uint32(i))
		}
	}
	return now
}

// touching finds which items of the layout touch which of the baseline (as places in the two lists), and which of the latter hang
// together.
func (c *comparison) touching(now []uint32, before []former) ([]hit, union, error) {
	items := make([]item, 0, len(now)+len(before))
	var bands []band
	add := func(it item, from []band, base, number uint32) {
		if isBand(it.ID) {
			bd := from[it.ID&^bandBit]
			bd.ordinal = number
			bd.polygon += base
			it.ID = bandBit | uint32(len(bands))
			bands = append(bands, bd)
		} else {
			it.ID = number
		}
		items = append(items, it)
	}
	tags := make([]uint8, len(before))
	for i, w := range before {
		add(*c.item(w), c.bands.Data, uint32(len(c.b.polygons)), uint32(i))
		tags[i] = w.mask
	}
	for i, k := range now {
		add(c.b.sorted[k], c.b.bands.Data, 0, uint32(len(before)+i))
	}
	s := &sweep{items: sortItems(items, make([]item, len(items)), c.b.jobs), bands: bands, polygons: join(c.b.polygons, c.polys),
		spacing: 1, figures: uint32(len(before)), tags: tags}
	sets := newUnion(make(union, len(before)))
	var limit atomic.Int64
	limit.Store(math.MaxInt64)
	sinks, err := s.run(c.b.ctx, sets, c.b.jobs, &limit)
	if err != nil {
		return nil, nil, err
	}
	var hits []hit
	for i := range sinks {
		hits = append(hits, sinks[i].hits...)
		sinks[i].hits = nil
	}
	return hits, sets, nil
}

// measure measures the shapes that differ in the window at hand.
func (c *comparison) measure() error {
	v := c.cover
	if v == nil {
		n := c.figures(A) + c.figures(B)
		v = &cover{sets: newUnion(make(union, n)), masks: make([]uint8, n), area: map[uint32]*covered{}}
		if c.e.wantSame {
			v.outer = make([]bool, n)
		}
		c.cover = v
	}
	var now []uint32
	for i := range c.b.sorted {
		if o, ok := c.b.ordinal(&c.b.sorted[i]); ok && c.state[c.b.l.nodeOf.Data[o]-c.begin]&stateDiffers != 0 {
			now = append(now, uint32(i))
		}
	}
	var before []former
	for m, on := range c.on {
		for k := range on {
			if n := c.owner[m].Data[k]; n == 0 || c.state[n-1-c.begin]&stateDiffers != 0 {
				before = append(before, former{uint8(m), uint32(k)})
			}
		}
	}
	hits, sets, err := c.touching(now, before)
	if err != nil {
		return err
	}
	for i, w := range before {
		f := c.figure(w)
		v.masks[f] |= 1 << w.mask
		v.sets.join(f, c.figure(before[sets.find(uint32(i))]))
	}
	// Rectangles that only touch share no area.
	kept := hits[:0]
	for _, h := range hits {
		p, q := &c.b.sorted[now[h.probe]], c.item(before[h.figure])
		if isBand(p.ID) || isBand(q.ID) || max(p.X1, q.X1) < min(p.X2, q.X2) && max(p.Y1, q.Y1) < min(p.Y2, q.Y2) {
			kept = append(kept, h)
		}
	}
	c.measureShapes(now, before, kept)
	if v.outer != nil {
		c.measureFigures(now, before, sets, kept)
	}
	return c.b.ctx.Err()
}

func compareLapped(a, b lapped) int {
	return cmp.Or(cmp.Compare(a.shape, b.shape), cmp.Compare(a.figure, b.figure))
}

// over is an item of the layout that touches one of the baseline, as places in two lists.
type over struct {
	shape  uint32
	figure uint32 // of the baseline
	before uint32
	now    uint32
}

func compareOver(a, b over) int {
	return cmp.Or(cmp.Compare(a.shape, b.shape), cmp.Compare(a.figure, b.figure), cmp.Compare(a.before, b.before), cmp.Compare(a.now, b.now))
}

// measureShapes measures shape by shape.
func (c *comparison) measureShapes(now []uint32, before []former, hits []hit) {
	v := c.cover
	shape := make([]uint32, len(now))
	order := make([]uint32, len(now)) // of the items of the layout, by shape
	for i, k := range now {
		shape[i], order[i] = c.shapeOf(k), uint32(i)
	}
	slices.SortFunc(order, func(a, b uint32) int { return cmp.Or(cmp.Compare(shape[a], shape[b]), cmp.Compare(a, b)) })
	list := make([]over, len(hits))
	for i, h := range hits {
		list[i] = over{shape[h.probe], c.figure(before[h.figure]), h.figure, h.probe}
	}
	slices.SortFunc(list, compareOver)
	at := 0
	for i := 0; i < len(list); {
		n := list[i].shape
		end := i
		for end < len(list) && list[end].shape == n {
			end++
		}
		for at < len(order) && shape[order[at]] < n {
			at++
		}
		from := at
		for at < len(order) && shape[order[at]] == n {
			at++
		}
		c.measureShape(now, order[from:at], before, list[i:end])
		i = end
	}
	if !c.e.wantSame {
		return
	}
	// A shape over nothing is bare.
	for _, k := range order {
		if v.area[shape[k]] == nil {
			v.area[shape[k]] = &covered{bare: true}
		}
	}
}

// measureShape measures one shape, or what of it is in the window at hand: own are its items, list says what they touch.
func (c *comparison) measureShape(now, own []uint32, before []former, list []over) {
	v := c.cover
	n := list[0].shape
	var on [2]geom.Parts
	some := [2]bool{}
	for i := 0; i < len(list); {
		end := i
		for end < len(list) && list[end].figure == list[i].figure {
			end++
		}
		m := before[list[i].before].mask
		if was, ok := c.shares(now, before, list[i:end]); ok {
			some[m] = true
			on[m].Rects = append(on[m].Rects, was.Rects...)
			on[m].Polygons = append(on[m].Polygons, was.Polygons...)
			v.laps = append(v.laps, lapped{n, list[i].figure})
		}
		i = end
	}
	got := v.area[n]
	if got == nil {
		got = &covered{}
		v.area[n] = got
	}
	if !c.e.wantSame && c.whole && some[A] != some[B] {
		got.on[A].lo, got.on[B].lo = uint64(boolInt(some[A])), uint64(boolInt(some[B])) // how much it is does not matter
		return
	}
	var here geom.Parts
	for _, i := range own {
		c.part(&here, &c.b.sorted[now[i]], c.b.bands.Data, c.b.polygons)
	}
	for m := range on {
		if some[m] {
			got.on[m].add(v.areas.shared(here, on[m]))
		}
	}
	if c.e.wantSame && !got.bare {
		both := geom.Parts{Rects: join(on[A].Rects, on[B].Rects), Polygons: join(on[A].Polygons, on[B].Polygons)}
		got.bare = v.areas.shared(here, both).compare(v.areas.of(here)) != 0
	}
}

// shares gives the items of one figure of the baseline that a shape touches; false where it shares no area with them.
func (c *comparison) shares(now []uint32, before []former, list []over) (geom.Parts, bool) {
	var here, was geom.Parts
	flat := false // rectangles share area: of those that do not, none came this far
	for i, o := range list {
		p, q := &c.b.sorted[now[o.now]], c.item(before[o.before])
		flat = flat || !isBand(p.ID) && !isBand(q.ID)
		if i == 0 || list[i-1].before != o.before {
			c.part(&was, q, c.bands.Data, c.polys)
		}
		if !flat {
			c.part(&here, p, c.b.bands.Data, c.b.polygons)
		}
	}
	if !flat && c.cover.areas.shared(here, was) == (extent{}) {
		return was, false
	}
	return was, true
}

// part appends what an item covers: a rectangle, or for a band the whole polygon, unless that is the last one there already.
func (c *comparison) part(to *geom.Parts, it *item, bands []band, polygons []*geom.Polygon) {
	if !isBand(it.ID) {
		to.Rects = append(to.Rects, it.rect())
		return
	}
	bd := &bands[it.ID&^bandBit]
	p := geom.Placed{Polygon: polygons[bd.polygon], At: bd.at}
	if !slices.Contains(to.Polygons[max(0, len(to.Polygons)-16):], p) {
		to.Polygons = append(to.Polygons, p)
	}
}

// measureFigures finds what hangs together in the baseline and lies over no shape in part. It goes by what hangs together, not by
// figures: the search leaves out items that lie within others.
func (c *comparison) measureFigures(now []uint32, before []former, sets union, hits []hit) {
	v := c.cover
	root := make([]uint32, len(before))
	order := make([]uint32, len(before))
	for i := range before {
		root[i], order[i] = sets.find(uint32(i)), uint32(i)
	}
	slices.SortFunc(order, func(a, b uint32) int { return cmp.Or(cmp.Compare(root[a], root[b]), cmp.Compare(a, b)) })
	for i := range hits {
		hits[i].figure = root[hits[i].figure]
	}
	slices.SortFunc(hits, func(a, b hit) int { return cmp.Or(cmp.Compare(a.figure, b.figure), cmp.Compare(a.probe, b.probe)) })
	hits = slices.Compact(hits)
	at := 0
	for i := 0; i < len(order); {
		r := root[order[i]]
		var was, here geom.Parts
		for ; i < len(order) && root[order[i]] == r; i++ {
			c.part(&was, c.item(before[order[i]]), c.bands.Data, c.polys)
		}
		for ; at < len(hits) && hits[at].figure == r; at++ {
			c.part(&here, &c.b.sorted[now[hits[at].probe]], c.b.bands.Data, c.b.polygons)
		}
		if v.areas.shared(was, here).compare(v.areas.of(was)) != 0 {
			v.outer[c.figure(before[r])] = true
		}
	}
}

// settle says of each shape what it was.
func (c *comparison) settle(mem *memory) {
	nodes := mem.nodes[c.begin:c.end]
	for i, s := range c.state {
		if s&stateDiffers != 0 || s&(stateA|stateB) == 0 {
			continue
		}
		nodes[i] = recalled(s&(stateA|stateB)) | recalledSome | recalledSame // stateA is 1, stateB 2
	}
	v := c.cover
	if v == nil {
		return
	}
	root := func(f uint32) uint32 { return v.sets.find(f) }
	masks := make([]uint8, len(v.masks)) // by root
	outer := make([]bool, len(v.outer))
	for f, m := range v.masks {
		if m != 0 {
			masks[root(uint32(f))] |= m
			if v.outer != nil {
				outer[root(uint32(f))] = outer[root(uint32(f))] || v.outer[f]
			}
		}
	}
	slices.SortFunc(v.laps, compareLapped)
	v.laps = slices.Compact(v.laps)
	shapes := map[uint32]int{} // by root: shapes over it
	var last lapped
	for i, l := range v.laps {
		r := lapped{l.shape, root(l.figure)}
		if i == 0 || r != last {
			shapes[r.figure]++
		}
		last = r
	}
	for i := 0; i < len(v.laps); {
		n := v.laps[i].shape
		end, one, cut := i, true, false
		for ; end < len(v.laps) && v.laps[end].shape == n; end++ {
			r := root(v.laps[end].figure)
			one = one && r == root(v.laps[i].figure)
			cut = cut || masks[r] == 3
		}
		got := v.area[n]
		out := recalledSome
		switch got.on[A].compare(got.on[B]) {
		case 1:
			out |= 1 + recalled(A)
		case -1:
			out |= 1 + recalled(B)
		}
		if cut {
			out |= recalledCut
		}
		if r := root(v.laps[i].figure); c.e.wantSame && one && !got.bare && !outer[r] && shapes[r] == 1 {
			out |= recalledSame
		}
		nodes[n-c.begin] = out
		i = end
		if c.e.wantSame {
			if mem.covers == nil {
				mem.covers = map[uint32][2]bool{}
			}
			mem.covers[n] = [2]bool{got.on[A] != (extent{}), got.on[B] != (extent{})}
		}
	}
	if c.e.wantSame {
		for _, l := range v.laps {
			mem.laps = append(mem.laps, lapped{l.shape, c.ordinal(l.figure)})
		}
		for f, m := range v.masks {
			if m != 0 {
				mem.loose = append(mem.loose, looseFigure{c.ordinal(uint32(f)), c.ordinal(root(uint32(f)))})
			}
		}
	}
}
