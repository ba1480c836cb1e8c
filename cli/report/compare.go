package report

import (
	"bufio"
	"cmp"
	"fmt"
	"io"
	"slices"
	"strings"

	"maskpair/decompose"
)

// This file prints what a comparison of two results came to.

// Comparison is what a run of compare came to.
type Comparison struct {
	Earlier, Later Input
	Run            Run
	Rules          *decompose.Rules
	Result         *decompose.ComparisonResult
}

// WriteComparisonJSON writes a comparison as JSON. Coordinates are database units of the top, or of the cell for "place".
func WriteComparisonJSON(w io.Writer, c *Comparison) error {
	j := newJSONWriter(w)
	j.object(func() {
		j.key("same").boolean(c.Result.Same())
		j.key("earlier").inline(func() { j.file(&c.Earlier) })
		j.key("later").inline(func() { j.file(&c.Later) })
		j.key("run").object(func() { j.run(&c.Run) })
		j.key("warnings").list(func() {
			for _, line := range c.Result.Warnings {
				j.str(line)
			}
		})
		j.key("layers").list(func() {
			for i := range c.Result.Layers {
				j.object(func() { j.compared(&c.Result.Layers[i]) })
			}
		})
	})
	return j.close()
}

func (j *jsonWriter) file(f *Input) {
	j.key("sha256").str(f.SHA256)
	j.key("bytes").integer(f.Bytes)
	j.key("top").strs(f.Tops)
}

func (j *jsonWriter) compared(l *decompose.LayerComparison) {
	j.key("name").str(l.Name)
	j.key("earlier_shapes").integer(l.Earlier)
	j.key("later_shapes").integer(l.Later)
	j.key("same_shapes").integer(l.Same)
	j.key("moved_shapes").integer(l.Moved)
	j.changeCounts(l.Count)
	j.key("cells").list(func() {
		for _, c := range byCell(l) {
			j.inline(func() {
				j.key("cell").str(c.cell)
				j.changeCounts(c.count)
			})
		}
	})
	j.key("changes").list(func() {
		for i := range l.Changes {
			s := &l.Changes[i]
			j.inline(func() {
				j.key("kind").str(s.Kind.String())
				j.key("top").str(s.Top)
				j.key("box").box(s.Box)
				j.key("cell").str(s.Cell)
				j.key("place").box(s.Place)
				j.key("was").str(s.Was)
				j.key("now").str(s.Now)
				j.key("moved").boolean(s.Moved)
			})
		}
	})
}

func (j *jsonWriter) changeCounts(count [5]int64) {
	for k, n := range count {
		j.key(decompose.ChangeKind(k).String()).integer(n)
	}
}

// cellChanges counts what changed in one cell.
type cellChanges struct {
	cell  string
	count [5]int64
	first *decompose.ChangedShape
}

func (c *cellChanges) total() (n int64) {
	for _, k := range c.count {
		n += k
	}
	return n
}

// byCell counts the changes of a layer cell by cell, those with most first.
func byCell(l *decompose.LayerComparison) []cellChanges {
	index := map[string]int{}
	var out []cellChanges
	for i := range l.Changes {
		s := &l.Changes[i]
		k, ok := index[s.Cell]
		if !ok {
			k = len(out)
			index[s.Cell] = k
			out = append(out, cellChanges{cell: s.Cell, first: s})
		}
		out[k].count[s.Kind]++
	}
	slices.SortFunc(out, func(a, b cellChanges) int {
		return cmp.Or(-cmp.Compare(a.total(), b.total()), cmp.Compare(a.cell, b.cell))
	})
	return out
}

const (
	cellsShown   = 8 // of a layer in the summary
	changesShown = 3 // of a cell
)

// WriteComparisonSummary writes a comparison for a person, in plain text.
func WriteComparisonSummary(w io.Writer, c *Comparison) error {
	s := &summary{w: bufio.NewWriter(w), r: &Report{Rules: c.Rules, Result: &decompose.Result{}, Run: c.Run}}
	if c.Result.Same() {
		s.line("%s and %s have the same shapes on the same masks.", Text(c.Earlier.Name), Text(c.Later.Name))
	} else {
		s.line("%s and %s differ.", Text(c.Earlier.Name), Text(c.Later.Name))
	}
	table := [][]string{{"", "earlier", "later", "same"}}
	for k := range [5]int{} {
		table[0] = append(table[0], decompose.ChangeKind(k).String())
	}
	table[0] = append(table[0], "on the other mask")
	for i := range c.Result.Layers {
		l := &c.Result.Layers[i]
		row := []string{Text(l.Name), Count(l.Earlier), Count(l.Later), Count(l.Same)}
		for _, n := range l.Count {
			row = append(row, Count(n))
		}
		table = append(table, append(row, Count(l.Moved)))
	}
	s.line("")
	WriteTable(s.w, table, "l"+strings.Repeat("r", len(table[0])-1))
	for i := range c.Result.Layers {
		s.changes(&c.Result.Layers[i])
	}
	s.cost()
	return s.w.Flush()
}

// changes shows where most changed.
func (s *summary) changes(l *decompose.LayerComparison) {
	if len(l.Changes) == 0 {
		return
	}
	cells := byCell(l)
	s.line("")
	s.line("%s, cell by cell", Text(l.Name))
	for _, c := range cells[:min(len(cells), cellsShown)] {
		words := ""
		for k, n := range c.count {
			if n > 0 {
				words += fmt.Sprintf(", %s %s", Count(n), decompose.ChangeKind(k))
			}
		}
		s.line("  %s: %s", Text(c.cell), words[2:])
		shown := 0
		for i := range l.Changes {
			if ch := &l.Changes[i]; ch.Cell == c.cell && shown < changesShown {
				shown++
				s.line("      %s", s.change(ch))
			}
		}
		if rest := c.total() - int64(shown); rest > 0 {
			s.line("      and %s more", Count(rest))
		}
	}
	if rest := len(cells) - cellsShown; rest > 0 {
		s.line("  and %s: write a --report for the full list", count(rest, "more cell"))
	}
}

// change words one change.
func (s *summary) change(c *decompose.ChangedShape) string {
	at := s.box(c.Box) + " in " + Text(c.Top)
	switch {
	case c.Was == "":
		return fmt.Sprintf("%s, on %s: %s", c.Kind, c.Now, at)
	case c.Now == "":
		return fmt.Sprintf("%s, was on %s: %s", c.Kind, c.Was, at)
	case c.Was == c.Now:
		return fmt.Sprintf("%s, on %s: %s", c.Kind, c.Now, at)
	}
	return fmt.Sprintf("%s, from %s to %s: %s", c.Kind, c.Was, c.Now, at)
}
