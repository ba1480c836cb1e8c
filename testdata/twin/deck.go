package twin

import (
	"fmt"
	"strconv"
	"strings"

	"maskpair/gds"
)

// This file is the rule deck as a value.

// Layer is a deck layer. Lengths are database units.
type Layer struct {
	Name             string
	Drawn            []gds.LayerType
	Masks            [2]gds.LayerType
	Spacing, AnyMask int64 // AnyMask 0: not given
	Redo, KeepDrawn  bool
}

// Deck is a rule deck.
type Deck struct {
	Layers []Layer
	Marks  []gds.LayerType // nil, or layers for marks of unresolved pairs, of cycles and of pairs below any_mask_spacing
}

// TOML gives the deck as a file for layouts with a database unit of dbu metres.
func (d *Deck) TOML(dbu float64) string {
	if dbu == 0 {
		dbu = 1e-9
	}
	var b strings.Builder
	b.WriteString("unit = \"nm\"\n")
	length := func(units int64) string {
		// dbu is a nanometre or a plain part of one, so the product is a short decimal
		return strconv.FormatFloat(float64(units)*dbu*1e9, 'g', 12, 64)
	}
	for _, l := range d.Layers {
		fmt.Fprintf(&b, "\n[[layer]]\nname = %q\n", l.Name)
		var drawn []string
		for _, k := range l.Drawn {
			drawn = append(drawn, strconv.Quote(layerName(k)))
		}
		fmt.Fprintf(&b, "drawn = [%s]\nmask_a = %q\nmask_b = %q\n", strings.Join(drawn, ", "), layerName(l.Masks[0]), layerName(l.Masks[1]))
		fmt.Fprintf(&b, "same_mask_spacing = %s\n", length(l.Spacing))
		if l.AnyMask > 0 {
			fmt.Fprintf(&b, "any_mask_spacing = %s\n", length(l.AnyMask))
		}
		if l.Redo {
			b.WriteString("already_masked = \"redo\"\n")
		}
		if l.KeepDrawn {
			b.WriteString("keep_drawn = true\n")
		}
	}
	if d.Marks != nil {
		b.WriteString("\n[marks]\n")
		for i, key := range []string{"unresolved", "cycle", "any_mask"} {
			fmt.Fprintf(&b, "%s = %q\n", key, layerName(d.Marks[i]))
		}
	}
	return b.String()
}

func layerName(k gds.LayerType) string { return fmt.Sprintf("%d/%d", k.Layer, k.Type) }

// role is the part that a layer of the stream plays: arrives is Drawn, or the mask.
type role struct {
	layer   int
	arrives Mask
}

// roles gives the part of each layer of figures.
func (d *Deck) roles() map[gds.LayerType]role {
	m := map[gds.LayerType]role{}
	for i, l := range d.Layers {
		for _, k := range l.Drawn {
			m[k] = role{i, Drawn}
		}
		m[l.Masks[0]], m[l.Masks[1]] = role{i, A}, role{i, B}
	}
	return m
}
