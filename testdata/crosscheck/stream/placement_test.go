package stream

import (
	"cmp"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// This file flattens random hierarchies with gds.Compose, and holds every vertex against the flattening of a judge.

// flatPolygon is a placed boundary. slack is how far its vertices may lie from the judge's: half a unit where a placement
// rounds, and more where the lattice of an array does, whose steps gdspy leaves unrounded.
type flatPolygon struct {
	points []point
	slack  float64
}

// flatten places all boundaries under a structure, by layer and type, own ones before those of references.
func flatten(lib *gds.Library, structure int32, t gds.Transform, slack float64, into map[string][]flatPolygon) {
	s := &lib.Structures[structure]
	for _, f := range lib.Figures[s.FirstFigure:s.EndFigure] {
		var list []gds.Point
		if f.Outline == 0 {
			b := f.Box
			list = []gds.Point{{X: b.X1, Y: b.Y1}, {X: b.X2, Y: b.Y1}, {X: b.X2, Y: b.Y2}, {X: b.X1, Y: b.Y2}}
		} else {
			o := &lib.Outlines[f.Outline-1]
			list = lib.Points[o.First : o.First+uint64(o.Count)]
		}
		p := flatPolygon{slack: slack + 1e-3}
		if !t.Exact() {
			p.slack += 0.5
		}
		for _, q := range list {
			x, y := t.Apply(int64(q.X), int64(q.Y))
			p.points = append(p.points, point{x, y})
		}
		key := fmt.Sprintf("%d/%d", int(f.Class-1)/layers, int(f.Class-1)%layers)
		into[key] = append(into[key], p)
	}
	for k := s.FirstRef; k < s.EndRef; k++ {
		ref := &lib.Refs[k]
		p := lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		more := 0.0
		if ref.Array {
			columns, rows = p.Columns, p.Rows
			if math.Mod(p.Angle, 90) != 0 || !lib.Lattice(ref).Exact {
				more = 2 * t.Scale()
			}
		}
		for c := range columns {
			for r := range rows {
				flatten(lib, ref.Target, gds.Compose(t, ref, p, c, r), slack+more, into)
			}
		}
	}
}

// far gives the greatest distance along an axis between the vertices of a polygon and the judge's, in whatever order a
// rectangle begins.
func far(p flatPolygon, judge [][2]float64) float64 {
	if len(p.points) != len(judge) {
		return math.Inf(1)
	}
	best := math.Inf(1)
	n := len(judge)
	for _, way := range []int{1, n - 1} {
		for first := range n {
			if n != 4 && (first > 0 || way != 1) {
				break
			}
			worst := 0.0
			for i, q := range p.points {
				j := judge[(first+i*way)%n]
				worst = max(worst, math.Abs(float64(q[0])-j[0]), math.Abs(float64(q[1])-j[1]))
			}
			best = min(best, worst)
		}
	}
	return best
}

func TestPlacementsAgainstGdspy(t *testing.T) {
	outside.Packages(t, "python3-gdspy", "python3-numpy")
	rng := rand.New(rand.NewPCG(33, 1))
	var files []string
	var flats []map[string][]flatPolygon
	compared, inexact := 0, 0
	for n := range 160 {
		cells := draw(rng, options{odd: n%3 == 0, small: true, uneven: n%4 == 0})
		files = append(files, write(t, cells, unitChoices[n%len(unitChoices)], bare))
		flat := map[string][]flatPolygon{}
		lib := index(t, files[n])
		flatten(lib, int32(len(lib.Structures)-1), gds.Identity(), 0, flat)
		flats = append(flats, flat)
	}
	for n, judge := range outside.Ask[[]string, []map[string][][][2]float64](t, "gdspy_flat.py", files) {
		for key, polygons := range flats[n] {
			if len(polygons) != len(judge[key]) {
				t.Fatalf("layout %d, layer %s: %d polygons, by gdspy %d", n, key, len(polygons), len(judge[key]))
			}
			for i, p := range polygons {
				if d := far(p, judge[key][i]); d > p.slack {
					t.Fatalf("layout %d, layer %s, polygon %d: off by %g, more than %g\n%v\ngdspy %v", n, key, i, d, p.slack, p.points, judge[key][i])
				}
				compared++
				if p.slack > 0.1 {
					inexact++
				}
			}
		}
		for key, list := range judge {
			if len(list) != len(flats[n][key]) {
				t.Fatalf("layout %d, layer %s: gdspy has %d polygons", n, key, len(list))
			}
		}
	}
	t.Logf("%d polygons, %d of them rounded", compared, inexact)
	if compared < 10000 || inexact < 1000 || inexact > compared*2/3 {
		t.Errorf("too few or too one-sided: %d polygons, %d rounded", compared, inexact)
	}
}

// TestLatticesAgainstLibGDSII has arrays on lattices of any two directions, which gdspy does not know. Only exact placements
// occur, nothing is mirrored, and arrays stand upright (libGDSII 0.2 passes over the turn and magnification of an AREF, and all
// of STRANS; those of single references above an array it applies); then the flat polygons of both sides are the same set.
func TestLatticesAgainstLibGDSII(t *testing.T) {
	outside.Packages(t, "libgdsii-dev", "g++")
	program := outside.Compile(t, "libgdsii/dump.cc", "GDSII")
	rng := rand.New(rand.NewPCG(33, 2))
	compared := 0
	for n := range 60 {
		cells := draw(rng, options{small: true, plain: true, skew: true})
		file := write(t, cells, gds.WriterOptions{}, bare)
		flat := map[string][]flatPolygon{}
		lib := index(t, file)
		flatten(lib, int32(len(lib.Structures)-1), gds.Identity(), 0, flat)
		ours := map[int][][]point{}
		for key, list := range flat {
			var layer, typ int
			if _, err := fmt.Sscanf(key, "%d/%d", &layer, &typ); err != nil {
				t.Fatal(err)
			}
			for _, p := range list { // libGDSII keeps layers apart, types not
				ours[layer] = append(ours[layer], ring(p.points))
				compared++
			}
		}
		theirs := map[int][][]point{}
		for _, l := range outside.AskProgram[string, reading](t, program, file).Flat {
			for _, xy := range l.Polygons {
				var list []point
				for i := 0; i+1 < len(xy); i += 2 {
					list = append(list, point{round(xy[i]), round(xy[i+1])})
				}
				theirs[l.Layer] = append(theirs[l.Layer], ring(list))
			}
		}
		for layer := range layers {
			a, b := ours[layer], theirs[layer]
			slices.SortFunc(a, compareRings)
			slices.SortFunc(b, compareRings)
			if !slices.EqualFunc(a, b, slices.Equal) {
				for i := range min(len(a), len(b)) {
					if !slices.Equal(a[i], b[i]) {
						t.Fatalf("layout %d, layer %d: %v, by libGDSII %v (%d and %d polygons)", n, layer, a[i], b[i], len(a), len(b))
					}
				}
				t.Fatalf("layout %d, layer %d: %d polygons, by libGDSII %d", n, layer, len(a), len(b))
			}
		}
	}
	if compared < 3000 {
		t.Errorf("only %d polygons", compared)
	}
}

// ring gives a closed line from its least point on, the way round that comes first; a last point that repeats the first is
// dropped.
func ring(list []point) []point {
	if n := len(list); n > 1 && list[0] == list[n-1] {
		list = list[:n-1]
	}
	n := len(list)
	var best []point
	for first := range n {
		for _, way := range []int{1, n - 1} {
			turned := make([]point, n)
			for i := range turned {
				turned[i] = list[(first+i*way)%n]
			}
			if best == nil || compareRings(turned, best) < 0 {
				best = turned
			}
		}
	}
	return best
}

func compareRings(a, b []point) int {
	return cmp.Or(cmp.Compare(len(a), len(b)), slices.CompareFunc(a, b, compare))
}
