package stitch

import (
	"encoding/binary"
	"slices"

	"maskpair/decompose/geom"
)

// This file finds the candidates of shapes that recur only once. Most shapes of a layout, with what is near to them, are others again, moved.

// Kinds remembers what Find said, by shape and surroundings. Its rules, and what Rules.Refuse looks at, must not depend on where a shape lies. It may be used by one goroutine at a time.
type Kinds struct {
	rules Rules
	known map[string]kind
	key   []byte
}

type kind struct {
	split Split
	why   Reason
}

// NewKinds begins with nothing known.
func NewKinds(rules Rules) *Kinds { return &Kinds{rules: rules, known: map[string]kind{}} }

// mostKeyed is the number of rectangles from which a shape is looked at by itself: large ones hardly recur.
const mostKeyed = 1 << 13

// seen gives what lies within the spacing of the box around a shape, in ascending order: of a long neighbour, no more matters.
func seen(neighbours, shape []geom.Rect, spacing int64) []geom.Rect {
	box := shape[0]
	for _, r := range shape[1:] {
		box = join(box, r)
	}
	out := make([]geom.Rect, 0, len(neighbours))
	for _, r := range neighbours {
		r = geom.Rect{X1: max(r.X1, box.X1-spacing), Y1: max(r.Y1, box.Y1-spacing), X2: min(r.X2, box.X2+spacing), Y2: min(r.Y2, box.Y2+spacing)}
		if r.X1 <= r.X2 && r.Y1 <= r.Y2 {
			out = append(out, r)
		}
	}
	slices.SortFunc(out, compareRects)
	return slices.Compact(out)
}

// Find is the function Find under the rules of k.
func (k *Kinds) Find(shape, neighbours, keepOut []geom.Rect) (Split, Reason) {
	if len(shape) == 0 || len(shape)+len(neighbours)+len(keepOut) > mostKeyed {
		return Find(shape, neighbours, keepOut, k.rules)
	}
	// Moves by multiples of the grid keep what lies on it.
	shape = slices.SortedFunc(slices.Values(shape), compareRects)
	x, y := floorTo(shape[0].X1, k.rules.Grid), floorTo(shape[0].Y1, k.rules.Grid)
	k.key = k.key[:0]
	var moved [3][]geom.Rect
	for i, list := range [3][]geom.Rect{shape, seen(neighbours, shape, k.rules.Spacing), keepOut} {
		moved[i] = shiftAll(list, -x, -y)
		k.key = binary.AppendVarint(k.key, int64(len(list)))
		for _, r := range moved[i] {
			for _, v := range [4]int64{r.X1, r.Y1, r.X2, r.Y2} {
				k.key = binary.AppendVarint(k.key, v)
			}
		}
	}
	found, ok := k.known[string(k.key)]
	if !ok {
		found.split, found.why = Find(moved[0], moved[1], moved[2], k.rules)
		k.known[string(k.key)] = found
	}
	return found.split.shift(x, y), found.why
}

// shift moves a split.
func (s *Split) shift(x, y int64) Split {
	out := Split{Cores: make([][]geom.Rect, len(s.Cores)), Cuts: make([]Cut, len(s.Cuts))}
	for i, core := range s.Cores {
		out.Cores[i] = shiftAll(core, x, y)
	}
	for i, c := range s.Cuts {
		c.Box = shiftAll([]geom.Rect{c.Box}, x, y)[0]
		out.Cuts[i] = c
	}
	return out
}

func shiftAll(rects []geom.Rect, x, y int64) []geom.Rect {
	out := make([]geom.Rect, len(rects))
	for i, r := range rects {
		out[i] = geom.Rect{X1: r.X1 + x, Y1: r.Y1 + y, X2: r.X2 + x, Y2: r.Y2 + y}
	}
	return out
}
