package decompose

import (
	"cmp"
	"math"
	"slices"
	"sort"
)

// This file makes coarse maps of a layer for pictures: how much of each tile is on A and on B, and what is unresolved or moved there.
// Nothing is decided by a map, so floating point will do: the area of a node is spread evenly over its box.

// TileMap is a coarse map of a deck layer in one top.
type TileMap struct {
	Top    string
	Box    Box // around all shapes, half units of the top
	NX, NY int // tiles across and up, at least 1 each
	Tiles  []Tile
}

// Tile is one tile of a map; they go row by row, from below, each row from the left.
type Tile struct {
	A, B       float64 // area on the masks, square database units
	Unresolved int     // near pairs whose gap has its middle here
	Moved      int     // moved shapes whose box has its middle here
}

const (
	mostTiles  = 44 // along the longer side
	leastTiles = 10 // a tile is to hold a few shapes, so a small layout has few tiles
	mapsKept   = 6  // tops with maps: those with most unresolved, then those with most shapes
)

// maps gives the maps of a layer, the most telling tops first.
func (l *layout) maps(a *assignment, res *LayerResult) []TileMap {
	unresolved := map[string]int{}
	for i := range res.Unresolved {
		unresolved[res.Unresolved[i].Top] += max(1, len(res.Unresolved[i].Pairs))
	}
	type candidate struct{ rank, unresolved, shapes int }
	var tops []candidate
	for rank, top := range l.flat.h.byName {
		if n := int(l.first[rank+1] - l.first[rank]); n > 0 {
			tops = append(tops, candidate{rank, unresolved[l.flat.h.name(l.flat.h.tops[top])], n})
		}
	}
	slices.SortStableFunc(tops, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(b.unresolved, a.unresolved), cmp.Compare(b.shapes, a.shapes))
	})
	byName := map[string]*TileMap{}
	byRank := map[int]*TileMap{}
	out := make([]TileMap, min(len(tops), mapsKept))
	for i := range out {
		out[i].Top = l.flat.h.name(l.flat.h.tops[l.flat.h.byName[tops[i].rank]])
		out[i].Box = emptyBox
		byName[out[i].Top], byRank[tops[i].rank] = &out[i], &out[i]
	}
	boxes := l.boxes()
	rankOf := func(node uint32) int {
		shape := l.shapeOf(node)
		return sort.Search(len(l.first)-1, func(i int) bool { return l.first[i+1] > shape })
	}
	for u, b := range boxes {
		if m := byRank[rankOf(uint32(u))]; m != nil {
			m.Box = m.Box.join(l.half(b))
		}
	}
	for i := range out {
		out[i].lay(tops[i].shapes)
	}
	unit := float64(l.flat.forms.scale * l.flat.forms.scale)
	for u, b := range boxes {
		if m := byRank[rankOf(uint32(u))]; m != nil {
			onA, onB := l.areaOn(uint32(u), a.mask.Data[u])
			m.spread(l.half(b), onA/unit, onB/unit)
		}
	}
	for i := range res.Unresolved {
		for k := range res.Unresolved[i].Pairs {
			p := &res.Unresolved[i].Pairs[k]
			if m := byName[p.Top]; m != nil {
				m.At(p.Gap.middle()).Unresolved++
			}
		}
	}
	for i := range res.Moved {
		if m := byName[res.Moved[i].Top]; m != nil {
			m.At(res.Moved[i].Box.middle()).Moved++
		}
	}
	return out
}

// lay chooses the tiles for so many shapes: about square, the longer side cut in as many as is telling.
func (m *TileMap) lay(shapes int) {
	most := max(leastTiles, min(mostTiles, math.Sqrt(float64(shapes))))
	w, h := float64(m.Box.X2-m.Box.X1), float64(m.Box.Y2-m.Box.Y1)
	long := math.Max(w, h)
	count := func(side float64) int {
		if long <= 0 {
			return 1
		}
		return max(1, int(math.Round(most*side/long)))
	}
	m.NX, m.NY = count(w), count(h)
	m.Tiles = make([]Tile, m.NX*m.NY)
}

// Bounds gives the box of the tile in column x and row y.
func (m *TileMap) Bounds(x, y int) Box {
	part := func(low, high int64, i, n int) int64 { return low + int64(float64(high-low)*float64(i)/float64(n)) }
	return Box{part(m.Box.X1, m.Box.X2, x, m.NX), part(m.Box.Y1, m.Box.Y2, y, m.NY),
		part(m.Box.X1, m.Box.X2, x+1, m.NX), part(m.Box.Y1, m.Box.Y2, y+1, m.NY)}
}

// tileOf gives the tile, of n between low and high, in which a coordinate lies.
func tileOf(at, low, high int64, n int) int {
	if high <= low {
		return 0
	}
	return max(0, min(n-1, int(float64(at-low)*float64(n)/float64(high-low))))
}

// At gives the tile that holds a spot, or is nearest to it.
func (m *TileMap) At(s Spot) *Tile {
	return &m.Tiles[tileOf(s.Y, m.Box.Y1, m.Box.Y2, m.NY)*m.NX+tileOf(s.X, m.Box.X1, m.Box.X2, m.NX)]
}

// middle is the middle of a box.
func (b Box) middle() Spot { return Spot{b.X1 + (b.X2-b.X1)/2, b.Y1 + (b.Y2-b.Y1)/2} }

// spread adds area that is spread evenly over a box.
func (m *TileMap) spread(b Box, onA, onB float64) {
	x1, x2 := tileOf(b.X1, m.Box.X1, m.Box.X2, m.NX), tileOf(b.X2, m.Box.X1, m.Box.X2, m.NX)
	y1, y2 := tileOf(b.Y1, m.Box.Y1, m.Box.Y2, m.NY), tileOf(b.Y2, m.Box.Y1, m.Box.Y2, m.NY)
	if x1 == x2 && y1 == y2 {
		t := &m.Tiles[y1*m.NX+x1]
		t.A += onA
		t.B += onB
		return
	}
	whole := float64(b.X2-b.X1) * float64(b.Y2-b.Y1)
	for y := y1; y <= y2; y++ {
		for x := x1; x <= x2; x++ {
			c := m.Bounds(x, y)
			w := min(b.X2, c.X2) - max(b.X1, c.X1)
			h := min(b.Y2, c.Y2) - max(b.Y1, c.Y1)
			if w > 0 && h > 0 && whole > 0 {
				part := float64(w) * float64(h) / whole
				m.Tiles[y*m.NX+x].A += onA * part
				m.Tiles[y*m.NX+x].B += onB * part
			}
		}
	}
}
