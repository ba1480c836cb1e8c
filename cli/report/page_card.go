package report

import (
	"cmp"
	"fmt"
	"html/template"
	"math"
	"slices"
	"strconv"
	"strings"

	"maskpair/decompose"
)

// This file words the cards: for each kind of unresolved component what is wrong, what would mend it, and where it is.

// card is one kind of unresolved component.
type card struct {
	Number     int
	ID         string // stable from run to run: the layer and the number of the group
	Layer      string
	Headline   string
	Times      string
	Pairs      string // unresolved pairs, of each
	Size       string // shapes of the component
	Why        string
	Steps      []cardStep
	Closes     string // what happens behind the last step
	StepsMore  string
	Picture    template.HTML
	Closeup    template.HTML
	Caption    string
	Gaps       []cardGap
	GapsMore   string
	Anchors    []string
	Mends      []mend
	Waiver     string
	Proof      string
	Cell       string
	CellAt     string
	Top        string
	ChipAt     string
	Places     []cardPlace
	PlacesMore string
	Locator    template.HTML
	Short      string // the first mend, in a few words
	Previous   *card
	Next       *card

	layer   *decompose.LayerResult
	members []int // indices into its Unresolved
}

// cardStep is a shape of the cycle.
type cardStep struct {
	Step int
	Mask string
	Held bool
}

// cardGap is a gap of the component that matters.
type cardGap struct {
	Label    string // "5 – 1"
	Distance string
	Needed   string
	Rule     string // by what faces what, with its spacing
	Left     bool   // its shapes are on one mask
	From, To string
}

// mend is one way out.
type mend struct {
	Head  string
	Lines []string
	Gaps  []string // to be widened
	Cuts  []string // boxes
	After string
}

// cardPlace is one place of the kind.
type cardPlace struct{ Top, Chip, Cell, CellAt, Placed string }

const (
	placesShown = 25
	stepsShown  = 20
	gapsShown   = 16
	// Unresolved pairs off the cycle fill the table up to so many rows.
	gapsElsewhere = 8
	cutsShown     = 8
	restShown     = 1000
)

// work is a group with its layer, to be sorted over all layers.
type work struct {
	layer int
	group decompose.Group
}

// cards makes the cards of the worst kinds over all layers, and the list of the others.
func (m *pageMaker) cards() {
	var all []work
	for i := range m.r.Result.Layers {
		for _, g := range m.r.Result.Layers[i].Groups() {
			if g.Pairs > 0 { // else a cut or a waiver has settled it
				all = append(all, work{i, g})
			}
		}
	}
	sortWork(all)
	for n, k := range all {
		l := &m.r.Result.Layers[k.layer]
		if n < PageCards {
			m.p.Cards = append(m.p.Cards, m.card(n+1, k))
			continue
		}
		if n-PageCards >= restShown {
			m.p.RestMax = Count(int64(len(all) - n))
			break
		}
		u := &l.Unresolved[k.group.Shown]
		m.p.Rest = append(m.p.Rest, restRow{Text(l.Name), whatItIs(u), times(int64(len(k.group.Members))), Count(k.group.Pairs),
			fmt.Sprintf("%s in %s", m.at(placeOf(u)), Text(u.Top))})
	}
	for i, c := range m.p.Cards {
		if i > 0 {
			c.Previous = m.p.Cards[i-1]
		}
		if i+1 < len(m.p.Cards) {
			c.Next = m.p.Cards[i+1]
		}
	}
}

// sortWork puts the kinds that leave most pairs first, then those that occur most often, then those of earlier layers.
func sortWork(all []work) {
	slices.SortStableFunc(all, func(a, b work) int {
		return cmp.Or(cmp.Compare(b.group.Pairs, a.group.Pairs), cmp.Compare(len(b.group.Members), len(a.group.Members)), cmp.Compare(a.layer, b.layer))
	})
}

// whatItIs names the kind.
func whatItIs(u *decompose.Unresolved) string {
	if u.Cause == decompose.OrderClash {
		return "clashing orders over " + count(len(u.Cycle), "shape")
	}
	return "odd cycle of " + count(len(u.Cycle), "shape")
}

// placeOf is a point to look at: the first unresolved pair of the cycle, else the first of all.
func placeOf(u *decompose.Unresolved) decompose.Spot {
	for i := range u.Pairs {
		if a, _ := stepsOf(u, &u.Pairs[i]); a > 0 {
			return middle(u.Pairs[i].Gap)
		}
	}
	if len(u.Pairs) > 0 {
		return middle(u.Pairs[0].Gap)
	}
	if len(u.Cycle) > 0 {
		return middle(u.Cycle[0].Box)
	}
	return decompose.Spot{}
}

func middle(b decompose.Box) decompose.Spot {
	return decompose.Spot{X: b.X1 + (b.X2-b.X1)/2, Y: b.Y1 + (b.Y2-b.Y1)/2}
}

func (m *pageMaker) card(number int, k work) *card {
	l := &m.r.Result.Layers[k.layer]
	rules := &m.r.Rules.Layers[k.layer]
	first := k.group.Shown
	u := &l.Unresolved[first]
	c := &card{Number: number, ID: anchorID(l.Name) + "-" + strconv.FormatInt(u.Group, 10), Layer: Text(l.Name),
		Headline: sentence(whatItIs(u)), Times: m.times(l, k.group),
		Pairs: Count(int64(len(u.Pairs))), Size: Count(u.Shapes), layer: l, members: k.group.Members}
	var picture *decompose.Picture
	if l.Drawing != nil {
		picture = l.Drawing.Pictures[first]
	}
	m.steps(c, u, picture)
	m.gaps(c, u, picture, rules)
	m.mends(c, u, rules)
	m.places(c, l, u, k.group)
	m.draw(c, u, picture, l)
	switch {
	case u.Proved && u.LowerBound > 0:
		c.Proof = "Proved: no choice of masks leaves fewer than " + count(int(u.LowerBound), "pair") + " here."
	case u.LowerBound > 0:
		c.Proof = "No choice of masks leaves fewer than " + count(int(u.LowerBound), "pair") + " here; whether this can be reached is open."
	}
	return c
}

// times words how often a kind occurs, and of these, how many need nothing more.
func (m *pageMaker) times(l *decompose.LayerResult, g decompose.Group) string {
	settled := 0
	for _, i := range g.Members {
		if len(l.Unresolved[i].Pairs) == 0 {
			settled++
		}
	}
	if settled > 0 {
		return fmt.Sprintf("%s (%s settled)", times(int64(len(g.Members))), Count(int64(settled)))
	}
	return times(int64(len(g.Members)))
}

// anchorID turns a name into part of a link.
func anchorID(name string) string {
	var b strings.Builder
	for _, r := range Text(name) {
		switch {
		case r >= 'a' && r <= 'z', r >= 'A' && r <= 'Z', r >= '0' && r <= '9':
			b.WriteRune(r)
		default:
			fmt.Fprintf(&b, "_%x", r)
		}
	}
	return b.String()
}

func sentence(s string) string { return strings.ToUpper(s[:1]) + s[1:] }

// steps words the cycle in order.
func (m *pageMaker) steps(c *card, u *decompose.Unresolved, picture *decompose.Picture) {
	held := map[int]bool{}
	if picture != nil {
		for i := range picture.Shapes {
			s := &picture.Shapes[i]
			if s.Anchor == "" {
				continue
			}
			if s.Step > 0 {
				held[s.Step] = true
				c.Anchors = append(c.Anchors, fmt.Sprintf("Shape %d: %s", s.Step, Text(s.Anchor)))
			} else if s.Member {
				c.Anchors = append(c.Anchors, Text(s.Anchor))
			}
		}
	}
	n := len(u.Cycle)
	for i := range u.Cycle[:min(n, stepsShown)] {
		c.Steps = append(c.Steps, cardStep{i + 1, u.Cycle[i].Mask.String(), held[i+1]})
	}
	if more := n - stepsShown; more > 0 {
		c.StepsMore = count(more, "more shape")
	}
	if u.Cause == decompose.OrderClash {
		c.Why = "Each of these shapes is near the next, so masks must change from one to the next. The orders at both ends do not go with that."
		if n == 1 {
			c.Why = "The orders for this shape do not go with its near pairs."
		}
		return
	}
	c.Why = fmt.Sprintf("Each of these %d shapes is near the next, and the last is near the first. Masks must change at each step, and after an odd number of steps the first shape would have to be on both.", n)
	if n > 0 {
		c.Closes = "back to 1"
	}
}

// distance words the root of a squared distance in database units.
func (m *pageMaker) distance(sq float64) string {
	d := math.Sqrt(sq)
	word := m.r.Rules.Number(d)
	if at := strings.IndexByte(word, '.'); at >= 0 && len(word)-at > 4 {
		word = "≈ " + strconv.FormatFloat(d/m.r.Rules.UnitDBU, 'f', 2, 64)
	}
	return m.inUnit(strings.Replace(word, " ", noBreak, 1))
}

// gaps lists the gaps of the cycle, those of unresolved pairs first, then unresolved pairs elsewhere.
func (m *pageMaker) gaps(c *card, u *decompose.Unresolved, picture *decompose.Picture, rules *decompose.LayerRules) {
	inCycle := map[[2]int]bool{}
	var elsewhere []cardGap
	for i := range u.Pairs {
		p := &u.Pairs[i]
		g := cardGap{Label: "elsewhere", Distance: m.distance(p.DistanceSq), Left: true, From: m.at(p.From), To: m.at(p.To)}
		if p.Widen > 0 {
			g.Needed = m.length(p.Widen)
		}
		if rules.ByFacing != nil {
			g.Rule = p.Rule + noBreak + m.length(p.Spacing)
		}
		if a, b := stepsOf(u, p); a > 0 {
			g.Label = fmt.Sprintf("%d – %d", a, b)
			inCycle[[2]int{a, b}] = true
			c.Gaps = append(c.Gaps, g)
		} else {
			elsewhere = append(elsewhere, g)
		}
	}
	if picture != nil {
		for _, k := range picture.Links {
			a, b := min(k.From, k.To), max(k.From, k.To)
			if !k.Known || inCycle[[2]int{a, b}] || len(c.Gaps) >= gapsShown {
				continue
			}
			g := cardGap{Label: fmt.Sprintf("%d – %d", a, b), Distance: m.distance(k.DistanceSq), From: m.at(k.At), To: m.at(k.Other)}
			if short := float64(rules.Spacing) - math.Sqrt(k.DistanceSq); short > 0 && rules.ByFacing == nil {
				g.Needed = m.length(int64(math.Ceil(short)))
			}
			c.Gaps = append(c.Gaps, g)
		}
	}
	shown := min(len(elsewhere), max(0, gapsElsewhere-len(c.Gaps)))
	c.Gaps = append(c.Gaps, elsewhere[:shown]...)
	if more := len(elsewhere) - shown; more > 0 {
		c.GapsMore = count(more, "more unresolved pair")
	}
}

// mends says what would do.
func (m *pageMaker) mends(c *card, u *decompose.Unresolved, rules *decompose.LayerRules) {
	m.drawApart(c, u)
	if u.Cause == decompose.OrderClash {
		w := mend{Head: "Take back an order", Lines: []string{"Drop or turn one of the anchors or ties that hold the first and the last shape."}}
		c.Mends = append([]mend{w}, c.Mends...)
		c.Short = "take back an anchor"
	}
	switch {
	case len(u.LeastStitches) > 0:
		w := mend{Head: "Cut"}
		if len(u.LeastStitches) == 1 {
			w.Lines = append(w.Lines, "One cut does it: a shape becomes two pieces on both masks, which overlap here:")
		} else {
			w.Lines = append(w.Lines, fmt.Sprintf("%s do it together; each makes two pieces of a shape, on both masks, which overlap here:", sentence(count(len(u.LeastStitches), "cut"))))
		}
		for _, i := range u.LeastStitches[:min(len(u.LeastStitches), cutsShown)] {
			w.Cuts = append(w.Cuts, m.box(u.Candidates[i].Box))
		}
		w.After = "This was verified by solving again with the cut."
		if rules.Stitch != nil && !rules.Stitch.Apply {
			w.After += " With apply = true under [layer.stitch] in the deck the program cuts there."
		}
		c.Mends = append([]mend{w}, c.Mends...)
		c.Short = count(len(u.LeastStitches), "cut")
	case isUnknown(u, "least_stitches"):
		c.Mends = append(c.Mends, mend{Head: "Cut", Lines: []string{count(len(u.Candidates), "place") + " for a cut; which set of them is the least is too much to find out."}})
	case len(u.Candidates) > 0:
		c.Mends = append(c.Mends, mend{Head: "Cut", Lines: []string{count(len(u.Candidates), "place") + " for a cut, but no set of them is enough."}})
	case u.NoCandidate != "":
		c.Mends = append(c.Mends, mend{Head: "Cut", Lines: []string{"Not possible: " + Text(u.NoCandidate) + "."}})
	}
	m.waiver(c, u)
}

// widenShown is how many gaps to be widened a card names.
const widenShown = 6

// drawApart says which gaps to widen: those that lack least in total, where that is known, else those of the pairs that are
// unresolved.
func (m *pageMaker) drawApart(c *card, u *decompose.Unresolved) {
	gaps, least := u.Repair, true
	if len(gaps) == 0 {
		gaps, least = u.Pairs, false
	}
	if len(gaps) == 0 {
		return
	}
	total := int64(0)
	for i := range gaps {
		total += gaps[i].Widen
	}
	w := mend{Head: "Draw apart"}
	list := func(p *decompose.Pair) string {
		line := fmt.Sprintf("%s: it is %s", m.pairName(u, p), m.distance(p.DistanceSq))
		if p.Widen > 0 {
			line += fmt.Sprintf(" and needs %s more", m.length(p.Widen))
		}
		return line + "."
	}
	if len(gaps) == 1 {
		w.Lines = append(w.Lines, "Widen the gap "+list(&gaps[0]))
	} else {
		line := fmt.Sprintf("Widen %s gaps", Count(int64(len(gaps))))
		if total > 0 {
			line += fmt.Sprintf(", by %s in all", m.length(total))
		}
		w.Lines = append(w.Lines, line+":")
		for i := range gaps[:min(len(gaps), widenShown)] {
			w.Gaps = append(w.Gaps, list(&gaps[i]))
		}
		if more := len(gaps) - widenShown; more > 0 {
			w.Gaps = append(w.Gaps, count(more, "more gap")+", in report.json.")
		}
	}
	after := "Nothing is unresolved here then, as long as nothing new comes too near."
	if least {
		after = "Nothing is unresolved here then, as long as nothing new comes too near. No other choice of gaps lacks less in all."
	}
	w.After = after
	c.Mends = append(c.Mends, w)
	if total > 0 {
		c.Short = fmt.Sprintf("widen %s by %s", count(len(gaps), "gap"), m.length(total))
	}
}

// pairName names a pair as the drawing does, or by its place.
func (m *pageMaker) pairName(u *decompose.Unresolved, p *decompose.Pair) string {
	if a, b := stepsOf(u, p); a > 0 {
		return fmt.Sprintf("%d – %d", a, b)
	}
	return fmt.Sprintf("from (%s) to (%s)", m.at(p.From), m.at(p.To))
}

// stepsOf gives the places in the cycle of the shapes of a pair, the lower first; 0 where they are not in it.
func stepsOf(u *decompose.Unresolved, p *decompose.Pair) (a, b int) {
	for i := range u.Cycle {
		switch u.Cycle[i].Box {
		case p.A:
			a = i + 1
		case p.B:
			b = i + 1
		}
	}
	if a == 0 || b == 0 {
		return 0, 0
	}
	return min(a, b), max(a, b)
}

// waiver writes the entry of the anchor file that accepts the first pair.
func (m *pageMaker) waiver(c *card, u *decompose.Unresolved) {
	if len(u.Pairs) != 1 {
		return
	}
	p := &u.Pairs[0]
	if (p.From.X|p.From.Y|p.To.X|p.To.Y)&1 != 0 { // rounded points may miss the shapes
		return
	}
	c.Waiver = fmt.Sprintf("[[waiver]]\nlayer = %s\nat = [[%s], [%s]]\nreason = \"\"", strconv.Quote(c.Layer), m.at(p.From), m.at(p.To))
}

// places lists where the kind occurs.
func (m *pageMaker) places(c *card, l *decompose.LayerResult, first *decompose.Unresolved, g decompose.Group) {
	c.Cell, c.CellAt = Text(first.Cell), m.at(first.CellPlace)
	c.Top, c.ChipAt = Text(first.Top), m.at(placeOf(first))
	for _, i := range g.Members[:min(len(g.Members), placesShown)] {
		u := &l.Unresolved[i]
		c.Places = append(c.Places, cardPlace{Text(u.Top), m.at(placeOf(u)), Text(u.Cell), m.at(u.CellPlace), m.placed(u.CellTransform)})
	}
	if more := len(g.Members) - placesShown; more > 0 {
		c.PlacesMore = Count(int64(more))
	}
}

// placed words how a cell is placed; the program gives it in database units.
func (m *pageMaker) placed(words string) string {
	at := strings.LastIndex(words, "at (")
	if at < 0 || !strings.HasSuffix(words, ")") {
		return words
	}
	x, y, ok := strings.Cut(words[at+len("at ("):len(words)-1], ", ")
	fx, err1 := strconv.ParseFloat(x, 64)
	fy, err2 := strconv.ParseFloat(y, 64)
	if !ok || err1 != nil || err2 != nil {
		return words
	}
	return words[:at] + "at " + m.r.Rules.Number(fx) + ", " + m.r.Rules.Number(fy)
}

// draw adds the drawings, as long as the page stays small.
func (m *pageMaker) draw(c *card, u *decompose.Unresolved, picture *decompose.Picture, l *decompose.LayerResult) {
	if m.drawn > pictureBytes {
		c.Caption = "No drawing: the page has as many as it can hold."
		return
	}
	if picture == nil {
		picture = boxPicture(u)
	}
	d := &drawer{rules: m.r.Rules, u: u, p: picture}
	c.Picture = d.picture(fmt.Sprintf("Drawing of %s", c.Headline))
	c.Caption = d.caption()
	c.Closeup = d.closeup()
	m.drawn += len(c.Picture) + len(c.Closeup)
	if l.Drawing != nil {
		c.Locator = locator(l, c.members, u.Top)
		m.drawn += len(c.Locator)
	}
}

// boxPicture makes a picture of what the result says without a drawing: boxes.
func boxPicture(u *decompose.Unresolved) *decompose.Picture {
	p := &decompose.Picture{}
	grow := func(b decompose.Box) {
		if p.Window == (decompose.Box{}) {
			p.Window = b
		}
		w := &p.Window
		*w = decompose.Box{X1: min(w.X1, b.X1), Y1: min(w.Y1, b.Y1), X2: max(w.X2, b.X2), Y2: max(w.Y2, b.Y2)}
	}
	outline := func(b decompose.Box) [][][]decompose.Spot {
		return [][][]decompose.Spot{{{{X: b.X1, Y: b.Y1}, {X: b.X2, Y: b.Y1}, {X: b.X2, Y: b.Y2}, {X: b.X1, Y: b.Y2}}}}
	}
	for i, s := range u.Cycle {
		grow(s.Box)
		p.Shapes = append(p.Shapes, decompose.PictureShape{Mask: s.Mask, Step: i + 1, Member: true, Box: s.Box, Outlines: outline(s.Box)})
	}
	for i := range u.Pairs {
		grow(u.Pairs[i].A)
		grow(u.Pairs[i].B)
	}
	margin := max(p.Window.X2-p.Window.X1, p.Window.Y2-p.Window.Y1)/16 + 1
	p.Window.X1, p.Window.Y1, p.Window.X2, p.Window.Y2 = p.Window.X1-margin, p.Window.Y1-margin, p.Window.X2+margin, p.Window.Y2+margin
	return p
}
