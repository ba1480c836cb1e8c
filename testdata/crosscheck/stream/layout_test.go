package stream

import (
	"bytes"
	"cmp"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"maskpair/gds"
)

// This file draws random layouts as plain data, which package gds and the judges then write and read.

// point is a position in database units.
type point = [2]int64

// boundary is a polygon, without the closing point.
type boundary struct {
	Layer, Type int
	Points      []point
}

// path is a wire.
type path struct {
	Layer, Type   int
	PathType      int
	Width         int64 // negative: absolute
	Begin, Finish int64 // path type 4
	Points        []point
}

// text is a label.
type text struct {
	Layer, Type int
	At          point
	Text        string
}

// ref is a reference; an array where Columns is not 0. Column and Row are the steps of an array.
type ref struct {
	Name          string
	At            point
	Mirror        bool
	Magnification float64
	Angle         float64
	Columns, Rows int
	Column, Row   [2]float64
}

// cell is a structure. Elements of each kind keep their order.
type cell struct {
	Name       string
	Boundaries []boundary
	Paths      []path
	Texts      []text
	Refs       []ref
}

// options say what may occur in a layout.
type options struct {
	odd    bool // odd angles and fractional magnifications
	paths  bool
	plain  bool // nothing is mirrored
	skew   bool // arrays on lattices of any two directions
	uneven bool // arrays whose span is no multiple of their count
	small  bool // coordinates that stay in the 32-bit plane however they are placed
}

const (
	layers = 3 // layers and types are numbered below this
	names  = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_?$"
)

// interest asks for all that occurs.
func interest() gds.Interest {
	want := gds.Interest{Figures: map[gds.LayerType]uint8{}, Labels: map[gds.LayerType]uint8{}}
	for l := range uint16(layers) {
		for t := range uint16(layers) {
			class := uint8(1 + l*layers + t)
			want.Figures[gds.LayerType{Layer: l, Type: t}] = class
			want.Labels[gds.LayerType{Layer: l, Type: t}] = class
		}
	}
	return want
}

// draw makes a layout; each structure places earlier ones, the last is the only top.
func draw(rng *rand.Rand, o options) []cell {
	n := 2 + rng.IntN(4)
	cells := make([]cell, n)
	placed := make([]bool, n)
	reach := int64(1 << 20)
	if o.small {
		reach = 1 << 12
	}
	coordinate := func() int64 {
		if !o.small && rng.IntN(20) == 0 {
			return []int64{-1 << 31, 1<<31 - 1}[rng.IntN(2)]
		}
		return rng.Int64N(2*reach) - reach
	}
	spot := func() point { return point{coordinate(), coordinate()} }
	for i := range cells {
		c := &cells[i]
		c.Name = fmt.Sprint(i)
		for range rng.IntN(12) {
			c.Name += string(names[rng.IntN(len(names))])
		}
		for range rng.IntN(5) {
			b := boundary{rng.IntN(layers), rng.IntN(layers), nil}
			if rng.IntN(2) == 0 {
				p, q := spot(), spot()
				b.Points = []point{p, {q[0], p[1]}, q, {p[0], q[1]}}
			} else {
				for range 3 + rng.IntN(8) {
					b.Points = append(b.Points, spot())
				}
			}
			c.Boundaries = append(c.Boundaries, b)
		}
		for range rng.IntN(4) {
			if !o.paths {
				break
			}
			p := path{Layer: rng.IntN(layers), Type: rng.IntN(layers), PathType: []int{0, 1, 2, 4}[rng.IntN(4)], Width: 1 + rng.Int64N(100)}
			if rng.IntN(4) == 0 {
				p.Width = -p.Width
			}
			if p.PathType == 4 {
				p.Begin, p.Finish = rng.Int64N(60)-20, rng.Int64N(60)-20
			}
			for range 2 + rng.IntN(5) {
				p.Points = append(p.Points, spot())
			}
			p.Points = slices.Compact(p.Points)
			if len(p.Points) > 1 {
				c.Paths = append(c.Paths, p)
			}
		}
		for range rng.IntN(3) {
			s := ""
			for range 1 + rng.IntN(9) {
				s += string(names[rng.IntN(len(names))])
			}
			c.Texts = append(c.Texts, text{rng.IntN(layers), rng.IntN(layers), spot(), s})
		}
		for j := range i {
			times := rng.IntN(3)
			if i == n-1 && !placed[j] {
				times = 1 + rng.IntN(2)
			}
			for range times {
				placed[j] = true
				c.Refs = append(c.Refs, reference(rng, cells[j].Name, spot(), o))
			}
		}
		rng.Shuffle(len(c.Refs), func(i, j int) { c.Refs[i], c.Refs[j] = c.Refs[j], c.Refs[i] })
	}
	return cells
}

// reference draws a placement. The lattice of an array lies along the turned axes, for gdspy knows no other.
func reference(rng *rand.Rand, name string, at point, o options) ref {
	r := ref{Name: name, At: at, Mirror: rng.IntN(2) == 0 && !o.plain, Magnification: 1, Angle: 90 * float64(rng.IntN(4))}
	if rng.IntN(6) == 0 {
		r.Magnification = float64(2 + rng.IntN(2))
	}
	if o.odd && rng.IntN(3) == 0 {
		r.Angle = float64(rng.IntN(3600)) / 10
	}
	if o.odd && rng.IntN(6) == 0 {
		r.Magnification = float64(1+rng.IntN(40)) / 16
	}
	if rng.IntN(3) > 0 {
		return r
	}
	limit := int64(1 << 30)
	for _, v := range at {
		limit = min(limit, 1<<31-1-max(v, -v))
	}
	r.Columns, r.Rows = 1+rng.IntN(4), 1+rng.IntN(4)
	dx, dy := step(rng, limit), step(rng, limit)
	if r.Mirror {
		dy = -dy
	}
	if o.uneven {
		dx, dy = dx+float64(rng.IntN(r.Columns))/float64(r.Columns), dy+float64(rng.IntN(r.Rows))/float64(r.Rows)
	}
	r.Column, r.Row = turned(r.Angle, dx, 0), turned(r.Angle, 0, dy)
	if o.skew { // libGDSII does not turn or magnify what an array places
		r.Angle, r.Magnification = 0, 1
		r.Column, r.Row = [2]float64{dx, step(rng, limit)}, [2]float64{step(rng, limit), dy}
	}
	return r
}

// step draws the step of an array that four times over stays below limit.
func step(rng *rand.Rand, limit int64) float64 {
	most := min(1<<11, limit/8)
	if most < 1 {
		return 0
	}
	return float64(rng.Int64N(2*most) - most)
}

// turned turns a vector by an angle in degrees; quarter turns exactly.
func turned(degrees, x, y float64) [2]float64 {
	c, s := cosSin(degrees)
	return [2]float64{c*x - s*y, s*x + c*y}
}

// extras say what is written besides a layout.
type extras int

const (
	bare       extras = iota
	attributes        // flags, plexes and properties of some elements
	others            // these, and elements that are no figures: BOX and NODE
)

// write writes a layout with gds.Writer, and gives its path.
func write(t testing.TB, cells []cell, units gds.WriterOptions, more extras) string {
	t.Helper()
	var buf bytes.Buffer
	w := gds.NewWriter(&buf, units)
	decorate := func(k int) {
		if more == bare {
			return
		}
		switch k % 4 {
		case 0:
			w.Flags(1)
		case 1:
			w.Plex(int32(k))
		case 2:
			w.Property(int16(1+k%100), fmt.Sprintf("value %d", k))
		}
	}
	for _, c := range cells {
		w.BeginStructure(c.Name)
		for i, b := range c.Boundaries {
			decorate(i)
			w.Boundary(gds.LayerType{Layer: uint16(b.Layer), Type: uint16(b.Type)}, points(b.Points))
		}
		for i, p := range c.Paths {
			decorate(i)
			style := gds.PathStyle{Type: int16(p.PathType), Width: int32(p.Width), Begin: int32(p.Begin), Finish: int32(p.Finish)}
			w.Path(gds.LayerType{Layer: uint16(p.Layer), Type: uint16(p.Type)}, style, points(p.Points))
		}
		if more == others {
			w.Box(gds.LayerType{Layer: 1, Type: 1}, gds.Rect{X1: 0, Y1: 0, X2: 5, Y2: 5})
			w.Node(gds.LayerType{Layer: 1, Type: 1}, []gds.Point{{X: 1, Y: 2}})
		}
		for _, s := range c.Texts {
			w.Text(gds.LayerType{Layer: uint16(s.Layer), Type: uint16(s.Type)}, at(s.At), s.Text)
		}
		for i, r := range c.Refs {
			decorate(i)
			strans := gds.Strans{Mirror: r.Mirror, Magnification: r.Magnification, Angle: r.Angle}
			if r.Columns == 0 {
				w.SRef(r.Name, strans, at(r.At))
				continue
			}
			column, row := ends(r)
			w.ARef(r.Name, strans, uint16(r.Columns), uint16(r.Rows), at(r.At), column, row)
		}
		w.EndStructure()
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	name := filepath.Join(t.TempDir(), "layout.gds")
	if err := os.WriteFile(name, buf.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return name
}

// ends gives the second and third point of an AREF.
func ends(r ref) (column, row gds.Point) {
	end := func(step [2]float64, n int) gds.Point {
		return at(point{r.At[0] + round(step[0]*float64(n)), r.At[1] + round(step[1]*float64(n))})
	}
	return end(r.Column, r.Columns), end(r.Row, r.Rows)
}

func at(p point) gds.Point { return gds.Point{X: int32(p[0]), Y: int32(p[1])} }

func points(list []point) []gds.Point {
	out := make([]gds.Point, len(list))
	for i, p := range list {
		out[i] = at(p)
	}
	return out
}

// index reads a stream with gds.Index.
func index(t testing.TB, name string) *gds.Library {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lib, err := gds.Index(f, -1, interest(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return lib
}

// read tells what gds.Index has read, as plain data.
func read(lib *gds.Library) []cell {
	cells := make([]cell, len(lib.Structures))
	for i := range cells {
		s := &lib.Structures[i]
		c := &cells[i]
		c.Name = s.Name
		for f := s.FirstFigure; f < s.EndFigure; f++ {
			figure := &lib.Figures[f]
			layer, typ := int(figure.Class-1)/layers, int(figure.Class-1)%layers
			if figure.Outline == 0 {
				b := figure.Box
				x1, y1, x2, y2 := int64(b.X1), int64(b.Y1), int64(b.X2), int64(b.Y2)
				c.Boundaries = append(c.Boundaries, boundary{layer, typ, []point{{x1, y1}, {x2, y1}, {x2, y2}, {x1, y2}}})
				continue
			}
			o := &lib.Outlines[figure.Outline-1]
			var list []point
			for _, p := range lib.Points[o.First : o.First+uint64(o.Count)] {
				list = append(list, point{int64(p.X), int64(p.Y)})
			}
			if o.Path {
				c.Paths = append(c.Paths, path{layer, typ, int(o.PathType), int64(o.Width), int64(o.Begin), int64(o.Finish), list})
			} else {
				c.Boundaries = append(c.Boundaries, boundary{layer, typ, list})
			}
		}
		for _, l := range lib.Labels[s.FirstLabel:s.EndLabel] {
			c.Texts = append(c.Texts, text{int(l.Class-1) / layers, int(l.Class-1) % layers, point{int64(l.At.X), int64(l.At.Y)}, l.Text})
		}
		for k := s.FirstRef; k < s.EndRef; k++ {
			c.Refs = append(c.Refs, readRef(lib, &lib.Refs[k]))
		}
	}
	return cells
}

func readRef(lib *gds.Library, in *gds.Ref) ref {
	r := ref{At: point{int64(in.At.X), int64(in.At.Y)}, Magnification: 1}
	if in.Target < 0 {
		r.Name = lib.Missing[-1-in.Target]
	} else {
		r.Name = lib.Structures[in.Target].Name
	}
	p := lib.PlacementOf(in)
	if p == nil {
		r.Mirror, r.Angle = in.Turn >= 4, 90*float64(in.Turn%4)
		return r
	}
	r.Mirror, r.Magnification, r.Angle = p.Mirror, p.Magnification, p.Angle
	if in.Array {
		r.Columns, r.Rows = int(p.Columns), int(p.Rows)
		r.Column = [2]float64{float64(int64(p.ColumnEnd.X)-r.At[0]) / float64(p.Columns), float64(int64(p.ColumnEnd.Y)-r.At[1]) / float64(p.Columns)}
		r.Row = [2]float64{float64(int64(p.RowEnd.X)-r.At[0]) / float64(p.Rows), float64(int64(p.RowEnd.Y)-r.At[1]) / float64(p.Rows)}
	}
	return r
}

// plain puts what can be written in several ways in one of them: a rectangle begins at its lower left corner and runs
// counter-clockwise, as package gds keeps no more of it than its box.
func plain(cells []cell) []cell {
	out := slices.Clone(cells)
	for i := range out {
		out[i].Boundaries = slices.Clone(out[i].Boundaries)
		for k, b := range out[i].Boundaries {
			p := b.Points
			if len(p) != 4 || p[0] == p[2] {
				continue
			}
			x1, x2, y1, y2 := min(p[0][0], p[2][0]), max(p[0][0], p[2][0]), min(p[0][1], p[2][1]), max(p[0][1], p[2][1])
			box := []point{{x1, y1}, {x2, y1}, {x2, y2}, {x1, y2}}
			same := x1 < x2 && y1 < y2 && len(p) == 4
			alike := slices.Clone(p)
			slices.SortFunc(alike, compare)
			sorted := slices.Clone(box)
			slices.SortFunc(sorted, compare)
			if same && slices.Equal(alike, sorted) && (p[0][0] == p[1][0]) != (p[0][1] == p[1][1]) {
				out[i].Boundaries[k].Points = box
			}
		}
	}
	return out
}

func compare(p, q point) int { return cmp.Or(cmp.Compare(p[0], q[0]), cmp.Compare(p[1], q[1])) }
