package report

import (
	"bytes"
	"crypto/sha256"
	"encoding/base64"
	"errors"
	"fmt"
	"html"
	"io"
	"math"
	"regexp"
	"strings"
	"testing"

	"maskpair/decompose"
)

// The page in a browser is the matter of testdata/crosscheck/page.

func pageOf(t testing.TB, r *Report) string {
	t.Helper()
	var b strings.Builder
	if err := WritePage(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestPageSaysWhatCounts(t *testing.T) {
	r := sample()
	r.Rules.Layers = []decompose.LayerRules{{Name: "metal1", Spacing: 36, Stitch: &decompose.StitchRules{}}, {Name: "metal2", Spacing: 40}}
	text := pageOf(t, r)
	for _, want := range []string{
		"No. 5 pairs of near shapes in chip.gds cannot be put on different masks.",
		html.EscapeString(Caution), "1,234,567", "apply = true", "1 pair is accepted by a waiver.", "measured", "a new neighbour", "a BOX on 19/0",
		"2 pairs are nearer than any two shapes may be", "a shape under an order is never cut", "na&#34;me", "café",
		`id="metal1-1"`, `id="metal1-2"`, // a card for each of the two groups
	} {
		if !strings.Contains(text, want) {
			t.Errorf("the page does not have %q", want)
		}
	}
	if n := strings.Count(text, `<article class="card"`); n != 2 {
		t.Errorf("%d cards for two groups", n)
	}
	if at1, at2 := strings.Index(text, `id="metal1-1"`), strings.Index(text, `id="metal1-2"`); at1 > at2 {
		t.Error("the group that leaves three pairs comes behind the one that leaves two")
	}
	if strings.Index(text, "<h1>") > strings.Index(text, "<h2") {
		t.Error("something stands before the verdict")
	}
}

// Where spacing goes by what faces what, an unresolved pair is told with its rule: its gap may well be above same_mask_spacing.
func TestPageNamesRules(t *testing.T) {
	r := sample()
	for _, rules := range []*decompose.FacingRules{nil, {TipToTip: 36, TipWidth: 10}} {
		r.Rules.Layers = []decompose.LayerRules{{Name: "metal1", Spacing: 30, ByFacing: rules}, {Name: "metal2", Spacing: 40}}
		text := strings.ReplaceAll(pageOf(t, r), noBreak, " ")
		for _, words := range []string{"tip_to_tip 36 nm", "and by what faces what"} {
			if strings.Contains(text, words) != (rules != nil) {
				t.Errorf("rules %+v: the page says %q: %v", rules, words, rules == nil)
			}
		}
	}
}

func TestPageWhereAllFits(t *testing.T) {
	r := sample()
	r.Result.Layers = r.Result.Layers[1:]
	r.Rules.Layers = []decompose.LayerRules{{Name: "metal2", Spacing: 40}}
	text := pageOf(t, r)
	if !strings.Contains(text, "Yes. All of chip.gds fits on two masks.") || !strings.Contains(text, "There is nothing to mend.") || strings.Contains(text, "<article") {
		t.Error("a layout that fits is not said to fit")
	}
	r.Result.Layers[0].Frozen = []decompose.FrozenFault{{Kind: decompose.FrozenNew, Top: "chip"}}
	if text := pageOf(t, r); !strings.Contains(text, "No. In 1 place of chip.gds a mask that is already made") {
		t.Error("a made mask that does not fit is not said")
	}
}

// Names come from streams and files of others: none may become markup.
func TestPageEscapes(t *testing.T) {
	const evil = `"><script>alert(1)</script><x y='`
	r := sample()
	r.Input.Name = "a/" + evil
	r.Input.Tops = []string{evil}
	r.Warnings = []string{evil}
	l := &r.Result.Layers[0]
	l.Name = evil
	for i := range l.Unresolved {
		u := &l.Unresolved[i]
		u.Top, u.Cell, u.CellTransform, u.NoCandidate = evil, evil, evil, evil
	}
	l.Waived[0].Reason, l.Waived[0].Name, l.Moved[0].Why = evil, evil, evil
	l.Drawing = &decompose.Drawing{Maps: []decompose.TileMap{tiles(evil, 4)}, Pictures: map[int]*decompose.Picture{0: picture(3, 4)}}
	for i := range l.Drawing.Pictures[0].Shapes {
		l.Drawing.Pictures[0].Shapes[i].Anchor = evil
	}
	r.Rules.Layers = []decompose.LayerRules{{Name: evil, Spacing: 36}, {Name: "metal2", Spacing: 40}}
	text := pageOf(t, r)
	if n := strings.Count(text, "<script"); n != 1 {
		t.Errorf("%d scripts", n)
	}
	if strings.Contains(text, "<x y=") || strings.Contains(text, `id="">`) {
		t.Error("a name became markup")
	}
}

// The page names nothing outside of itself, and its policy allows exactly what it holds.
func TestPageStandsAlone(t *testing.T) {
	text := pageOf(t, sampleWithLayers())
	for _, bad := range []string{"http:", "https:", "src=", "@import", "<link", "<iframe", "style=", "onclick"} {
		if strings.Contains(text, bad) {
			t.Errorf("the page has %q", bad)
		}
	}
	for _, m := range regexp.MustCompile(`url\([^)]*\)`).FindAllString(text, -1) {
		if m != "url(#hatch-a)" && m != "url(#hatch-b)" {
			t.Errorf("the page has %s", m)
		}
	}
	for _, tag := range []string{"style", "script"} {
		m := regexp.MustCompile(`(?s)<` + tag + `>(.*)</` + tag + `>`).FindStringSubmatch(text)
		if m == nil {
			t.Fatalf("no %s", tag)
		}
		sum := sha256.Sum256([]byte(m[1]))
		if want := tag + "-src &#39;sha256-" + strings.ReplaceAll(base64.StdEncoding.EncodeToString(sum[:]), "+", "&#43;") + "&#39;"; !strings.Contains(text, want) {
			t.Errorf("the policy does not allow the page's own %s: no %s", tag, want)
		}
	}
	if !strings.Contains(text, "default-src &#39;none&#39;") {
		t.Error("the policy allows more")
	}
}

func sampleWithLayers() *Report {
	r := sample()
	r.Rules.Layers = []decompose.LayerRules{{Name: "metal1", Spacing: 36}, {Name: "metal2", Spacing: 40}}
	return r
}

// What may differ from run to run is not on the page.
func TestPageIsTheSameAgain(t *testing.T) {
	a := sampleWithLayers()
	b := sampleWithLayers()
	b.Run.Seconds, b.Run.Jobs, b.Run.Peak, b.Run.Stages = 99, 7, 1, nil
	if pageOf(t, a) != pageOf(t, b) {
		t.Error("time, jobs or memory of a run change the page")
	}
}

// tiles is a map with something in every tile.
func tiles(top string, n int) decompose.TileMap {
	m := decompose.TileMap{Top: top, Box: decompose.Box{X2: 1 << 30, Y2: 1 << 30}, NX: n, NY: n, Tiles: make([]decompose.Tile, n*n)}
	for i := range m.Tiles {
		m.Tiles[i] = decompose.Tile{A: float64(i%7) * 1e14, B: float64(i%11) * 1e14, Unresolved: 1 + i%5, Moved: i % 3}
	}
	return m
}

// picture has a cycle and shapes around, each with so many corners.
func picture(cycle, around int) *decompose.Picture {
	p := &decompose.Picture{Window: decompose.Box{X2: 20000, Y2: 20000}}
	ring := func(x, y int64) [][][]decompose.Spot {
		var out []decompose.Spot
		for i := range int64(20) {
			out = append(out, decompose.Spot{X: x + 10*i, Y: y + i%2*100}, decompose.Spot{X: x + 10*i + 10, Y: y + i%2*100})
		}
		return [][][]decompose.Spot{{append(out, decompose.Spot{X: x + 200, Y: y - 300}, decompose.Spot{X: x, Y: y - 300})}}
	}
	for i := range cycle + around {
		x, y := int64(i%10)*2000, int64(i/10)*2000+500
		s := decompose.PictureShape{Mask: decompose.Mask(i % 2), Box: decompose.Box{X1: x, Y1: y - 300, X2: x + 200, Y2: y + 100}, Outlines: ring(x, y), Member: i%3 == 0}
		if i < cycle {
			s.Step = i + 1
			p.Links = append(p.Links, decompose.PictureLink{From: i + 1, To: (i+1)%cycle + 1, At: decompose.Spot{X: x + 200, Y: y}, Other: decompose.Spot{X: x + 2000, Y: y}, DistanceSq: 1e6, Known: true})
		}
		p.Shapes = append(p.Shapes, s)
	}
	return p
}

// A million shapes with far too much to mend: four layers of hundreds of kinds, maps full in every tile, everything moved.
func TestPageStaysSmall(t *testing.T) {
	r := sample()
	r.Result.Layers, r.Rules.Layers = nil, nil
	for n := range 4 {
		l := decompose.LayerResult{Name: fmt.Sprint("layer", n), Spacing: 36, Shapes: 1e5, NearPairs: 1e6, UnresolvedPairs: 1 << 20, BaselineShapes: 1e5, MovedShapes: 1e5,
			Drawing: &decompose.Drawing{Pictures: map[int]*decompose.Picture{}}}
		for i := range 6 {
			l.Drawing.Maps = append(l.Drawing.Maps, tiles(fmt.Sprint("top", i), 44))
		}
		for i := range 800 {
			u := decompose.Unresolved{Top: "top0", Component: int64(i), Shapes: 5000, Group: int64(i % 400), Cell: "a_cell_with_a_rather_long_name_as_they_are", CellTransform: "mirrored, turned 90 degrees, at (123456, -654321)"}
			for k := range 41 {
				u.Cycle = append(u.Cycle, decompose.CycleShape{Box: decompose.Box{X1: int64(k), Y1: int64(i)}})
			}
			for k := range 30 {
				u.Pairs = append(u.Pairs, decompose.Pair{A: decompose.Box{X1: int64(k)}, DistanceSq: 2, Widen: 3, From: decompose.Spot{X: 1e9, Y: -1e9}, To: decompose.Spot{X: 1e9, Y: -1e9}, Top: "top0"})
			}
			if i < PageCards {
				l.Drawing.Pictures[i] = picture(40, 60)
			}
			l.Unresolved = append(l.Unresolved, u)
		}
		for range 1000 {
			l.Moved = append(l.Moved, decompose.MovedShape{Top: "top0", Why: "a new neighbour of the shape at (123456, 654321) leaves no other way"})
			l.Waived = append(l.Waived, decompose.WaivedPair{Reason: "measured", Pair: decompose.Pair{Top: "top0"}})
		}
		r.Result.Layers = append(r.Result.Layers, l)
		r.Rules.Layers = append(r.Rules.Layers, decompose.LayerRules{Name: l.Name, Spacing: 36})
	}
	text := pageOf(t, r)
	if len(text) > 5<<20 {
		t.Errorf("%d bytes", len(text))
	}
	if n := strings.Count(text, `<article class="card"`); n != PageCards {
		t.Errorf("%d cards, want %d", n, PageCards)
	}
	if !strings.Contains(text, "Kinds without a card") || !strings.Contains(text, "more kinds are in report.json") {
		t.Error("kinds without a card are not told")
	}
	t.Logf("%d bytes", len(text))
}

func TestPageFailsWithItsWriter(t *testing.T) {
	broken := errors.New("no more room")
	if err := WritePage(writerFunc(func([]byte) (int, error) { return 0, broken }), sampleWithLayers()); !errors.Is(err, broken) {
		t.Errorf("error %v", err)
	}
}

type writerFunc func([]byte) (int, error)

func (f writerFunc) Write(p []byte) (int, error) { return f(p) }

var _ io.Writer = writerFunc(nil)

// The number of a step stands inside its shape, for forms in which the middle is not.
func TestBeadPlace(t *testing.T) {
	spot := func(x, y int64) decompose.Spot { return decompose.Spot{X: x, Y: y} }
	for _, c := range []struct {
		name  string
		rings [][]decompose.Spot
	}{
		{"bar", [][]decompose.Spot{{spot(0, 0), spot(400, 0), spot(400, 40), spot(0, 40)}}},
		{"L", [][]decompose.Spot{{spot(0, 0), spot(400, 0), spot(400, 40), spot(40, 40), spot(40, 400), spot(0, 400)}}},
		{"U", [][]decompose.Spot{{spot(0, 0), spot(400, 0), spot(400, 400), spot(360, 400), spot(360, 40), spot(40, 40), spot(40, 400), spot(0, 400)}}},
		{"frame", [][]decompose.Spot{{spot(0, 0), spot(400, 0), spot(400, 400), spot(0, 400)}, {spot(40, 40), spot(40, 360), spot(360, 360), spot(360, 40)}}},
		{"triangle", [][]decompose.Spot{{spot(0, 0), spot(400, 0), spot(0, 400)}}},
	} {
		s := &decompose.PictureShape{Step: 1, Box: decompose.Box{X2: 400, Y2: 400}, Outlines: [][][]decompose.Spot{c.rings}}
		d := &drawer{window: decompose.Box{X1: -100, Y1: -100, X2: 500, Y2: 500}, scale: 1}
		for _, ends := range [][]*decompose.Spot{nil, {ref(spot(0, 300))}, {ref(spot(0, 300)), ref(spot(300, 0))}, {ref(spot(0, 0)), ref(spot(0, 400))}} {
			var in, out *decompose.Spot
			if len(ends) > 0 {
				in = ends[0]
			}
			if len(ends) > 1 {
				out = ends[1]
			}
			at := d.beadPlace(s, in, out)
			if !insideByWinding(c.rings, at) {
				t.Errorf("%s with %d ends: the number stands outside, at %v", c.name, len(ends), at)
			}
		}
	}
}

func ref(s decompose.Spot) *decompose.Spot { return &s }

// insideByWinding adds up angles, which is another way than the program's.
func insideByWinding(rings [][]decompose.Spot, p decompose.Spot) bool {
	turns := 0.0
	for _, ring := range rings {
		for i := range ring {
			a, b := ring[i], ring[(i+1)%len(ring)]
			ax, ay, bx, by := float64(a.X-p.X), float64(a.Y-p.Y), float64(b.X-p.X), float64(b.Y-p.Y)
			turns += math.Atan2(ax*by-ay*bx, ax*bx+ay*by) / (2 * math.Pi)
		}
	}
	return math.Abs(math.Round(turns)) == 1
}

func TestBarLength(t *testing.T) {
	for _, c := range []struct{ most, step, want float64 }{
		{99, 1, 50}, {100, 1, 100}, {19, 1, 10}, {21, 1, 20}, {0.7, 0.25, 0.5}, {0.1, 0.25, 0.25}, {0, 0.5, 0.5}, {math.NaN(), 1, 1},
	} {
		if got := barLength(c.most, c.step); math.Abs(got-c.want) > 1e-9 {
			t.Errorf("at most %g: %g, want %g", c.most, got, c.want)
		}
	}
}

func TestPageWords(t *testing.T) {
	m := &pageMaker{r: &Report{Rules: &decompose.Rules{Unit: "um", UnitDBU: 1000}}}
	if got := m.placed("mirrored, at (1500, -250)"); got != "mirrored, at 1.5, -0.25" {
		t.Errorf("placed: %q", got)
	}
	if got := m.placed("somewhere"); got != "somewhere" {
		t.Errorf("placed: %q", got)
	}
	for sq, want := range map[float64]string{400: "0.02 um", 2e6: "≈ 1.41 um", 0: "0 um"} {
		if got := strings.ReplaceAll(m.distance(sq), noBreak, " "); got != want {
			t.Errorf("the root of %g is %q, want %q", sq, got, want)
		}
	}
	if got := m.box(decompose.Box{X1: -1, Y1: 2000, X2: 3, Y2: 4000}); got != "-0.0005, 1, 0.0015, 2" {
		t.Errorf("box: %q", got)
	}
	if got := anchorID(`a b"`); got != "a_20b_22" {
		t.Errorf("anchorID: %q", got)
	}
}

func BenchmarkPage(b *testing.B) {
	r := sampleWithLayers()
	r.Result.Layers[0].Drawing = &decompose.Drawing{Maps: []decompose.TileMap{tiles("chip", 44)}, Pictures: map[int]*decompose.Picture{0: picture(5, 60)}}
	b.ReportAllocs()
	for b.Loop() {
		var out bytes.Buffer
		if err := WritePage(&out, r); err != nil {
			b.Fatal(err)
		}
	}
}
