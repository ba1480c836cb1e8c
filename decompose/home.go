package decompose

import (
	"cmp"
	"context"
	"math"
	"math/bits"
	"slices"

	"maskpair/gds/arena"
)

// This file deals the free choices. A group that no order and no memory binds may be turned over; what decides must serve the
// hierarchy, because every cell that comes out in two ways costs a variant. So each drawn figure of a structure that is placed more
// than once has a home mask, and a group is turned to where most of its figures are home. Groups that hold the same drawn figures on
// the same relative masks form a class and come out alike. What then still is free balances the areas of the two masks.
//
// Nothing here looks at the order of elements or structures in the file, or at chance: drawn figures are told by what they are (the
// name of the structure, layer and outline), classes by the figures in them, groups by their place.

// deal turns the free groups of a layout, and chooses among the solutions of broken ones.
func (l *layout) deal(ctx context.Context, a *assignment, s *solver, jobs int) error {
	d := &dealer{l: l, a: a, jobs: jobs}
	shared := d.hashFigures()
	if shared {
		d.findPlaces()
	}
	defer func() { s.opt.work(stageChoose, "figures", d.visited) }()
	s.within(func(room *arena.Slab) { d.turn(room, shared) })
	if !shared || len(s.groups) == 0 {
		return nil
	}
	best := s.keep()
	usual, bestCost := d.usualAndCost(jobs)
	homing, bias := newHoming(s, d), 0.0
	for range solveRounds {
		if err := homing.solve(ctx, usual, bias, jobs); err != nil {
			return err
		}
		s.within(func(room *arena.Slab) { d.turn(room, shared) })
		var cost float64
		usual, cost = d.usualAndCost(jobs)
		gained := cost < worthwhile*bestCost
		if cost < bestCost {
			best, bestCost = s.keep(), cost
		}
		if !gained && math.Abs(d.imbalance()) < balanced {
			break
		}
		bias += leanStep * d.imbalance()
	}
	s.restore(best)
	return nil
}

// usualAndCost gives what the next round of solving strives for, and what the assignment costs as it is.
func (d *dealer) usualAndCost(jobs int) (usual []int8, cost float64) {
	atOnce(jobs, func() { usual = d.usualMasks() }, func() { cost = d.cost() })
	return usual, cost
}

// cost says how dear an assignment is: the bytes of the structures and their variants, raised by what the masks' areas differ by beyond
// what is balanced.
func (d *dealer) cost() float64 {
	v := newVariants(d.l.flat.h, []*layout{d.l}, [][]uint8{d.a.mask.Data})
	bytes := 0.0
	for s := range v.tables {
		st := &d.l.flat.lib.Structures[s]
		bytes += float64(max(1, v.tables[s].ways())) * float64(st.End-st.Begin)
	}
	return bytes * (1 + 10*max(0, math.Abs(d.imbalance())-balanced))
}

// balanced is the share of the area by which the masks may differ without a say; a round of solving that does not bring the cost
// below worthwhile times the best is the last.
const (
	balanced   = 0.02
	worthwhile = 0.99
)

// solveRounds is how often broken groups are solved again for the sake of few variants.
const solveRounds = 3

// leanStep is by how many figures away from home a node may cost more on a mask that is fuller by the whole area.
const leanStep = 64

// imbalance gives the area on A less that on B, as a share of the whole.
func (d *dealer) imbalance() float64 {
	difference, total := 0.0, 0.0
	for u := range d.l.area {
		onA, onB := d.l.areaOn(uint32(u), d.a.mask.Data[u])
		total += onA + onB
		difference += onA - onB
	}
	return difference / max(total, 1)
}

// turn turns the free groups as they are assigned now. What it works out of groups lies in room.
func (d *dealer) turn(room *arena.Slab, shared bool) {
	a := d.a
	d.room = room
	d.findDeltas()
	d.classes = nil
	turn := arena.Cut[bool](room, a.groups)
	settled := arena.Cut[bool](room, a.groups)
	for g, free := range a.free {
		settled[g] = !free
	}
	if shared {
		d.hashGroups()
		d.makeClasses()
		d.fillClasses()
		d.turnClasses()
		d.turnGroups(turn, settled)
		d.descend(turn)
	}
	d.balance(turn, settled)
	a.turnOver(func(g uint32) bool { return turn[g] })
}

// findDeltas adds up for each group the area on A less that on B.
func (d *dealer) findDeltas() {
	d.delta = arena.Cut[float64](d.room, d.a.groups)
	for u := range d.l.area {
		onA, onB := d.l.areaOn(uint32(u), d.a.mask.Data[u])
		d.delta[d.a.group[u]] += onA - onB
	}
}

// dealer holds what dealing needs.
type dealer struct {
	l     *layout
	a     *assignment
	jobs  int
	room  *arena.Slab // of the turn at hand
	delta []float64   // by group, as the masks are now

	shared  []bool      // by structure: placed more than once and with figures of its own
	base    []uint32    // by shared structure: number of its first own figure; only figures of shared structures are numbered
	hash    []uint64    // by number of a figure: what it is
	signs   [][2]uint64 // by number of a figure: the same on A, and on B
	places  []place     // placements of shared structures, in the order of their ordinals
	visited int64       // flat figures, each as often as it was gone through
	hashes  [][2]uint64 // by group: its shared figures with their masks as they are now, and turned over
	size    []uint32    // by group: shared flat figures
	classOf []int32     // by group; -1: no shared figures
	classes []class
	homes   []int8    // by number of a figure: +1 A, -1 B
	now     []float64 // by class: area on A less that on B, before the descent
}

// place is a placement of a shared structure.
type place struct {
	first     uint32 // ordinal of its first own figure
	structure int32
}

// class is a set of groups with the same shared figures on the same relative masks.
type class struct {
	low, high uint64 // the two hashes; equal: turning over changes nothing
	fixed     bool   // its groups are not free
	example   int32  // a group
	count     int64  // groups
	delta     float64
	members   []member
	turned    bool // relative to the canonical way, in which the lower hash is that of the masks
}

// member is a drawn figure in one group of a class: how often it is on A and on B in the canonical way.
type member struct {
	figure   uint32
	onA, onB int32
}

// seed is fixed: hashes decide the order of classes of equal weight.
const figureSeed = 0x9e3779b97f4a7c15

func mix(h, v uint64) uint64 {
	hi, lo := bits.Mul64(h^v^0xd6e8feb86659fd93, figureSeed)
	hi2, lo2 := bits.Mul64(hi^lo, 0xa0761d6478bd642f)
	return hi2 ^ lo2
}

func mixString(s string) uint64 {
	h := uint64(len(s))
	for i := 0; i < len(s); i++ {
		h = mix(h, uint64(s[i]))
	}
	return h
}

// mostShared is up to how many numbers of one kind each worker has for itself, so that memory does not grow with the workers where there is
// much.
const mostShared = 1 << 20

// workersFor gives how many workers go through all placements at once if each needs so many numbers of its own.
func (d *dealer) workersFor(numbers int) int {
	if numbers > mostShared || len(d.places) < 1<<12 {
		return 1
	}
	return d.jobs
}

// hashGroups adds up, group by group, what is in it; sums do not depend on the order.
func (d *dealer) hashGroups() {
	workers := d.workersFor(3 * d.a.groups)
	hashes, size := make([][][2]uint64, workers), make([][]uint32, workers)
	for w := range workers {
		hashes[w], size[w] = arena.Cut[[2]uint64](d.room, d.a.groups), arena.Cut[uint32](d.room, d.a.groups)
	}
	group, mask := d.a.group, d.a.mask.Data
	d.eachShared(workers, func(w int, nodes []uint32, base uint32) {
		hashes, size, signs := hashes[w], size[w], d.signs[base:][:len(nodes)]
		for k, n := range nodes {
			g, m := group[n], mask[n]&1
			sign := &signs[k]
			size[g]++
			hashes[g][0] += sign[m]
			hashes[g][1] += sign[m^1]
		}
	})
	d.hashes, d.size = hashes[0], size[0]
	for w := 1; w < workers; w++ {
		for g := range d.size {
			d.size[g] += size[w][g]
			d.hashes[g][0] += hashes[w][g][0]
			d.hashes[g][1] += hashes[w][g][1]
		}
	}
}

// makeClasses puts groups with the same hashes in one class.
func (d *dealer) makeClasses() {
	type key struct {
		low, high uint64
		fixed     bool
	}
	byKey := map[key]int32{}
	d.classOf = arena.CutDirty[int32](d.room, d.a.groups)
	for g := range d.classOf {
		d.classOf[g] = -1
		now, over := d.hashes[g][0], d.hashes[g][1]
		if now == 0 && over == 0 {
			continue
		}
		k := key{min(now, over), max(now, over), false}
		if !d.a.free[g] {
			k = key{now, over, true}
		}
		c, ok := byKey[k]
		if !ok {
			c = int32(len(d.classes))
			byKey[k] = c
			d.classes = append(d.classes, class{low: k.low, high: k.high, fixed: k.fixed, example: int32(g)})
		}
		d.classOf[g] = c
		d.classes[c].count++
		d.classes[c].delta += d.canonical(g) * d.delta[g]
	}
}

// canonical is -1 where a group is turned over relative to its class.
func (d *dealer) canonical(g int) float64 {
	if c := &d.classes[d.classOf[g]]; !c.fixed && d.hashes[g][0] != c.low {
		return -1
	}
	return 1
}

// fillClasses finds the drawn figures in one group of each class.
func (d *dealer) fillClasses() {
	// First each flat figure of an example: its drawn figure, and in the low bit its mask in the canonical way. Of figures that are placed
	// more than once there are fewer than 2^31.
	begin := make([]uint32, len(d.classes)+1)
	for i := range d.classes {
		begin[i+1] = begin[i] + d.size[d.classes[i].example]
	}
	all := int(begin[len(d.classes)])
	workers := d.workersFor(all)
	found, end := make([][]uint32, workers), make([][]uint32, workers)
	for w := range workers {
		found[w], end[w] = arena.CutDirty[uint32](d.room, all), slices.Clone(begin)
	}
	example := newBitset(d.l.nodes) // nodes in the examples of classes
	group, mask := d.a.group, d.a.mask.Data
	for n, g := range group {
		if c := d.classOf[g]; c >= 0 && d.classes[c].example == int32(g) {
			example.add(uint32(n))
		}
	}
	d.eachShared(workers, func(w int, nodes []uint32, base uint32) {
		found, end := found[w], end[w]
		for k, n := range nodes {
			if !example.has(n) {
				continue
			}
			g := group[n]
			c, m := d.classOf[g], uint32(mask[n])
			if d.canonical(int(g)) < 0 {
				m ^= 1
			}
			found[end[c]] = (base+uint32(k))<<1 | m
			end[c]++
		}
	})
	// Then each drawn figure once, with how often it is on which mask.
	times := make([][2]int32, len(d.hash))
	var drawn []uint32
	for i := range d.classes {
		drawn = drawn[:0]
		for w := range workers {
			for _, f := range found[w][begin[i]:end[w][i]] {
				t := &times[f>>1]
				if *t == ([2]int32{}) {
					drawn = append(drawn, f>>1)
				}
				t[f&1]++
			}
		}
		slices.Sort(drawn)
		members := make([]member, len(drawn))
		for k, f := range drawn {
			members[k] = member{f, times[f][0], times[f][1]}
			times[f] = [2]int32{}
		}
		d.classes[i].members = members
	}
}

// homeRounds is how often homes and classes settle by each other; more rounds changed nothing on the layouts tried.
const homeRounds = 8

// turnClasses deals homes and turns the classes, those with most area at stake first.
func (d *dealer) turnClasses() {
	order := d.classOrder()
	d.homes = make([]int8, len(d.hash))
	votes := make([]int64, len(d.hash))
	imbalance := 0.0
	for g, x := range d.delta {
		if !d.a.free[g] && d.classOf[g] < 0 {
			imbalance += x
		}
	}
	for _, i := range order {
		c := &d.classes[i]
		agree := d.agree(c)
		switch {
		case c.fixed:
		case agree != 0:
			c.turned = agree < 0
		default:
			c.turned = c.delta*imbalance > 0 || imbalance == 0 && c.delta < 0
		}
		imbalance += c.sign() * c.delta
		for _, m := range c.members {
			if d.homes[m.figure] == 0 {
				d.homes[m.figure] = int8(signOf(int64(m.onA-m.onB)) * int64(c.sign()))
			}
		}
	}
	for range homeRounds {
		clear(votes)
		for i := range d.classes {
			c := &d.classes[i]
			for _, m := range c.members {
				votes[m.figure] += int64(c.sign()) * int64(m.onA-m.onB) * c.count
			}
		}
		for f, v := range votes {
			if v != 0 {
				d.homes[f] = int8(signOf(v))
			}
		}
		changed := false
		for _, i := range order {
			c := &d.classes[i]
			if agree := d.agree(c); !c.fixed && agree != 0 && c.turned != (agree < 0) {
				c.turned, changed = agree < 0, true
			}
		}
		if !changed {
			break
		}
	}
}

// classOrder gives the classes, those that are fixed first, then by the area at stake, by number, and by what they hold.
func (d *dealer) classOrder() []int32 {
	order := make([]int32, len(d.classes))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(i, j int32) int {
		a, b := &d.classes[i], &d.classes[j]
		return cmp.Or(-cmp.Compare(boolInt(a.fixed), boolInt(b.fixed)), -cmp.Compare(math.Abs(a.delta), math.Abs(b.delta)),
			-cmp.Compare(a.count, b.count), cmp.Compare(a.low, b.low), cmp.Compare(a.high, b.high))
	})
	return order
}

// standing gives the area on A less that on B of all that is decided, the whole area, and the area of the groups that are free still
// and will be used to balance.
func (d *dealer) standing(c *contexts) (imbalance, total, spare float64) {
	d.now = make([]float64, len(d.classes))
	for g, x := range d.delta {
		if c.bit[g] == 1 {
			x = -x
		}
		switch k := d.classOf[g]; {
		case k >= 0:
			d.now[k] += x
			imbalance += x
		case d.a.free[g]:
			spare += math.Abs(x)
		default:
			imbalance += x
		}
	}
	for _, area := range d.l.area {
		total += area
	}
	return imbalance, total, spare
}

// agree tells how many more figures of a class are home in the canonical way than turned over.
func (d *dealer) agree(c *class) int64 {
	sum := int64(0)
	for _, m := range c.members {
		sum += int64(d.homes[m.figure]) * int64(m.onA-m.onB)
	}
	return sum
}

func (c *class) sign() float64 {
	if c.turned {
		return -1
	}
	return 1
}

func signOf(v int64) int64 { return int64(cmp.Compare(v, 0)) }

func boolInt(b bool) int {
	if b {
		return 1
	}
	return 0
}

// turnGroups turns the groups of the classes. Where a class is the same when turned over, the place decides: the least box in the
// frame of the lowest cell that holds the group is on its figure's home mask.
func (d *dealer) turnGroups(turn, settled []bool) {
	var even []bool
	for g, c := range d.classOf {
		if c < 0 || settled[g] {
			continue
		}
		cl := &d.classes[c]
		if cl.low == cl.high {
			if even == nil {
				even = make([]bool, len(settled))
			}
			even[g] = true
			settled[g] = true
			continue
		}
		turn[g] = (d.canonical(g) < 0) != cl.turned
		settled[g] = true
	}
	if even != nil {
		d.turnEven(even, turn)
	}
}

// turnEven turns the groups that hold each of their shared figures as often on one mask as on the other.
func (d *dealer) turnEven(even, turn []bool) {
	l := d.l
	type extent struct {
		first, last uint32
		best        Box
		node        uint32
	}
	at := map[uint32]*extent{}
	node, group := l.nodeOf.Data, d.a.group
	for o, n := range node {
		if g := group[n]; even[g] {
			e := at[g]
			if e == nil {
				e = &extent{first: uint32(o), best: emptyBox}
				at[g] = e
			}
			e.last = uint32(o)
		}
	}
	boxes := l.boxes()
	fr := newFrames(l.flat)
	back := map[uint32]placement{}
	for n, box := range boxes {
		g := group[n]
		if !even[g] {
			continue
		}
		e := at[g]
		p, ok := back[g]
		if !ok {
			p = fr.of(l.topOf(uint32(n)), e.first, e.last).at.inverse()
			back[g] = p
		}
		if local := p.applyBox(box); compareBoxes(local, e.best) < 0 {
			e.best, e.node = local, uint32(n)
		}
	}
	for g, e := range at {
		turn[g] = d.a.mask.Data[e.node] == 1
	}
}

func compareBoxes(a, b Box) int {
	switch {
	case a.X1 != b.X1:
		return cmp.Compare(a.X1, b.X1)
	case a.Y1 != b.Y1:
		return cmp.Compare(a.Y1, b.Y1)
	case a.X2 != b.X2:
		return cmp.Compare(a.X2, b.X2)
	}
	return cmp.Compare(a.Y2, b.Y2)
}

// balance turns what is still free so that the areas of the masks come near to each other: largest first, by powers of two, and by
// place among those.
func (d *dealer) balance(turn, settled []bool) {
	imbalance := 0.0
	var buckets [2048][]int32
	for g, x := range d.delta {
		if settled[g] {
			if turn[g] {
				x = -x
			}
			imbalance += x
			continue
		}
		_, e := math.Frexp(math.Abs(x))
		buckets[e+1024] = append(buckets[e+1024], int32(g))
	}
	for e := len(buckets) - 1; e >= 0; e-- {
		for _, g := range buckets[e] {
			x := d.delta[g]
			if x*imbalance > 0 || imbalance == 0 && x < 0 {
				turn[g] = true
				x = -x
			}
			imbalance += x
		}
	}
}
