package anchor

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"maskpair/decompose"
	"maskpair/gds/arena"
)

// This file turns what was hit into orders, and words where they come from.

// Orders gives the orders of a deck layer.
func (s *Sources) Orders(layer int, v *decompose.View) (*decompose.Orders, error) {
	st := &s.layer
	st.hit, st.end = make([]bool, len(st.looks)), make([]bool, len(st.looks))
	st.masks = v.MarkerMasks()
	st.marked = make([]bool, len(st.masks))
	c := &collector{s: s, v: v, o: &decompose.Orders{}, held: make([]uint8, v.Nodes())}
	c.o.DescribeAnchor, c.o.DescribeTie = c.anchorText, c.tieText
	c.masked()
	c.take()
	c.twos()
	if err := c.alike(); err != nil {
		return nil, err
	}
	if err := c.missed(layer); err != nil {
		return nil, err
	}
	c.o.Memory, c.o.Remembered = v.Memory()
	c.freeze()
	c.warn()
	return c.o, nil
}

// collector makes the orders of one layer. A source of an anchor is the number of a probe, or behind those of a marker, or behind
// those a node (which arrived on its mask), or behind those a node (which a frozen mask has or has not). A source of a tie is the number of its first probe, or behind those an alike entry.
type collector struct {
	s    *Sources
	v    *decompose.View
	o    *decompose.Orders
	held []uint8 // by node: bits 0 and 1 anchored on A and B, bits 2 and 3 wished there
	ends []end   // of ties and waivers
}

// end is what a probe of a tie or waiver has hit.
type end struct {
	probe uint32
	top   int32
	node  uint32
}

const wished = 2 // by how many bits those of wishes stand behind those of anchors

// anchor adds an anchor, unless the node is held on that mask already.
func (c *collector) anchor(node uint32, mask decompose.Mask, source uint32) {
	if bit := uint8(1) << mask; c.held[node]&bit == 0 {
		c.held[node] |= bit
		c.o.Anchors = append(c.o.Anchors, decompose.Anchor{Node: node, Mask: mask, Source: source})
	}
}

// wish adds a wish, once for each node and mask.
func (c *collector) wish(node uint32, mask decompose.Mask, source uint32) {
	if bit := uint8(1) << (wished + mask); c.held[node]&bit == 0 {
		c.held[node] |= bit
		c.o.Wishes = append(c.o.Wishes, decompose.Anchor{Node: node, Mask: mask, Source: source})
	}
}

func (c *collector) markers() uint32 { return uint32(len(c.s.layer.looks)) }
func (c *collector) nodes() uint32   { return c.markers() + uint32(len(c.s.layer.masks)) }
func (c *collector) made() uint32    { return c.nodes() + uint32(c.v.Nodes()) }

// masked holds shapes that arrive on a mask where they are, unless the deck says to do them anew.
func (c *collector) masked() {
	if c.v.Rules().Redo {
		return
	}
	first := c.nodes()
	c.v.Masked(func(node uint32, mask decompose.Mask) { c.anchor(node, mask, first+node) })
}

// take goes through what was hit.
func (c *collector) take() {
	st := &c.s.layer
	f := c.s.file()
	markers := c.markers()
	if c.v.HitCount() > 0 { // markers may be as many as figures, and nearly all they touch becomes an anchor
		room := arena.Make[decompose.Anchor](0, len(c.o.Anchors)+min(c.v.HitCount(), c.v.Nodes()))
		c.o.Anchors = append(room, c.o.Anchors...)
	}
	c.v.Hits(func(probe, node uint32) {
		if probe >= markers {
			st.marked[probe-markers] = true
			c.anchor(node, st.masks[probe-markers], probe)
			return
		}
		switch l := &st.looks[probe]; l.kind {
		case kindAnchor:
			st.hit[probe] = true
			c.anchor(node, f.Anchors[l.entry].Mask, probe)
		case kindWish:
			st.hit[probe] = true
			c.wish(node, f.Anchors[l.entry].Mask, probe)
		case kindLabel:
			st.hit[probe] = true
			c.anchor(node, l.mask, probe)
		default:
			st.end[probe] = true
			c.ends = append(c.ends, end{probe, int32(c.v.TopOf(node)), node})
		}
	})
}

// twos makes ties and waivers of the places that both ends have hit.
func (c *collector) twos() {
	st := &c.s.layer
	f := c.s.file()
	slices.SortFunc(c.ends, func(a, b end) int {
		return cmp.Or(cmp.Compare(a.probe, b.probe), cmp.Compare(a.top, b.top), cmp.Compare(a.node, b.node))
	})
	c.ends = slices.Compact(c.ends)
	// What an end has hit in a top.
	of := func(probe uint32, top int32) []end {
		from, _ := slices.BinarySearchFunc(c.ends, end{probe: probe, top: top}, func(e, want end) int {
			return cmp.Or(cmp.Compare(e.probe, want.probe), cmp.Compare(e.top, want.top))
		})
		to := from
		for to < len(c.ends) && c.ends[to].probe == probe && c.ends[to].top == top {
			to++
		}
		return c.ends[from:to]
	}
	for i := 0; i < len(c.ends); {
		p := c.ends[i].probe
		a := of(p, c.ends[i].top)
		i += len(a)
		if c.second(int(p)) {
			continue
		}
		b := of(p+1, a[0].top)
		if len(b) == 0 {
			continue
		}
		st.hit[p] = true
		l := &st.looks[p]
		if l.kind == kindTie {
			e := &f.Ties[l.entry]
			c.o.Ties = append(c.o.Ties, decompose.Tie{A: c.one(a), B: c.one(b), Opposite: e.Opposite, Source: p})
		} else {
			c.waive(l.entry, a, b)
		}
	}
}

// one chooses what an end of a tie means where it hits several nodes, the pieces of a stitch where they overlap: the piece on A.
func (c *collector) one(ends []end) uint32 {
	for _, e := range ends {
		if c.held[e.node]&1 != 0 {
			return e.node
		}
	}
	return ends[0].node
}

// waive accepts the near pairs between what the ends of a waiver hit.
func (c *collector) waive(entry int32, a, b []end) {
	e := &c.s.file().Waivers[entry]
	some := false
	for _, i := range a {
		for _, k := range b {
			if i.node != k.node && c.v.NearPair(i.node, k.node) {
				some = true
				c.o.Waivers = append(c.o.Waivers, decompose.Waiver{A: i.node, B: k.node, Name: e.Name, Reason: e.Reason})
			}
		}
	}
	if !some {
		c.v.Warn("%s accepts nothing: the shapes at %s and %s are no near pair", c.s.file().Cite("waiver", e.Name, e.Index, e.Line),
			c.v.Place(a[0].node), c.v.Place(b[0].node))
	}
}

// alike ties each figure of the cells that are to come out alike to itself.
func (c *collector) alike() error {
	f := c.s.file()
	if c.s.alike == nil {
		c.s.alike = make([]bool, len(f.Alike))
	}
	for i := range f.Alike {
		last := decompose.Tie{}
		found, err := c.v.Alike(f.Alike[i].Cell, func(a, b uint32) {
			t := decompose.Tie{A: a, B: b, Source: c.markers() + uint32(i)}
			if t != last { // figures of one shape follow each other
				c.o.Ties = append(c.o.Ties, t)
			}
			last = t
		})
		if err != nil {
			return err
		}
		c.s.alike[i] = c.s.alike[i] || found
	}
	return nil
}

// freeze holds shapes on the masks that are already made, and keeps all others off them. Where both are made, new shapes are left free:
// either mask is wrong.
func (c *collector) freeze() {
	frozen := c.v.Frozen()
	if frozen == [2]bool{} {
		return
	}
	made := decompose.A
	if frozen[decompose.B] {
		made = decompose.B
	}
	both := frozen == [2]bool{true, true}
	before := len(c.o.Anchors)
	c.v.Recalled(func(node uint32, was uint8, cut bool) {
		switch {
		case was != decompose.NoMemory && (both || decompose.Mask(was-1) == made):
			c.anchor(node, decompose.Mask(was-1), c.made()+node)
		case !both:
			c.anchor(node, made.Other(), c.made()+node)
		}
	})
	c.o.Holds = len(c.o.Anchors) - before
}

// anchorText words where an anchor comes from.
func (c *collector) anchorText(a decompose.Anchor) string {
	st := &c.s.layer
	switch {
	case a.Source < c.markers():
		l := &st.looks[a.Source]
		p := &st.probes[a.Source]
		if l.kind == kindLabel {
			return fmt.Sprintf("the label %s at %s in %s", a.Mask, c.v.BoxText(p.Box), c.v.TopName(p.Top))
		}
		e := &c.s.File.Anchors[l.entry]
		return fmt.Sprintf("%s holds the shape at %s on %s", c.s.File.Cite("anchor", e.Name, e.Index, e.Line), c.v.Place(a.Node), a.Mask)
	case a.Source < c.nodes():
		return fmt.Sprintf("the marker for %s at %s", a.Mask, c.v.MarkerPlace(a.Source-c.markers()))
	}
	if a.Source >= c.made() {
		frozen := c.v.Frozen()
		if frozen[a.Mask] {
			return fmt.Sprintf("mask %s is frozen, and has the shape at %s in the baseline", a.Mask, c.v.Place(a.Node))
		}
		return fmt.Sprintf("mask %s is frozen, and has not the shape at %s in the baseline", a.Mask.Other(), c.v.Place(a.Node))
	}
	return fmt.Sprintf("the shape at %s arrived on %s", c.v.Place(a.Node), a.Mask)
}

// tieText words where a tie comes from.
func (c *collector) tieText(t decompose.Tie) string {
	f := c.s.File
	between := fmt.Sprintf("the shapes at %s and %s", c.v.Place(t.A), c.v.Place(t.B))
	if t.Source >= c.markers() {
		e := &f.Alike[t.Source-c.markers()]
		return fmt.Sprintf("%s (alike) holds %s on one mask", f.Cite("anchor", e.Name, e.Index, e.Line), between)
	}
	e := &f.Ties[c.s.layer.looks[t.Source].entry]
	masks := "the same mask"
	if t.Opposite {
		masks = "opposite masks"
	}
	return fmt.Sprintf("%s holds %s on %s", f.Cite("tie", e.Name, e.Index, e.Line), between, masks)
}

// missed looks for entries of the file that have hit no shape. They are an error, or a warning where a single structure is taken.
func (c *collector) missed(layer int) error {
	f := c.s.file()
	found := map[kind][]bool{
		kindAnchor: make([]bool, len(f.Anchors)),
		kindTie:    make([]bool, len(f.Ties)),
		kindWaiver: make([]bool, len(f.Waivers)),
	}
	st := &c.s.layer
	for p := 0; p < len(st.looks); p++ {
		switch l := &st.looks[p]; l.kind {
		case kindAnchor, kindWish:
			found[kindAnchor][l.entry] = found[kindAnchor][l.entry] || st.hit[p]
		case kindTie, kindWaiver:
			found[l.kind][l.entry] = found[l.kind][l.entry] || st.hit[p]
		}
	}
	for i := range f.Anchors {
		e := &f.Anchors[i]
		if e.Layer == layer && !found[kindAnchor][i] {
			k := kindAnchor
			if e.Wish {
				k = kindWish
			}
			if err := c.miss(f.Cite("anchor", e.Name, e.Index, e.Line), e.Cell, look{kind: k, entry: int32(i)}); err != nil {
				return err
			}
		}
	}
	for i := range f.Ties {
		if e := &f.Ties[i]; e.Layer == layer && !found[kindTie][i] {
			if err := c.miss(f.Cite("tie", e.Name, e.Index, e.Line), e.Cell, look{kind: kindTie, entry: int32(i)}); err != nil {
				return err
			}
		}
	}
	for i := range f.Waivers {
		if e := &f.Waivers[i]; e.Layer == layer && !found[kindWaiver][i] {
			if err := c.miss(f.Cite("waiver", e.Name, e.Index, e.Line), e.Cell, look{kind: kindWaiver, entry: int32(i)}); err != nil {
				return err
			}
		}
	}
	if !c.v.Last() {
		return nil
	}
	for i := range f.Alike {
		if e := &f.Alike[i]; !c.s.alike[i] {
			if err := c.miss(f.Cite("anchor", e.Name, e.Index, e.Line), e.Cell, look{kind: kindLabel}); err != nil {
				return err
			}
		}
	}
	return nil
}

// miss words an entry that has hit no shape.
func (c *collector) miss(cite, cell string, l look) error {
	why := ""
	switch p := c.s.cells[cell]; {
	case cell != "" && l.kind == kindLabel:
		why = fmt.Sprintf("no placement of structure %s has a figure of the deck's layers", cell)
	case cell != "" && !p.known:
		why = fmt.Sprintf("structure %s is not in the layout", cell)
	case cell != "" && len(p.at) == 0:
		why = fmt.Sprintf("structure %s is placed nowhere", cell)
	default:
		why = fmt.Sprintf("no shape of layer %s is there", c.v.Rules().Name)
		if near := c.v.Nearest(c.lost(l)); near != "" {
			why += "; " + near
		}
	}
	if only := c.v.Top(); only != "" {
		c.v.Warn("%s hits no shape under %s: %s", cite, only, why)
		return nil
	}
	return &decompose.OrderError{Msg: fmt.Sprintf("%s hits no shape: %s; correct the entry or take it out", cite, why)}
}

// lost gives the probes of an entry that have hit nothing; of a tie or waiver, those of the places where the other end has hit, if
// there are any.
func (c *collector) lost(l look) []decompose.Probe {
	st := &c.s.layer
	var all, half []decompose.Probe
	for p := range st.looks {
		if st.looks[p].kind != l.kind || st.looks[p].entry != l.entry || st.hit[p] || st.end[p] {
			continue
		}
		all = append(all, st.probes[p])
		if l.kind != kindTie && l.kind != kindWaiver {
			continue
		}
		mate := p + 1
		if c.second(p) {
			mate = p - 1
		}
		if st.end[mate] {
			half = append(half, st.probes[p])
		}
	}
	if half != nil {
		return half
	}
	return all
}

// second tells whether a probe of a tie or waiver is the second of its two.
func (c *collector) second(p int) bool { return c.s.layer.looks[p].second }

// warn tells of markers and labels that have hit no shape.
func (c *collector) warn() {
	st := &c.s.layer
	name := c.v.Rules().Name
	count, first := 0, 0
	for m, hit := range st.marked {
		if !hit {
			if count++; count == 1 {
				first = m
			}
		}
	}
	if count > 0 {
		c.v.Warn("layer %s: %s no shape, the first at %s", name, times(count, "marker touches", "markers touch"), c.v.MarkerPlace(uint32(first)))
	}
	count = 0
	for p := range st.looks {
		if st.looks[p].kind == kindLabel && !st.hit[p] {
			if count++; count == 1 {
				first = p
			}
		}
	}
	if count > 0 {
		p := &st.probes[first]
		c.v.Warn("layer %s: %s no shape, the first at %s in %s", name, times(count, "label touches", "labels touch"), c.v.BoxText(p.Box), c.v.TopName(p.Top))
	}
	if st.other > 0 {
		o := &st.firstOther
		c.v.Warn("layer %s: %s neither A nor B and anchors nothing, the first is %q at %s in %s", name, times(st.other, "anchor label says", "anchor labels say"),
			strings.ToValidUTF8(o.text, "?"), c.v.BoxText(point(o.at)), c.v.TopName(o.top))
	}
}

// times words a number of things that do something.
func times(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}
