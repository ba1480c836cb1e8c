package gds

// This file holds the slow twins: each does what a part of the package does, record by record, in the plainest way, and
// shares nothing with it but the names of the records.

import (
	"encoding/binary"
	"math"
	"slices"
	"strings"
	"testing"
)

// slowRecords is the slow twin of Scanner: it cuts a whole stream into records. It takes streams without fault only.
func slowRecords(t testing.TB, data []byte) []Record {
	t.Helper()
	var records []Record
	for at := 0; ; {
		if len(data)-at < 4 {
			t.Fatalf("the stream ends at byte %d", at)
		}
		n := int(data[at])*256 + int(data[at+1])
		r := Record{Kind: Kind(data[at+2]), Type: DataType(data[at+3]), Offset: int64(at), Data: data[at+4 : at+n]}
		records = append(records, r)
		at += n
		if r.Kind == ENDLIB {
			return records
		}
	}
}

// slowFigures is the slow twin of the index for figures: it goes by records alone.
func slowFigures(t testing.TB, data []byte, want Interest) []figure {
	var out []figure
	var structure string
	var f figure
	var kind Kind
	var layer LayerType
	for _, r := range slowRecords(t, data) {
		number := func() int32 {
			if len(r.Data) == 2 {
				return int32(binary.BigEndian.Uint16(r.Data))
			}
			return int32(binary.BigEndian.Uint32(r.Data))
		}
		switch r.Kind {
		case STRNAME:
			structure = strings.TrimRight(string(r.Data), "\x00")
		case BOUNDARY, PATH, SREF, AREF, TEXT, NODE, BOX:
			kind = r.Kind
			f = figure{Structure: structure}
			f.Outline.Path = kind == PATH
		case LAYER:
			layer.Layer = uint16(number())
		case DATATYPE:
			layer.Type = uint16(number())
		case PATHTYPE:
			f.Outline.PathType = uint8(number())
		case WIDTH:
			f.Outline.Width = number()
		case BGNEXTN:
			f.Outline.Begin = number()
		case ENDEXTN:
			f.Outline.Finish = number()
		case XY:
			for d := r.Data; len(d) > 0; d = d[8:] {
				f.Points = append(f.Points, Point{int32(binary.BigEndian.Uint32(d)), int32(binary.BigEndian.Uint32(d[4:]))})
			}
		case ENDEL:
			if kind != BOUNDARY && kind != PATH || want.Figures[layer] == 0 {
				break
			}
			f.Class = want.Figures[layer]
			if f.Outline.PathType != 4 {
				f.Outline.Begin, f.Outline.Finish = 0, 0
			}
			if n := len(f.Points); kind == BOUNDARY && n > 1 && f.Points[0] == f.Points[n-1] {
				f.Points = f.Points[:n-1]
			}
			f.Box = Rect{math.MaxInt32, math.MaxInt32, math.MinInt32, math.MinInt32}
			for _, p := range f.Points {
				f.Box = Rect{min(f.Box.X1, p.X), min(f.Box.Y1, p.Y), max(f.Box.X2, p.X), max(f.Box.Y2, p.Y)}
			}
			f.Outline.Count = uint32(len(f.Points))
			if kind == BOUNDARY && slowRectangle(f.Points, f.Box) {
				f.Plain, f.Outline, f.Points = true, Outline{}, nil
			}
			out = append(out, f)
		}
	}
	return out
}

// slowRectangle says whether four points go round the corners of their bounding box.
func slowRectangle(points []Point, box Rect) bool {
	if len(points) != 4 || box.X1 == box.X2 || box.Y1 == box.Y2 {
		return false
	}
	corners := map[Point]bool{}
	for i, p := range points {
		q := points[(i+1)%4]
		if (p.X != box.X1 && p.X != box.X2) || (p.Y != box.Y1 && p.Y != box.Y2) || (p.X != q.X && p.Y != q.Y) {
			return false
		}
		corners[p] = true
	}
	return len(corners) == 4
}

// slowRecord writes a record as it is.
func slowRecord(out []byte, r Record) []byte {
	out = append(out, byte((len(r.Data)+4)>>8), byte(len(r.Data)+4), byte(r.Kind), byte(r.Type))
	return append(out, r.Data...)
}

// padded is a name as the format wants it.
func padded(name string) []byte {
	b := []byte(name)
	if len(b)%2 != 0 {
		b = append(b, 0)
	}
	return b
}

// slowCopy is the slow twin of CopyStream: it holds the stream as records, and goes through them element by element.
func slowCopy(t testing.TB, data []byte, want Interest, plan Plan) []byte {
	var out []byte
	records := slowRecords(t, data)
	structure := -1
	for i := 0; i < len(records); {
		if records[i].Kind != BGNSTR {
			out = slowRecord(out, records[i])
			i++
			continue
		}
		structure++
		end := i
		for records[end].Kind != ENDSTR {
			end++
		}
		copies := plan.Copies(structure)
		if len(copies) == 0 {
			copies = []Copy{{}}
		}
		for k := range copies {
			out = slowStructure(out, records[i:end+1], want, plan, &copies[k])
		}
		i = end + 1
	}
	last := records[len(records)-1]
	return append(out, data[last.Offset+4:]...)
}

func slowStructure(out []byte, records []Record, want Interest, plan Plan, cp *Copy) []byte {
	figure, ref := uint32(0), int32(0)
	var element []Record
	for _, r := range records {
		if element == nil && elementKinds&r.Kind.bit() == 0 {
			if r.Kind == STRNAME && cp.Name != "" {
				r.Data = padded(cp.Name)
			}
			if r.Kind == ENDSTR {
				out = append(out, cp.Tail...)
			}
			out = slowRecord(out, r)
			continue
		}
		element = append(element, r)
		if r.Kind != ENDEL {
			continue
		}
		get := func(kind Kind) []byte {
			for _, r := range element {
				if r.Kind == kind {
					return r.Data
				}
			}
			return nil
		}
		write := func(change func(r Record) []Record) {
			for _, r := range element {
				for _, c := range change(r) {
					out = slowRecord(out, c)
				}
			}
		}
		same := func(r Record) []Record { return []Record{r} }
		var done bool
		if k := element[0].Kind; k == BOUNDARY || k == PATH {
			layer := LayerType{binary.BigEndian.Uint16(get(LAYER)), binary.BigEndian.Uint16(get(DATATYPE))}
			if want.Figures[layer] != 0 {
				if cp.Figures != nil {
					done = true
					a := plan.Actions[cp.Figures[figure]]
					onto := func(r Record) []Record {
						switch r.Kind {
						case LAYER:
							r.Data = binary.BigEndian.AppendUint16(nil, a.Layer.Layer)
						case DATATYPE:
							r.Data = binary.BigEndian.AppendUint16(nil, a.Layer.Type)
						}
						return []Record{r}
					}
					if a.Op == Keep || a.Op == KeepAndCopy || a.Op == KeepAndReplace {
						write(same)
					}
					if a.Op == Relayer || a.Op == KeepAndCopy {
						write(onto)
					}
					if a.Op == Replace || a.Op == KeepAndReplace {
						pick := func(kinds ...Kind) {
							for _, r := range element {
								if slices.Contains(kinds, r.Kind) {
									out = slowRecord(out, r)
								}
							}
						}
						for _, p := range cp.Pieces[figure] {
							out = slowRecord(out, Record{Kind: BOUNDARY})
							pick(ELFLAGS, PLEX)
							out = slowPiece(out, p)
							pick(PROPATTR, PROPVALUE)
							out = slowRecord(out, Record{Kind: ENDEL})
						}
					}
				}
				figure++
			}
		}
		if k := element[0].Kind; k == SREF || k == AREF {
			for _, c := range cp.Refs {
				if c.Index != ref {
					continue
				}
				done = true
				if c.Split == nil {
					write(func(r Record) []Record {
						if r.Kind == SNAME && c.Name != "" {
							r.Data = padded(c.Name)
						}
						return []Record{r}
					})
				}
				for _, p := range c.Split {
					name := p.Name
					if name == "" {
						name = c.Name
					}
					single := p.Columns == 1 && p.Rows == 1
					write(func(r Record) []Record {
						points := []Point{p.At, p.ColumnEnd, p.RowEnd}
						switch r.Kind {
						case SREF, AREF:
							r.Kind = AREF
							if single {
								r.Kind = SREF
							}
						case SNAME:
							if name != "" {
								r.Data = padded(name)
							}
						case COLROW:
							return nil
						case XY:
							if single {
								points = points[:1]
							}
							r.Data = nil
							for _, q := range points {
								r.Data = binary.BigEndian.AppendUint32(r.Data, uint32(q.X))
								r.Data = binary.BigEndian.AppendUint32(r.Data, uint32(q.Y))
							}
							if !single {
								colrow := binary.BigEndian.AppendUint16(nil, uint16(p.Columns))
								return []Record{{Kind: COLROW, Type: Int2, Data: binary.BigEndian.AppendUint16(colrow, uint16(p.Rows))}, r}
							}
						}
						return []Record{r}
					})
				}
			}
			ref++
		}
		if !done {
			write(same)
		}
		element = nil
	}
	return out
}

// slowPiece writes layer, datatype and points of a piece.
func slowPiece(out []byte, p Piece) []byte {
	out = slowRecord(out, Record{Kind: LAYER, Type: Int2, Data: binary.BigEndian.AppendUint16(nil, p.Layer.Layer)})
	out = slowRecord(out, Record{Kind: DATATYPE, Type: Int2, Data: binary.BigEndian.AppendUint16(nil, p.Layer.Type)})
	var xy []byte
	for _, q := range append(append([]Point{}, p.Points...), p.Points[0]) {
		xy = binary.BigEndian.AppendUint32(xy, uint32(q.X))
		xy = binary.BigEndian.AppendUint32(xy, uint32(q.Y))
	}
	return slowRecord(out, Record{Kind: XY, Type: Int4, Data: xy})
}
