package orders

import (
	"bytes"
	"cmp"
	"fmt"
	"math/bits"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"maskpair/gds"
)

// This file decomposes sketches in the plainest way: shapes and near pairs by comparing all rectangles, orders by comparing all places
// with all rectangles, memory by counting unit squares, and masks by trying all assignments.

// EntryKind is the kind of an entry of an anchor file.
type EntryKind uint8

// The kinds of entries.
const (
	EntryAnchor EntryKind = iota
	EntryWish
	EntryTie
	EntryWaiver
	EntryAlike
)

// Entry is an entry of an anchor file. Coordinates are half database units.
type Entry struct {
	Kind     EntryKind
	Layer    int
	Mask     int
	Box      [4]int64    // of anchors and wishes; a point is a box without extent
	At       [2][2]int64 // of ties and waivers
	Opposite bool
	Cell     string
}

// FileOf gives entries for a sketch as an anchor file.
func FileOf(entries []Entry) string { return FileFor(entries, SketchLayers(), 1e-9) }

// FileFor gives entries as an anchor file in nm, for a database unit in metres.
func FileFor(entries []Entry, layers []Layer, dbu float64) string {
	var b strings.Builder
	half := func(v int64) string { return strconv.FormatFloat(float64(v)/2*dbu*1e9, 'g', 12, 64) }
	spot := func(p [2]int64) string { return "[" + half(p[0]) + ", " + half(p[1]) + "]" }
	name := func(l int) string { return layers[l].Name }
	for _, e := range entries {
		switch e.Kind {
		case EntryAnchor, EntryWish:
			fmt.Fprintf(&b, "[[anchor]]\nlayer = %q\nmask = %q\n", name(e.Layer), letter(int8(e.Mask)))
			if e.Box[0] == e.Box[2] && e.Box[1] == e.Box[3] {
				fmt.Fprintf(&b, "at = %s\n", spot([2]int64{e.Box[0], e.Box[1]}))
			} else {
				fmt.Fprintf(&b, "box = [%s, %s, %s, %s]\n", half(e.Box[0]), half(e.Box[1]), half(e.Box[2]), half(e.Box[3]))
			}
			if e.Kind == EntryWish {
				b.WriteString("wish = true\n")
			}
		case EntryTie:
			masks := "same"
			if e.Opposite {
				masks = "opposite"
			}
			fmt.Fprintf(&b, "[[tie]]\nlayer = %q\nmasks = %q\nat = [%s, %s]\n", name(e.Layer), masks, spot(e.At[0]), spot(e.At[1]))
		case EntryWaiver:
			fmt.Fprintf(&b, "[[waiver]]\nlayer = %q\nat = [%s, %s]\nreason = \"measured\"\n", name(e.Layer), spot(e.At[0]), spot(e.At[1]))
		case EntryAlike:
			b.WriteString("[[anchor]]\nalike = true\n")
		}
		if e.Cell != "" {
			fmt.Fprintf(&b, "cell = %q\n", e.Cell)
		}
		b.WriteByte('\n')
	}
	return b.String()
}

// MostSlow is how many shapes of a layer are tried.
const MostSlow = 13

// SlowLayer is what a deck layer comes to.
type SlowLayer struct {
	Shapes   int
	Anchored int
	Wishes   int
	Baseline int // shapes with a memory
	// Best is the least cost: near pairs that are not waived and stay on one mask, all such pairs, shapes that moved, wishes not kept.
	Best [4]int

	near, waived [][2]int
	fixed        []int8 // by shape: mask, or -1
	ties         []slowTie
	wish         [][2]bool
	memory       []int8
	first        []box // by shape: a figure of it
	top          []string
}

type slowTie struct {
	a, b     int
	opposite bool
}

// Slow is what a sketch comes to.
type Slow struct {
	Open   string // not empty: too many shapes to try, or an input that is refused for other reasons
	Status int    // 2: the orders must be refused
	Why    string
	Layers []SlowLayer
}

// SolveSlow works out what a stream must come to, with an anchor file and an earlier result (nil: none).
func SolveSlow(stream []byte, entries []Entry, baseline []byte, redo bool) (*Slow, error) {
	d, err := flatten(stream, SketchLayers())
	if err != nil {
		return nil, err
	}
	marks, err := flatten(stream, []Layer{{Drawn: []gds.LayerType{markerA}}, {Drawn: []gds.LayerType{markerB}}})
	if err != nil {
		return nil, err
	}
	var was *drawing
	if baseline != nil {
		if was, err = flattenUnder(baseline, SketchLayers(), true); err != nil {
			return nil, err
		}
	}
	labels, err := labelsOf(stream)
	if err != nil {
		return nil, err
	}
	s := &Slow{}
	hit := make([]bool, len(entries))
	for layer := range SketchLayers() {
		l := s.layer(d, layer, redo)
		if s.Open != "" {
			return s, nil
		}
		s.orders(d, l, layer, entries, hit, marks, labels)
		if was != nil {
			l.remember(d, layer, was)
		}
		s.Layers = append(s.Layers, l.SlowLayer)
	}
	for i, h := range hit {
		if !h {
			s.refuse(fmt.Sprintf("entry %d hits nothing", i))
		}
	}
	for i := range s.Layers {
		if s.Status == 0 && !s.Layers[i].solve() {
			s.refuse("orders contradict each other")
		}
	}
	return s, nil
}

func (s *Slow) refuse(why string) {
	if s.Status == 0 {
		s.Status, s.Why = 2, why
	}
}

// slowLayer also knows the figures.
type slowLayer struct {
	SlowLayer
	figures []figure
	shape   []int // by figure
}

func (s *Slow) layer(d *drawing, layer int, redo bool) *slowLayer {
	l := &slowLayer{}
	for _, f := range d.figures {
		if int(f.layer) == layer {
			l.figures = append(l.figures, f)
		}
	}
	n := len(l.figures)
	parent := make([]int, n)
	for i := range parent {
		parent[i] = i
	}
	find := func(i int) int {
		for parent[i] != i {
			i = parent[i]
		}
		return i
	}
	for i := range n {
		for k := range i {
			if l.figures[i].top == l.figures[k].top && l.figures[i].box.touches(l.figures[k].box) {
				parent[find(i)] = find(k)
			}
		}
	}
	number := map[int]int{}
	for i := range n {
		k, ok := number[find(i)]
		if !ok {
			k = len(number)
			number[find(i)] = k
			l.first = append(l.first, l.figures[i].box)
			l.top = append(l.top, d.lib.Structures[d.tops[l.figures[i].top]].Name)
			l.fixed = append(l.fixed, -1)
		}
		l.shape = append(l.shape, k)
		if m := l.figures[i].mask; m >= 0 && !redo {
			if l.fixed[k] == 1-m {
				s.Open = "a shape arrives on both masks"
			}
			l.fixed[k] = m
		}
	}
	l.Shapes = len(number)
	if l.Shapes > MostSlow {
		s.Open = "too many shapes"
	}
	l.wish = make([][2]bool, l.Shapes)
	l.memory = make([]int8, l.Shapes)
	for i := range l.memory {
		l.memory[i] = -1
	}
	near := map[[2]int]bool{}
	limit := int64(4 * SketchSpacing * SketchSpacing) // half units
	for i := range n {
		for k := range i {
			a, b := l.shape[i], l.shape[k]
			f, g := l.figures[i].box, l.figures[k].box
			dx, dy := max(f.x1-g.x2, g.x1-f.x2, 0), max(f.y1-g.y2, g.y1-f.y2, 0)
			if a != b && l.figures[i].top == l.figures[k].top && dx*dx+dy*dy < limit {
				near[[2]int{min(a, b), max(a, b)}] = true
			}
		}
	}
	for p := range near {
		l.near = append(l.near, p)
	}
	slices.SortFunc(l.near, func(a, b [2]int) int { return cmp.Or(cmp.Compare(a[0], b[0]), cmp.Compare(a[1], b[1])) })
	return l
}

// placedLabel is a label at a place.
type placedLabel struct {
	top  string
	x, y int64
	text string
}

func labelsOf(stream []byte) ([]placedLabel, error) {
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), gds.Interest{Labels: map[gds.LayerType]uint8{label: 1}, Figures: map[gds.LayerType]uint8{}}, nil)
	if err != nil {
		return nil, err
	}
	d := &drawing{lib: lib}
	placed := make([]bool, len(lib.Structures))
	for _, r := range lib.Refs {
		if r.Target >= 0 {
			placed[r.Target] = true
		}
	}
	for s := range lib.Structures {
		if !placed[s] {
			d.tops = append(d.tops, int32(s))
			d.walk(int32(len(d.tops)-1), int32(s), gds.Identity())
		}
	}
	var out []placedLabel
	for _, p := range d.placed {
		st := &lib.Structures[p.cell]
		for i := st.FirstLabel; i < st.EndLabel; i++ {
			x, y := placePoint(p.at, 2*int64(lib.Labels[i].At.X), 2*int64(lib.Labels[i].At.Y))
			out = append(out, placedLabel{lib.Structures[d.tops[p.top]].Name, x, y, lib.Labels[i].Text})
		}
	}
	return out, nil
}

// touched gives the shapes that a box touches.
func (l *slowLayer) touched(top int32, b box) []int {
	var out []int
	for i, f := range l.figures {
		if f.top == top && f.box.touches(b) && !slices.Contains(out, l.shape[i]) {
			out = append(out, l.shape[i])
		}
	}
	return out
}

func (s *Slow) anchor(l *slowLayer, shape int, mask int8) {
	if l.fixed[shape] == 1-mask {
		s.refuse("two anchors contradict each other")
	}
	l.fixed[shape] = mask
}

// family tells whether a structure is a cell or a variant of it.
func family(name, cell string) bool {
	return regexp.MustCompile("^" + regexp.QuoteMeta(cell) + `(\$([2-9]|[1-9][0-9]+))*$`).MatchString(name)
}

func (s *Slow) orders(d *drawing, l *slowLayer, layer int, entries []Entry, hit []bool, marks *drawing, labels []placedLabel) {
	nameOf := func(d *drawing, top int32) string { return d.lib.Structures[d.tops[top]].Name }
	topOf := func(name string) int32 {
		for i, t := range d.tops {
			if d.lib.Structures[t].Name == name {
				return int32(i)
			}
		}
		return -1
	}
	if layer == 0 {
		for _, f := range marks.figures {
			for _, k := range l.touched(topOf(nameOf(marks, f.top)), f.box) {
				s.anchor(l, k, int8(f.layer))
			}
		}
		for _, t := range labels {
			if t.text != "A" && t.text != "B" {
				continue
			}
			for _, k := range l.touched(topOf(t.top), box{t.x, t.y, t.x, t.y}) {
				s.anchor(l, k, int8(t.text[0]-'A'))
			}
		}
	}
	waived := map[[2]int]bool{}
	for i, e := range entries {
		if e.Kind == EntryAlike {
			first := map[box]int{}
			for _, p := range d.placed {
				if !family(d.lib.Structures[p.cell].Name, e.Cell) {
					continue
				}
				back := p.at.Orientation.Inverse()
				for n, f := range d.figures[p.under[0]:p.under[1]] {
					if int(f.layer) != layer {
						continue
					}
					x1, y1 := back.Apply(f.box.x1-2*p.at.X, f.box.y1-2*p.at.Y)
					x2, y2 := back.Apply(f.box.x2-2*p.at.X, f.box.y2-2*p.at.Y)
					local := box{min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)}
					shape := l.shapeOf(d, p.under[0]+int32(n))
					hit[i] = true
					if k, ok := first[local]; ok {
						l.ties = append(l.ties, slowTie{k, shape, false})
					} else {
						first[local] = shape
					}
				}
			}
			continue
		}
		if e.Layer != layer {
			continue
		}
		each := func(fn func(top int32, at gds.Transform)) {
			if e.Cell == "" {
				for t := range d.tops {
					fn(int32(t), gds.Identity())
				}
				return
			}
			for _, p := range d.placed {
				if family(d.lib.Structures[p.cell].Name, e.Cell) {
					fn(p.top, p.at)
				}
			}
		}
		each(func(top int32, at gds.Transform) {
			if e.Kind == EntryAnchor || e.Kind == EntryWish {
				for _, k := range l.touched(top, placeBox(at, box{e.Box[0], e.Box[1], e.Box[2], e.Box[3]})) {
					hit[i] = true
					if e.Kind == EntryAnchor {
						s.anchor(l, k, int8(e.Mask))
					} else {
						l.wish[k][e.Mask] = true
					}
				}
				return
			}
			var ends [2][]int
			for n, p := range e.At {
				x, y := placePoint(at, p[0], p[1])
				ends[n] = l.touched(top, box{x, y, x, y})
			}
			if len(ends[0]) == 0 || len(ends[1]) == 0 {
				return
			}
			hit[i] = true
			a, b := ends[0][0], ends[1][0]
			if e.Kind == EntryTie {
				l.ties = append(l.ties, slowTie{a, b, e.Opposite})
			} else {
				waived[[2]int{min(a, b), max(a, b)}] = true
			}
		})
	}
	for _, p := range l.near {
		if waived[p] {
			l.waived = append(l.waived, p)
		}
	}
	for k := range l.Shapes {
		if l.fixed[k] >= 0 {
			l.Anchored++
		}
		l.Wishes += boolInt(l.wish[k][0]) + boolInt(l.wish[k][1])
	}
}

// shapeOf gives the shape of a figure of the drawing.
func (l *slowLayer) shapeOf(d *drawing, i int32) int {
	f := &d.figures[i]
	for k := range l.figures {
		if g := &l.figures[k]; g.place == f.place && g.number == f.number {
			return l.shape[k]
		}
	}
	return -1
}

// remember counts unit squares of each shape that were on the masks.
func (l *slowLayer) remember(d *drawing, layer int, was *drawing) {
	squares := func(b box, fn func(x, y int64)) {
		for y := b.y1; y < b.y2; y += 2 {
			for x := b.x1; x < b.x2; x += 2 {
				fn(x, y)
			}
		}
	}
	before := map[[3]int64]int8{} // top, x, y: bits of masks
	top := func(t int32) int64 {
		for i, o := range was.tops {
			if was.lib.Structures[o].Name == d.lib.Structures[d.tops[t]].Name {
				return int64(i)
			}
		}
		if was.loose == 1 && len(d.tops) == 1 {
			for i, o := range was.tops {
				if !slices.ContainsFunc(was.lib.Refs, func(r gds.Ref) bool { return r.Target == o }) {
					return int64(i)
				}
			}
		}
		return -1
	}
	for _, f := range was.figures {
		if int(f.layer) == layer && f.mask >= 0 {
			squares(f.box, func(x, y int64) { before[[3]int64{int64(f.top), x, y}] |= 1 << f.mask })
		}
	}
	for k := range l.Shapes {
		seen := map[[2]int64]bool{}
		var on [2]int
		for i, f := range l.figures {
			if l.shape[i] != k {
				continue
			}
			squares(f.box, func(x, y int64) {
				if seen[[2]int64{x, y}] {
					return
				}
				seen[[2]int64{x, y}] = true
				m := before[[3]int64{top(f.top), x, y}]
				on[0] += int(m & 1)
				on[1] += int(m >> 1)
			})
		}
		if on[0] != on[1] {
			l.memory[k] = int8(boolInt(on[1] > on[0]))
			l.Baseline++
		}
	}
}

// cost gives the cost of an assignment; false where it breaks an order.
func (l *SlowLayer) cost(masks uint) ([4]int, bool) {
	var c [4]int
	for k, f := range l.fixed {
		if f >= 0 && int8(masks>>k&1) != f {
			return c, false
		}
	}
	for _, t := range l.ties {
		if (masks>>t.a&1 != masks>>t.b&1) != t.opposite {
			return c, false
		}
	}
	for _, p := range l.near {
		if masks>>p[0]&1 == masks>>p[1]&1 {
			c[1]++
			if !slices.Contains(l.waived, p) {
				c[0]++
			}
		}
	}
	for k := range l.Shapes {
		m := int8(masks >> k & 1)
		if l.memory[k] >= 0 && l.memory[k] != m {
			c[2]++
		}
		if l.wish[k][1-m] {
			c[3]++
		}
	}
	return c, true
}

// solve tries all assignments; false where none keeps the orders.
func (l *SlowLayer) solve() bool {
	found := false
	for masks := range uint(1) << l.Shapes {
		if c, ok := l.cost(masks); ok && (!found || slices.Compare(c[:], l.Best[:]) < 0) {
			l.Best, found = c, true
		}
	}
	return found
}

// Judge holds an output against what it must come to.
func (s *Slow) Judge(stream []byte) error {
	d, err := flatten(stream, SketchLayers())
	if err != nil {
		return err
	}
	for n := range s.Layers {
		l := &s.Layers[n]
		masks := uint(0)
		for k := range l.Shapes {
			m := int8(-1)
			for _, f := range d.figures {
				if int(f.layer) == n && d.lib.Structures[d.tops[f.top]].Name == l.top[k] && f.box == l.first[k] {
					m = f.mask
				}
			}
			if m < 0 {
				return fmt.Errorf("layer %d: the shape with %v in %s is on no mask", n, l.first[k], l.top[k])
			}
			masks |= uint(m) << k
		}
		c, ok := l.cost(masks)
		if !ok {
			return fmt.Errorf("layer %d: masks %0*b break an order", n, l.Shapes, masks)
		}
		if c != l.Best {
			return fmt.Errorf("layer %d: masks %0*b cost %v (pairs, with waived ones, moved, wishes lost), the least is %v", n, l.Shapes, bits.Reverse(masks)>>(bits.UintSize-l.Shapes), c, l.Best)
		}
	}
	return nil
}
