package verify

import (
	"cmp"
	"fmt"
	"slices"

	"maskpair/decompose/geom"
)

// This file compares the flat masked layout with the flat drawn one: per top, the two masks together must cover what was drawn
// or already masked. Figures that are the same in both are struck out against each other; what is left must be covered by the
// other side, exactly. So a figure may be on its mask in pieces, but nothing may be lost or added.

// flattenDrawn places the figures of the drawn layout, top by top in the order of the masked stream's tops.
func (j *judge) flattenDrawn() (*flat, error) {
	f, err := newFlat(j.v.ctx, j.v.drawn, j.v.roles.tags(j.rules))
	if err != nil {
		return nil, err
	}
	tops := topsByName(j.v.drawn)
	for _, t := range j.v.masked.tree.tops {
		if other, ok := tops[j.v.masked.lib.Structures[t].Name]; ok {
			if err := f.place(other); err != nil {
				return nil, err
			}
		}
		f.end()
	}
	return f, nil
}

// keyed is a figure under a hash of its place and outline. Figures of one hash are nearly always the same; likeness.same says.
type keyed struct {
	key uint64
	fig uint32
}

// likeness compares figures of flat layouts; it remembers what each form looks like in each orientation.
type likeness struct {
	f     *flat
	looks map[[2]int32]look
}

// look is the canonical outline of a form, with its box at the origin.
type look struct {
	points []geom.Point
	hash   uint64
}

func (l *likeness) look(fig *figure) look {
	id := [2]int32{fig.form, int32(fig.turn)}
	known, ok := l.looks[id]
	if !ok {
		points, _ := l.f.points(nil, &figure{box: geom.Rect{X2: fig.box.X2 - fig.box.X1, Y2: fig.box.Y2 - fig.box.Y1}, form: fig.form, turn: fig.turn})
		points = canonical(points)
		known = look{points, hashPoints(points)}
		l.looks[id] = known
	}
	return known
}

// keys gives the figures [from, to) that keep, sorted by key.
func (l *likeness) keys(from, to uint32, keep func(t tag) bool) []keyed {
	out := make([]keyed, 0, to-from)
	for i := from; i < to; i++ {
		fig := &l.f.figs[i]
		if !keep(fig.tag) || fig.form == formNone {
			continue
		}
		key := hashPoints([]geom.Point{{X: fig.box.X1, Y: fig.box.Y1}, {X: fig.box.X2, Y: fig.box.Y2}})
		if fig.form != formRect {
			key ^= l.look(fig).hash
		}
		out = append(out, keyed{key, i})
	}
	slices.SortFunc(out, func(a, b keyed) int {
		if a.key != b.key {
			return cmp.Compare(a.key, b.key)
		}
		return cmp.Compare(a.fig, b.fig)
	})
	return out
}

// same says whether a figure of l and one of m are the same: place and outline.
func (l *likeness) same(a uint32, m *likeness, b uint32) bool {
	p, q := &l.f.figs[a], &m.f.figs[b]
	if p.box != q.box {
		return false
	}
	if p.form == formRect || q.form == formRect {
		return p.form == q.form
	}
	return slices.Equal(l.look(p).points, m.look(q).points)
}

// sameArea makes the check. It also finds which figures arrived on their masks (j.was) and, with keep_drawn, holds what is left
// on the drawn layer against what was there.
func (j *judge) sameArea(c, left *Check, drawn *flat) error {
	now, was := &likeness{j.flat, map[[2]int32]look{}}, &likeness{drawn, map[[2]int32]look{}}
	j.was = make([]bool, len(j.flat.figs))
	for top := range j.v.masked.tree.tops {
		masked := now.keys(j.flat.first[top], j.flat.first[top+1], tag.mask)
		before := was.keys(drawn.first[top], drawn.first[top+1], func(t tag) bool { return t.mask() || t == tagDrawn })
		if err := j.compareFigures(c, top, now, masked, was, before); err != nil {
			return err
		}
		if j.rules.KeepDrawn {
			isDrawn := func(t tag) bool { return t == tagDrawn }
			kept := now.keys(j.flat.first[top], j.flat.first[top+1], isDrawn)
			were := was.keys(drawn.first[top], drawn.first[top+1], isDrawn)
			j.keptAsDrawn(left, top, now, kept, was, were)
		}
	}
	return nil
}

// compareFigures compares the figures of one top. Figures that arrived on a mask must be there still, unless the deck takes
// them as drawn.
func (j *judge) compareFigures(c *Check, top int, now *likeness, masked []keyed, was *likeness, before []keyed) error {
	var lost, added []uint32 // without a figure of the same key and outline in the other
	matchKeys(masked, before, func(m, b []keyed) {
		if len(m) == 0 {
			for _, k := range b {
				lost = append(lost, k.fig)
			}
			return
		}
		if len(b) == 0 {
			for _, k := range m {
				added = append(added, k.fig)
			}
			return
		}
		for _, k := range b {
			if !slices.ContainsFunc(m, func(l keyed) bool { return now.same(l.fig, was, k.fig) }) {
				lost = append(lost, k.fig)
			}
		}
		for _, k := range m {
			if !slices.ContainsFunc(b, func(l keyed) bool { return now.same(k.fig, was, l.fig) }) {
				added = append(added, k.fig)
			}
		}
		if !j.rules.Redo {
			j.stayed(c, top, now, m, was, b)
		}
	})
	ofKeys := func(list []keyed) []uint32 {
		out := make([]uint32, len(list))
		for i, k := range list {
			out[i] = k.fig
		}
		return out
	}
	if len(lost)+len(added) == 0 {
		return nil
	}
	slices.Sort(lost)
	slices.Sort(added)
	gone, err := (&cover{j.v.ctx, was.f, now.f, lost, ofKeys(masked)}).bare()
	if err != nil {
		return err
	}
	for _, i := range gone {
		text := "what was drawn here is on the masks in part, or not at all"
		if t := was.f.figs[i].tag; t.mask() {
			text = "what was on mask " + t.maskName() + " here is on the masks in part, or not at all"
		}
		j.areaFault(c, top, was.f.figs[i].box, text)
	}
	fresh, err := (&cover{j.v.ctx, now.f, was.f, added, ofKeys(before)}).bare()
	if err != nil {
		return err
	}
	for _, i := range fresh {
		j.areaFault(c, top, now.f.figs[i].box, fmt.Sprintf("a figure on mask %s covers what was not drawn", now.f.figs[i].tag.maskName()))
	}
	if !j.rules.Redo {
		for _, i := range lost {
			if t := was.f.figs[i].tag; t.mask() {
				j.areaFault(c, top, was.f.figs[i].box, "a figure that arrived on mask "+t.maskName()+" is not there as it was")
			}
		}
	}
	return nil
}

func (j *judge) areaFault(c *Check, top int, b geom.Rect, text string) {
	box := boxOf(b)
	c.fault(Place{Top: j.topText(top), Box: &box, Text: text})
}

// stayed looks for figures of one key that arrived on a mask, and notes them where they are still there.
func (j *judge) stayed(c *Check, top int, now *likeness, m []keyed, was *likeness, b []keyed) {
	for _, k := range b {
		t := was.f.figs[k.fig].tag
		if !t.mask() {
			continue
		}
		at := slices.IndexFunc(m, func(l keyed) bool {
			return now.f.figs[l.fig].tag == t && !j.was[l.fig] && now.same(l.fig, was, k.fig)
		})
		if at < 0 {
			j.areaFault(c, top, was.f.figs[k.fig].box, "a figure that arrived on mask "+t.maskName()+" is not there any more")
			continue
		}
		j.was[m[at].fig] = true
	}
}

// keptAsDrawn holds the figures left on the drawn layer against those that were there: one for one.
func (j *judge) keptAsDrawn(c *Check, top int, now *likeness, kept []keyed, was *likeness, were []keyed) {
	matchKeys(kept, were, func(m, b []keyed) {
		taken := make([]bool, len(m))
		for _, k := range b {
			at := -1
			for i, l := range m {
				if !taken[i] && now.same(l.fig, was, k.fig) {
					at = i
					break
				}
			}
			if at < 0 {
				j.areaFault(c, top, was.f.figs[k.fig].box, "a drawn figure did not stay on the drawn layer")
				continue
			}
			taken[at] = true
		}
		for i, l := range m {
			if !taken[i] {
				j.areaFault(c, top, now.f.figs[l.fig].box, "a figure on the drawn layer was not there before")
			}
		}
	})
}

// matchKeys calls visit for each key, with the figures that have it in either sorted list.
func matchKeys(m, b []keyed, visit func(m, b []keyed)) {
	run := func(list []keyed) int {
		n := 1
		for n < len(list) && list[n].key == list[0].key {
			n++
		}
		return n
	}
	for len(m) > 0 || len(b) > 0 {
		c := 0
		switch {
		case len(m) == 0:
			c = 1
		case len(b) == 0:
			c = -1
		default:
			c = cmp.Compare(m[0].key, b[0].key)
		}
		switch {
		case c < 0:
			n := run(m)
			visit(m[:n], nil)
			m = m[n:]
		case c > 0:
			n := run(b)
			visit(nil, b[:n])
			b = b[n:]
		default:
			n, k := run(m), run(b)
			visit(m[:n], b[:k])
			m, b = m[n:], b[k:]
		}
	}
}

// leftOver makes the check of the drawn layer. Without keep_drawn nothing may be left; with it, what is left must be on a mask
// too.
func (j *judge) leftOver(c *Check) error {
	f := j.flat
	like := &likeness{f, map[[2]int32]look{}}
	for top := range j.v.masked.tree.tops {
		left := like.keys(f.first[top], f.first[top+1], func(t tag) bool { return t == tagDrawn })
		if !j.rules.KeepDrawn {
			slices.SortFunc(left, func(a, b keyed) int { return cmp.Compare(a.fig, b.fig) })
			for _, k := range left {
				j.areaFault(c, top, f.figs[k.fig].box, "a figure is left on the drawn layer")
			}
			continue
		}
		masks := like.keys(f.first[top], f.first[top+1], tag.mask)
		question := cover{ctx: j.v.ctx, from: f, by: f}
		matchKeys(masks, left, func(m, b []keyed) {
			for _, k := range b {
				if !slices.ContainsFunc(m, func(l keyed) bool { return like.same(l.fig, like, k.fig) }) {
					question.questions = append(question.questions, k.fig)
				}
			}
		})
		slices.Sort(question.questions)
		for _, k := range masks {
			question.others = append(question.others, k.fig)
		}
		bare, err := question.bare()
		if err != nil {
			return err
		}
		for _, i := range bare {
			j.areaFault(c, top, f.figs[i].box, "a drawn figure is on the masks in part, or not at all")
		}
	}
	return nil
}
