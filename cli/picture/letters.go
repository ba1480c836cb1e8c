package picture

import (
	"bufio"
	"io"
	"strings"
)

// This file draws in letters: a character shows what lies in the middle of the lower half of its cell. It suits layouts whose
// wires lie on a grid of such cells.

// letters stand for the roles but marks, which are not drawn.
const letters = "#AB"

// WriteLetters draws the scene in characters that are stepX by stepY database units, from the top line down. A wire that is
// less than a step wide may fall between the characters. Labels stand where nothing else is.
func (s *Scene) WriteLetters(w io.Writer, stepX, stepY int64) error {
	columns, rows := (s.Box.X2-s.Box.X1)/stepX+1, (s.Box.Y2-s.Box.Y1)/stepY+1
	grid := make([][]byte, rows)
	for r := range grid {
		grid[r] = []byte(strings.Repeat(" ", int(columns)))
	}
	at := func(r, c int64) Point {
		return Point{s.Box.X1 + c*stepX + stepX/2, s.Box.Y1 + r*stepY + stepY/4}
	}
	for role := range letters {
		for _, f := range s.Figures[role] {
			b := f.box()
			for r := max(0, (b.Y1-s.Box.Y1)/stepY-1); r < rows && at(r, 0).Y <= b.Y2; r++ {
				for c := max(0, (b.X1-s.Box.X1)/stepX-1); c < columns && at(r, c).X <= b.X2; c++ {
					if f.covers(at(r, c)) {
						grid[r][c] = letters[role]
					}
				}
			}
		}
	}
	for _, l := range s.Labels {
		r, c := (l.At.Y-s.Box.Y1)/stepY, (l.At.X-s.Box.X1)/stepX
		if r < 0 || r >= rows || c < 0 {
			continue
		}
		for i := range len(l.Text) {
			for c+int64(i) >= int64(len(grid[r])) {
				grid[r] = append(grid[r], ' ')
			}
			if grid[r][c+int64(i)] == ' ' {
				grid[r][c+int64(i)] = l.Text[i]
			}
		}
	}
	out := bufio.NewWriter(w)
	for r := rows - 1; r >= 0; r-- {
		out.WriteString(strings.TrimRight("  "+string(grid[r]), " "))
		out.WriteByte('\n')
	}
	return out.Flush()
}

func (f Figure) box() Box {
	b := Box{f[0].X, f[0].Y, f[0].X, f[0].Y}
	for _, p := range f {
		b = Box{min(b.X1, p.X), min(b.Y1, p.Y), max(b.X2, p.X), max(b.Y2, p.Y)}
	}
	return b
}

// covers tells whether a point lies inside; on the outline it may say either.
func (f Figure) covers(p Point) bool {
	in := false
	for i := range f {
		a, b := f[i], f[(i+1)%len(f)]
		if (a.Y > p.Y) == (b.Y > p.Y) {
			continue
		}
		if a.Y > b.Y {
			a, b = b, a
		}
		if float64(p.X-a.X)*float64(b.Y-a.Y) < float64(p.Y-a.Y)*float64(b.X-a.X) {
			in = !in
		}
	}
	return in
}
