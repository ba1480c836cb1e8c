package orders

import (
	"fmt"

	"maskpair/gds"
)

// This file compares two results of sketches square by square.

// SlowComparison counts how one layer of two results differs.
type SlowComparison struct {
	Earlier, Later                               int
	Same, Moved, Restitched, Reshaped, New, Gone int
	OnOther                                      int // on one mask, and the other one covered more of it
}

// square is a unit square of a top.
type square struct {
	top  string
	x, y int64
}

// pixelShape is a shape as squares.
type pixelShape struct {
	squares map[square]bool
	on      [2]map[square]bool
}

// pixels gives the shapes of a layer, and the squares of each mask.
func pixels(stream []byte, layer int) ([]pixelShape, error) {
	d, err := flatten(stream, SketchLayers())
	if err != nil {
		return nil, err
	}
	var figures []figure
	for _, f := range d.figures {
		if int(f.layer) == layer && f.mask >= 0 {
			figures = append(figures, f)
		}
	}
	root := make([]int, len(figures))
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			i = root[i]
		}
		return i
	}
	for i := range figures {
		for k := range i {
			if figures[i].top == figures[k].top && figures[i].box.touches(figures[k].box) {
				root[find(i)] = find(k)
			}
		}
	}
	index := map[int]int{}
	var out []pixelShape
	for i, f := range figures {
		k, ok := index[find(i)]
		if !ok {
			k = len(out)
			index[find(i)] = k
			out = append(out, pixelShape{map[square]bool{}, [2]map[square]bool{{}, {}}})
		}
		top := d.lib.Structures[d.tops[f.top]].Name
		for y := f.box.y1; y < f.box.y2; y += 2 {
			for x := f.box.x1; x < f.box.x2; x += 2 {
				out[k].squares[square{top, x, y}] = true
				out[k].on[f.mask][square{top, x, y}] = true
			}
		}
	}
	return out, nil
}

func sameSquares(a, b map[square]bool) bool {
	if len(a) != len(b) {
		return false
	}
	for s := range a {
		if !b[s] {
			return false
		}
	}
	return true
}

func overlap(a, b map[square]bool) (n int) {
	for s := range a {
		if b[s] {
			n++
		}
	}
	return n
}

// CompareSlow compares two results whose tops have the same names.
func CompareSlow(earlier, later []byte) ([]SlowComparison, error) {
	var out []SlowComparison
	for layer := range SketchLayers() {
		was, err := pixels(earlier, layer)
		if err != nil {
			return nil, err
		}
		now, err := pixels(later, layer)
		if err != nil {
			return nil, err
		}
		c := SlowComparison{Earlier: len(was), Later: len(now)}
		for _, s := range now {
			var over []pixelShape
			var on [2]int
			cut := false
			for _, w := range was {
				if overlap(s.squares, w.squares) > 0 {
					over = append(over, w)
					on[0] += overlap(s.squares, w.on[0])
					on[1] += overlap(s.squares, w.on[1])
					cut = cut || len(w.on[0]) > 0 && len(w.on[1]) > 0
				}
			}
			mine := 0
			if len(s.on[0]) == 0 {
				mine = 1
			}
			other := !cut && (len(s.on[0]) == 0 || len(s.on[1]) == 0) && on[1-mine] > on[mine]
			if other {
				c.OnOther++
			}
			switch {
			case len(over) == 0:
				c.New++
			case len(over) > 1 || !sameSquares(s.squares, over[0].squares):
				c.Reshaped++
			case other:
				c.Moved++
			case !sameSquares(s.on[0], over[0].on[0]) || !sameSquares(s.on[1], over[0].on[1]):
				c.Restitched++
			default:
				c.Same++
			}
		}
		for _, w := range was {
			gone := true
			for _, s := range now {
				gone = gone && overlap(s.squares, w.squares) == 0
			}
			if gone {
				c.Gone++
			}
		}
		out = append(out, c)
	}
	return out, nil
}

// SlowFrozen is what frozen masks of a layer come to.
type SlowFrozen struct {
	Lost, Gained [2]int // squares by mask
	New          int    // shapes without a memory, where both masks are frozen
}

// FrozenSlow holds an output against a baseline: every shape that the baseline has on a frozen mask must be there, and with a single
// frozen mask no other shape may be on it. The layers' memories are those of s.
func (s *Slow) FrozenSlow(output, baseline []byte, frozen [2]bool) ([]SlowFrozen, error) {
	var out []SlowFrozen
	for layer := range s.Layers {
		l := &s.Layers[layer]
		was, err := pixels(baseline, layer)
		if err != nil {
			return nil, err
		}
		now, err := pixels(output, layer)
		if err != nil {
			return nil, err
		}
		r := SlowFrozen{}
		both := frozen[0] && frozen[1]
		made := int8(boolInt(frozen[1]))
		fresh := map[square]bool{} // squares of new shapes
		for k := range l.Shapes {
			b := l.first[k]
			first := square{l.top[k], b.x1, b.y1}
			for _, p := range now {
				if !p.squares[first] {
					continue
				}
				mask := int8(0)
				if len(p.on[0]) == 0 {
					mask = 1
				}
				m := l.memory[k]
				switch {
				case both && m >= 0 && mask != m:
					return nil, fmt.Errorf("layer %d: the shape with %v left its frozen mask", layer, b)
				case !both && (mask == made) != (m == made):
					return nil, fmt.Errorf("layer %d: the shape with %v is on %d, in the baseline on %d", layer, b, mask, m)
				}
				if both && m < 0 {
					r.New++
					for q := range p.squares {
						fresh[q] = true
					}
				}
			}
		}
		for m := range frozen {
			if !frozen[m] {
				continue
			}
			before, after := map[square]bool{}, map[square]bool{}
			for _, p := range was {
				for q := range p.on[m] {
					before[q] = true
				}
			}
			for _, p := range now {
				for q := range p.on[m] {
					after[q] = true
				}
			}
			for q := range before {
				r.Lost[m] += boolInt(!after[q])
			}
			for q := range after {
				r.Gained[m] += boolInt(!before[q] && !fresh[q])
			}
		}
		out = append(out, r)
	}
	return out, nil
}

// Tops gives the names of the tops of a stream.
func Tops(stream []byte) ([]string, error) {
	d, err := flatten(stream, []Layer{{Drawn: []gds.LayerType{{Layer: 1}}}})
	if err != nil {
		return nil, err
	}
	var out []string
	for _, t := range d.tops {
		out = append(out, d.lib.Structures[t].Name)
	}
	return out, nil
}
