package decompose

import (
	"context"
	"slices"
	"sync"

	"golang.org/x/sync/errgroup"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
)

// This file judges the pairs within the largest spacing by what faces what, and drops those that no rule makes near.
//
// Nodes are judged in blocks that do not depend on the number of workers; a pair belongs to its lower node. Single rectangles are
// compared as they are. The outline of a node of several is made when a pair asks for it, and each worker keeps the last few thousand:
// nodes are numbered as the sweep met them, so that neighbours have numbers near to each other. Outlines of very many rectangles (a
// power rail has neighbours all along the chip) are made once and shared.

const (
	judgedNodes    = 1 << 12 // nodes of a block
	cachedOutlines = 1 << 11
	largeOutline   = 256 // rectangles from which on an outline is shared
)

// farPair is a pair within the largest spacing that no rule makes near.
type farPair struct {
	a, b    uint32
	tooNear bool // nearer than any_mask_spacing all the same
}

// facingJudge judges the pairs of one layer.
type facingJudge struct {
	l     *layout
	rules *facing.Rules
	kept  []topRects
	other map[uint32]*facing.Shape // nodes of which no rectangles are kept
	mu    sync.Mutex
	large map[uint32]*facing.Shape
}

// judgeFacing drops the pairs of the layer that no rule makes near.
func (l *layout) judgeFacing(ctx context.Context, kept []topRects, jobs int) error {
	rules := l.judgedRules()
	if rules == nil {
		return nil
	}
	j := &facingJudge{l: l, rules: rules, kept: kept, other: map[uint32]*facing.Shape{}, large: map[uint32]*facing.Shape{}}
	j.makeOthers()
	blocks := (l.nodes + judgedNodes - 1) / judgedNodes
	far := make([][]farPair, blocks)
	pool := sync.Pool{New: func() any { return &outlineCache{j: j, slots: make([]cachedOutline, cachedOutlines)} }}
	g, within := errgroup.WithContext(ctx)
	g.SetLimit(max(jobs, 1))
	for k := range blocks {
		if within.Err() != nil {
			break
		}
		g.Go(safely(func() error {
			c := pool.Get().(*outlineCache)
			defer pool.Put(c)
			far[k] = c.judge(uint32(k*judgedNodes), uint32(min((k+1)*judgedNodes, l.nodes)))
			return within.Err()
		}))
	}
	if err := g.Wait(); err != nil {
		return err
	}
	for _, list := range far {
		l.near.pairs -= int64(len(list))
		if l.rules.Stitch == nil {
			list = slices.DeleteFunc(list, func(p farPair) bool { return !p.tooNear })
		}
		l.far = append(l.far, list...)
	}
	return ctx.Err()
}

// of gives the rectangles of a node, and the top whose origin they have; nil where they are not kept.
func (j *facingJudge) of(t *topRects, node uint32) []geom.Rect32 {
	if t == nil || node < t.begin || node >= t.end || j.l.isGiven(node) {
		return nil
	}
	return t.of(node)
}

// makeOthers makes the outlines of nodes in pairs of which no rectangles are kept: those with slanted figures, pieces of given stitches,
// and all of a top that is wider than a window.
func (j *facingJudge) makeOthers() {
	l := j.l
	wanted := map[uint32]*geom.Parts{}
	want := func(n uint32) {
		if len(j.of(topOfShape(j.kept, l.shapeOf(n)), n)) == 0 && wanted[n] == nil {
			wanted[n] = &geom.Parts{}
		}
	}
	complete := 0
	for i := range j.kept {
		if t := &j.kept[i]; t.complete {
			complete += int(t.end - t.begin)
		}
	}
	if complete == l.shapes && l.given == nil {
		return
	}
	for u := range uint32(l.nodes) {
		for _, e := range l.near.of(u) {
			want(u)
			want(e >> 1)
		}
	}
	l.geometryOf(wanted)
	var m facing.Maker
	for n, parts := range wanted {
		s := new(facing.Shape)
		if t := topOfShape(j.kept, l.shapeOf(n)); t != nil {
			m.Parts(s, shifted(*parts, t.x, t.y))
		} else {
			m.Parts(s, *parts)
		}
		j.other[n] = s
	}
}

// outlineCache is what one worker needs.
type outlineCache struct {
	j      *facingJudge
	maker  facing.Maker
	slots  []cachedOutline
	rects  []geom.Rect
	single [2]facing.Shape
	held   *cachedOutline // of the lower node of the pair at hand, maybe
}

type cachedOutline struct {
	node  uint32 // plus 1
	shape facing.Shape
}

// judge judges the pairs of the nodes from begin to end, and gives those that are not near.
func (c *outlineCache) judge(begin, end uint32) []farPair {
	j := c.j
	var far []farPair
	start, ends, entries := j.l.near.start, j.l.near.end, j.l.near.entries
	var t *topRects
	for u := begin; u < end; u++ {
		if start[u] == ends[u] {
			continue
		}
		if s := j.l.shapeOf(u); t == nil || s < t.begin || s >= t.end {
			t = topOfShape(j.kept, s)
		}
		own := j.of(t, u)
		kept := start[u]
		for _, e := range entries[start[u]:ends[u]] {
			v := e >> 1
			if c.near(t, u, own, v) {
				entries[kept] = e
				kept++
			} else {
				far = append(far, farPair{u, v, e&1 != 0})
			}
		}
		ends[u] = kept
	}
	return far
}

func (c *outlineCache) near(t *topRects, u uint32, own []geom.Rect32, v uint32) bool {
	rules := c.j.rules
	its := c.j.of(t, v)
	if len(own) == 1 && len(its) == 1 && hasArea(own[0]) && hasArea(its[0]) {
		return rules.NearRects(own[0].Wide(), its[0].Wide())
	}
	return rules.Near(c.shape(0, u, own), c.shape(1, v, its))
}

// shape gives the outline of a node; side tells the two of a pair apart.
func (c *outlineCache) shape(side int, node uint32, rects []geom.Rect32) *facing.Shape {
	switch n := len(rects); {
	case n == 0:
		return c.j.other[node]
	case n == 1:
		c.make(&c.single[side], rects)
		return &c.single[side]
	case n >= largeOutline:
		return c.shared(node, rects)
	}
	slot := &c.slots[node%cachedOutlines]
	switch {
	case slot.node == node+1:
	case side == 1 && slot == c.held:
		c.make(&c.single[1], rects)
		return &c.single[1]
	default:
		slot.node = node + 1
		c.make(&slot.shape, rects)
	}
	c.held = slot
	return &slot.shape
}

func hasArea(r geom.Rect32) bool { return r.X1 < r.X2 && r.Y1 < r.Y2 }

func (c *outlineCache) make(dst *facing.Shape, rects []geom.Rect32) {
	c.rects = c.rects[:0]
	for _, r := range rects {
		c.rects = append(c.rects, r.Wide())
	}
	c.maker.Rects(dst, c.rects)
}

// shared gives an outline that all workers share.
func (c *outlineCache) shared(node uint32, rects []geom.Rect32) *facing.Shape {
	c.j.mu.Lock()
	defer c.j.mu.Unlock()
	s := c.j.large[node]
	if s == nil {
		s = new(facing.Shape)
		c.make(s, rects)
		c.j.large[node] = s
	}
	return s
}
