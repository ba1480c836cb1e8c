package verify

import (
	"context"
	"fmt"
	"math"
	"sort"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file places every figure of some layers as the hierarchy says, top by top.

// mostFigures is the most flat figures of one deck layer that are judged at once; they take about 100 bytes each.
const mostFigures = 1 << 27

// What figure.form is where it is no number of a form.
const (
	formRect    = -1 // the box is the figure
	formNone    = -2 // it covers nothing
	formUnknown = -3 // not yet worked out
)

// figure is a flat figure.
type figure struct {
	box  geom.Rect // half units of the top
	form int32     // index into flat.forms, or one of the above
	turn uint8     // how the form is laid; the place follows from the box
	tag  tag
}

// flat is what some layers hold, placed under every top.
type flat struct {
	ctx    context.Context
	src    *layout
	tags   [256]tag
	halves bool     // coordinates on half units are kept
	count  []uint64 // flat figures under each structure
	forms  []form
	formOf []int32 // by outline of the library
	figs   []figure
	first  []uint32 // by top: its first figure; one more at the end

	watch []bool // by structure: its placements are noted in spans; nil: none
	spans []span
	steps int
}

// span is a placement of a watched structure: its figures are those from first on, as many as the structure has.
type span struct {
	structure int32
	first     uint32
}

// newFlat readies the figures that have a tag. What is too much to be judged is refused before anything is placed.
func newFlat(ctx context.Context, src *layout, tags [256]tag) (*flat, error) {
	lib := src.lib
	f := &flat{ctx: ctx, src: src, tags: tags, formOf: make([]int32, len(lib.Outlines)), first: []uint32{0}}
	for i := range f.formOf {
		f.formOf[i] = formUnknown
	}
	for i := range lib.Figures {
		fig := &lib.Figures[i]
		if t := tags[fig.Class]; fig.Outline != 0 && (t == tagDrawn || t.mask()) && oddWidth(&lib.Outlines[fig.Outline-1]) {
			f.halves = true
			break
		}
	}
	f.count = src.tree.sums(func(s int32) uint64 {
		n := uint64(0)
		for i := lib.Structures[s].FirstFigure; i < lib.Structures[s].EndFigure; i++ {
			if f.formAsDrawn(&lib.Figures[i]) != formNone {
				n++
			}
		}
		return n
	})
	total := uint64(0)
	for _, t := range src.tree.tops {
		n := f.count[t]
		if n > mostFigures || total+n > mostFigures {
			return nil, &InputError{Msg: fmt.Sprintf("%s: structure %s places %s figures of one deck layer; at most %d can be judged at once: verify its blocks one by one",
				src.name, gds.Printable(lib.Structures[t].Name), countText(n), mostFigures)}
		}
		total += n
	}
	f.figs = make([]figure, 0, total)
	return f, nil
}

func countText(n uint64) string {
	if n == math.MaxUint64 {
		return "2^64 or more"
	}
	return fmt.Sprint(n)
}

// formAsDrawn gives the form of a figure of the library in its structure; formNone where it has no tag or no area.
func (f *flat) formAsDrawn(fig *gds.Figure) int32 {
	t := f.tags[fig.Class]
	if t == tagNone {
		return formNone
	}
	if fig.Outline == 0 {
		return formRect
	}
	known := &f.formOf[fig.Outline-1]
	if *known == formUnknown {
		*known = f.keep(newForm(outline(f.src.lib, fig, f.keepHalves(t))))
	}
	return *known
}

// keepHalves says whether figures of a tag keep vertices on half units. Markers are no part of the deck layer and keep theirs.
func (f *flat) keepHalves(t tag) bool { return f.halves || t == tagMarkA || t == tagMarkB }

func (f *flat) keep(made form) int32 {
	if !made.hasArea() {
		return formNone
	}
	f.forms = append(f.forms, made)
	return int32(len(f.forms) - 1)
}

// place appends the figures under a top. Probes may be appended behind them, then comes end.
func (f *flat) place(top int32) error { return f.walk(top, gds.Identity(), top) }

// end ends the figures of a top.
func (f *flat) end() { f.first = append(f.first, uint32(len(f.figs))) }

// topOf gives the number of the top of a figure.
func (f *flat) topOf(fig uint32) int {
	return sort.Search(len(f.first)-1, func(i int) bool { return f.first[i+1] > fig })
}

func (f *flat) walk(s int32, at gds.Transform, top int32) error {
	if f.count[s] == 0 {
		return nil
	}
	if f.steps++; f.steps&0xFFF == 0 && f.ctx.Err() != nil {
		return f.ctx.Err()
	}
	if f.watch != nil && f.watch[s] {
		f.spans = append(f.spans, span{s, uint32(len(f.figs))})
	}
	lib := f.src.lib
	st := &lib.Structures[s]
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		fig := &lib.Figures[i]
		drawn := f.formAsDrawn(fig)
		if drawn == formNone {
			continue
		}
		placed := figure{form: drawn, tag: f.tags[fig.Class]}
		ok := true
		switch {
		case !at.Rigid():
			ok = f.placeOdd(&placed, fig, at)
		case drawn == formRect:
			placed.box = rectPlacement(at).ApplyRect(rectOf(fig.Box))
		default:
			made := &f.forms[drawn]
			placed.box = rectPlacement(at).ApplyRect(made.box)
			placed.turn = uint8(at.Orientation)
			if len(made.rects) == 1 {
				placed.form, placed.turn = formRect, 0
			}
		}
		if !ok || !inPlane(placed.box) {
			return &InputError{Msg: fmt.Sprintf("%s: a figure of structure %s, placed %s in %s, leaves the 32-bit plane; move the layout nearer to the origin",
				f.src.name, gds.Printable(st.Name), at, gds.Printable(lib.Structures[top].Name))}
		}
		f.figs = append(f.figs, placed)
	}
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &lib.Refs[r]
		if ref.Target < 0 || f.count[ref.Target] == 0 {
			continue
		}
		p := lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if p != nil {
			columns, rows = p.Columns, p.Rows
		}
		for row := range rows {
			for column := range columns {
				if err := f.walk(ref.Target, gds.Compose(at, ref, p, column, row), top); err != nil {
					return err
				}
			}
		}
	}
	return nil
}

// rectPlacement gives a rigid placement in half units.
func rectPlacement(at gds.Transform) geom.Placement {
	return geom.Placement{Turn: uint8(at.Orientation), X: 2 * at.X, Y: 2 * at.Y}
}

// inPlane says whether a box lies in the plane of 32-bit coordinates.
func inPlane(b geom.Rect) bool {
	const low, high = 2 * math.MinInt32, 2 * math.MaxInt32
	return b.X1 >= low && b.Y1 >= low && b.X2 <= high && b.Y2 <= high
}

// placeOdd places a figure under a magnification or an odd angle: its form is worked out at its place.
func (f *flat) placeOdd(placed *figure, fig *gds.Figure, at gds.Transform) bool {
	points, fill, ok := outlineAt(f.src.lib, fig, at, f.keepHalves(placed.tag))
	if !ok {
		return false
	}
	made := newForm(points, fill)
	if !made.hasArea() && len(points) > 0 {
		// Rounding has left no area; that the figure is one was settled as drawn. It is there by its corners.
		made.box = geom.BoxOf(points)
		for _, p := range points {
			made.rects = append(made.rects, geom.Rect{X1: p.X, Y1: p.Y, X2: p.X, Y2: p.Y})
		}
	}
	placed.box, placed.form = made.box, formRect
	if len(made.rects) != 1 {
		placed.form = f.keep(made)
	}
	return true
}

// at gives the place of a figure's form in half units.
func (f *flat) at(fig *figure) geom.Placement {
	p := geom.Placement{Turn: fig.turn}
	turned := p.ApplyRect(f.forms[fig.form].box)
	p.X, p.Y = fig.box.X1-turned.X1, fig.box.Y1-turned.Y1
	return p
}

// rects appends the rectangles of a figure; false where it has slanted edges.
func (f *flat) rects(dst []geom.Rect, fig *figure) ([]geom.Rect, bool) {
	switch {
	case fig.form == formRect:
		return append(dst, fig.box), true
	case fig.form == formNone:
		return dst, true
	case f.forms[fig.form].polygon != nil:
		return dst, false
	}
	at := f.at(fig)
	for _, r := range f.forms[fig.form].rects {
		dst = append(dst, at.ApplyRect(r))
	}
	return dst, true
}

// points gives the closed outline of a figure as placed.
func (f *flat) points(dst []geom.Point, fig *figure) ([]geom.Point, geom.Fill) {
	switch fig.form {
	case formRect:
		return append(dst, corners(fig.box)...), geom.EvenOdd
	case formNone:
		return dst, geom.EvenOdd
	}
	made, at := &f.forms[fig.form], f.at(fig)
	for _, p := range made.points {
		dst = append(dst, at.Apply(p))
	}
	return dst, made.fill
}
