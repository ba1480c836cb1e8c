package geom

import (
	"cmp"
	"slices"
)

// This file finds what of an outline is boundary of its filled area.
//
// An edge of an outline may enclose nothing: where it is drawn there and back, or, with the even-odd rule, twice. So edges
// on one line are laid over each other, and each stretch keeps the sum of their directions (even-odd: its last bit).
// Across a stretch that keeps anything the winding number (its parity) changes, hence one side of it is filled and it lies
// in the closed figure; a stretch that keeps nothing changes nothing and is dropped. So all that is left belongs to the
// figure, contains its boundary, and winds as the outline does; and if nothing is left, the outline fills nothing. All
// stretches end at vertices of the outline, hence on whole numbers.

// edge is a straight piece of boundary from a up to b (level ones: from left to right). w is how often the outline passes
// it upwards less how often downwards; with the even-odd rule it is 1.
type edge struct {
	a, b Point
	w    int32
}

// before orders points by height, then from left to right, which is the order along every edge.
func before(p, q Point) int {
	if p.Y != q.Y {
		return cmp.Compare(p.Y, q.Y)
	}
	return cmp.Compare(p.X, q.X)
}

// alongLine orders edges by direction, then by line, then by lower end. Directions lie in a half turn (edges run upwards),
// so the sign of the cross product orders them.
func alongLine(e, f edge) int {
	if c := sameLine(e, f); c != 0 {
		return c
	}
	return before(e.a, f.a)
}

// sameLine is 0 where two edges lie on one line, else their order.
func sameLine(e, f edge) int {
	ex, ey, fx, fy := e.b.X-e.a.X, e.b.Y-e.a.Y, f.b.X-f.a.X, f.b.Y-f.a.Y
	if c := crossSign(ex, ey, fx, fy); c != 0 {
		return c
	}
	return Orient(e.a, e.b, f.a)
}

// directed gives the edges of an outline as it is drawn, apart from repeated points.
func directed(outline []Point) []edge {
	edges := make([]edge, 0, len(outline))
	for i, q := range outline {
		p := outline[len(outline)-1]
		if i > 0 {
			p = outline[i-1]
		}
		switch c := before(p, q); {
		case c < 0:
			edges = append(edges, edge{p, q, 1})
		case c > 0:
			edges = append(edges, edge{q, p, -1})
		}
	}
	return edges
}

// convexTwice tells whether an outline is convex, and gives twice its area. It is if it always turns the same way, never
// right round, and goes up and down once: then it winds once around what it encloses. Straight points are allowed.
//
// The area is summed by the shoelace formula about the first point: at most 2^72 for a convex figure in the plane, and
// less for each part of the sum.
func convexTwice(outline []Point) (twice int128, ok bool) {
	n := len(outline)
	for n > 1 && outline[n-1] == outline[0] {
		n--
	}
	if n < 3 {
		return int128{}, false
	}
	o := outline[0]
	p, q := outline[n-2], outline[n-1]
	way, flips := 0, 0
	var rise int64
	for first := n - 1; first > 0 && rise == 0; first-- {
		rise = sign(outline[first].Y - outline[first-1].Y)
	}
	if d := sign(o.Y - q.Y); d != 0 {
		rise = d
	}
	for _, r := range outline[:n] {
		ax, ay, bx, by := q.X-p.X, q.Y-p.Y, r.X-q.X, r.Y-q.Y
		if bx == 0 && by == 0 {
			continue
		}
		turn := crossSign(ax, ay, bx, by)
		if turn == 0 && (sign(ax) != sign(bx) || sign(ay) != sign(by)) || turn*way < 0 {
			return int128{}, false
		}
		if turn != 0 {
			way = turn
		}
		if d := sign(r.Y - q.Y); d != 0 && d != rise {
			rise = d
			flips++
		}
		twice = twice.add(mul(q.X-o.X, r.Y-o.Y).sub(mul(q.Y-o.Y, r.X-o.X)))
		p, q = q, r
	}
	return twice.abs(), way != 0 && flips <= 2
}

// boundary gives the edges of an outline that count, in no particular order, and whether they are still the closed line as
// drawn (apart from repeated points).
func boundary(outline []Point, fill Fill) (edges []edge, asDrawn bool) {
	edges = directed(outline)
	slices.SortFunc(edges, alongLine)
	if fill == EvenOdd {
		for i := range edges {
			edges[i].w = 1
		}
	}
	var out []edge // nil while every edge so far stands as it is
	asDrawn = true
	for i := 0; i < len(edges); {
		end, top := i+1, edges[i].b
		for end < len(edges) && sameLine(edges[i], edges[end]) == 0 && before(edges[end].a, top) < 0 {
			if before(edges[end].b, top) > 0 {
				top = edges[end].b
			}
			end++
		}
		if end-i > 1 && asDrawn {
			out = append(make([]edge, 0, len(edges)), edges[:i]...)
			asDrawn = false
		}
		if end-i > 1 {
			out = overlay(out, edges[i:end], fill)
		} else if !asDrawn {
			out = append(out, edges[i])
		}
		i = end
	}
	if asDrawn {
		return edges, true
	}
	return out, false
}

// overlay appends what is left of edges that overlap on one line.
func overlay(out, edges []edge, fill Fill) []edge {
	type step struct {
		at Point
		w  int32
	}
	steps := make([]step, 0, 2*len(edges))
	for _, e := range edges {
		steps = append(steps, step{e.a, e.w}, step{e.b, -e.w})
	}
	slices.SortFunc(steps, func(s, t step) int { return before(s.at, t.at) })
	var w int32
	first := len(out)
	for i := 0; i < len(steps); {
		at := steps[i].at
		for ; i < len(steps) && steps[i].at == at; i++ {
			w += steps[i].w
		}
		if fill == EvenOdd {
			w &= 1
		}
		if k := len(out) - 1; k >= first && out[k].b == out[k].a { // opened below, not yet ended
			if out[k].w == w {
				continue
			}
			out[k].b = at
		}
		if w != 0 {
			out = append(out, edge{at, at, w})
		}
	}
	return out
}
