package picture

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"strings"
	"testing"

	"maskpair/gds"
)

func layers() Layers {
	return Layers{
		Figures: map[gds.LayerType]Role{{Layer: 1}: Drawn, {Layer: 1, Type: 1}: MaskA, {Layer: 1, Type: 2}: MaskB, {Layer: 9}: Mark},
		Label:   gds.LayerType{Layer: 5},
	}
}

// sample is a cell of two wires, placed upright and turned, with a mark and a label.
func sample(t *testing.T, more func(w *gds.Writer)) []byte {
	t.Helper()
	var b bytes.Buffer
	w := gds.NewWriter(&b, gds.WriterOptions{})
	w.BeginStructure("cell")
	w.Rectangle(gds.LayerType{Layer: 1, Type: 1}, gds.Rect{X1: 0, Y1: 0, X2: 40, Y2: 20})
	w.Boundary(gds.LayerType{Layer: 1, Type: 2}, []gds.Point{{X: 0, Y: 40}, {X: 40, Y: 40}, {X: 40, Y: 60}, {X: 0, Y: 60}})
	w.EndStructure()
	w.BeginStructure("top")
	w.ARef("cell", gds.Strans{}, 2, 1, gds.Point{}, gds.Point{X: 120}, gds.Point{Y: 100})
	w.SRef("cell", gds.Strans{Angle: 90}, gds.Point{X: 180, Y: 0})
	w.Rectangle(gds.LayerType{Layer: 9}, gds.Rect{X1: 40, Y1: 0, X2: 60, Y2: 20})
	w.Rectangle(gds.LayerType{Layer: 1}, gds.Rect{X1: 0, Y1: 80, X2: 20, Y2: 100})
	w.Text(gds.LayerType{Layer: 5}, gds.Point{X: 40, Y: 80}, "a < b")
	if more != nil {
		more(w)
	}
	w.EndStructure()
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func read(t *testing.T) *Scene {
	t.Helper()
	s, err := Read(bytes.NewReader(sample(t, nil)), layers())
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// The expectation is drawn by hand on columns and lines of 20: cells at 0 and 60, the turned one with A from x 160 to 180 and B
// from x 120 to 140, both from y 0 to 40; the label begins above x 40.
func TestLetters(t *testing.T) {
	var b strings.Builder
	if err := read(t).WriteLetters(&b, 20, 20); err != nil {
		t.Fatal(err)
	}
	want := strings.Join([]string{
		"",
		"  # a < b",
		"",
		"  BB BB",
		"        B A",
		"  AA AA B A",
		"",
	}, "\n")
	if b.String() != want {
		t.Errorf("the picture is\n%s, want\n%s", b.String(), want)
	}
}

// elements counts the elements of an SVG text, which must be well formed.
func elements(t *testing.T, text string) map[string]int {
	t.Helper()
	found := map[string]int{}
	d := xml.NewDecoder(strings.NewReader(text))
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return found
		}
		if err != nil {
			t.Fatalf("%v in\n%s", err, text)
		}
		if e, ok := token.(xml.StartElement); ok {
			found[e.Name.Local]++
		}
	}
}

func TestSVG(t *testing.T) {
	onlyA := MaskA
	for _, c := range []struct {
		only          *Role
		slanted, mark int
	}{{nil, 1, 1}, {&onlyA, 1, 0}} {
		var b strings.Builder
		if err := read(t).WriteSVG(&b, SVG{Title: `masks "A" & B`, Unit: 20, Scale: 1, Only: c.only}); err != nil {
			t.Fatal(err)
		}
		found := elements(t, b.String())
		if found["path"] != 7 || found["text"] != 1 || found["ellipse"] != c.mark || found["pattern"] != 2 {
			t.Errorf("the picture has %v", found)
		}
		if n := strings.Count(b.String(), `fill="url(#a)"`); n != c.slanted {
			t.Errorf("%d groups are slanted", n)
		}
		if n := strings.Count(b.String(), `fill="url(#b)"`); (n == 1) != (c.only == nil) {
			t.Errorf("%d groups are level", n)
		}
	}
}

func TestPart(t *testing.T) {
	var b strings.Builder
	if err := read(t).WriteSVG(&b, SVG{Unit: 1, Scale: 1, Part: &Box{0, 0, 50, 70}}); err != nil { // the first cell and half of the mark
		t.Fatal(err)
	}
	if found := elements(t, b.String()); found["path"] != 2 || found["ellipse"] != 1 || found["text"] != 0 {
		t.Errorf("the part has %v", found)
	}
	if want := `viewBox="-3 -73 56 76"`; !strings.Contains(b.String(), want) {
		t.Errorf("the picture has not %s:\n%s", want, b.String())
	}
}

func TestWhatCannotBeShown(t *testing.T) {
	for name, more := range map[string]func(w *gds.Writer){
		"PATH": func(w *gds.Writer) {
			w.Path(gds.LayerType{Layer: 1}, gds.PathStyle{Width: 10}, []gds.Point{{}, {X: 100}})
		},
		"magnified": func(w *gds.Writer) { w.SRef("cell", gds.Strans{Magnification: 2}, gds.Point{}) },
	} {
		if _, err := Read(bytes.NewReader(sample(t, more)), layers()); err == nil || !strings.Contains(err.Error(), name) {
			t.Errorf("%s: the error is %v", name, err)
		}
	}
	if _, err := Read(strings.NewReader("no stream"), layers()); err == nil {
		t.Errorf("what is no stream was read")
	}
}

func TestMissingStructuresAreLeftOut(t *testing.T) {
	stream := sample(t, func(w *gds.Writer) { w.SRef("elsewhere", gds.Strans{}, gds.Point{}) })
	s, err := Read(bytes.NewReader(stream), layers())
	if err != nil {
		t.Fatal(err)
	}
	if n := len(s.Figures[MaskA]); n != 3 {
		t.Errorf("%d figures on A, want 3", n)
	}
}
