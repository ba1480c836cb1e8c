package layouts

import (
	"bytes"
	"io"
	"strings"
	"testing"

	"maskpair/decompose"
	"maskpair/gds"
)

func draw(t *testing.T, name string, figures int64, seed uint64) ([]byte, Counts, *Layout) {
	t.Helper()
	l, err := New(name, figures, seed)
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	c, err := l.Write(&b)
	if err != nil {
		t.Fatal(err)
	}
	return b.Bytes(), c, l
}

func TestCountsAgreeWithTheSlowCount(t *testing.T) {
	for _, e := range Catalogue() {
		for _, n := range []int64{1, 40, 1200} {
			if e.Name == "combs" {
				n *= 2 * combTeeth / 1000
			}
			stream, c, l := draw(t, e.Name, n, 7)
			var figures, shapes, pairs int64
			tops := flatten(t, stream)
			for _, top := range tops {
				figures += int64(len(top))
				s, p := count(t, top, float64(l.Spacing))
				shapes += s
				pairs += p
			}
			if c.Shapes == Unknown {
				shapes, pairs = Unknown, Unknown
			}
			want := Counts{Figures: figures, Elements: c.Elements, Tops: int64(len(tops)), Shapes: shapes, NearPairs: pairs, Bytes: int64(len(stream))}
			if c != want {
				t.Errorf("%s of %d: counted %+v while drawn, want %+v", e.Name, n, c, want)
			}
		}
	}
}

// A layout has about the figures that were asked for: within a third, once there are enough.
func TestSizes(t *testing.T) {
	for _, e := range Catalogue() {
		if e.Name == "combs" {
			continue // figures are far fewer than teeth
		}
		for _, n := range []int64{3000, 100_000} {
			l, err := New(e.Name, n, 1)
			if err != nil {
				t.Fatal(err)
			}
			if e.Name == "sparse" && n > 3000 {
				continue // a file of 600 MB
			}
			c, err := l.Write(io.Discard)
			if err != nil {
				t.Fatal(err)
			}
			if 3*c.Figures < 2*n || 3*c.Figures > 4*n {
				t.Errorf("%s of %d has %d figures", e.Name, n, c.Figures)
			}
		}
	}
}

func TestSameSeedSameBytes(t *testing.T) {
	for _, e := range Catalogue() {
		a, _, _ := draw(t, e.Name, 2000, 3)
		b, _, _ := draw(t, e.Name, 2000, 3)
		if !bytes.Equal(a, b) {
			t.Errorf("%s: two drawings differ", e.Name)
		}
	}
	a, _, _ := draw(t, "flat", 2000, 3)
	b, _, _ := draw(t, "flat", 2000, 4)
	if bytes.Equal(a, b) {
		t.Errorf("flat: two seeds give the same drawing")
	}
}

func TestDecksAreRight(t *testing.T) {
	for _, e := range Catalogue() {
		l, err := New(e.Name, 10, 1)
		if err != nil {
			t.Fatal(err)
		}
		deck, err := decompose.ParseDeck("deck.toml", []byte(l.Deck()))
		if err != nil {
			t.Fatal(err)
		}
		rules, err := deck.Resolve(1e-9)
		if err != nil {
			t.Fatal(err)
		}
		if got := rules.Layers[0].Spacing; got != int64(l.Spacing) {
			t.Errorf("%s: the deck says %d, the layout %d", e.Name, got, l.Spacing)
		}
	}
}

func TestSparseIsOnePercent(t *testing.T) {
	stream, c, _ := draw(t, "sparse", 500, 1)
	var elements, ours int64
	sc := gds.NewScanner(bytes.NewReader(stream))
	for sc.Scan() {
		switch r := sc.Record(); r.Kind {
		case gds.ENDEL:
			elements++
		case gds.LAYER:
			if string(r.Data) == string([]byte{0, Layer}) {
				ours++
			}
		}
	}
	if err := sc.Err(); err != nil {
		t.Fatal(err)
	}
	if ours != c.Figures || elements != 100*ours {
		t.Errorf("%d of %d elements are drawn; %d figures were counted", ours, elements, c.Figures)
	}
}

func TestCellsAreDrawnTwiceAndInEveryOrientation(t *testing.T) {
	stream, _, _ := draw(t, "cells", 200_000, 1)
	lib, err := gds.Index(bytes.NewReader(stream), -1, gds.Interest{Figures: map[gds.LayerType]uint8{wire(): 1}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	turns, arrays := map[uint8]bool{}, 0
	for i := range lib.Refs {
		turns[lib.Refs[i].Turn] = true
		if lib.Refs[i].Array {
			arrays++
		}
	}
	if len(turns) != 5 || arrays < 10 { // four of a row, and blocks turned by 90 degrees
		t.Errorf("%d orientations and %d arrays", len(turns), arrays)
	}
	figures := flatten(t, stream)[0]
	distinct := map[gds.Rect]bool{}
	for _, f := range figures {
		distinct[f.box] = true
	}
	if twice := len(figures) - len(distinct); 5*twice < len(figures) {
		t.Errorf("%d of %d figures are drawn twice, want at least a fifth", twice, len(figures))
	}
}

func TestCombsHaveRecordsOfFullLength(t *testing.T) {
	stream, _, _ := draw(t, "combs", 1, 1)
	sc := gds.NewScanner(bytes.NewReader(stream))
	longest := 0
	for sc.Scan() {
		longest = max(longest, len(sc.Record().Data))
	}
	if longest != 8191*8 { // the most points of 8 bytes that a record of at most 65,535 bytes holds
		t.Errorf("the longest record has %d bytes of data", longest)
	}
}

func TestUnknownLayouts(t *testing.T) {
	if _, err := New("none", 10, 1); err == nil || !strings.Contains(err.Error(), "none") {
		t.Errorf("the error is %v", err)
	}
	if _, err := New("flat", 0, 1); err == nil {
		t.Errorf("a layout of no figures was drawn")
	}
}
