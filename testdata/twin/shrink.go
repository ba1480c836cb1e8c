package twin

import "slices"

// This file makes a layout that fails small, so that a person can look at it.

// Shrink takes elements and cells out of a layout as long as judge finds something wrong with it, and gives what is left and
// what judge says of that.
func Shrink(l *Layout, wrong error, judge func(*Layout) error) (*Layout, error) {
	for again := true; again; {
		again = false
		try := func(change func(*Layout)) bool {
			smaller := l.Clone()
			change(smaller)
			err := judge(smaller)
			if err == nil {
				return false
			}
			l, wrong, again = smaller, err, true
			return true
		}
		for c := len(l.Cells) - 1; c >= 0; c-- {
			if len(l.Cells) > 1 && try(func(s *Layout) { s.Cells = slices.Delete(s.Cells, c, c+1) }) {
				continue
			}
			for e := len(l.Cells[c].Elements) - 1; e >= 0; e-- {
				if try(func(s *Layout) { s.Cells[c].Elements = slices.Delete(s.Cells[c].Elements, e, e+1) }) {
					continue
				}
				if l.Cells[c].Elements[e].Kind == Array {
					try(func(s *Layout) { s.Cells[c].Elements[e].single() })
				}
			}
		}
	}
	return l, wrong
}

// single makes an array a single reference.
func (e *Element) single() {
	e.Kind, e.Columns, e.Rows, e.Points = Reference, 1, 1, e.Points[:1]
}
