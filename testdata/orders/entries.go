package orders

import "math/rand/v2"

// RandomEntries makes entries for a sketch. They may contradict each other, and a few may hit nothing.
func RandomEntries(stream []byte, n int, r *rand.Rand) ([]Entry, error) {
	return RandomEntriesFor(stream, SketchLayers(), n, r)
}

// RandomEntriesFor makes entries for any stream.
func RandomEntriesFor(stream []byte, layers []Layer, n int, r *rand.Rand) ([]Entry, error) {
	d, err := flatten(stream, layers)
	if err != nil || len(d.figures) == 0 {
		return nil, err
	}
	var out []Entry
	for range n {
		f := &d.figures[r.IntN(len(d.figures))]
		e := Entry{Layer: int(f.layer), Mask: r.IntN(2), Opposite: r.IntN(2) == 0}
		inCell := r.IntN(3) == 0
		spot := func(f *figure) [2]int64 {
			b := f.box
			if inCell {
				b = d.local(f.number)
			}
			return [2]int64{b.x1 + r.Int64N(b.x2-b.x1+1), b.y1 + r.Int64N(b.y2-b.y1+1)}
		}
		if inCell {
			e.Cell = d.lib.Structures[f.cell].Name
		}
		p := spot(f)
		if r.IntN(3) == 0 { // a point of the figure, where it is no rectangle
			x, y := d.point(f.number)
			if !inCell {
				x, y = placePoint(d.placed[f.place].at, x, y)
			}
			p = [2]int64{x, y}
		}
		if r.IntN(80) == 0 {
			p[0] += 500
		}
		e.Box = [4]int64{p[0], p[1], p[0], p[1]}
		if r.IntN(3) == 0 {
			e.Box[2] += r.Int64N(40)
			e.Box[3] += r.Int64N(40)
		}
		// The other end: a figure of the same layer, in a cell of the same one.
		o := f
		for range 10 {
			q := &d.figures[r.IntN(len(d.figures))]
			if q.layer == f.layer && q.top == f.top && (!inCell || q.cell == f.cell) {
				o = q
				break
			}
		}
		e.At = [2][2]int64{p, spot(o)}
		switch k := r.IntN(20); {
		case k < 7:
			e.Kind = EntryAnchor
		case k < 11:
			e.Kind = EntryWish
		case k < 15:
			e.Kind = EntryTie
		case k < 18:
			e.Kind = EntryWaiver
		default:
			e.Kind = EntryAlike
			e.Cell = d.lib.Structures[f.cell].Name
		}
		out = append(out, e)
	}
	return out, nil
}
