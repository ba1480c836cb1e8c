package decompose

import (
	"math"
	"slices"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// View is what package anchor sees of a deck layer: the tops and their cells before the layer is flattened, and once its shapes are
// known, the nodes and what looks for them has hit.
type View struct {
	run    *Run
	layer  int
	layout *layout
}

// Rules gives the rules of the layer.
func (v *View) Rules() *LayerRules { return &v.run.rules.Layers[v.layer] }

// AllRules gives the rules of the run.
func (v *View) AllRules() *Rules { return v.run.rules }

// Last tells whether the layer is the last one of the deck.
func (v *View) Last() bool { return v.layer == len(v.run.rules.Layers)-1 }

// Top gives the structure that alone is decomposed; "": all tops are.
func (v *View) Top() string { return v.run.opt.Top }

// Tops is the number of tops.
func (v *View) Tops() int { return len(v.run.h.tops) }

// TopName gives the name of a top.
func (v *View) TopName(top int) string { return v.run.h.name(v.run.h.tops[top]) }

// Warn adds a remark for the user, one line.
func (v *View) Warn(format string, args ...any) { v.run.warn(format, args...) }

// PlacedCell is one placement of a cell under a top.
type PlacedCell struct {
	Top int
	At  gds.Transform
}

// Placements gives every placement of a cell and of its variants (NAME$2, NAME$2$3) under the tops, in the order of the hierarchy. A
// top is a placement of itself. known is false where no structure of the stream is that cell or a variant of it.
func (v *View) Placements(cell string) (at []PlacedCell, known bool, err error) {
	h := v.run.h
	member, known := h.family(cell)
	if !known {
		return nil, false, nil
	}
	count := h.countUnder(func(s int32) uint64 { return uint64(boolInt(member[s])) })
	if err := h.countable(count, "placements of "+cell); err != nil {
		return nil, true, err
	}
	for top := range h.tops {
		h.each(top, count, func(s int32, placed gds.Transform) {
			if member[s] {
				at = append(at, PlacedCell{top, placed})
			}
		})
	}
	return at, true, nil
}

// Labels calls fn for every label of the layer's label layer, as placed: its point in half database units of the top, and its text.
func (v *View) Labels(fn func(top int, at Spot, text string)) error {
	if v.Rules().AnchorLabel == nil {
		return nil
	}
	lib := v.run.lib
	class := v.run.classes.interest.Labels[*v.Rules().AnchorLabel]
	count := v.run.h.countUnder(func(s int32) (n uint64) {
		for i := lib.Structures[s].FirstLabel; i < lib.Structures[s].EndLabel; i++ {
			n += uint64(boolInt(lib.Labels[i].Class == class))
		}
		return n
	})
	if err := v.run.h.countable(count, "labels"); err != nil {
		return err
	}
	for top := range v.run.h.tops {
		v.run.h.each(top, count, func(s int32, at gds.Transform) {
			for i := lib.Structures[s].FirstLabel; i < lib.Structures[s].EndLabel; i++ {
				if l := &lib.Labels[i]; l.Class == class {
					fn(top, placeHalf(at, Spot{2 * int64(l.At.X), 2 * int64(l.At.Y)}), l.Text)
				}
			}
		})
	}
	return nil
}

// placeHalf places a point in half units; under an odd angle or a magnification it is rounded to the nearest half unit.
func placeHalf(at gds.Transform, p Spot) Spot {
	if at.Rigid() {
		x, y := at.Orientation.Apply(p.X, p.Y)
		return Spot{2*at.X + x, 2*at.Y + y}
	}
	x, y := at.ApplyFloat(float64(p.X)/2, float64(p.Y)/2)
	// A place outside the plane touches nothing there; it is kept at its rim.
	const rim = 1<<32 + 4
	round := func(v float64) int64 { return int64(math.RoundToEven(2 * min(max(v, -rim/2), rim/2))) }
	return Spot{round(x), round(y)}
}

// ProbeAt gives the probe of a box in a cell as placed; the box is in half database units of the cell.
func (p PlacedCell) ProbeAt(b Box) Probe {
	corners := [4]Spot{{b.X1, b.Y1}, {b.X2, b.Y1}, {b.X2, b.Y2}, {b.X1, b.Y2}}
	out := Probe{Top: p.Top, Box: emptyBox}
	var points [4]geom.Point
	for i, c := range corners {
		c = placeHalf(p.At, c)
		points[i] = geom.Point(c)
		out.Box = out.Box.join(Box{c.X, c.Y, c.X, c.Y})
	}
	if !p.At.Rigid() && !geom.IsManhattan(points[:]) {
		out.Outline = &points
	}
	return out
}

// Nodes is the number of nodes: shapes, and pieces of shapes that arrived stitched.
func (v *View) Nodes() int { return v.layout.nodes }

// Markers is the number of flat figures of the marker layers.
func (v *View) Markers() int {
	if m := v.layout.look.markers; m != nil {
		return int(m.total)
	}
	return 0
}

// Hits tells which probes (by their place in the list) and, behind them, which markers touch which nodes, in an order that depends on
// the geometry alone; a hit may be told more than once.
func (v *View) Hits(fn func(probe, node uint32)) {
	node := v.layout.nodeOf.Data
	for _, h := range v.layout.hits {
		fn(h.probe, node[h.figure])
	}
}

// HitCount is how often Hits calls its function.
func (v *View) HitCount() int { return len(v.layout.hits) }

// MarkerMasks gives the mask of each marker.
func (v *View) MarkerMasks() []Mask {
	m := v.layout.look.markers
	if m == nil {
		return nil
	}
	out := make([]Mask, m.total)
	for top := range m.h.tops {
		m.visit(top, func(s int32, _ placement, _ bool, first uint32) {
			m.ownFigures(s, func(k, figure uint32) {
				if m.sel.tag[m.lib.Figures[figure].Class] == onB {
					out[first+k] = B
				}
			})
		})
	}
	return out
}

// MarkerPlace words where a marker is.
func (v *View) MarkerPlace(marker uint32) string {
	m := v.layout.look.markers
	for top := range m.h.tops {
		if first := m.first[top]; uint64(marker) < first || uint64(marker) >= first+m.all[m.h.tops[top]] {
			continue
		}
		box := emptyBox
		m.visit(top, func(s int32, at placement, placed bool, first uint32) {
			if marker < first || marker >= first+m.own[s] {
				return
			}
			m.ownFigures(s, func(k, figure uint32) {
				switch {
				case first+k != marker:
				case placed:
					box = m.figureBox(figure, at)
				default:
					if odd := v.layout.look.odd[top].find(marker); odd != nil {
						box = odd.form.box
					}
				}
			})
		})
		return v.boxText(v.layout.half(box)) + " in " + v.TopName(top)
	}
	return ""
}

// Masked calls fn for each node with a figure that arrived on a mask, in ascending order.
func (v *View) Masked(fn func(node uint32, mask Mask)) {
	l := v.layout
	if l.tags == nil {
		return
	}
	on := make([]uint8, l.nodes)
	for o, t := range l.tags.Data {
		switch tag(t) {
		case onA:
			on[l.nodeOf.Data[o]] |= 1
		case onB:
			on[l.nodeOf.Data[o]] |= 2
		}
	}
	for n, m := range on {
		if m&1 != 0 {
			fn(uint32(n), A)
		}
		if m&2 != 0 {
			fn(uint32(n), B)
		}
	}
}

// NearPair tells whether two nodes are a near pair.
func (v *View) NearPair(a, b uint32) bool {
	list := v.layout.near.of(min(a, b))
	_, found := slices.BinarySearchFunc(list, max(a, b), func(e, n uint32) int { return int(e>>1) - int(n) })
	return found
}

// TopOf gives the top that a node lies in.
func (v *View) TopOf(node uint32) int { return v.layout.topOf(node) }

// Place words where a node is, in the deck's unit.
func (v *View) Place(node uint32) string {
	l := v.layout
	return v.boxText(l.half(l.boxes()[node])) + " in " + l.flat.h.name(l.flat.h.tops[l.topOf(node)])
}

// BoxText words a box in half database units in the deck's unit: "(120, 340) to (150, 400) nm", or "(120, 340) nm" for a point.
func (v *View) BoxText(b Box) string { return v.boxText(b) }

func (v *View) boxText(b Box) string {
	r := v.run.rules
	text := "(" + r.Number(float64(b.X1)/2) + ", " + r.Number(float64(b.Y1)/2) + ")"
	if b.X1 != b.X2 || b.Y1 != b.Y2 {
		text += " to (" + r.Number(float64(b.X2)/2) + ", " + r.Number(float64(b.Y2)/2) + ")"
	}
	return text + " " + r.Unit
}

// mostMeasured bounds how many probes and figures are measured against each other for a message.
const mostMeasured = 1 << 28

// Nearest words which shape is nearest to some probes, and how far from which of them; "" where no top of theirs has a shape.
func (v *View) Nearest(probes []Probe) string {
	l := v.layout
	figures := 0
	for top := range l.flat.h.tops {
		figures += int(l.flat.all[l.flat.h.tops[top]])
	}
	var all []Probe
	for _, p := range probes {
		from, to := p.Top, p.Top+1
		if p.Top == AnyTop {
			from, to = 0, len(l.flat.h.tops)
		}
		for top := from; top < to; top++ {
			p.Top = top
			all = append(all, p)
		}
	}
	probes = all
	if most := mostMeasured/max(figures, 1) + 1; len(probes) > most {
		probes = probes[:most]
	}
	best, from := math.Inf(1), Probe{}
	node := uint32(0)
	for top := range l.flat.h.tops {
		var here []int
		parts := make([]geom.Parts, len(probes))
		for i := range probes {
			if probes[i].Top == top {
				here = append(here, i)
				parts[i] = l.look.parts(&probes[i])
			}
		}
		if here == nil {
			continue
		}
		l.eachFigure(top, func(uint32) bool { return true }, func(o, figure uint32, at placement, odd *oddFigure) {
			box := Box{}
			if odd != nil {
				box = odd.form.box
			} else {
				box = l.flat.figureBox(figure, at)
			}
			var shape geom.Parts
			for _, i := range here {
				b := l.work(probes[i].Box)
				dx, dy := geom.RectGap(geom.Rect(box), geom.Rect(b))
				if low := float64(dx)*float64(dx) + float64(dy)*float64(dy); low >= best {
					continue
				}
				if shape.Rects == nil && shape.Polygons == nil {
					if odd != nil {
						l.odd[top].forms.place(&odd.form, placement{}, &shape)
					} else {
						l.flat.parts(figure, at, &shape)
					}
				}
				if _, _, sq := geom.Closest(parts[i], shape); sq < best {
					best, from, node = sq, probes[i], l.nodeOf.Data[o]
				}
			}
		})
	}
	if math.IsInf(best, 1) {
		return ""
	}
	distance := math.Sqrt(best) / float64(l.flat.forms.scale)
	return "the shape nearest to " + v.boxText(from.Box) + " in " + v.TopName(from.Top) + " is that at " + v.boxText(l.half(l.boxes()[node])) +
		", " + v.run.rules.Length(math.Round(100*distance)/100) + " away"
}

// work turns half database units into work units.
func (l *layout) work(b Box) Box {
	if l.flat.forms.scale == 2 {
		return b
	}
	return Box{b.X1 >> 1, b.Y1 >> 1, b.X2 >> 1, b.Y2 >> 1}
}

// parts gives a probe as geometry in work units.
func (k *lookout) parts(p *Probe) geom.Parts {
	if made := k.polygon(p); made != nil {
		return geom.Parts{Polygons: []geom.Placed{{Polygon: made}}}
	}
	b := p.Box
	if k.scale == 1 {
		b = Box{b.X1 >> 1, b.Y1 >> 1, b.X2 >> 1, b.Y2 >> 1}
	}
	return geom.Parts{Rects: []geom.Rect{geom.Rect(b)}}
}
