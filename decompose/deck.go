package decompose

import (
	"fmt"
	"strconv"
	"strings"

	"maskpair/gds"
)

// This file reads the rule deck. It says which layers of the stream play which part, and how near two shapes may come.
// Everything that can be judged without a stream is judged here; database units come in with Deck.Resolve.

// Deck is the rule deck as written: lengths are decimal numbers of its unit.
type Deck struct {
	File   string // for messages
	Unit   string // "nm" or "um"
	Layers []DeckLayer
	Marks  MarkRules
}

// DeckLayer is a [[layer]] of the deck.
type DeckLayer struct {
	Name                          string
	Drawn                         []gds.LayerType
	MaskA, MaskB                  gds.LayerType
	SameMask, AnyMask             Length
	Redo                          bool
	AnchorA, AnchorB, AnchorLabel *gds.LayerType
	KeepDrawn                     bool
	SameShapeReport               bool
	Spacing                       *DeckSpacing // nil: no [layer.spacing]
	Stitch                        *DeckStitch  // nil: no [layer.stitch]
	Line                          int          // of its [[layer]]
}

// DeckSpacing is a [layer.spacing].
type DeckSpacing struct {
	SideToSide, TipToSide, TipToTip, CornerToCorner, TipWidth Length
	Wide                                                      []DeckWide
}

// DeckWide is an entry of wide.
type DeckWide struct{ Width, Spacing Length }

// DeckStitch is a [layer.stitch].
type DeckStitch struct {
	MinOverlap, MinPiece Length
	KeepOut              []gds.LayerType
	Apply                bool
}

// Length is a length of the deck, in its unit.
type Length struct {
	Value float64
	Given bool // false: the deck does not have it
	key   string
	line  int
}

// ParseDeck reads a deck; name is the file's, for messages. Whatever is wrong with it is a *DeckError.
func ParseDeck(name string, data []byte) (*Deck, error) {
	root, err := ReadText(name, data)
	if err != nil {
		return nil, err
	}
	p := &deckParser{deck: &Deck{File: name}, names: map[string]int{}, roles: map[gds.LayerType]deckRole{}}
	p.root(root)
	if err := root.Err(); err != nil {
		return nil, err
	}
	return p.deck, nil
}

// deckParser reads the tables of a deck. Faults stick to the tables.
type deckParser struct {
	deck  *Deck
	names map[string]int // deck layers by name, with the line
	roles map[gds.LayerType]deckRole
}

// layerRole is the part that a layer of the stream plays.
type deckRole struct {
	key    string // "drawn", "anchor_a", ...
	owner  string // "layer metal1: ", "marks."
	line   int
	marker bool
}

func (p *deckParser) root(t *TextTable) {
	t.Known("unit", "layer", "marks")
	t.Need("unit", "layer")
	p.deck.Unit = t.Choice("unit", "nm", "um")
	layers := t.Tables("layer")
	if t.Has("layer") && len(layers) == 0 {
		t.Fault("layer", "is no [[layer]]; write at least one")
	}
	for i, l := range layers {
		p.layer(i, l)
	}
	if m := t.Table("marks"); m != nil {
		p.marks(m)
	}
}

func (p *deckParser) layer(i int, t *TextTable) {
	d := DeckLayer{Line: t.Line("")}
	t.Prefix(fmt.Sprintf("layer number %d: ", i+1))
	if d.Name = t.Str("name"); d.Name != "" {
		t.Prefix("layer " + d.Name + ": ")
	}
	t.Known("name", "drawn", "mask_a", "mask_b", "same_mask_spacing", "any_mask_spacing", "already_masked", "anchor_a", "anchor_b",
		"anchor_label", "keep_drawn", "same_shape", "spacing", "stitch")
	t.Need("name", "drawn", "mask_a", "mask_b", "same_mask_spacing")
	if line, twice := p.names[d.Name]; twice {
		t.Fault("name", "line %d has the same name; give each layer its own", line)
	}
	p.names[d.Name] = t.Line("name")

	d.Drawn = deckLayerTypes(t, "drawn")
	if t.Has("drawn") && len(d.Drawn) == 0 {
		t.Fault("drawn", `names no layer; write "layer/datatype"`)
	}
	for _, l := range d.Drawn {
		p.play(t, "drawn", l, false)
	}
	d.MaskA, d.MaskB = p.mask(t, "mask_a"), p.mask(t, "mask_b")
	d.AnchorA, d.AnchorB = p.marker(t, "anchor_a"), p.marker(t, "anchor_b")
	d.AnchorLabel = deckLayerType(t, "anchor_label") // texts are no figures: they may share a layer with some

	d.SameMask = deckLength(t, "same_mask_spacing")
	d.AnyMask = deckLength(t, "any_mask_spacing")
	if d.AnyMask.Value > d.SameMask.Value {
		t.Fault("any_mask_spacing", "%g is above same_mask_spacing %g; give at most that", d.AnyMask.Value, d.SameMask.Value)
	}
	d.Redo = t.Choice("already_masked", "anchor", "redo") == "redo"
	d.KeepDrawn = t.Bool("keep_drawn")
	d.SameShapeReport = t.Choice("same_shape", "ignore", "report") == "report"
	if s := t.Table("spacing"); s != nil {
		d.Spacing = parseDeckSpacing(s)
	}
	if s := t.Table("stitch"); s != nil {
		d.Stitch = parseDeckStitch(s)
	}
	p.deck.Layers = append(p.deck.Layers, d)
}

func parseDeckSpacing(t *TextTable) *DeckSpacing {
	t.Known("side_to_side", "tip_to_side", "tip_to_tip", "corner_to_corner", "tip_width", "wide")
	s := &DeckSpacing{
		SideToSide:     deckLength(t, "side_to_side"),
		TipToSide:      deckLength(t, "tip_to_side"),
		TipToTip:       deckLength(t, "tip_to_tip"),
		CornerToCorner: deckLength(t, "corner_to_corner"),
		TipWidth:       deckLength(t, "tip_width"),
	}
	for _, l := range []Length{s.TipToSide, s.TipToTip} {
		if l.Given && !s.TipWidth.Given {
			t.Fault("tip_width", "missing; %s needs it to tell a tip from a side", l.key[strings.LastIndex(l.key, ".")+1:])
		}
	}
	for _, w := range t.Tables("wide") {
		w.Known("width", "spacing")
		w.Need("width", "spacing")
		s.Wide = append(s.Wide, DeckWide{deckLength(w, "width"), deckLength(w, "spacing")})
	}
	return s
}

func parseDeckStitch(t *TextTable) *DeckStitch {
	t.Known("min_overlap", "min_piece", "keep_out", "apply")
	t.Need("min_overlap")
	return &DeckStitch{
		MinOverlap: deckLength(t, "min_overlap"),
		MinPiece:   deckLength(t, "min_piece"),
		KeepOut:    deckLayerTypes(t, "keep_out"),
		Apply:      t.Bool("apply"),
	}
}

func (p *deckParser) marks(t *TextTable) {
	t.Known("unresolved", "cycle", "stitch", "moved", "any_mask", "replace")
	mark := func(key string) *gds.LayerType {
		l := deckLayerType(t, key)
		if l != nil {
			p.play(t, key, *l, false)
		}
		return l
	}
	p.deck.Marks = MarkRules{
		Unresolved: mark("unresolved"),
		Cycle:      mark("cycle"),
		Stitch:     mark("stitch"),
		Moved:      mark("moved"),
		AnyMask:    mark("any_mask"),
		Replace:    t.Bool("replace"),
	}
}

// mask reads the layer of a mask.
func (p *deckParser) mask(t *TextTable, key string) gds.LayerType {
	l := deckLayerType(t, key)
	if l == nil {
		return gds.LayerType{}
	}
	p.play(t, key, *l, false)
	return *l
}

// marker reads a marker layer. One marker layer may anchor shapes of several deck layers, to the same mask.
func (p *deckParser) marker(t *TextTable, key string) *gds.LayerType {
	l := deckLayerType(t, key)
	if l != nil {
		p.play(t, key, *l, true)
	}
	return l
}

// play gives a layer of the stream its part, and notes where it has one already.
func (p *deckParser) play(t *TextTable, key string, l gds.LayerType, marker bool) {
	was, twice := p.roles[l]
	if !twice {
		p.roles[l] = deckRole{key: key, owner: t.prefix, line: t.Line(key), marker: marker}
	} else if !(marker && was.marker && was.key == key) {
		t.Fault(key, "%d/%d is also %s%s (line %d); give each its own layer", l.Layer, l.Type, was.owner, was.key, was.line)
	}
}

// deckLength reads a length, which must be more than zero.
func deckLength(t *TextTable, key string) Length {
	if !t.Has(key) {
		return Length{}
	}
	v := t.Number(key)
	if !(v > 0) {
		t.Fault(key, "is %g; give more than 0, or leave the key out where it is optional", v)
	}
	return Length{Value: v, Given: true, key: t.prefix + key, line: t.Line(key)}
}

// deckLayerType reads "layer/datatype", or nil where the key is absent or wrong.
func deckLayerType(t *TextTable, key string) *gds.LayerType {
	if s := t.Str(key); s != "" {
		return readLayerType(t, key, s)
	}
	return nil
}

// deckLayerTypes reads a "layer/datatype", or a list of them.
func deckLayerTypes(t *TextTable, key string) []gds.LayerType {
	var out []gds.LayerType
	for _, s := range t.Strs(key) {
		if l := readLayerType(t, key, s); l != nil {
			out = append(out, *l)
		}
	}
	return out
}

func readLayerType(t *TextTable, key, s string) *gds.LayerType {
	l, ok := ParseLayerType(s)
	if !ok {
		t.Fault(key, `%q is no layer; write "layer/datatype", two numbers from 0 to 65535`, s)
		return nil
	}
	return &l
}

// ParseLayerType reads "layer/datatype", two decimal numbers from 0 to 65535.
func ParseLayerType(s string) (gds.LayerType, bool) {
	layer, datatype, _ := strings.Cut(s, "/")
	l, err1 := strconv.ParseUint(layer, 10, 16)
	d, err2 := strconv.ParseUint(datatype, 10, 16)
	return gds.LayerType{Layer: uint16(l), Type: uint16(d)}, err1 == nil && err2 == nil
}
