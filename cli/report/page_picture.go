package report

import (
	"fmt"
	"html"
	"html/template"
	"math"
	"strconv"
	"strings"

	"maskpair/decompose"
)

// This file draws a component as SVG, to scale: the shapes with the hatch of their mask, the way round the cycle from shape to
// shape, each gap with its size, the places where a cut would do, and the shapes that an anchor holds. What a mark means is told
// by form and letter first, by colour only besides. Colours are the style sheet's.

// hatches are the fills of the masks: slanted lines for A, level ones for B. All drawings use them.
const hatches = template.HTML(`<svg class="defs" width="0" height="0" aria-hidden="true"><defs>` +
	`<pattern id="hatch-a" width="7" height="7" patternUnits="userSpaceOnUse" patternTransform="rotate(-45)"><rect width="7" height="7" class="ground-a"/><path d="M0 2H7" class="line-a"/></pattern>` +
	`<pattern id="hatch-b" width="9" height="5" patternUnits="userSpaceOnUse"><rect width="9" height="5" class="ground-b"/><path d="M0 2.5H9" class="line-b"/></pattern>` +
	`</defs></svg>`)

const (
	pictureWidth, pictureHeight = 550.0, 420.0
	closeupWidth, closeupHeight = 300.0, 220.0
	beadRadius                  = 11.0
	// A gap that is shorter than this in the drawing, in pixels, gets a close-up.
	shortGap = 9.0
	// A number stands so far from a gap, in pixels, where there is room.
	clearOfGap = 34.0
	// mostCorners is how many corners a drawn shape may have; others are drawn as their box.
	mostCorners = 1500
	// mostGaps is how many pairs that stay on one mask are drawn besides those of the cycle.
	mostGaps = 200
)

// drawer draws one picture.
type drawer struct {
	rules   *decompose.Rules
	u       *decompose.Unresolved
	p       *decompose.Picture
	window  decompose.Box
	scale   float64 // pixels per half unit
	b       strings.Builder
	undrawn int // pairs that stay on one mask and have no place in the drawing
}

// picture draws the whole window.
func (d *drawer) picture(title string) template.HTML {
	return d.svg(d.p.Window, pictureWidth, pictureHeight, title, "picture")
}

// closeup draws the first unresolved pair, where it is too small in the picture; "" where it is not.
func (d *drawer) closeup() template.HTML {
	if len(d.u.Pairs) == 0 || d.scale == 0 {
		return ""
	}
	p := &d.u.Pairs[0]
	gap := math.Hypot(float64(p.From.X-p.To.X), float64(p.From.Y-p.To.Y))
	if gap*d.scale >= shortGap {
		return ""
	}
	side := int64(3*gap) + 8
	at := middle(decompose.Box{X1: min(p.From.X, p.To.X), Y1: min(p.From.Y, p.To.Y), X2: max(p.From.X, p.To.X), Y2: max(p.From.Y, p.To.Y)})
	window := decompose.Box{X1: at.X - side*4/3, Y1: at.Y - side, X2: at.X + side*4/3, Y2: at.Y + side}
	return d.svg(window, closeupWidth, closeupHeight, "Close-up of the first unresolved pair", "closeup")
}

// svg draws a window.
func (d *drawer) svg(window decompose.Box, width, height float64, title, class string) template.HTML {
	w, h := float64(window.X2-window.X1), float64(window.Y2-window.Y1)
	if w <= 0 || h <= 0 {
		return ""
	}
	k := math.Min(width/w, height/h)
	outer := *d
	d.window, d.scale = window, k
	d.b.Reset()
	const foot = 26 // for the scale bar
	fmt.Fprintf(&d.b, `<svg class="%s" viewBox="0 0 %s %s" width="%s" height="%s" role="img" aria-label="%s">`, class,
		px(w*k), px(h*k+foot), px(w*k), px(h*k+foot), html.EscapeString(title))
	fmt.Fprintf(&d.b, `<svg width="%s" height="%s">`, px(w*k), px(h*k))
	d.shapes()
	d.candidates()
	d.way()
	d.b.WriteString(`</svg>`)
	d.bar(w*k, h*k)
	d.b.WriteString(`</svg>`)
	out := template.HTML(d.b.String())
	if class != "picture" {
		d.window, d.scale = outer.window, outer.scale
	}
	return out
}

// px words pixels with at most one decimal.
func px(v float64) string {
	v = math.Round(v*10) / 10
	if v == 0 {
		v = 0 // also for a negative zero
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

// point gives the place of a spot in the drawing: y runs down there.
func (d *drawer) point(s decompose.Spot) (x, y float64) {
	return float64(s.X-d.window.X1) * d.scale, float64(d.window.Y2-s.Y) * d.scale
}

// shapes draws the shapes, those around first.
func (d *drawer) shapes() {
	for _, cycle := range []bool{false, true} {
		for i := range d.p.Shapes {
			s := &d.p.Shapes[i]
			if (s.Step > 0) != cycle {
				continue
			}
			class := "a"
			if s.Mask == decompose.B {
				class = "b"
			}
			if !s.Member {
				class += " around"
			} else if !cycle {
				class += " member"
			}
			path := d.path(s)
			if path == "" {
				continue
			}
			fmt.Fprintf(&d.b, `<path class="%s" d="%s"/>`, class, path)
		}
	}
}

// path words the outlines of a shape.
func (d *drawer) path(s *decompose.PictureShape) string {
	outlines := s.Outlines
	if cornersOf(s) > mostCorners {
		b := s.Box
		outlines = [][][]decompose.Spot{{{{X: b.X1, Y: b.Y1}, {X: b.X2, Y: b.Y1}, {X: b.X2, Y: b.Y2}, {X: b.X1, Y: b.Y2}}}}
	}
	var b strings.Builder
	for _, rings := range outlines {
		for _, ring := range rings {
			last := decompose.Spot{}
			for i, p := range ring {
				x, y := d.point(p)
				switch {
				case i == 0:
					fmt.Fprintf(&b, "M%s %s", px(x), px(y))
				case p.Y == last.Y:
					b.WriteString("H" + px(x))
				case p.X == last.X:
					b.WriteString("V" + px(y))
				default:
					fmt.Fprintf(&b, "L%s %s", px(x), px(y))
				}
				last = p
			}
			b.WriteString("z")
		}
	}
	return b.String()
}

// cornersOf counts the corners of a shape.
func cornersOf(s *decompose.PictureShape) int {
	corners := 0
	for _, rings := range s.Outlines {
		for _, ring := range rings {
			corners += len(ring)
		}
	}
	return corners
}

// candidates draws where a cut is possible: a frame, and a cross in it where the least set of cuts needs it.
func (d *drawer) candidates() {
	needed := map[int]bool{}
	for _, i := range d.u.LeastStitches {
		needed[i] = true
	}
	for i := range d.u.Candidates {
		c := d.u.Candidates[i].Box
		if c.X2 < d.window.X1 || c.X1 > d.window.X2 || c.Y2 < d.window.Y1 || c.Y1 > d.window.Y2 {
			continue
		}
		x1, y2 := d.point(decompose.Spot{X: c.X1, Y: c.Y1})
		x2, y1 := d.point(decompose.Spot{X: c.X2, Y: c.Y2})
		class := "cut"
		cross := ""
		if needed[i] {
			class = "cut needed"
			cross = fmt.Sprintf("M%s %sL%s %sM%s %sL%s %s", px(x1), px(y1), px(x2), px(y2), px(x1), px(y2), px(x2), px(y1))
		}
		fmt.Fprintf(&d.b, `<path class="%s" d="M%s %sH%sV%sH%sz%s"/>`, class, px(x1), px(y1), px(x2), px(y2), px(x1), cross)
	}
}

// bead is the number of a step in the drawing.
type bead struct {
	x, y  float64
	shape *decompose.PictureShape
	on    bool
}

// way draws the way round the cycle: within a shape a thin line through its number, across a gap a line with the gap's size.
func (d *drawer) way() {
	beads := make([]bead, len(d.u.Cycle)+1)
	into, out := make([]*decompose.Spot, len(beads)), make([]*decompose.Spot, len(beads))
	for i := range d.p.Links {
		k := &d.p.Links[i]
		if k.Known {
			out[k.From], into[k.To] = &k.At, &k.Other
		}
	}
	for i := range d.p.Shapes {
		s := &d.p.Shapes[i]
		if s.Step == 0 || beads[s.Step].on {
			continue
		}
		x, y := d.point(d.beadPlace(s, into[s.Step], out[s.Step]))
		beads[s.Step] = bead{x, y, s, true}
	}
	for step := range beads {
		n := &beads[step]
		if !n.on {
			continue
		}
		for _, end := range []*decompose.Spot{into[step], out[step]} {
			if end != nil {
				x, y := d.point(*end)
				fmt.Fprintf(&d.b, `<path class="way" d="M%s %sL%s %s"/>`, px(n.x), px(n.y), px(x), px(y))
			}
		}
	}
	drawn := map[[2]decompose.Spot]bool{}
	var stay []func()
	for i := range d.p.Links {
		k := &d.p.Links[i]
		if !k.Known {
			continue
		}
		drawn[[2]decompose.Spot{k.At, k.Other}], drawn[[2]decompose.Spot{k.Other, k.At}] = true, true
		if d.stays(k) {
			stay = append(stay, func() { d.gap(k.At, k.Other, k.DistanceSq, "gap stays") })
		} else {
			d.gap(k.At, k.Other, k.DistanceSq, "gap")
		}
	}
	gaps := 0
	d.undrawn = 0
	for i := range d.u.Pairs {
		p := &d.u.Pairs[i]
		if drawn[[2]decompose.Spot{p.From, p.To}] {
			continue
		}
		if gaps == mostGaps {
			d.undrawn++
			continue
		}
		gaps++
		stay = append(stay, func() { d.gap(p.From, p.To, p.DistanceSq, "gap stays") })
	}
	for _, fn := range stay {
		fn()
	}
	for step := range beads {
		if n := &beads[step]; n.on {
			d.bead(step, n)
		}
	}
	for i := range d.p.Shapes {
		if s := &d.p.Shapes[i]; s.Step == 0 && s.Member && s.Anchor != "" {
			x, y := d.point(d.beadPlace(s, nil, nil))
			d.pin(x, y, s.Mask)
		}
	}
}

// stays tells whether the shapes of a link are left on one mask.
func (d *drawer) stays(k *decompose.PictureLink) bool {
	a, b := d.u.Cycle[k.From-1].Box, d.u.Cycle[k.To-1].Box
	for i := range d.u.Pairs {
		p := &d.u.Pairs[i]
		if p.A == a && p.B == b || p.A == b && p.B == a {
			return true
		}
	}
	return false
}

// gap draws a gap with its size.
func (d *drawer) gap(from, to decompose.Spot, distanceSq float64, class string) {
	x1, y1 := d.point(from)
	x2, y2 := d.point(to)
	fmt.Fprintf(&d.b, `<path class="%s" d="M%s %sL%s %s"/>`, class, px(x1), px(y1), px(x2), px(y2))
	// The size stands beside the line: to the right of an upright one, above a level one.
	x, y := (x1+x2)/2, (y1+y2)/2
	dx, dy := x2-x1, y2-y1
	anchor := "middle"
	if math.Abs(dy) >= math.Abs(dx) {
		x, anchor = x+7, "start"
		y += 4
	} else {
		y -= 7
	}
	fmt.Fprintf(&d.b, `<text class="%s" x="%s" y="%s" text-anchor="%s">%s</text>`, class, px(x), px(y), anchor, d.size(distanceSq))
}

// size words a distance without its unit.
func (d *drawer) size(sq float64) string {
	v := math.Sqrt(sq) / d.rules.UnitDBU
	word := strconv.FormatFloat(v, 'f', 2, 64)
	return strings.TrimRight(strings.TrimRight(word, "0"), ".")
}

// beadPlace chooses a place inside a shape for its number: one with room around from which the way in and the way out stay inside,
// as near to both as can be. Between them is tried first, then a grid over what is seen of the shape.
func (d *drawer) beadPlace(s *decompose.PictureShape, in, out *decompose.Spot) decompose.Spot {
	w := d.window
	seen := decompose.Box{X1: max(s.Box.X1, w.X1), Y1: max(s.Box.Y1, w.Y1), X2: min(s.Box.X2, w.X2), Y2: min(s.Box.Y2, w.Y2)}
	var ends []decompose.Spot
	for _, end := range []*decompose.Spot{in, out} {
		if end != nil {
			ends = append(ends, *end)
		}
	}
	best, most := middle(seen), math.Inf(-1)
	offer := func(at decompose.Spot) {
		if !isInside(s, at) {
			return
		}
		room := roomIn(s, at) * d.scale
		value := math.Min(room, beadRadius+2)
		if value <= most {
			return
		}
		for _, end := range ends {
			far := d.scale * math.Hypot(float64(at.X-end.X), float64(at.Y-end.Y))
			value -= 24*outsideShare(s, at, end) + 0.015*far + 0.5*math.Max(0, clearOfGap-far)
		}
		if value > most {
			best, most = at, value
		}
	}
	if len(ends) == 2 {
		offer(decompose.Spot{X: (ends[0].X + ends[1].X) / 2, Y: (ends[0].Y + ends[1].Y) / 2})
		if most > beadRadius/2 {
			return best
		}
	}
	steps := int64(20)
	if cornersOf(s) > 100 {
		steps = 8
	}
	for i := range steps {
		for k := range steps {
			offer(decompose.Spot{X: seen.X1 + (seen.X2-seen.X1)*(2*i+1)/(2*steps), Y: seen.Y1 + (seen.Y2-seen.Y1)*(2*k+1)/(2*steps)})
		}
	}
	return best
}

// outsideShare gives how much of the way between two points lies outside a shape.
func outsideShare(s *decompose.PictureShape, a, b decompose.Spot) float64 {
	const steps = 8
	outside := 0
	for i := range int64(steps) {
		at := decompose.Spot{X: a.X + (b.X-a.X)*(2*i+1)/(2*steps), Y: a.Y + (b.Y-a.Y)*(2*i+1)/(2*steps)}
		if !isInside(s, at) {
			outside++
		}
	}
	return float64(outside) / steps
}

// roomIn gives how far a point inside a shape is from the nearest side of the outline that it is in; below 0 outside.
func roomIn(s *decompose.PictureShape, at decompose.Spot) float64 {
	most := -1.0
	for _, rings := range s.Outlines {
		inside, near := false, math.Inf(1)
		for _, ring := range rings {
			for i := range ring {
				a, b := ring[i], ring[(i+1)%len(ring)]
				if crossesRay(a, b, at) {
					inside = !inside
				}
				near = math.Min(near, toSegment(at, a, b))
			}
		}
		if inside {
			most = math.Max(most, near)
		}
	}
	return most
}

// isInside tells whether a point is inside a shape.
func isInside(s *decompose.PictureShape, at decompose.Spot) bool {
	for _, rings := range s.Outlines {
		inside := false
		for _, ring := range rings {
			for i := range ring {
				if crossesRay(ring[i], ring[(i+1)%len(ring)], at) {
					inside = !inside
				}
			}
		}
		if inside {
			return true
		}
	}
	return false
}

// crossesRay tells whether a segment crosses the level ray to the right of a point.
func crossesRay(a, b, at decompose.Spot) bool {
	return (a.Y > at.Y) != (b.Y > at.Y) && float64(at.X) < float64(a.X)+float64(b.X-a.X)*float64(at.Y-a.Y)/float64(b.Y-a.Y)
}

// toSegment gives the distance of a point to a segment.
func toSegment(p, a, b decompose.Spot) float64 {
	dx, dy := float64(b.X-a.X), float64(b.Y-a.Y)
	t := 0.0
	if l := dx*dx + dy*dy; l > 0 {
		t = math.Max(0, math.Min(1, (float64(p.X-a.X)*dx+float64(p.Y-a.Y)*dy)/l))
	}
	return math.Hypot(float64(p.X-a.X)-t*dx, float64(p.Y-a.Y)-t*dy)
}

// bead draws the number of a step with the letter of its mask.
func (d *drawer) bead(step int, n *bead) {
	if n.shape.Anchor != "" {
		d.pin(n.x, n.y, n.shape.Mask)
	}
	fmt.Fprintf(&d.b, `<rect class="bead" x="%s" y="%s" width="%s" height="%s" rx="4"/>`, px(n.x-beadRadius-2), px(n.y-beadRadius+2), px(2*beadRadius+4), px(2*beadRadius-4))
	fmt.Fprintf(&d.b, `<text class="bead" x="%s" y="%s">%d%s</text>`, px(n.x), px(n.y+4), step, n.shape.Mask)
}

// pin draws what says that an anchor holds a shape: a frame standing on a corner.
func (d *drawer) pin(x, y float64, mask decompose.Mask) {
	const r = 18
	fmt.Fprintf(&d.b, `<path class="pin" d="M%s %sl%d %dl-%d %dl-%d -%dz"><title>held on %s by an anchor</title></path>`, px(x), px(y-r), r, r, r, r, r, r, mask)
}

// bar draws the scale bar: 1, 2 or 5 times a power of ten, as long as is handy.
func (d *drawer) bar(width, height float64) {
	perUnit := d.scale * 2 * d.rules.UnitDBU // pixels
	length := barLength(width*0.3/perUnit, 1/d.rules.UnitDBU)
	fmt.Fprintf(&d.b, `<path class="bar" d="M1 %sv6m0 -3H%sm0 -3v6"/>`, px(height+8), px(1+length*perUnit))
	fmt.Fprintf(&d.b, `<text class="bar" x="%s" y="%s">%s %s</text>`, px(8+length*perUnit), px(height+15), Short(length), d.rules.Unit)
}

// barLength gives the largest of 1, 2 and 5 times a power of ten that is at most the given length, and at least a grid step.
func barLength(most, step float64) float64 {
	if !(most > 0) {
		return step
	}
	power := math.Pow(10, math.Floor(math.Log10(most)))
	for _, f := range []float64{5, 2, 1} {
		if f*power <= most {
			return math.Max(f*power, step)
		}
	}
	return math.Max(power, step)
}

// caption says what the drawing shows and leaves out.
func (d *drawer) caption() string {
	var parts []string
	known := 0
	for _, k := range d.p.Links {
		if k.Known {
			known++
		}
	}
	if known < len(d.p.Links) && known > 0 {
		parts = append(parts, fmt.Sprintf("The cycle has %d shapes; drawn are those around an unresolved pair.", len(d.u.Cycle)))
	}
	if d.p.More > 0 {
		parts = append(parts, count(d.p.More, "more shape")+" around not drawn.")
	}
	if d.undrawn > 0 {
		parts = append(parts, count(d.undrawn, "more pair")+" left on one mask not drawn.")
	}
	return strings.Join(parts, " ")
}
