package geom

import (
	"math"
	"slices"
)

// This file turns the centre line of a path into its outline. What GDSII leaves open about joins (the manual draws square
// ones) is taken as a widely used open reader draws it, gdspy 1.4 with corners="natural", so that independent checks see
// the same figure; read there as facts:
//   - both sides of a segment run at half the width; sides of neighbouring segments meet where their lines cross (mitre);
//   - on the outer side of a turn by more than 90 degrees the mitre is cut: each side ends half a width beyond the vertex;
//   - a round end is an arc of max(5, 1 + round(pi/2 / acos(1 - 0.1/r))) points, r half the width in database units.
// Two things are our own. A path that turns right round (180 degrees) ends flush there: it covers the union of its
// segments. And where, after a turn by more than 90 degrees, the sides inside cross only beyond the end of a segment, the
// outline goes by the vertex instead, for the crossing would be a spike that no wire has.
//
// The outline runs along the right side of the path, round its far end, back along the other side, and round the near end.
// It may overlap itself; the fill rule is NonZero.

// PathEnd tells how a path ends: PATHTYPE 0 flush, 1 round, 2 extended by half the width, 4 extended by Begin at its first
// and Finish at its last point (BGNEXTN and ENDEXTN; below 0 it falls short). Any other type is taken as flush.
type PathEnd struct {
	Type          uint8
	Begin, Finish int64
}

// arcError is the error of round ends, in units of the grid.
const arcError = 0.1

// PathOutline appends to dst the outline of a path of this width along the centre line; its fill is NonZero. A negative
// width counts as positive.
//
// All lengths are in one unit of the caller's, and grid is a database unit in it: with doubled coordinates (half database
// units) grid is 2, and the sides of a path of odd width are whole numbers. A Manhattan centre line with even width, and
// ends that are not round, gives an exact outline. Other vertices are exact where they fall on whole numbers (within a
// millionth, as floats tell); else each coordinate off them is rounded to the nearest multiple of grid, and rounded is true.
//
// Points repeated in a row count once. A single point has no area with flush ends, and is a square with all others. The
// result is ok = false, with dst as it was, for a path that covers nothing: no width, no points, or a flush single point.
// Coordinates of points plus width and extensions have to stay within Limit.
func PathOutline(dst []Point, centre []Point, width int64, end PathEnd, grid int64) (outline []Point, rounded, ok bool) {
	if width < 0 {
		width = -width
	}
	centre = withoutRepeats(centre)
	if width == 0 || len(centre) == 0 || len(centre) == 1 && end.flush() {
		return dst, false, false
	}
	if width%2 == 0 && end.Type != 1 && IsManhattanLine(centre) || width%2 == 0 && len(centre) == 1 {
		return squareOutline(dst, centre, width/2, end), false, true
	}
	w := pathWriter{dst: dst, half: float64(width) / 2, grid: grid}
	if len(centre) == 1 {
		for _, c := range [4]vector{{-1, -1}, {1, -1}, {1, 1}, {-1, 1}} {
			w.put(centre[0], c.times(w.half))
		}
		return w.dst, w.rounded, true
	}
	n := len(centre)
	first, last := direction(centre[0], centre[1]), direction(centre[n-2], centre[n-1])
	w.side(centre, 1)
	w.end(centre[n-1], last, end.Type, end.Finish)
	w.side(centre, -1)
	w.end(centre[0], first.times(-1), end.Type, end.Begin)
	return w.dst, w.rounded, true
}

// IsManhattanLine tells whether every segment of an open line is axis-parallel.
func IsManhattanLine(line []Point) bool {
	for i := 1; i < len(line); i++ {
		if line[i].X != line[i-1].X && line[i].Y != line[i-1].Y {
			return false
		}
	}
	return true
}

func (e PathEnd) flush() bool { return e.Type != 1 && e.Type != 2 && e.Type != 4 }

// extensions gives the lengths of the ends beyond the first and the last point.
func (e PathEnd) extensions(half int64) (begin, finish int64) {
	switch e.Type {
	case 2:
		return half, half
	case 4:
		return e.Begin, e.Finish
	}
	return 0, 0
}

// withoutRepeats drops points that repeat the one before; it copies only where there are any.
func withoutRepeats(line []Point) []Point {
	for i := 1; i < len(line); i++ {
		if line[i] == line[i-1] {
			out := append([]Point(nil), line[:i]...)
			for _, p := range line[i:] {
				if p != out[len(out)-1] {
					out = append(out, p)
				}
			}
			return out
		}
	}
	return line
}

// squareOutline is the outline along a Manhattan centre line, in integers.
func squareOutline(dst []Point, centre []Point, half int64, end PathEnd) []Point {
	n := len(centre)
	dst = slices.Grow(dst, 2*n+2)
	if n == 1 {
		p := centre[0]
		return append(dst, Point{p.X - half, p.Y - half}, Point{p.X + half, p.Y - half}, Point{p.X + half, p.Y + half}, Point{p.X - half, p.Y + half})
	}
	begin, finish := end.extensions(half)
	step := func(i int) Point {
		return Point{sign(centre[i+1].X - centre[i].X), sign(centre[i+1].Y - centre[i].Y)}
	}
	// corner appends the right side at p, where the path arrives along d and leaves along e. Right of (x, y) is (y, -x).
	corner := func(p, d, e Point) {
		if d.X == -e.X && d.Y == -e.Y {
			dst = append(dst, Point{p.X + half*d.Y, p.Y - half*d.X}, Point{p.X + half*e.Y, p.Y - half*e.X})
		} else if d != e {
			dst = append(dst, Point{p.X + half*(d.Y+e.Y), p.Y - half*(d.X+e.X)})
		}
	}
	// tip appends the end at p, beyond it by far along d, from the right side to the left.
	tip := func(p, d Point, far int64) {
		p = Point{p.X + far*d.X, p.Y + far*d.Y}
		dst = append(dst, Point{p.X + half*d.Y, p.Y - half*d.X}, Point{p.X - half*d.Y, p.Y + half*d.X})
	}
	back := func(d Point) Point { return Point{-d.X, -d.Y} }
	for i := 1; i < n-1; i++ {
		corner(centre[i], step(i-1), step(i))
	}
	tip(centre[n-1], step(n-2), finish)
	for i := n - 2; i > 0; i-- {
		corner(centre[i], back(step(i)), back(step(i-1)))
	}
	tip(centre[0], back(step(0)), begin)
	return dst
}

func sign(v int64) int64 {
	switch {
	case v > 0:
		return 1
	case v < 0:
		return -1
	}
	return 0
}

// vector is a float vector. Conversions around products keep compilers from fusing them with sums, so that every machine
// computes the same.
type vector struct{ x, y float64 }

func (v vector) times(f float64) vector { return vector{v.x * f, v.y * f} }
func (v vector) plus(u vector) vector   { return vector{v.x + u.x, v.y + u.y} }
func (v vector) right() vector          { return vector{v.y, -v.x} }

// direction is the unit vector from p to q.
func direction(p, q Point) vector {
	x, y := float64(q.X-p.X), float64(q.Y-p.Y)
	n := length(p, q)
	return vector{x / n, y / n}
}

func length(p, q Point) float64 {
	x, y := float64(q.X-p.X), float64(q.Y-p.Y)
	return math.Sqrt(float64(x*x) + float64(y*y))
}

// pathWriter collects the vertices of a slanted outline, rounding them.
type pathWriter struct {
	dst     []Point
	half    float64
	grid    int64
	rounded bool
}

// side walks along the right side of the path, or, with step -1, back along the other.
func (w *pathWriter) side(centre []Point, step int) {
	i, last := 1, len(centre)-1
	if step < 0 {
		i, last = len(centre)-2, 0
	}
	for ; i != last; i += step {
		w.corner(centre[i-step], centre[i], centre[i+step])
	}
}

// corner appends the right side at q of the path from p over q to r.
func (w *pathWriter) corner(p, q, r Point) {
	ax, ay, bx, by := q.X-p.X, q.Y-p.Y, r.X-q.X, r.Y-q.Y
	cross := mul(ax, by).sub(mul(ay, bx))
	dot := mul(ax, bx).add(mul(ay, by))
	d, e := direction(p, q), direction(q, r)
	from, to := d.right().times(w.half), e.right().times(w.half)
	turn, ahead := cross.sign(), dot.sign()
	switch {
	case turn == 0 && ahead > 0:
		w.put(q, from)
		return
	case turn == 0:
		w.put(q, from)
		w.put(q, to)
		return
	}
	a, b := length(p, q), length(q, r)
	sine, cosine := math.Abs(cross.float())/a/b, dot.float()/a/b
	reach := w.half * (sine / (1 + cosine)) // along a side, from beside the vertex to where the sides cross
	if ahead < 0 {
		reach = w.half * ((1 - cosine) / sine) // the same without cancellation
	}
	switch {
	case turn > 0 && ahead >= 0: // outside
		w.put(q, from.plus(d.times(reach)))
	case turn > 0:
		w.put(q, from.plus(d.times(w.half)))
		w.put(q, to.plus(e.times(-w.half)))
	case ahead >= 0 || reach <= a && reach <= b: // inside
		w.put(q, from.plus(d.times(-reach)))
	default:
		w.put(q, from)
		w.put(q, vector{})
		w.put(q, to)
	}
}

// end appends the end of the path at p, which it leaves along d, from the right side to the left.
func (w *pathWriter) end(p Point, d vector, kind uint8, extension int64) {
	right := d.right().times(w.half)
	var far vector
	switch kind {
	case 1:
		w.arc(p, d)
		return
	case 2:
		far = d.times(w.half)
	case 4:
		far = d.times(float64(extension))
	}
	w.put(p, far.plus(right))
	w.put(p, far.plus(right.times(-1)))
}

// arc appends a half circle about p, from right of d over d to left of it.
func (w *pathWriter) arc(p Point, d vector) {
	steps := 4
	if r := w.half / float64(w.grid); r > arcError {
		steps = max(steps, int(math.Pi/2/math.Acos(1-arcError/r)+0.5))
	}
	right := d.right()
	w.put(p, right.times(w.half))
	for i := 1; i < steps; i++ {
		sin, cos := math.Sincos(math.Pi * float64(i) / float64(steps))
		w.put(p, right.times(cos*w.half).plus(d.times(sin*w.half)))
	}
	w.put(p, right.times(-w.half))
}

// put appends p + off, rounded where it is no whole number.
func (w *pathWriter) put(p Point, off vector) {
	w.dst = append(w.dst, Point{w.place(p.X, off.x), w.place(p.Y, off.y)})
}

// place gives v + off where off is a whole number within a millionth (or within what floats of that size can tell), else
// the nearest multiple of the grid. The part of v off the grid is small, so no digits are lost in the sum.
func (w *pathWriter) place(v int64, off float64) int64 {
	whole := math.RoundToEven(off)
	if math.Abs(off-whole) <= 1e-6+math.Abs(off)*0x1p-48 {
		return v + int64(whole)
	}
	w.rounded = true
	rest := ((v % w.grid) + w.grid) % w.grid
	return v - rest + w.grid*int64(math.RoundToEven((float64(rest)+off)/float64(w.grid)))
}
