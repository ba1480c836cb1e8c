package twin

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"slices"
	"strconv"

	"maskpair/gds"
)

// This file compares an output with its input record by record: with masks put back to the drawn layer, variants to their
// originals and split arrays together, the output is the input byte for byte.

// block is a structure as records.
type block struct {
	name     string
	head     []byte // BGNSTR
	named    []byte // STRNAME
	class    []byte // STRCLASS, where there is one
	elements [][]Record
	foot     []byte // ENDSTR
}

// blocks cuts a stream into what stands before the structures, the structures, and what comes behind them.
func blocks(stream []byte) (head []byte, list []block, tail []byte, err error) {
	records, err := Records(stream)
	if err != nil {
		return nil, nil, nil, err
	}
	offset, end := 0, -1
	inside := false
	for _, r := range records {
		switch {
		case r.Kind == gds.BGNSTR:
			if len(list) == 0 {
				head = stream[:offset]
			}
			list = append(list, block{head: r.Raw})
			inside = true
		case r.Kind == gds.ENDSTR:
			inside = false
			end = offset + len(r.Raw)
			if len(list) > 0 {
				list[len(list)-1].foot = r.Raw
			}
		case inside:
			b := &list[len(list)-1]
			switch {
			case r.Kind == gds.STRNAME:
				b.name, b.named = name(r.Data), r.Raw
			case r.Kind == gds.BOUNDARY, r.Kind == gds.PATH, r.Kind == gds.BOX, r.Kind == gds.NODE, r.Kind == gds.TEXT, r.Kind == gds.SREF, r.Kind == gds.AREF:
				b.elements = append(b.elements, []Record{r})
			case len(b.elements) > 0:
				last := len(b.elements) - 1
				b.elements[last] = append(b.elements[last], r)
			default: // STRCLASS
				b.class = append(b.class, r.Raw...)
			}
		}
		offset += len(r.Raw)
	}
	if end < 0 {
		return stream, nil, nil, nil
	}
	return head, list, stream[end:], nil
}

// Restores tells whether an output stream is its input, apart from masks, variants, split arrays and marks.
func (d *Deck) Restores(in, out []byte) error {
	inHead, inBlocks, inTail, err := blocks(in)
	if err != nil {
		return fmt.Errorf("the input: %v", err)
	}
	outHead, outBlocks, outTail, err := blocks(out)
	if err != nil {
		return fmt.Errorf("the output: %v", err)
	}
	if !bytes.Equal(inHead, outHead) || !bytes.Equal(inTail, outTail) {
		return fmt.Errorf("head or tail of the library differ")
	}
	taken := map[string]bool{}
	for _, b := range inBlocks {
		taken[b.name] = true
	}
	r := restorer{deck: d, roles: d.roles(), original: map[string]string{}}
	owner := "" // of the variants that follow
	for _, b := range outBlocks {
		if taken[b.name] {
			owner = b.name
		}
		r.original[b.name] = owner
	}
	next := 0
	for i := range inBlocks {
		b := &inBlocks[i]
		for n := 0; ; n++ {
			if next == len(outBlocks) || r.original[outBlocks[next].name] != b.name {
				if n == 0 {
					return fmt.Errorf("structure %s is not at its place in the output", b.name)
				}
				break
			}
			o := &outBlocks[next]
			if want := variantName(b.name, n, taken); o.name != want {
				return fmt.Errorf("variant %d of %s is named %s, want %s", n, b.name, o.name, want)
			}
			if err := r.same(b, o); err != nil {
				return fmt.Errorf("structure %s: %v", o.name, err)
			}
			next++
		}
	}
	if next != len(outBlocks) {
		return fmt.Errorf("structure %s is at no place of the input", outBlocks[next].name)
	}
	return nil
}

// variantName gives the name of a variant: the first free numbers, from 2.
func variantName(name string, n int, taken map[string]bool) string {
	for k := 2; n > 0; k++ {
		if v := name + "$" + strconv.Itoa(k); !taken[v] {
			if n--; n == 0 {
				return v
			}
		}
	}
	return name
}

type restorer struct {
	deck     *Deck
	roles    map[gds.LayerType]role
	original map[string]string // of structures of the output
}

// same compares a structure with itself or a variant in the output.
func (r *restorer) same(in, out *block) error {
	if !bytes.Equal(in.head, out.head) || !bytes.Equal(in.class, out.class) || in.name == out.name && !bytes.Equal(in.named, out.named) {
		return fmt.Errorf("its dates, class or padding of the name differ")
	}
	rest := out.elements
	for i, e := range in.elements {
		n, err := r.element(e, rest)
		if err != nil {
			return fmt.Errorf("element %d (%v): %v", i+1, e[0].Kind, err)
		}
		rest = rest[n:]
	}
	for _, e := range rest {
		if layer, ok := layerOf(e); !ok || e[0].Kind != gds.BOUNDARY || !slices.Contains(r.deck.Marks, layer) {
			return fmt.Errorf("a %v more than in the input", e[0].Kind)
		}
	}
	return nil
}

// element finds an element at the head of rest and tells how many it became.
func (r *restorer) element(e []Record, rest [][]Record) (int, error) {
	if len(rest) == 0 {
		return 0, fmt.Errorf("is not in the output")
	}
	equal := equalBut(e, rest[0])
	switch e[0].Kind {
	case gds.BOUNDARY, gds.PATH:
		from, _ := layerOf(e)
		role, ok := r.roles[from]
		if equal && !(ok && role.arrives == Drawn && r.deck.Layers[role.layer].KeepDrawn) {
			return 1, nil
		}
		if !ok {
			break
		}
		l := &r.deck.Layers[role.layer]
		onMask := func(o []Record) bool {
			to, _ := layerOf(o)
			return equalBut(e, o, gds.LAYER, gds.DATATYPE) && (to == l.Masks[A] || to == l.Masks[B])
		}
		switch {
		case role.arrives != Drawn && !l.Redo:
		case role.arrives == Drawn && l.KeepDrawn:
			if equal && len(rest) > 1 && onMask(rest[1]) {
				return 2, nil
			}
			if equal { // it covers nothing
				return 1, nil
			}
		case onMask(rest[0]):
			return 1, nil
		}
	case gds.SREF, gds.AREF:
		if equal || equalBut(e, rest[0], gds.SNAME) && r.original[sname(rest[0])] == sname(e) {
			return 1, nil
		}
		if e[0].Kind == gds.AREF {
			return r.array(e, rest)
		}
	default:
		if equal {
			return 1, nil
		}
	}
	return 0, fmt.Errorf("came out otherwise")
}

// array puts the parts of a split array together again.
func (r *restorer) array(e []Record, rest [][]Record) (int, error) {
	want := map[[2]int64]int{}
	left := 0
	for _, p := range elementPlaces(e) {
		want[p]++
		left++
	}
	n := 0
	for left > 0 {
		if n == len(rest) || rest[n][0].Kind != gds.SREF && rest[n][0].Kind != gds.AREF {
			return 0, fmt.Errorf("its parts lack %d elements", left)
		}
		o := rest[n]
		if !equalBut(e[1:], o[1:], gds.SNAME, gds.COLROW, gds.XY) || r.original[sname(o)] != sname(e) {
			return 0, fmt.Errorf("one of its parts differs in more than name and places")
		}
		for _, p := range elementPlaces(o) {
			if want[p] == 0 {
				return 0, fmt.Errorf("one of its parts has an element at %v, where it had none", p)
			}
			want[p]--
			left--
		}
		n++
	}
	return n, nil
}

// elementPlaces gives the places of the elements of a reference.
func elementPlaces(e []Record) [][2]int64 {
	r := Element{Kind: Reference, Columns: 1, Rows: 1}
	for _, rec := range e {
		switch rec.Kind {
		case gds.AREF:
			r.Kind = Array
		case gds.COLROW:
			r.Columns, r.Rows = int(binary.BigEndian.Uint16(rec.Data)), int(binary.BigEndian.Uint16(rec.Data[2:]))
		case gds.XY:
			for d := rec.Data; len(d) >= 8; d = d[8:] {
				r.Points = append(r.Points, gds.Point{X: int4(d), Y: int4(d[4:])})
			}
		}
	}
	var f flattener
	var out [][2]int64
	for row := range r.Rows {
		for column := range r.Columns {
			x, y := f.element(&r, column, row)
			out = append(out, [2]int64{x, y})
		}
	}
	return out
}

// equalBut tells whether two elements have the same records, apart from those of some kinds.
func equalBut(e, o []Record, but ...gds.Kind) bool {
	keep := func(list []Record) []Record {
		var out []Record
		for _, r := range list {
			if !slices.Contains(but, r.Kind) {
				out = append(out, r)
			}
		}
		return out
	}
	return slices.EqualFunc(keep(e), keep(o), func(a, b Record) bool { return bytes.Equal(a.Raw, b.Raw) })
}

func layerOf(e []Record) (gds.LayerType, bool) {
	var l gds.LayerType
	ok := false
	for _, r := range e {
		switch r.Kind {
		case gds.LAYER:
			l.Layer, ok = binary.BigEndian.Uint16(r.Data), true
		case gds.DATATYPE, gds.BOXTYPE, gds.NODETYPE, gds.TEXTTYPE:
			l.Type = binary.BigEndian.Uint16(r.Data)
		}
	}
	return l, ok
}

func sname(e []Record) string {
	for _, r := range e {
		if r.Kind == gds.SNAME {
			return name(r.Data)
		}
	}
	return ""
}
