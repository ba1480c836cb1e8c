package decompose

import (
	"context"
	"fmt"
	"io"
	"slices"
	"strings"

	"maskpair/gds"
	"maskpair/gds/arena"
)

// Run is one decomposition, stage by stage: New reads the hierarchy, Decompose assigns masks, Write copies the stream.
type Run struct {
	lib      *gds.Library
	rules    *Rules
	opt      Options
	classes  *classes
	h        *hierarchy
	layers   []*layout
	masks    []*arena.Array[uint8] // by layer, by node
	marks    map[string][]markBox  // by top
	baseline *Baseline             // nil: none
	frozen   [2]bool               // masks that are already made
	result   Result
	// Warnings are remarks for the user, one line each; they are not part of the result.
	Warnings []string
}

// Orderer says what the user, the layout and an earlier result order. Package anchor implements it.
type Orderer interface {
	// Probes gives the places that look for shapes of a deck layer.
	Probes(layer int, v *View) ([]Probe, error)
	// Orders turns what the probes hit into orders; it is called once the shapes of the layer are known.
	Orders(layer int, v *View) (*Orders, error)
}

// New prepares a run. The library must have been indexed with the deck's Interest.
func New(lib *gds.Library, rules *Rules, opt Options) (*Run, error) {
	c, err := newClasses(rules)
	if err != nil {
		return nil, err
	}
	h, err := newHierarchy(lib, opt.Top)
	if err != nil {
		return nil, err
	}
	if err := checkMarks(lib, c, rules); err != nil {
		return nil, err
	}
	r := &Run{lib: lib, rules: rules, opt: opt, classes: c, h: h, marks: map[string][]markBox{}}
	for _, i := range h.byName {
		r.result.Tops = append(r.result.Tops, h.name(h.tops[i]))
	}
	r.warnMissing()
	return r, nil
}

// firstOf names some things and counts the rest, so that a line stays a line however many there are.
func firstOf(names []string) string {
	const most = 3
	if len(names) <= most+1 {
		return strings.Join(names, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(names[:most], ", "), len(names)-most)
}

// warnMissing tells of what the stream lacks or has where no figure can be.
func (r *Run) warnMissing() {
	switch missing := r.lib.Missing; len(missing) {
	case 0:
	case 1:
		r.warn("structure %s is placed but not in the stream; its references stay as they are", missing[0])
	default:
		r.warn("%d structures are placed but not in the stream: %s; their references stay as they are", len(missing), firstOf(missing))
	}
	layers := make([]gds.LayerType, 0, len(r.lib.Boxes))
	for l := range r.lib.Boxes {
		layers = append(layers, l)
	}
	slices.SortFunc(layers, func(a, b gds.LayerType) int {
		return int(a.Layer)<<16 + int(a.Type) - int(b.Layer)<<16 - int(b.Type)
	})
	for _, l := range layers {
		if k := r.classes.interest.Figures[l]; k != 0 {
			for _, cr := range r.classes.roles[k] {
				if cr.role == roleDrawn {
					r.warn("%d BOX elements on the drawn layer %d/%d are no figures and stay as they are", r.lib.Boxes[l], l.Layer, l.Type)
				}
			}
		}
	}
}

func (r *Run) warn(format string, args ...any) {
	r.Warnings = append(r.Warnings, fmt.Sprintf(format, args...))
}

// Decompose assigns masks in all deck layers. The result is complete when it returns.
func (r *Run) Decompose(ctx context.Context, orders Orderer) (*Result, error) {
	for i := range r.rules.Layers {
		if err := r.layer(ctx, i, orders); err != nil {
			return nil, err
		}
	}
	return &r.result, nil
}

// Close gives back the memory of the run. The result stays.
func (r *Run) Close() {
	for _, l := range r.layers {
		l.free()
	}
	for _, m := range r.masks {
		m.Free()
	}
	r.layers, r.masks = nil, nil
}

func (r *Run) layer(ctx context.Context, i int, orders Orderer) error {
	rules := &r.rules.Layers[i]
	v := &View{run: r, layer: i}
	want := &sought{markers: r.classes.selectMarkers(i), baseline: r.baseline, wantSame: r.frozen != [2]bool{}}
	want.masks[A], _ = r.classes.selectRole(i, roleMaskA, onA)
	want.masks[B], _ = r.classes.selectRole(i, roleMaskB, onB)
	if orders != nil {
		var err error
		if want.probes, err = orders.Probes(i, v); err != nil {
			return err
		}
	}
	l, err := newLayout(ctx, r.h, r.classes.selectLayer(i), rules, i, want, &r.opt)
	if err != nil {
		return err
	}
	defer l.leave()
	l.classes = r.classes
	r.layers = append(r.layers, l)
	v.layout = l
	r.opt.stage(stageSolve)
	o := &Orders{}
	if orders != nil {
		if o, err = orders.Orders(i, v); err != nil {
			return err
		}
	}
	if err := o.contradiction(l.nodes); err != nil {
		return err
	}
	a := l.assign(o)
	r.masks = append(r.masks, a.mask)
	s := newSolver(l, a, o, &r.opt)
	if err := s.solve(ctx, r.opt.jobs()); err != nil {
		return err
	}
	r.opt.work(stageSolve, "pairs", l.near.pairs)
	r.opt.work(stageSolve, "table_entries", s.tableEntries())
	r.opt.stage(stageChoose)
	if err := l.deal(ctx, a, s, r.opt.jobs()); err != nil {
		return err
	}
	if err := l.cutFigures(a.mask.Data); err != nil {
		return err
	}
	r.opt.stage(stageReport)
	res := r.summarise(l, a, o)
	if err := s.explain(ctx, r.rules, &res, r.opt.jobs()); err != nil {
		return err
	}
	if res.Moved, err = l.moved(ctx, a, o, v); err != nil {
		return err
	}
	res.MovedShapes = int64(len(res.Moved))
	if res.AnyMask, err = l.anyMaskPairs(ctx, a.mask.Data, r.opt.jobs()); err != nil {
		return err
	}
	if n := l.near.tooNear; n > 0 {
		r.warn("layer %s: %d pairs of shapes are nearer to each other than any_mask_spacing (%s), which no masks can mend; they are listed under any_mask in the report",
			rules.Name, n, r.rules.Length(float64(rules.AnyMask)))
	}
	res.SameShape = l.sameShape()
	if res.Frozen, err = l.frozenFaults(ctx, a, o, v); err != nil {
		return err
	}
	r.mark(&res)
	if r.opt.Drawings > 0 {
		res.Drawing = l.draw(a, o, &res, r.opt.Drawings)
	}
	r.opt.held += l.kept(&res)
	r.result.Layers = append(r.result.Layers, res)
	return ctx.Err()
}

// summarise counts what a layer came to, but for what is unresolved.
func (r *Run) summarise(l *layout, a *assignment, o *Orders) LayerResult {
	res := LayerResult{Name: l.rules.Name, Spacing: l.rules.Spacing, RoundedFigures: l.flat.rounded, Shapes: int64(l.shapes),
		NearPairs: l.near.pairs, Components: int64(a.components), AnyMaskPairs: l.near.tooNear, ProvedOptimal: true, AimsProved: true}
	var by [4]int64
	for _, s := range r.h.bottom {
		l.flat.ownFigures(s, func(_, figure uint32) {
			by[l.flat.sel.tag[r.lib.Figures[figure].Class]] += int64(r.h.placed[s])
		})
	}
	res.Figures, res.AlreadyMaskedFigures = by[drawn], by[onA]+by[onB]
	if res.Figures+res.AlreadyMaskedFigures == 0 {
		r.warn("layer %s: no figure on its drawn layers; check the layer numbers in the deck", l.rules.Name)
	}
	if l.flat.withoutArea > 0 {
		r.warn("layer %s: %d drawn elements cover no area; they stay as they are and are not counted", l.rules.Name, l.flat.withoutArea)
	}
	unit := float64(l.flat.forms.scale * l.flat.forms.scale)
	for u := range l.area {
		onA, onB := l.areaOn(uint32(u), a.mask.Data[u])
		res.AreaA += onA
		res.AreaB += onB
	}
	res.AreaA /= unit
	res.AreaB /= unit
	anchored := make([]uint64, (l.shapes+63)/64)
	for _, an := range o.Anchors[:len(o.Anchors)-o.Holds] {
		shape := l.shapeOf(an.Node)
		if bit := uint64(1) << (shape & 63); anchored[shape>>6]&bit == 0 {
			anchored[shape>>6] |= bit
			res.AnchoredShapes++
		}
	}
	res.BaselineShapes = o.Remembered
	for _, w := range o.Wishes {
		res.Wishes++
		if a.mask.Data[w.Node] == uint8(w.Mask) {
			res.WishesKept++
		}
	}
	res.Stitches = l.cuts.laps()
	if l.given != nil {
		res.Stitches += l.given.laps
		res.StitchesBound = l.given.laps
	}
	return res
}

// Write copies the stream with every figure on its mask.
func (r *Run) Write(ctx context.Context, dst io.Writer, src io.ReaderAt, progress func(int64)) error {
	r.opt.stage(stageVariants)
	masks := make([][]uint8, len(r.masks))
	for i, m := range r.masks {
		masks[i] = m.Data
	}
	v := newVariants(r.h, r.layers, masks)
	p := newOutputPlan(r.rules, r.classes, v, r.opt.Top, r.tails())
	for s := range v.tables {
		r.opt.work(stageVariants, "ways", int64(v.tables[s].ways()))
	}
	r.opt.work(stageVariants, "placements", v.placements)
	r.opt.stage(stageWrite)
	return gds.CopyStream(dst, src, r.lib, r.classes.interest, p.plan(), progress)
}
