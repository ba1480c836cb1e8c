package anchor

import (
	"bytes"
	"math"
	"strconv"

	"maskpair/decompose"
	"maskpair/gds/arena"
)

// This file reads plain anchor files fast. A script that pins a circuit shape by shape writes a hundred thousand tables, all alike: a
// key and a value a line, short strings, numbers, lists on one line. Such text is read here in one pass. Whatever else TOML allows, and
// whatever is wrong, is left to the reader of file.go, which also words the faults; so this one only ever says yes or "not plain".

// plainReader reads one file.
type plainReader struct {
	text  []byte
	at    int
	line  int
	file  *File
	rules *decompose.Rules
	kind  string     // of the open table; "": none yet
	table plainTable // the open one
	count struct{ anchors, ties, waivers int }
}

// plainTable is one table: which keys it has, and their values.
type plainTable struct {
	line   int
	has    uint32
	layer  int
	mask   decompose.Mask
	same   bool
	at     [4]float64 // of at and box: one or two points
	points int        // in at: 0 for one point, 2 for a list of two
	box    [4]float64
	cell   string
	name   string
	reason string
	wish   bool
	alike  bool
}

// The keys that tables may have, as bits of has.
const (
	keyLayer = 1 << iota
	keyMask
	keyMasks
	keyAt
	keyBox
	keyCell
	keyName
	keyReason
	keyWish
	keyAlike
)

// readPlain reads a plain file; false where it is not plain.
func readPlain(name string, text []byte, rules *decompose.Rules) (*File, bool) {
	r := &plainReader{text: text, line: 1, file: &File{Name: name}, rules: rules}
	if n := bytes.Count(text, []byte("[[anchor]]")); n > 0 {
		r.file.Anchors = arena.Make[Entry](0, n)
	}
	for r.at < len(r.text) {
		if !r.statement() {
			return nil, false
		}
	}
	ok := r.close()
	if len(r.file.Anchors) == 0 {
		r.file.Anchors = nil
	}
	return r.file, ok
}

// blank passes blanks within a line.
func (r *plainReader) blank() {
	for r.at < len(r.text) && (r.text[r.at] == ' ' || r.text[r.at] == '\t') {
		r.at++
	}
}

// end passes blanks, a comment and the end of the line; false where something else follows.
func (r *plainReader) end() bool {
	r.blank()
	if r.at < len(r.text) && r.text[r.at] == '#' {
		for r.at < len(r.text) && r.text[r.at] != '\n' && r.text[r.at] != '\r' {
			// TOML allows no control characters in comments, and only UTF-8: that is for the other reader.
			if c := r.text[r.at]; c < ' ' && c != '\t' || c > '~' {
				return false
			}
			r.at++
		}
	}
	if r.at < len(r.text) && r.text[r.at] == '\r' {
		r.at++
		if r.at == len(r.text) || r.text[r.at] != '\n' {
			return false
		}
	}
	if r.at == len(r.text) {
		return true
	}
	if r.text[r.at] != '\n' {
		return false
	}
	r.at++
	r.line++
	return true
}

// word reads the letters that come next.
func (r *plainReader) word() string {
	from := r.at
	for r.at < len(r.text) && r.text[r.at] >= 'a' && r.text[r.at] <= 'z' {
		r.at++
	}
	return string(r.text[from:r.at])
}

// skip passes one character, if it comes next.
func (r *plainReader) skip(c byte) bool {
	if r.at < len(r.text) && r.text[r.at] == c {
		r.at++
		return true
	}
	return false
}

// statement reads one line.
func (r *plainReader) statement() bool {
	r.blank()
	if r.at == len(r.text) {
		return true
	}
	switch c := r.text[r.at]; {
	case c == '\n' || c == '\r' || c == '#':
		return r.end()
	case c == '[':
		r.at++
		if !r.skip('[') {
			return false
		}
		kind := r.word()
		if kind != "anchor" && kind != "tie" && kind != "waiver" || !r.skip(']') || !r.skip(']') || !r.close() {
			return false
		}
		r.kind, r.table = kind, plainTable{line: r.line}
		return r.end()
	}
	key := r.word()
	r.blank()
	if key == "" || r.kind == "" || !r.skip('=') {
		return false
	}
	r.blank()
	return r.value(key) && r.end()
}

// value reads the value of a key of the open table.
func (r *plainReader) value(key string) bool {
	t := &r.table
	once := func(bit uint32) bool {
		twice := t.has&bit != 0
		t.has |= bit
		return !twice
	}
	switch key {
	case "layer":
		name, ok := r.str()
		if !ok || !once(keyLayer) {
			return false
		}
		for i := range r.rules.Layers {
			if r.rules.Layers[i].Name == name {
				t.layer = i
				return true
			}
		}
		return false
	case "mask":
		s, ok := r.str()
		if s == "B" {
			t.mask = decompose.B
		}
		return ok && once(keyMask) && (s == "A" || s == "B")
	case "masks":
		s, ok := r.str()
		t.same = s == "same"
		return ok && once(keyMasks) && (s == "same" || s == "opposite")
	case "at":
		return once(keyAt) && r.place()
	case "box":
		return once(keyBox) && r.numbers(t.box[:])
	case "cell", "name", "reason":
		s, ok := r.str()
		if !ok || s == "" {
			return false
		}
		switch key {
		case "cell":
			t.cell = s
			return once(keyCell)
		case "name":
			t.name = s
			return once(keyName)
		}
		t.reason = s
		return once(keyReason)
	case "wish", "alike":
		s := r.word()
		if key == "wish" {
			t.wish = s == "true"
			return once(keyWish) && (s == "true" || s == "false")
		}
		t.alike = s == "true"
		return once(keyAlike) && (s == "true" || s == "false")
	}
	return false
}

// str reads a string of printable ASCII without escapes.
func (r *plainReader) str() (string, bool) {
	if !r.skip('"') {
		return "", false
	}
	from := r.at
	for r.at < len(r.text) {
		switch c := r.text[r.at]; {
		case c == '"':
			s := string(r.text[from:r.at])
			r.at++
			return s, true
		case c == '\\' || c < ' ' || c > '~':
			return "", false
		}
		r.at++
	}
	return "", false
}

// place reads one point, or a list of two.
func (r *plainReader) place() bool {
	from := r.at
	if r.numbers(r.table.at[:2]) {
		return true
	}
	r.at = from
	r.table.points = 2
	if !r.skip('[') {
		return false
	}
	r.blank()
	if !r.numbers(r.table.at[:2]) {
		return false
	}
	r.blank()
	if !r.skip(',') {
		return false
	}
	r.blank()
	if !r.numbers(r.table.at[2:]) {
		return false
	}
	r.blank()
	return r.skip(']')
}

// numbers reads a list of exactly so many numbers.
func (r *plainReader) numbers(to []float64) bool {
	if !r.skip('[') {
		return false
	}
	for i := range to {
		r.blank()
		if i > 0 {
			if !r.skip(',') {
				return false
			}
			r.blank()
		}
		v, ok := r.number()
		if !ok {
			return false
		}
		to[i] = v
	}
	r.blank()
	return r.skip(']')
}

// powers are exact as floats.
var powers = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15}

// number reads a decimal of at most fifteen digits: below 2^53, so that it and the power of ten that divides it are exact as floats,
// and the quotient is the nearest one to the decimal, as strconv gives it.
func (r *plainReader) number() (float64, bool) {
	from := r.at
	minus := r.skip('-')
	whole, digits, after, point := int64(0), 0, 0, false
	for r.at < len(r.text) {
		c := r.text[r.at]
		if c == '.' && !point && digits > 0 {
			point = true
			r.at++
			continue
		}
		if c < '0' || c > '9' {
			break
		}
		whole = 10*whole + int64(c-'0')
		if digits++; digits > 15 {
			return 0, false
		}
		if point {
			after++
		}
		r.at++
	}
	switch {
	case digits == 0, point && after == 0:
		return 0, false
	case r.at < len(r.text) && (r.text[r.at] == 'e' || r.text[r.at] == 'E'):
		return r.exponent(from)
	case digits-after > 1 && r.text[from+boolInt(minus)] == '0': // TOML has no leading zeros
		return 0, false
	}
	v := float64(whole) / powers[after]
	if minus {
		v = -v
	}
	return v, true
}

// exponent reads a number with an exponent, which began at from.
func (r *plainReader) exponent(from int) (float64, bool) {
	for r.at < len(r.text) {
		c := r.text[r.at]
		if (c < '0' || c > '9') && c != 'e' && c != 'E' && c != '+' && c != '-' {
			break
		}
		r.at++
	}
	s := string(r.text[from:r.at])
	digits := s
	if digits[0] == '-' {
		digits = digits[1:]
	}
	if len(digits) > 1 && digits[0] == '0' && digits[1] >= '0' && digits[1] <= '9' {
		return 0, false
	}
	v, err := strconv.ParseFloat(s, 64)
	return v, err == nil && !math.IsInf(v, 0)
}

func boolInt(b bool) int {
	if b {
		return 1
	}
	return 0
}

// close makes an entry of the open table; false where something is missing or does not go together.
func (r *plainReader) close() bool {
	t := &r.table
	allowed := func(need, may uint32) bool { return t.has&need == need && t.has&^(need|may) == 0 }
	switch r.kind {
	case "":
		return true
	case "anchor":
		i := r.count.anchors
		r.count.anchors++
		if t.alike {
			if !allowed(keyAlike|keyCell, keyName) {
				return false
			}
			r.file.Alike = append(r.file.Alike, AlikeEntry{Index: i, Line: t.line, Cell: t.cell, Name: t.name})
			return true
		}
		e := Entry{Index: i, Line: t.line, Layer: t.layer, Mask: t.mask, Cell: t.cell, Name: t.name, Wish: t.wish}
		const more = keyCell | keyName | keyWish | keyAlike
		switch {
		case allowed(keyLayer|keyMask|keyAt, more) && t.points == 0:
			s, ok := r.spot(t.at[0], t.at[1])
			if !ok {
				return false
			}
			e.Box = decompose.Box{X1: s.X, Y1: s.Y, X2: s.X, Y2: s.Y}
		case allowed(keyLayer|keyMask|keyBox, more):
			a, ok := r.spot(t.box[0], t.box[1])
			b, too := r.spot(t.box[2], t.box[3])
			if !ok || !too {
				return false
			}
			e.Box = decompose.Box{X1: min(a.X, b.X), Y1: min(a.Y, b.Y), X2: max(a.X, b.X), Y2: max(a.Y, b.Y)}
		default:
			return false
		}
		r.file.Anchors = append(r.file.Anchors, e)
		return true
	}
	if t.points != 2 {
		return false
	}
	a, ok := r.spot(t.at[0], t.at[1])
	b, too := r.spot(t.at[2], t.at[3])
	if !ok || !too {
		return false
	}
	at := [2]decompose.Spot{a, b}
	if r.kind == "tie" {
		if !allowed(keyLayer|keyMasks|keyAt, keyCell|keyName) {
			return false
		}
		r.file.Ties = append(r.file.Ties, TieEntry{Index: r.count.ties, Line: t.line, Layer: t.layer, Opposite: !t.same, At: at, Cell: t.cell, Name: t.name})
		r.count.ties++
		return true
	}
	if !allowed(keyLayer|keyAt|keyReason, keyCell|keyName) {
		return false
	}
	r.file.Waivers = append(r.file.Waivers, WaiverEntry{Index: r.count.waivers, Line: t.line, Layer: t.layer, At: at, Cell: t.cell, Name: t.name, Reason: t.reason})
	r.count.waivers++
	return true
}

// spot turns a place in the deck's unit into half database units.
func (r *plainReader) spot(x, y float64) (decompose.Spot, bool) {
	hx, ok := r.rules.HalfUnits(x)
	hy, too := r.rules.HalfUnits(y)
	return decompose.Spot{X: hx, Y: hy}, ok && too
}
