// Command rules draws the pictures that explain spacing by what faces what. Each panel has two shapes; which edges face each other, how far
// they are apart and by which rule is asked of the program's own rules, so that a picture cannot say anything else. Run it from the
// top folder of the project after a change of the rules or of the pictures, and look at what changed:
//
//	go run ./examples/rules
package main

import (
	"bytes"
	"fmt"
	"html"
	"os"
	"path/filepath"

	"maskpair/decompose/facing"
	"maskpair/decompose/geom"
)

func main() {
	pictures, err := draw()
	for name, text := range pictures {
		if err == nil {
			err = os.WriteFile(filepath.Join("examples", "rules", name), text, 0o666)
		}
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "rules:", err)
		os.Exit(1)
	}
}

// figure is a closed outline as drawn.
type figure []geom.Point

func box(x1, y1, x2, y2 int64) figure {
	return figure{{X: x1, Y: y1}, {X: x2, Y: y1}, {X: x2, Y: y2}, {X: x1, Y: y2}}
}

// panel is one drawing: two shapes in a field of 160 by 120, y upwards, and the rule that is shown.
type panel struct {
	title  string
	a, b   []figure
	rule   facing.Rule
	square *geom.Rect // the largest square that fits, where the rule is about wide parts
	none   bool       // no rule makes the two near
}

const (
	tipWidth  = 20
	wideWidth = 50
	fieldX    = 160
	fieldY    = 120
	spacing   = 60 // of the rule that is shown: more than any gap drawn
)

var sheets = []struct {
	file, title string
	panels      []panel
}{
	{"kinds.svg", "the kinds of spacing by what faces what", []panel{
		{"side_to_side", []figure{box(20, 20, 140, 40)}, []figure{box(20, 76, 140, 96)}, facing.SideToSide, nil, false},
		{"tip_to_side", []figure{box(10, 50, 80, 70)}, []figure{box(116, 10, 136, 110)}, facing.TipToSide, nil, false},
		{"tip_to_tip", []figure{box(4, 50, 60, 70)}, []figure{box(100, 50, 156, 70)}, facing.TipToTip, nil, false},
		{"corner_to_corner", []figure{box(10, 15, 70, 35)}, []figure{box(94, 67, 154, 87)}, facing.CornerToCorner, nil, false},
		{"wide", []figure{box(20, 10, 140, 60)}, []figure{box(20, 92, 140, 112)}, facing.WidePart, &geom.Rect{X1: 55, Y1: 10, X2: 105, Y2: 60}, false},
		{"same_mask_spacing", []figure{{{X: 10, Y: 20}, {X: 90, Y: 20}, {X: 10, Y: 80}}}, []figure{box(78, 64, 150, 110)}, facing.Other, nil, false},
	}},
	{"projections.svg", "projections that overlap, just meet, and are apart", []panel{
		{"overlap by more than 0: the gap", []figure{box(10, 20, 90, 40)}, []figure{box(70, 70, 150, 90)}, facing.SideToSide, nil, false},
		{"overlap by exactly 0: the corners", []figure{box(10, 20, 80, 40)}, []figure{box(80, 70, 150, 90)}, facing.CornerToCorner, nil, false},
		{"apart: the corners", []figure{box(10, 20, 70, 40)}, []figure{box(92, 70, 150, 90)}, facing.CornerToCorner, nil, false},
	}},
	{"outline.svg", "edges of the merged shape count, not those of its figures", []panel{
		{"seams are no tips", []figure{box(10, 20, 40, 40), box(40, 20, 70, 40), box(70, 20, 150, 40)}, []figure{box(20, 76, 140, 96)}, facing.SideToSide, nil, false},
		{"the foot of a T is a tip", []figure{box(20, 80, 140, 100), box(70, 50, 90, 90)}, []figure{box(20, 10, 140, 22)}, facing.TipToSide, nil, false},
		{"an end in a concave corner: a side", []figure{box(105, 80, 140, 100), box(120, 20, 140, 100)}, []figure{box(10, 30, 112, 50)}, facing.SideToSide, nil, false},
	}},
	{"wide.svg", "a part is wide where a square fits that touches what faces", []panel{
		{"above the plate: wide", []figure{box(10, 10, 80, 60), box(10, 40, 150, 60)}, []figure{box(20, 92, 70, 112)}, facing.WidePart, &geom.Rect{X1: 25, Y1: 10, X2: 75, Y2: 60}, false},
		{"above the arm: not wide", []figure{box(10, 10, 80, 60), box(10, 40, 150, 60)}, []figure{box(82, 92, 150, 112)}, facing.WidePart, nil, true},
	}},
}

// draw gives the pictures by file name.
func draw() (map[string][]byte, error) {
	out := map[string][]byte{}
	for _, s := range sheets {
		var b bytes.Buffer
		width := len(s.panels) * (fieldX + 10)
		fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 %d %d" width="%d" role="img" aria-label="%s">`+"\n", width, fieldY+24, width, html.EscapeString(s.title))
		fmt.Fprintf(&b, "<title>%s</title>\n", html.EscapeString(s.title))
		for i := range s.panels {
			fmt.Fprintf(&b, `<g transform="translate(%d 5)">`+"\n", i*(fieldX+10)+5)
			if err := s.panels[i].draw(&b); err != nil {
				return nil, fmt.Errorf("%s, %s: %w", s.file, s.panels[i].title, err)
			}
			b.WriteString("</g>\n")
		}
		b.WriteString("</svg>\n")
		out[s.file] = b.Bytes()
	}
	return out, nil
}

// rules has the rule that is shown at a spacing that the panel breaks, and all others so small that nothing breaks them.
func rules(shown facing.Rule) *facing.Rules {
	r := &facing.Rules{Other: 1, SideToSide: 1, TipToSide: 1, TipToTip: 1, CornerToCorner: 1, TipWidth: tipWidth}
	switch shown {
	case facing.Other:
		r.Other = spacing
	case facing.SideToSide:
		r.SideToSide = spacing
	case facing.TipToSide:
		r.TipToSide = spacing
	case facing.TipToTip:
		r.TipToTip = spacing
	case facing.CornerToCorner:
		r.CornerToCorner = spacing
	case facing.WidePart:
		r.Wide = []facing.Wide{{Width: wideWidth, Spacing: spacing}}
	}
	return r
}

func shapeOf(figures []figure) *facing.Shape {
	var parts geom.Parts
	for _, f := range figures {
		if geom.IsManhattan(f) {
			parts.Rects, _ = geom.Rectangles(parts.Rects, f, geom.EvenOdd)
		} else {
			parts.Polygons = append(parts.Polygons, geom.Placed{Polygon: geom.NewPolygon(f, geom.EvenOdd)})
		}
	}
	var m facing.Maker
	s := new(facing.Shape)
	m.Parts(s, parts)
	return s
}

// draw draws a panel; y is turned upside down, as SVG has it.
func (p *panel) draw(b *bytes.Buffer) error {
	a, near := rules(p.rule).Nearest(shapeOf(p.a), shapeOf(p.b))
	if near == p.none || near && a.Rule != p.rule {
		return fmt.Errorf("near by %v: %v", a.Rule, near)
	}
	fmt.Fprintf(b, `<rect width="%d" height="%d" fill="#fcfcfa"/>`+"\n", fieldX, fieldY)
	for _, f := range append(append([]figure{}, p.a...), p.b...) {
		fmt.Fprint(b, `<path fill="#d4d4d0" stroke="#9a9a94" stroke-width="0.8" d="M`)
		for i, c := range f {
			if i > 0 {
				fmt.Fprint(b, " L")
			}
			fmt.Fprintf(b, "%d %d", c.X, fieldY-c.Y)
		}
		fmt.Fprint(b, "Z\"/>\n")
	}
	if s := p.square; s != nil {
		fmt.Fprintf(b, `<rect x="%d" y="%d" width="%d" height="%d" fill="none" stroke="#55554f" stroke-width="1.2" stroke-dasharray="4 3"/>`+"\n", s.X1, fieldY-s.Y2, s.X2-s.X1, s.Y2-s.Y1)
	}
	if near {
		for _, e := range [2][2]geom.Point{a.A, a.B} {
			if e[0] == e[1] {
				fmt.Fprintf(b, `<circle cx="%d" cy="%d" r="3" fill="#00507d"/>`+"\n", e[0].X, fieldY-e[0].Y)
			} else {
				line(b, e[0], e[1], `stroke="#00507d" stroke-width="3"`)
			}
		}
		line(b, a.From, a.To, `stroke="#8a3700" stroke-width="1.6"`)
	}
	fmt.Fprintf(b, `<text x="2" y="%d" font-family="sans-serif" font-size="9" fill="#222">%s</text>`+"\n", fieldY+13, html.EscapeString(p.title))
	return nil
}

func line(b *bytes.Buffer, p, q geom.Point, style string) {
	fmt.Fprintf(b, `<line x1="%d" y1="%d" x2="%d" y2="%d" %s/>`+"\n", p.X, fieldY-p.Y, q.X, fieldY-q.Y, style)
}
