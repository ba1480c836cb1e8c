package gds

import (
	"math"
	"math/big"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// matrix is a whole-number matrix: the slow twin of an orientation.
type matrix [2][2]int64

func (m matrix) times(n matrix) (p matrix) {
	for i := range 2 {
		for j := range 2 {
			p[i][j] = m[i][0]*n[0][j] + m[i][1]*n[1][j]
		}
	}
	return p
}

// matrixOf builds an orientation from the manual's words: first mirrored about the x axis, then turned counter-clockwise.
func matrixOf(o Orientation) matrix {
	m := matrix{{1, 0}, {0, 1}}
	if o >= 4 {
		m = matrix{{1, 0}, {0, -1}}
	}
	for range o % 4 {
		m = matrix{{0, -1}, {1, 0}}.times(m)
	}
	return m
}

func TestOrientations(t *testing.T) {
	for a := range Orientation(8) {
		m := matrixOf(a)
		x, y := a.Apply(3, 5)
		if x != m[0][0]*3+m[0][1]*5 || y != m[1][0]*3+m[1][1]*5 {
			t.Errorf("%v takes (3, 5) to (%d, %d)", a, x, y)
		}
		if a.Then(a.Inverse()) != 0 || a.Inverse().Then(a) != 0 {
			t.Errorf("%v is not undone by %v", a, a.Inverse())
		}
		for b := range Orientation(8) {
			if matrixOf(a.Then(b)) != matrixOf(b).times(m) {
				t.Errorf("%v inside %v is %v", a, b, a.Then(b))
			}
		}
	}
	if s := (Mirrored | 3).String(); s != "mirrored, turned 270 degrees" {
		t.Errorf("the orientation is called %q", s)
	}
}

// level is one level of a hierarchy in a test.
type level struct {
	ref         Ref
	p           *Placement
	column, row int32
}

// roundHalfEven rounds a fraction to the nearest whole number, ties to even.
func roundHalfEven(f *big.Rat) *big.Int {
	twice := new(big.Rat).Mul(f, big.NewRat(2, 1))
	down := new(big.Int).Div(f.Num(), f.Denom()) // floor: Div is Euclidean and the denominator above zero
	half := new(big.Rat).Sub(twice, new(big.Rat).SetInt(new(big.Int).Lsh(down, 1)))
	switch half.Cmp(big.NewRat(1, 1)) {
	case 1:
		return down.Add(down, big.NewInt(1))
	case 0:
		if down.Bit(0) != 0 {
			return down.Add(down, big.NewInt(1))
		}
	}
	return down
}

// place gives where an array element lies, in fractions rounded as the contract says.
func (l *level) place() (x, y *big.Int) {
	if l.p == nil {
		return big.NewInt(int64(l.ref.At.X)), big.NewInt(int64(l.ref.At.Y))
	}
	along := func(at, columnEnd, rowEnd int32) *big.Int {
		c := big.NewRat(int64(l.column)*(int64(columnEnd)-int64(at)), int64(l.p.Columns))
		r := big.NewRat(int64(l.row)*(int64(rowEnd)-int64(at)), int64(l.p.Rows))
		place := roundHalfEven(c.Add(c, r))
		return place.Add(place, big.NewInt(int64(at)))
	}
	return along(l.ref.At.X, l.p.ColumnEnd.X, l.p.RowEnd.X), along(l.ref.At.Y, l.p.ColumnEnd.Y, l.p.RowEnd.Y)
}

// randomLevel makes a reference as the index would. Most are small, some use the whole plane.
func randomLevel(r *rand.Rand, magnify bool) level {
	coordinate := func() int32 {
		if r.IntN(4) == 0 {
			return int32(r.Uint32())
		}
		return int32(r.IntN(2000) - 1000)
	}
	l := level{ref: Ref{At: Point{coordinate(), coordinate()}, Turn: uint8(r.IntN(8))}}
	if r.IntN(2) == 0 {
		return l
	}
	l.p = &Placement{Columns: 1 + int32(r.IntN(5)), Rows: 1 + int32(r.IntN(5)), ColumnEnd: Point{coordinate(), coordinate()},
		RowEnd: Point{coordinate(), coordinate()}, Mirror: l.ref.Turn >= 4, Magnification: 1,
		Angle: 90 * float64(l.ref.Turn%4), Exact: true}
	if r.IntN(3) == 0 {
		l.p.Angle -= 360
	}
	l.column, l.row = r.Int32N(l.p.Columns), r.Int32N(l.p.Rows)
	if magnify && r.IntN(2) == 0 {
		l.p.Magnification = float64(1 + r.IntN(5))
		l.p.Exact = l.p.Magnification == 1
	}
	return l
}

// TestComposeExact composes hierarchies of quarter turns, mirrored or not, arrays and whole magnifications, and holds each
// point against exact arithmetic that goes through the levels one by one.
func TestComposeExact(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for range 20000 {
		transform := Identity()
		levels := make([]level, 1+r.IntN(5))
		magnify := r.IntN(2) == 0
		for i := range levels { // from the top down
			levels[i] = randomLevel(r, magnify)
			l := &levels[i]
			transform = Compose(transform, &l.ref, l.p, l.column, l.row)
		}
		if !transform.Exact() {
			t.Fatalf("%+v is not exact: %v", levels, transform)
		}
		if magnify == false && !transform.Rigid() {
			t.Fatalf("%v magnifies", transform)
		}
		x0, y0 := int64(int32(r.Uint32())), int64(int32(r.Uint32()))
		x, y := big.NewInt(x0), big.NewInt(y0)
		scale := 1.0
		for i := len(levels) - 1; i >= 0; i-- {
			l := &levels[i]
			m := matrixOf(Orientation(l.ref.Turn))
			k := int64(1)
			if l.p != nil {
				k = int64(l.p.Magnification)
				scale *= l.p.Magnification
			}
			row := func(j int) *big.Int {
				a := new(big.Int).Mul(x, big.NewInt(m[j][0]*k))
				return a.Add(a, new(big.Int).Mul(y, big.NewInt(m[j][1]*k)))
			}
			nx, ny := row(0), row(1)
			px, py := l.place()
			x, y = nx.Add(nx, px), ny.Add(ny, py)
		}
		gx, gy := transform.Apply(x0, y0)
		if x.Cmp(big.NewInt(gx)) != 0 || y.Cmp(big.NewInt(gy)) != 0 {
			t.Fatalf("%v takes (%d, %d) to (%d, %d), not (%v, %v)", transform, x0, y0, gx, gy, x, y)
		}
		if fx, fy := transform.ApplyFloat(float64(x0), float64(y0)); fx != float64(gx) || fy != float64(gy) {
			t.Fatalf("%v takes (%d, %d) to (%v, %v), not (%d, %d)", transform, x0, y0, fx, fy, gx, gy)
		}
		if transform.Scale() != scale {
			t.Fatalf("%v has scale %v, not %v", transform, transform.Scale(), scale)
		}
		if bx, by, ok := transform.ApplyInverse(gx, gy); !ok || bx != x0 || by != y0 {
			t.Fatalf("%v does not bring (%d, %d) back", transform, gx, gy)
		}
		inverse, ok := transform.Invert()
		if ok != transform.Rigid() {
			t.Fatalf("%v has an inverse: %v", transform, ok)
		}
		if ok {
			if !transform.Then(inverse).Equal(Identity()) || !inverse.Then(transform).Equal(Identity()) {
				t.Fatalf("%v is not undone by %v", transform, inverse)
			}
		}
	}
}

// TestThen holds that composing step by step is the same as composing reference by reference.
func TestThen(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for range 5000 {
		a, b := randomLevel(r, true), randomLevel(r, true)
		outer := Compose(Identity(), &a.ref, a.p, a.column, a.row)
		inner := Compose(Identity(), &b.ref, b.p, b.column, b.row)
		want := Compose(outer, &b.ref, b.p, b.column, b.row)
		if got := inner.Then(outer); !got.Equal(want) {
			t.Fatalf("%v inside %v is %v, not %v", inner, outer, got, want)
		}
	}
}

// TestComposeOdd holds odd angles and magnifications against complex numbers: a structure that is mirrored about the x axis
// is conjugated, a turn by w degrees and a magnification are a factor m*exp(i*w*pi/180).
func TestComposeOdd(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	angles := []float64{0, 90, 180, 270, 30, 45, 60, 12.5, 120, 211.25, 359.999, -30, -90, 720, 1e-3}
	magnifications := []float64{1, 2, 3, 0.5, 0.25, 1.5, 0.1, 7.125}
	odd := 0
	for range 20000 {
		transform := Identity()
		type factor struct {
			mirror bool
			by, at complex128
		}
		var factors []factor
		scale := 1.0
		for range 1 + r.IntN(4) {
			p := &Placement{Columns: 1, Rows: 1, Mirror: r.IntN(2) == 0, Angle: angles[r.IntN(len(angles))],
				Magnification: magnifications[r.IntN(len(magnifications))]}
			ref := Ref{At: Point{int32(r.IntN(200000) - 100000), int32(r.IntN(200000) - 100000)}}
			transform = Compose(transform, &ref, p, 0, 0)
			factors = append(factors, factor{p.Mirror, cmplx.Rect(p.Magnification, p.Angle*math.Pi/180),
				complex(float64(ref.At.X), float64(ref.At.Y))})
			scale *= p.Magnification
		}
		if math.Abs(transform.Scale()-scale) > 1e-9*scale {
			t.Fatalf("%v has scale %v, not %v", transform, transform.Scale(), scale)
		}
		if !transform.Exact() {
			odd++
		}
		x, y := int64(r.IntN(20000)-10000), int64(r.IntN(20000)-10000)
		z := complex(float64(x), float64(y))
		for i := len(factors) - 1; i >= 0; i-- {
			f := factors[i]
			if f.mirror {
				z = cmplx.Conj(z)
			}
			z = z*f.by + f.at
		}
		fx, fy := transform.ApplyFloat(float64(x), float64(y))
		if cmplx.Abs(z-complex(fx, fy)) > 1e-5 {
			t.Fatalf("%v takes (%d, %d) to (%v, %v), not %v", transform, x, y, fx, fy, z)
		}
		gx, gy := transform.Apply(x, y)
		if math.Abs(float64(gx)-real(z)) > 0.5+1e-5 || math.Abs(float64(gy)-imag(z)) > 0.5+1e-5 {
			t.Fatalf("%v takes (%d, %d) to (%d, %d), not %v", transform, x, y, gx, gy, z)
		}
	}
	if odd < 10000 {
		t.Fatalf("only %d transforms were odd", odd)
	}
}

// TestComposeBackToExact holds that what cancels out is exact again.
func TestComposeBackToExact(t *testing.T) {
	chain := func(ps ...Placement) Transform {
		u := Identity()
		for i := range ps {
			u = Compose(u, &Ref{At: Point{0, 0}}, &ps[i], 0, 0)
		}
		return u
	}
	for _, c := range []struct {
		name string
		got  Transform
		want Transform
	}{
		{"45 and 45", chain(Placement{Magnification: 1, Angle: 45}, Placement{Magnification: 1, Angle: 45}), NewTransform(1, 0, 0)},
		{"30, mirrored 30", chain(Placement{Magnification: 1, Angle: 30, Mirror: true}, Placement{Magnification: 1, Angle: 30}), NewTransform(4, 0, 0)},
		{"half of twice", chain(Placement{Magnification: 2}, Placement{Magnification: 0.5, Angle: 180}), NewTransform(2, 0, 0)},
		{"2.5 times 0.4", chain(Placement{Magnification: 2.5}, Placement{Magnification: 0.4}), Identity()},
		{"a hair off a quarter", chain(Placement{Magnification: 1, Angle: 269.99999999999994}), NewTransform(3, 0, 0)},
		{"a hair below zero", chain(Placement{Magnification: 1, Angle: -1e-14}), Identity()},
		{"many turns", chain(Placement{Magnification: 1, Angle: 90 * 4001}), NewTransform(1, 0, 0)},
		{"many turns back", chain(Placement{Magnification: 1, Angle: -90 * 4001}), NewTransform(3, 0, 0)},
	} {
		if !c.got.Equal(c.want) {
			t.Errorf("%s is %v, not %v", c.name, c.got, c.want)
		}
	}
	if u := chain(Placement{Magnification: 1, Angle: 90.001}); u.Exact() {
		t.Errorf("90.001 degrees are taken for %v", u)
	}
}

// TestComposeAbsolute holds what the manual says of STRANS: an absolute magnification or angle is that of the reference
// alone, whatever holds it.
func TestComposeAbsolute(t *testing.T) {
	outer := Placement{Magnification: 3, Angle: 90, Mirror: true, Columns: 1, Rows: 1}
	at := Ref{At: Point{10, 20}}
	u := Compose(Identity(), &at, &outer, 0, 0) // (x, y) -> 3*(y, x) + (10, 20)
	for _, c := range []struct {
		name string
		p    Placement
		want string
	}{
		{"relative", Placement{Magnification: 2, Angle: 180}, "mirrored, turned 270 degrees, magnified 6 times, at (70, 50)"},
		{"absolute magnification", Placement{Magnification: 2, Angle: 180, AbsoluteMagnification: true},
			"mirrored, turned 270 degrees, magnified 2 times, at (70, 50)"},
		{"absolute angle", Placement{Magnification: 2, Angle: 180, AbsoluteAngle: true},
			"mirrored, turned 180 degrees, magnified 6 times, at (70, 50)"},
		{"both", Placement{Magnification: 1, Angle: 0, AbsoluteAngle: true, AbsoluteMagnification: true, Exact: true},
			"mirrored, at (70, 50)"},
		{"both, odd", Placement{Magnification: 1.5, Angle: 45, Mirror: true, AbsoluteAngle: true, AbsoluteMagnification: true},
			"turned 45 degrees, magnified 1.5 times, at (70, 50)"},
	} {
		c.p.Columns, c.p.Rows = 1, 1
		ref := Ref{At: Point{10, 20}} // goes to 3*(20, 10) + (10, 20)
		if got := Compose(u, &ref, &c.p, 0, 0).String(); got != c.want {
			t.Errorf("%s: %s, not %s", c.name, got, c.want)
		}
	}
}

// TestApplyRounds holds that points are rounded once, at the end, ties to even.
func TestApplyRounds(t *testing.T) {
	half := Placement{Magnification: 0.5, Columns: 1, Rows: 1}
	u := Compose(Identity(), &Ref{}, &half, 0, 0)
	for x, want := range map[int64]int64{1: 0, 3: 2, 5: 2, 7: 4, -1: 0, -3: -2, 4: 2, 1<<31 - 1: 1 << 30} {
		if got, _ := u.Apply(x, 0); got != want {
			t.Errorf("half of %d is rounded to %d, not %d", x, got, want)
		}
	}
	// Half of a half: 3/4 is 1; rounded at each level it would be 2/2 = 1, and 5/4 would be 2/2 = 1; 6/4 is 2, not 3/2.
	quarter := Compose(u, &Ref{At: Point{1, 0}}, &half, 0, 0) // x/4 + 1/2
	for x, want := range map[int64]int64{0: 0, 1: 1, 2: 1, 4: 2, 6: 2, -2: 0, -3: 0, -4: 0, -6: -1, -7: -1} {
		if got, _ := quarter.Apply(x, 0); got != want {
			t.Errorf("%d/4 + 1/2 is rounded to %d, not %d", x, got, want)
		}
	}
	if _, ok := quarter.ApplyRect(Rect{0, 0, 4, 4}); ok {
		t.Error("a rectangle was placed exactly by a transform that is not exact")
	}
	if _, _, ok := quarter.ApplyInverse(0, 0); ok {
		t.Error("a transform that is not exact was undone")
	}
	if _, ok := quarter.Invert(); ok {
		t.Error("a transform that is not exact has an inverse")
	}
	if quarter.Equal(u) || !quarter.Equal(Compose(u, &Ref{At: Point{1, 0}}, &half, 0, 0)) {
		t.Error("Equal does not tell transforms apart, or together")
	}
	// Far outside of all that can be, nothing wraps round.
	huge := Identity()
	for range 40 {
		huge = Compose(huge, &Ref{At: Point{math.MaxInt32, math.MinInt32}}, &Placement{Magnification: maxGrow}, 0, 0)
	}
	if x, y := huge.Apply(1, 1); x < 1<<61 || y > -(1<<61) {
		t.Errorf("a huge magnification gives (%d, %d)", x, y)
	}
	far := Identity()
	for range 3 {
		far = Compose(far, &Ref{At: Point{math.MaxInt32, math.MinInt32}}, &Placement{Magnification: 1 << 10}, 0, 0)
	}
	if !(far.Scale() == 1<<30) {
		t.Errorf("the scale is %v", far.Scale())
	}
}

func TestApplyRect(t *testing.T) {
	for o := range Orientation(8) {
		r := Rect{-3, 2, 10, 7}
		got, ok := NewTransform(o, 100, 1000).ApplyRect(r)
		m := matrixOf(o)
		var xs, ys []int64
		for _, p := range [][2]int64{{-3, 2}, {10, 7}} {
			xs = append(xs, m[0][0]*p[0]+m[0][1]*p[1]+100)
			ys = append(ys, m[1][0]*p[0]+m[1][1]*p[1]+1000)
		}
		want := Rect{int32(min(xs[0], xs[1])), int32(min(ys[0], ys[1])), int32(max(xs[0], xs[1])), int32(max(ys[0], ys[1]))}
		if !ok || got != want {
			t.Errorf("%v: %v (%v), not %v", o, got, ok, want)
		}
	}
	const top, bottom = math.MaxInt32, math.MinInt32
	whole := Rect{bottom, bottom, top, top}
	for _, c := range []struct {
		t  Transform
		r  Rect
		ok bool
	}{
		{Identity(), whole, true},
		{NewTransform(0, 1, 0), whole, false},
		{NewTransform(0, 0, -1), whole, false},
		{NewTransform(2, 0, 0), whole, false}, // -bottom is one above top
		{NewTransform(2, -1, -1), whole, true},
		{NewTransform(1, -1, 0), whole, true},
		{NewTransform(0, 1<<40, 0), Rect{0, 0, 1, 1}, false},
	} {
		if _, ok := c.t.ApplyRect(c.r); ok != c.ok {
			t.Errorf("%v of %v fits: %v", c.t, c.r, ok)
		}
	}
	doubled := Compose(Identity(), &Ref{At: Point{1, 1}, Turn: 1}, &Placement{Magnification: 2, Angle: 90}, 0, 0)
	if got, ok := doubled.ApplyRect(Rect{0, 0, 10, 20}); !ok || got != (Rect{-39, 1, 1, 21}) {
		t.Errorf("a doubled rectangle is %v", got)
	}
	if _, _, ok := doubled.ApplyInverse(2, 1); ok {
		t.Error("a point between the whole ones was brought back")
	}
}

func TestTransformString(t *testing.T) {
	for want, u := range map[string]Transform{
		"at (0, 0)": Identity(),
		"mirrored, turned 90 degrees, at (120, -40)":             NewTransform(5, 120, -40),
		"turned 180 degrees, magnified 3 times, at (1, 2)":       Compose(Identity(), &Ref{At: Point{1, 2}}, &Placement{Magnification: 3, Angle: 180}, 0, 0),
		"mirrored, turned 12.5 degrees, at (1, 2)":               Compose(Identity(), &Ref{At: Point{1, 2}}, &Placement{Magnification: 1, Angle: 12.5, Mirror: true}, 0, 0),
		"turned 330 degrees, magnified 0.5 times, at (1.5, 2.5)": Compose(Compose(Identity(), &Ref{At: Point{1, 2}}, &Placement{Magnification: 0.5}, 0, 0), &Ref{At: Point{1, 1}}, &Placement{Magnification: 1, Angle: -30}, 0, 0),
	} {
		if got := u.String(); got != want {
			t.Errorf("%q, not %q", got, want)
		}
	}
}

// TestCosSin holds that all four quadrants agree to the last bit, so that mirrored placements of one structure come out as
// mirror images.
func TestCosSin(t *testing.T) {
	for _, w := range []float64{0, 1, 12.5, 30, 44.9, 45, 60, 89.999} {
		c, s := cosSin(w)
		if math.Abs(c-math.Cos(w*math.Pi/180)) > 1e-15 || math.Abs(s-math.Sin(w*math.Pi/180)) > 1e-15 {
			t.Errorf("%v degrees: %v, %v", w, c, s)
		}
		for k := 1; k < 8; k++ {
			c2, s2 := cosSin(w + 90)
			if math.Abs(c2+s) > 1e-14 || math.Abs(s2-c) > 1e-14 {
				t.Errorf("%v degrees: %v, %v", w+90, c2, s2)
			}
			w += 90
			c, s = c2, s2
		}
	}
	for w, want := range map[float64][2]float64{30: {math.Sqrt(3) / 2, 0.5}, 240: {-0.5, -math.Sqrt(3) / 2}, -90: {0, -1}, 360: {1, 0}} {
		c, s := cosSin(w)
		if math.Abs(c-want[0]) > 2e-16 || math.Abs(s-want[1]) > 2e-16 || (w == 240 && c != -0.5) || (w == 30 && s != 0.5) {
			t.Errorf("%v degrees: %v, %v", w, c, s)
		}
	}
}
