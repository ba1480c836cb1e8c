package decompose

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"github.com/BurntSushi/toml"
)

// This file reads a TOML text strictly. A table is asked for each of its keys by name and type; the first fault sticks, with
// its line, and what is read after it is zero. So the reader of a deck asks for everything and looks at Err once.

// TextTable is a table of a file that the user writes.
type TextTable struct {
	text   *textFile
	prefix string // before the key in messages: "layer metal1: ", "marks."
	line   int
	values map[string]any // as the TOML decoder gives them
	nodes  *lineNode
}

// textFile is what the tables of one file share.
type textFile struct {
	name  string
	fault *DeckError
}

// ReadText gives the root table of a TOML text; name is the file's, for messages. What is no TOML is a *DeckError.
func ReadText(name string, data []byte) (*TextTable, error) {
	t := &TextTable{text: &textFile{name: name}, line: 1, values: map[string]any{}}
	if _, err := toml.Decode(string(data), &t.values); err != nil {
		e := &DeckError{File: name, Msg: err.Error() + "; correct the TOML"}
		var pe toml.ParseError
		if errors.As(err, &pe) {
			e.Line, e.Key, e.Msg = pe.Position.Line, pe.LastKey, pe.Message+"; correct the TOML"
		}
		return nil, e
	}
	t.nodes = keyLines(string(data))
	return t, nil
}

// Err gives the first fault of the file, or nil.
func (t *TextTable) Err() error {
	if t.text.fault == nil {
		return nil
	}
	return t.text.fault
}

// Prefix sets what stands before the table's keys in messages.
func (t *TextTable) Prefix(words string) { t.prefix = words }

// Line is the line of a key of the table, or of the table itself where it has no such key.
func (t *TextTable) Line(key string) int {
	if t.nodes != nil {
		if n := t.nodes.keys[key]; n != nil && t.Has(key) {
			return n.line
		}
	}
	return t.line
}

// Has tells whether the table has the key.
func (t *TextTable) Has(key string) bool { _, ok := t.values[key]; return ok }

// Fault notes what is wrong with a key ("": with the table), unless something was wrong before.
func (t *TextTable) Fault(key, format string, args ...any) {
	if t.text.fault == nil {
		where := t.prefix + key
		if key == "" {
			where = strings.TrimRight(t.prefix, ":. ")
		}
		t.text.fault = &DeckError{File: t.text.name, Key: where, Line: t.Line(key), Msg: fmt.Sprintf(format, args...)}
	}
}

// Known notes the first key of the table that is none of these.
func (t *TextTable) Known(keys ...string) {
	var unknown []string
	for k := range maps.Keys(t.values) {
		if !slices.Contains(keys, k) {
			unknown = append(unknown, k)
		}
	}
	if len(unknown) == 0 {
		return
	}
	first := slices.MinFunc(unknown, func(a, b string) int {
		if d := t.Line(a) - t.Line(b); d != 0 {
			return d
		}
		return strings.Compare(a, b)
	})
	if near := closestWord(first, keys); near != "" {
		t.Fault(first, "unknown key; did you mean %s?", near)
	} else {
		t.Fault(first, "unknown key; the keys here are %s", strings.Join(keys, ", "))
	}
}

// Unknown notes that a key names something that where does not have; known are the names that it has.
func (t *TextTable) Unknown(key, name, where string, known []string) {
	if near := closestWord(name, known); near != "" {
		t.Fault(key, "%s has no %q; did you mean %q?", where, name, near)
	} else {
		t.Fault(key, "%s has no %q; it has %s", where, name, strings.Join(known, ", "))
	}
}

// Need notes the first of these keys that the table does not have.
func (t *TextTable) Need(keys ...string) {
	for _, k := range keys {
		if !t.Has(k) {
			t.Fault(k, "missing; add it")
		}
	}
}

// wrong notes that a value has not the type that its key wants.
func (t *TextTable) wrong(key, want string, got any) {
	kind := "something else"
	switch got.(type) {
	case string:
		kind = "a string"
	case int64, float64:
		kind = "a number"
	case bool:
		kind = "true or false"
	case []any, []map[string]any:
		kind = "a list"
	case map[string]any:
		kind = "a table"
	}
	t.Fault(key, "is %s; write %s", kind, want)
}

// Str gives a string that is not empty, or "" where the key is absent.
func (t *TextTable) Str(key string) string {
	switch v := t.values[key].(type) {
	case nil:
	case string:
		if v == "" {
			t.Fault(key, "is empty; give it a value or leave the key out")
		}
		return v
	default:
		t.wrong(key, "a string", v)
	}
	return ""
}

// Choice gives one of the words, or the first of them where the key is absent.
func (t *TextTable) Choice(key string, words ...string) string {
	if !t.Has(key) {
		return words[0]
	}
	quoted := `"` + strings.Join(words, `" or "`) + `"`
	s, ok := t.values[key].(string)
	if !ok {
		t.wrong(key, quoted, t.values[key])
	} else if !slices.Contains(words, s) {
		t.Fault(key, "is %q; write %s", s, quoted)
	} else {
		return s
	}
	return words[0]
}

// Bool gives true or false; absent is false.
func (t *TextTable) Bool(key string) bool {
	switch v := t.values[key].(type) {
	case nil:
	case bool:
		return v
	default:
		t.wrong(key, "true or false", v)
	}
	return false
}

// Number gives a finite number, or 0 where the key is absent.
func (t *TextTable) Number(key string) float64 {
	if !t.Has(key) {
		return 0
	}
	return t.number(key, "a number", t.values[key])
}

// number gives the value as a finite number; want words what the key wants.
func (t *TextTable) number(key, want string, value any) float64 {
	switch v := value.(type) {
	case int64:
		return float64(v)
	case float64:
		if math.IsInf(v, 0) || math.IsNaN(v) {
			t.Fault(key, "is no finite number; write %s", want)
			return 0
		}
		return v
	}
	t.wrong(key, want, value)
	return 0
}

// Numbers gives a list of exactly n numbers; zeros where the key is absent or wrong.
func (t *TextTable) Numbers(key string, n int) []float64 {
	out := make([]float64, n)
	if t.Has(key) {
		t.numbers(key, fmt.Sprintf("a list of %d numbers", n), t.values[key], out)
	}
	return out
}

func (t *TextTable) numbers(key, want string, value any, out []float64) {
	list, ok := value.([]any)
	switch {
	case !ok:
		t.wrong(key, want, value)
	case len(list) != len(out):
		t.Fault(key, "is a list of %d; write %s", len(list), want)
	default:
		for i, v := range list {
			out[i] = t.number(key, want, v)
		}
	}
}

// Points gives a list of exactly n points; zeros where the key is absent or wrong.
func (t *TextTable) Points(key string, n int) [][2]float64 {
	out := make([][2]float64, n)
	if !t.Has(key) {
		return out
	}
	want := fmt.Sprintf("a list of %d points [x, y]", n)
	list, ok := t.values[key].([]any)
	switch {
	case !ok:
		t.wrong(key, want, t.values[key])
	case len(list) != n:
		t.Fault(key, "is a list of %d; write %s", len(list), want)
	default:
		for i, v := range list {
			t.numbers(key, want, v, out[i][:])
		}
	}
	return out
}

// Strs gives a list of strings; a single string counts as a list of one.
func (t *TextTable) Strs(key string) []string {
	switch v := t.values[key].(type) {
	case nil:
		return nil
	case string:
		return []string{v}
	case []any:
		out := make([]string, 0, len(v))
		for _, item := range v {
			s, ok := item.(string)
			if !ok {
				t.wrong(key, "a list of strings", item)
				return nil
			}
			out = append(out, s)
		}
		return out
	default:
		t.wrong(key, "a string or a list of strings", v)
		return nil
	}
}

// Table gives the table [key], or nil where the key is absent or no table.
func (t *TextTable) Table(key string) *TextTable {
	switch v := t.values[key].(type) {
	case nil:
	case map[string]any:
		return t.below(key, v, t.node(key))
	default:
		t.wrong(key, "it as a table: ["+strings.TrimPrefix(t.prefix+key, ". ")+"]", v)
	}
	return nil
}

// Tables gives the tables [[key]], in order.
func (t *TextTable) Tables(key string) []*TextTable {
	var values []map[string]any
	switch v := t.values[key].(type) {
	case nil:
		return nil
	case []map[string]any:
		values = v
	case []any: // the same, written inline
		for _, item := range v {
			m, ok := item.(map[string]any)
			if !ok {
				t.wrong(key, "a list of tables", item)
				return nil
			}
			values = append(values, m)
		}
	default:
		t.wrong(key, "a list of tables, each under [["+key+"]]", v)
		return nil
	}
	list := t.node(key)
	out := make([]*TextTable, len(values))
	for i, v := range values {
		var n *lineNode
		if list != nil && i < len(list.items) {
			n = list.items[i]
		}
		out[i] = t.below(key, v, n)
	}
	return out
}

func (t *TextTable) node(key string) *lineNode {
	if t.nodes == nil {
		return nil
	}
	return t.nodes.keys[key]
}

func (t *TextTable) below(key string, values map[string]any, nodes *lineNode) *TextTable {
	b := &TextTable{text: t.text, prefix: t.prefix + key + ".", line: t.line, values: values, nodes: nodes}
	if nodes != nil {
		b.line = nodes.line
	}
	return b
}
