package picture

import (
	"bufio"
	"fmt"
	"html"
	"io"
)

// This file draws SVG, in the colours and lines of the report page: mask A amber with slanted lines, mask B blue with level lines, so
// that every common form of colour vision tells them apart, and so does print in black and white.

// SVG says how a scene is drawn.
type SVG struct {
	Title string  // for who cannot see the picture
	Unit  int64   // least width of a wire, database units: hatching and margins are made to suit
	Scale float64 // pixels to a database unit
	Only  *Role   // this mask alone; the other one is a thin outline
	Part  *Box    // what lies here alone; nil: all
}

// WriteSVG draws the scene.
func (s *Scene) WriteSVG(w io.Writer, o SVG) error {
	out := bufio.NewWriter(w)
	p := func(format string, args ...any) { fmt.Fprintf(out, format+"\n", args...) }
	u := float64(o.Unit)
	margin := 3 * o.Unit
	part := s.Box
	if o.Part != nil {
		part = *o.Part
	}
	left, top := part.X1-margin, -part.Y2-margin
	width, height := part.X2-part.X1+2*margin, part.Y2-part.Y1+2*margin
	p(`<svg xmlns="http://www.w3.org/2000/svg" viewBox="%d %d %d %d" width="%.0f" height="%.0f" role="img" aria-label="%s">`,
		left, top, width, height, o.Scale*float64(width), o.Scale*float64(height), html.EscapeString(o.Title))
	p(`<title>%s</title>`, html.EscapeString(o.Title))
	p(`<defs>`)
	p(`<pattern id="a" patternUnits="userSpaceOnUse" width="%g" height="%[1]g" patternTransform="rotate(-45)"><rect width="%[1]g" height="%[1]g" fill="#f6e2b6"/><rect width="%[1]g" height="%[2]g" fill="#8f5e00"/></pattern>`, 0.5*u, 0.14*u)
	p(`<pattern id="b" patternUnits="userSpaceOnUse" width="%g" height="%[1]g"><rect width="%[1]g" height="%[1]g" fill="#cfe4ec"/><rect y="%[3]g" width="%[1]g" height="%[2]g" fill="#12556e"/></pattern>`, 0.4*u, 0.11*u, 0.145*u)
	p(`</defs>`)
	p(`<rect x="%d" y="%d" width="%d" height="%d" fill="#fcfcfa"/>`, left, top, width, height)
	line := u / 12
	styles := [roles]string{
		Drawn: fmt.Sprintf(`fill="#d4d4d0" stroke="#55554f" stroke-width="%g"`, line),
		MaskA: fmt.Sprintf(`fill="url(#a)" stroke="#8f5e00" stroke-width="%g"`, line),
		MaskB: fmt.Sprintf(`fill="url(#b)" stroke="#12556e" stroke-width="%g"`, line),
		Mark:  fmt.Sprintf(`fill="none" stroke="#9b0f5f" stroke-width="%g"`, u/4),
	}
	faint := fmt.Sprintf(`fill="none" stroke="#c4c4be" stroke-width="%g"`, line)
	for role, figures := range s.Figures {
		if len(figures) == 0 || o.Only != nil && Role(role) == Mark {
			continue
		}
		style := styles[role]
		if o.Only != nil && Role(role) != *o.Only {
			style = faint
		}
		p(`<g %s>`, style)
		for _, f := range figures {
			b := f.box()
			if b.X2 < part.X1 || b.X1 > part.X2 || b.Y2 < part.Y1 || b.Y1 > part.Y2 {
				continue
			}
			if Role(role) == Mark { // a ring around it
				p(`<ellipse cx="%g" cy="%g" rx="%g" ry="%g"/>`, float64(b.X1+b.X2)/2, -float64(b.Y1+b.Y2)/2, float64(b.X2-b.X1)/2+u, float64(b.Y2-b.Y1)/2+u)
				continue
			}
			fmt.Fprint(out, `<path d="M`)
			for i, c := range f {
				if i > 0 {
					fmt.Fprint(out, " L")
				}
				fmt.Fprintf(out, "%d %d", c.X, -c.Y)
			}
			p(`Z"/>`)
		}
		p(`</g>`)
	}
	p(`<g font-family="sans-serif" font-size="%g" fill="#222">`, 1.3*u)
	for _, l := range s.Labels {
		if l.At.X < part.X1 || l.At.X > part.X2 || l.At.Y < part.Y1 || l.At.Y > part.Y2 {
			continue
		}
		p(`<text x="%d" y="%d">%s</text>`, l.At.X, -l.At.Y, html.EscapeString(l.Text))
	}
	p(`</g>`)
	p(`</svg>`)
	return out.Flush()
}
