package decompose

import "maskpair/gds"

// This file splits arrays whose elements come out in several ways. Masks alternate along an array, so parts know multiples of the
// pitch: for each pair of steps up to mostStep, and for the exact period of the pattern, the elements of each residue are covered by
// rectangles of equal ways, greedily; the steps that need the fewest parts win.

// part is an array of elements that come out one way: from (column, row), `columns` x `rows` of them, a step apart.
type part struct {
	way                 uint32
	column, row         int64
	columns, rows       int64
	columnStep, rowStep int64
}

const mostStep = 4

// splitArray covers a grid of ways (row by row) with parts.
func splitArray(ways []uint32, columns, rows int64) []part {
	pc, pr := period(ways, columns, rows, 1, columns), period(ways, rows, columns, columns, 1)
	var best []part
	for _, stepC := range steps(columns, pc) {
		for _, stepR := range steps(rows, pr) {
			if int(stepC*stepR) > len(ways) {
				continue
			}
			most := len(ways)
			if best != nil {
				most = len(best)
			}
			if parts, ok := coverGrid(ways, columns, rows, stepC, stepR, most); ok && (best == nil || len(parts) < len(best)) {
				best = parts
			}
		}
	}
	return best
}

// steps lists the steps to try along one side.
func steps(n, period int64) []int64 {
	var out []int64
	for s := int64(1); s <= min(n, mostStep); s++ {
		out = append(out, s)
	}
	if period > mostStep && period < n {
		out = append(out, period)
	}
	return out
}

// period gives the least step along a side after which the pattern repeats; n where it does not.
// Element (i, k) of n along the side and m across it is at i*along + k*across.
func period(ways []uint32, n, m, along, across int64) int64 {
next:
	for p := int64(1); p < n && p <= 64; p++ {
		for i := p; i < n; i++ {
			for k := range m {
				if ways[i*along+k*across] != ways[(i-p)*along+k*across] {
					continue next
				}
			}
		}
		return p
	}
	return n
}

// coverGrid covers each residue class of the steps with rectangles; false where it needs more than `most` parts.
func coverGrid(ways []uint32, columns, rows, stepC, stepR int64, most int) ([]part, bool) {
	var parts []part
	done := make([]bool, len(ways))
	for r := range rows {
		for c := range columns {
			if done[r*columns+c] {
				continue
			}
			if len(parts) == most {
				return nil, false
			}
			way := ways[r*columns+c]
			free := func(c, r int64) bool { return !done[r*columns+c] && ways[r*columns+c] == way }
			p := part{way: way, column: c, row: r, columns: 1, rows: 1, columnStep: stepC, rowStep: stepR}
			for c+p.columns*stepC < columns && free(c+p.columns*stepC, r) {
				p.columns++
			}
		grow:
			for r+p.rows*stepR < rows {
				for k := range p.columns {
					if !free(c+k*stepC, r+p.rows*stepR) {
						break grow
					}
				}
				p.rows++
			}
			for i := range p.rows {
				for k := range p.columns {
					done[(r+i*stepR)*columns+c+k*stepC] = true
				}
			}
			parts = append(parts, p)
		}
	}
	return parts, true
}

// reference words a part of an array as the stream has it; false where no array can (its lattice has no whole steps, or a point leaves
// 32 bits), so that its elements must be placed one by one.
func (p *part) reference(l *lattice, name string) (gds.Part, bool) {
	at := l.element(p.column, p.row)
	out := gds.Part{Name: name, At: gds.Point{X: int32(at.x), Y: int32(at.y)}, Columns: int32(p.columns), Rows: int32(p.rows)}
	if p.columns == 1 && p.rows == 1 {
		return out, true
	}
	if !l.Exact {
		return out, false
	}
	cx, cy := at.x+p.columns*p.columnStep*l.ColumnX, at.y+p.columns*p.columnStep*l.ColumnY
	rx, ry := at.x+p.rows*p.rowStep*l.RowX, at.y+p.rows*p.rowStep*l.RowY
	for _, v := range [4]int64{cx, cy, rx, ry} {
		if int64(int32(v)) != v {
			return out, false
		}
	}
	out.ColumnEnd, out.RowEnd = gds.Point{X: int32(cx), Y: int32(cy)}, gds.Point{X: int32(rx), Y: int32(ry)}
	return out, true
}
