package verify

import (
	"fmt"
	"strings"

	"maskpair/gds"
)

// This file knows the names of variants: NAME$2, NAME$3, ..., and variants of variants.

// variantOf takes the number off the name of a variant; false where the name is none.
func variantOf(name string) (stem string, number int, ok bool) {
	at := strings.LastIndexByte(name, '$')
	if at < 1 {
		return "", 0, false
	}
	digits := name[at+1:]
	if digits == "" || digits[0] == '0' || len(digits) > 9 {
		return "", 0, false
	}
	for i := range len(digits) {
		if digits[i] < '0' || digits[i] > '9' {
			return "", 0, false
		}
		number = 10*number + int(digits[i]-'0')
	}
	return name[:at], number, number >= 2
}

// inFamily says whether a name is that of a cell, of a variant of it, or of a variant of a variant.
func inFamily(name, cell string) bool {
	for name != cell {
		stem, _, ok := variantOf(name)
		if !ok {
			return false
		}
		name = stem
	}
	return true
}

// family is a cell of the anchor file with its variants.
type family struct {
	cell    string
	members []bool   // by structure
	some    bool     // there is one
	count   []uint64 // placements of members under each structure
}

func newFamily(t *tree, cell string) *family {
	f := &family{cell: cell, members: make([]bool, len(t.lib.Structures))}
	for s := range t.lib.Structures {
		if inFamily(t.lib.Structures[s].Name, cell) {
			f.members[s], f.some = true, true
		}
	}
	f.count = t.sums(func(s int32) uint64 {
		if f.members[s] {
			return 1
		}
		return 0
	})
	return f
}

// frames gives the placements of the members under a top.
func (f *family) frames(t *tree, top int32) ([]gds.Transform, error) {
	if f.count[top] > mostFigures {
		return nil, &InputError{Msg: fmt.Sprintf("structure %s is placed %s times under %s; at most %d placements can be looked at: verify its blocks one by one",
			gds.Printable(f.cell), countText(f.count[top]), gds.Printable(t.lib.Structures[top].Name), mostFigures)}
	}
	out := make([]gds.Transform, 0, f.count[top])
	err := t.each(top, gds.Identity(), f.count, func(s int32, at gds.Transform) error {
		if f.members[s] {
			out = append(out, at)
		}
		return nil
	})
	return out, err
}
