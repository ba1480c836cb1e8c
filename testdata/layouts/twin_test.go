package layouts

import (
	"bytes"
	"math"
	"testing"

	"maskpair/gds"
)

// This file counts a layout the slow way: each figure against each other, by the distance of their edges.

// placed is a figure of a top.
type placed struct {
	box    gds.Rect
	points [][2]float64
}

// flatten gives the figures of each top on the drawn layer.
func flatten(t *testing.T, stream []byte) [][]placed {
	t.Helper()
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), gds.Interest{Figures: map[gds.LayerType]uint8{wire(): 1}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if len(lib.Missing) > 0 {
		t.Fatalf("structures are missing: %v", lib.Missing)
	}
	below := map[int32]bool{}
	for i := range lib.Refs {
		below[lib.Refs[i].Target] = true
	}
	var tops [][]placed
	for i := range lib.Structures {
		if !below[int32(i)] {
			tops = append(tops, under(lib, int32(i), gds.Identity(), nil))
		}
	}
	return tops
}

// under appends the figures under a placement of a structure.
func under(lib *gds.Library, structure int32, at gds.Transform, list []placed) []placed {
	s := &lib.Structures[structure]
	for i := s.FirstFigure; i < s.EndFigure; i++ {
		f := &lib.Figures[i]
		corners := []gds.Point{{X: f.Box.X1, Y: f.Box.Y1}, {X: f.Box.X2, Y: f.Box.Y1}, {X: f.Box.X2, Y: f.Box.Y2}, {X: f.Box.X1, Y: f.Box.Y2}}
		if f.Outline != 0 {
			o := &lib.Outlines[f.Outline-1]
			corners = lib.Points[o.First : o.First+uint64(o.Count)]
		}
		var p placed
		p.box, _ = at.ApplyRect(f.Box)
		for _, c := range corners {
			x, y := at.Apply(int64(c.X), int64(c.Y))
			p.points = append(p.points, [2]float64{float64(x), float64(y)})
		}
		list = append(list, p)
	}
	for i := s.FirstRef; i < s.EndRef; i++ {
		ref := &lib.Refs[i]
		grid := lib.Lattice(ref)
		for r := range grid.Rows {
			for c := range grid.Columns {
				list = under(lib, ref.Target, gds.Compose(at, ref, lib.PlacementOf(ref), c, r), list)
			}
		}
	}
	return list
}

// count gives shapes and near pairs of a top.
func count(t *testing.T, figures []placed, spacing float64) (shapes, pairs int64) {
	t.Helper()
	parent := make([]int, len(figures))
	for i := range parent {
		parent[i] = i
	}
	find := func(i int) int {
		for parent[i] != i {
			i = parent[i]
		}
		return i
	}
	type pair struct{ a, b int }
	var near []pair
	for i := range figures {
		for j := range i {
			switch d := distance(t, &figures[i], &figures[j], spacing); {
			case d == 0:
				parent[find(i)] = find(j)
			case d < spacing:
				near = append(near, pair{i, j})
			}
		}
	}
	for i := range parent {
		if parent[i] == i {
			shapes++
		}
	}
	distinct := map[pair]bool{}
	for _, p := range near {
		if a, b := find(p.a), find(p.b); a != b {
			distinct[pair{min(a, b), max(a, b)}] = true
		}
	}
	return shapes, int64(len(distinct))
}

// distance gives the distance of two figures, infinite where it is at least the limit. Between axis-parallel edges it is the
// root of a whole number far below 2^53, so comparisons with whole numbers are right; a slanted one must not be close to call.
func distance(t *testing.T, a, b *placed, limit float64) float64 {
	t.Helper()
	if float64(a.box.X1)-float64(b.box.X2) >= limit || float64(b.box.X1)-float64(a.box.X2) >= limit ||
		float64(a.box.Y1)-float64(b.box.Y2) >= limit || float64(b.box.Y1)-float64(a.box.Y2) >= limit {
		return math.Inf(1)
	}
	if inside(a.points[0], b.points) || inside(b.points[0], a.points) {
		return 0
	}
	best := math.Inf(1)
	for i := range a.points {
		p, q := a.points[i], a.points[(i+1)%len(a.points)]
		for j := range b.points {
			r, s := b.points[j], b.points[(j+1)%len(b.points)]
			if max(p[0], q[0])+limit <= min(r[0], s[0]) || max(r[0], s[0])+limit <= min(p[0], q[0]) ||
				max(p[1], q[1])+limit <= min(r[1], s[1]) || max(r[1], s[1])+limit <= min(p[1], q[1]) {
				continue
			}
			if cross(p, q, r)*cross(p, q, s) < 0 && cross(r, s, p)*cross(r, s, q) < 0 {
				return 0
			}
			d := min(toEdge(p, r, s), toEdge(q, r, s), toEdge(r, p, q), toEdge(s, p, q))
			slanted := p[0] != q[0] && p[1] != q[1] || r[0] != s[0] && r[1] != s[1]
			if slanted && (d > 0 && d < 1e-3 || math.Abs(d-limit) < 1e-3) {
				t.Fatalf("a slanted edge at %g is too close to call", d)
			}
			best = min(best, d)
		}
	}
	return best
}

func cross(a, b, c [2]float64) float64 {
	return (b[0]-a[0])*(c[1]-a[1]) - (b[1]-a[1])*(c[0]-a[0])
}

// toEdge gives the distance of a point from an edge.
func toEdge(p, a, b [2]float64) float64 {
	dx, dy := b[0]-a[0], b[1]-a[1]
	along := 0.0
	if l := dx*dx + dy*dy; l > 0 {
		along = min(1, max(0, ((p[0]-a[0])*dx+(p[1]-a[1])*dy)/l))
	}
	x, y := a[0]+along*dx-p[0], a[1]+along*dy-p[1]
	return math.Sqrt(x*x + y*y)
}

// inside tells whether a point lies inside an outline; for one on the outline it may say either.
func inside(p [2]float64, outline [][2]float64) bool {
	in := false
	for i := range outline {
		a, b := outline[i], outline[(i+1)%len(outline)]
		if (a[1] > p[1]) != (b[1] > p[1]) && p[0] < a[0]+(p[1]-a[1])/(b[1]-a[1])*(b[0]-a[0]) {
			in = !in
		}
	}
	return in
}
