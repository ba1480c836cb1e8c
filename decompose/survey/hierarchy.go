package survey

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"maskpair/decompose"
	"maskpair/gds"
)

// This file joins what was counted structure by structure: how often each is placed, how deep they stand, and what that makes of
// the counts.

// finish gives the survey once the stream is read.
func (x *scan) finish() (*Survey, error) {
	out := x.out
	out.Structures = len(x.structures)
	up, err := x.order()
	if err != nil {
		return nil, err
	}
	placed := x.place(up)
	x.sumUp(placed)
	return out, nil
}

// order gives the structures, children before parents, or the loop that they are placed in. Nothing recurs: a hierarchy may be
// as deep as it has structures.
func (x *scan) order() ([]int32, error) {
	const (
		unseen = iota
		open
		done
	)
	type frame struct {
		structure int32
		next      int
	}
	seen := make([]uint8, len(x.structures))
	up := make([]int32, 0, len(x.structures))
	var stack []frame
	for root := range x.structures {
		if seen[root] != unseen {
			continue
		}
		seen[root] = open
		stack = append(stack[:0], frame{int32(root), x.structures[root].firstRef})
		for len(stack) > 0 {
			f := &stack[len(stack)-1]
			if f.next == x.structures[f.structure].endRef {
				seen[f.structure] = done
				up = append(up, f.structure)
				stack = stack[:len(stack)-1]
				continue
			}
			child := x.defined[x.refs[f.next].target]
			f.next++
			if child < 0 || seen[child] == done {
				continue
			}
			if seen[child] == open {
				var names []string
				for _, g := range stack {
					if len(names) > 0 || g.structure == child {
						names = append(names, gds.Printable(x.name(g.structure)))
					}
				}
				names = append(names, gds.Printable(x.name(child)))
				return nil, &decompose.InputError{Structure: gds.Printable(x.name(child)),
					Msg: fmt.Sprintf("places itself by the loop %s; remove one of these references", strings.Join(names, " > "))}
			}
			seen[child] = open
			stack = append(stack, frame{child, x.structures[child].firstRef})
		}
	}
	return up, nil
}

func (x *scan) name(structure int32) string { return x.names[x.structures[structure].name] }

// place counts the placements of each structure, and finds tops, depth and what is missing.
func (x *scan) place(up []int32) []uint64 {
	under := make([]bool, len(x.names))
	for _, r := range x.refs {
		under[r.target] = true
	}
	for id, name := range x.names { // numbers were dealt as names were met
		if under[id] && x.defined[id] < 0 {
			x.out.Missing = append(x.out.Missing, name)
		}
	}
	placed := make([]uint64, len(x.structures))
	level := make([]int, len(x.structures))
	for i := range x.structures {
		if !under[x.structures[i].name] {
			x.out.Tops = append(x.out.Tops, x.name(int32(i)))
			placed[i] = 1
			level[i] = 1
		}
	}
	for k := len(up) - 1; k >= 0; k-- { // parents before children
		s := up[k]
		x.out.Depth = max(x.out.Depth, level[s])
		for _, r := range x.refs[x.structures[s].firstRef:x.structures[s].endRef] {
			child := x.defined[r.target]
			if child < 0 {
				continue
			}
			n := multiply(placed[s], r.times)
			placed[child] = add(placed[child], n)
			x.out.Placements = add(x.out.Placements, n)
			level[child] = max(level[child], level[s]+1)
		}
	}
	return placed
}

// sumUp multiplies counts by placements and adds them up layer by layer.
func (x *scan) sumUp(placed []uint64) {
	layers := make([]Layer, len(x.layers))
	for l, id := range x.layers {
		layers[id].Layer = l
	}
	type key struct {
		layer int32
		width uint32
	}
	widths := map[key]uint64{}
	for i := range x.structures {
		s := &x.structures[i]
		for _, t := range x.tallies[s.firstTally:s.endTally] {
			l := &layers[t.layer]
			l.Boundaries += t.boundaries
			l.Paths += t.paths
			l.Texts += t.texts
			l.Boxes += t.boxes
			l.Nodes += t.nodes
			l.Flat = add(l.Flat, multiply(uint64(t.boundaries+t.paths), placed[i]))
			l.Manhattan = add(l.Manhattan, multiply(uint64(t.manhattan), placed[i]))
			l.Rectangles = add(l.Rectangles, multiply(uint64(t.rectangles), placed[i]))
			if w := int64(t.smallest); w != 0 && (l.Smallest == 0 || w < l.Smallest) {
				l.Smallest = w
			}
			l.WidthsCut = l.WidthsCut || t.widthsCut
		}
		for _, w := range x.widths[s.firstWidth:s.endWidth] {
			k := key{w.layer, w.width}
			widths[k] = add(widths[k], multiply(w.drawn, placed[i]))
		}
	}
	for k, n := range widths {
		layers[k.layer].Widths = append(layers[k.layer].Widths, Width{int64(k.width), n})
	}
	for i := range layers {
		w := layers[i].Widths
		slices.SortFunc(w, func(a, b Width) int { return cmp.Or(cmp.Compare(b.Flat, a.Flat), cmp.Compare(a.Width, b.Width)) })
		layers[i].Widths = w[:min(len(w), widthsKept)]
	}
	slices.SortFunc(layers, func(a, b Layer) int {
		return cmp.Or(cmp.Compare(a.Layer.Layer, b.Layer.Layer), cmp.Compare(a.Layer.Type, b.Layer.Type))
	})
	x.out.Layers = layers
}
