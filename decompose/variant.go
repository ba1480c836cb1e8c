package decompose

import (
	"cmp"
	"slices"

	"maskpair/gds"
)

// This file finds variants: in how many ways a structure comes out. It walks the placements once, children before parents, and gives
// each placement the number of what it holds (the masks of its own figures in all deck layers, and the numbers of what it places):
// hash-consing, with one table for all tops.

// variants are the ways in which the structures come out.
type variants struct {
	h      *hierarchy
	layers []*layout
	masks  [][]uint8      // by layer and node
	tables []variantTable // by structure
	cursor []uint64       // by layer: next ordinal
	stack  []uint32
	active []bool // by structure: has figures of some layer under it

	placements int64 // of active structures that were gone through
}

// variantTable holds the ways of one structure. A way is a list of words: first the masks of the own figures, layer by layer, 32 to a
// word, then the way of each element of each active reference, then for each own figure in pieces: deck layer, number of the figure,
// and form.
type variantTable struct {
	words  []uint32
	start  []uint32 // of way i in words; one more at the end
	uses   []uint64 // placements that come out this way
	byHash map[uint64][]int32
	last   int32
	rank   []int32 // by way: 0 keeps the name, 1 is the first variant, ...
	drawn  int32   // rank of the structure as drawn; below 0: not needed
	plain  int     // words of own figures
	kids   int     // words of the elements of active references
}

func (t *variantTable) ways() int { return len(t.uses) }

func (t *variantTable) way(i int32) []uint32 { return t.words[t.start[i]:t.start[i+1]] }

// children are the ways of what the elements of the active references place, in order.
func (t *variantTable) children(i int32) []uint32 { return t.way(i)[t.plain : t.plain+t.kids] }

// inPieces are the own figures that come out in pieces, three words each.
func (t *variantTable) inPieces(i int32) []uint32 { return t.way(i)[t.plain+t.kids:] }

// newVariants walks all tops.
func newVariants(h *hierarchy, layers []*layout, masks [][]uint8) *variants {
	v := &variants{h: h, layers: layers, masks: masks, tables: make([]variantTable, len(h.lib.Structures)),
		cursor: make([]uint64, len(layers)), active: make([]bool, len(h.lib.Structures))}
	for _, s := range h.bottom {
		for _, l := range layers {
			v.active[s] = v.active[s] || l.flat.all[s] > 0
			v.tables[s].plain += int(l.flat.own[s]+31) / 32
		}
		st := &h.lib.Structures[s]
		for r := st.FirstRef; r < st.EndRef; r++ {
			if ref := &h.lib.Refs[r]; ref.Target >= 0 && v.active[ref.Target] {
				v.tables[s].kids += int(elements(h.lib, ref))
			}
		}
	}
	for i, top := range h.tops {
		if !v.active[top] {
			continue
		}
		for k, l := range layers {
			v.cursor[k] = l.flat.first[i]
		}
		v.walk(top)
	}
	return v
}

// walk gives the way of one placement of a structure; the cursors pass over its figures.
func (v *variants) walk(s int32) uint32 {
	v.placements++
	begin := len(v.stack)
	var cut []uint32
	for k, l := range v.layers {
		own := l.flat.own[s]
		if own == 0 {
			continue
		}
		at := len(v.stack)
		first := uint32(v.cursor[k])
		nodes := l.nodeOf.Data[v.cursor[k] : v.cursor[k]+uint64(own)]
		v.cursor[k] += uint64(own)
		masks := v.masks[k]
		for len(nodes) > 0 {
			word := uint32(0)
			n := min(len(nodes), 32)
			for i, u := range nodes[:n] {
				word |= uint32(masks[u]) << i
			}
			v.stack = append(v.stack, word)
			nodes = nodes[n:]
		}
		if l.cuts != nil && len(l.cuts.figures) > 0 {
			cut = v.cutFigures(cut, k, first, own, v.stack[at:])
		}
	}
	st := &v.h.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &v.h.lib.Refs[r]
		if ref.Target < 0 || !v.active[ref.Target] {
			continue
		}
		for range elements(v.h.lib, ref) {
			w := v.walk(ref.Target)
			v.stack = append(v.stack, w)
		}
	}
	v.stack = append(v.stack, cut...)
	way := v.tables[s].intern(v.stack[begin:])
	v.stack = v.stack[:begin]
	return uint32(way)
}

// cutFigures corrects the masks of own figures of cut shapes, and appends what comes out in pieces.
func (v *variants) cutFigures(cut []uint32, layer int, first, own uint32, words []uint32) []uint32 {
	for i := range own {
		form, ok := v.layers[layer].cuts.figures[first+i]
		if !ok {
			continue
		}
		words[i/32] &^= 1 << (i % 32)
		switch form {
		case -1:
		case -2:
			words[i/32] |= 1 << (i % 32)
		default:
			cut = append(cut, uint32(layer), i, uint32(form))
		}
	}
	return cut
}

// intern gives the number of a way, a new one where it has not been met.
func (t *variantTable) intern(words []uint32) int32 {
	if t.byHash == nil {
		t.byHash = map[uint64][]int32{}
		t.start = append(t.start, 0)
	} else if slices.Equal(t.way(t.last), words) {
		t.uses[t.last]++
		return t.last
	}
	h := uint64(len(words))
	for _, w := range words {
		h = mix(h, uint64(w))
	}
	for _, i := range t.byHash[h] {
		if slices.Equal(t.way(i), words) {
			t.uses[i]++
			t.last = i
			return i
		}
	}
	i := int32(len(t.uses))
	t.words = append(t.words, words...)
	t.start = append(t.start, uint32(len(t.words)))
	t.uses = append(t.uses, 1)
	t.byHash[h] = append(t.byHash[h], i)
	t.last = i
	return i
}

// number deals the names: the way that is used most keeps the name of the structure, then by use, then by masks (what has A where the
// other has B, figure by figure in the order of their boxes, comes first; then by what the references place). drawn tells how often
// each structure is also placed where it stays as drawn; that is one way more.
func (v *variants) number(drawn []uint64) {
	signs := make([][]uint64, len(v.tables))
	for _, s := range v.h.bottom {
		t := &v.tables[s]
		if t.ways() == 0 {
			continue
		}
		t.drawn = -1
		signs[s] = make([]uint64, t.ways())
		keys := make([][]uint32, t.ways())
		uses := t.uses
		if t.ways() > 1 {
			order := v.figureOrder(s)
			for i := range t.ways() {
				signs[s][i] = v.sign(s, int32(i), signs)
				keys[i] = v.masksInOrder(s, int32(i), order)
			}
		}
		if drawn[s] > 0 {
			uses = append(slices.Clip(uses), drawn[s])
			signs[s] = append(signs[s], 0)
			keys = append(keys, nil)
		}
		byRank := make([]int32, len(uses))
		for i := range byRank {
			byRank[i] = int32(i)
		}
		slices.SortFunc(byRank, func(i, j int32) int {
			return cmp.Or(-cmp.Compare(uses[i], uses[j]), slices.Compare(keys[i], keys[j]), cmp.Compare(signs[s][i], signs[s][j]))
		})
		t.rank = make([]int32, t.ways())
		for r, i := range byRank {
			if int(i) == t.ways() {
				t.drawn = int32(r)
			} else {
				t.rank[i] = int32(r)
			}
		}
		t.byHash = nil
	}
}

// position is where the mask of an own figure stands in a way.
type position struct {
	layer, figure uint32
	word, bit     uint32
}

// figureOrder gives the own figures of a structure in an order that does not depend on the file.
func (v *variants) figureOrder(s int32) []position {
	var order []position
	word := uint32(0)
	for k, l := range v.layers {
		l.flat.ownFigures(s, func(i, figure uint32) {
			order = append(order, position{uint32(k), figure, word + i/32, i % 32})
		})
		word += (l.flat.own[s] + 31) / 32
	}
	figures := v.h.lib.Figures
	slices.SortStableFunc(order, func(a, b position) int {
		return cmp.Or(cmp.Compare(a.layer, b.layer), compareRects(figures[a.figure].Box, figures[b.figure].Box),
			cmp.Compare(figures[a.figure].Class, figures[b.figure].Class))
	})
	return order
}

func compareRects(a, b gds.Rect) int {
	return cmp.Or(cmp.Compare(a.X1, b.X1), cmp.Compare(a.Y1, b.Y1), cmp.Compare(a.X2, b.X2), cmp.Compare(a.Y2, b.Y2))
}

func (v *variants) masksInOrder(s, way int32, order []position) []uint32 {
	words := v.tables[s].way(way)
	key := make([]uint32, (len(order)+31)/32)
	for i, p := range order {
		key[i/32] |= (words[p.word] >> p.bit & 1) << (31 - i%32)
	}
	return key
}

// sign hashes a way by what it is, whatever the order in the file.
func (v *variants) sign(s, way int32, signs [][]uint64) uint64 {
	t := &v.tables[s]
	words := t.way(way)
	sum, word := uint64(0), uint32(0)
	for _, l := range v.layers {
		l.flat.ownFigures(s, func(i, figure uint32) {
			m := words[word+i/32] >> (i % 32) & 1
			sum += mix(hashFigure(v.h.lib, figure, 7), uint64(m))
		})
		word += (l.flat.own[s] + 31) / 32
	}
	children := t.children(way)
	for cut := t.inPieces(way); len(cut) > 0; cut = cut[3:] {
		sum += mix(mix(uint64(cut[0]), uint64(cut[1])), v.layers[cut[0]].cuts.forms[cut[2]].sign)
	}
	st := &v.h.lib.Structures[s]
	k := 0
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &v.h.lib.Refs[r]
		if ref.Target < 0 || !v.active[ref.Target] {
			continue
		}
		at := mix(mix(uint64(uint32(ref.At.X))<<32|uint64(uint32(ref.At.Y)), uint64(ref.Turn)), mixString(v.h.name(ref.Target)))
		for e := range elements(v.h.lib, ref) {
			sum += mix(mix(at, uint64(e)), signs[ref.Target][children[k]])
			k++
		}
	}
	return mix(sum, 3)
}
