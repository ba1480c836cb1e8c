package layouts

import (
	"fmt"
	"math"
	"slices"

	"maskpair/gds"
)

// This file draws a chip with hierarchy. A cell is 7 tracks high; on its lower and upper edge lies a rail, on its left and right
// edge a column of contacts, which the neighbour draws again. Rows of abutted cells, every second one mirrored, share their
// rails; a long rail lies over them. Blocks of rows stand upright or turned in arrays, rails as long as the chip between them.
// Tracks count on from row to row, so that the parity of the track is an answer all over a block.

const (
	cellTracks  = 7
	cellHeight  = cellTracks * trackPitch
	cellKinds   = 16
	rowWidth    = 6000
	blockRows   = 32
	blockKinds  = 4
	blockPitch  = 10000 // a block is at most 6000 + 200 + 30*46 wide and 32*280+10 high
	rowFigures  = 270   // about
	arraySide   = 30    // of the contact array of a block
	cellInside  = 50    // from the edge of the cell to the first wire: 40 from the contact there
	blockFigure = blockRows*rowFigures + arraySide*arraySide
)

// cell is a cell: its wires by track, without rails and edge contacts.
type cell struct {
	name  string
	width int32
	wires [cellTracks][]span // tracks 1 to 6
}

// item is a cell, or an array of several, in a row.
type item struct {
	kind     int
	times    int32
	mirrored bool // left and right exchanged
}

func drawCells(s *sheet, figures int64) {
	blocks := max(1, int32(math.Round(float64(figures)/blockFigure)))
	rows, side := int32(blockRows), int32(arraySide)
	if figures < blockFigure {
		rows = max(1, int32(figures*blockRows/blockFigure))
		side = max(1, int32(arraySide*math.Sqrt(float64(figures)/blockFigure)))
	}
	variants := min(blockKinds, blocks)

	kinds := s.cellKinds()
	designs := make([][][]item, variants) // rows of each variant
	used := map[int]bool{}
	for v := range designs {
		for range rows {
			designs[v] = append(designs[v], s.designRow(kinds, used))
		}
	}
	for k := range kinds {
		if used[k] {
			s.cell(&kinds[k])
		}
	}
	s.begin("contact")
	s.rect(0, 0, narrow, narrow)
	s.counted(1, 0)
	s.end()
	for v, design := range designs {
		s.block(fmt.Sprintf("block%d", v), kinds, design, uint16(side))
	}

	s.begin("chip")
	share := float64(blocks) / float64(variants)
	columns := int32(math.Ceil(math.Sqrt(share)))
	high := max(1, int32(math.Round(share/float64(columns)))) // of each variant
	upright := (high + 1) / 2
	var row int32
	for v := range variants {
		name := fmt.Sprintf("block%d", v)
		s.array(name, gds.Strans{}, uint16(columns), uint16(upright), 0, row*blockPitch, blockPitch, blockPitch)
		if high > upright {
			s.array(name, gds.Strans{Angle: 90}, uint16(columns), uint16(high-upright), blockPitch-500, (row+upright)*blockPitch, blockPitch, blockPitch)
		}
		row += high
	}
	for r := range row + 1 { // chip-long rails in the 700 and more that blocks leave free below each other
		s.rect(0, r*blockPitch-300, columns*blockPitch, r*blockPitch-280)
		s.counted(1, 0)
	}
	s.end()
}

// cellKinds makes up cells.
func (s *sheet) cellKinds() []cell {
	kinds := make([]cell, cellKinds)
	for k := range kinds {
		c := &kinds[k]
		c.name, c.width = fmt.Sprintf("cell%d", k), 200+60*s.rng.Int32N(10)
		for t := 1; t < cellTracks; t++ {
			c.wires[t] = randomTrack(s.rng, nil, cellInside, c.width-cellInside)
		}
	}
	return kinds
}

// cell draws a cell. It is counted by the blocks: cells share what they have on their edges.
func (s *sheet) cell(c *cell) {
	s.begin(c.name)
	s.track(0, []span{{0, c.width}})
	s.track(cellHeight, []span{{0, c.width}})
	for t := int32(1); t < cellTracks; t++ {
		s.track(t*trackPitch, c.wires[t])
		s.track(t*trackPitch, []span{{-narrow / 2, narrow / 2}, {c.width - narrow/2, c.width + narrow/2}})
	}
	s.end()
}

// designRow fills a row with cells, and notes which are used.
func (s *sheet) designRow(kinds []cell, used map[int]bool) []item {
	var row []item
	for x := int32(0); ; {
		i := item{kind: s.rng.IntN(len(kinds)), times: 1}
		if s.rng.IntN(4) == 0 {
			i.times = 2 + s.rng.Int32N(3)
		} else {
			i.mirrored = s.rng.IntN(2) == 0
		}
		if x += i.times * kinds[i.kind].width; x > rowWidth {
			return row
		}
		row = append(row, i)
		used[i.kind] = true
	}
}

// block draws rows of cells and an array of contacts, and counts them.
func (s *sheet) block(name string, kinds []cell, design [][]item, side uint16) {
	s.begin(name)
	tracks := make([][]span, len(design)*cellTracks+1)
	var longest int32
	for r, items := range design {
		longest = max(longest, s.row(int32(r), kinds, items, tracks[r*cellTracks:]))
	}
	for r := range len(design) + 1 {
		tracks[r*cellTracks] = []span{{0, longest}}
		s.track(int32(r)*cellHeight, tracks[r*cellTracks])
	}
	for t := range tracks {
		s.counted(int64(len(tracks[t])), 0)
		if t > 0 {
			s.counted(0, nearSpans(tracks[t-1], tracks[t]))
		}
	}
	s.array("contact", gds.Strans{}, side, side, rowWidth+200, 0, contactPitch, contactPitch)
	s.counted(0, 2*int64(side)*int64(side-1))
	s.end()
}

// row places the cells of a row, adds what lies on its tracks 1 to 6 to tracks, each wire once and in order, and gives its
// length.
func (s *sheet) row(r int32, kinds []cell, items []item, tracks [][]span) int32 {
	flipped := r%2 == 1
	y := r * cellHeight
	if flipped {
		y += cellHeight
	}
	var x int32
	for _, i := range items {
		c := &kinds[i.kind]
		switch {
		case i.times > 1:
			s.array(c.name, gds.Strans{Mirror: flipped}, uint16(i.times), 1, x, y, c.width, cellHeight)
		case i.mirrored: // a half turn, and for rows that are not flipped a reflection before it
			s.place(c.name, gds.Strans{Mirror: !flipped, Angle: 180}, x+c.width, y)
		default:
			s.place(c.name, gds.Strans{Mirror: flipped}, x, y)
		}
		for range i.times {
			c.along(x, flipped, i.mirrored, tracks)
			x += c.width
		}
	}
	for t := 1; t < cellTracks; t++ {
		tracks[t] = append(tracks[t], span{x - narrow/2, x + narrow/2})
	}
	return x
}

// along adds to tracks what a placement of the cell has on them, but for the contacts on its right edge.
func (c *cell) along(x int32, flipped, mirrored bool, tracks [][]span) {
	for t := 1; t < cellTracks; t++ {
		in := t
		if flipped {
			in = cellTracks - t
		}
		wires := slices.Clone(c.wires[in])
		if mirrored {
			slices.Reverse(wires)
			for i, w := range wires {
				wires[i] = span{c.width - w.x2, c.width - w.x1}
			}
		}
		tracks[t] = append(tracks[t], span{x - narrow/2, x + narrow/2})
		for _, w := range wires {
			tracks[t] = append(tracks[t], span{x + w.x1, x + w.x2})
		}
	}
}
