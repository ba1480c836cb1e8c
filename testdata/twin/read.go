package twin

import (
	"encoding/binary"
	"fmt"
	"math"
	"strings"

	"maskpair/gds"
)

// This file reads a stream back, record by record. It takes what the program accepts and no pains to refuse the rest.

// Record is one record of a stream.
type Record struct {
	Kind gds.Kind
	Data []byte // as it stands, padding included
	Raw  []byte // head and data
}

// Records cuts a stream into its records, ENDLIB included; what follows it is left out.
func Records(stream []byte) ([]Record, error) {
	var out []Record
	for rest := stream; ; {
		if len(rest) < 4 {
			return nil, fmt.Errorf("%d bytes are left at byte %d, no record", len(rest), len(stream)-len(rest))
		}
		n := int(binary.BigEndian.Uint16(rest))
		if n < 4 || n > len(rest) {
			return nil, fmt.Errorf("record of %d bytes at byte %d", n, len(stream)-len(rest))
		}
		r := Record{gds.Kind(rest[2]), rest[4:n], rest[:n]}
		out = append(out, r)
		if r.Kind == gds.ENDLIB {
			return out, nil
		}
		rest = rest[n:]
	}
}

// Read gives the layout of a stream.
func Read(stream []byte) (*Layout, error) {
	records, err := Records(stream)
	if err != nil {
		return nil, err
	}
	l := &Layout{}
	var e *Element
	var rest strings.Builder
	for _, r := range records {
		cell := len(l.Cells) - 1
		switch r.Kind {
		case gds.UNITS:
			if len(r.Data) == 16 {
				l.DBU = real8(r.Data[8:])
			}
			continue
		case gds.BGNSTR:
			l.Cells = append(l.Cells, Cell{})
			continue
		case gds.STRNAME:
			if cell < 0 {
				return nil, fmt.Errorf("a name before the first structure")
			}
			l.Cells[cell].Name = name(r.Data)
			continue
		case gds.ENDEL:
			if e == nil || cell < 0 {
				return nil, fmt.Errorf("an element ends that has not begun")
			}
			e.Rest = rest.String()
			e.finish()
			l.Cells[cell].Elements = append(l.Cells[cell].Elements, *e)
			e = nil
			continue
		}
		if kind, ok := elementKinds[r.Kind]; ok {
			e = &Element{Kind: kind, Columns: 1, Rows: 1}
			rest.Reset()
			continue
		}
		if e != nil {
			e.take(r, &rest)
		}
	}
	return l, nil
}

var elementKinds = map[gds.Kind]Kind{gds.BOUNDARY: Boundary, gds.PATH: Path, gds.BOX: Box, gds.NODE: Node, gds.TEXT: Text, gds.SREF: Reference, gds.AREF: Array}

// take notes one record of an element. What the fields of Element hold in another form is not in rest.
func (e *Element) take(r Record, rest *strings.Builder) {
	switch r.Kind {
	case gds.LAYER:
		e.Layer.Layer = binary.BigEndian.Uint16(r.Data)
	case gds.DATATYPE, gds.BOXTYPE, gds.NODETYPE, gds.TEXTTYPE:
		e.Layer.Type = binary.BigEndian.Uint16(r.Data)
	case gds.SNAME:
		e.Text = name(r.Data)
	case gds.XY:
		for d := r.Data; len(d) >= 8; d = d[8:] {
			e.Points = append(e.Points, gds.Point{X: int4(d), Y: int4(d[4:])})
		}
	case gds.COLROW:
		e.Columns, e.Rows = int(binary.BigEndian.Uint16(r.Data)), int(binary.BigEndian.Uint16(r.Data[2:]))
	default:
		rest.Write(r.Raw)
	}
	switch r.Kind {
	case gds.STRING:
		e.Text = name(r.Data)
	case gds.STRANS:
		flags := binary.BigEndian.Uint16(r.Data)
		e.Strans.Mirror = flags&0x8000 != 0
		e.Strans.AbsoluteMagnification = flags&4 != 0
		e.Strans.AbsoluteAngle = flags&2 != 0
	case gds.MAG:
		e.Strans.Magnification = real8(r.Data)
	case gds.ANGLE:
		e.Strans.Angle = real8(r.Data)
	case gds.PATHTYPE:
		e.Style.Type = int16(binary.BigEndian.Uint16(r.Data))
	case gds.WIDTH:
		e.Style.Width = int4(r.Data)
	case gds.BGNEXTN:
		e.Style.Begin = int4(r.Data)
	case gds.ENDEXTN:
		e.Style.Finish = int4(r.Data)
	}
}

// finish takes off the closing point of a boundary.
func (e *Element) finish() {
	if n := len(e.Points); e.Kind == Boundary && n > 1 && e.Points[0] == e.Points[n-1] {
		e.Points = e.Points[:n-1]
	}
}

func int4(d []byte) int32 { return int32(binary.BigEndian.Uint32(d)) }

// name is a text without its padding.
func name(d []byte) string { return strings.TrimRight(string(d), "\x00") }

// real8 reads an excess-64 base-16 real: sign, exponent, 56 bits of fraction (GDSII Stream Format Manual 6.0).
func real8(d []byte) float64 {
	mantissa := uint64(0)
	for _, b := range d[1:8] {
		mantissa = mantissa<<8 | uint64(b)
	}
	v := math.Ldexp(float64(mantissa), 4*(int(d[0]&0x7F)-64)-56)
	if d[0]&0x80 != 0 {
		v = -v
	}
	return v
}
