package report

import (
	"bufio"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"maskpair/decompose"
)

// This file words the summary: one table over all layers, then what could not be done, worst first, with the cheapest way
// out. Lengths and places are in the deck's unit.

// groupsShown is how many groups of unresolved components of a layer the summary shows; the JSON lists all.
const groupsShown = 8

// WriteSummary writes the summary for a person, in plain text.
func WriteSummary(w io.Writer, r *Report) error {
	s := &summary{w: bufio.NewWriter(w), r: r}
	s.verdict()
	s.table()
	for i := range r.Result.Layers {
		s.layer(&r.Result.Layers[i])
	}
	for i := range r.Result.Layers {
		s.frozen(&r.Result.Layers[i])
		s.moved(&r.Result.Layers[i])
	}
	s.cost()
	return s.w.Flush()
}

type summary struct {
	w *bufio.Writer
	r *Report
}

func (s *summary) line(format string, args ...any) {
	s.w.WriteString(strings.TrimRight(fmt.Sprintf(format, args...), " "))
	s.w.WriteByte('\n')
}

// verdict answers the question: can this be done on two masks?
func (s *summary) verdict() {
	var bad []string
	for i := range s.r.Result.Layers {
		if l := &s.r.Result.Layers[i]; l.UnresolvedPairs > 0 {
			bad = append(bad, fmt.Sprintf("%s %s", l.Name, Count(l.UnresolvedPairs)))
		}
	}
	name := s.r.Input.Name
	if name == "" || name == "-" {
		name = "The layout"
	}
	if len(bad) == 0 && s.r.FrozenFaults() > 0 {
		s.line("%s fits on two masks, but not on those that are already made.", name)
	} else if len(bad) == 0 {
		s.line("%s fits on two masks: nothing is unresolved.", name)
	} else {
		s.line("%s does not fit on two masks as drawn. Unresolved near pairs: %s.", name, strings.Join(bad, ", "))
	}
}

// table has a column for each layer, and no row that is zero in all of them unless it is one that everybody looks for.
func (s *summary) table() {
	layers := s.r.Result.Layers
	type row struct {
		label  string
		always bool
		cell   func(l *decompose.LayerResult) string
	}
	tally := func(label string, always bool, n func(l *decompose.LayerResult) int64) row {
		return row{label, always, func(l *decompose.LayerResult) string { return Count(n(l)) }}
	}
	rows := []row{
		{"same-mask spacing", true, func(l *decompose.LayerResult) string { return s.r.Rules.Length(float64(l.Spacing)) }},
		tally("figures", true, func(l *decompose.LayerResult) int64 { return l.Figures }),
		tally("  already on a mask", false, func(l *decompose.LayerResult) int64 { return l.AlreadyMaskedFigures }),
		tally("  rounded to the grid", false, func(l *decompose.LayerResult) int64 { return l.RoundedFigures }),
		tally("shapes", true, func(l *decompose.LayerResult) int64 { return l.Shapes }),
		tally("  held by anchors", false, func(l *decompose.LayerResult) int64 { return l.AnchoredShapes }),
		tally("  known from the baseline", false, func(l *decompose.LayerResult) int64 { return l.BaselineShapes }),
		tally("  moved to the other mask", false, func(l *decompose.LayerResult) int64 { return l.MovedShapes }),
		tally("near pairs", true, func(l *decompose.LayerResult) int64 { return l.NearPairs }),
		tally("components", true, func(l *decompose.LayerResult) int64 { return l.Components }),
		tally("  that two masks cannot do", false, func(l *decompose.LayerResult) int64 { return l.UnresolvedComponents }),
		tally("  clashes over ties", false, func(l *decompose.LayerResult) int64 { return l.JointClashes }),
		tally("unresolved pairs", true, func(l *decompose.LayerResult) int64 { return l.UnresolvedPairs }),
		{"  least possible", false, leastPossible},
		tally("  waived", false, func(l *decompose.LayerResult) int64 { return l.WaivedPairs }),
		tally("stitches", false, func(l *decompose.LayerResult) int64 { return l.Stitches }),
		{"  fewest stitches", false, leastStitches},
		tally("too near on any masks", false, func(l *decompose.LayerResult) int64 { return l.AnyMaskPairs }),
		tally("notches and gaps in shapes", false, func(l *decompose.LayerResult) int64 { return int64(len(l.SameShape)) }),
		{"wishes kept", false, func(l *decompose.LayerResult) string {
			if l.Wishes == 0 {
				return "0"
			}
			return Count(l.WishesKept) + " of " + Count(l.Wishes)
		}},
		{"area on A", true, func(l *decompose.LayerResult) string { return s.area(l.AreaA) }},
		{"area on B", true, func(l *decompose.LayerResult) string { return s.area(l.AreaB) }},
		{"  imbalance", true, func(l *decompose.LayerResult) string { return imbalance(l.AreaA, l.AreaB) }},
	}
	table := [][]string{{""}}
	for i := range layers {
		table[0] = append(table[0], Text(layers[i].Name))
	}
	for _, row := range rows {
		line, some := []string{row.label}, row.always
		for i := range layers {
			c := row.cell(&layers[i])
			some = some || c != "0"
			line = append(line, c)
		}
		if some {
			table = append(table, line)
		}
	}
	s.line("")
	WriteTable(s.w, table, "l"+strings.Repeat("r", len(layers)))
}

// leastPossible words what is proved about the number of unresolved pairs.
func leastPossible(l *decompose.LayerResult) string {
	switch {
	case l.UnresolvedPairs+l.WaivedPairs == 0:
		return "0"
	case l.ProvedOptimal:
		return "proved"
	}
	return "not proved, at least " + Count(l.LowerBound)
}

// leastStitches words what is proved about the number of stitches.
func leastStitches(l *decompose.LayerResult) string {
	switch {
	case l.Stitches == 0:
		return "0"
	case l.Stitches == l.StitchesBound:
		return "proved"
	}
	return "not proved, at least " + Count(l.StitchesBound)
}

// isUnknown tells whether a key of an entry would have taken too much work.
func isUnknown(u *decompose.Unresolved, key string) bool { return slices.Contains(u.NotComputed, key) }

// layer shows the groups of unresolved components, those that leave most pairs first.
func (s *summary) layer(l *decompose.LayerResult) {
	if len(l.Unresolved) == 0 {
		return
	}
	groups := l.Groups()
	s.line("")
	if len(groups) == 1 {
		s.line("%s: the components that two masks cannot do as drawn are all of one kind", Text(l.Name))
	} else {
		s.line("%s: %s kinds of components that two masks cannot do as drawn, worst first", Text(l.Name), Count(int64(len(groups))))
	}
	for _, g := range groups[:min(len(groups), groupsShown)] {
		s.group(&l.Unresolved[g.Shown], int64(len(g.Members)))
	}
	if more := len(groups) - groupsShown; more > 0 {
		s.line("  %s more kinds: write a --report for the full list", Count(int64(more)))
	}
}

// group words a kind of unresolved component that occurs so many times.
func (s *summary) group(u *decompose.Unresolved, occurs int64) {
	what := "an odd cycle of " + count(len(u.Cycle), "shape")
	if u.Cause == decompose.OrderClash {
		what = "orders that clash over " + count(len(u.Cycle), "shape")
	}
	made := 0
	for _, c := range u.Candidates {
		if c.Made {
			made++
		}
	}
	came := count(len(u.Pairs), "pair") + " left on one mask"
	if len(u.Pairs) == 0 && made > 0 {
		came = "mended by " + count(made, "stitch")
	}
	s.line("  %s: %s, %s", times(occurs), what, came)
	if u.Cell != "" {
		s.line("      at %s in cell %s", s.place(u.CellPlace), Text(u.Cell))
	}
	if len(u.Pairs) > 0 {
		p := &u.Pairs[0]
		first := "the pair"
		if len(u.Pairs) > 1 {
			first = "the first pair"
		}
		line := fmt.Sprintf("      %s: from %s in top %s, on mask %v", first, s.between(p.From, p.To), Text(u.Top), p.Mask)
		if p.Widen > 0 {
			line += "; widen the gap by " + s.r.Rules.Length(float64(p.Widen))
		}
		if p.EdgeA != (decompose.Edge{}) {
			line += fmt.Sprintf(" (%s %s)", p.Rule, s.r.Rules.Length(float64(p.Spacing)))
		}
		s.line("%s", line)
	}
	if n := len(u.Repair); n > 0 {
		p, total := &u.Repair[0], int64(0)
		for i := range u.Repair {
			total += u.Repair[i].Widen
		}
		line := fmt.Sprintf("      cheapest by moving: widen %s by %s in all", count(n, "gap"), s.r.Rules.Length(float64(total)))
		if n == 1 {
			line = fmt.Sprintf("      cheapest by moving: widen one gap by %s", s.r.Rules.Length(float64(total)))
		}
		s.line("%s, from %s", line, s.between(p.From, p.To))
	}
	switch {
	case made > 0 && len(u.Pairs) > 0:
		s.line("      %s made", count(made, "stitch"))
	case made > 0:
	case len(u.LeastStitches) > 0:
		first := ""
		if len(u.LeastStitches) > 1 {
			first = "the first "
		}
		s.line("      %s would do, %sover %s", count(len(u.LeastStitches), "stitch"), first, s.box(u.Candidates[u.LeastStitches[0]].Box))
	case isUnknown(u, "least_stitches"):
		s.line("      %s for a stitch; which set of them is the least is too much to find out", count(len(u.Candidates), "place"))
	case len(u.Candidates) > 0:
		s.line("      %s for a stitch, but no set of them is enough", count(len(u.Candidates), "place"))
	case u.NoCandidate != "":
		s.line("      no stitch: %s", u.NoCandidate)
	}
}

// place words a place in the deck's unit.
func (s *summary) place(at decompose.Spot) string { return s.spot(at) + " " + s.r.Rules.Unit }

// between words the way from one place to another in the deck's unit.
func (s *summary) between(from, to decompose.Spot) string { return s.spot(from) + " to " + s.place(to) }

// box words a box in the deck's unit.
func (s *summary) box(b decompose.Box) string {
	return s.between(decompose.Spot{X: b.X1, Y: b.Y1}, decompose.Spot{X: b.X2, Y: b.Y2})
}

// spot words a place without the unit.
func (s *summary) spot(at decompose.Spot) string {
	return "(" + s.r.Rules.Number(float64(at.X)/2) + ", " + s.r.Rules.Number(float64(at.Y)/2) + ")"
}

// cost tells what the run took.
func (s *summary) cost() {
	run := &s.r.Run
	parts := []string{fmt.Sprintf("%.2f s", run.Seconds)}
	if run.Peak > 0 {
		parts = append(parts, Bytes(run.Peak)+" of memory at most")
	}
	if run.Jobs > 0 {
		parts = append(parts, count(run.Jobs, "worker"))
	}
	s.line("")
	s.line("%s", strings.Join(parts, ", "))
}

// Bytes words an amount of memory.
func Bytes(n int64) string {
	switch {
	case n >= 1<<30:
		return fmt.Sprintf("%.2f GiB", float64(n)/(1<<30))
	case n >= 1<<20:
		return fmt.Sprintf("%.0f MiB", float64(n)/(1<<20))
	case n >= 1<<10:
		return fmt.Sprintf("%.0f KiB", float64(n)/(1<<10))
	}
	return fmt.Sprintf("%d B", n)
}

// count words a number of things.
func count(n int, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	if strings.HasSuffix(thing, "ch") {
		thing += "e"
	}
	return Count(int64(n)) + " " + thing + "s"
}

// times words how often a thing occurs.
func times(n int64) string {
	if n == 1 {
		return "once"
	}
	return Count(n) + " times"
}

// area words an area that is given in square database units.
func (s *summary) area(dbu2 float64) string {
	um := s.r.Rules.DBU * 1e6
	return strconv.FormatFloat(dbu2*um*um, 'g', 5, 64) + " um2"
}

// imbalance words the difference of two areas as a part of their sum.
func imbalance(a, b float64) string {
	if a+b <= 0 {
		return "none"
	}
	return fmt.Sprintf("%.1f %%", 100*max(a-b, b-a)/(a+b))
}
