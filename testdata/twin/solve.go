package twin

import (
	"fmt"
	"math"
	"math/big"
	"math/bits"
)

// This file gives what must come out of a layout: figures, shapes, near pairs, components, and the least number of pairs
// that stay unresolved.

// Mask says on which mask something is.
type Mask int8

// The masks, and none.
const (
	Drawn Mask = -1
	A     Mask = 0
	B     Mask = 1
)

// String gives the letter of the mask.
func (m Mask) String() string {
	if m == Drawn {
		return "drawn"
	}
	return string(rune('A' + m))
}

// Figure is a placed figure of a deck layer.
type Figure struct {
	Flat
	Arrives Mask
	shape   int
	region  *region // nil: it covers nothing, and is not counted
}

// Shape is a maximal set of figures that touch.
type Shape struct {
	Top       string
	Figures   []int
	Fixed     Mask // the mask on which figures arrive and which the shape keeps; Drawn: free
	Component int
}

// NearPair is two shapes nearer than the spacing.
type NearPair struct {
	A, B     int
	Distance *big.Rat // squared, square database units
}

// Component is a set of shapes connected by near pairs.
type Component struct {
	Shapes, Pairs []int
	Least         int // fewest pairs that stay unresolved; Unknown where there are too many shapes to try all
}

// Unknown stands for a number that was not worked out.
const Unknown = -1

// LayerSolution is what one deck layer comes to.
type LayerSolution struct {
	*Layer
	Figures         []Figure
	Drawn, Masked   int // figures that cover something: drawn ones, and those that arrive on a mask
	Rounded         int
	Faded           int // figures of which the contract does not say whether they count; see fades
	Shapes          []Shape
	Pairs           []NearPair
	Components      []Component
	AnyMask         int
	Unresolved      int // components that cannot be done; Unknown where one was not tried
	Least           int // fewest unresolved pairs; Unknown where one was not tried
	WidestComponent int
}

// Solution is what a layout comes to under a deck.
type Solution struct {
	Layout *Layout
	Deck   *Deck
	Only   string // the structure that is taken alone; "": all tops
	Open   string // not empty: what the contract leaves open here; shapes and pairs may rightly come out otherwise
	Status int    // 0: it can be processed; else the exit status with which it must be refused
	Why    string // why it must be refused
	Layers []LayerSolution
}

// Limits of what is worked out.
const (
	MostFlat   = 3000 // flat elements and placements
	MostShapes = 16   // of a component, for all its assignments to be tried
)

// Solve works out what a layout, given as a stream, must come to.
func Solve(stream []byte, d *Deck) (*Solution, error) { return SolveTop(stream, d, "") }

// SolveTop works out what a layout must come to where one structure is taken alone; "" stands for all tops.
func SolveTop(stream []byte, d *Deck, only string) (*Solution, error) {
	l, err := Read(stream)
	if err != nil {
		return nil, err
	}
	s := &Solution{Layout: l, Deck: d, Only: only, Layers: make([]LayerSolution, len(d.Layers))}
	for i := range d.Layers {
		s.Layers[i].Layer = &d.Layers[i]
	}
	roles := d.roles()
	open, err := l.flatten(s.tops(), "", MostFlat, func(f Flat) {
		r, ok := roles[f.Element.Layer]
		if ok && f.Kind <= Path {
			s.take(&s.Layers[r.layer], f, r.arrives)
		}
	})
	if err != nil {
		return nil, err
	}
	if open != "" {
		s.Open = open
	}
	for i := range s.Layers {
		s.layer(&s.Layers[i])
	}
	return s, nil
}

// tops gives the structures that are decomposed.
func (s *Solution) tops() []string {
	if s.Only != "" {
		return []string{s.Only}
	}
	return s.Layout.Tops()
}

// take notes a figure.
func (s *Solution) take(l *LayerSolution, f Flat, arrives Mask) {
	points, nonZero, rounded, wide, open := f.outline()
	fig := Figure{Flat: f, Arrives: arrives, region: newRegion(points, nonZero)}
	if open != "" {
		s.Open = open
	}
	if rounded && fig.fades() {
		l.Faded++
		s.Open = "a figure covers something as drawn and nothing as rounded, or the other way round"
	}
	if wide && (fig.region == nil || fig.region.within()) {
		s.Open = "what lies outside of the plane covers nothing"
	} else if wide {
		s.Status, s.Why = 3, "a figure lies outside of the plane"
	} else if fig.region != nil && !fig.region.within() {
		s.Open = "the side of a path, but not its centre, lies outside of the plane"
	}
	if fig.region != nil {
		switch arrives {
		case Drawn:
			l.Drawn++
		default:
			l.Masked++
		}
		if rounded {
			l.Rounded++
		}
	}
	l.Figures = append(l.Figures, fig)
}

// within tells whether the region lies in the plane of 32 bits.
func (r *region) within() bool {
	return r.low.x >= 2*math.MinInt32 && r.low.y >= 2*math.MinInt32 && r.high.x <= 2*math.MaxInt32 && r.high.y <= 2*math.MaxInt32
}

// fades tells whether a figure that was rounded at its place covers something as drawn and nothing there, or the other way
// round. The contract does not say which of the two counts.
func (f *Figure) fades() bool {
	drawn := Flat{Element: f.Element, Top: f.Top, at: upright}
	points, nonZero, _, _, _ := drawn.outline()
	return (newRegion(points, nonZero) == nil) != (f.region == nil)
}

// layer works out one deck layer.
func (s *Solution) layer(l *LayerSolution) {
	n := len(l.Figures)
	root := make([]int, n)
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			i = root[i]
		}
		return i
	}
	type near struct {
		i, j int
		d    *big.Rat
	}
	var nears []near
	for i := range n {
		for j := range i {
			f, g := &l.Figures[i], &l.Figures[j]
			if f.region == nil || g.region == nil || f.Top != g.Top {
				continue
			}
			if find(i) == find(j) {
				continue
			}
			d := distance(f.region, g.region, 2*l.Spacing)
			switch {
			case d == nil:
			case d.Sign() == 0:
				root[find(i)] = find(j)
			default:
				nears = append(nears, near{i, j, d})
			}
		}
	}
	number := map[int]int{}
	for i := range n {
		f := &l.Figures[i]
		if f.region == nil {
			f.shape = -1
			continue
		}
		k, ok := number[find(i)]
		if !ok {
			k = len(l.Shapes)
			number[find(i)] = k
			l.Shapes = append(l.Shapes, Shape{Top: f.Top, Fixed: Drawn})
		}
		f.shape = k
		l.Shapes[k].Figures = append(l.Shapes[k].Figures, i)
	}
	best := map[[2]int]*big.Rat{}
	for _, p := range nears {
		a, b := l.Figures[p.i].shape, l.Figures[p.j].shape
		key := [2]int{min(a, b), max(a, b)}
		if d := best[key]; a != b && (d == nil || p.d.Cmp(d) < 0) {
			best[key] = p.d
		}
	}
	anyMask := new(big.Rat).SetInt64(2 * l.Layer.AnyMask)
	anyMask.Mul(anyMask, anyMask)
	for a := range l.Shapes {
		for b := a + 1; b < len(l.Shapes); b++ {
			if d := best[[2]int{a, b}]; d != nil {
				if d.Cmp(anyMask) < 0 {
					l.AnyMask++
				}
				l.Pairs = append(l.Pairs, NearPair{a, b, new(big.Rat).Mul(d, big.NewRat(1, 4))})
			}
		}
	}
	for k := range l.Shapes {
		s.fix(l, &l.Shapes[k])
	}
	l.components()
}

// fix finds the mask on which a shape arrives.
func (s *Solution) fix(l *LayerSolution, sh *Shape) {
	if l.Redo {
		return
	}
	var arrives [3]bool
	for _, i := range sh.Figures {
		m := l.Figures[i].Arrives
		arrives[m+1] = true
		if m != Drawn {
			sh.Fixed = m
		}
	}
	if arrives[A+1] && arrives[B+1] {
		if !arrives[0] {
			s.Open = "a shape arrives on both masks and may be a stitch that is kept"
		} else if s.Status == 0 {
			s.Status, s.Why = 2, "a shape with drawn figures arrives on both masks"
		}
	}
}

// components finds what hangs together and tries all assignments.
func (l *LayerSolution) components() {
	of := make([]int, len(l.Shapes))
	for k := range of {
		of[k] = k
	}
	for changed := true; changed; { // the least number spreads
		changed = false
		for _, p := range l.Pairs {
			if m := min(of[p.A], of[p.B]); of[p.A] != m || of[p.B] != m {
				of[p.A], of[p.B], changed = m, m, true
			}
		}
	}
	number := map[int]int{}
	for k := range l.Shapes {
		c, ok := number[of[k]]
		if !ok {
			c = len(l.Components)
			number[of[k]] = c
			l.Components = append(l.Components, Component{})
		}
		l.Shapes[k].Component = c
		l.Components[c].Shapes = append(l.Components[c].Shapes, k)
	}
	for i, p := range l.Pairs {
		c := &l.Components[l.Shapes[p.A].Component]
		c.Pairs = append(c.Pairs, i)
	}
	for i := range l.Components {
		c := &l.Components[i]
		c.Least = l.least(c)
		l.WidestComponent = max(l.WidestComponent, len(c.Shapes))
		switch {
		case c.Least == Unknown || l.Least == Unknown:
			l.Least, l.Unresolved = Unknown, Unknown
		case c.Least > 0:
			l.Least += c.Least
			l.Unresolved++
		}
	}
}

// least tries all assignments of a component.
func (l *LayerSolution) least(c *Component) int {
	n := len(c.Shapes)
	if n > MostShapes {
		return Unknown
	}
	bit := map[int]int{}
	var fixed, onB uint
	for i, k := range c.Shapes {
		bit[k] = i
		if m := l.Shapes[k].Fixed; m != Drawn {
			fixed |= 1 << i
			onB |= uint(m) << i
		}
	}
	after := make([]uint, n) // by shape: those of its near pairs that come after it
	for _, i := range c.Pairs {
		a, b := bit[l.Pairs[i].A], bit[l.Pairs[i].B]
		after[min(a, b)] |= 1 << max(a, b)
	}
	best := len(c.Pairs)
	for masks := range uint(1) << n { // bit i: shape i is on B
		if masks&fixed != onB {
			continue
		}
		same := 0
		for i, others := range after {
			if masks>>i&1 != 0 {
				same += bits.OnesCount(others & masks)
			} else {
				same += bits.OnesCount(others &^ masks)
			}
		}
		best = min(best, same)
	}
	return best
}

// String tells the numbers, to be read in a failure.
func (s *Solution) String() string {
	text := ""
	if s.Status != 0 {
		text += fmt.Sprintf("to be refused with status %d: %s\n", s.Status, s.Why)
	}
	for i := range s.Layers {
		l := &s.Layers[i]
		text += fmt.Sprintf("%s: figures %d, already masked %d, shapes %d, near pairs %d, components %d, unresolved components %d, least unresolved pairs %d, any-mask pairs %d\n",
			l.Name, l.Drawn, l.Masked, len(l.Shapes), len(l.Pairs), len(l.Components), l.Unresolved, l.Least, l.AnyMask)
	}
	return text
}
