package decompose

import (
	"context"
	"fmt"
	"math"

	"maskpair/decompose/geom"
)

// This file lets places look for shapes: a box of the anchor file, a label, a figure of a marker layer. They go through the sweep with
// the figures of the layer, with IDs behind those of the figures, and cost less than figures do (see seek.go).

// Probe is a place that looks for shapes of a deck layer: it hits what it touches.
type Probe struct {
	Top     int            // index into the tops, or AnyTop
	Box     Box            // half database units of the top; a point is a box without extent
	Outline *[4]geom.Point // corners, where the box lies at an odd angle (Box is then around them); else nil
}

// AnyTop is the top of a probe that looks in every top.
const AnyTop = -1

// sought is what a layer is built for beside its masks.
type sought struct {
	probes   []Probe
	markers  *selection    // the figures of the marker layers; nil: none
	baseline *Baseline     // nil: none
	masks    [2]*selection // the figures on A and on B, for the baseline
	wantSame bool          // see earlier
}

// lookout is all that looks for shapes of one layer.
type lookout struct {
	probes   []Probe
	byTop    [][]uint32               // probes of each top, in order
	anyTop   []uint32                 // probes that look in every top
	polygons map[uint32]*geom.Polygon // of the probes with outlines that are at an angle
	markers  *flat                    // nil: none
	odd      []oddFigures             // of the markers, by top
	figures  uint32                   // probes have their IDs from here on, markers behind them
	scale    int64
}

// newLookout prepares probes, and the figures of marker layers if there are any.
func newLookout(h *hierarchy, want *sought, g grid) (*lookout, error) {
	k := &lookout{scale: g.scale}
	if want == nil {
		return k, nil
	}
	k.probes = want.probes
	k.byTop, k.polygons = make([][]uint32, len(h.tops)), map[uint32]*geom.Polygon{}
	for i := range k.probes {
		if top := k.probes[i].Top; top == AnyTop {
			k.anyTop = append(k.anyTop, uint32(i))
		} else {
			k.byTop[top] = append(k.byTop[top], uint32(i))
		}
		if p := k.polygon(&k.probes[i]); p != nil {
			k.polygons[uint32(i)] = p
		}
	}
	if want.markers == nil {
		return k, nil
	}
	var err error
	if k.markers, err = newFlat(h, want.markers, grid{g.scale, gridOf(h.lib, want.markers).halves}); err != nil {
		return nil, err
	}
	k.odd = make([]oddFigures, len(h.tops))
	for top := range k.odd {
		if err := k.markers.collectOdd(top, &k.odd[top]); err != nil {
			return nil, err
		}
	}
	return k, nil
}

// needsHalves tells whether something that looks for shapes lies on half units.
func (s *sought) needsHalves(h *hierarchy) bool {
	if s == nil {
		return false
	}
	for i := range s.probes {
		b := &s.probes[i].Box
		if (b.X1|b.Y1|b.X2|b.Y2)&1 != 0 {
			return true
		}
		if o := s.probes[i].Outline; o != nil {
			for _, p := range o {
				if (p.X|p.Y)&1 != 0 {
					return true
				}
			}
		}
	}
	if s.markers != nil && gridOf(h.lib, s.markers).halves {
		return true
	}
	return s.baseline != nil && (gridOf(s.baseline.lib, s.masks[A]).halves || gridOf(s.baseline.lib, s.masks[B]).halves)
}

// polygon gives the polygon of a probe at an angle, in work units; nil where the box will do.
func (k *lookout) polygon(p *Probe) *geom.Polygon {
	if p.Outline == nil {
		return nil
	}
	points := make([]geom.Point, len(p.Outline))
	for i, q := range p.Outline {
		points[i] = geom.Point{X: q.X * k.scale / 2, Y: q.Y * k.scale / 2}
	}
	if made := geom.NewPolygon(points, geom.EvenOdd); made.HasArea() && !geom.IsManhattan(points) {
		return made
	}
	return nil
}

// box gives the box of a probe in work units.
func (k *lookout) box(i uint32) Box {
	b := k.probes[i].Box
	if k.scale == 1 {
		return Box{b.X1 / 2, b.Y1 / 2, b.X2 / 2, b.Y2 / 2}
	}
	return b
}

// number deals the IDs behind those of the figures.
func (k *lookout) number(figures uint64) error {
	k.figures = uint32(figures)
	total := figures + uint64(len(k.probes))
	if k.markers != nil {
		total += k.markers.total
	}
	if total > maxFlat {
		return &LimitError{Msg: fmt.Sprintf("a deck layer has %d flat figures, anchors and markers, more than the %d that can be numbered", total, int64(maxFlat)), Remedy: byBlocks}
	}
	return nil
}

// size gives the number of items and bands that look for shapes of a top.
func (k *lookout) size(top int) (items, bands int) {
	items = len(k.anyTop)
	if k.byTop != nil {
		items += len(k.byTop[top])
		for i, p := range k.polygons {
			if k.probes[i].Top == top {
				items += len(p.Bands())
				bands += len(p.Bands())
			}
		}
	}
	if k.markers == nil || k.markers.all[k.markers.h.tops[top]] == 0 {
		return items, bands
	}
	t := k.markers.h.tops[top]
	items += int(k.markers.items[t])
	bands += int(k.markers.bands[t])
	for i := range k.odd[top].figures {
		n := int(k.odd[top].figures[i].form.pieces())
		items += n
		if k.odd[top].figures[i].form.polygon != nil {
			bands += n
		}
	}
	return items, bands
}

// emit appends the items of all that looks for shapes of a top whose figures lie in a box; polygons are appended to those of the layer.
func (k *lookout) emit(ctx context.Context, top int, within Box, w *flattener, polygons []*geom.Polygon, jobs int) ([]*geom.Polygon, error) {
	at := placement{0, -w.win.originX, -w.win.originY}
	if k.byTop != nil {
		for _, i := range k.byTop[top] {
			if made := k.polygons[i]; made != nil {
				polygons = append(polygons, made)
				w.form(&form{polygon: made, box: Box(made.Box())}, nil, uint32(len(polygons)), at, k.figures+i)
				continue
			}
			w.probe(at.applyBox(k.box(i)), k.figures+i)
		}
	}
	for _, i := range k.anyTop {
		if b := k.box(i); b.X1 <= within.X2 && within.X1 <= b.X2 && b.Y1 <= within.Y2 && within.Y1 <= b.Y2 {
			w.probe(at.applyBox(b), k.figures+i)
		}
	}
	if k.markers == nil || k.markers.all[k.markers.h.tops[top]] == 0 {
		return polygons, nil
	}
	m := k.markers
	base := uint32(len(polygons))
	polygons = append(polygons, m.polygons...)
	f := *w
	f.f = m
	// The markers' numbers of polygons, and their ordinals, come behind those of the layer.
	m.polygonBase = base
	behind := k.figures + uint32(len(k.probes))
	first := m.first[top] + uint64(behind)
	if m.bands[m.h.tops[top]] == 0 {
		n, _, err := m.flatten(ctx, top, first, w.win, w.items[w.nItem:], nil, jobs)
		if err != nil {
			return nil, err
		}
		f.nItem += n
	} else {
		f.walk(m.h.tops[top], at, first)
	}
	polygons = f.oddFigures(&k.odd[top], at, behind, polygons)
	w.nItem, w.nBand = f.nItem, f.nBand
	return polygons, nil
}

// oddFigures emits figures under a magnification or an odd angle, their ordinals raised by behind; their polygons are appended to a list
// in which those of the selection begin at polygonBase.
func (w *flattener) oddFigures(odd *oddFigures, at placement, behind uint32, polygons []*geom.Polygon) []*geom.Polygon {
	for i := range odd.figures {
		fig := &odd.figures[i]
		number := uint32(0)
		if fig.form.polygon != nil {
			polygons = append(polygons, fig.form.polygon)
			number = uint32(len(polygons)) - w.f.polygonBase
		}
		w.form(&fig.form, &odd.forms.rects, number, at, fig.ordinal+behind)
	}
	return polygons
}

// probe emits the item of a probe, cut to what 32 bits hold.
func (w *flattener) probe(b Box, id uint32) {
	b = Box{max(b.X1, math.MinInt32), max(b.Y1, math.MinInt32), min(b.X2, math.MaxInt32), min(b.Y2, math.MaxInt32)}
	if b.X1 <= b.X2 && b.Y1 <= b.Y2 {
		w.rectangle(b, id)
	}
}
