package survey

import (
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"io"

	"maskpair/gds"
)

// This file goes over the records once. It knows as much of the grammar as counting needs; a stream whose elements do not
// begin and end in turn, or whose counted records have the wrong size, is refused with the place.

// Scan reads a stream to its end and gives its survey. progress, where not nil, is told from time to time how many bytes were
// read. Faults of the stream are of type *gds.SyntaxError, loops of references of type *decompose.InputError; errors of r, and
// of ctx, come as they are.
func Scan(ctx context.Context, r io.Reader, progress func(bytes int64)) (*Survey, error) {
	watched := &watchedReader{ctx: ctx, r: r, progress: progress}
	if err := checkStart(watched); err != nil {
		return nil, err
	}
	x := newScan(watched)
	for x.s.Scan() {
		rec := x.s.Record()
		var err error
		if x.state == element {
			err = x.elementRecord(&rec)
		} else {
			err = x.record(&rec)
		}
		if err != nil {
			return nil, err
		}
	}
	if err := x.s.Err(); err != nil {
		var syntax *gds.SyntaxError
		if errors.As(err, &syntax) && syntax.Structure == "" && x.named() {
			syntax.Structure = x.names[x.structure.name]
		}
		return nil, err
	}
	return x.finish()
}

// watchedReader stops when the context ends, and counts.
type watchedReader struct {
	ctx      context.Context
	r        io.Reader
	start    []byte // read, and not yet given
	read     int64
	progress func(int64)
}

func (w *watchedReader) Read(p []byte) (int, error) {
	if len(w.start) > 0 {
		n := copy(p, w.start)
		w.start = w.start[n:]
		return n, nil
	}
	if err := w.ctx.Err(); err != nil {
		return 0, err
	}
	n, err := w.r.Read(p)
	w.read += int64(n)
	if w.progress != nil {
		w.progress(w.read)
	}
	return n, err
}

// checkStart looks at the first record's head: what does not begin like a stream is none, whatever its lengths may say.
func checkStart(w *watchedReader) error {
	head := []byte{0, 6, byte(gds.HEADER), byte(gds.Int2)}
	start := make([]byte, len(head))
	n, err := io.ReadFull(w, start)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		return err
	}
	if n > 0 && !bytes.Equal(start[:n], head[:n]) {
		return &gds.SyntaxError{Err: fmt.Errorf("%w: it does not begin with a HEADER record", gds.ErrNotStream)}
	}
	w.start = start[:n]
	return nil
}

// state is where in the grammar the scan is.
type state uint8

const (
	outside   state = iota // of structures
	beginning              // behind BGNSTR
	inside                 // a structure, between elements
	element
)

// scan is the state of the pass.
type scan struct {
	s     *gds.Scanner
	state state
	units bool // UNITS was read
	out   *Survey

	ids     map[string]int32 // number of each name
	names   []string         // by number
	defined []int32          // by number: index into structures, or -1
	lastRef int32            // number of the name that was placed last

	structures []structure
	structure  structure // the one at hand
	elements   int64     // of it
	refs       []reference
	tallies    []tally // of all structures
	widths     []widthTally

	layers   map[gds.LayerType]int32
	layer    gds.LayerType // met last
	layerID  int32         // its number
	counters []counter     // by layer number, of the structure at hand
	touched  []int32       // layers with counts in counters

	el figure
}

// structure is what is kept of a structure.
type structure struct {
	name                 int32
	begin                int64 // offset
	firstRef, endRef     int
	firstTally, endTally int
	firstWidth, endWidth int
}

// reference is an SREF, an AREF, or several in a row with one target.
type reference struct {
	target int32 // number of a name
	times  uint64
}

// tally is what a structure draws on one layer.
type tally struct {
	layer                 int32
	boundaries, paths     int64
	manhattan, rectangles int64
	texts, boxes, nodes   int64
	smallest              uint32 // width; 0: none
	widthsCut             bool
	some                  bool
}

func newScan(r io.Reader) *scan {
	return &scan{s: gds.NewScanner(r), out: &Survey{}, ids: map[string]int32{}, lastRef: -1,
		layers: map[gds.LayerType]int32{}, layerID: -1}
}

// record takes a record that stands in no element.
func (x *scan) record(rec *gds.Record) error {
	switch rec.Kind {
	case gds.BOUNDARY, gds.PATH, gds.SREF, gds.AREF, gds.TEXT, gds.BOX, gds.NODE:
		if x.state != inside {
			return x.fault(rec, "%w: %v stands outside a structure", gds.ErrOrder, rec.Kind)
		}
		x.state = element
		x.elements++
		x.el = figure{kind: rec.Kind, times: 1}
	case gds.BGNSTR:
		if x.state != outside {
			return x.fault(rec, "%w: BGNSTR stands in a structure, which has no ENDSTR yet", gds.ErrOrder)
		}
		if !x.units {
			return x.fault(rec, "%w: UNITS is missing before BGNSTR", gds.ErrMissing)
		}
		x.state = beginning
		x.elements = 0
		x.structure = structure{begin: rec.Offset, firstRef: len(x.refs), firstTally: len(x.tallies), firstWidth: len(x.widths)}
	case gds.STRNAME:
		if x.state != beginning {
			return x.fault(rec, "%w: STRNAME must follow BGNSTR", gds.ErrOrder)
		}
		return x.begin(rec)
	case gds.ENDSTR:
		if x.state != inside {
			return x.fault(rec, "%w: ENDSTR stands outside a structure", gds.ErrOrder)
		}
		x.endStructure()
	case gds.UNITS:
		return x.readUnits(rec)
	case gds.ENDLIB:
		if x.state != outside {
			return x.fault(rec, "%w: ENDSTR is missing before ENDLIB", gds.ErrMissing)
		}
		if !x.units {
			return x.fault(rec, "%w: UNITS is missing before ENDLIB", gds.ErrMissing)
		}
		x.out.Bytes = rec.Offset + 4
	case gds.ENDEL:
		return x.fault(rec, "%w: ENDEL stands outside an element", gds.ErrOrder)
	}
	return nil
}

// named tells whether the name of the structure at hand is known.
func (x *scan) named() bool { return x.state == inside || x.state == element }

// fault places what is wrong with a record.
func (x *scan) fault(rec *gds.Record, form string, args ...any) error {
	e := &gds.SyntaxError{Offset: rec.Offset, Record: rec.Kind, Err: fmt.Errorf(form, args...)}
	if x.named() {
		e.Structure = x.names[x.structure.name]
	}
	if x.state == element {
		e.Element, e.Kind = x.elements, x.el.kind
	}
	return e
}

// sized tells whether a record has the data type and the length that the manual fixes for it; what is wrong is a fault.
func (x *scan) sized(rec *gds.Record) error {
	if want := rec.Kind.Type(); rec.Type != want {
		return x.fault(rec, "%w: %v holds data of type %d, not %d", gds.ErrType, rec.Kind, rec.Type, want)
	}
	if want, fixed := rec.Kind.Length(); fixed && len(rec.Data) != want {
		return x.fault(rec, "%w: %v length %d is not %d", gds.ErrLength, rec.Kind, len(rec.Data), want)
	}
	return nil
}

func (x *scan) readUnits(rec *gds.Record) error {
	if err := x.sized(rec); err != nil {
		return err
	}
	x.out.UserUnit, x.out.DBU = gds.DecodeReal8(rec.Data), gds.DecodeReal8(rec.Data[8:])
	if !(x.out.UserUnit > 0) || !(x.out.DBU > 0) {
		return x.fault(rec, "%w: UNITS says %v and %v: both must be above zero", gds.ErrValue, x.out.UserUnit, x.out.DBU)
	}
	x.units = true
	return nil
}

// begin reads the name of a structure.
func (x *scan) begin(rec *gds.Record) error {
	if err := x.sized(rec); err != nil {
		return err
	}
	name := bytes.TrimRight(rec.Data, "\x00")
	if len(name) == 0 {
		return x.fault(rec, "%w: STRNAME is empty", gds.ErrValue)
	}
	x.structure.name = x.number(name)
	x.state = inside
	if other := x.defined[x.structure.name]; other >= 0 {
		return x.fault(rec, "%w: at byte %d and at byte %d", gds.ErrTwice, x.structures[other].begin, x.structure.begin)
	}
	return nil
}

// number gives the number of a name.
func (x *scan) number(name []byte) int32 {
	if id, ok := x.ids[string(name)]; ok {
		return id
	}
	id := int32(len(x.names))
	x.names = append(x.names, string(name))
	x.ids[x.names[id]] = id
	x.defined = append(x.defined, -1)
	return id
}

// endStructure keeps the counts of the structure that ENDSTR ends.
func (x *scan) endStructure() {
	for _, id := range x.touched {
		c := &x.counters[id]
		t := c.tally
		t.layer = id
		x.tallies = append(x.tallies, t)
		x.widths = c.widths.drain(id, x.widths)
		c.tally = tally{}
	}
	x.touched = x.touched[:0]
	x.structure.endRef, x.structure.endTally, x.structure.endWidth = len(x.refs), len(x.tallies), len(x.widths)
	x.defined[x.structure.name] = int32(len(x.structures))
	x.structures = append(x.structures, x.structure)
	x.state = outside
}

// counter is what the structure at hand draws on a layer.
type counter struct {
	tally
	widths widthTable
}

// count gives the counter of the layer of the element at hand.
func (x *scan) count() *counter {
	if x.layerID < 0 || x.layer != x.el.layer {
		x.layer = x.el.layer
		id, ok := x.layers[x.layer]
		if !ok {
			id = int32(len(x.layers))
			x.layers[x.layer] = id
			x.counters = append(x.counters, counter{})
		}
		x.layerID = id
	}
	c := &x.counters[x.layerID]
	if !c.some {
		c.some = true
		x.touched = append(x.touched, x.layerID)
	}
	return c
}

// uint16At and int32At read the numbers of a record.
func uint16At(b []byte) uint16 { return binary.BigEndian.Uint16(b) }
func int32At(b []byte) int32   { return int32(binary.BigEndian.Uint32(b)) }
