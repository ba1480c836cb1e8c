package report

import (
	"maskpair/decompose"
)

// This file makes the lists of single things: what a made mask does not allow, pairs that are too near on any masks, what is wrong
// within one shape, cuts, moved shapes, accepted pairs. Each shows the first of its things; report.json has all.

// rowsShown is how many things a list shows.
const rowsShown = 200

// listing is one list.
type listing struct {
	ID, Title, Short string
	Text             string
	Columns          []column
	Rows             [][]cell
	More             string // how many are not shown; "" none
}

// column is a column of a list.
type column struct {
	Name    string
	Numeric bool
}

// cell is what stands in a row.
type cell struct {
	Text    string
	Numeric bool
	Place   bool // coordinates, in the deck's unit
}

func word(s string) cell   { return cell{Text: s} }
func number(s string) cell { return cell{Text: s, Numeric: true} }
func place(at string) cell { return cell{Text: at, Place: true} }
func name(s string) cell   { return cell{Text: Text(s)} }
func columns(names ...string) []column {
	var out []column
	for _, n := range names {
		out = append(out, column{n, n == "Gap" || n == "Lacks" || n == "Area"})
	}
	return out
}

// lists makes the lists that have something to tell.
func (m *pageMaker) lists() {
	m.list(m.frozen())
	m.list(m.anyMask())
	m.list(m.sameShape())
	m.list(m.cuts())
	m.list(m.moved())
	m.list(m.waived())
}

// list adds a list of so many things, unless there are none.
func (m *pageMaker) list(l listing, total int64) {
	if total == 0 {
		return
	}
	if more := total - int64(len(l.Rows)); more > 0 {
		l.More = Count(more)
	}
	m.p.Lists = append(m.p.Lists, l)
}

// add adds a row while there is room.
func (l *listing) add(cells ...cell) {
	if len(l.Rows) < rowsShown {
		l.Rows = append(l.Rows, cells)
	}
}

// layers calls fn for each layer.
func (m *pageMaker) layers(fn func(name string, l *decompose.LayerResult)) {
	for i := range m.r.Result.Layers {
		fn(m.r.Result.Layers[i].Name, &m.r.Result.Layers[i])
	}
}

func (m *pageMaker) frozen() (listing, int64) {
	out := listing{ID: "frozen", Title: "Not as the made mask has it", Short: "Made masks",
		Text:    "A mask that is already made must come out as it was made. Here the drawing does not allow that.",
		Columns: columns("Layer", "Top", "What", "Mask", "Box", "Area", "Edit")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		for _, f := range l.Frozen {
			area := ""
			if f.Area > 0 {
				area = m.area(f.Area)
			}
			out.add(name(layer), name(f.Top), word(frozenWords(f.Kind)), word(f.Mask.String()), place(m.box(f.Box)), number(area), name(f.Edit))
		}
	})
	return out, m.r.FrozenFaults()
}

func frozenWords(k decompose.FrozenKind) string {
	switch k {
	case decompose.FrozenLost:
		return "the mask has more than is drawn for it"
	case decompose.FrozenGained:
		return "the mask lacks what is drawn for it"
	case decompose.FrozenNew:
		return "a new shape, and both masks are made"
	}
	return "a near pair that the edit leaves on one mask"
}

func (m *pageMaker) anyMask() (out listing, total int64) {
	out = listing{ID: "near", Title: "Too near on any masks", Short: "Too near on any masks",
		Text:    "Nearer than any_mask_spacing. No choice of masks helps: the drawing must change.",
		Columns: columns("Layer", "Top", "Gap", "From", "To")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		total += l.AnyMaskPairs
		for i := range l.AnyMask {
			p := &l.AnyMask[i]
			out.add(name(layer), name(p.Top), number(m.distance(p.DistanceSq)), place(m.at(p.From)), place(m.at(p.To)))
		}
	})
	return out, total
}

func (m *pageMaker) sameShape() (out listing, total int64) {
	out = listing{ID: "within", Title: "Too near within one shape", Short: "Within one shape",
		Text:    "Notches and gaps of one shape below the spacing. All of a shape is on one mask, so no choice of masks helps.",
		Columns: columns("Layer", "Top", "What", "Gap", "Lacks", "From", "To")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		total += int64(len(l.SameShape))
		for i := range l.SameShape {
			p := &l.SameShape[i]
			what := "gap"
			if p.Notch {
				what = "notch"
			}
			out.add(name(layer), name(p.Top), word(what), number(m.distance(p.DistanceSq)), number(m.length(p.Widen)), place(m.at(p.From)), place(m.at(p.To)))
		}
	})
	return out, total
}

func (m *pageMaker) cuts() (out listing, total int64) {
	out = listing{ID: "cuts", Title: "Cut in the output", Short: "Cuts",
		Text:    "Here a shape is cut into two pieces on both masks; this is where they overlap.",
		Columns: columns("Layer", "Top", "Overlap")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		for i := range l.Unresolved {
			for _, c := range l.Unresolved[i].Candidates {
				if c.Made {
					total++
					out.add(name(layer), name(l.Unresolved[i].Top), place(m.box(c.Box)))
				}
			}
		}
	})
	return out, total
}

func (m *pageMaker) moved() (out listing, total int64) {
	known := int64(0)
	out = listing{ID: "moved", Title: "Moved against the baseline", Short: "Moved", Columns: columns("Layer", "Top", "Was", "Is", "Box", "Why")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		known += l.BaselineShapes
		total += l.MovedShapes
		for i := range l.Moved {
			s := &l.Moved[i]
			out.add(name(layer), name(s.Top), word(s.Was.String()), word(s.Now.String()), place(m.box(s.Box)), name(s.Why))
		}
	})
	out.Text = Count(total) + " of " + count64(known, "shape") + " that the baseline knows changed masks."
	return out, total
}

func (m *pageMaker) waived() (out listing, total int64) {
	out = listing{ID: "accepted", Title: "Accepted by a waiver", Short: "Accepted", Text: "Near pairs on one mask that the anchor file accepts.",
		Columns: columns("Reason", "Name", "Layer", "Top", "Gap", "From", "To")}
	m.layers(func(layer string, l *decompose.LayerResult) {
		total += int64(len(l.Waived))
		for i := range l.Waived {
			p := &l.Waived[i]
			out.add(name(p.Reason), name(p.Name), name(layer), name(p.Top), number(m.distance(p.DistanceSq)), place(m.at(p.From)), place(m.at(p.To)))
		}
	})
	return out, total
}
