package verify

import (
	"fmt"
	"math"
	"strings"

	"maskpair/gds"
)

// This file reads the hierarchy of a stream: its tops, the order of structures from the bottom up, and loops.

// tree is the hierarchy of one stream.
type tree struct {
	lib    *gds.Library
	tops   []int32 // structures that nothing places, in file order
	bottom []int32 // all structures, each behind what it places
}

// newTree orders the structures. A structure that is placed inside itself is an error that names the loop.
func newTree(lib *gds.Library) (*tree, error) {
	t := &tree{lib: lib}
	n := len(lib.Structures)
	placed := make([]bool, n)
	for i := range lib.Refs {
		if to := lib.Refs[i].Target; to >= 0 {
			placed[to] = true
		}
	}
	for s := range n {
		if !placed[s] {
			t.tops = append(t.tops, int32(s))
		}
	}
	// Depth first, on a stack of our own: next[s] is the next reference of s to be followed; 0 before, done behind.
	next := make([]uint32, n)
	state := make([]uint8, n) // 0 not met, 1 on the stack, 2 done
	var stack []int32
	for root := range n {
		if state[root] != 0 {
			continue
		}
		stack = append(stack[:0], int32(root))
		state[root] = 1
		next[root] = lib.Structures[root].FirstRef
		for len(stack) > 0 {
			s := stack[len(stack)-1]
			if next[s] == lib.Structures[s].EndRef {
				state[s] = 2
				t.bottom = append(t.bottom, s)
				stack = stack[:len(stack)-1]
				continue
			}
			to := lib.Refs[next[s]].Target
			next[s]++
			if to < 0 || state[to] == 2 {
				continue
			}
			if state[to] == 1 {
				return nil, fmt.Errorf("structure %s is placed inside itself: %s; take one of these references out",
					gds.Printable(lib.Structures[to].Name), t.loop(stack, to))
			}
			state[to] = 1
			next[to] = lib.Structures[to].FirstRef
			stack = append(stack, to)
		}
	}
	return t, nil
}

// loop words the way from a structure on the stack back to itself.
func (t *tree) loop(stack []int32, to int32) string {
	var names []string
	for _, s := range stack {
		if s == to || names != nil {
			names = append(names, gds.Printable(t.lib.Structures[s].Name))
		}
	}
	names = append(names, names[0])
	if len(names) > 9 {
		names = append(append(names[:4:4], "..."), names[len(names)-4:]...)
	}
	return strings.Join(names, " > ")
}

// times is the number of placements that a reference makes.
func (t *tree) times(ref *gds.Ref) uint64 {
	if p := t.lib.PlacementOf(ref); p != nil {
		return uint64(p.Columns) * uint64(p.Rows)
	}
	return 1
}

// sums adds up what own gives for each structure over all that is placed under it, up to the largest uint64.
func (t *tree) sums(own func(s int32) uint64) []uint64 {
	out := make([]uint64, len(t.lib.Structures))
	for _, s := range t.bottom {
		sum := own(s)
		st := &t.lib.Structures[s]
		for r := st.FirstRef; r < st.EndRef; r++ {
			ref := &t.lib.Refs[r]
			if ref.Target < 0 || out[ref.Target] == 0 {
				continue
			}
			n, below := t.times(ref), out[ref.Target]
			if below > math.MaxUint64/n || sum > math.MaxUint64-n*below {
				sum = math.MaxUint64
				break
			}
			sum += n * below
		}
		out[s] = sum
	}
	return out
}

// each calls visit for every placement under s of a structure for which count says more than 0; count holds sums over what is
// placed under each structure. The order is that of the file, a structure before what it places.
func (t *tree) each(s int32, at gds.Transform, count []uint64, visit func(s int32, at gds.Transform) error) error {
	if count[s] == 0 {
		return nil
	}
	if err := visit(s, at); err != nil {
		return err
	}
	st := &t.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &t.lib.Refs[r]
		if ref.Target < 0 || count[ref.Target] == 0 {
			continue
		}
		p := t.lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if p != nil {
			columns, rows = p.Columns, p.Rows
		}
		for row := range rows {
			for column := range columns {
				if err := t.each(ref.Target, gds.Compose(at, ref, p, column, row), count, visit); err != nil {
					return err
				}
			}
		}
	}
	return nil
}
