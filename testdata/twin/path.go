package twin

import "math"

// This file gives the outline of a placed figure, in half database units.
//
// The contract says how a path is filled (non-zero) and that slanted ones round to the nearest unit; the format's manual
// draws its ends. Corners are drawn by the convention that package geom names (mitred; cut square beyond a turn by more
// than 90 degrees), and so are round ends: an arc of max(5, 1 + round(pi/2 / acos(1 - 0.1/r))) points. What package geom
// adds of its own, for sides that meet only beyond the end of a segment after such a turn, no convention decides: the
// layout is open.

type spot struct{ x, y float64 }

func (p spot) plus(q spot) spot     { return spot{p.x + q.x, p.y + q.y} }
func (p spot) times(f float64) spot { return spot{p.x * f, p.y * f} }
func (p spot) less(q spot) spot     { return spot{p.x - q.x, p.y - q.y} }
func (p spot) right() spot          { return spot{p.y, -p.x} }
func (p spot) dot(q spot) float64   { return p.x*q.x + p.y*q.y }
func (p spot) cross(q spot) float64 { return p.x*q.y - p.y*q.x }
func (p spot) length() float64      { return math.Hypot(p.x, p.y) }
func (p spot) unit() spot           { return spot{p.x / p.length(), p.y / p.length()} }

// tracer collects the outline of one figure.
type tracer struct {
	out     []grid
	rounded bool
	open    string
	halves  bool   // exact halves stay
	local   []spot // the centre line of a path, as drawn
	turned  bool   // the figure is magnified, or turned by no multiple of 90 degrees
}

// grid is a point in half database units.
type grid struct{ x, y int64 }

// put appends a vertex, given in database units as a base and an offset from it (so that no digits are lost).
func (t *tracer) put(base, offset spot) {
	t.out = append(t.out, grid{t.place(base.x, offset.x), t.place(base.y, offset.y)})
}

// place rounds a coordinate: exact halves of odd widths stay, all else goes to the nearest unit.
func (t *tracer) place(base, offset float64) int64 {
	floor := math.Floor(base)
	rest := (base - floor) + offset
	near := math.Round(2 * rest)
	// what floats can be off by at that place
	slack := 1e-9 + math.Abs(base)*1e-14
	if math.Abs(2*rest-near) <= slack {
		v := 2*int64(floor) + int64(near)
		if v%2 != 0 && !t.halves {
			t.open = "a coordinate lies in the middle between two units"
		}
		return v
	}
	t.rounded = true
	if math.Abs(2*rest-near) < 1e-4 && int64(near)%2 != 0 {
		t.open = "a coordinate lies in the middle between two units, as far as floats can tell"
	}
	return 2 * (int64(floor) + int64(math.Round(rest)))
}

// outline gives the outline of a flat BOUNDARY or PATH. wide tells that even its points lie outside of what 32 bits hold.
func (f *Flat) outline() (out []grid, nonZero, rounded, wide bool, open string) {
	t := tracer{}
	for _, p := range f.Points {
		x, y := f.at.apply(p)
		wide = wide || outside(x) || outside(y)
	}
	if f.Kind == Boundary {
		for _, p := range f.Points {
			if f.at.exact {
				x, y := f.at.whole(p)
				t.out = append(t.out, grid{2 * x, 2 * y})
			} else {
				x, y := f.at.apply(p)
				t.put(spot{x, y}, spot{})
			}
		}
		return t.out, false, t.rounded, wide, t.open
	}
	t.path(f)
	return t.out, true, t.rounded, wide, t.open
}

func outside(v float64) bool { return v < math.MinInt32 || v > math.MaxInt32 }

// path traces the outline of a path: its right side, its far end, its left side, its near end.
func (t *tracer) path(f *Flat) {
	width := float64(f.Style.Width) * f.at.scale
	if f.Style.Width < 0 {
		width = -float64(f.Style.Width)
	}
	half := width / 2
	t.turned = !f.at.exact || f.at.scale != 1
	t.halves = f.at.exact && f.Style.Width%2 != 0
	var line []spot
	t.local = nil
	for i, p := range f.Points {
		if i > 0 && p == f.Points[i-1] {
			continue
		}
		x, y := f.at.apply(p)
		line = append(line, spot{x, y})
		t.local = append(t.local, spot{float64(p.X), float64(p.Y)})
	}
	begin, finish := 0.0, 0.0
	kind := f.Style.Type
	switch kind {
	case 2:
		begin, finish = half, half
	case 4:
		begin, finish = float64(f.Style.Begin)*f.at.scale, float64(f.Style.Finish)*f.at.scale
	}
	if half == 0 {
		return
	}
	if kind != 0 && kind != 1 && kind != 2 && kind != 4 {
		t.open = "a path of a type that the format does not have"
	}
	n := len(line)
	if n == 1 {
		if kind == 0 {
			return
		}
		if kind == 1 || kind == 4 || !f.at.exact {
			t.open = "a path of one point with such ends, or turned"
		}
		for _, c := range []spot{{-half, -half}, {half, -half}, {half, half}, {-half, half}} {
			t.put(line[0], c)
		}
		return
	}
	for i := 1; i < n-1; i++ {
		t.corner(line, i, i-1, i+1, half)
	}
	t.end(line[n-2], line[n-1], half, finish, kind)
	for i := n - 2; i > 0; i-- {
		t.corner(line, i, i+1, i-1, half)
	}
	t.end(line[1], line[0], half, begin, kind)
}

// corner traces the right side at point i of the line on the way from one neighbour to the other.
func (t *tracer) corner(line []spot, i, before, behind int, half float64) {
	p, q, r := line[before], line[i], line[behind]
	d, e := q.less(p).unit(), r.less(q).unit()
	from, to := d.right().times(half), e.right().times(half)
	cross, dot := q.less(p).cross(r.less(q)), q.less(p).dot(r.less(q))
	// Whether it turns at all is told by the points as drawn, which are whole numbers.
	if l := t.local; l[i].less(l[before]).cross(l[behind].less(l[i])) == 0 {
		cross = 0
	}
	straight := (p.x == q.x || p.y == q.y) && (q.x == r.x || q.y == r.y)
	if lengths := q.less(p).length() * r.less(q).length(); !straight && lengths > 1<<50 && math.Abs(cross) < 1e-12*lengths {
		t.open = "floats cannot tell how a path turns"
	}
	if cross == 0 && dot > 0 && t.turned {
		t.open = "a path that goes straight on at a point, turned: the point beside it may be rounded or left out"
	}
	if cross == 0 {
		t.put(q, from)
		if dot < 0 {
			t.put(q, to)
		}
		return
	}
	// The two sides q+from+u*d and q+to+v*e cross at u = (to-from) x e / (d x e).
	u := to.less(from).cross(e) / d.cross(e)
	meet := from.plus(d.times(u))
	outer := cross > 0 // a left turn has its outside on the right
	switch {
	case dot >= 0:
		t.put(q, meet)
	case outer:
		t.put(q, from.plus(d.times(half)))
		t.put(q, to.plus(e.times(-half)))
	default:
		if math.Abs(u) >= math.Min(q.less(p).length(), r.less(q).length())*(1-1e-9) {
			t.open = "the sides of a path cross beyond the end of a segment, inside a turn by more than 90 degrees"
		}
		t.put(q, meet)
	}
}

// end traces the end of the path at q, where it arrives from p.
func (t *tracer) end(p, q spot, half, far float64, kind int16) {
	d := q.less(p).unit()
	right := d.right().times(half)
	if kind != 1 {
		t.put(q, d.times(far).plus(right))
		t.put(q, d.times(far).less(right))
		return
	}
	if t.turned {
		t.open = "a round end that is magnified or turned"
	}
	t.put(q, right)
	steps := 4
	if half > 0.1 {
		steps = max(4, int(math.Round(math.Pi/2/math.Acos(1-0.1/half))))
	}
	for i := 1; i < steps; i++ {
		sin, cos := math.Sincos(math.Pi * float64(i) / float64(steps))
		t.put(q, right.times(cos).plus(d.times(half*sin)))
	}
	t.put(q, right.times(-1))
}

// box gives the bounding box of points of the grid.
func box(points []grid) (low, high grid) {
	low, high = points[0], points[0]
	for _, p := range points[1:] {
		low, high = grid{min(low.x, p.x), min(low.y, p.y)}, grid{max(high.x, p.x), max(high.y, p.y)}
	}
	return low, high
}
