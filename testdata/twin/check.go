package twin

import (
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
)

// This file judges an output stream: every figure on exactly one mask and unchanged, every shape on one mask, no near pair
// on one mask where two masks can do it, and the least number of them where they cannot.

// Verdict is what an output stream turned out to be.
type Verdict struct {
	Masks      [][]Mask // by deck layer and shape
	Unresolved []int    // by deck layer: near pairs on one mask
}

// place is a figure at a place of a top, without its layer.
type place struct{ top, key string }

// Check judges a stream that the program wrote for the layout.
func (s *Solution) Check(stream []byte) (*Verdict, error) {
	out, err := Read(stream)
	if err != nil {
		return nil, fmt.Errorf("the output: %v", err)
	}
	if want, got := s.Layout.Tops(), out.Tops(); !slices.Equal(want, got) {
		return nil, fmt.Errorf("the output has the tops %q, want %q", got, want)
	}
	found, err := s.figures(out, s.tops())
	if err != nil {
		return nil, fmt.Errorf("the output: %v", err)
	}
	roles := s.Deck.roles()
	others := map[string]int{} // how often all else is in the output, less how often in the input
	for n, l := range map[int]*Layout{1: out, -1: s.Layout} {
		if _, err := l.Flatten(2*MostFlat, func(f Flat) {
			if _, ok := roles[f.Element.Layer]; !ok || f.Kind > Path {
				others[fmt.Sprintf("%s: %s %s", f.Top, layerName(f.Element.Layer), f.Key())] += n
			}
		}); err != nil {
			return nil, err
		}
	}
	for _, key := range slices.Sorted(maps.Keys(others)) {
		n := others[key]
		if n > 0 && s.mark(key) {
			continue
		}
		if n != 0 {
			return nil, fmt.Errorf("the output has %+d of what is no figure of the deck: %s", n, key)
		}
	}
	v := &Verdict{}
	for i := range s.Layers {
		l := &s.Layers[i]
		masks, err := s.checkLayer(l, found[i])
		if err != nil {
			return nil, fmt.Errorf("%s: %v", l.Name, err)
		}
		n, err := s.pairs(l, masks)
		if err != nil {
			return nil, fmt.Errorf("%s: %v", l.Name, err)
		}
		v.Masks, v.Unresolved = append(v.Masks, masks), append(v.Unresolved, n)
	}
	if s.Only != "" && s.Open == "" {
		return v, s.checkBeside(out, v)
	}
	return v, nil
}

// figures gives by deck layer how often each figure is in a layout drawn, on A and on B, under some cells.
func (s *Solution) figures(l *Layout, tops []string) ([]map[place]*[3]int, error) {
	roles := s.Deck.roles()
	found := make([]map[place]*[3]int, len(s.Layers))
	for i := range found {
		found[i] = map[place]*[3]int{}
	}
	_, err := l.flatten(tops, "", 2*MostFlat, func(f Flat) {
		if r, ok := roles[f.Element.Layer]; ok && f.Kind <= Path {
			add(found[r.layer], f, r.arrives)
		}
	})
	return found, err
}

func add(found map[place]*[3]int, f Flat, m Mask) {
	p := place{f.Top, f.Key()}
	if found[p] == nil {
		found[p] = new([3]int)
	}
	found[p][m+1]++
}

// checkBeside judges the other tops where one structure was taken alone: what they place under it is on the masks that it has
// there, all else is as it was.
func (s *Solution) checkBeside(out *Layout, v *Verdict) error {
	tops := slices.DeleteFunc(s.Layout.Tops(), func(top string) bool { return top == s.Only })
	got, err := s.figures(out, tops)
	if err != nil {
		return fmt.Errorf("the output: %v", err)
	}
	roles := s.Deck.roles()
	want := make([]map[place]*[3]int, len(s.Layers))
	for i := range want {
		want[i] = map[place]*[3]int{}
	}
	placement, next := 0, make([]int, len(s.Layers)) // figures come in the same order in each placement
	if _, err := s.Layout.flatten(tops, s.Only, 2*MostFlat, func(f Flat) {
		r, ok := roles[f.Element.Layer]
		if !ok || f.Kind > Path {
			return
		}
		m := r.arrives
		if f.within > 0 {
			if f.within != placement {
				placement, next = f.within, make([]int, len(s.Layers))
			}
			l := &s.Layers[r.layer]
			fig := &l.Figures[next[r.layer]]
			next[r.layer]++
			if fig.region != nil && (m == Drawn || l.Redo) {
				if m == Drawn && l.KeepDrawn {
					add(want[r.layer], f, Drawn)
				}
				m = v.Masks[r.layer][fig.shape]
			}
		}
		add(want[r.layer], f, m)
	}); err != nil {
		return err
	}
	for i := range want {
		for p, n := range want[i] {
			if got[i][p] == nil || *got[i][p] != *n {
				return fmt.Errorf("%s: beside %s, a figure ought to be %v times drawn, on A, on B, and is %v: %s: %s", s.Layers[i].Name, s.Only, *n, got[i][p], p.top, p.key)
			}
		}
		for p, n := range got[i] {
			if want[i][p] == nil {
				return fmt.Errorf("%s: beside %s, the output has %v times drawn, on A, on B what the input has not: %s: %s", s.Layers[i].Name, s.Only, *n, p.top, p.key)
			}
		}
	}
	return nil
}

// mark tells whether what the key names lies on a layer of marks.
func (s *Solution) mark(key string) bool {
	for _, k := range s.Deck.Marks {
		for _, top := range s.Layout.Tops() {
			if strings.HasPrefix(key, fmt.Sprintf("%s: %s %v ", top, layerName(k), Boundary)) {
				return true
			}
		}
	}
	return false
}

// checkLayer finds every figure of the input in the output and gives the mask of every shape.
func (s *Solution) checkLayer(l *LayerSolution, found map[place]*[3]int) ([]Mask, error) {
	type entry struct {
		count [3]int
		shape int
		fig   *Figure
	}
	want := map[place]*entry{}
	for i := range l.Figures {
		f := &l.Figures[i]
		p := place{f.Top, f.Key()}
		e := want[p]
		if e == nil {
			e = &entry{shape: f.shape, fig: f}
			want[p] = e
		}
		e.count[f.Arrives+1]++
	}
	for p, got := range found {
		if want[p] == nil {
			return nil, fmt.Errorf("the output has %v times drawn, on A, on B in %s what the input has not: %s", *got, p.top, p.key)
		}
	}
	masks := make([]Mask, len(l.Shapes))
	for k := range masks {
		masks[k] = Drawn
	}
	for p, e := range want {
		var got [3]int
		if found[p] != nil {
			got = *found[p]
		}
		fault := func(format string, args ...any) error {
			return fmt.Errorf("%s, which came %v times and is in the output %v times drawn, on A, on B: %s: %s", fmt.Sprintf(format, args...), e.count, got, p.top, p.key)
		}
		drawn, onA, onB := e.count[0], e.count[1], e.count[2]
		if l.Faded > 0 && e.fig.fades() {
			if sum := drawn + onA + onB; got[0]+got[1]+got[2] != sum && !(l.KeepDrawn && got[0] == drawn && got[1]+got[2] == sum) {
				return nil, fault("a figure was lost or doubled")
			}
			continue
		}
		if e.fig.region == nil {
			if got != e.count {
				return nil, fault("a figure that covers nothing did not stay")
			}
			continue
		}
		left := 0
		if l.KeepDrawn {
			left = drawn
		}
		if got[0] != left {
			return nil, fault("%d figures ought to be left as drawn", left)
		}
		if got[1]+got[2] != drawn+onA+onB {
			return nil, fault("not every figure is on a mask once")
		}
		if !l.Redo && (got[1] < onA || got[2] < onB) {
			return nil, fault("a figure that arrived on a mask left it")
		}
		if s.Open != "" {
			continue
		}
		m := A
		if got[2] > 0 {
			m = B
		}
		if got[1] > 0 && got[2] > 0 {
			return nil, fault("a figure is on both masks")
		}
		if masks[e.shape] == Drawn {
			masks[e.shape] = m
		}
		if masks[e.shape] != m {
			return nil, fault("a shape is on both masks; one of its figures is")
		}
		if fixed := l.Shapes[e.shape].Fixed; fixed != Drawn && fixed != m {
			return nil, fault("a shape left the mask on which it arrived")
		}
	}
	return masks, nil
}

// pairs counts near pairs on one mask, and holds them against the least number of each component.
func (s *Solution) pairs(l *LayerSolution, masks []Mask) (int, error) {
	if s.Open != "" {
		return Unknown, nil
	}
	sum := 0
	for _, c := range l.Components {
		n := 0
		for _, i := range c.Pairs {
			if masks[l.Pairs[i].A] == masks[l.Pairs[i].B] {
				n++
			}
		}
		if c.Least != Unknown && n != c.Least {
			return 0, fmt.Errorf("the component of %s has %d unresolved pairs, the least is %d", l.box(c.Shapes[0]), n, c.Least)
		}
		sum += n
	}
	return sum, nil
}

// box tells where a shape lies.
func (l *LayerSolution) box(shape int) string {
	low, high := l.bounds(shape)
	return fmt.Sprintf("the shape at (%g, %g) to (%g, %g) in %s", float64(low.x)/2, float64(low.y)/2, float64(high.x)/2, float64(high.y)/2, l.Shapes[shape].Top)
}

// bounds gives the bounding box of a shape, in half units.
func (l *LayerSolution) bounds(shape int) (low, high grid) {
	for i, k := range l.Shapes[shape].Figures {
		r := l.Figures[k].region
		if i == 0 {
			low, high = r.low, r.high
		}
		low, high = grid{min(low.x, r.low.x), min(low.y, r.low.y)}, grid{max(high.x, r.high.x), max(high.y, r.high.y)}
	}
	return low, high
}

// FigureMasks gives for every place of a figure, in words, on which mask an output stream has it. Equal texts in several
// streams mean that they agree place by place.
func (d *Deck) FigureMasks(stream []byte) ([]string, error) {
	l, err := Read(stream)
	if err != nil {
		return nil, err
	}
	var out []string
	roles := d.roles()
	_, err = l.Flatten(math.MaxInt32, func(f Flat) {
		if r, ok := roles[f.Element.Layer]; ok && f.Kind <= Path {
			out = append(out, fmt.Sprintf("%s: %s %v: %s", f.Top, d.Layers[r.layer].Name, r.arrives, f.Key()))
		}
	})
	slices.Sort(out)
	return out, err
}
