package layouts

import (
	"math/rand/v2"

	"maskpair/gds"
)

// This file is the sheet that layouts are drawn on: a gds.Writer that counts. Structures are drawn before what places them, so
// that the flat figures of a structure are known when it is placed.

// sheet draws and counts. What a structure holds is multiplied by its placements; what a top holds is the layout's.
type sheet struct {
	w      *gds.Writer
	rng    *rand.Rand
	name   string // of the structure that is open
	open   content
	done   map[string]content
	placed map[string]bool
	drawn  int64 // elements
}

// content is what a structure holds, flat. Shapes and pairs of placed structures add up only where they keep their distance
// from one another, which is for the layout to see to.
type content struct{ figures, shapes, pairs int64 }

func newSheet(w *gds.Writer, rng *rand.Rand) *sheet {
	return &sheet{w: w, rng: rng, done: map[string]content{}, placed: map[string]bool{}}
}

func (s *sheet) begin(name string) {
	s.w.BeginStructure(name)
	s.name, s.open = name, content{}
}

func (s *sheet) end() {
	s.w.EndStructure()
	s.done[s.name] = s.open
}

// counted says how many shapes the open structure holds, and near pairs of them, beyond those of what it places.
func (s *sheet) counted(shapes, pairs int64) {
	s.open.shapes += shapes
	s.open.pairs += pairs
}

// uncounted says that no rule tells the near pairs of the open structure, nor its shapes.
func (s *sheet) uncounted() { s.open.shapes, s.open.pairs = Unknown, Unknown }

func wire() gds.LayerType { return gds.LayerType{Layer: Layer} }

func (s *sheet) rect(x1, y1, x2, y2 int32) {
	s.w.Rectangle(wire(), gds.Rect{X1: x1, Y1: y1, X2: x2, Y2: y2})
	s.figure()
}

func (s *sheet) boundary(points []gds.Point) {
	s.w.Boundary(wire(), points)
	s.figure()
}

func (s *sheet) figure() {
	s.open.figures++
	s.drawn++
}

// place places a structure once.
func (s *sheet) place(name string, t gds.Strans, x, y int32) {
	s.w.SRef(name, t, gds.Point{X: x, Y: y})
	s.holds(name, 1)
}

// array places a structure columns times rows times, by steps along the axes.
func (s *sheet) array(name string, t gds.Strans, columns, rows uint16, x, y, stepX, stepY int32) {
	s.w.ARef(name, t, columns, rows, gds.Point{X: x, Y: y}, gds.Point{X: x + int32(columns)*stepX, Y: y}, gds.Point{X: x, Y: y + int32(rows)*stepY})
	s.holds(name, int64(columns)*int64(rows))
}

func (s *sheet) holds(name string, times int64) {
	c := s.done[name]
	s.open.figures += times * c.figures
	s.counted(times*c.shapes, times*c.pairs)
	s.placed[name] = true
}

// total sums up over the tops.
func (s *sheet) total() Counts {
	c := Counts{Elements: s.drawn}
	for name, content := range s.done {
		if s.placed[name] {
			continue
		}
		c.Tops++
		c.Figures += content.figures
		if content.shapes == Unknown || c.Shapes == Unknown {
			c.Shapes, c.NearPairs = Unknown, Unknown
			continue
		}
		c.Shapes += content.shapes
		c.NearPairs += content.pairs
	}
	return c
}
