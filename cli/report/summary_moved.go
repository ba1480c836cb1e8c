package report

import (
	"fmt"

	"maskpair/decompose"
)

// This file words what a baseline adds to the summary: shapes that moved and why, and what a mask that is already made does not allow.

// movesShown is how many moved shapes, and how many faults of frozen masks, of a layer the summary shows; the JSON lists all.
const movesShown = 8

// moved shows the shapes that moved.
func (s *summary) moved(l *decompose.LayerResult) {
	if len(l.Moved) == 0 {
		return
	}
	s.line("")
	s.line("%s: %s moved to the other mask", Text(l.Name), count(len(l.Moved), "shape"))
	for i := range l.Moved[:min(len(l.Moved), movesShown)] {
		m := &l.Moved[i]
		s.line("  from %v to %v: %s in %s", m.Was, m.Now, s.box(m.Box), Text(m.Top))
		s.line("      because %s", Text(m.Why))
	}
	s.more(len(l.Moved))
}

// frozen shows where masks that are already made do not allow what is drawn.
func (s *summary) frozen(l *decompose.LayerResult) {
	if len(l.Frozen) == 0 {
		return
	}
	s.line("")
	s.line("%s: %s in which a mask that is already made does not allow what is drawn", Text(l.Name), count(len(l.Frozen), "place"))
	for i := range l.Frozen[:min(len(l.Frozen), movesShown)] {
		f := &l.Frozen[i]
		what := ""
		switch f.Kind {
		case decompose.FrozenLost:
			what = fmt.Sprintf("mask %v has %s that is not on it now", f.Mask, s.area(f.Area))
		case decompose.FrozenGained:
			what = fmt.Sprintf("mask %v lacks %s that is on it now", f.Mask, s.area(f.Area))
		case decompose.FrozenNew:
			what = fmt.Sprintf("a new shape, on mask %v for now", f.Mask)
		case decompose.FrozenPair:
			what = fmt.Sprintf("a near pair stays on mask %v", f.Mask)
		}
		s.line("  %s: %s in %s", what, s.box(f.Box), Text(f.Top))
		s.line("      by %s", Text(f.Edit))
	}
	s.more(len(l.Frozen))
}

// more says how many entries of a list are not shown.
func (s *summary) more(n int) {
	if rest := n - movesShown; rest > 0 {
		s.line("  %s more: write a --report for the full list", Count(int64(rest)))
	}
}
