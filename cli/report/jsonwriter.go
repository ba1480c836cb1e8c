package report

import (
	"bufio"
	"encoding/json"
	"io"
	"strconv"
)

// This file writes JSON piece by piece, so that a list of a million entries never stands in memory. Objects and lists open
// and close by function calls; the commas are put here. The first error sticks.

// jsonWriter writes one JSON value. Entries of an open broad object or list stand on lines of their own, others on one line.
type jsonWriter struct {
	w      *bufio.Writer
	levels []jsonLevel
	keyed  bool // a key was written, its value is to come
	buf    []byte
}

// jsonLevel is an open object or list.
type jsonLevel struct {
	broad bool
	some  bool // has an entry
}

func newJSONWriter(w io.Writer) *jsonWriter { return &jsonWriter{w: bufio.NewWriterSize(w, 1<<16)} }

// close ends the text and gives the first error.
func (j *jsonWriter) close() error {
	j.w.WriteByte('\n')
	return j.w.Flush()
}

// entry begins an entry of what is open.
func (j *jsonWriter) entry() {
	if j.keyed {
		j.keyed = false
		return
	}
	if len(j.levels) == 0 {
		return
	}
	l := &j.levels[len(j.levels)-1]
	if l.some {
		j.w.WriteByte(',')
	}
	if l.broad {
		j.line(len(j.levels))
	} else if l.some {
		j.w.WriteByte(' ')
	}
	l.some = true
}

// line begins a line, indented for a depth.
func (j *jsonWriter) line(depth int) {
	j.w.WriteByte('\n')
	for range depth {
		j.w.WriteString("  ")
	}
}

func (j *jsonWriter) open(begin, end byte, broad bool, body func()) {
	j.entry()
	j.w.WriteByte(begin)
	j.levels = append(j.levels, jsonLevel{broad: broad})
	body()
	l := j.levels[len(j.levels)-1]
	j.levels = j.levels[:len(j.levels)-1]
	if l.broad && l.some {
		j.line(len(j.levels))
	}
	j.w.WriteByte(end)
}

// object writes an object whose entries body writes, each on a line of its own.
func (j *jsonWriter) object(body func()) { j.open('{', '}', true, body) }

// inline writes an object on one line.
func (j *jsonWriter) inline(body func()) { j.open('{', '}', false, body) }

// list writes a list whose entries body writes, each on a line of its own.
func (j *jsonWriter) list(body func()) { j.open('[', ']', true, body) }

// row writes a list on one line.
func (j *jsonWriter) row(body func()) { j.open('[', ']', false, body) }

// key writes the key of the value that comes next.
func (j *jsonWriter) key(name string) *jsonWriter {
	j.str(name)
	j.w.WriteString(": ")
	j.keyed = true
	return j
}

func (j *jsonWriter) integer(n int64) {
	j.entry()
	j.buf = strconv.AppendInt(j.buf[:0], n, 10)
	j.w.Write(j.buf)
}

// number writes a number in the fewest digits that give it back, whole numbers without a point.
func (j *jsonWriter) number(v float64) {
	j.entry()
	format := byte('f')
	if v != 0 && (v < 1e-6 && v > -1e-6) {
		format = 'e'
	}
	j.buf = strconv.AppendFloat(j.buf[:0], v, format, -1, 64)
	j.w.Write(j.buf)
}

// half writes a number that is given in halves.
func (j *jsonWriter) half(n int64) {
	j.entry()
	j.buf = j.buf[:0]
	if n < 0 {
		j.buf = append(j.buf, '-')
	}
	j.buf = strconv.AppendInt(j.buf, max(n, -n)/2, 10)
	if n%2 != 0 {
		j.buf = append(j.buf, ".5"...)
	}
	j.w.Write(j.buf)
}

func (j *jsonWriter) boolean(b bool) {
	j.entry()
	j.w.WriteString(strconv.FormatBool(b))
}

// str writes a string. Bytes that are no UTF-8 (names in a stream may have any) come out as the characters of the same
// number, so that different names stay different.
func (j *jsonWriter) str(s string) {
	j.entry()
	if plain(s) {
		j.w.WriteByte('"')
		j.w.WriteString(s)
		j.w.WriteByte('"')
		return
	}
	quoted, err := json.Marshal(Text(s))
	if err != nil {
		quoted = []byte(`""`)
	}
	j.w.Write(quoted)
}

// plain tells whether s stands in JSON as it is.
func plain(s string) bool {
	for i := range len(s) {
		if c := s[i]; c < ' ' || c > '~' || c == '"' || c == '\\' {
			return false
		}
	}
	return true
}
