package decompose

import (
	"cmp"
	"math"
	"slices"

	"maskpair/gds/arena"
)

// This file turns classes of groups so that few variants are needed. Homes (see home.go) give a good start, but they look at one
// figure at a time, and a variant costs all bytes of its structure whichever figure it is for.
//
// A context is what surrounds a placement as far as masks are concerned: which classes the own figures belong to, on which relative
// masks, and the contexts of what the structure places. Placements in one context come out alike however the classes are turned, so
// the number of states that the contexts of a structure come to, times its bytes, is what variants cost, and turning a class can be
// tried on contexts alone. Descent by single classes ends where no turn saves bytes.
//
// The state of a context is a sum of fixed pseudo-random numbers modulo 2^64, one for each position that is on B, and of the states
// of its children, weighted likewise; a turn changes it by differences. Two different states could have one sum; that would make a
// choice worse, never wrong.

// contexts are those of all shared structures.
type contexts struct {
	d      *dealer
	bit    []uint8 // by group: 1 where the group is turned over by now
	tables []variantTable
	cursor uint64
	stack  []uint32
	size   int

	ids       [][]int32 // by structure and context: number of the context
	structure []int32   // by number
	state     []uint64  // by number
	parents   [][]link  // by number
	uses      [][]use   // by class
	counts    map[uint64]int32
	turned    []bool // by class
	work      int64
	dirty     []int32
	delta     map[int32]uint64
}

// link is a context with how the state of a child counts in it.
type link struct {
	context int32
	weight  uint64
}

// use is a context in which a class has own figures, with what turning the class over adds to its state.
type use struct {
	context int32
	change  uint64
}

const (
	mostContextWords = 1 << 23 // beyond, a layout has nothing in common that contexts could find
	mostContextWork  = 1 << 26 // steps of the descent
	contextRounds    = 12
)

// descend turns classes over; turn holds by group what was decided before and is changed.
func (d *dealer) descend(turn []bool) {
	c := &contexts{d: d, bit: arena.Cut[uint8](d.room, len(turn)), tables: make([]variantTable, len(d.l.flat.lib.Structures)),
		counts: map[uint64]int32{}, turned: make([]bool, len(d.classes)), delta: map[int32]uint64{}}
	for g, t := range turn {
		c.bit[g] = uint8(boolInt(t))
	}
	f := d.l.flat
	for i, top := range f.h.tops {
		c.cursor = f.first[i]
		if f.all[top] > 0 && !c.walk(top) {
			return
		}
	}
	c.link()
	c.search()
	for g := range turn {
		if k := d.classOf[g]; k >= 0 && c.turned[k] {
			turn[g] = !turn[g]
		}
	}
}

// shared tells whether a structure is placed more than once, so that it can need variants.
func (c *contexts) shared(s int32) bool { return c.d.l.flat.h.placed[s] > 1 }

// walk gives a placement the number of its context within its structure (on the stack, where the structure is shared); false where
// there are too many.
func (c *contexts) walk(s int32) bool {
	l := c.d.l
	f := l.flat
	begin := len(c.stack)
	shared := c.shared(s)
	if own := uint64(f.own[s]); own > 0 {
		if shared {
			group, mask := c.d.a.group, c.d.a.mask.Data
			for _, n := range l.nodeOf.Data[c.cursor : c.cursor+own] {
				g := group[n]
				c.stack = append(c.stack, uint32(c.d.classOf[g])<<1|uint32(mask[n]^c.bit[g]))
			}
		}
		c.cursor += own
	}
	st := &f.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		for range elements(f.lib, ref) {
			if !c.walk(ref.Target) {
				return false
			}
			if !shared {
				c.stack = c.stack[:begin]
			}
		}
	}
	if !shared {
		return true
	}
	t := &c.tables[s]
	before := len(t.words)
	way := t.intern(c.stack[begin:])
	c.size += len(t.words) - before
	c.stack = append(c.stack[:begin], uint32(way))
	return c.size <= mostContextWords
}

// link numbers the contexts, children before parents, and finds what depends on what.
func (c *contexts) link() {
	f := c.d.l.flat
	c.ids = make([][]int32, len(c.tables))
	c.uses = make([][]use, len(c.d.classes))
	for _, s := range f.h.bottom {
		t := &c.tables[s]
		t.byHash = nil
		for i := range t.ways() {
			c.ids[s] = append(c.ids[s], int32(len(c.structure)))
			c.structure = append(c.structure, s)
			c.state = append(c.state, 0)
			c.parents = append(c.parents, nil)
			c.fill(s, int32(i))
		}
	}
	for i, s := range c.structure {
		c.counts[c.key(s, c.state[i])]++
	}
}

// fill works out the state of one context and links it to its classes and children.
func (c *contexts) fill(s, i int32) {
	f := c.d.l.flat
	id := c.ids[s][i]
	words := c.tables[s].way(i)
	change := map[int32]uint64{}
	own := int(f.own[s])
	for p, w := range words[:own] {
		r := mix(uint64(p), 29)
		if w&1 == 1 {
			c.state[id] += r
			change[int32(w>>1)] -= r
		} else {
			change[int32(w>>1)] += r
		}
	}
	for k, v := range change {
		c.uses[k] = append(c.uses[k], use{id, v})
	}
	weight := map[int32]uint64{}
	p := own
	st := &f.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &f.lib.Refs[r]
		if ref.Target < 0 || f.all[ref.Target] == 0 {
			continue
		}
		for range elements(f.lib, ref) {
			weight[c.ids[ref.Target][words[p]]] += mix(uint64(p), 31) | 1
			p++
		}
	}
	for child, w := range weight {
		c.state[id] += w * c.state[child]
		c.parents[child] = append(c.parents[child], link{id, w})
	}
}

func (c *contexts) key(s int32, state uint64) uint64 { return mix(state, uint64(s)) }

// turn turns a class over and gives the bytes that this costs (below 0: saves).
func (c *contexts) turn(k int32) int64 {
	clear(c.delta)
	c.dirty = c.dirty[:0]
	sign := uint64(1)
	if c.turned[k] {
		sign = ^uint64(0)
	}
	c.turned[k] = !c.turned[k]
	touch := func(id int32, by uint64) {
		if _, ok := c.delta[id]; !ok {
			c.dirty = append(c.dirty, id)
		}
		c.delta[id] += by
	}
	for _, u := range c.uses[k] {
		touch(u.context, sign*u.change)
	}
	// Children have lower numbers than parents, so that the least dirty context is final.
	slices.Sort(c.dirty)
	cost := int64(0)
	for n := 0; n < len(c.dirty); n++ {
		id := c.dirty[n]
		by := c.delta[id]
		c.work++
		added := len(c.dirty)
		for _, p := range c.parents[id] {
			touch(p.context, p.weight*by)
			c.work++
		}
		if len(c.dirty) > added {
			slices.Sort(c.dirty[n+1:])
		}
		s := c.structure[id]
		st := &c.d.l.flat.lib.Structures[s]
		old, now := c.key(s, c.state[id]), c.key(s, c.state[id]+by)
		c.state[id] += by
		if old == now {
			continue
		}
		if c.counts[old]--; c.counts[old] == 0 {
			delete(c.counts, old)
			cost -= st.End - st.Begin
		}
		if c.counts[now]++; c.counts[now] == 1 {
			cost += st.End - st.Begin
		}
	}
	return cost
}

// search turns classes while that saves bytes, or costs none and brings the areas nearer to each other; then, where the areas are
// still far apart, those that do so at the least cost.
func (c *contexts) search() {
	d := c.d
	order := d.classOrder()
	imbalance, total, spare := d.standing(c)
	for range contextRounds {
		saved := false
		for _, k := range order {
			cl := &d.classes[k]
			if cl.fixed || len(c.uses[k]) == 0 || c.work > mostContextWork {
				continue
			}
			by := -2 * c.areaOf(k)
			cost := c.turn(k)
			better := math.Abs(imbalance+by) < math.Abs(imbalance)
			if cost < 0 || cost == 0 && better {
				imbalance += by
				saved = saved || cost < 0
				continue
			}
			c.turn(k)
		}
		if !saved {
			break
		}
	}
	c.rebalance(order, imbalance, total, spare)
}

// areaOf gives the area on A less that on B of the groups of a class, as it is turned now.
func (c *contexts) areaOf(k int32) float64 {
	x := c.d.now[k]
	if c.turned[k] {
		return -x
	}
	return x
}

// tolerated is the share of the area by which the masks may differ before bytes are spent on balance.
const tolerated = 0.01

func (c *contexts) rebalance(order []int32, imbalance, total, spare float64) {
	for range 64 {
		excess := math.Abs(imbalance) - spare - tolerated*total
		if excess <= 0 {
			return
		}
		type move struct {
			class int32
			cost  float64
		}
		var moves []move
		for _, k := range order {
			x := c.areaOf(k)
			if c.d.classes[k].fixed || x*imbalance <= 0 || math.Abs(imbalance-2*x) >= math.Abs(imbalance) || c.work > 2*mostContextWork {
				continue
			}
			cost := c.turn(k)
			c.turn(k)
			moves = append(moves, move{k, float64(cost) / math.Abs(x)})
		}
		if len(moves) == 0 {
			return
		}
		best := slices.MinFunc(moves, func(a, b move) int { return cmp.Compare(a.cost, b.cost) })
		imbalance -= 2 * c.areaOf(best.class)
		c.turn(best.class)
	}
}
