package anchor

import (
	"fmt"
	"strconv"

	"maskpair/decompose"
)

// This file reads the anchor file: orders, wishes and waivers that the user writes by hand, as places in the layout or in a
// cell. What the places hit is not known here.

// File is an anchor file as read. Each list is in file order.
type File struct {
	Name    string // of the file, for messages
	Anchors []Entry
	Alike   []AlikeEntry
	Ties    []TieEntry
	Waivers []WaiverEntry
}

// Entry is an [[anchor]] that puts shapes on a mask.
type Entry struct {
	Index int // among the [[anchor]] tables of the file, alike ones included, from 0
	Line  int // of its [[anchor]]
	Layer int // index into Rules.Layers
	Mask  decompose.Mask
	Box   decompose.Box // half database units; a point (at) is a box without extent
	Cell  string        // coordinates are those of this cell; "": of each top
	Name  string        // for reports; may be empty
	Wish  bool
}

// AlikeEntry is an [[anchor]] with alike: every placement of the cell comes out with the same masks.
type AlikeEntry struct {
	Index int // among the [[anchor]] tables of the file, from 0
	Line  int
	Cell  string
	Name  string
}

// TieEntry is a [[tie]]: the shapes at two places are on the same mask, or on opposite ones.
type TieEntry struct {
	Index    int // among the [[tie]] tables, from 0
	Line     int
	Layer    int
	Opposite bool
	At       [2]decompose.Spot // half database units
	Cell     string
	Name     string
}

// WaiverEntry is a [[waiver]]: the near pair of the shapes at two places may stay on one mask.
type WaiverEntry struct {
	Index  int // among the [[waiver]] tables, from 0
	Line   int
	Layer  int
	At     [2]decompose.Spot // half database units
	Cell   string
	Name   string
	Reason string
}

// ParseFile reads an anchor file; name is the file's, for messages. Layers are looked up in the rules, coordinates are in the
// deck's unit. Whatever is wrong is a *decompose.DeckError.
func ParseFile(name string, data []byte, rules *decompose.Rules) (*File, error) {
	if file, ok := readPlain(name, data, rules); ok {
		return file, nil
	}
	return readAny(name, data, rules)
}

// readAny reads any anchor file.
func readAny(name string, data []byte, rules *decompose.Rules) (*File, error) {
	root, err := decompose.ReadText(name, data)
	if err != nil {
		return nil, err
	}
	p := &parser{file: &File{Name: name}, rules: rules}
	root.Known("anchor", "tie", "waiver")
	for i, t := range root.Tables("anchor") {
		p.anchor(i, t)
	}
	for i, t := range root.Tables("tie") {
		p.tie(i, t)
	}
	for i, t := range root.Tables("waiver") {
		p.waiver(i, t)
	}
	if err := root.Err(); err != nil {
		return nil, err
	}
	return p.file, nil
}

// Cite names an entry in a message: file, line, kind, and its name or number.
func (f *File) Cite(kind, name string, index, line int) string {
	return fmt.Sprintf("%s:%d: %s", f.Name, line, title(kind, name, index))
}

// title names an entry within its file.
func title(kind, name string, index int) string {
	if name != "" {
		return fmt.Sprintf("%s %q", kind, name)
	}
	return fmt.Sprintf("%s number %d", kind, index+1)
}

// parser reads the tables of an anchor file. Faults stick to the tables.
type parser struct {
	file  *File
	rules *decompose.Rules
}

func (p *parser) anchor(i int, t *decompose.TextTable) {
	name := open(t, "anchor", i)
	if t.Bool("alike") {
		p.alike(i, name, t)
		return
	}
	t.Known("layer", "mask", "at", "box", "cell", "name", "wish", "alike")
	t.Need("layer", "mask")
	e := Entry{Index: i, Line: t.Line(""), Layer: p.layer(t), Cell: t.Str("cell"), Name: name, Wish: t.Bool("wish")}
	if t.Choice("mask", "A", "B") == "B" {
		e.Mask = decompose.B
	}
	switch {
	case t.Has("at") && t.Has("box"):
		t.Fault("box", "stands beside at; keep one of the two")
	case t.Has("at"):
		s := p.spot(t, "at", [2]float64(t.Numbers("at", 2)))
		e.Box = decompose.Box{X1: s.X, Y1: s.Y, X2: s.X, Y2: s.Y}
	case t.Has("box"):
		v := t.Numbers("box", 4)
		a, b := p.spot(t, "box", [2]float64(v[:2])), p.spot(t, "box", [2]float64(v[2:]))
		e.Box = decompose.Box{X1: min(a.X, b.X), Y1: min(a.Y, b.Y), X2: max(a.X, b.X), Y2: max(a.Y, b.Y)}
	default:
		t.Fault("at", "missing; say where: at = [x, y], or box = [x1, y1, x2, y2]")
	}
	p.file.Anchors = append(p.file.Anchors, e)
}

func (p *parser) alike(i int, name string, t *decompose.TextTable) {
	for _, key := range []string{"layer", "mask", "at", "box", "wish"} {
		if t.Has(key) {
			t.Fault(key, "has no meaning beside alike; leave it out, or write an [[anchor]] of its own")
		}
	}
	t.Known("cell", "alike", "name")
	t.Need("cell")
	p.file.Alike = append(p.file.Alike, AlikeEntry{Index: i, Line: t.Line(""), Cell: t.Str("cell"), Name: name})
}

func (p *parser) tie(i int, t *decompose.TextTable) {
	name := open(t, "tie", i)
	t.Known("layer", "masks", "at", "cell", "name")
	t.Need("layer", "masks", "at")
	p.file.Ties = append(p.file.Ties, TieEntry{
		Index: i, Line: t.Line(""), Layer: p.layer(t), Cell: t.Str("cell"), Name: name,
		Opposite: t.Choice("masks", "same", "opposite") == "opposite",
		At:       p.two(t),
	})
}

func (p *parser) waiver(i int, t *decompose.TextTable) {
	name := open(t, "waiver", i)
	t.Known("layer", "at", "cell", "reason", "name")
	t.Need("layer", "at", "reason")
	p.file.Waivers = append(p.file.Waivers, WaiverEntry{
		Index: i, Line: t.Line(""), Layer: p.layer(t), Cell: t.Str("cell"), Name: name,
		Reason: t.Str("reason"),
		At:     p.two(t),
	})
}

// open reads the name of an entry and lets its messages begin with it.
func open(t *decompose.TextTable, kind string, i int) string {
	t.Prefix(title(kind, "", i) + ": ")
	name := t.Str("name")
	t.Prefix(title(kind, name, i) + ": ")
	return name
}

// layer gives the index of the deck layer that the entry names.
func (p *parser) layer(t *decompose.TextTable) int {
	name := t.Str("layer")
	known := make([]string, len(p.rules.Layers))
	for i := range p.rules.Layers {
		if known[i] = p.rules.Layers[i].Name; known[i] == name {
			return i
		}
	}
	if name != "" {
		t.Unknown("layer", name, "the deck", known)
	}
	return 0
}

// two reads the two places of a tie or waiver.
func (p *parser) two(t *decompose.TextTable) [2]decompose.Spot {
	v := t.Points("at", 2)
	return [2]decompose.Spot{p.spot(t, "at", v[0]), p.spot(t, "at", v[1])}
}

// spot turns a place in the deck's unit into half database units.
func (p *parser) spot(t *decompose.TextTable, key string, v [2]float64) decompose.Spot {
	var half [2]int64
	for i := range v {
		h, ok := p.rules.HalfUnits(v[i])
		if !ok {
			t.Fault(key, "%s %s is no whole number of half database units within the plane (half a unit is %s); correct it",
				strconv.FormatFloat(v[i], 'f', -1, 64), p.rules.Unit, p.rules.Length(0.5))
		}
		half[i] = h
	}
	return decompose.Spot{X: half[0], Y: half[1]}
}
