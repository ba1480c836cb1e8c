package twin

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"maskpair/gds"
)

// This file makes layouts at random. A layout first draws what it is made of (rectangles alone or paths and slants, flat or
// in levels, in the middle or at the edge of the plane, ...), so that each kind of trouble also comes up undiluted. Sizes go
// by the spacing: figures fill their field so densely that odd cycles, touching corners and gaps of exactly the spacing are
// common.

// Taste says what a layout is made of; chances are in percent.
type Taste struct {
	Layers     int   // of the deck
	Spacing    int64 // of the first of them, database units
	Grid       int32 // all coordinates are multiples of it, but for those that spoil it on purpose
	Field      int32 // figures of a cell begin in a square of this side
	Leaves     int   // cells without references
	Levels     int   // of cells above them
	Figures    int   // of a cell, at most
	Flat       int   // drawn figures of a layer under all tops, at most
	Polygon    int   // chance of a Manhattan polygon
	Slant      int   // of a polygon at any angle
	Path       int   // of a path
	SlantPath  int   // of a path to be slanted
	Faint      int   // of a figure that covers nothing, or has parts that do not
	Masked     int   // of a figure to arrive on a mask
	Other      int   // of an element that is no figure of the deck
	Copies     int   // of a figure to be there twice
	Array      int   // of a reference to be an array
	Odd        int   // of a reference to be magnified or turned by no multiple of 90 degrees
	Far        int   // of a top to lie at the edge of the plane
	Long       int   // of a top to have figures as long as the plane
	Outside    int   // of a top at the edge to reach beyond it
	Missing    int   // of a reference to name no structure
	Properties int   // of an element to have properties
}

// RandomTaste draws what a layout is made of.
func RandomTaste(r *rand.Rand) Taste {
	sometimes := func(chance, amount int) int {
		if r.IntN(100) < chance {
			return 1 + r.IntN(amount)
		}
		return 0
	}
	t := Taste{
		Layers:     1 + sometimes(25, 2),
		Spacing:    2 + r.Int64N(11),
		Grid:       1,
		Leaves:     1 + r.IntN(3),
		Levels:     r.IntN(4),
		Figures:    1 + r.IntN(8),
		Flat:       12 + r.IntN(50),
		Polygon:    sometimes(50, 40),
		Slant:      sometimes(35, 60),
		Path:       sometimes(45, 70),
		SlantPath:  sometimes(50, 60),
		Faint:      sometimes(20, 25),
		Masked:     sometimes(25, 20),
		Other:      sometimes(30, 30),
		Copies:     sometimes(25, 25),
		Array:      sometimes(60, 60),
		Odd:        sometimes(12, 50),
		Far:        sometimes(25, 100),
		Long:       sometimes(10, 100),
		Outside:    sometimes(15, 100),
		Missing:    sometimes(5, 30),
		Properties: sometimes(15, 30),
	}
	if r.IntN(3) == 0 {
		t.Grid = 2 + r.Int32N(4)
	}
	t.Field = int32(t.Spacing) * (1 + r.Int32N(6))
	return t
}

// Random makes a layout and a deck for it.
func Random(r *rand.Rand) (*Layout, *Deck) { return RandomTaste(r).Layout(r) }

// Layout makes a layout to the taste, and a deck for it.
func (t Taste) Layout(r *rand.Rand) (*Layout, *Deck) {
	m := maker{Taste: t, r: r, layout: &Layout{}}
	m.layout.DBU = []float64{1e-9, 1e-9, 5e-10, 2.5e-10}[r.IntN(4)]
	m.makeDeck()
	m.makeCells()
	r.Shuffle(len(m.layout.Cells), func(i, j int) {
		c := m.layout.Cells
		c[i], c[j] = c[j], c[i]
	})
	return m.layout, &m.deck
}

type maker struct {
	Taste
	r      *rand.Rand
	layout *Layout
	deck   Deck
	flat   map[string]int // figures of the deck under a cell
}

func (m *maker) chance(percent int) bool { return m.r.IntN(100) < percent }

func (m *maker) makeDeck() {
	number := uint16(1 + m.r.IntN(5))
	next := func() gds.LayerType {
		number += uint16(1 + m.r.IntN(3))
		k := gds.LayerType{Layer: number, Type: uint16(m.r.IntN(3))}
		if m.chance(5) {
			k.Layer, k.Type = 65535-k.Layer, 65535-k.Type
		}
		return k
	}
	for i := range m.Layers {
		l := Layer{Name: fmt.Sprintf("layer%d", i+1), Drawn: []gds.LayerType{next()}, Masks: [2]gds.LayerType{next(), next()}, Spacing: m.Spacing}
		if i > 0 {
			l.Spacing = 1 + m.r.Int64N(2*m.Spacing)
		}
		if m.chance(20) {
			l.Drawn = append(l.Drawn, next())
		}
		if m.chance(30) {
			l.AnyMask = 1 + m.r.Int64N(l.Spacing)
		}
		l.Redo, l.KeepDrawn = m.chance(15), m.chance(10)
		m.deck.Layers = append(m.deck.Layers, l)
	}
	if m.chance(20) {
		m.deck.Marks = []gds.LayerType{next(), next(), next()}
	}
}

// makeCells makes cells from the leaves upwards; a cell places cells of any level below its own.
func (m *maker) makeCells() {
	m.flat = map[string]int{}
	budget := m.Flat * m.Layers
	var below []string
	for level := range m.Levels + 1 {
		var names []string
		for i := range max(1, m.Leaves-level+m.r.IntN(2)) {
			c := Cell{Name: fmt.Sprintf("%c%d", 'a'+level, i)}
			if i > 0 && m.chance(15) {
				c.Name = fmt.Sprintf("%s$%d", m.layout.Cells[m.r.IntN(len(m.layout.Cells))].Name, 2+m.r.IntN(2))
				if m.layout.cell(c.Name) != nil {
					continue
				}
			}
			count := m.makeFigures(&c, level)
			for range min(level, 1) * (1 + m.r.IntN(4)) {
				count += m.makeReference(&c, below, budget-count)
			}
			m.r.Shuffle(len(c.Elements), func(i, j int) { c.Elements[i], c.Elements[j] = c.Elements[j], c.Elements[i] })
			m.flat[c.Name] = count
			m.layout.Cells = append(m.layout.Cells, c)
			names = append(names, c.Name)
		}
		below = append(below, names...)
	}
	m.unite()
	for _, top := range m.layout.Tops() {
		if m.chance(m.Long) {
			c := m.layout.cell(top)
			for range 1 + m.r.IntN(3) {
				c.Elements = append(c.Elements, m.long())
			}
		} else if m.chance(m.Far) {
			m.shift(top)
		}
	}
}

// unite places most tops in one more cell, since what is placed nowhere stands alone.
func (m *maker) unite() {
	tops := m.layout.Tops()
	if len(tops) < 2 {
		return
	}
	c := Cell{Name: "top"}
	sum := 0
	for _, name := range tops {
		if m.chance(70) && sum+m.flat[name] <= m.Flat*m.Layers {
			sum += m.flat[name]
			c.Elements = append(c.Elements, m.reference(name))
		}
	}
	if len(c.Elements) > 0 {
		m.layout.Cells = append(m.layout.Cells, c)
	}
}

// makeFigures adds figures to a cell and gives how many are of the deck.
func (m *maker) makeFigures(c *Cell, level int) int {
	count := 0
	n := m.r.IntN(m.Figures + 1)
	if level == 0 {
		n++
	}
	for range n {
		e := m.figure()
		c.Elements = append(c.Elements, e)
		count++
		if m.chance(m.Copies) {
			c.Elements = append(c.Elements, e)
			count++
		}
		if m.chance(m.Other) {
			c.Elements = append(c.Elements, m.other())
		}
	}
	return count
}

// layer draws a layer of figures.
func (m *maker) layer() gds.LayerType {
	l := &m.deck.Layers[m.r.IntN(len(m.deck.Layers))]
	if m.chance(m.Masked) {
		return l.Masks[m.r.IntN(2)]
	}
	return l.Drawn[m.r.IntN(len(l.Drawn))]
}

func (m *maker) properties() []Property {
	if !m.chance(m.Properties) {
		return nil
	}
	return []Property{{int16(1 + m.r.IntN(100)), fmt.Sprint("net", m.r.IntN(3))}}
}

// on is a multiple of the grid from 0 to n.
func (m *maker) on(n int32) int32 { return m.r.Int32N(n/m.Grid+1) * m.Grid }

// size is the side of a figure.
func (m *maker) size() int32 { return max(m.Grid, m.on(2*int32(m.Spacing))) }

func (m *maker) spot() gds.Point { return gds.Point{X: m.on(m.Field), Y: m.on(m.Field)} }

// near is a point not far from p.
func (m *maker) near(p gds.Point) gds.Point {
	s := int32(m.Spacing)
	return gds.Point{X: p.X + m.on(4*s) - 2*s/m.Grid*m.Grid, Y: p.Y + m.on(4*s) - 2*s/m.Grid*m.Grid}
}

func (m *maker) figure() Element {
	e := Element{Kind: Boundary, Layer: m.layer(), Properties: m.properties()}
	p := m.spot()
	switch {
	case m.chance(m.Path):
		m.path(&e, p)
	case m.chance(m.Slant):
		e.Points = []gds.Point{p}
		for range 2 + m.r.IntN(1+m.r.IntN(5)) {
			e.Points = append(e.Points, m.near(p))
		}
	case m.chance(m.Polygon):
		e.Points = m.polygon(p)
	default:
		w, h := m.size(), m.size()
		e.Points = []gds.Point{p, {X: p.X + w, Y: p.Y}, {X: p.X + w, Y: p.Y + h}, {X: p.X, Y: p.Y + h}}
		if m.chance(20) { // another corner first, and clockwise
			slices.Reverse(e.Points)
			k := m.r.IntN(4)
			e.Points = append(e.Points[k:], e.Points[:k]...)
		}
	}
	if m.chance(m.Faint) {
		m.faint(&e)
	}
	return e
}

// polygon is an outline of level and upright edges; it may cross itself. Some are frames: an outer and an inner square joined
// by a line drawn there and back.
func (m *maker) polygon(p gds.Point) []gds.Point {
	if m.chance(20) {
		w, h := m.size(), m.size()
		q := gds.Point{X: p.X + w, Y: p.Y + h}
		s := gds.Point{X: q.X + m.size(), Y: q.Y + m.size()}
		e := gds.Point{X: s.X + m.size(), Y: s.Y + m.size()}
		return []gds.Point{p, {X: e.X, Y: p.Y}, e, {X: p.X, Y: e.Y}, p, q, {X: q.X, Y: s.Y}, s, {X: s.X, Y: q.Y}, q}
	}
	corners := 2 + m.r.IntN(4)
	var out []gds.Point
	q := p
	for range corners {
		out = append(out, q)
		n := m.near(p)
		out = append(out, gds.Point{X: n.X, Y: q.Y})
		q = n
	}
	last := out[len(out)-1]
	return append(out, gds.Point{X: last.X, Y: q.Y}, gds.Point{X: p.X, Y: q.Y})
}

// path makes a path of e.
func (m *maker) path(e *Element, p gds.Point) {
	e.Kind = Path
	e.Style = gds.PathStyle{Width: m.size(), Type: []int16{0, 0, 2, 2, 4, 1}[m.r.IntN(6)]}
	if m.chance(60) {
		e.Style.Width &^= 1
	}
	if m.chance(5) {
		e.Style.Width = -e.Style.Width
	}
	if e.Style.Type == 1 && !m.chance(m.SlantPath) {
		e.Style.Type = 2 // a round end is slanted too
	}
	if e.Style.Type == 4 {
		e.Style.Begin, e.Style.Finish = m.r.Int32N(int32(m.Spacing)+1), m.r.Int32N(int32(m.Spacing)+1)
		if m.chance(20) {
			e.Style.Begin = -e.Style.Begin / 2
		}
	}
	slanted := m.chance(m.SlantPath)
	e.Points = []gds.Point{p}
	for range m.r.IntN(5) {
		q := m.near(p)
		if !slanted {
			if m.chance(50) {
				q.X = p.X
			} else {
				q.Y = p.Y
			}
		}
		e.Points = append(e.Points, q)
		p = q
	}
	if len(e.Points) == 1 && (e.Style.Type == 1 || e.Style.Type == 4) {
		e.Style = gds.PathStyle{Width: e.Style.Width, Type: 2}
	}
}

// faint makes a figure cover nothing, or gives it a part that does not.
func (m *maker) faint(e *Element) {
	p := e.Points
	if e.Kind == Path {
		e.Style.Width = 0
		return
	}
	switch m.r.IntN(5) {
	case 0: // a line
		for i := range p {
			p[i].X = p[0].X
		}
	case 1: // twice around covers nothing by the even-odd rule
		e.Points = append(append(slices.Clone(p), p[0]), p...)
	case 2: // a spike
		i := m.r.IntN(len(p))
		e.Points = slices.Insert(slices.Clone(p), i, p[i], m.near(p[i]))
	case 3: // a point again
		i := m.r.IntN(len(p))
		e.Points = slices.Insert(slices.Clone(p), i, p[i])
	case 4: // a corner in the middle of an edge
		if q := p[1]; (p[0].X+q.X)%2 == 0 && (p[0].Y+q.Y)%2 == 0 {
			e.Points = slices.Insert(slices.Clone(p), 1, gds.Point{X: (p[0].X + q.X) / 2, Y: (p[0].Y + q.Y) / 2})
		}
	}
}

// other is an element that is no figure of the deck.
func (m *maker) other() Element {
	e := Element{Kind: []Kind{Boundary, Path, Box, Node, Text}[m.r.IntN(5)], Layer: m.layer(), Properties: m.properties()}
	p := m.spot()
	q := gds.Point{X: p.X + m.size(), Y: p.Y + m.size()}
	e.Points = []gds.Point{p, q}
	switch e.Kind {
	case Boundary:
		e.Layer = gds.LayerType{Layer: 1000, Type: uint16(m.r.IntN(2))}
		e.Points = append(e.Points, m.near(p))
	case Path:
		e.Layer = gds.LayerType{Layer: 1000, Type: uint16(m.r.IntN(2))}
		e.Style.Width = m.size()
	case Text:
		e.Points, e.Text = e.Points[:1], "label"
	}
	return e
}

// makeReference adds a reference to one of the cells below and gives how many figures of the deck it places.
func (m *maker) makeReference(c *Cell, below []string, budget int) int {
	if m.chance(m.Missing) {
		c.Elements = append(c.Elements, m.reference("nowhere"))
		return 0
	}
	name := below[m.r.IntN(len(below))]
	e := m.reference(name)
	count := m.flat[name] * e.Columns * e.Rows
	if count > budget {
		return 0
	}
	c.Elements = append(c.Elements, e)
	return count
}

// reference places a cell in the field of its parent.
func (m *maker) reference(name string) Element {
	e := Element{Kind: Reference, Text: name, Columns: 1, Rows: 1, Properties: m.properties()}
	e.Strans = gds.Strans{Mirror: m.chance(40), Angle: float64(90 * m.r.IntN(4))}
	reach := m.Field + 3*int32(m.Spacing)
	p := gds.Point{X: m.on(2*reach) - reach/m.Grid*m.Grid, Y: m.on(2*reach) - reach/m.Grid*m.Grid}
	e.Points = []gds.Point{p}
	if m.chance(m.Array) {
		e.Kind = Array
		e.Columns, e.Rows = 1+m.r.IntN(4), 1+m.r.IntN(3)
		step := func() gds.Point {
			v := max(m.Grid, m.on(m.Field+2*int32(m.Spacing)))
			if m.chance(10) {
				v = -v
			}
			switch {
			case m.chance(8):
				return gds.Point{X: v, Y: m.on(m.Field)}
			case m.chance(50):
				return gds.Point{X: v}
			}
			return gds.Point{Y: v}
		}
		u, v := step(), step()
		columns, rows := int32(e.Columns), int32(e.Rows)
		e.Points = append(e.Points, gds.Point{X: p.X + columns*u.X, Y: p.Y + columns*u.Y}, gds.Point{X: p.X + rows*v.X, Y: p.Y + rows*v.Y})
	}
	if m.chance(m.Odd) {
		e.Strans.Magnification = []float64{0, 2, 3, 0.5, 1.5}[m.r.IntN(5)]
		if m.chance(50) {
			e.Strans.Angle = []float64{45, 30, 225, 37.5, 1, 359}[m.r.IntN(6)]
		}
		e.Strans.AbsoluteMagnification, e.Strans.AbsoluteAngle = m.chance(10), m.chance(10)
	}
	if m.chance(m.Odd / 2) {
		e.Strans.AbsoluteMagnification, e.Strans.AbsoluteAngle = m.chance(50), m.chance(80)
	}
	return e
}

// long is a figure as long as the plane.
func (m *maker) long() Element {
	e := Element{Kind: Boundary, Layer: m.layer()}
	y := m.on(2*m.Field) - m.Field/m.Grid*m.Grid
	w := m.size()
	low, high := int32(math.MinInt32)+m.r.Int32N(3), int32(math.MaxInt32)-m.r.Int32N(3)
	switch m.r.IntN(3) {
	case 0:
		e.Points = []gds.Point{{X: low, Y: y}, {X: high, Y: y}, {X: high, Y: y + w}, {X: low, Y: y + w}}
	case 1:
		e.Points = []gds.Point{{X: y, Y: low}, {X: y + w, Y: low}, {X: y + w, Y: high}, {X: y, Y: high}}
	default:
		if m.Slant == 0 {
			e.Points = []gds.Point{{X: low, Y: y}, {X: high, Y: y}, {X: high, Y: y + w}, {X: low, Y: y + w}}
			break
		}
		e.Points = []gds.Point{{X: low, Y: low + m.r.Int32N(9)}, {X: high - m.r.Int32N(9), Y: high}, {X: y, Y: y + w}}
	}
	return e
}

// shift moves what a top holds to the edge of the plane, as far as it goes; some tops go a little farther.
func (m *maker) shift(top string) {
	c := m.layout.cell(top)
	whole := &Layout{Cells: slices.Clone(m.layout.Cells)}
	var xs, ys []float64
	_, err := whole.Flatten(MostFlat, func(f Flat) {
		for _, p := range f.Points {
			if x, y := f.at.apply(p); f.Top == top {
				side := math.Abs(float64(f.Style.Width))*f.at.scale*1.5 + 4*float64(m.Spacing) // what a path reaches beyond its points
				if f.Kind != Path {
					side = 0
				}
				xs, ys = append(xs, x-side, x+side), append(ys, y-side, y+side)
			}
		}
	})
	if err != nil || len(xs) == 0 {
		return
	}
	side := func(v []float64) int64 {
		if m.chance(30) {
			return 0
		}
		beyond := int64(0)
		if m.chance(m.Outside) {
			beyond = 1 + m.r.Int64N(3)
		}
		if m.chance(50) {
			return math.MinInt32 - int64(math.Floor(slices.Min(v))) - beyond
		}
		return math.MaxInt32 - int64(math.Ceil(slices.Max(v))) + beyond
	}
	dx, dy := side(xs), side(ys)
	var moved []Element
	for _, e := range c.Elements {
		e.Points = slices.Clone(e.Points)
		for i, p := range e.Points {
			x, y := int64(p.X)+dx, int64(p.Y)+dy
			if x != int64(int32(x)) || y != int64(int32(y)) {
				return // an end of an array, for one; then the top stays where it is
			}
			e.Points[i] = gds.Point{X: int32(x), Y: int32(y)}
		}
		moved = append(moved, e)
	}
	c.Elements = moved
}
