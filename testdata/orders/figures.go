package orders

import (
	"bytes"
	"cmp"
	"slices"

	"maskpair/gds"
)

// This file flattens what the deck draws and finds coarse shapes.

// Layer is a deck layer as far as orders need it.
type Layer struct {
	Name    string
	Drawn   []gds.LayerType
	Masks   [2]gds.LayerType
	Spacing int64 // database units
}

// box is in half database units.
type box struct{ x1, y1, x2, y2 int64 }

func (b box) touches(c box) bool {
	return b.x1 <= c.x2 && c.x1 <= b.x2 && b.y1 <= c.y2 && c.y1 <= b.y2
}

func (b box) grown(by int64) box { return box{b.x1 - by, b.y1 - by, b.x2 + by, b.y2 + by} }

func (b box) join(c box) box {
	return box{min(b.x1, c.x1), min(b.y1, c.y1), max(b.x2, c.x2), max(b.y2, c.y2)}
}

// figure is a placed figure.
type figure struct {
	layer, top int32
	cell       int32 // structure that holds it
	number     uint32
	place      int32 // number of the placement of the cell
	box        box
	mask       int8  // it arrived on, or -1
	shape      int32 // coarse
}

// placement is a placed structure.
type placement struct {
	cell, top int32
	at        gds.Transform
	under     [2]int32 // of the figures: those of it and of all below
}

// drawing is a flattened stream.
type drawing struct {
	lib     *gds.Library
	layers  []Layer
	tops    []int32
	loose   int // structures that nothing places
	figures []figure
	placed  []placement
	shapes  int
	members [][]int32 // by shape: figures
	grid    map[[3]int64][]int32
	step    int64
}

// classOf numbers the parts that layers play: three to a deck layer.
func classOf(layer int, part int) uint8 { return uint8(1 + 3*layer + part) }

func interest(layers []Layer) gds.Interest {
	want := gds.Interest{Figures: map[gds.LayerType]uint8{}}
	for i, l := range layers {
		for _, d := range l.Drawn {
			want.Figures[d] = classOf(i, 0)
		}
		want.Figures[l.Masks[0]], want.Figures[l.Masks[1]] = classOf(i, 1), classOf(i, 2)
	}
	return want
}

// flatten reads a stream. Figures under odd placements are left out.
func flatten(stream []byte, layers []Layer) (*drawing, error) {
	return flattenUnder(stream, layers, false)
}

// flattenUnder also takes every structure for a top, where all is true.
func flattenUnder(stream []byte, layers []Layer, all bool) (*drawing, error) {
	lib, err := gds.Index(bytes.NewReader(stream), int64(len(stream)), interest(layers), nil)
	if err != nil {
		return nil, err
	}
	d := &drawing{lib: lib, layers: layers}
	placed := make([]bool, len(lib.Structures))
	for _, r := range lib.Refs {
		if r.Target >= 0 {
			placed[r.Target] = true
		}
	}
	for s := range lib.Structures {
		if !placed[s] {
			d.loose++
		}
		if !placed[s] || all {
			d.tops = append(d.tops, int32(s))
		}
	}
	slices.SortFunc(d.tops, func(a, b int32) int { return cmp.Compare(lib.Structures[a].Name, lib.Structures[b].Name) })
	for i, t := range d.tops {
		d.walk(int32(i), t, gds.Identity())
	}
	return d, nil
}

func (d *drawing) walk(top, s int32, at gds.Transform) {
	if !at.Rigid() {
		return
	}
	st := &d.lib.Structures[s]
	p := len(d.placed)
	d.placed = append(d.placed, placement{cell: s, top: top, at: at})
	d.placed[p].under[0] = int32(len(d.figures))
	for i := st.FirstFigure; i < st.EndFigure; i++ {
		f := &d.lib.Figures[i]
		k := int32(f.Class - 1)
		d.figures = append(d.figures, figure{layer: k / 3, top: top, cell: s, number: i, place: int32(p), box: placeBox(at, d.local(i)), mask: int8(k%3) - 1})
	}
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &d.lib.Refs[r]
		if ref.Target < 0 {
			continue
		}
		pl := d.lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if pl != nil {
			columns, rows = pl.Columns, pl.Rows
		}
		for row := range rows {
			for column := range columns {
				d.walk(top, ref.Target, gds.Compose(at, ref, pl, column, row))
			}
		}
	}
	d.placed[p].under[1] = int32(len(d.figures))
}

// local gives a box around a figure in its structure, half units.
func (d *drawing) local(i uint32) box {
	f := &d.lib.Figures[i]
	b := box{2 * int64(f.Box.X1), 2 * int64(f.Box.Y1), 2 * int64(f.Box.X2), 2 * int64(f.Box.Y2)}
	if f.Outline != 0 {
		if o := &d.lib.Outlines[f.Outline-1]; o.Path {
			w := int64(max(o.Width, -o.Width))
			b = b.grown(2*w + 2*int64(max(o.Begin, o.Finish, 0)))
		}
	}
	return b
}

// point gives a point of a figure in its structure, half units.
func (d *drawing) point(i uint32) (x, y int64) {
	f := &d.lib.Figures[i]
	if f.Outline == 0 {
		return int64(f.Box.X1) + int64(f.Box.X2), int64(f.Box.Y1) + int64(f.Box.Y2)
	}
	o := &d.lib.Outlines[f.Outline-1]
	p := d.lib.Points[o.First]
	return 2 * int64(p.X), 2 * int64(p.Y)
}

func placePoint(at gds.Transform, x, y int64) (int64, int64) {
	x, y = at.Orientation.Apply(x, y)
	return x + 2*at.X, y + 2*at.Y
}

func placeBox(at gds.Transform, b box) box {
	x1, y1 := placePoint(at, b.x1, b.y1)
	x2, y2 := placePoint(at, b.x2, b.y2)
	return box{min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2)}
}

// join makes coarse shapes of boxes that touch, and a grid to find figures by.
func (d *drawing) join() {
	parent := make([]int32, len(d.figures))
	for i := range parent {
		parent[i] = int32(i)
	}
	find := func(i int32) int32 {
		for parent[i] != i {
			parent[i] = parent[parent[i]]
			i = parent[i]
		}
		return i
	}
	for _, l := range d.layers {
		d.step = max(d.step, 8*l.Spacing, 64)
	}
	type key struct {
		layer, top int32
		box        box
	}
	seen := map[key]int32{}
	d.grid = map[[3]int64][]int32{}
	for i := range d.figures {
		f := &d.figures[i]
		k := key{f.layer, f.top, f.box}
		if first, ok := seen[k]; ok {
			parent[find(int32(i))] = find(first)
			continue
		}
		seen[k] = int32(i)
		d.around(f.layer, f.top, f.box, func(n int32) {
			if d.figures[n].box.touches(f.box) {
				parent[find(n)] = find(int32(i))
			}
		})
		d.tiles(f.layer, f.top, f.box, func(t [3]int64) { d.grid[t] = append(d.grid[t], int32(i)) })
	}
	number := map[int32]int32{}
	for i := range d.figures {
		r := find(int32(i))
		n, ok := number[r]
		if !ok {
			n = int32(len(number))
			number[r] = n
			d.members = append(d.members, nil)
		}
		d.figures[i].shape = n
		d.members[n] = append(d.members[n], int32(i))
	}
	d.shapes = len(number)
}

func (d *drawing) tiles(layer, top int32, b box, fn func([3]int64)) {
	for y := b.y1 / d.step; y <= b.y2/d.step; y++ {
		for x := b.x1 / d.step; x <= b.x2/d.step; x++ {
			fn([3]int64{int64(layer)<<32 | int64(top), x, y})
		}
	}
}

// around calls fn for the figures near a box, one of each set of equal ones, possibly several times.
func (d *drawing) around(layer, top int32, b box, fn func(i int32)) {
	d.tiles(layer, top, b, func(t [3]int64) {
		for _, i := range d.grid[t] {
			fn(i)
		}
	})
}
