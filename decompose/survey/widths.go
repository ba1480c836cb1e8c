package survey

// This file counts how often each width occurs on a layer of one structure: a small hash table with open addressing, emptied at
// the end of each structure.

// mostWidths is how many different widths of one layer are told apart within one structure. Layouts have a handful; a structure
// with thousands of them has no commonest width that a reader would miss.
const mostWidths = 1 << 12

// widthTally is a width in one structure.
type widthTally struct {
	layer int32
	width uint32
	drawn uint64
}

// widthTable counts widths above 0.
type widthTable struct {
	slots []widthSlot // their number is a power of two; nil before the first
	some  int         // slots in use
}

type widthSlot struct {
	width uint32 // 0: free
	drawn uint64
}

// count counts a width; false where the table holds too many others.
func (t *widthTable) count(width uint32) bool {
	if 2*t.some >= len(t.slots) {
		t.grow()
	}
	s := t.slot(width)
	if s.width == 0 {
		if t.some >= mostWidths {
			return false
		}
		s.width = width
		t.some++
	}
	s.drawn++
	return true
}

// slot finds the place of a width; there always is a free one.
func (t *widthTable) slot(width uint32) *widthSlot {
	mask := uint32(len(t.slots) - 1)
	for i := width * 0x9E3779B1 >> 7 & mask; ; i = (i + 1) & mask { // Knuth's multiplier, 2^32 over the golden ratio
		if s := &t.slots[i]; s.width == width || s.width == 0 {
			return s
		}
	}
}

func (t *widthTable) grow() {
	old := t.slots
	t.slots = make([]widthSlot, max(16, 2*len(old)))
	for _, s := range old {
		if s.width != 0 {
			*t.slot(s.width) = s
		}
	}
}

// drain appends what was counted and empties the table.
func (t *widthTable) drain(layer int32, dst []widthTally) []widthTally {
	if t.some == 0 {
		return dst
	}
	for i := range t.slots {
		if s := &t.slots[i]; s.width != 0 {
			dst = append(dst, widthTally{layer, s.width, s.drawn})
			*s = widthSlot{}
		}
	}
	t.some = 0
	return dst
}
