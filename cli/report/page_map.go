package report

import (
	"fmt"
	"html"
	"html/template"
	"math"
	"strings"

	"maskpair/decompose"
)

// This file draws the maps: small drawings of the chip side by side, each for one question. How much is drawn in a tile is told by
// the size of a mark, never by its colour alone, so that a map prints in black and white.

// mapView is the maps of one layer in one top.
type mapView struct {
	Layer, Top string
	Extent     string
	Panels     []mapPanel
}

// mapPanel is one map.
type mapPanel struct {
	Title, Note string
	SVG         template.HTML
}

const (
	mapSide = 232 // pixels of the longer side, about
	levels  = 8   // sizes of a mark
	// fewRings is how many rings a map may have before they shrink to their tiles, mostRings before they become plain marks.
	fewRings  = 40
	mostRings = 240
)

// maps draws the maps of all layers, as many as the page holds.
func (m *pageMaker) maps() {
	for i := range m.r.Result.Layers {
		l := &m.r.Result.Layers[i]
		if l.Drawing == nil {
			continue
		}
		for k := range l.Drawing.Maps {
			if len(m.p.Maps) == mapsShown {
				return
			}
			v := m.mapOf(i, l, &l.Drawing.Maps[k])
			if len(m.p.Maps) > 0 {
				v.leaveOut(&m.p.Maps[0])
			}
			m.p.Maps = append(m.p.Maps, v)
		}
	}
}

// leaveOut drops the notes that stand below the first maps already.
func (v *mapView) leaveOut(first *mapView) {
	for i := range v.Panels {
		p := &v.Panels[i]
		for k := range first.Panels {
			if q := &first.Panels[k]; q.Title == p.Title && q.Note == p.Note {
				p.Note = ""
			}
		}
	}
}

func (m *pageMaker) mapOf(layer int, l *decompose.LayerResult, t *decompose.TileMap) mapView {
	v := mapView{Layer: Text(l.Name), Top: Text(t.Top),
		Extent: m.inUnit(fmt.Sprintf("(%s) to (%s)", m.at(decompose.Spot{X: t.Box.X1, Y: t.Box.Y1}), m.at(decompose.Spot{X: t.Box.X2, Y: t.Box.Y2})))}
	g := grid{t: t, tile: max(3, mapSide/max(t.NX, t.NY))}
	v.Panels = append(v.Panels, m.unresolvedMap(g, l), g.density(), g.balance())
	if l.MovedShapes > 0 {
		v.Panels = append(v.Panels, g.moved())
	}
	return v
}

// grid draws tiles.
type grid struct {
	t    *decompose.TileMap
	tile int // pixels
}

// svg wraps a drawing of the whole map.
func (g grid) svg(title, body string) template.HTML {
	w, h := g.t.NX*g.tile, g.t.NY*g.tile
	return template.HTML(fmt.Sprintf(`<svg class="map" viewBox="-2 -2 %d %d" width="%d" height="%d" role="img" aria-label="%s"><rect class="chip" x="-1" y="-1" width="%d" height="%d"/>%s</svg>`,
		w+4, h+4, w+4, h+4, html.EscapeString(title), w+2, h+2, body))
}

// centre gives the middle of a tile in half pixels; rows run up.
func (g grid) centre(x, y int) (int, int) { return (2*x + 1) * g.tile, (2*(g.t.NY-1-y) + 1) * g.tile }

// half words half pixels.
func half(n int) string {
	if n&1 == 0 {
		return fmt.Sprint(n / 2)
	}
	return fmt.Sprintf("%d.5", n/2)
}

// marks draws a mark in each tile whose level is above 0, larger with the level. A mark is a line of no length with square or round
// ends, which takes a few bytes.
func (g grid) marks(class string, level func(t *decompose.Tile) int) string {
	var paths [levels + 1]strings.Builder
	for y := range g.t.NY {
		for x := range g.t.NX {
			if n := level(&g.t.Tiles[y*g.t.NX+x]); n > 0 {
				cx, cy := g.centre(x, y)
				paths[n].WriteString("M" + half(cx) + " " + half(cy) + "h0")
			}
		}
	}
	var b strings.Builder
	for n := range paths {
		if paths[n].Len() > 0 {
			fmt.Fprintf(&b, `<path class="%s" stroke-width="%s" d="%s"/>`, class, px(float64(g.tile)*float64(n)/levels), paths[n].String())
		}
	}
	return b.String()
}

// levelOf gives the level of a share of the most.
func levelOf(share float64) int {
	if !(share > 0) {
		return 0
	}
	return max(1, min(levels, int(math.Round(share*levels))))
}

// density shows how much of each tile is covered.
func (g grid) density() mapPanel {
	cover := func(t *decompose.Tile) float64 { return t.A + t.B }
	most := 0.0
	for i := range g.t.Tiles {
		most = math.Max(most, cover(&g.t.Tiles[i]))
	}
	b := g.t.Bounds(0, 0)
	tile := float64(b.X2-b.X1) * float64(b.Y2-b.Y1) / 4 // square database units
	note := "Nothing is drawn here."
	if most > 0 && tile > 0 {
		note = fmt.Sprintf("A full square is a tile covered to %.0f"+noBreak+"%%, the densest.", math.Min(100, 100*most/tile))
	}
	return mapPanel{"How dense", note, g.svg("Map of density", g.marks("dense", func(t *decompose.Tile) int { return levelOf(cover(t) / most) }))}
}

// balance shows which mask has more of each tile.
func (g grid) balance() mapPanel {
	over := func(t *decompose.Tile) float64 {
		if t.A+t.B <= 0 {
			return 0
		}
		return (t.A - t.B) / (t.A + t.B)
	}
	// Below a sixteenth masks count as balanced.
	onA := g.marks("more-a", func(t *decompose.Tile) int { return int(math.Round(over(t) * levels)) })
	onB := g.marks("more-b", func(t *decompose.Tile) int { return int(math.Round(-over(t) * levels)) })
	return mapPanel{"How the masks balance", "Squares: more on A. Discs: more on B. Full size: all of the tile is on one mask. Nothing: balanced, or empty.",
		g.svg("Map of the balance of the masks", onA+onB)}
}

// count gives the sum of something over all tiles, the most of it in one (at least 1), and how many tiles have some.
func (g grid) count(of func(t *decompose.Tile) int) (total, most, some int) {
	most = 1
	for i := range g.t.Tiles {
		n := of(&g.t.Tiles[i])
		total += n
		most = max(most, n)
		some += min(n, 1)
	}
	return total, most, some
}

// moved shows where shapes moved against the baseline.
func (g grid) moved() mapPanel {
	var b strings.Builder
	total, most, some := g.count(func(t *decompose.Tile) int { return t.Moved })
	if some > mostRings {
		return mapPanel{"Where shapes moved", "A square where shapes changed masks against the baseline; larger for more.", g.svg("Map of moved shapes",
			g.marks("moved", func(t *decompose.Tile) int { return levelOf(math.Sqrt(float64(t.Moved) / float64(most))) }))}
	}
	for y := range g.t.NY {
		for x := range g.t.NX {
			n := g.t.Tiles[y*g.t.NX+x].Moved
			if n == 0 {
				continue
			}
			cx, cy := g.centre(x, y)
			r := 4 + 5*math.Sqrt(float64(n)/float64(most))
			fmt.Fprintf(&b, `<path class="triangle" d="M%s %sl%s %sh-%sz"><title>%s</title></path>`, px(float64(cx)/2), px(float64(cy)/2-r), px(r), px(2*r), px(2*r), count(n, "moved shape"))
		}
	}
	note := "No listed shape changed masks."
	if total > 0 {
		note = "A triangle where shapes changed masks against the baseline; larger for more."
	}
	return mapPanel{"Where shapes moved", note, g.svg("Map of moved shapes", b.String())}
}

// unresolvedMap shows where pairs are unresolved; a mark leads to the card of what is worst there.
func (m *pageMaker) unresolvedMap(g grid, l *decompose.LayerResult) mapPanel {
	cardAt := map[*decompose.Tile]*card{}
	for _, c := range m.p.Cards {
		if c.layer != l {
			continue
		}
		for _, i := range c.members {
			u := &l.Unresolved[i]
			if u.Top != g.t.Top {
				continue
			}
			if t := g.t.At(placeOf(u)); cardAt[t] == nil {
				cardAt[t] = c
			}
		}
	}
	var b strings.Builder
	total, most, some := g.count(func(t *decompose.Tile) int { return t.Unresolved })
	if some > mostRings {
		return mapPanel{"Where to mend", "A mark where pairs are unresolved; larger for more.", g.svg("Map of unresolved pairs",
			g.marks("unresolved", func(t *decompose.Tile) int { return levelOf(math.Sqrt(float64(t.Unresolved) / float64(most))) }))}
	}
	// A few rings may be larger than their tiles; many would hide each other.
	least, room := 3.0, 6.0
	if some > fewRings {
		least, room = float64(g.tile)*0.12, float64(g.tile)*0.3
	}
	for y := range g.t.NY {
		for x := range g.t.NX {
			t := &g.t.Tiles[y*g.t.NX+x]
			if t.Unresolved == 0 {
				continue
			}
			cx, cy := g.centre(x, y)
			r := least + room*math.Sqrt(float64(t.Unresolved)/float64(most))
			ring := fmt.Sprintf(`<circle class="unresolved" cx="%s" cy="%s" r="%s"><title>%s</title></circle>`, half(cx), half(cy), px(r), count(t.Unresolved, "pair"))
			if c := cardAt[t]; c != nil {
				ring = fmt.Sprintf(`<a href="#%s" tabindex="-1">%s</a>`, c.ID, ring)
			}
			b.WriteString(ring)
		}
	}
	note := "Nothing is unresolved here."
	if total > 0 {
		note = "A ring where pairs are unresolved; larger for more. A ring leads to its card."
	}
	return mapPanel{"Where to mend", note, g.svg("Map of unresolved pairs", b.String())}
}

// locatorSide is the longer side of a locator, in pixels.
const (
	locatorSide = 132.0
	locatorMost = 400 // places shown
)

// locator draws where on the chip the members of a group are.
func locator(l *decompose.LayerResult, members []int, top string) template.HTML {
	var t *decompose.TileMap
	for i := range l.Drawing.Maps {
		if l.Drawing.Maps[i].Top == top {
			t = &l.Drawing.Maps[i]
		}
	}
	if t == nil {
		return ""
	}
	w, h := float64(t.Box.X2-t.Box.X1), float64(t.Box.Y2-t.Box.Y1)
	if w <= 0 || h <= 0 {
		return ""
	}
	k := math.Min(locatorSide/w, locatorSide/h)
	var path strings.Builder
	shown := 0
	for _, i := range members {
		u := &l.Unresolved[i]
		if u.Top != top || shown == locatorMost {
			continue
		}
		at := placeOf(u)
		path.WriteString("M" + px(float64(at.X-t.Box.X1)*k) + " " + px(float64(t.Box.Y2-at.Y)*k) + "h0")
		shown++
	}
	return template.HTML(fmt.Sprintf(`<svg class="locator" viewBox="-6 -6 %s %s" width="%s" height="%s" role="img" aria-label="Where on the chip"><rect class="chip" width="%s" height="%s"/><path class="spot" d="%s"/></svg>`,
		px(w*k+12), px(h*k+12), px(w*k+12), px(h*k+12), px(math.Max(1, w*k)), px(math.Max(1, h*k)), path.String()))
}

// balanceBar draws how two areas share a bar.
func balanceBar(a, b float64) template.HTML {
	if a+b <= 0 {
		return ""
	}
	const width = 120.0
	at := width * a / (a + b)
	return template.HTML(fmt.Sprintf(`<svg class="balance" viewBox="0 0 120 14" width="120" height="14" role="img" aria-label="%s"><rect class="a" width="%s" height="14"/><rect class="b" x="%s" width="%s" height="14"/><path class="half" d="M60 0V14"/></svg>`,
		shareOf(a, b), px(at), px(at), px(width-at)))
}
