package decompose

import (
	"strconv"
	"strings"
)

// This file finds the line of each key in a text that is known to be valid TOML. The decoder gives values without places;
// here the same text is walked once more, headers, keys and brackets only, so that a message can name a line.

// lineNode is a value of the text with the line of its key (of an array's item: the line where the item begins).
type lineNode struct {
	line  int
	keys  map[string]*lineNode
	items []*lineNode
}

// child gives the value of a key, made where it is new; line is that of the first mention.
func (n *lineNode) child(key string, line int) *lineNode {
	if len(n.items) > 0 { // a header below [[name]] speaks of the last item
		n = n.items[len(n.items)-1]
	}
	if n.keys == nil {
		n.keys = map[string]*lineNode{}
	}
	c := n.keys[key]
	if c == nil {
		c = &lineNode{line: line}
		n.keys[key] = c
	}
	return c
}

// lineWalker walks the text. On a text that is no TOML it ends early, but it always ends.
type lineWalker struct {
	text string
	pos  int
	line int
}

// keyLines gives the root table of the text.
func keyLines(text string) *lineNode {
	w := &lineWalker{text: strings.TrimPrefix(text, "\ufeff"), line: 1}
	root := &lineNode{line: 1}
	table := root
	for w.skipBlank(); w.pos < len(w.text); w.skipBlank() {
		before := w.pos
		switch {
		case w.take("[["):
			n := w.path(root)
			item := &lineNode{line: w.line}
			n.items = append(n.items, item)
			table = item
			w.take("]]")
		case w.take("["):
			table = w.path(root)
			if len(table.items) > 0 {
				table = table.items[len(table.items)-1]
			}
			w.take("]")
		default:
			w.assignment(table)
		}
		if w.pos == before {
			break
		}
	}
	return root
}

// assignment walks one "key = value".
func (w *lineWalker) assignment(table *lineNode) {
	n := w.path(table)
	w.skipSpace()
	if w.take("=") {
		w.value(n)
	}
}

// path walks a dotted key below n and gives the node of its last part.
func (w *lineWalker) path(n *lineNode) *lineNode {
	for {
		w.skipSpace()
		line := w.line
		key := w.key()
		n = n.child(key, line)
		w.skipSpace()
		if !w.take(".") {
			return n
		}
	}
}

// key walks one part of a key, bare or quoted.
func (w *lineWalker) key() string {
	if w.pos < len(w.text) && (w.text[w.pos] == '"' || w.text[w.pos] == '\'') {
		from := w.pos
		w.str()
		quoted := w.text[from:w.pos]
		if s, err := strconv.Unquote(quoted); err == nil && quoted[0] == '"' {
			return s
		}
		return strings.Trim(quoted, quoted[:1])
	}
	from := w.pos
	for w.pos < len(w.text) && !strings.ContainsRune(" \t\r\n.=[]{},#\"'", rune(w.text[w.pos])) {
		w.pos++
	}
	return w.text[from:w.pos]
}

// value walks a value and notes the lines of what is in it.
func (w *lineWalker) value(n *lineNode) {
	w.skipSpace()
	if w.pos >= len(w.text) {
		return
	}
	switch w.text[w.pos] {
	case '"', '\'':
		w.str()
	case '[':
		w.pos++
		w.list(']', func() {
			item := &lineNode{line: w.line}
			n.items = append(n.items, item)
			w.value(item)
		})
	case '{':
		w.pos++
		w.list('}', func() { w.assignment(n) })
	default:
		for w.pos < len(w.text) && !strings.ContainsRune(",]}#\n", rune(w.text[w.pos])) {
			w.pos++
		}
	}
}

// list walks the entries up to the closing bracket.
func (w *lineWalker) list(end byte, entry func()) {
	for w.skipBlank(); w.pos < len(w.text); w.skipBlank() {
		if w.text[w.pos] == end {
			w.pos++
			return
		}
		before := w.pos
		if !w.take(",") {
			entry()
		}
		if w.pos == before {
			return
		}
	}
}

// str walks a string of any of the four kinds.
func (w *lineWalker) str() {
	quote := w.text[w.pos : w.pos+1]
	long := strings.Repeat(quote, 3)
	if !strings.HasPrefix(w.text[w.pos:], long) {
		long = quote
	}
	w.pos += len(long)
	for w.pos < len(w.text) && !strings.HasPrefix(w.text[w.pos:], long) {
		switch {
		case w.text[w.pos] == '\n':
			w.line++
		case w.text[w.pos] == '\\' && quote == `"` && w.pos+1 < len(w.text) && w.text[w.pos+1] != '\n':
			w.pos++
		}
		w.pos++
	}
	w.pos = min(w.pos+len(long), len(w.text))
	for len(long) == 3 && w.pos < len(w.text) && w.text[w.pos] == quote[0] { // up to two quotes may end the text itself
		w.pos++
	}
}

func (w *lineWalker) take(s string) bool {
	if !strings.HasPrefix(w.text[w.pos:], s) {
		return false
	}
	w.pos += len(s)
	return true
}

func (w *lineWalker) skipSpace() {
	for w.pos < len(w.text) && (w.text[w.pos] == ' ' || w.text[w.pos] == '\t') {
		w.pos++
	}
}

// skipBlank skips spaces, line ends and comments.
func (w *lineWalker) skipBlank() {
	for w.pos < len(w.text) {
		switch w.text[w.pos] {
		case ' ', '\t', '\r':
		case '\n':
			w.line++
		case '#':
			for w.pos+1 < len(w.text) && w.text[w.pos+1] != '\n' {
				w.pos++
			}
		default:
			return
		}
		w.pos++
	}
}
