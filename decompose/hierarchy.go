package decompose

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"maskpair/gds"
)

// This file reads the hierarchy of a stream: which structures are tops, in which order structures stand above each other, how often
// each is placed, and that no structure places itself. Everything is counted before anything is flattened, with saturating
// arithmetic, so that a doubling bomb is refused by number.

// hierarchy is the tree of references, structure by structure.
type hierarchy struct {
	lib    *gds.Library
	tops   []int32 // in file order
	byName []int   // indices into tops, by name of the top
	bottom []int32 // structures under the tops, children before parents
	down   []int32 // all structures, children before parents
	placed []uint64
	// odd tells of each structure whether something under it is placed by a magnification or an odd angle.
	odd []bool
}

const saturated = math.MaxUint64

// newHierarchy orders the structures. only names the single top to take, or is empty.
func newHierarchy(lib *gds.Library, only string) (*hierarchy, error) {
	under := make([]bool, len(lib.Structures))
	for i := range lib.Refs {
		if t := lib.Refs[i].Target; t >= 0 {
			under[t] = true
		}
	}
	var tops []int32
	for i := range lib.Structures {
		if only == "" && !under[i] || only != "" && lib.Structures[i].Name == only {
			tops = append(tops, int32(i))
		}
	}
	if only != "" && len(tops) == 0 {
		return nil, &OrderError{Msg: fmt.Sprintf("--top %s: no such structure in the stream; name one that is in it", only)}
	}
	return newHierarchyUnder(lib, tops)
}

// newHierarchyUnder orders the structures under some of them, which count as tops.
func newHierarchyUnder(lib *gds.Library, tops []int32) (*hierarchy, error) {
	h := &hierarchy{lib: lib, tops: tops, placed: make([]uint64, len(lib.Structures)), odd: make([]bool, len(lib.Structures))}
	if err := h.checkLoops(); err != nil {
		return nil, err
	}
	h.byName = make([]int, len(h.tops))
	for i := range h.byName {
		h.byName[i] = i
	}
	slices.SortFunc(h.byName, func(a, b int) int { return strings.Compare(h.name(h.tops[a]), h.name(h.tops[b])) })
	h.order()
	return h, nil
}

// checkLoops walks all references, without recursion (a hierarchy may be deep), and names the first loop of structures.
func (h *hierarchy) checkLoops() error {
	const (
		unseen = iota
		open
		done
	)
	type frame struct {
		structure int32
		next      uint32
	}
	state := make([]uint8, len(h.lib.Structures))
	var stack []frame
	for root := range h.lib.Structures {
		if state[root] != unseen {
			continue
		}
		state[root] = open
		stack = append(stack[:0], frame{int32(root), h.lib.Structures[root].FirstRef})
		for len(stack) > 0 {
			f := &stack[len(stack)-1]
			if f.next == h.lib.Structures[f.structure].EndRef {
				state[f.structure] = done
				h.bottom = append(h.bottom, f.structure)
				stack = stack[:len(stack)-1]
				continue
			}
			t := h.lib.Refs[f.next].Target
			f.next++
			if t < 0 || state[t] == done {
				continue
			}
			if state[t] == open {
				var names []string
				for _, g := range stack {
					if len(names) > 0 || g.structure == t {
						names = append(names, h.lib.Structures[g.structure].Name)
					}
				}
				names = append(names, h.lib.Structures[t].Name)
				return &InputError{Structure: h.lib.Structures[t].Name,
					Msg: fmt.Sprintf("places itself by the loop %s; remove one of these references", strings.Join(names, " > "))}
			}
			state[t] = open
			stack = append(stack, frame{t, h.lib.Structures[t].FirstRef})
		}
	}
	return nil
}

// order keeps what is placed under the tops, counts the placements, and finds what has odd placements below it.
func (h *hierarchy) order() {
	for _, t := range h.tops {
		h.placed[t] = 1
	}
	h.down = h.bottom
	var kept []int32
	for i := len(h.bottom) - 1; i >= 0; i-- {
		s := h.bottom[i]
		if h.placed[s] == 0 {
			continue
		}
		kept = append(kept, s)
		for r := h.lib.Structures[s].FirstRef; r < h.lib.Structures[s].EndRef; r++ {
			ref := &h.lib.Refs[r]
			if ref.Target >= 0 {
				n := saturatingMul(h.placed[s], uint64(elements(h.lib, ref)))
				h.placed[ref.Target] = saturatingAdd(h.placed[ref.Target], n)
			}
		}
	}
	for i, j := 0, len(kept)-1; i < j; i, j = i+1, j-1 {
		kept[i], kept[j] = kept[j], kept[i]
	}
	h.bottom = kept
	for _, s := range kept {
		for r := h.lib.Structures[s].FirstRef; r < h.lib.Structures[s].EndRef; r++ {
			ref := &h.lib.Refs[r]
			if ref.Target >= 0 && (h.odd[ref.Target] || !rigid(h.lib, ref)) {
				h.odd[s] = true
			}
		}
	}
}

// name gives the name of a structure.
func (h *hierarchy) name(s int32) string { return h.lib.Structures[s].Name }

func saturatingAdd(a, b uint64) uint64 {
	if a+b < a {
		return saturated
	}
	return a + b
}

func saturatingMul(a, b uint64) uint64 {
	if a != 0 && b > saturated/a {
		return saturated
	}
	return a * b
}
