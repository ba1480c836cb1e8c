package verify_test

import (
	"bytes"
	"encoding/binary"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"maskpair/gds"
)

// This file breaks right outputs on purpose, each time in one way, and wants every one of them refused. The changes are made
// on bare records by code of this file alone.

var keepBroken = flag.String("keep-broken", "", "write every output, right (numbers from 0 down) or broken, with its input, deck and anchor file, to a folder of its own in this one")

// record is a record with its head.
type record []byte

func (r record) kind() gds.Kind { return gds.Kind(r[2]) }
func (r record) data() []byte   { return r[4:] }

func newRecord(kind gds.Kind, data []byte) record {
	if len(data)%2 != 0 {
		data = append(slices.Clone(data), 0)
	}
	r := binary.BigEndian.AppendUint16(nil, uint16(4+len(data)))
	return append(append(r, byte(kind), byte(kind.Type())), data...)
}

// element is an element, from the record that opens it to ENDEL.
type element []record

type structure struct {
	head     []record // BGNSTR, STRNAME, ...
	elements []element
}

// library is a stream taken apart.
type library struct {
	head       []record
	structures []structure
	tail       []byte // from ENDLIB on
}

func takeApart(b []byte) *library {
	l := &library{}
	for {
		n := int(binary.BigEndian.Uint16(b))
		r := record(slices.Clone(b[:n]))
		if r.kind() == gds.ENDLIB {
			l.tail = slices.Clone(b)
			return l
		}
		b = b[n:]
		var s *structure
		if len(l.structures) > 0 {
			s = &l.structures[len(l.structures)-1]
		}
		switch r.kind() {
		case gds.BGNSTR:
			l.structures = append(l.structures, structure{head: []record{r}})
		case gds.ENDSTR:
		case gds.BOUNDARY, gds.PATH, gds.SREF, gds.AREF, gds.TEXT, gds.NODE, gds.BOX:
			s.elements = append(s.elements, element{r})
		default:
			switch {
			case s == nil:
				l.head = append(l.head, r)
			case len(s.elements) == 0 || s.elements[len(s.elements)-1].ended():
				s.head = append(s.head, r)
			default:
				e := &s.elements[len(s.elements)-1]
				*e = append(*e, r)
			}
		}
	}
}

func (e element) ended() bool { return e[len(e)-1].kind() == gds.ENDEL }

func (l *library) bytes() []byte {
	var b []byte
	for _, r := range l.head {
		b = append(b, r...)
	}
	for _, s := range l.structures {
		for _, r := range s.head {
			b = append(b, r...)
		}
		for _, e := range s.elements {
			for _, r := range e {
				b = append(b, r...)
			}
		}
		b = append(b, newRecord(gds.ENDSTR, nil)...)
	}
	return append(b, l.tail...)
}

func (e element) clone() element {
	out := make(element, len(e))
	for i, r := range e {
		out[i] = slices.Clone(r)
	}
	return out
}

func (e element) kind() gds.Kind { return e[0].kind() }

func (e element) find(kind gds.Kind) record {
	for _, r := range e {
		if r.kind() == kind {
			return r
		}
	}
	return nil
}

// cut tells whether the element is a piece of the figure that byHand names so by its property.
func (e element) cut() bool {
	v := e.find(gds.PROPVALUE)
	return v != nil && strings.HasPrefix(string(v.data()), "cut")
}

func (e element) figure() bool    { return e.kind() == gds.BOUNDARY || e.kind() == gds.PATH }
func (e element) reference() bool { return e.kind() == gds.SREF || e.kind() == gds.AREF }

func (e element) layer() gds.LayerType {
	return gds.LayerType{Layer: binary.BigEndian.Uint16(e.find(gds.LAYER).data()), Type: binary.BigEndian.Uint16(e.find(gds.DATATYPE).data())}
}

func (e element) setLayer(l gds.LayerType) {
	binary.BigEndian.PutUint16(e.find(gds.LAYER).data(), l.Layer)
	binary.BigEndian.PutUint16(e.find(gds.DATATYPE).data(), l.Type)
}

func (e element) name() string { return strings.TrimRight(string(e.find(gds.SNAME).data()), "\x00") }

func (s *structure) name() string { return strings.TrimRight(string(s.head[1].data()), "\x00") }

// coordinate gives the i-th number of the element's first XY record.
func (e element) coordinate(i int) int32 {
	return int32(binary.BigEndian.Uint32(e.find(gds.XY).data()[4*i:]))
}

func (e element) setCoordinate(i int, v int32) {
	binary.BigEndian.PutUint32(e.find(gds.XY).data()[4*i:], uint32(v))
}

func (e element) coordinates() int { return len(e.find(gds.XY).data()) / 4 }

// box gives a boundary that is a rectangle.
func (e element) box() (x1, y1, x2, y2 int32, ok bool) {
	if e.kind() != gds.BOUNDARY || e.coordinates() != 10 {
		return 0, 0, 0, 0, false
	}
	x1, y1, x2, y2 = e.coordinate(0), e.coordinate(1), e.coordinate(4), e.coordinate(5)
	return min(x1, x2), min(y1, y2), max(x1, x2), max(y1, y2), true
}

// masked is a right output that is to be broken.
type masked struct {
	name    string
	deck    string
	anchors string
	drawn   []byte
	out     []byte
	spacing int64
	drawnOn gds.LayerType
	a, b    gds.LayerType
	cuts    bool // shapes may be stitched
	keep    bool // drawn figures stay
}

func (m *masked) onMask(e element) bool {
	return e.figure() && (e.layer() == m.a || e.layer() == m.b)
}

func (m *masked) other(l gds.LayerType) gds.LayerType {
	if l == m.a {
		return m.b
	}
	return m.a
}

// breaker breaks a stream at a place of its choice; false where there is none.
type breaker struct {
	name string
	do   func(m *masked, l *library, rng *rand.Rand) bool
	// alone: it must be found without the drawn layout as well.
	alone bool
}

// pick chooses an element that fits, over all structures.
func pick(l *library, rng *rand.Rand, fits func(s *structure, e element) bool) (s *structure, at int, ok bool) {
	type place struct{ s, e int }
	var all []place
	for i := range l.structures {
		for k, e := range l.structures[i].elements {
			if fits(&l.structures[i], e) {
				all = append(all, place{i, k})
			}
		}
	}
	if len(all) == 0 {
		return nil, 0, false
	}
	p := all[rng.IntN(len(all))]
	return &l.structures[p.s], p.e, true
}

// change makes a breaker that changes an element in place.
func change(name string, fits func(m *masked, e element) bool, do func(m *masked, e *element, rng *rand.Rand)) breaker {
	return breaker{name: name, do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return fits(m, e) })
		if ok {
			do(m, &s.elements[at], rng)
		}
		return ok
	}}
}

func without(e element, i int) element { return slices.Delete(e.clone(), i, i+1) }

func indexOf(e element, kind gds.Kind) int {
	return slices.IndexFunc(e, func(r record) bool { return r.kind() == kind })
}

func onMask(m *masked, e element) bool { return m.onMask(e) }

func isKind(kinds ...gds.Kind) func(*masked, element) bool {
	return func(_ *masked, e element) bool { return slices.Contains(kinds, e.kind()) }
}

func has(kind gds.Kind) func(*masked, element) bool {
	return func(_ *masked, e element) bool { return e.find(kind) != nil }
}

// closePair finds two rectangles of one structure on masks: near each other on opposite ones, or touching on one.
func closePair(m *masked, l *library, rng *rand.Rand, near bool) (*structure, int, bool) {
	return pick(l, rng, func(s *structure, e element) bool {
		x1, y1, x2, y2, ok := e.box()
		if !ok || !m.onMask(e) {
			return false
		}
		for _, f := range s.elements {
			u1, v1, u2, v2, ok := f.box()
			if !ok || !m.onMask(f) || &f[0] == &e[0] {
				continue
			}
			dx, dy := max(0, int64(u1)-int64(x2), int64(x1)-int64(u2)), max(0, int64(v1)-int64(y2), int64(y1)-int64(v2))
			gap := dx*dx + dy*dy
			if near && gap > 0 && gap < m.spacing*m.spacing && e.layer() != f.layer() || !near && gap == 0 && e.layer() == f.layer() {
				return true
			}
		}
		return false
	})
}

var breakers = []breaker{
	change("a figure moved by a unit", onMask, func(_ *masked, e *element, rng *rand.Rand) {
		axis := rng.IntN(2)
		for i := axis; i < e.coordinates(); i += 2 {
			e.setCoordinate(i, e.coordinate(i)+1)
		}
	}),
	change("a corner moved by a unit", func(m *masked, e element) bool { return m.onMask(e) && e.kind() == gds.BOUNDARY }, func(_ *masked, e *element, rng *rand.Rand) {
		i := 2 + rng.IntN(e.coordinates()-4) // not the first point, which is also the last
		e.setCoordinate(i, e.coordinate(i)+1)
	}),
	{name: "a near pair left", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := closePair(m, l, rng, true)
		if ok {
			s.elements[at].setLayer(m.other(s.elements[at].layer()))
		}
		return ok
	}},
	{name: "a part of a shape recoloured", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		if m.cuts {
			return false
		}
		s, at, ok := closePair(m, l, rng, false)
		if ok {
			s.elements[at].setLayer(m.other(s.elements[at].layer()))
		}
		return ok
	}},
	{name: "a figure lost", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return m.onMask(e) })
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	{name: "a figure doubled", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return m.onMask(e) })
		if ok {
			s.elements = slices.Insert(s.elements, at, s.elements[at].clone())
		}
		return ok
	}},
	{name: "a figure on both masks", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return m.onMask(e) })
		if ok {
			second := s.elements[at].clone()
			second.setLayer(m.other(second.layer()))
			s.elements = slices.Insert(s.elements, at+1, second)
		}
		return ok
	}},
	{name: "a figure left on the drawn layer", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		if m.keep {
			return false
		}
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return m.onMask(e) })
		if ok {
			s.elements[at].setLayer(m.drawnOn)
		}
		return ok
	}},
	{name: "a drawn figure that does not stay", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return m.keep && e.figure() && e.layer() == m.drawnOn })
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	{name: "a label gone", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return e.kind() == gds.TEXT })
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	change("a label with another text", isKind(gds.TEXT), func(_ *masked, e *element, _ *rand.Rand) {
		(*e)[indexOf(*e, gds.STRING)] = newRecord(gds.STRING, []byte("other"))
	}),
	change("a property gone", func(_ *masked, e element) bool { return e.find(gds.PROPATTR) != nil && !e.cut() }, func(_ *masked, e *element, _ *rand.Rand) {
		i := indexOf(*e, gds.PROPATTR)
		*e = without(without(*e, i), i)
	}),
	change("a property with another value", has(gds.PROPVALUE), func(_ *masked, e *element, _ *rand.Rand) {
		(*e)[indexOf(*e, gds.PROPVALUE)] = newRecord(gds.PROPVALUE, []byte("changed"))
	}),
	change("flags gone", has(gds.ELFLAGS), func(_ *masked, e *element, _ *rand.Rand) { *e = without(*e, indexOf(*e, gds.ELFLAGS)) }),
	change("a plex gone", has(gds.PLEX), func(_ *masked, e *element, _ *rand.Rand) { *e = without(*e, indexOf(*e, gds.PLEX)) }),
	change("a path become a boundary", func(m *masked, e element) bool {
		return e.kind() == gds.PATH && e.coordinates() == 4 && e.coordinate(1) == e.coordinate(3) && e.find(gds.PATHTYPE) == nil &&
			binary.BigEndian.Uint32(e.find(gds.WIDTH).data())%2 == 0
	}, func(_ *masked, e *element, _ *rand.Rand) {
		half := int32(binary.BigEndian.Uint32(e.find(gds.WIDTH).data())) / 2
		x1, x2, y := e.coordinate(0), e.coordinate(2), e.coordinate(1)
		var xy []byte
		for _, v := range []int32{x1, y - half, x2, y - half, x2, y + half, x1, y + half, x1, y - half} {
			xy = binary.BigEndian.AppendUint32(xy, uint32(v))
		}
		*e = element{newRecord(gds.BOUNDARY, nil), e.find(gds.LAYER), e.find(gds.DATATYPE), newRecord(gds.XY, xy), newRecord(gds.ENDEL, nil)}
	}),
	change("a path of another width", has(gds.WIDTH), func(_ *masked, e *element, _ *rand.Rand) {
		w := e.find(gds.WIDTH).data()
		binary.BigEndian.PutUint32(w, binary.BigEndian.Uint32(w)+2)
	}),
	change("a path with other ends", isKind(gds.PATH), func(_ *masked, e *element, _ *rand.Rand) {
		if i := indexOf(*e, gds.PATHTYPE); i >= 0 {
			*e = without(*e, i)
			return
		}
		*e = slices.Insert(e.clone(), indexOf(*e, gds.DATATYPE)+1, newRecord(gds.PATHTYPE, []byte{0, 2}))
	}),
	{name: "a structure or variant that lost a box or node", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return e.kind() == gds.BOX || e.kind() == gds.NODE })
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	change("an array one column short", isKind(gds.AREF), func(_ *masked, e *element, _ *rand.Rand) {
		// The steps stay, so that the rest of the array does.
		c := e.find(gds.COLROW).data()
		n := int32(binary.BigEndian.Uint16(c))
		for i := range 2 {
			from, to := e.coordinate(i), e.coordinate(2+i)
			e.setCoordinate(2+i, from+(to-from)/n*(n-1))
		}
		binary.BigEndian.PutUint16(c, uint16(max(n-1, 1)))
		if n == 1 {
			e.setCoordinate(0, e.coordinate(0)+1)
		}
	}),
	change("an array one row long", isKind(gds.AREF), func(_ *masked, e *element, _ *rand.Rand) {
		c := e.find(gds.COLROW).data()
		n := int32(binary.BigEndian.Uint16(c[2:]))
		for i := range 2 {
			from, to := e.coordinate(i), e.coordinate(4+i)
			e.setCoordinate(4+i, from+(to-from)/n*(n+1))
		}
		binary.BigEndian.PutUint16(c[2:], uint16(n+1))
	}),
	change("an array with another pitch", isKind(gds.AREF), func(_ *masked, e *element, _ *rand.Rand) {
		e.setCoordinate(2, e.coordinate(2)+int32(binary.BigEndian.Uint16(e.find(gds.COLROW).data())))
		if binary.BigEndian.Uint16(e.find(gds.COLROW).data()) == 1 {
			e.setCoordinate(1, e.coordinate(1)-1)
		}
	}),
	{name: "a reference lost", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return e.reference() })
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	{name: "a reference doubled", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool { return e.reference() })
		if ok {
			s.elements = slices.Insert(s.elements, at, s.elements[at].clone())
		}
		return ok
	}},
	change("a reference moved by a unit", isKind(gds.SREF, gds.AREF), func(_ *masked, e *element, rng *rand.Rand) {
		for i := rng.IntN(2); i < e.coordinates(); i += 2 {
			e.setCoordinate(i, e.coordinate(i)-1)
		}
	}),
	change("a reference turned", isKind(gds.SREF), func(_ *masked, e *element, _ *rand.Rand) {
		if i := indexOf(*e, gds.STRANS); i >= 0 {
			(*e)[i].data()[0] ^= 0x80
			return
		}
		*e = slices.Insert(e.clone(), indexOf(*e, gds.SNAME)+1, newRecord(gds.STRANS, []byte{0x80, 0}))
	}),
	{name: "a reference to the other variant", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		// In the layouts with variants here, such a pair alternates along a row for a reason.
		names := map[string]bool{}
		for i := range l.structures {
			names[l.structures[i].name()] = true
		}
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			return e.reference() && (names[e.name()+"$2"] || strings.HasSuffix(e.name(), "$2")) && m.name == "by hand"
		})
		if ok {
			e := s.elements[at]
			name, is := strings.CutSuffix(e.name(), "$2")
			if !is {
				name += "$2"
			}
			e[indexOf(e, gds.SNAME)] = newRecord(gds.SNAME, []byte(name))
		}
		return ok
	}},
	change("a reference to a structure that is not there", isKind(gds.SREF, gds.AREF), func(_ *masked, e *element, _ *rand.Rand) {
		(*e)[indexOf(*e, gds.SNAME)] = newRecord(gds.SNAME, []byte("nowhere"))
	}),
	{name: "two elements in the other order", do: func(m *masked, l *library, rng *rand.Rand) bool {
		var all []*structure
		for i := range l.structures {
			if len(l.structures[i].elements) > 1 {
				all = append(all, &l.structures[i])
			}
		}
		if len(all) == 0 {
			return false
		}
		s := all[rng.IntN(len(all))]
		at := rng.IntN(len(s.elements) - 1)
		s.elements[at], s.elements[at+1] = s.elements[at+1], s.elements[at]
		return true
	}},
	{name: "two structures in the other order", do: func(m *masked, l *library, rng *rand.Rand) bool {
		if len(l.structures) < 2 {
			return false
		}
		at := rng.IntN(len(l.structures) - 1)
		l.structures[at], l.structures[at+1] = l.structures[at+1], l.structures[at]
		return true
	}},
	{name: "a variant of another name", do: func(m *masked, l *library, rng *rand.Rand) bool {
		for i := range l.structures {
			name := l.structures[i].name()
			stem, ok := strings.CutSuffix(name, "$2")
			if !ok {
				continue
			}
			to := []string{"$4", "$02", "_2"}[rng.IntN(3)]
			l.structures[i].head[1] = newRecord(gds.STRNAME, []byte(stem+to))
			for k := range l.structures {
				for _, e := range l.structures[k].elements {
					if e.reference() && e.name() == name {
						e[indexOf(e, gds.SNAME)] = newRecord(gds.SNAME, []byte(stem+to))
					}
				}
			}
			return true
		}
		return false
	}},
	{name: "a variant lost", do: func(m *masked, l *library, rng *rand.Rand) bool {
		at := slices.IndexFunc(l.structures, func(s structure) bool { return strings.Contains(s.name(), "$") })
		if at >= 0 {
			l.structures = slices.Delete(l.structures, at, at+1)
		}
		return at >= 0
	}},
	{name: "a structure more", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s := l.structures[rng.IntN(len(l.structures))]
		s.head = slices.Clone(s.head)
		s.head[1] = newRecord(gds.STRNAME, []byte(s.name()+"$77"))
		l.structures = append(l.structures, s)
		return true
	}},
	{name: "other dates of a structure", do: func(m *masked, l *library, rng *rand.Rand) bool {
		l.structures[rng.IntN(len(l.structures))].head[0].data()[1]++
		return true
	}},
	{name: "another head of the library", do: func(m *masked, l *library, rng *rand.Rand) bool {
		// Not UNITS: with another database unit the deck means other lengths.
		at := rng.IntN(len(l.head) - 1)
		l.head[at].data()[len(l.head[at].data())-1] ^= 1
		return true
	}},
	{name: "other bytes behind the library", do: func(m *masked, l *library, rng *rand.Rand) bool {
		l.tail = append(l.tail, make([]byte, 2+rng.IntN(3))...)
		return true
	}},
	change("a figure of another layer moved", func(m *masked, e element) bool {
		return (e.figure() && !m.onMask(e) && e.layer() != m.drawnOn)
	}, func(_ *masked, e *element, _ *rand.Rand) { e.setCoordinate(0, e.coordinate(0)+1) }),
	change("a figure of another layer on a third one", func(m *masked, e element) bool {
		return (e.figure() && !m.onMask(e) && e.layer() != m.drawnOn)
	}, func(_ *masked, e *element, _ *rand.Rand) { e.setLayer(gds.LayerType{Layer: 77, Type: 7}) }),
	{name: "a figure of another layer lost", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			return e.figure() && !m.onMask(e) && e.layer() != m.drawnOn && e.layer().Layer != 230
		})
		if ok {
			s.elements = slices.Delete(s.elements, at, at+1)
		}
		return ok
	}},
	{name: "a figure more", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s := &l.structures[rng.IntN(len(l.structures))]
		var xy []byte
		for _, v := range []int32{90000, 90000, 90020, 90000, 90020, 90020, 90000, 90020, 90000, 90000} {
			xy = binary.BigEndian.AppendUint32(xy, uint32(v))
		}
		e := element{newRecord(gds.BOUNDARY, nil), newRecord(gds.LAYER, []byte{0, 0}), newRecord(gds.DATATYPE, []byte{0, 0}), newRecord(gds.XY, xy), newRecord(gds.ENDEL, nil)}
		e.setLayer([]gds.LayerType{m.a, m.b, {Layer: 78}}[rng.IntN(3)])
		s.elements = slices.Insert(s.elements, rng.IntN(len(s.elements)+1), e)
		return true
	}},
	change("the same outline from another corner", func(m *masked, e element) bool { return m.onMask(e) && e.kind() == gds.BOUNDARY }, func(_ *masked, e *element, _ *rand.Rand) {
		xy := e.find(gds.XY).data()
		points := append(slices.Clone(xy[8:]), xy[8:16]...)
		copy(xy, points)
	}),
	{name: "a mark before other elements", do: func(m *masked, l *library, rng *rand.Rand) bool {
		for i := range l.structures {
			s := &l.structures[i]
			at := len(s.elements) - 1
			if at > 0 && s.elements[at].figure() && s.elements[at].layer().Layer == 230 {
				mark := s.elements[at]
				s.elements = slices.Insert(s.elements[:at], rng.IntN(at), mark)
				return slices.IndexFunc(s.elements, func(e element) bool { return !e.figure() || e.layer().Layer != 230 }) >= 0 &&
					!(s.elements[len(s.elements)-2].figure() && s.elements[len(s.elements)-2].layer().Layer == 230)
			}
		}
		return false
	}},
	{name: "a mark in a cell", do: func(m *masked, l *library, rng *rand.Rand) bool {
		placed := map[string]bool{}
		var mark element
		for i := range l.structures {
			for _, e := range l.structures[i].elements {
				if e.reference() {
					placed[e.name()] = true
				}
				if e.figure() && e.layer().Layer == 230 {
					mark = e
				}
			}
		}
		for i := range l.structures {
			if placed[l.structures[i].name()] && mark != nil {
				l.structures[i].elements = append(l.structures[i].elements, mark.clone())
				return true
			}
		}
		return false
	}},
	{name: "an anchor broken", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		// Figures with the property "pinned" stand alone and are under an order.
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			return m.onMask(e) && e.find(gds.PROPVALUE) != nil && strings.HasPrefix(string(e.find(gds.PROPVALUE).data()), "pinned")
		})
		if ok {
			s.elements[at].setLayer(m.other(s.elements[at].layer()))
		}
		return ok
	}},
	{name: "a figure that arrived on a mask on the other one", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			return m.onMask(e) && e.find(gds.PROPVALUE) != nil && strings.HasPrefix(string(e.find(gds.PROPVALUE).data()), "arrived")
		})
		if ok {
			s.elements[at].setLayer(m.other(s.elements[at].layer()))
		}
		return ok
	}},
	{name: "an overlap a unit shorter", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		// Pieces have the property "cut" and lie along x; the right side of the left one moves.
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			_, _, _, _, isRect := e.box()
			return isRect && m.onMask(e) && e.find(gds.PROPVALUE) != nil && strings.HasPrefix(string(e.find(gds.PROPVALUE).data()), "cut") && e.layer() == m.a
		})
		if ok {
			e := s.elements[at]
			e.setCoordinate(2, e.coordinate(2)-1)
			e.setCoordinate(4, e.coordinate(4)-1)
		}
		return ok
	}},
	{name: "a piece without its property", do: func(m *masked, l *library, rng *rand.Rand) bool {
		s, at, ok := pick(l, rng, func(_ *structure, e element) bool {
			return m.onMask(e) && e.cut()
		})
		if ok {
			e := s.elements[at]
			i := indexOf(e, gds.PROPATTR)
			s.elements[at] = without(without(e, i), i)
		}
		return ok
	}},
	{name: "an element cut off", alone: true, do: func(m *masked, l *library, rng *rand.Rand) bool {
		s := &l.structures[rng.IntN(len(l.structures))]
		if len(s.elements) == 0 {
			return false
		}
		e := &s.elements[rng.IntN(len(s.elements))]
		*e = (*e)[:len(*e)-1]
		return true
	}},
}

// broken is the number of outputs that are broken.
const broken = 420

// Of several hundred outputs, each right but for one thing, none may pass.
func TestBrokenOutputsAreFound(t *testing.T) {
	cases := rightOutputs(t)
	for i := range cases {
		m := &cases[i]
		res, err := judge(m, m.out, true)
		if err != nil || !res.OK() {
			t.Fatalf("%s: the right output does not hold: %s", m.name, tell(res, err))
		}
		if res, err := judge(m, m.out, false); err != nil || !res.OK() {
			t.Fatalf("%s: the right output, alone, does not hold: %s", m.name, tell(res, err))
		}
		keep(t, m, -i, "right", m.out)
	}
	rng := rand.New(rand.NewPCG(21, 22))
	made, used := 0, map[string]int{}
	for round := 0; made < broken && round < 50; round++ {
		for _, b := range breakers {
			for i := range cases {
				m := &cases[i]
				l := takeApart(m.out)
				if made == broken || !b.do(m, l, rng) {
					continue
				}
				now := l.bytes()
				if bytes.Equal(now, m.out) {
					continue // two equal elements in the other order
				}
				made++
				used[b.name]++
				keep(t, m, made, b.name, now)
				if res, err := judge(m, now, true); err == nil && res.OK() {
					t.Errorf("%s, %s (number %d): passes", m.name, b.name, made)
				}
				if !b.alone {
					continue
				}
				if res, err := judge(m, now, false); err == nil && res.OK() {
					t.Errorf("%s, %s (number %d): passes without the drawn layout", m.name, b.name, made)
				}
			}
		}
	}
	if made < 300 {
		t.Errorf("only %d broken outputs were made", made)
	}
	for _, b := range breakers {
		if used[b.name] == 0 {
			t.Errorf("%q was never done", b.name)
		}
	}
	t.Logf("%d broken outputs of %d layouts, %d ways", made, len(cases), len(used))
}

// keep writes a broken output for other judges, where the flag asks for it.
func keep(t *testing.T, m *masked, number int, name string, now []byte) {
	if *keepBroken == "" {
		return
	}
	dir := filepath.Join(*keepBroken, fmt.Sprintf("%03d", number))
	if err := os.MkdirAll(dir, 0o777); err != nil {
		t.Fatal(err)
	}
	files := map[string][]byte{"in.gds": m.drawn, "out.gds": now, "deck.toml": []byte(m.deck), "what.txt": []byte(m.name + ": " + name + "\n")}
	if m.anchors != "" {
		files["anchors.toml"] = []byte(m.anchors)
	}
	for file, data := range files {
		if err := os.WriteFile(filepath.Join(dir, file), data, 0o666); err != nil {
			t.Fatal(err)
		}
	}
}

// What is taken apart and put together again must be the same bytes, else the test breaks more than it says.
func TestTakeApart(t *testing.T) {
	for _, m := range rightOutputs(t) {
		if !bytes.Equal(takeApart(m.out).bytes(), m.out) {
			t.Errorf("%s: taken apart and put together it is another stream", m.name)
		}
	}
}
