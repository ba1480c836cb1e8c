package decompose

import (
	"cmp"
	"slices"
)

// This file compares the items of a layout and of its baseline that are equal, in one pass over both in their order.

// What is known of a shape.
const (
	stateA       = 1 << iota // some item is equal to one on A
	stateB                   // or on B
	stateDiffers             // some item is equal to none, or something touches it that is equal to none
)

// window compares one window. Where there are several, every shape is measured: an item that is cut says nothing about the whole.
func (c *comparison) window(win window, whole bool) error {
	if err := c.flatten(win); err != nil {
		return err
	}
	c.whole = whole
	c.match()
	if !whole {
		for i := range c.state {
			c.state[i] |= stateDiffers
		}
	}
	return c.differ()
}

// match finds equal items.
func (c *comparison) match() {
	items := c.b.sorted
	var at [2]int
	for i := 0; i < len(items); {
		// Runs of items with the same lower left corner.
		x, y := items[i].X1, items[i].Y1
		end := i + 1
		for end < len(items) && items[end].X1 == x && items[end].Y1 == y {
			end++
		}
		var from, to [2]int
		for m, on := range c.on {
			k := at[m]
			for k < len(on) && (on[k].Y1 < y || on[k].Y1 == y && on[k].X1 < x) {
				k++
			}
			from[m] = k
			for k < len(on) && on[k].X1 == x && on[k].Y1 == y {
				k++
			}
			to[m], at[m] = k, k
		}
		c.matchRun(items[i:end], from, to)
		i = end
	}
}

// longRun is the length from which runs are sorted further.
const longRun = 64

func (c *comparison) matchRun(run []item, from, to [2]int) {
	if len(run) > longRun {
		byCorner := func(a, b item) int {
			return cmp.Or(cmp.Compare(a.X2, b.X2), cmp.Compare(a.Y2, b.Y2), cmp.Compare(a.ID, b.ID))
		}
		run = slices.Clone(run)
		slices.SortFunc(run, byCorner)
		for m := range c.on {
			slices.SortFunc(c.on[m][from[m]:to[m]], byCorner)
		}
		next := from
		for i := 0; i < len(run); {
			end := i + 1
			for end < len(run) && run[end].X2 == run[i].X2 && run[end].Y2 == run[i].Y2 {
				end++
			}
			var begin, stop [2]int
			for m, on := range c.on {
				k := next[m]
				for k < to[m] && (on[k].X2 < run[i].X2 || on[k].X2 == run[i].X2 && on[k].Y2 < run[i].Y2) {
					k++
				}
				begin[m] = k
				for k < to[m] && on[k].X2 == run[i].X2 && on[k].Y2 == run[i].Y2 {
					k++
				}
				stop[m], next[m] = k, k
			}
			c.matchAll(run[i:end], begin, stop)
			i = end
		}
		return
	}
	c.matchAll(run, from, to)
}

// matchAll compares each item with each.
func (c *comparison) matchAll(run []item, from, to [2]int) {
	for i := range run {
		it := &run[i]
		o, ok := c.b.ordinal(it)
		if !ok {
			continue
		}
		shape := c.b.l.nodeOf.Data[o]
		found := false
		for m, on := range c.on {
			for k := from[m]; k < to[m]; k++ {
				if on[k].X2 == it.X2 && on[k].Y2 == it.Y2 && c.equal(it, &on[k]) {
					c.owner[m].Data[k] = shape + 1
					c.state[shape-c.begin] |= stateA << m
					found = true
				}
			}
		}
		if !found {
			c.state[shape-c.begin] |= stateDiffers
		}
	}
}

// equal tells whether an item of the layout and one of the baseline with the same box cover the same.
func (c *comparison) equal(it, was *item) bool {
	if isBand(it.ID) != isBand(was.ID) {
		return false
	}
	if !isBand(it.ID) {
		return true
	}
	p, q := &c.b.bands.Data[it.ID&^bandBit], &c.bands.Data[was.ID&^bandBit]
	return p.number == q.number && p.at == q.at && c.b.polygons[p.polygon].Equal(c.polys[q.polygon])
}
