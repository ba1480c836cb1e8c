package verify

import (
	"context"

	"maskpair/decompose/geom"
)

// This file says whether a figure is covered by others, exactly. Among rectangles it is a question of areas in whole numbers;
// where slanted edges take part, of fractions (fraction.go).

// cover answers for figures of one flat layout and top whether figures of another cover them.
type cover struct {
	ctx       context.Context
	from, by  *flat
	questions []uint32 // figures of from
	others    []uint32 // figures of by that may cover
}

// bare gives the questions that are not wholly covered, in order.
func (c *cover) bare() ([]uint32, error) {
	if len(c.questions) == 0 {
		return nil, nil
	}
	// The boxes of all figures go through one search; a question and the figures whose boxes meet its box come together.
	boxes := make([]item, 0, len(c.questions)+len(c.others))
	for i, q := range c.questions {
		boxes = append(boxes, item{c.from.figs[q].box, uint32(i), 0})
	}
	for i, o := range c.others {
		boxes = append(boxes, item{c.by.figs[o].box, uint32(i), 1})
	}
	sortItems(boxes)
	near := make([][]uint32, len(c.questions))
	err := search(c.ctx, boxes, 0, func(a, b *item) {
		if a.band == 1 {
			a, b = b, a
		}
		if m := meeting(a.box, b.box); a.band == 0 && b.band == 1 && m.X1 < m.X2 && m.Y1 < m.Y2 {
			near[a.fig] = append(near[a.fig], c.others[b.fig])
		}
	})
	if err != nil {
		return nil, err
	}
	var out []uint32
	for i, q := range c.questions {
		if c.ctx.Err() != nil {
			return nil, c.ctx.Err()
		}
		if !c.covered(q, near[i]) {
			out = append(out, q)
		}
	}
	return out, nil
}

// covered says whether figures of by, all whose boxes meet that of the question, cover it.
func (c *cover) covered(q uint32, others []uint32) bool {
	fig := &c.from.figs[q]
	own, straight := c.from.rects(nil, fig)
	var over []geom.Rect
	for _, o := range others {
		other := &c.by.figs[o]
		if other.form == formRect && other.box.X1 <= fig.box.X1 && other.box.Y1 <= fig.box.Y1 && other.box.X2 >= fig.box.X2 && other.box.Y2 >= fig.box.Y2 {
			return true
		}
		var ok bool
		over, ok = c.by.rects(over, other)
		straight = straight && ok
	}
	if straight {
		var s geom.AreaScratch
		over = within(nil, over, fig.box)
		return s.UnionArea(append(over, own...)) == s.UnionArea(over)
	}
	o := newOverlay()
	points, fill := c.from.points(nil, fig)
	o.add(points, fill, false)
	for _, k := range others {
		points, fill := c.by.points(nil, &c.by.figs[k])
		o.add(points, fill, true)
	}
	return o.covered(fig.box)
}
