package decompose

import (
	"fmt"
	"strings"

	"maskpair/gds"
)

// This file finds the placements of a cell and its variants. An output names the variants of a cell NAME$2, NAME$3 and so on, and
// theirs NAME$2$2; what is ordered for a cell holds in all of them, so that an output can be an input.

// isVariant tells whether a name is that of a cell or of a variant of it.
func isVariant(name, cell string) bool {
	rest, ok := strings.CutPrefix(name, cell)
	if !ok {
		return false
	}
	for rest != "" {
		if rest[0] != '$' {
			return false
		}
		digits := 1
		for digits < len(rest) && rest[digits] >= '0' && rest[digits] <= '9' {
			digits++
		}
		// A number from 2 up, without zeros before it.
		if digits == 1 || rest[1] == '0' || digits == 2 && rest[1] == '1' {
			return false
		}
		rest = rest[digits:]
	}
	return true
}

// family tells which structures are a cell or a variant of it; known is false where none is.
func (h *hierarchy) family(cell string) (member []bool, known bool) {
	member = make([]bool, len(h.lib.Structures))
	for s := range h.lib.Structures {
		member[s] = isVariant(h.lib.Structures[s].Name, cell)
		known = known || member[s]
	}
	return member, known
}

// countUnder adds up what own counts, under each structure that the tops place, itself included.
func (h *hierarchy) countUnder(own func(s int32) uint64) []uint64 {
	count := make([]uint64, len(h.lib.Structures))
	for _, s := range h.bottom { // children before parents
		n := own(s)
		st := &h.lib.Structures[s]
		for r := st.FirstRef; r < st.EndRef; r++ {
			if ref := &h.lib.Refs[r]; ref.Target >= 0 {
				n = saturatingAdd(n, saturatingMul(uint64(elements(h.lib, ref)), count[ref.Target]))
			}
		}
		count[s] = n
	}
	return count
}

// mostPlaced is how many placements of one kind are looked at.
const mostPlaced = 1 << 27

// countable refuses more placements than can be looked at.
func (h *hierarchy) countable(count []uint64, what string) error {
	total := uint64(0)
	for _, t := range h.tops {
		total = saturatingAdd(total, count[t])
	}
	if total > mostPlaced {
		return &LimitError{Msg: fmt.Sprintf("there are %s %s; at most %d can be looked at", countText(total), what, mostPlaced), Remedy: byBlocks}
	}
	return nil
}

// each calls fn for every placement under a top of a structure under which something was counted, in the order of the hierarchy.
func (h *hierarchy) each(top int, count []uint64, fn func(s int32, at gds.Transform)) {
	h.eachIn(h.tops[top], gds.Identity(), count, fn)
}

func (h *hierarchy) eachIn(s int32, at gds.Transform, count []uint64, fn func(s int32, at gds.Transform)) {
	if count[s] == 0 {
		return
	}
	fn(s, at)
	st := &h.lib.Structures[s]
	for r := st.FirstRef; r < st.EndRef; r++ {
		ref := &h.lib.Refs[r]
		if ref.Target < 0 || count[ref.Target] == 0 {
			continue
		}
		p := h.lib.PlacementOf(ref)
		columns, rows := int32(1), int32(1)
		if p != nil {
			columns, rows = p.Columns, p.Rows
		}
		for row := range rows {
			for column := range columns {
				h.eachIn(ref.Target, gds.Compose(at, ref, p, column, row), count, fn)
			}
		}
	}
}
