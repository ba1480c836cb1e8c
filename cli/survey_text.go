package cli

import (
	"bufio"
	"fmt"
	"math"
	"strings"

	"maskpair/cli/report"
	"maskpair/decompose/survey"
	"maskpair/gds"
)

// This file words a survey for a person. Lengths are in nanometres.

// writeSurvey prints what is in the layout, and the gaps where a layer was named.
func writeSurvey(w *bufio.Writer, found *surveyed) {
	s := found.survey
	nm := nanometres(s)
	fmt.Fprintf(w, "%s: %s bytes of stream, database unit %s nm\n", found.name, report.Count(s.Bytes), nm.number(1))
	table := [][]string{{"structures", report.Count(int64(s.Structures))}, {"tops", tops(s.Tops)}, {"depth", report.Count(int64(s.Depth))},
		{"references", report.Count(s.References)}, {"arrays", report.Count(s.Arrays)}}
	if s.OddReferences > 0 {
		table = append(table, []string{"", report.Count(s.OddReferences) + " of these with a magnification or an odd angle"})
	}
	table = append(table, []string{"placements", flat(s.Placements)})
	if len(s.Missing) > 0 {
		table = append(table, []string{"not in the file", tops(s.Missing)})
	}
	report.WriteTable(w, table, "ll")
	w.WriteByte('\n')
	writeLayers(w, s, nm)
	if found.gaps != nil {
		w.WriteByte('\n')
		writeGaps(w, found.gaps, nm)
	}
}

// namesShown is how many names a line tells.
const namesShown = 8

// tops lists names, the first few.
func tops(names []string) string {
	var shown []string
	for _, n := range names[:min(len(names), namesShown)] {
		shown = append(shown, gds.Printable(n))
	}
	line := strings.Join(shown, ", ")
	if more := len(names) - namesShown; more > 0 {
		line += fmt.Sprintf(" and %s more", report.Count(int64(more)))
	}
	if len(names) > 1 {
		line = fmt.Sprintf("%d: %s", len(names), line)
	}
	return line
}

// flat words a flat count.
func flat(n uint64) string {
	if n > math.MaxInt64 {
		return "more than 9.2e18"
	}
	return report.Count(int64(n))
}

// percent words a share.
func percent(part, whole uint64) string {
	switch {
	case whole == 0:
		return ""
	case part == whole:
		return "all"
	case part == 0:
		return "none"
	}
	// A share that is rounded to all or nothing would say what is not so.
	share := math.Min(99.9, math.Max(0.1, 100*float64(part)/float64(whole)))
	return fmt.Sprintf("%.1f %%", share)
}

// writeLayers prints a line for each layer.
func writeLayers(w *bufio.Writer, s *survey.Survey, nm lengths) {
	texts, others := false, false
	for i := range s.Layers {
		texts = texts || s.Layers[i].Texts > 0
		others = others || s.Layers[i].Boxes+s.Layers[i].Nodes > 0
	}
	head := []string{"layer", "drawn", "flat", "Manhattan", "rectangles"}
	align := "lrrrr"
	if texts {
		head, align = append(head, "texts"), align+"r"
	}
	if others {
		head, align = append(head, "boxes, nodes"), align+"r"
	}
	head, align = append(head, "least width", "commonest widths, nm"), align+"rl"
	table := [][]string{head}
	for i := range s.Layers {
		l := &s.Layers[i]
		line := []string{layerName(l.Layer), report.Count(l.Figures()), flat(l.Flat), percent(l.Manhattan, l.Flat), percent(l.Rectangles, l.Flat)}
		if texts {
			line = append(line, report.Count(l.Texts))
		}
		if others {
			line = append(line, report.Count(l.Boxes+l.Nodes))
		}
		least := ""
		if l.Smallest > 0 {
			least = nm.number(l.Smallest)
		}
		var widths []string
		for _, width := range l.Widths {
			widths = append(widths, fmt.Sprintf("%s (%s)", nm.number(width.Width), percent(width.Flat, l.Flat)))
		}
		table = append(table, append(line, least, strings.Join(widths, ", ")))
	}
	report.WriteTable(w, table, align)
}

func layerName(l gds.LayerType) string { return fmt.Sprintf("%d/%d", l.Layer, l.Type) }

// barLength is the length of the longest bar of the histogram.
const barLength = 40

// writeGaps prints the gaps and what each spacing comes to.
func writeGaps(w *bufio.Writer, g *survey.Gaps, nm lengths) {
	fmt.Fprintf(w, "%s: %s figures in %s shapes; spacings up to %s nm were tried\n", layerName(g.Layer), report.Count(g.Figures), report.Count(g.Shapes), nm.number(g.Looked))
	if g.Limited != "" {
		fmt.Fprintf(w, "no larger ones: %s\n", g.Limited)
	}
	kinds := g.Gaps()
	if len(kinds) == 0 {
		w.WriteString("no two shapes come that near\n")
		return
	}
	most := int64(1)
	for _, k := range kinds {
		most = max(most, k.Pairs)
	}
	table := [][]string{{"gap, nm", "pairs", ""}}
	for _, k := range kinds {
		bar := strings.Repeat("#", max(1, int(math.Round(barLength*float64(k.Pairs)/float64(most)))))
		table = append(table, []string{nm.stretch(k.From, k.Below-1), report.Count(k.Pairs), bar})
	}
	w.WriteByte('\n')
	report.WriteTable(w, table, "rrl")
	w.WriteString("\nShapes nearer than the spacing must be on different masks; a component with an odd cycle cannot be.\n\n")
	report.WriteTable(w, stepTable(g, nm), "rrrrr")
}

// stepTable is what each spacing comes to.
func stepTable(g *survey.Gaps, nm lengths) [][]string {
	table := [][]string{{"spacing, nm", "near pairs", "components", "with odd cycle", "largest, shapes"}}
	for _, s := range g.Steps {
		table = append(table, []string{nm.stretch(s.From, s.To), report.Count(s.NearPairs), report.Count(s.Components), report.Count(s.Odd), report.Count(s.Largest)})
	}
	return table
}

// lengths words lengths that are given in database units.
type lengths struct{ perUnit float64 } // nanometres

func nanometres(s *survey.Survey) lengths { return lengths{s.DBU * 1e9} }

// number words one length.
func (n lengths) number(dbu int64) string { return report.Short(float64(dbu) * n.perUnit) }

// stretch words lengths from one to another, both included.
func (n lengths) stretch(from, to int64) string {
	if from == to {
		return n.number(from)
	}
	return n.number(from) + " to " + n.number(to)
}
