package orders

import (
	"fmt"
	"math/rand/v2"
	"strconv"
	"strings"
)

// This file makes anchor files.

// Taste says what an anchor file is made of.
type Taste struct {
	Entries  int    // how many are tried; those that contradict earlier ones are left out
	Follow   int    // chance in percent that an order asks for the mask that Masks gives
	Masks    []byte // a stream with masks, an earlier result; nil: none
	Unit     string // of the deck: "nm" or "um"
	NoAlike  bool
	Wide     bool // also boxes that hit many shapes
	Placed   int  // cells that are placed more often are left alone; 0: 200
	NoWaiver bool
}

// Generate makes an anchor file for a stream. It also gives how many entries it has.
func Generate(stream []byte, layers []Layer, t Taste, r *rand.Rand) (text string, entries int, err error) {
	d, err := flatten(stream, layers)
	if err != nil {
		return "", 0, err
	}
	d.join()
	g := &generator{Taste: t, drawing: d, r: r, parity: newParity(d.shapes + 1)}
	if g.Placed == 0 {
		g.Placed = 200
	}
	if t.Masks != nil {
		if err := g.remember(); err != nil {
			return "", 0, err
		}
	}
	g.held()
	g.cells = map[int32][]int32{}
	for i, p := range d.placed {
		g.cells[p.cell] = append(g.cells[p.cell], int32(i))
	}
	if len(d.figures) > 0 {
		for range t.Entries {
			g.entry()
		}
	}
	return g.text.String(), g.count, nil
}

type generator struct {
	Taste
	*drawing
	r      *rand.Rand
	parity *parity
	cells  map[int32][]int32 // placements by structure
	was    map[remembered]int8
	text   strings.Builder
	count  int
}

type remembered struct {
	layer int32
	top   string
	box   box
}

// remember reads the masks of an earlier result.
func (g *generator) remember() error {
	d, err := flatten(g.Masks, g.layers)
	if err != nil {
		return err
	}
	g.was = map[remembered]int8{}
	for i := range d.figures {
		f := &d.figures[i]
		if f.mask >= 0 {
			g.was[remembered{f.layer, d.lib.Structures[d.tops[f.top]].Name, f.box}] = f.mask
		}
	}
	return nil
}

// held notes what arrived on a mask.
func (g *generator) held() {
	for i := range g.figures {
		if f := &g.figures[i]; f.mask >= 0 {
			g.parity.relate(f.shape, g.ground(), f.mask == 1)
		}
	}
}

// ground stands for mask A.
func (g *generator) ground() int32 { return int32(g.shapes) }

// wanted gives the mask that an order for a figure should ask for.
func (g *generator) wanted(f *figure) int8 {
	if m, ok := g.was[remembered{f.layer, g.lib.Structures[g.tops[f.top]].Name, f.box}]; ok && g.r.IntN(100) < g.Follow {
		return m
	}
	return int8(g.r.IntN(2))
}

func (g *generator) entry() {
	i := int32(g.r.IntN(len(g.figures)))
	switch n := g.r.IntN(100); {
	case n < 30:
		g.anchor(i)
	case n < 40:
		g.anchorBox(i)
	case n < 52:
		g.anchorCell(i)
	case n < 67:
		g.tie(i)
	case n < 75:
		g.tieCell(i)
	case n < 78:
		g.alike(i)
	case n < 92:
		g.wish(i)
	default:
		g.waive(i)
	}
}

func (g *generator) put(format string, args ...any) {
	fmt.Fprintf(&g.text, format, args...)
	g.count++
}

// number words a coordinate in the deck's unit.
func (g *generator) number(half int64) string {
	v := float64(half) / 2 * g.lib.DBU * 1e9
	if g.Unit == "um" {
		v /= 1000
	}
	return strconv.FormatFloat(v, 'g', 12, 64)
}

func (g *generator) spot(x, y int64) string { return "[" + g.number(x) + ", " + g.number(y) + "]" }

// place gives a point of a figure in its top.
func (g *generator) place(f *figure) (x, y int64) {
	x, y = g.point(f.number)
	return placePoint(g.placed[f.place].at, x, y)
}

func letter(m int8) string { return string(rune('A' + m)) }

// everywhere tells whether a place without a cell also means something in another top: it holds in each, so the point is left alone.
func (g *generator) everywhere(f *figure, b box) bool {
	for top := range g.tops {
		if int32(top) == f.top {
			continue
		}
		hit := false
		g.around(f.layer, int32(top), b, func(i int32) { hit = hit || g.figures[i].box.touches(b) })
		if hit {
			return true
		}
	}
	return false
}

func (g *generator) anchor(i int32) {
	f := &g.figures[i]
	x, y := g.place(f)
	m := g.wanted(f)
	if g.everywhere(f, box{x, y, x, y}) || !g.parity.relate(f.shape, g.ground(), m == 1) {
		return
	}
	g.put("[[anchor]]\nlayer = %q\nmask = %q\nat = %s\nname = \"a%d\"\n\n", g.layers[f.layer].Name, letter(m), g.spot(x, y), g.count)
}

func (g *generator) anchorBox(i int32) {
	f := &g.figures[i]
	x, y := g.place(f)
	by := 2 * g.layers[f.layer].Spacing * int64(1+g.r.IntN(3))
	b := box{x - g.r.Int64N(by+1), y - g.r.Int64N(by+1), x + g.r.Int64N(by+1), y + g.r.Int64N(by+1)}
	if g.everywhere(f, b) {
		return
	}
	m := g.wanted(f)
	mark := g.parity.mark()
	ok := true
	hits := map[int32]bool{}
	g.around(f.layer, f.top, b, func(n int32) {
		if g.figures[n].box.touches(b) {
			hits[g.figures[n].shape] = true
			ok = ok && g.parity.relate(g.figures[n].shape, g.ground(), m == 1)
		}
	})
	if !ok || !g.Wide && len(hits) > 12 {
		g.parity.undo(mark)
		return
	}
	g.put("[[anchor]]\nlayer = %q\nmask = %q\nbox = [%s, %s, %s, %s]\n\n", g.layers[f.layer].Name, letter(m), g.number(b.x1), g.number(b.y1), g.number(b.x2), g.number(b.y2))
}

// cell gives the placements of the structure of a figure or of one above it; nil where they are too many.
func (g *generator) cell(f *figure) []int32 {
	p := g.cells[f.cell]
	if len(p) > g.Placed || strings.Contains(g.lib.Structures[f.cell].Name, "$") || g.variants(f.cell) {
		return nil
	}
	return p
}

// variants tells whether a cell has variants in the stream: what is ordered in it holds in those as well.
func (g *generator) variants(cell int32) bool {
	name := g.lib.Structures[cell].Name + "$"
	for i := range g.lib.Structures {
		if strings.HasPrefix(g.lib.Structures[i].Name, name) {
			return true
		}
	}
	return false
}

// hits relates all shapes at a point of a cell, in all its placements, to what relate says.
func (g *generator) hits(layer int32, places []int32, x, y int64, relate func(place, shape int32) bool) bool {
	ok := true
	for _, p := range places {
		px, py := placePoint(g.placed[p].at, x, y)
		b := box{px, py, px, py}
		g.around(layer, g.placed[p].top, b, func(n int32) {
			if g.figures[n].box.touches(b) {
				ok = ok && relate(p, g.figures[n].shape)
			}
		})
	}
	return ok
}

func (g *generator) anchorCell(i int32) {
	f := &g.figures[i]
	places := g.cell(f)
	if places == nil {
		return
	}
	m := g.wanted(f)
	x, y := g.point(f.number)
	mark := g.parity.mark()
	if !g.hits(f.layer, places, x, y, func(_, shape int32) bool { return g.parity.relate(shape, g.ground(), m == 1) }) {
		g.parity.undo(mark)
		return
	}
	g.put("[[anchor]]\nlayer = %q\nmask = %q\nat = %s\ncell = %q\n\n", g.layers[f.layer].Name, letter(m), g.spot(x, y), g.lib.Structures[f.cell].Name)
}

func (g *generator) wish(i int32) {
	f := &g.figures[i]
	m := g.wanted(f)
	if places := g.cell(f); places != nil && g.r.IntN(3) == 0 {
		x, y := g.point(f.number)
		g.put("[[anchor]]\nlayer = %q\nmask = %q\nat = %s\ncell = %q\nwish = true\n\n", g.layers[f.layer].Name, letter(m), g.spot(x, y), g.lib.Structures[f.cell].Name)
		return
	}
	x, y := g.place(f)
	g.put("[[anchor]]\nlayer = %q\nmask = %q\nat = %s\nwish = true\n\n", g.layers[f.layer].Name, letter(m), g.spot(x, y))
}

// other gives another figure of the same layer and top: one nearby, or any.
func (g *generator) other(f *figure) *figure {
	if g.r.IntN(2) == 0 {
		var near []int32
		g.around(f.layer, f.top, f.box.grown(6*g.layers[f.layer].Spacing), func(n int32) {
			if g.figures[n].shape != f.shape {
				near = append(near, n)
			}
		})
		if len(near) > 0 {
			return &g.figures[near[g.r.IntN(len(near))]]
		}
	}
	for range 8 {
		if o := &g.figures[g.r.IntN(len(g.figures))]; o.layer == f.layer && o.top == f.top {
			return o
		}
	}
	return f
}

func (g *generator) masks(opposite bool) string {
	if opposite {
		return "opposite"
	}
	return "same"
}

func (g *generator) tie(i int32) {
	f := &g.figures[i]
	o := g.other(f)
	x, y := g.place(f)
	p, q := g.place(o)
	opposite := g.wanted(f) != g.wanted(o)
	if g.everywhere(f, box{x, y, x, y}) || !g.parity.relate(f.shape, o.shape, opposite) {
		return
	}
	g.put("[[tie]]\nlayer = %q\nmasks = %q\nat = [%s, %s]\n\n", g.layers[f.layer].Name, g.masks(opposite), g.spot(x, y), g.spot(p, q))
}

func (g *generator) tieCell(i int32) {
	f := &g.figures[i]
	places := g.cell(f)
	if places == nil {
		return
	}
	st := &g.lib.Structures[f.cell]
	n := st.FirstFigure + g.r.Uint32N(st.EndFigure-st.FirstFigure)
	if g.lib.Figures[n].Class != g.lib.Figures[f.number].Class {
		return
	}
	x, y := g.point(f.number)
	p, q := g.point(n)
	opposite := g.r.IntN(2) == 0
	mark := g.parity.mark()
	first := map[int32]int32{}
	if !g.hits(f.layer, places, x, y, func(place, shape int32) bool { first[place] = shape; return true }) ||
		!g.hits(f.layer, places, p, q, func(place, shape int32) bool {
			s, ok := first[place]
			return ok && g.parity.relate(s, shape, opposite)
		}) {
		g.parity.undo(mark)
		return
	}
	g.put("[[tie]]\nlayer = %q\nmasks = %q\nat = [%s, %s]\ncell = %q\n\n", g.layers[f.layer].Name, g.masks(opposite), g.spot(x, y), g.spot(p, q), st.Name)
}

func (g *generator) alike(i int32) {
	f := &g.figures[i]
	places := g.cell(f)
	if places == nil || g.NoAlike {
		return
	}
	first := g.placed[places[0]].under
	if int(first[1]-first[0])*len(places) > 4000 {
		return
	}
	mark := g.parity.mark()
	for _, p := range places[1:] {
		u := g.placed[p].under
		if u[1]-u[0] != first[1]-first[0] {
			g.parity.undo(mark) // an odd placement below
			return
		}
		for k := range u[1] - u[0] {
			if !g.parity.relate(g.figures[first[0]+k].shape, g.figures[u[0]+k].shape, false) {
				g.parity.undo(mark)
				return
			}
		}
	}
	g.put("[[anchor]]\ncell = %q\nalike = true\n\n", g.lib.Structures[f.cell].Name)
}

func (g *generator) waive(i int32) {
	f := &g.figures[i]
	o := g.other(f)
	if g.NoWaiver {
		return
	}
	x, y := g.place(f)
	p, q := g.place(o)
	g.put("[[waiver]]\nlayer = %q\nat = [%s, %s]\nreason = \"seen %d\"\n\n", g.layers[f.layer].Name, g.spot(x, y), g.spot(p, q), g.count)
}
