package layouts

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// This file draws random layouts: three levels of hierarchy, the eight orientations and odd angles, arrays, several tops,
// figures of any angle, keyholes, outlines that cross themselves, and Manhattan paths.

// figure writes one figure near the origin, no wider and higher than 80 units.
func figure(w *gds.Writer, rng *rand.Rand, layer gds.LayerType) {
	x, y := rng.Int32N(100)-50, rng.Int32N(100)-50
	long := func() int32 { return 4 + rng.Int32N(60) }
	switch rng.IntN(10) {
	case 0: // any triangle or quadrangle, which may cross itself
		var ring []gds.Point
		for range 3 + rng.IntN(2) {
			ring = append(ring, gds.Point{X: x + rng.Int32N(60), Y: y + rng.Int32N(60)})
		}
		w.Boundary(layer, ring)
	case 1: // a frame, as a keyhole
		a, b := long()+16, long()+16
		w.Boundary(layer, []gds.Point{{X: x, Y: y}, {X: x + a, Y: y}, {X: x + a, Y: y + b}, {X: x, Y: y + b}, {X: x, Y: y},
			{X: x + 6, Y: y + 6}, {X: x + 6, Y: y + b - 6}, {X: x + a - 6, Y: y + b - 6}, {X: x + a - 6, Y: y + 6}, {X: x + 6, Y: y + 6}})
	case 2: // an L
		a, b := long()+12, long()+12
		w.Boundary(layer, []gds.Point{{X: x, Y: y}, {X: x + a, Y: y}, {X: x + a, Y: y + 8}, {X: x + 8, Y: y + 8}, {X: x + 8, Y: y + b}, {X: x, Y: y + b}})
	case 3: // a wire
		style := gds.PathStyle{Type: int16(rng.IntN(2) * 2), Width: 2 * (1 + rng.Int32N(6))}
		w.Path(layer, style, []gds.Point{{X: x, Y: y}, {X: x + long(), Y: y}})
	case 4: // a diamond
		r := 5 + rng.Int32N(20)
		w.Boundary(layer, []gds.Point{{X: x - r, Y: y}, {X: x, Y: y - r}, {X: x + r, Y: y}, {X: x, Y: y + r}})
	default:
		w.Rectangle(layer, gds.Rect{X1: x, Y1: y, X2: x + 4 + rng.Int32N(20), Y2: y + long()})
	}
}

// place draws an orientation. With odd, some angles are no quarter turns; multiples of 15 degrees are left out, because half
// units, which could be rounded either way, would be common there.
func place(rng *rand.Rand, odd bool) gds.Strans {
	s := gds.Strans{Mirror: rng.IntN(2) == 0, Angle: 90 * float64(rng.IntN(4))}
	if odd && rng.IntN(4) == 0 {
		s.Angle = float64(15*rng.IntN(24)) + float64(1+rng.IntN(139))/10
	}
	return s
}

// layout writes a stream, and gives its path. far is where its tops lie.
func layout(t testing.TB, rng *rand.Rand, drawn [][2]int, odd bool, far gds.Point) string {
	t.Helper()
	var buf bytes.Buffer
	w := gds.NewWriter(&buf, gds.WriterOptions{})
	leaves := 1 + rng.IntN(3)
	for i := range leaves {
		w.BeginStructure(fmt.Sprintf("leaf%d", i))
		for range 1 + rng.IntN(4) {
			d := drawn[rng.IntN(len(drawn))]
			figure(w, rng, gds.LayerType{Layer: uint16(d[0]), Type: uint16(d[1])})
		}
		w.Rectangle(gds.LayerType{Layer: 99}, gds.Rect{X1: -60, Y1: -60, X2: 60, Y2: 60}) // not drawn
		w.EndStructure()
	}
	blocks := 1 + rng.IntN(2)
	for i := range blocks {
		w.BeginStructure(fmt.Sprintf("block%d", i))
		for range 1 + rng.IntN(3) {
			leaf := fmt.Sprintf("leaf%d", rng.IntN(leaves))
			at := gds.Point{X: rng.Int32N(500) - 250, Y: rng.Int32N(500) - 250}
			if rng.IntN(2) == 0 {
				w.SRef(leaf, place(rng, odd), at)
				continue
			}
			columns, rows := 1+rng.Int32N(5), 1+rng.Int32N(3)
			column, row := gds.Point{X: columns * (40 + rng.Int32N(90))}, gds.Point{Y: rows * (60 + rng.Int32N(90))}
			s := place(rng, false)
			for range int(s.Angle) / 90 { // gdspy knows lattices along the turned axes alone
				column, row = gds.Point{X: -column.Y, Y: column.X}, gds.Point{X: -row.Y, Y: row.X}
			}
			w.ARef(leaf, s, uint16(columns), uint16(rows), at, gds.Point{X: at.X + column.X, Y: at.Y + column.Y}, gds.Point{X: at.X + row.X, Y: at.Y + row.Y})
		}
		w.EndStructure()
	}
	for i := range 1 + rng.IntN(2) {
		w.BeginStructure(fmt.Sprintf("top%d", i))
		d := drawn[0]
		w.Rectangle(gds.LayerType{Layer: uint16(d[0]), Type: uint16(d[1])}, gds.Rect{X1: far.X, Y1: far.Y, X2: far.X + 30, Y2: far.Y + 12})
		for k := range blocks {
			for range 1 + rng.IntN(3) {
				w.SRef(fmt.Sprintf("block%d", k), place(rng, odd), gds.Point{X: far.X + rng.Int32N(1200) - 600, Y: far.Y + rng.Int32N(1200) - 600})
			}
		}
		w.EndStructure()
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	name := filepath.Join(t.TempDir(), "in.gds")
	if err := os.WriteFile(name, buf.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return name
}

func TestRandomLayouts(t *testing.T) {
	program := outside.Maskpair(t)
	outside.Packages(t, "python3-numpy", "python3-scipy")
	rng := rand.New(rand.NewPCG(41, 1))
	var questions []question
	var reports []layer
	for n := range 120 {
		drawn := [][2]int{{19, 0}}
		if n%4 == 0 {
			drawn = append(drawn, [2]int{7, 3})
		}
		var far gds.Point
		if n%3 == 0 {
			far = gds.Point{X: []int32{-1 << 20, 1 << 20}[rng.IntN(2)], Y: rng.Int32N(1 << 20)}
		}
		spacing := 5 + rng.Int64N(56)
		path := layout(t, rng, drawn, n%2 == 1, far)
		r, output := decompose(t, program, path, drawn, float64(spacing), "nm")
		reports = append(reports, r)
		questions = append(questions, question{path, drawn, []int64{spacing}, output, [2]int{19, maskA}, [2]int{19, maskB}})
	}
	var all []problem
	stay, figures, odd := 0, 0, 0
	for n, found := range judge(t, questions) {
		t.Run(fmt.Sprint(n), func(t *testing.T) {
			f, r := found[0], reports[n]
			hold(t, r, f, true)
			components, odds, of := double(f.Shapes, f.Pairs)
			if r.Components != components || r.Odd != odds {
				t.Errorf("%d components reported, %d of them odd; gonum finds %d and %d", r.Components, r.Odd, components, odds)
			}
			if !r.Proved || r.LowerBound != r.Unresolved {
				t.Errorf("%d unresolved pairs, lower bound %d, proved: %v", r.Unresolved, r.LowerBound, r.Proved)
			}
			all = append(all, problems(components, of, f.Pairs)...)
			stay, figures, odd = stay+r.Unresolved, figures+f.Figures, odd+odds
			if t.Failed() {
				keep(t, questions[n])
			}
		})
	}
	t.Logf("%d figures, %d odd components, %d pairs stay", figures, odd, stay)
	if best := optimum(t, all); int64(stay) != best {
		t.Errorf("%d unresolved pairs in all layouts together; HiGHS finds %d", stay, best)
	}
	if figures < 5000 || odd < 100 {
		t.Errorf("the layouts are too poor: %d figures, %d odd components", figures, odd)
	}
}

// keep leaves the files of a failed case where CROSSCHECK_KEEP says.
func keep(t testing.TB, q question) {
	t.Helper()
	dir := os.Getenv("CROSSCHECK_KEEP")
	if dir == "" {
		return
	}
	for from, to := range map[string]string{q.Path: "in.gds", q.Output: "out.gds"} {
		data, err := os.ReadFile(from)
		if err == nil {
			err = os.WriteFile(filepath.Join(dir, filepath.Base(t.Name())+to), data, 0o600)
		}
		if err != nil {
			t.Error(err)
		}
	}
	t.Logf("drawn %v, spacings %v", q.Drawn, q.Spacings)
}
