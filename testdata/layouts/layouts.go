// Package layouts draws invented layouts of any size for tests and benchmarks.
//
// The idea: a layout is drawn by one function from a size and a seed, through gds.Writer into any io.Writer, and is never held.
// Whoever draws it again gets the same bytes. It is counted while it is drawn, so that a test has something to hold a program
// against that the program did not say itself: figures always, shapes and near pairs where the drawing follows a rule by which
// they can be counted. A slow count in the tests agrees with these numbers at small sizes.
//
// All layouts are drawn on one layer in database units of 1 nm. Nothing in them is taken from a real design.
package layouts

import (
	"fmt"
	"io"
	"math/rand/v2"
	"strings"

	"maskpair/gds"
)

// The layers that layouts draw on.
const (
	Layer        = 10 // of all that is drawn; masks are on its datatypes 1 and 2
	markA        = 11 // datatypes of markers
	markB        = 12
	bystander    = 20 // first of the layers that no deck names
	bystanders   = 12 // how many there are
	narrow       = 20 // width of a wire, side of a contact
	trackPitch   = 40 // tracks of wires: a gap of 20 to the next
	contactPitch = 46 // arrays of contacts: a gap of 26; the diagonal one is 36.8
	plainSpacing = 36
)

// Unknown stands in Counts for a number that no rule gives.
const Unknown = -1

// Counts say what a layout holds.
type Counts struct {
	Figures   int64 // drawn, flat
	Elements  int64 // figures as they stand in the structures
	Tops      int64 // structures that nothing places
	Shapes    int64 // or Unknown
	NearPairs int64 // under the spacing of the layout, or Unknown
	Bytes     int64 // of the stream
}

// Layout is an invented layout, ready to be drawn.
type Layout struct {
	Name    string
	Spacing int32 // same-mask spacing that suits it, database units
	markers bool
	figures int64
	seed    uint64
	draw    func(s *sheet, figures int64)
}

// New gives a layout by its name in Catalogue, of about so many flat figures.
func New(name string, figures int64, seed uint64) (*Layout, error) {
	for _, e := range Catalogue() {
		if e.Name != name {
			continue
		}
		if figures < 1 {
			return nil, fmt.Errorf("layout %s of %d figures: ask for at least 1", name, figures)
		}
		l := &Layout{Name: name, Spacing: plainSpacing, markers: e.markers, figures: figures, seed: seed, draw: e.draw}
		if e.spacing != 0 {
			l.Spacing = e.spacing
		}
		return l, nil
	}
	return nil, fmt.Errorf("no layout is called %q", name)
}

// Write draws the layout as a stream. The error is that of dst.
func (l *Layout) Write(dst io.Writer) (Counts, error) {
	bytes := &meter{w: dst}
	s := newSheet(gds.NewWriter(bytes, gds.WriterOptions{LibName: "INVENTED"}), rand.New(rand.NewPCG(l.seed, uint64(len(l.Name)))))
	l.draw(s, l.figures)
	err := s.w.Close()
	c := s.total()
	c.Bytes = bytes.n
	return c, err
}

// Deck gives the rule deck for the layout.
func (l *Layout) Deck() string {
	var b strings.Builder
	fmt.Fprintf(&b, "unit = \"nm\"\n\n[[layer]]\nname = \"wire\"\ndrawn = \"%d/0\"\nmask_a = \"%d/1\"\nmask_b = \"%d/2\"\nsame_mask_spacing = %d\n",
		Layer, Layer, Layer, l.Spacing)
	if l.markers {
		fmt.Fprintf(&b, "anchor_a = \"%d/%d\"\nanchor_b = \"%d/%d\"\n", Layer, markA, Layer, markB)
	}
	return b.String()
}

// meter counts what passes.
type meter struct {
	w io.Writer
	n int64
}

func (m *meter) Write(p []byte) (int, error) {
	n, err := m.w.Write(p)
	m.n += int64(n)
	return n, err
}
