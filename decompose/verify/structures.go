package verify

import (
	"bytes"
	"fmt"
	"io"
	"slices"

	"maskpair/decompose"
	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file holds the masked stream against the drawn one, record by record. Head and end of the library must be the same
// bytes. Structures must come in the order of the input, each with its variants right behind it, and each of them must hold the
// elements of the original in their order. What may differ is what masks need and nothing else; see element by element in
// comparer.walk.

// comparer is the state of the comparison.
type comparer struct {
	v          *verifier
	drawn, now *layout
	of         map[gds.LayerType]*decompose.LayerRules // deck layer by layer of the stream
	marks      map[gds.LayerType]bool
	tops       map[string]bool            // of the drawn layout
	variants   map[string]map[string]bool // by structure of the input: the names of its variants
	origin     []int32                    // by structure of the masked stream: the structure of the input; -1: none
	structures *Check
	elements   *Check
	references *Check
	marksCheck *Check
	before     reader
	after      reader
	ahead      []element // elements of the masked stream that were read and not yet taken
	free       []element
	was        element
	over       bool // the masked structure has no more elements
}

func (v *verifier) compareStreams() error {
	c := &comparer{v: v, drawn: v.drawn, now: v.masked, of: map[gds.LayerType]*decompose.LayerRules{},
		marks: map[gds.LayerType]bool{}, tops: map[string]bool{}, variants: map[string]map[string]bool{}}
	for i := range v.rules.Layers {
		l := &v.rules.Layers[i]
		for _, k := range append(slices.Clone(l.Drawn), l.MaskA, l.MaskB) {
			c.of[k] = l
		}
	}
	m := &v.rules.Marks
	for _, k := range []*gds.LayerType{m.Unresolved, m.Cycle, m.Stitch, m.Moved, m.AnyMask} {
		if k != nil {
			c.marks[*k] = true
		}
	}
	for _, t := range v.drawn.tree.tops {
		c.tops[v.drawn.lib.Structures[t].Name] = true
	}
	library := v.res.open(Library, "")
	c.structures = v.res.open(Structures, "")
	c.elements = v.res.open(Elements, "")
	c.references = v.res.open(References, "")
	c.marksCheck = v.res.open(Marks, "")
	if err := c.ends(library); err != nil {
		return err
	}
	c.names()
	c.order()
	for s := range c.now.lib.Structures {
		if err := v.ctx.Err(); err != nil {
			return err
		}
		if c.origin[s] >= 0 {
			if err := c.structure(int32(s), c.origin[s]); err != nil {
				return err
			}
		}
	}
	return nil
}

// ends compares what stands before the first structure and from ENDLIB on, byte by byte.
func (c *comparer) ends(check *Check) error {
	firstOf := func(lib *gds.Library) int64 {
		if len(lib.Structures) > 0 {
			return lib.Structures[0].Begin
		}
		return lib.End
	}
	same, err := c.sameBytes(0, firstOf(c.drawn.lib), 0, firstOf(c.now.lib))
	if err != nil {
		return err
	}
	if !same {
		check.fault(Place{Text: "the head of the library (version, dates, name, units, ...) is not that of the input"})
	}
	same, err = c.sameBytes(c.drawn.lib.End, c.drawn.lib.Bytes, c.now.lib.End, c.now.lib.Bytes)
	if err != nil {
		return err
	}
	if !same {
		check.fault(Place{Text: "what follows the last structure (ENDLIB and padding) is not that of the input"})
	}
	return nil
}

// sameBytes compares a part of the drawn stream with a part of the masked one.
func (c *comparer) sameBytes(from, to, nowFrom, nowTo int64) (bool, error) {
	if to-from != nowTo-nowFrom {
		return false, nil
	}
	p, q := make([]byte, min(window, to-from)), make([]byte, min(window, to-from))
	for n := int64(0); from+n < to; n += int64(len(p)) {
		p, q = p[:min(int64(len(p)), to-from-n)], q[:min(int64(len(p)), to-from-n)]
		for _, part := range []struct {
			l   *layout
			buf []byte
			at  int64
		}{{c.drawn, p, from + n}, {c.now, q, nowFrom + n}} {
			if got, err := part.l.data.ReadAt(part.buf, part.at); got < len(part.buf) {
				if err == nil || err == io.EOF || err == io.ErrUnexpectedEOF {
					err = gds.ErrChanged
				}
				return false, fmt.Errorf("%s: %w", part.l.name, err)
			}
		}
		if !bytes.Equal(p, q) {
			return false, nil
		}
	}
	return true, nil
}

// names finds for each structure of the masked stream the one of the input that it is, or is a variant of.
func (c *comparer) names() {
	known := make(map[string]int32, len(c.drawn.lib.Structures))
	for s := range c.drawn.lib.Structures {
		known[c.drawn.lib.Structures[s].Name] = int32(s)
	}
	c.origin = make([]int32, len(c.now.lib.Structures))
	for s := range c.now.lib.Structures {
		name := c.now.lib.Structures[s].Name
		if was, ok := known[name]; ok {
			c.origin[s] = was
			continue
		}
		stem, _, ok := variantOf(name)
		was, is := known[stem]
		if !ok || !is {
			c.origin[s] = -1
			c.structures.fault(Place{Structure: name, Text: "is neither a structure of the input nor a variant of one"})
			continue
		}
		c.origin[s] = was
		if c.variants[stem] == nil {
			c.variants[stem] = map[string]bool{}
		}
		c.variants[stem][name] = true
	}
	now := make(map[string]bool, len(c.now.lib.Structures))
	for s := range c.now.lib.Structures {
		now[c.now.lib.Structures[s].Name] = true
	}
	for s := range c.drawn.lib.Structures {
		if name := c.drawn.lib.Structures[s].Name; !now[name] {
			c.structures.fault(Place{Structure: name, Text: "is lost"})
		}
	}
	for _, t := range c.now.tree.tops {
		if name := c.now.lib.Structures[t].Name; !c.tops[name] {
			c.structures.fault(Place{Structure: name, Text: "is placed nowhere, and was no top of the input"})
		}
	}
	tops := topsByName(c.now)
	for _, t := range c.drawn.tree.tops {
		name := c.drawn.lib.Structures[t].Name
		if _, ok := tops[name]; !ok && now[name] {
			c.structures.fault(Place{Structure: name, Text: "was a top of the input, and is placed now"})
		}
	}
}

// order says whether structures come in the order of the input, each with its variants behind it, under the first free
// numbers.
func (c *comparer) order() {
	if c.structures.Faults > 0 {
		return
	}
	known := make(map[string]bool, len(c.drawn.lib.Structures))
	for s := range c.drawn.lib.Structures {
		known[c.drawn.lib.Structures[s].Name] = true
	}
	for _, name := range c.drawn.lib.Missing {
		known[name] = true // what is placed and not there must not come to be
	}
	at := 0
	expect := func(name string) bool {
		if at < len(c.now.lib.Structures) && c.now.lib.Structures[at].Name == name {
			at++
			return true
		}
		got := "the end"
		if at < len(c.now.lib.Structures) {
			got = gds.Printable(c.now.lib.Structures[at].Name)
		}
		c.structures.fault(Place{Structure: name, Text: "is to come here, in the order of the input with variants behind their originals under the first free numbers; what comes is " + got})
		return false
	}
	for s := range c.drawn.lib.Structures {
		name := c.drawn.lib.Structures[s].Name
		if !expect(name) {
			return
		}
		for number, left := 2, len(c.variants[name]); left > 0; number++ {
			if variant := fmt.Sprintf("%s$%d", name, number); !known[variant] {
				if !expect(variant) {
					return
				}
				left--
			}
		}
	}
}

// mismatch is the first thing that is not as it must be in a structure.
type mismatch struct {
	check *Check
	text  string
}

// structure compares a structure of the masked stream with the one that it comes from.
func (c *comparer) structure(s, origin int32) error {
	now, was := &c.now.lib.Structures[s], &c.drawn.lib.Structures[origin]
	same, err := c.sameBytes(was.Begin, was.End, now.Begin, now.End)
	if err != nil || same && !c.worked(was) {
		return err
	}
	c.before.open(c.drawn, was)
	c.after.open(c.now, now)
	for i := range c.ahead {
		c.free = append(c.free, c.ahead[i])
	}
	c.ahead, c.over = c.ahead[:0], false
	m, err := c.heads(was, now)
	if err == nil && m == nil {
		m, err = c.walk(c.tops[now.Name])
	}
	if err == nil && m != nil {
		m.check.fault(Place{Structure: now.Name, Text: m.text})
	}
	return err
}

// worked says whether a structure may hold what does not stay as it is: figures on layers that the deck names, earlier marks.
func (c *comparer) worked(st *gds.Structure) bool {
	return st.EndFigure > st.FirstFigure || c.v.rules.Marks.Replace
}

// heads compares BGNSTR and STRNAME, and what else stands before the elements. Variants have their dates from the original.
func (c *comparer) heads(was, now *gds.Structure) (*mismatch, error) {
	if err := c.before.head(&c.was); err != nil {
		return nil, err
	}
	e := c.spare()
	if err := c.after.head(&e); err != nil {
		return nil, err
	}
	same := c.was.same(&e)
	if was.Name != now.Name {
		same = c.was.sameBut(&e, gds.STRNAME)
	}
	c.free = append(c.free, e)
	if !same {
		return &mismatch{c.structures, "its dates, or other records before its elements, are not those of the input"}, nil
	}
	return nil, nil
}

func (c *comparer) spare() element {
	if n := len(c.free); n > 0 {
		e := c.free[n-1]
		c.free = c.free[:n-1]
		return e
	}
	return element{}
}

// here gives the element of the masked structure that is n places ahead, nil at the end.
func (c *comparer) here(n int) (*element, error) {
	for len(c.ahead) <= n && !c.over {
		e := c.spare()
		ok, err := c.after.next(&e)
		if err != nil {
			return nil, err
		}
		if !ok {
			c.over = true
			break
		}
		c.ahead = append(c.ahead, e)
	}
	if n < len(c.ahead) {
		return &c.ahead[n], nil
	}
	return nil, nil
}

// take takes n elements of the masked structure.
func (c *comparer) take(n int) {
	c.free = append(c.free, c.ahead[:n]...)
	c.ahead = append(c.ahead[:0], c.ahead[n:]...)
}

// walk goes through the elements of a structure of the input and finds what stands for each of them: the same element, or for
// a figure on a deck layer its like on a mask or its pieces, for a reference one to a variant or its parts.
func (c *comparer) walk(top bool) (*mismatch, error) {
	for {
		ok, err := c.before.next(&c.was)
		if err != nil {
			return nil, err
		}
		if !ok {
			return c.tail(top)
		}
		e := &c.was
		layer := gds.LayerType{}
		if e.figure() {
			layer = e.layer()
		}
		var m *mismatch
		switch {
		case e.figure() && c.marks[layer] && c.v.rules.Marks.Replace:
			continue // dropped: an element of these layers in the middle is a mismatch with what follows
		case e.figure() && c.of[layer] != nil:
			m, err = c.figure(c.of[layer], layer)
		case e.reference():
			m, err = c.reference()
		default:
			m, err = c.unchanged()
		}
		if err != nil || m != nil {
			return m, err
		}
	}
}

// unchanged takes an element that must be there as it was.
func (c *comparer) unchanged() (*mismatch, error) {
	f, err := c.here(0)
	if err != nil {
		return nil, err
	}
	if f == nil || !f.same(&c.was) {
		return c.differs(c.elements, "is lost or changed"), nil
	}
	c.take(1)
	return nil, nil
}

// differs words a mismatch at the element of the input that is at hand.
func (c *comparer) differs(check *Check, what string) *mismatch {
	if f, err := c.here(0); err == nil && f != nil && f.figure() && c.marks[f.layer()] {
		return &mismatch{c.marksCheck, fmt.Sprintf("a mark (%v on %s, byte %d) stands before other elements; it must be a BOUNDARY behind them, in a top",
			f.kind, layerText(f.layer()), f.offset)}
	}
	e := &c.was
	words := e.kind.String()
	if e.find(gds.LAYER) != nil {
		words += " on " + layerText(e.layer())
	} else if e.reference() {
		words += " of " + gds.Printable(e.target())
	}
	text := fmt.Sprintf("element %d of the input (%s, byte %d) %s", c.before.count, words, e.offset, what)
	if f, err := c.here(0); err == nil && f != nil {
		text += fmt.Sprintf("; in its place is a %v at byte %d", f.kind, f.offset)
	} else if err == nil {
		text += "; the structure ends in its place"
	}
	return &mismatch{check, text}
}

func layerText(l gds.LayerType) string { return fmt.Sprintf("%d/%d", l.Layer, l.Type) }

// tail takes what stands behind the elements of the input: marks, in a top.
func (c *comparer) tail(top bool) (*mismatch, error) {
	for {
		f, err := c.here(0)
		if f == nil || err != nil {
			return nil, err
		}
		mark := f.figure() && c.marks[f.layer()]
		switch {
		case mark && !top:
			return &mismatch{c.marksCheck, fmt.Sprintf("a mark (byte %d) in a structure that is no top", f.offset)}, nil
		case mark && f.kind != gds.BOUNDARY:
			return &mismatch{c.marksCheck, fmt.Sprintf("a mark that is a %v (byte %d); marks are BOUNDARY elements", f.kind, f.offset)}, nil
		case !mark:
			return &mismatch{c.elements, fmt.Sprintf("a %v (byte %d) that the input does not have", f.kind, f.offset)}, nil
		}
		c.take(1)
	}
}

// figure takes a figure of a deck layer.
func (c *comparer) figure(rules *decompose.LayerRules, layer gds.LayerType) (*mismatch, error) {
	e := &c.was
	masked := layer == rules.MaskA || layer == rules.MaskB
	if masked && !rules.Redo {
		return c.unchanged()
	}
	shape := c.elementForm(e, rules)
	if !shape.hasArea() {
		return c.unchanged()
	}
	taken := 0
	if rules.KeepDrawn && !masked {
		f, err := c.here(0)
		if err != nil {
			return nil, err
		}
		if f == nil || !f.same(e) {
			return c.differs(c.elements, "did not stay in its place"), nil
		}
		taken = 1
	}
	f, err := c.here(taken)
	if err != nil {
		return nil, err
	}
	if f != nil && f.kind == e.kind && onMask(f, rules) && f.sameBut(e, gds.LAYER, gds.DATATYPE) {
		c.take(taken + 1)
		return nil, nil
	}
	if rules.Stitch != nil && rules.Stitch.Apply {
		n, err := c.pieces(taken, rules, &shape)
		if err != nil {
			return nil, err
		}
		if n > 0 {
			c.take(n)
			return nil, nil
		}
	}
	return c.differs(c.elements, "is not on a mask in its place with all its records"), nil
}

func onMask(e *element, rules *decompose.LayerRules) bool {
	l := e.layer()
	return l == rules.MaskA || l == rules.MaskB
}

// pieces says how many elements, those before from included, are the pieces of the figure at hand: closed boundaries on both
// masks with the flags and properties of the figure, which together cover what it covers, and no more. 0 where they are not.
func (c *comparer) pieces(from int, rules *decompose.LayerRules, shape *form) (int, error) {
	e := &c.was
	whole := &flat{forms: []form{*shape}}
	whole.figs = []figure{{box: shape.box, form: 0}}
	parts := &flat{}
	masks := map[gds.LayerType]bool{}
	for n := from; ; n++ {
		f, err := c.here(n)
		if err != nil {
			return 0, err
		}
		if f == nil || f.kind != gds.BOUNDARY || !onMask(f, rules) || !f.sameWithout(e, pieceOwn...) {
			return 0, nil
		}
		made := c.elementForm(f, rules)
		if xy := f.points(nil); !made.hasArea() || xy[0] != xy[len(xy)-1] {
			return 0, nil
		}
		parts.forms = append(parts.forms, made)
		parts.figs = append(parts.figs, figure{box: made.box, form: int32(len(parts.figs))})
		masks[f.layer()] = true
		inside := cover{ctx: c.v.ctx, from: parts, by: whole}
		if !inside.covered(uint32(len(parts.figs)-1), []uint32{0}) {
			return 0, nil
		}
		all := make([]uint32, len(parts.figs))
		for i := range all {
			all[i] = uint32(i)
		}
		outside := cover{ctx: c.v.ctx, from: whole, by: parts}
		if len(masks) == 2 && outside.covered(0, all) {
			return n + 1, nil
		}
	}
}

// pieceOwn are the records in which a piece differs from its figure.
var pieceOwn = []gds.Kind{gds.BOUNDARY, gds.PATH, gds.LAYER, gds.DATATYPE, gds.XY, gds.PATHTYPE, gds.WIDTH, gds.BGNEXTN, gds.ENDEXTN,
	gds.SPACING, gds.UINTEGER, gds.USTRING, gds.ELKEY, gds.LINKTYPE, gds.LINKKEYS, gds.RESERVED}

// elementForm gives what a figure covers in the coordinates of its structure.
func (c *comparer) elementForm(e *element, rules *decompose.LayerRules) form {
	points := e.points(nil)
	if e.kind == gds.BOUNDARY {
		line := make([]geom.Point, len(points))
		for i, p := range points {
			line[i] = geom.Point{X: 2 * int64(p.X), Y: 2 * int64(p.Y)}
		}
		return newForm(line, geom.EvenOdd)
	}
	o := gds.Outline{Count: uint32(len(points)), Path: true, PathType: uint8(e.number(gds.PATHTYPE)), Width: e.number(gds.WIDTH)}
	if o.PathType == 4 {
		o.Begin, o.Finish = e.number(gds.BGNEXTN), e.number(gds.ENDEXTN)
	}
	one := &gds.Library{Outlines: []gds.Outline{o}, Points: points}
	return newForm(outline(one, &gds.Figure{Outline: 1}, oddWidth(&o)))
}
