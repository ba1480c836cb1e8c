package gds

import (
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"io"

	"maskpair/gds/arena"
)

// This file is pass 2: it copies a stream and changes what a plan says. The stream is read through one window of about a
// mebibyte, in order; a structure of which several copies are written is read again for each. What is not changed goes
// from the window to the output in runs as long as can be. Whatever is read is checked against the sums of the index.

// CopyStream copies the stream src, whose index is lib, to dst, and changes what plan says. want is the Interest that lib
// was made with. progress, where not nil, is told from time to time how far in src the copy has come.
//
// The error is ErrChanged, with the place, where src is not what was indexed; dst is then of no use. It is one of src or
// dst where these fail, and says what is wrong with a plan that does not fit lib. Memory does not grow with the stream,
// only with its longest element.
func CopyStream(dst io.Writer, src io.ReaderAt, lib *Library, want Interest, plan Plan, progress func(bytes int64)) error {
	return newCopier(dst, src, lib, want, plan, progress, bufferSize).run()
}

// newCopier makes a copier with a window of at most the given size.
func newCopier(dst io.Writer, src io.ReaderAt, lib *Library, want Interest, plan Plan, progress func(bytes int64), window int) *copier {
	in, out := int(max(16, min(int64(window), lib.Bytes))), int(min(bufferSize, lib.Bytes)+1<<16)
	c := &copier{src: src, lib: lib, plan: plan, table: newClasses(want.Figures), progress: progress, room: arena.New[byte](in + 3*out)}
	c.window = c.room.Data[:in:in]
	buffer := func(i int) []byte { return c.room.Data[in+i*out : in+i*out : in+(i+1)*out] }
	c.out, c.dst = buffer(0), newBehind(dst, buffer(1), buffer(2))
	return c
}

// copier is the state of pass 2.
type copier struct {
	dst      *behind
	src      io.ReaderAt
	lib      *Library
	plan     Plan
	table    *classes
	progress func(bytes int64)

	room   *arena.Array[byte] // of window and buffers
	window []byte
	base   int64 // offset of window[0] in src
	filled int   // window[:filled] is read
	out    []byte

	// The part of src that is being copied: a structure, or what stands before the first or behind the last.
	what   string // its name for errors
	limit  int64  // its end
	sum    uint32 // CRC-32C of its bytes before window[summed]
	summed int
	pos    int // next byte in window
	run0   int // window[run0:pos] is still to be written, as it is

	el element
}

// run copies the whole stream.
func (c *copier) run() error {
	err := c.stream()
	if err == nil {
		err = c.flush()
	}
	if late := c.dst.close(); err == nil {
		err = late
	}
	c.room.Free()
	return err
}

// stream copies part by part.
func (c *copier) stream() error {
	lib := c.lib
	first := lib.End
	if len(lib.Structures) > 0 {
		first = lib.Structures[0].Begin
	}
	if err := c.raw("head of the library", 0, first, lib.headSum); err != nil {
		return err
	}
	for i := range lib.Structures {
		st := &lib.Structures[i]
		var copies []Copy
		if c.plan.Copies != nil {
			copies = c.plan.Copies(i)
		}
		what := "structure " + Printable(st.Name)
		if len(copies) == 0 {
			if err := c.raw(what, st.Begin, st.End, st.Sum); err != nil {
				return err
			}
		}
		for k := range copies {
			var err error
			if copies[k].untouched() {
				err = c.raw(what, st.Begin, st.End, st.Sum)
			} else {
				err = c.rewrite(what, st, &copies[k])
			}
			if err != nil {
				return err
			}
		}
	}
	if err := c.raw("end of the library", lib.End, lib.Bytes, lib.tailSum); err != nil {
		return err
	}
	// Nothing may have been added meanwhile.
	if n, err := c.src.ReadAt(c.window[:1], lib.Bytes); n > 0 {
		return fmt.Errorf("end of the library: %w: it has grown", ErrChanged)
	} else if err != nil && err != io.EOF {
		return err
	}
	return nil
}

// begin makes [from, to) of src the part that is being copied.
func (c *copier) begin(what string, from, to int64) {
	c.what, c.limit, c.sum = what, to, 0
	if from < c.base || from > c.base+int64(c.filled) {
		c.base, c.filled = from, 0
	}
	c.pos = int(from - c.base)
	c.summed, c.run0 = c.pos, c.pos
}

// rest gives what the window holds of the part from pos on.
func (c *copier) rest() []byte {
	return c.window[c.pos:min(int64(c.filled), c.limit-c.base)]
}

// more reads on; all from pos is kept, and what stands before it is written. It is ErrChanged where the part ends before.
func (c *copier) more() error {
	if c.base+int64(c.filled) >= c.limit {
		return c.changed()
	}
	if err := c.emit(c.pos); err != nil {
		return err
	}
	c.sum = crc32.Update(c.sum, castagnoli, c.window[c.summed:c.pos])
	kept := c.filled - c.pos
	if c.pos > 0 {
		copy(c.window, c.window[c.pos:c.filled])
	} else if kept == len(c.window) {
		grown := make([]byte, 2*len(c.window))
		copy(grown, c.window)
		c.window = grown
	}
	c.base += int64(c.pos)
	c.filled = kept
	c.pos, c.summed, c.run0 = 0, 0, 0

	want := int(min(int64(len(c.window)-kept), c.lib.Bytes-c.base-int64(kept)))
	n, err := c.src.ReadAt(c.window[kept:kept+want], c.base+int64(kept))
	c.filled += n
	if n < want {
		if err == nil || err == io.EOF || err == io.ErrUnexpectedEOF {
			return c.changed()
		}
		return err
	}
	if c.progress != nil {
		c.progress(c.base + int64(c.filled))
	}
	return nil
}

// changed is the error of a part that is not what was indexed.
func (c *copier) changed() error { return fmt.Errorf("%s: %w", c.what, ErrChanged) }

// finish writes what is left of the part, whose end pos has reached, and checks its sum.
func (c *copier) finish(sum uint32) error {
	if err := c.emit(c.pos); err != nil {
		return err
	}
	c.sum = crc32.Update(c.sum, castagnoli, c.window[c.summed:c.pos])
	c.summed = c.pos
	if c.base+int64(c.pos) != c.limit || c.sum != sum {
		return c.changed()
	}
	return nil
}

// raw copies a part as it is.
func (c *copier) raw(what string, from, to int64, sum uint32) error {
	c.begin(what, from, to)
	for {
		c.pos += len(c.rest())
		if c.base+int64(c.pos) == c.limit {
			return c.finish(sum)
		}
		if err := c.more(); err != nil {
			return err
		}
	}
}

// emit writes the run up to the given place in the window.
func (c *copier) emit(to int) error {
	run := c.window[c.run0:to]
	c.run0 = to
	for {
		if err := c.spill(); err != nil || len(run) == 0 {
			return err
		}
		n := min(len(run), bufferSize-len(c.out))
		c.out = append(c.out, run[:n]...)
		run = run[n:]
	}
}

// spill hands the buffer over once it is full.
func (c *copier) spill() error {
	if len(c.out) < bufferSize {
		return nil
	}
	return c.flush()
}

// flush hands the buffer over.
func (c *copier) flush() (err error) {
	c.out, err = c.dst.put(c.out)
	return err
}

// rewriter is the state of one copy of one structure.
type rewriter struct {
	*copier
	cp     *Copy
	figure uint32 // ordinal of the next figure
	ref    int32  // of the next reference
	refs   []RefChange
}

// rewrite writes one copy of a structure.
func (c *copier) rewrite(what string, st *Structure, cp *Copy) error {
	if err := c.check(st, cp); err != nil {
		return fmt.Errorf("plan for %s: %w", what, err)
	}
	w := &rewriter{copier: c, cp: cp, refs: cp.Refs}
	c.begin(what, st.Begin, st.End)
	if err := w.name(); err != nil {
		return err
	}
	for {
		if err := w.plain(); err != nil {
			return err
		}
		b := c.rest()
		if len(b) < 4 {
			if err := c.more(); err != nil {
				return err
			}
			continue
		}
		head := binary.BigEndian.Uint32(b)
		length, kind := int(head>>16), Kind(head>>8)
		if checkRecord(head) != nil {
			return c.changed()
		}
		if kind == ENDSTR {
			break
		}
		if elementKinds&kind.bit() == 0 {
			if len(b) < length {
				if err := c.more(); err != nil {
					return err
				}
				continue
			}
			c.pos += length
			continue
		}
		size, err := c.el.parse(b)
		if err != nil {
			return c.changed()
		}
		if size == 0 {
			if err := c.more(); err != nil {
				return err
			}
			continue
		}
		if err := w.element(b[:size]); err != nil {
			return err
		}
	}
	if w.figure != st.EndFigure-st.FirstFigure || uint32(w.ref) != st.EndRef-st.FirstRef {
		return c.changed()
	}
	if len(cp.Tail) > 0 {
		if err := c.emit(c.pos); err != nil {
			return err
		}
		c.out = append(c.out, cp.Tail...)
	}
	c.pos += 4
	return c.finish(st.Sum)
}

// check says what of a copy does not fit its structure.
func (c *copier) check(st *Structure, cp *Copy) error {
	if len(cp.Name) > maxData {
		return fmt.Errorf("a name of %d bytes; a record holds at most %d", len(cp.Name), maxData)
	}
	if n := st.EndFigure - st.FirstFigure; cp.Figures != nil && uint32(len(cp.Figures)) != n {
		return fmt.Errorf("actions for %d figures; the structure has %d", len(cp.Figures), n)
	}
	for i, r := range cp.Refs {
		if r.Index < 0 || uint32(r.Index) >= st.EndRef-st.FirstRef || i > 0 && r.Index <= cp.Refs[i-1].Index {
			return fmt.Errorf("change of reference %d is out of order, or there is none", r.Index)
		}
		if len(r.Name) > maxData {
			return fmt.Errorf("a name of %d bytes; a record holds at most %d", len(r.Name), maxData)
		}
		for _, p := range r.Split {
			if len(p.Name) > maxData || p.Columns < 1 || p.Columns > 1<<16-1 || p.Rows < 1 || p.Rows > 1<<16-1 {
				return fmt.Errorf("a part of reference %d has %d columns and %d rows, or too long a name", r.Index, p.Columns, p.Rows)
			}
		}
	}
	return nil
}

// name passes over BGNSTR and STRNAME, and renames the structure.
func (w *rewriter) name() error {
	c := w.copier
	for {
		// BGNSTR takes 28 bytes; the index has seen that STRNAME follows.
		if b := c.rest(); len(b) >= 32 {
			length := int(binary.BigEndian.Uint16(b[28:]))
			if len(b) >= 28+length {
				if Kind(b[2]) != BGNSTR || Kind(b[30]) != STRNAME || length < 4 {
					return c.changed()
				}
				if w.cp.Name == "" {
					c.pos += 28 + length
					return nil
				}
				if err := c.emit(c.pos + 28); err != nil {
					return err
				}
				c.out, _ = appendText(c.out, STRNAME, w.cp.Name)
				c.pos += 28 + length
				c.run0 = c.pos
				return nil
			}
		}
		if err := c.more(); err != nil {
			return err
		}
	}
}

// action gives what becomes of the next figure.
func (w *rewriter) action() (Action, error) {
	if w.cp.Figures == nil {
		w.figure++
		return Action{}, nil
	}
	if int64(w.figure) >= int64(len(w.cp.Figures)) {
		return Action{}, w.changed()
	}
	i := w.cp.Figures[w.figure]
	if int(i) >= len(w.plan.Actions) {
		return Action{}, fmt.Errorf("plan for %s: figure %d: there is no action %d", w.what, w.figure, i)
	}
	w.figure++
	return w.plan.Actions[i], nil
}

// plain passes over plain boundaries, as many as the window holds, and re-layers them. It stops at what is none, and at
// figures that need more than a change of layer.
func (w *rewriter) plain() error {
	c := w.copier
	b := c.rest()
	for len(b) >= plainShortest {
		head, values := binary.BigEndian.Uint64(b), binary.BigEndian.Uint64(b[8:])
		xy := binary.BigEndian.Uint32(b[16:])
		if head != plainHead || values&plainTypeMask != plainType || xy&0xFFFF != plainXY {
			return nil
		}
		length := int(xy >> 16)
		size := 16 + length + 4
		if length < 12 || length&7 != 4 || size > len(b) || binary.BigEndian.Uint32(b[size-4:]) != plainEnd {
			return nil
		}
		if c.table.class(uint16(values>>48), uint16(values)) != 0 {
			a, err := w.action()
			if err != nil {
				return err
			}
			switch a.Op {
			case Keep:
			case Relayer:
				if c.run0 < c.pos || len(c.out) >= bufferSize {
					if err := c.emit(c.pos); err != nil {
						return err
					}
				}
				at := len(c.out)
				c.out = append(c.out, b[:size]...)
				c.run0 = c.pos + size
				binary.BigEndian.PutUint64(c.out[at+8:], uint64(a.Layer.Layer)<<48|plainType|uint64(a.Layer.Type))
			default:
				w.figure--
				return nil
			}
		}
		c.pos += size
		b = b[size:]
	}
	return nil
}

// element does what is to be done with the element b, which stands at pos and was parsed.
func (w *rewriter) element(b []byte) error {
	c := w.copier
	switch c.el.kind {
	case BOUNDARY, PATH:
		if c.table.class(c.el.layer.Layer, c.el.layer.Type) != 0 {
			a, err := w.action()
			if err != nil {
				return err
			}
			return w.act(a, b)
		}
	case SREF, AREF:
		w.ref++
		if len(w.refs) > 0 && w.refs[0].Index == w.ref-1 {
			change := &w.refs[0]
			w.refs = w.refs[1:]
			return w.reference(change, b)
		}
	}
	c.pos += len(b)
	return nil
}

// act does a to the figure b.
func (w *rewriter) act(a Action, b []byte) error {
	c := w.copier
	keep := a.Op == Keep || a.Op == KeepAndCopy || a.Op == KeepAndReplace
	if keep {
		c.pos += len(b)
		if a.Op == Keep {
			return nil
		}
	}
	if err := c.emit(c.pos); err != nil {
		return err
	}
	switch a.Op {
	case Relayer, KeepAndCopy:
		at := len(c.out)
		c.out = append(c.out, b...)
		binary.BigEndian.PutUint16(c.out[at+c.el.layerAt:], a.Layer.Layer)
		binary.BigEndian.PutUint16(c.out[at+c.el.typeAt:], a.Layer.Type)
	case Replace, KeepAndReplace:
		if err := w.pieces(b); err != nil {
			return err
		}
	case Drop:
	default:
		return fmt.Errorf("plan for %s: figure %d: there is no such thing as %d to be done", c.what, w.figure-1, a.Op)
	}
	if !keep {
		c.pos += len(b)
	}
	c.run0 = c.pos
	return c.spill()
}

// pieces writes the pieces of the last figure.
func (w *rewriter) pieces(b []byte) error {
	c := w.copier
	pieces, ok := w.cp.Pieces[w.figure-1]
	if !ok {
		return fmt.Errorf("plan for %s: figure %d has no pieces", c.what, w.figure-1)
	}
	for _, p := range pieces {
		if len(p.Points) == 0 {
			return fmt.Errorf("plan for %s: figure %d has a piece without points", c.what, w.figure-1)
		}
		c.out = appendHead(c.out, BOUNDARY, 0)
		c.out = appendRecords(c.out, b, flagRecords)
		c.out = appendLayer(c.out, p.Layer, DATATYPE)
		c.out = appendXY(c.out, p.Points, true)
		c.out = appendRecords(c.out, b, propertyRecords)
		c.out = appendHead(c.out, ENDEL, 0)
		if err := c.spill(); err != nil {
			return err
		}
	}
	return nil
}

// appendRecords appends those records of the element b that are of the given kinds.
func appendRecords(out, b []byte, set uint64) []byte {
	for len(b) > 0 {
		length := int(binary.BigEndian.Uint16(b))
		if set&Kind(b[2]).bit() != 0 {
			out = append(out, b[:length]...)
		}
		b = b[length:]
	}
	return out
}

// reference writes a changed reference.
func (w *rewriter) reference(change *RefChange, b []byte) error {
	c := w.copier
	if err := c.emit(c.pos); err != nil {
		return err
	}
	if change.Split == nil {
		c.out = appendReference(c.out, b, change.Name, nil)
	}
	for i := range change.Split {
		p := &change.Split[i]
		name := p.Name
		if name == "" {
			name = change.Name
		}
		c.out = appendReference(c.out, b, name, p)
		if err := c.spill(); err != nil {
			return err
		}
	}
	c.pos += len(b)
	c.run0 = c.pos
	return c.spill()
}

// appendReference appends the reference b with another name, where one is given, and as another part, where one is given.
func appendReference(out, b []byte, name string, p *Part) []byte {
	single := p != nil && p.Columns == 1 && p.Rows == 1
	hasColumns := Kind(b[2]) == AREF
	for len(b) > 0 {
		length := int(binary.BigEndian.Uint16(b))
		record := b[:length]
		b = b[length:]
		kind := Kind(record[2])
		switch {
		case kind == SNAME && name != "":
			out, _ = appendText(out, SNAME, name)
		case p != nil && (kind == SREF || kind == AREF):
			if single {
				kind = SREF
			} else {
				kind = AREF
			}
			out = appendHead(out, kind, 0)
		case p != nil && kind == COLROW:
			if !single {
				out = appendColumnsRows(out, uint16(p.Columns), uint16(p.Rows))
			}
		case p != nil && kind == XY && single:
			out = appendPoint(appendHead(out, XY, 8), p.At)
		case p != nil && kind == XY:
			if !hasColumns {
				out = appendColumnsRows(out, uint16(p.Columns), uint16(p.Rows))
			}
			out = appendPoint(appendPoint(appendPoint(appendHead(out, XY, 24), p.At), p.ColumnEnd), p.RowEnd)
		default:
			out = append(out, record...)
		}
	}
	return out
}
