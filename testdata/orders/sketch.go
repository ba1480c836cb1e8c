package orders

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"

	"maskpair/gds"
)

// This file makes layouts that are small enough to be decomposed by trying all assignments: rectangles in cells, placed in all eight
// orientations and in arrays, some of them on masks already, with markers and labels.

// Sketch is a small layout.
type Sketch struct{ Cells []SketchCell }

// SketchCell is a structure.
type SketchCell struct {
	Name   string
	Rects  []SketchRect
	Labels []SketchLabel
	Refs   []SketchRef
}

// SketchRect is a rectangle on a layer.
type SketchRect struct {
	On gds.LayerType
	At gds.Rect
}

// SketchLabel is a text.
type SketchLabel struct {
	On   gds.LayerType
	At   gds.Point
	Text string
}

// SketchRef places a cell, once or as an array.
type SketchRef struct {
	To            string
	Strans        gds.Strans
	At, Step      gds.Point
	Columns, Rows int
}

// The layers of sketches: deck layers 1 and 2 draw on 1/0 and 2/0 and have masks on datatypes 1 and 2.
var (
	markerA = gds.LayerType{Layer: 1, Type: 11}
	markerB = gds.LayerType{Layer: 1, Type: 12}
	label   = gds.LayerType{Layer: 1, Type: 10}
)

// SketchSpacing is the spacing of both layers.
const SketchSpacing = 8

// SketchLayers gives the deck layers of sketches.
func SketchLayers() []Layer {
	var out []Layer
	for n := uint16(1); n <= 2; n++ {
		out = append(out, Layer{Name: "m" + strconv.Itoa(int(n)), Drawn: []gds.LayerType{{Layer: n}}, Spacing: SketchSpacing,
			Masks: [2]gds.LayerType{{Layer: n, Type: 1}, {Layer: n, Type: 2}}})
	}
	return out
}

// SketchDeck is the deck of sketches. Some of their outputs are inputs of other runs.
func SketchDeck(redo bool) string {
	text := "unit = \"nm\"\n"
	for i, l := range SketchLayers() {
		text += fmt.Sprintf("[[layer]]\nname = %q\ndrawn = \"%d/0\"\nmask_a = \"%d/1\"\nmask_b = \"%d/2\"\nsame_mask_spacing = %d\n", l.Name, i+1, i+1, i+1, SketchSpacing)
		if i == 0 {
			text += "anchor_a = \"1/11\"\nanchor_b = \"1/12\"\nanchor_label = \"1/10\"\n"
		}
		if redo {
			text += "already_masked = \"redo\"\n"
		}
	}
	return text
}

// RandomSketch makes a layout.
func RandomSketch(r *rand.Rand) *Sketch {
	s := &Sketch{}
	masked, marked := r.IntN(4) == 0, r.IntN(3) == 0
	rect := func(size int32) gds.Rect {
		x, y := r.Int32N(size), r.Int32N(size)
		return gds.Rect{X1: x, Y1: y, X2: x + 2 + r.Int32N(10), Y2: y + 2 + r.Int32N(10)}
	}
	leaves := 1 + r.IntN(2)
	for i := range leaves {
		c := SketchCell{Name: fmt.Sprintf("leaf%d", i)}
		for range 1 + r.IntN(3) {
			on := gds.LayerType{Layer: uint16(1 + boolInt(r.IntN(4) == 0))}
			if masked && r.IntN(6) == 0 {
				on.Type = uint16(1 + r.IntN(2))
			}
			c.Rects = append(c.Rects, SketchRect{on, rect(16)})
		}
		if marked && r.IntN(3) == 0 {
			c.Rects = append(c.Rects, SketchRect{[2]gds.LayerType{markerA, markerB}[r.IntN(2)], rect(16)})
		}
		if marked && r.IntN(3) == 0 {
			c.Labels = append(c.Labels, SketchLabel{label, gds.Point{X: r.Int32N(16), Y: r.Int32N(16)}, []string{"A", "B", "C"}[r.IntN(3)]})
		}
		s.Cells = append(s.Cells, c)
	}
	levels := 1 + r.IntN(2)
	for i := range levels {
		last := i == levels-1
		tops := 1
		if last && r.IntN(4) == 0 {
			tops = 2
		}
		below := len(s.Cells)
		for k := range tops {
			c := SketchCell{Name: fmt.Sprintf("level%d%c", i, 'a'+k)}
			if !last {
				c.Name = fmt.Sprintf("mid%d", i)
			}
			for range r.IntN(3) {
				c.Rects = append(c.Rects, SketchRect{gds.LayerType{Layer: uint16(1 + boolInt(r.IntN(4) == 0))}, rect(40)})
			}
			for range 1 + r.IntN(2) {
				c.Refs = append(c.Refs, s.reference(r, s.Cells[r.IntN(below)].Name))
			}
			s.Cells = append(s.Cells, c)
		}
	}
	return s
}

func (s *Sketch) reference(r *rand.Rand, to string) SketchRef {
	ref := SketchRef{To: to, At: gds.Point{X: r.Int32N(50), Y: r.Int32N(50)}, Columns: 1, Rows: 1}
	ref.Strans.Mirror = r.IntN(2) == 0
	ref.Strans.Angle = float64(90 * r.IntN(4))
	if r.IntN(4) == 0 {
		ref.Columns, ref.Rows = 1+r.IntN(3), 1+r.IntN(2)
		ref.Step = gds.Point{X: 12 + r.Int32N(20), Y: 12 + r.Int32N(20)}
	}
	return ref
}

// Edit gives the layout with some changes.
func (s *Sketch) Edit(r *rand.Rand) *Sketch {
	out := &Sketch{}
	for _, c := range s.Cells {
		c.Rects, c.Refs, c.Labels = slices.Clone(c.Rects), slices.Clone(c.Refs), slices.Clone(c.Labels)
		out.Cells = append(out.Cells, c)
	}
	for range 1 + r.IntN(3) {
		c := &out.Cells[r.IntN(len(out.Cells))]
		switch n := r.IntN(6); {
		case n == 0 && len(c.Rects) > 0: // moved
			i := r.IntN(len(c.Rects))
			dx, dy := r.Int32N(13)-6, r.Int32N(13)-6
			a := &c.Rects[i].At
			a.X1, a.Y1, a.X2, a.Y2 = a.X1+dx, a.Y1+dy, a.X2+dx, a.Y2+dy
		case n == 1 && len(c.Rects) > 1: // deleted
			i := r.IntN(len(c.Rects))
			c.Rects = slices.Delete(c.Rects, i, i+1)
		case n == 2: // added
			x, y := r.Int32N(40), r.Int32N(40)
			c.Rects = slices.Insert(c.Rects, r.IntN(len(c.Rects)+1), SketchRect{gds.LayerType{Layer: 1}, gds.Rect{X1: x, Y1: y, X2: x + 2 + r.Int32N(10), Y2: y + 2 + r.Int32N(10)}})
		case n == 3 && len(c.Rects) > 0: // stretched
			a := &c.Rects[r.IntN(len(c.Rects))].At
			a.X2 += 1 + r.Int32N(8)
		case n == 4 && len(c.Refs) > 0: // moved
			f := &c.Refs[r.IntN(len(c.Refs))]
			f.At.X += r.Int32N(9) - 4
		case n == 5: // renamed, everywhere
			out.rename(c.Name, c.Name+"x")
		}
	}
	if r.IntN(4) == 0 {
		out.flatten(r)
	}
	return out
}

func (s *Sketch) rename(from, to string) {
	placed := false
	for i := range s.Cells {
		for k := range s.Cells[i].Refs {
			if s.Cells[i].Refs[k].To == from {
				placed = true
				s.Cells[i].Refs[k].To = to
			}
		}
	}
	if !placed {
		return // tops keep their names: that is how they are found
	}
	for i := range s.Cells {
		if s.Cells[i].Name == from {
			s.Cells[i].Name = to
		}
	}
}

// flatten puts the content of one placed cell in the place of a reference.
func (s *Sketch) flatten(r *rand.Rand) {
	c := &s.Cells[len(s.Cells)-1]
	if len(c.Refs) == 0 {
		return
	}
	i := r.IntN(len(c.Refs))
	ref := c.Refs[i]
	var to *SketchCell
	for k := range s.Cells {
		if s.Cells[k].Name == ref.To {
			to = &s.Cells[k]
		}
	}
	if len(to.Refs) > 0 || ref.Columns*ref.Rows > 1 || len(to.Labels) > 0 {
		return
	}
	turn := gds.Orientation(int(ref.Strans.Angle) / 90)
	if ref.Strans.Mirror {
		turn |= gds.Mirrored
	}
	at := gds.NewTransform(turn, int64(ref.At.X), int64(ref.At.Y))
	for _, q := range to.Rects {
		b := placeBox(at, box{2 * int64(q.At.X1), 2 * int64(q.At.Y1), 2 * int64(q.At.X2), 2 * int64(q.At.Y2)})
		q.At = gds.Rect{X1: int32(b.x1 / 2), Y1: int32(b.y1 / 2), X2: int32(b.x2 / 2), Y2: int32(b.y2 / 2)}
		c.Rects = append(c.Rects, q)
	}
	c.Refs = slices.Delete(c.Refs, i, i+1)
}

// Bytes gives the layout as a stream.
func (s *Sketch) Bytes() []byte {
	var out bytes.Buffer
	w := gds.NewWriter(&out, gds.WriterOptions{LibName: "SKETCH", DBU: 1e-9})
	for _, c := range s.Cells {
		w.BeginStructure(c.Name)
		for _, q := range c.Rects {
			a := q.At
			w.Boundary(q.On, []gds.Point{{X: a.X1, Y: a.Y1}, {X: a.X2, Y: a.Y1}, {X: a.X2, Y: a.Y2}, {X: a.X1, Y: a.Y2}})
		}
		for _, l := range c.Labels {
			w.Text(l.On, l.At, l.Text)
		}
		for _, f := range c.Refs {
			if f.Columns*f.Rows == 1 {
				w.SRef(f.To, f.Strans, f.At)
				continue
			}
			w.ARef(f.To, f.Strans, uint16(f.Columns), uint16(f.Rows), f.At,
				gds.Point{X: f.At.X + int32(f.Columns)*f.Step.X, Y: f.At.Y}, gds.Point{X: f.At.X, Y: f.At.Y + int32(f.Rows)*f.Step.Y})
		}
		w.EndStructure()
	}
	if err := w.Close(); err != nil {
		panic(err)
	}
	return out.Bytes()
}

// String gives the layout in a form to be read in a failure.
func (s *Sketch) String() string {
	var b strings.Builder
	for _, c := range s.Cells {
		fmt.Fprintf(&b, "%s:\n", c.Name)
		for _, q := range c.Rects {
			fmt.Fprintf(&b, "  %d/%d %v\n", q.On.Layer, q.On.Type, q.At)
		}
		for _, l := range c.Labels {
			fmt.Fprintf(&b, "  label %v %q\n", l.At, l.Text)
		}
		for _, f := range c.Refs {
			fmt.Fprintf(&b, "  %+v\n", f)
		}
	}
	return b.String()
}

func boolInt(b bool) int {
	if b {
		return 1
	}
	return 0
}
