package decompose

import (
	"cmp"
	"context"
	"fmt"
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file compares two results of one layout, shape by shape and by place: what moved to the other mask, what has another extent,
// what is new, what is gone. It is the memory of a baseline, looked at from both sides.

// ChangeKind says how a shape differs.
type ChangeKind uint8

// The kinds of changes.
const (
	ChangeMoved      ChangeKind = iota // the same extent, on the other mask
	ChangeRestitched                   // the same extent, cut otherwise
	ChangeReshaped                     // another extent where a shape was; it may have moved as well
	ChangeNew                          // where nothing was
	ChangeGone                         // where nothing is now
)

// String gives the name that the report uses.
func (k ChangeKind) String() string {
	return [...]string{"moved", "restitched", "reshaped", "new", "gone"}[k]
}

// ChangedShape is a shape that differs.
type ChangedShape struct {
	Kind ChangeKind
	Top  string
	Box  Box    // half database units of the top
	Cell string // lowest cell that holds the shape, in the later layout; of a shape that is gone, in the earlier one
	// Place is the shape's box in the coordinates of that cell, half database units; where Placed is false, the cell is below a
	// magnification or an odd angle, and it is in those of the cell above.
	Place  Box
	Placed bool
	Was    string // "A", "B", "A+B" of a stitched shape; "" where it was not there
	Now    string
	Moved  bool // it is on one mask, and the other one covered more of its area
}

// LayerComparison is how one deck layer differs.
type LayerComparison struct {
	Name           string
	Earlier, Later int64 // shapes on masks
	Same           int64 // of the later ones: no change
	Moved          int64 // shapes with Moved, reshaped ones included
	Count          [5]int64
	Changes        []ChangedShape // by top and place, those that are gone last
}

// ComparisonResult is how two results differ.
type ComparisonResult struct {
	Tops        []string // of the later layout, by name
	EarlierTops []string
	Layers      []LayerComparison
	Warnings    []string
}

// Same tells whether nothing differs.
func (c *ComparisonResult) Same() bool {
	for i := range c.Layers {
		if len(c.Layers[i].Changes) > 0 {
			return false
		}
	}
	return true
}

// Compare compares two layouts with masks. Both must have been indexed with the deck's Interest; the names are those of their files, for
// messages. It is an *OrderError where the two have no top in common, or other database units.
func Compare(ctx context.Context, earlier, later *gds.Library, earlierName, laterName string, rules *Rules, opt Options) (*ComparisonResult, error) {
	c, err := newClasses(rules)
	if err != nil {
		return nil, err
	}
	before, err := newHierarchy(earlier, "")
	if err != nil {
		return nil, fmt.Errorf("%s: %w", earlierName, err)
	}
	now, err := newHierarchy(later, "")
	if err != nil {
		return nil, fmt.Errorf("%s: %w", laterName, err)
	}
	out := &ComparisonResult{}
	for _, i := range now.byName {
		out.Tops = append(out.Tops, now.name(now.tops[i]))
	}
	for _, i := range before.byName {
		out.EarlierTops = append(out.EarlierTops, before.name(before.tops[i]))
	}
	forth := &compared{ctx: ctx, classes: c, opt: &opt, h: now, name: laterName}
	back := &compared{ctx: ctx, classes: c, opt: &opt, h: before, name: earlierName}
	if forth.other, err = newBaseline(now, earlierName, earlier, ""); err != nil {
		return nil, err
	}
	if back.other, err = newBaseline(before, laterName, later, ""); err != nil {
		return nil, err
	}
	for i := range rules.Layers {
		res := LayerComparison{Name: rules.Layers[i].Name}
		if err := forth.layer(i, rules, &res, false); err != nil {
			return nil, err
		}
		if err := back.layer(i, rules, &res, true); err != nil {
			return nil, err
		}
		out.Layers = append(out.Layers, res)
		for _, side := range [2]*compared{back, forth} {
			if n := side.left(i); n > 0 && !rules.Layers[i].KeepDrawn {
				out.Warnings = append(out.Warnings, fmt.Sprintf("layer %s: %s has %d figures on no mask; they are not compared", res.Name, side.name, n))
			}
		}
	}
	return out, nil
}

// compared is one of two layouts that are compared with each other.
type compared struct {
	ctx     context.Context
	classes *classes
	opt     *Options
	h       *hierarchy
	name    string
	other   *Baseline
}

// left counts the flat drawn figures of a deck layer.
func (c *compared) left(i int) uint64 {
	sel := c.classes.selectLayer(i)
	n := uint64(0)
	for _, s := range c.h.bottom {
		st := &c.h.lib.Structures[s]
		for f := st.FirstFigure; f < st.EndFigure; f++ {
			if sel.tag[c.h.lib.Figures[f].Class] == drawn {
				n = saturatingAdd(n, c.h.placed[s])
			}
		}
	}
	return n
}

// layer compares one deck layer; with gone, only what the other layout has not is looked for.
func (c *compared) layer(i int, rules *Rules, res *LayerComparison, gone bool) error {
	// Shapes are what hangs together on both masks; spacings do not matter.
	plain := rules.Layers[i]
	plain.Spacing, plain.AnyMask, plain.ByFacing, plain.Stitch, plain.Redo, plain.SameShapeReport = 1, 0, nil, nil, true, false
	want := &sought{baseline: c.other, wantSame: !gone}
	want.masks[A], _ = c.classes.selectRole(i, roleMaskA, onA)
	want.masks[B], _ = c.classes.selectRole(i, roleMaskB, onB)
	both := *want.masks[A]
	for k, t := range want.masks[B].tag {
		if t != none {
			both.tag[k] = t
		}
	}
	l, err := newLayout(c.ctx, c.h, &both, &plain, i, want, c.opt)
	if err != nil {
		return err
	}
	defer l.free()
	on := make([]uint8, l.nodes) // bit 0: A, bit 1: B
	if l.tags != nil {
		for o, t := range l.tags.Data {
			on[l.nodeOf.Data[o]] |= 1 << (tag(t) - onA)
		}
	}
	d := &changes{compared: c, l: l, on: on}
	if gone {
		res.Earlier = int64(l.shapes)
		return d.gone(res)
	}
	res.Later = int64(l.shapes)
	return d.changed(res)
}

// changes looks at the shapes of one layer.
type changes struct {
	*compared
	l  *layout
	on []uint8
}

// masksText words a set of masks.
func masksText(bits uint8) string { return [...]string{"", "A", "B", "A+B"}[bits&3] }

// changed lists what differs in the later layout.
func (d *changes) changed(res *LayerComparison) error {
	m := d.l.memory
	stitched := map[uint32]*stitchedParts{}
	for n, r := range m.nodes {
		if r&recalledSame != 0 && (r&recalledCut != 0 || d.on[n] == 3) {
			stitched[uint32(n)] = &stitchedParts{}
		}
	}
	d.gather(stitched)
	var list []ChangedShape
	var nodes []uint32
	for n, r := range m.nodes {
		was := uint8(0)
		if r&recalledSome != 0 {
			was = m.was(uint32(n), r)
		}
		s := ChangedShape{Was: masksText(was), Now: masksText(d.on[n])}
		s.Moved = r&recalledCut == 0 && d.on[n] != 3 && r&recalledMask != 0 && uint8(r&recalledMask) != d.on[n]
		switch {
		case r&recalledSome == 0:
			s.Kind = ChangeNew
		case r&recalledSame == 0:
			s.Kind = ChangeReshaped
		case s.Moved:
			s.Kind = ChangeMoved
		case was != d.on[n], stitched[uint32(n)] != nil && !stitched[uint32(n)].same():
			s.Kind = ChangeRestitched
		default:
			res.Same++
			continue
		}
		if s.Moved {
			res.Moved++
		}
		list = append(list, s)
		nodes = append(nodes, uint32(n))
	}
	return d.place(res, list, nodes)
}

// gone lists what is only in the earlier layout.
func (d *changes) gone(res *LayerComparison) error {
	var list []ChangedShape
	var nodes []uint32
	for n, r := range d.l.memory.nodes {
		if r&recalledSome == 0 {
			list = append(list, ChangedShape{Kind: ChangeGone, Was: masksText(d.on[n])})
			nodes = append(nodes, uint32(n))
		}
	}
	return d.place(res, list, nodes)
}

// place says where the shapes are, and adds them to the result by place.
func (d *changes) place(res *LayerComparison, list []ChangedShape, nodes []uint32) error {
	if len(list) == 0 {
		return d.ctx.Err()
	}
	l := d.l
	index := make([]int32, l.nodes) // 1 + place in list
	for i, n := range nodes {
		index[n] = int32(i + 1)
	}
	type span struct{ first, last uint32 }
	spans := make([]span, len(list))
	seen := make([]bool, len(list))
	for o, n := range l.nodeOf.Data {
		if i := index[n] - 1; i >= 0 {
			if !seen[i] {
				spans[i].first, seen[i] = uint32(o), true
			}
			spans[i].last = uint32(o)
		}
	}
	boxes := l.boxes()
	fr := newFrames(l.flat)
	for i, n := range nodes {
		s := &list[i]
		top := l.topOf(n)
		at := fr.of(top, spans[i].first, spans[i].last)
		s.Top, s.Cell, s.Placed = l.flat.h.name(l.flat.h.tops[top]), l.flat.h.name(at.structure), at.placed
		s.Box, s.Place = l.half(boxes[n]), l.half(at.at.inverse().applyBox(boxes[n]))
		res.Count[s.Kind]++
	}
	slices.SortStableFunc(list, func(a, b ChangedShape) int { return cmp.Or(cmp.Compare(a.Top, b.Top), compareBoxes(a.Box, b.Box)) })
	res.Changes = append(res.Changes, list...)
	return d.ctx.Err()
}

// was gives the masks that had a part of a shape.
func (m *memory) was(n uint32, r recalled) uint8 {
	if got, ok := m.covers[n]; ok {
		bits := uint8(0)
		for k := range got {
			if got[k] {
				bits |= 1 << k
			}
		}
		return bits
	}
	return uint8(r & recalledMask)
}

// stitchedParts are the parts of a shape on each mask, now and before.
type stitchedParts struct{ now, was [2]geom.Parts }

// gather finds the parts of shapes that are stitched now or were so.
func (d *changes) gather(stitched map[uint32]*stitchedParts) {
	if len(stitched) == 0 {
		return
	}
	l := d.l
	node := l.nodeOf.Data
	for top := range l.flat.h.tops {
		l.eachFigure(top, func(o uint32) bool { return stitched[node[o]] != nil }, func(o, figure uint32, at placement, odd *oddFigure) {
			p := &stitched[node[o]].now[tag(l.tags.Data[o])-onA]
			if odd != nil {
				l.odd[top].forms.place(&odd.form, placement{}, p)
			} else {
				l.flat.parts(figure, at, p)
			}
		})
	}
	of := map[uint32][]uint32{} // by ordinal of the baseline: shapes over it
	for _, lap := range l.memory.laps {
		if stitched[lap.shape] != nil {
			of[lap.figure] = append(of[lap.figure], lap.shape)
		}
	}
	e := l.memory.e
	for m, f := range e.masks {
		for top := range f.h.tops {
			f.visit(top, func(s int32, at placement, placed bool, first uint32) {
				f.ownFigures(s, func(k, figure uint32) {
					for _, n := range of[first+k] {
						p := &stitched[n].was[m]
						if placed {
							f.parts(figure, at, p)
						} else if odd := e.odd[m][top].find(first + k); odd != nil {
							e.odd[m][top].forms.place(&odd.form, placement{}, p)
						}
					}
				})
			})
		}
	}
}

// same tells whether each mask has the same part now as before.
func (s *stitchedParts) same() bool {
	var a areas
	for m := range s.now {
		together := a.of(geom.Parts{Rects: join(s.now[m].Rects, s.was[m].Rects), Polygons: join(s.now[m].Polygons, s.was[m].Polygons)})
		if a.of(s.now[m]).compare(together) != 0 || a.of(s.was[m]).compare(together) != 0 {
			return false
		}
	}
	return true
}
