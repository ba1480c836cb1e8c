package verify

import (
	"fmt"
	"math"
	"slices"

	"maskpair/anchor"
	"maskpair/decompose"
	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file finds what orders hit, and says whether they are held. A place of the anchor file or a label is a probe: a figure
// without a mask that goes through the search with the others; what it touches is under the order. Markers are such figures by
// themselves.

// entryKind says what kind of order something is.
type entryKind uint8

const (
	entryAnchor entryKind = iota // an [[anchor]], wish or not
	entryTie
	entryWaiver
	entryAlike
	entryMarker // a figure of a marker layer
	entryLabel  // a label
	entryMasked // a figure that arrived on its mask
)

// orderBook is the anchor file, with what was found of it in all layers and tops.
type orderBook struct {
	file       *anchor.File
	alikeFound []bool // by entry
	families   map[string]*family
}

func newOrderBook(file *anchor.File) *orderBook {
	b := &orderBook{file: file, families: map[string]*family{}}
	if file == nil {
		b.file = &anchor.File{}
	}
	b.alikeFound = make([]bool, len(b.file.Alike))
	return b
}

// family gives a cell with its variants in the masked stream.
func (b *orderBook) family(v *verifier, cell string) *family {
	f := b.families[cell]
	if f == nil {
		f = newFamily(v.masked.tree, cell)
		b.families[cell] = f
	}
	return f
}

// complete looks for alike entries that met no figure in any layer.
func (b *orderBook) complete(v *verifier) error {
	for i, found := range b.alikeFound {
		if found {
			continue
		}
		e := &b.file.Alike[i]
		why := "has no figure of the deck's layers"
		if !b.family(v, e.Cell).some {
			why = "is not in the stream"
		}
		return &OrderError{Msg: fmt.Sprintf("%s: structure %s %s, so that the order hits no shape; correct the name or take the entry out",
			b.file.Cite("anchor", e.Name, e.Index, e.Line), gds.Printable(e.Cell), why)}
	}
	return nil
}

// probe is a place to look at.
type probe struct {
	kind  entryKind
	entry int32
	frame int32 // the two probes of a tie or waiver in one placement share it, and stand one behind the other
	mask  tag   // of a label
}

// probes appends the probes of a top to the flat figures: the anchor file's entries for this layer, and the layer's labels.
func (j *judge) probes(top int32) error {
	j.probeFirst = append(j.probeFirst, uint32(len(j.probeList)))
	j.probeFig = append(j.probeFig, uint32(len(j.flat.figs)))
	file := j.v.orders.file
	frame := int32(0)
	each := func(layer int, cell string, look func(at gds.Transform)) error {
		if layer != j.number {
			return nil
		}
		if cell == "" {
			look(gds.Identity())
			frame++
			return nil
		}
		frames, err := j.v.orders.family(j.v, cell).frames(j.v.masked.tree, top)
		for _, at := range frames {
			look(at)
			frame++
		}
		return err
	}
	for i := range file.Anchors {
		e := &file.Anchors[i]
		err := each(e.Layer, e.Cell, func(at gds.Transform) {
			j.probe(probe{entryAnchor, int32(i), frame, tagNone}, geom.Rect(e.Box), at)
		})
		if err != nil {
			return err
		}
	}
	for i := range file.Ties {
		e := &file.Ties[i]
		err := each(e.Layer, e.Cell, func(at gds.Transform) {
			for _, p := range e.At {
				j.probe(probe{entryTie, int32(i), frame, tagNone}, pointRect(p), at)
			}
		})
		if err != nil {
			return err
		}
	}
	for i := range file.Waivers {
		e := &file.Waivers[i]
		err := each(e.Layer, e.Cell, func(at gds.Transform) {
			for _, p := range e.At {
				j.probe(probe{entryWaiver, int32(i), frame, tagNone}, pointRect(p), at)
			}
		})
		if err != nil {
			return err
		}
	}
	return j.labels(top)
}

// labels appends a probe for each label "A" or "B" on the layer's label layer.
func (j *judge) labels(top int32) error {
	if j.rules.AnchorLabel == nil {
		return nil
	}
	lib := j.v.masked.lib
	class := j.v.roles.interest.Labels[*j.rules.AnchorLabel]
	meant := func(l *gds.Label) bool { return l.Class == class && (l.Text == "A" || l.Text == "B") }
	if j.labelCount == nil {
		j.labelCount = j.v.masked.tree.sums(func(s int32) uint64 {
			n := uint64(0)
			for i := lib.Structures[s].FirstLabel; i < lib.Structures[s].EndLabel; i++ {
				if meant(&lib.Labels[i]) {
					n++
				}
			}
			return n
		})
	}
	if j.labelCount[top] > mostFigures {
		return &InputError{Msg: fmt.Sprintf("structure %s places %s labels; at most %d can be looked at: verify its blocks one by one",
			gds.Printable(lib.Structures[top].Name), countText(j.labelCount[top]), mostFigures)}
	}
	return j.v.masked.tree.each(top, gds.Identity(), j.labelCount, func(s int32, at gds.Transform) error {
		for i := lib.Structures[s].FirstLabel; i < lib.Structures[s].EndLabel; i++ {
			if l := &lib.Labels[i]; meant(l) {
				mask := tagA
				if l.Text == "B" {
					mask = tagB
				}
				j.probe(probe{entryLabel, -1, -1, mask}, pointRect(decompose.Spot{X: 2 * int64(l.At.X), Y: 2 * int64(l.At.Y)}), at)
			}
		}
		return nil
	})
}

func pointRect(p decompose.Spot) geom.Rect { return geom.Rect{X1: p.X, Y1: p.Y, X2: p.X, Y2: p.Y} }

// probe appends a box of a cell as placed. Under an odd angle the box is a polygon on half units; a point stays a point.
func (j *judge) probe(p probe, box geom.Rect, at gds.Transform) {
	f := j.flat
	placed := figure{tag: tagProbe, form: formRect}
	switch {
	case at.Rigid():
		placed.box = rectPlacement(at).ApplyRect(box)
	default:
		points := corners(box)
		for i, q := range points {
			x, y := at.ApplyFloat(float64(q.X)/2, float64(q.Y)/2)
			points[i] = geom.Point{X: clampHalf(2 * x), Y: clampHalf(2 * y)}
		}
		placed.box = geom.BoxOf(points)
		if made := newForm(points, geom.EvenOdd); made.polygon != nil {
			placed.box = made.box
			placed.form = f.keep(made)
		}
	}
	// What lies outside the plane meets nothing there; it is kept at its rim, for messages.
	placed.box.X1, placed.box.X2 = clampRim(placed.box.X1), clampRim(placed.box.X2)
	placed.box.Y1, placed.box.Y2 = clampRim(placed.box.Y1), clampRim(placed.box.Y2)
	f.figs = append(f.figs, placed)
	j.probeList = append(j.probeList, p)
}

// rim is beyond every coordinate of a figure in half units.
const rim = 1<<32 + 2

func clampRim(v int64) int64 { return min(max(v, -rim), rim) }

func clampHalf(v float64) int64 { return int64(math.RoundToEven(min(max(v, -rim), rim))) }

// probeOf gives the probe that a flat figure of a top is.
func (j *judge) probeOf(top int, fig uint32) *probe {
	return &j.probeList[j.probeFirst[top]+fig-j.probeFig[top]]
}

// hit says that a probe or marker touches a figure.
type hit struct{ by, fig uint32 }

// gather turns hits into claims. An entry of the file that hits nothing is an error that names the nearest shape, and so are
// orders that contradict each other.
func (j *judge) gather() error {
	j.claims = newClaims(j.unitCount())
	j.waived = map[[2]uint32]bool{}
	found := map[entryKind][]bool{
		entryAnchor: make([]bool, len(j.v.orders.file.Anchors)),
		entryTie:    make([]bool, len(j.v.orders.file.Ties)),
		entryWaiver: make([]bool, len(j.v.orders.file.Waivers)),
	}
	slices.SortFunc(j.hits, func(a, b hit) int { return compareUint32(a.by, b.by, a.fig, b.fig) })
	if j.was != nil && !j.rules.Redo {
		for i, was := range j.was {
			if was {
				if err := j.claim(uint32(i), j.flat.figs[i].tag, source{entryMasked, 0, uint32(i)}); err != nil {
					return err
				}
			}
		}
	}
	for i := 0; i < len(j.hits); {
		end := i + 1
		for end < len(j.hits) && j.hits[end].by == j.hits[i].by {
			end++
		}
		by, hits := j.hits[i].by, j.hits[i:end]
		i = end
		top := j.flat.topOf(by)
		fig := &j.flat.figs[by]
		if fig.tag != tagProbe {
			j.met[by] = true
			mask := tagA
			if fig.tag == tagMarkB {
				mask = tagB
			}
			for _, h := range hits {
				if err := j.claim(h.fig, mask, source{entryMarker, 0, by}); err != nil {
					return err
				}
			}
			continue
		}
		p := j.probeOf(top, by)
		switch p.kind {
		case entryLabel:
			j.met[by] = true
			for _, h := range hits {
				if err := j.claim(h.fig, p.mask, source{entryLabel, 0, by}); err != nil {
					return err
				}
			}
		case entryAnchor:
			found[entryAnchor][p.entry] = true
			if err := j.anchored(p, by, hits); err != nil {
				return err
			}
		case entryTie, entryWaiver:
			// The second of two probes comes right behind the first.
			if i == len(j.hits) || j.hits[i].by != by+1 || by+1 == j.flat.first[top+1] {
				continue
			}
			q := j.probeOf(top, by+1)
			if q.kind != p.kind || q.entry != p.entry || q.frame != p.frame {
				continue
			}
			end := i
			for end < len(j.hits) && j.hits[end].by == by+1 {
				end++
			}
			found[p.kind][p.entry] = true
			if err := j.two(p, by, hits, j.hits[i:end]); err != nil {
				return err
			}
			i = end
		}
	}
	if err := j.alike(); err != nil {
		return err
	}
	return j.missed(found)
}

func compareUint32(a, b, c, d uint32) int {
	switch {
	case a != b && a < b, a == b && c < d:
		return -1
	case a == b && c == d:
		return 0
	}
	return 1
}

// anchored takes an [[anchor]] of the file that hits figures.
func (j *judge) anchored(p *probe, by uint32, hits []hit) error {
	e := &j.v.orders.file.Anchors[p.entry]
	mask := tagOf(e.Mask)
	for _, h := range hits {
		if !e.Wish {
			if err := j.claim(h.fig, mask, source{entryAnchor, p.entry, by}); err != nil {
				return err
			}
			continue
		}
		key := wish{mask, j.shapeOf[h.fig]}
		on := j.flat.figs[h.fig].tag == mask
		j.wishes[key] = j.wishes[key] || on
	}
	return nil
}

// wish is a wish for one shape; several entries may say the same.
type wish struct {
	mask  tag
	shape uint32
}

// two takes a tie or a waiver whose two ends hit figures.
func (j *judge) two(p *probe, by uint32, hits, others []hit) error {
	if p.kind == entryWaiver {
		for _, h := range hits {
			for _, o := range others {
				a, b := j.shapeOf[h.fig], j.shapeOf[o.fig]
				j.waived[[2]uint32{min(a, b), max(a, b)}] = true
			}
		}
		return nil
	}
	e := &j.v.orders.file.Ties[p.entry]
	return j.tie(hits[0].fig, others[0].fig, e.Opposite, source{entryTie, p.entry, by})
}

func (j *judge) claim(fig uint32, mask tag, s source) error {
	return j.contradiction(j.claims.hold(j.unit(fig), mask, s))
}

func (j *judge) tie(a, b uint32, opposite bool, s source) error {
	return j.contradiction(j.claims.tie(j.unit(a), j.unit(b), opposite, s))
}

// contradiction words a chain of orders that contradict each other.
func (j *judge) contradiction(chain []source) error {
	if chain == nil {
		return nil
	}
	text := make([]string, len(chain))
	for i, s := range chain {
		text[i] = j.cite(s)
	}
	return &OrderError{Msg: fmt.Sprintf("layer %s: these orders contradict each other: %s; change or drop one of them", j.rules.Name, words(text))}
}

// cite names an order.
func (j *judge) cite(s source) string {
	file := j.v.orders.file
	fig := &j.flat.figs[s.fig]
	at := fmt.Sprintf(" at %s in %s", j.spot(fig.box), j.topName(j.flat.topOf(s.fig)))
	switch s.kind {
	case entryAnchor:
		e := &file.Anchors[s.entry]
		return file.Cite("anchor", e.Name, e.Index, e.Line) + fmt.Sprintf(" (on %v)", e.Mask) + at
	case entryTie:
		e := &file.Ties[s.entry]
		return file.Cite("tie", e.Name, e.Index, e.Line) + at
	case entryAlike:
		e := &file.Alike[s.entry]
		return file.Cite("anchor", e.Name, e.Index, e.Line) + " (alike)" + at
	case entryMarker:
		layer, mask := j.rules.AnchorA, "A"
		if fig.tag == tagMarkB {
			layer, mask = j.rules.AnchorB, "B"
		}
		return fmt.Sprintf("marker for %s on %d/%d", mask, layer.Layer, layer.Type) + at
	case entryLabel:
		return "label" + at
	}
	return fmt.Sprintf("figure that arrived on mask %s", fig.tag.maskName()) + at
}

// alike ties each figure of a cell to itself in every placement.
func (j *judge) alike() error {
	file := j.v.orders.file
	for i := range file.Alike {
		members := j.v.orders.family(j.v, file.Alike[i].Cell).members
		keys, number := map[string]uint32{}, map[int32][]uint32{}
		first := map[uint32]uint32{} // by key: a figure
		for _, s := range j.flat.spans {
			if !members[s.structure] {
				continue
			}
			own, ok := number[s.structure]
			if !ok {
				var err error
				if own, err = j.keysOf(s.structure, keys); err != nil {
					return err
				}
				number[s.structure] = own
			}
			for k, key := range own {
				fig := s.first + uint32(k)
				if !j.isShape(fig) {
					continue
				}
				j.v.orders.alikeFound[i] = true
				other, ok := first[key]
				if !ok {
					first[key] = fig
					other = fig
				}
				j.tied[j.unit(fig)] = true
				if j.unit(other) != j.unit(fig) {
					if err := j.tie(other, fig, false, source{entryAlike, int32(i), fig}); err != nil {
						return err
					}
				}
			}
		}
	}
	return nil
}

// keysOf numbers the flat figures of a structure by what they look like in its coordinates.
func (j *judge) keysOf(s int32, keys map[string]uint32) ([]uint32, error) {
	alone := *j.flat
	alone.figs, alone.watch, alone.spans = nil, nil, nil
	if err := alone.walk(s, gds.Identity(), s); err != nil {
		return nil, err
	}
	j.flat.forms = alone.forms // forms under odd placements were added
	out := make([]uint32, len(alone.figs))
	for i := range alone.figs {
		points, _ := alone.points(nil, &alone.figs[i])
		key := textKey(canonical(points))
		n, ok := keys[key]
		if !ok {
			n = uint32(len(keys))
			keys[key] = n
		}
		out[i] = n
	}
	return out, nil
}

// missed looks for an entry of the file for this layer that hit nothing.
func (j *judge) missed(found map[entryKind][]bool) error {
	file := j.v.orders.file
	for i := range file.Anchors {
		if e := &file.Anchors[i]; e.Layer == j.number && !found[entryAnchor][i] {
			return j.miss(file.Cite("anchor", e.Name, e.Index, e.Line), entryAnchor, i, e.Cell)
		}
	}
	for i := range file.Ties {
		if e := &file.Ties[i]; e.Layer == j.number && !found[entryTie][i] {
			return j.miss(file.Cite("tie", e.Name, e.Index, e.Line), entryTie, i, e.Cell)
		}
	}
	for i := range file.Waivers {
		if e := &file.Waivers[i]; e.Layer == j.number && !found[entryWaiver][i] {
			return j.miss(file.Cite("waiver", e.Name, e.Index, e.Line), entryWaiver, i, e.Cell)
		}
	}
	return nil
}

// miss words an entry that hits no shape, with the shape nearest to a probe of it that hits none.
func (j *judge) miss(cite string, kind entryKind, entry int, cell string) error {
	if cell != "" && !j.v.orders.family(j.v, cell).some {
		return &OrderError{Msg: fmt.Sprintf("%s: structure %s is not in the stream, so that the order hits no shape; correct the name or take the entry out", cite, gds.Printable(cell))}
	}
	hitBy := map[uint32]bool{}
	for _, h := range j.hits {
		hitBy[h.by] = true
	}
	best, where := math.Inf(1), ""
	for top := range j.probeFirst {
		end := uint32(len(j.probeList))
		if top+1 < len(j.probeFirst) {
			end = j.probeFirst[top+1]
		}
		for p := j.probeFirst[top]; p < end; p++ {
			by := j.probeFig[top] + p - j.probeFirst[top]
			if q := &j.probeList[p]; q.kind != kind || int(q.entry) != entry || hitBy[by] {
				continue
			}
			at := j.flat.figs[by].box
			for fig := j.flat.first[top]; fig < j.probeFig[top]; fig++ {
				if !j.isShape(fig) {
					continue
				}
				dx, dy := geom.RectGap(at, j.flat.figs[fig].box)
				if d := math.Hypot(float64(dx), float64(dy)); d < best {
					best = d
					where = fmt.Sprintf("; the shape nearest to %s in %s is %s, %s away", j.spot(at), j.topName(top),
						j.boxText(j.shapes[j.shapeOf[fig]].box), j.v.rules.Length(math.Round(d*50)/100))
				}
			}
		}
	}
	if where == "" {
		where = "; there is no shape near"
	}
	return &OrderError{Msg: fmt.Sprintf("%s: hits no shape of layer %s%s; correct the place or take the entry out", cite, j.rules.Name, where)}
}

// ordersHeld makes the check of orders.
func (j *judge) ordersHeld(c *Check) {
	cut := map[uint32]bool{} // shapes already told
	whole := func(unit uint32, s source) bool {
		k := j.unitShape(unit)
		sh := &j.shapes[k]
		if !sh.stitched || sh.given {
			return true
		}
		if !cut[k] {
			cut[k] = true
			c.fault(j.placeOf(k, "is under an order and cut: "+j.cite(s)))
		}
		return false
	}
	anchored := map[uint32]bool{}
	for _, m := range j.claims.masks {
		k := j.unitShape(m.unit)
		anchored[k] = true
		if !whole(m.unit, m.source) {
			continue
		}
		if on := j.unitMask(m.unit); on != m.mask {
			c.fault(j.placeOf(k, fmt.Sprintf("is ordered on mask %s and is on %s: %s", m.mask.maskName(), onText(on), j.cite(m.source))))
		}
	}
	j.counts.Anchored = int64(len(anchored))
	for _, t := range j.claims.ties {
		if !whole(t.a, t.source) || !whole(t.b, t.source) {
			continue
		}
		a, b := j.unitMask(t.a), j.unitMask(t.b)
		if a == tagNone || b == tagNone || (a != b) != t.opposite {
			want := "the same mask"
			if t.opposite {
				want = "opposite masks"
			}
			p := j.placeOf(j.unitShape(t.a), fmt.Sprintf("is tied to %s, one on %s and one on %s: %s", want, onText(a), onText(b), j.cite(t.source)))
			other := decompose.Box(j.shapes[j.unitShape(t.b)].box)
			p.Other = &other
			c.fault(p)
		}
	}
	for u, tied := range j.tied {
		if !tied {
			continue
		}
		k := j.unitShape(uint32(u))
		if sh := &j.shapes[k]; sh.stitched && !sh.given && !cut[k] {
			cut[k] = true
			c.fault(j.placeOf(k, "is in a cell that is to come out alike everywhere, and cut"))
		}
	}
	for _, kept := range j.wishes {
		j.counts.Wishes++
		if kept {
			j.counts.WishesKept++
		}
	}
	for top := range j.v.masked.tree.tops {
		for i := j.flat.first[top]; i < j.flat.first[top+1]; i++ {
			if j.met[i] {
				continue
			}
			switch t := j.flat.figs[i].tag; {
			case t == tagMarkA || t == tagMarkB:
				j.counts.MarkersWithoutShape++
			case t == tagProbe && j.probeOf(top, i).kind == entryLabel:
				j.counts.LabelsWithoutShape++
			}
		}
	}
}

func onText(t tag) string {
	if t.mask() {
		return "mask " + t.maskName()
	}
	return "no mask"
}
