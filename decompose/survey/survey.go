package survey

import (
	"math"

	"maskpair/gds"
)

// Most is where flat counts stop: it stands for itself and everything above.
const Most = math.MaxUint64

// Survey is what a stream holds.
type Survey struct {
	UserUnit      float64 // size of a database unit in user units
	DBU           float64 // size of a database unit in metres
	Bytes         int64   // of the unpacked stream, up to ENDLIB included
	Structures    int
	Tops          []string // structures that nothing places, in file order
	Depth         int      // levels of structures, a top alone being 1
	References    int64    // SREF elements, as drawn
	Arrays        int64    // AREF elements, as drawn
	OddReferences int64    // of both: with a magnification, or an angle that is no multiple of 90 degrees
	Placements    uint64   // structures placed under the tops, flat; the tops themselves do not count
	Missing       []string // structures that are placed but not in the stream, by first mention
	Layers        []Layer  // by layer, then datatype
}

// Layer is what a stream holds on one layer and datatype (for texts, boxes and nodes: texttype, boxtype, nodetype).
type Layer struct {
	Layer             gds.LayerType
	Boundaries, Paths int64  // as drawn
	Flat              uint64 // boundaries and paths, flat
	Manhattan         uint64 // of Flat: figures whose sides are all axis-parallel where they are drawn
	Rectangles        uint64 // of Flat: boundaries that are one axis-parallel rectangle
	Smallest          int64  // least width in database units; 0: nothing on the layer has a width
	Widths            []Width
	WidthsCut         bool  // a structure has so many different widths here that rare ones were not told apart
	Texts             int64 // as drawn
	Boxes             int64 // BOX elements, as drawn: no figures
	Nodes             int64 // NODE elements, as drawn: no figures
}

// Width is a width and how often it occurs: the short side of a rectangle, or the width of a path.
type Width struct {
	Width int64  // database units
	Flat  uint64 // figures that have it
}

// widthsKept is how many of the commonest widths a Layer tells.
const widthsKept = 5

// Figures gives the boundaries and paths as drawn.
func (l *Layer) Figures() int64 { return l.Boundaries + l.Paths }

// add is a+b, or Most.
func add(a, b uint64) uint64 {
	if a+b < a {
		return Most
	}
	return a + b
}

// multiply is a*b, or Most.
func multiply(a, b uint64) uint64 {
	if a != 0 && b > Most/a {
		return Most
	}
	return a * b
}
