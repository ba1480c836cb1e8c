package anchor

import (
	"maskpair/decompose"
)

// Sources make the orders of a run. One value serves one run: it remembers which entries of the file have hit a shape.
type Sources struct {
	// File is the anchor file; nil: none.
	File *File

	cells map[string]placements
	alike []bool // by alike entry: found in some layer
	layer layerState
}

// placements are those of one cell and its variants.
type placements struct {
	at    []decompose.PlacedCell
	known bool
}

// kind says what a place that looks for shapes is for.
type kind uint8

const (
	kindAnchor kind = iota
	kindWish
	kindTie
	kindWaiver
	kindLabel
)

// look is what a probe is for. The two probes of a tie or waiver stand side by side.
type look struct {
	kind   kind
	mask   decompose.Mask // of a label
	entry  int32          // of the file
	second bool           // of the two probes of a tie or waiver
}

// layerState is what is known of the layer at hand.
type layerState struct {
	probes     []decompose.Probe
	looks      []look
	hit        []bool // by probe; of a tie or waiver, the first one tells whether both have hit in one placement
	end        []bool // by probe of a tie or waiver: it has hit
	masks      []decompose.Mask
	marked     []bool // by marker: it has hit
	other      int    // labels that name no mask
	firstOther struct {
		top  int
		at   decompose.Spot
		text string
	}
}

// cell gives the placements of a cell, found once.
func (s *Sources) cell(v *decompose.View, name string) (placements, error) {
	if p, ok := s.cells[name]; ok {
		return p, nil
	}
	at, known, err := v.Placements(name)
	if s.cells == nil {
		s.cells = map[string]placements{}
	}
	s.cells[name] = placements{at, known}
	return s.cells[name], err
}

// file gives the anchor file, an empty one where there is none.
func (s *Sources) file() *File {
	if s.File == nil {
		return &File{}
	}
	return s.File
}
