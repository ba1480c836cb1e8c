package stitch

import (
	"cmp"
	"slices"

	"maskpair/decompose/geom"
)

// wire is a stretch of a shape with one cross-section; it runs along x.
type wire struct{ x1, x2, y1, y2 int64 }

// wires finds the stretches along x of a shape given as rectangles with disjoint interiors.
func wires(rects []geom.Rect) []wire {
	xs := make([]int64, 0, 2*len(rects))
	for _, r := range rects {
		xs = append(xs, r.X1, r.X2)
	}
	slices.Sort(xs)
	xs = slices.Compact(xs)
	byLeft := slices.Clone(rects)
	slices.SortFunc(byLeft, func(a, b geom.Rect) int { return cmp.Or(cmp.Compare(a.X1, b.X1), cmp.Compare(a.Y1, b.Y1)) })
	var out, open []wire
	var active []geom.Rect
	next := 0
	for i := 0; i+1 < len(xs); i++ {
		x1, x2 := xs[i], xs[i+1]
		active = slices.DeleteFunc(active, func(r geom.Rect) bool { return r.X2 <= x1 })
		for next < len(byLeft) && byLeft[next].X1 <= x1 {
			active = append(active, byLeft[next])
			next++
		}
		slices.SortFunc(active, func(a, b geom.Rect) int { return cmp.Compare(a.Y1, b.Y1) })
		var now []wire
		for _, r := range active {
			if n := len(now); n > 0 && r.Y1 <= now[n-1].y2 {
				now[n-1].y2 = max(now[n-1].y2, r.Y2)
			} else {
				now = append(now, wire{x1, x2, r.Y1, r.Y2})
			}
		}
		// A cross-section that goes on unchanged extends its wire.
		k := 0
		for j := range now {
			for k < len(open) && open[k].y1 < now[j].y1 {
				k++
			}
			if k < len(open) && open[k].y1 == now[j].y1 && open[k].y2 == now[j].y2 && open[k].x2 == x1 {
				now[j].x1 = open[k].x1
				open[k].x2 = -1 << 62 // taken over
			}
		}
		for _, w := range open {
			if w.x2 != -1<<62 {
				out = append(out, w)
			}
		}
		open = now
	}
	return append(out, open...)
}

// turn swaps x and y.
func turn(r geom.Rect) geom.Rect { return geom.Rect{X1: r.Y1, Y1: r.X1, X2: r.Y2, Y2: r.X2} }

func turnAll(rects []geom.Rect) []geom.Rect {
	out := make([]geom.Rect, len(rects))
	for i, r := range rects {
		out[i] = turn(r)
	}
	return out
}
