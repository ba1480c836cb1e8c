package report

import (
	"bufio"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"fmt"
	"html/template"
	"io"
	"path"
	"strings"

	"maskpair/decompose"
)

// This file makes the page: one HTML file that needs nothing but itself. It is written for one question: what must be mended,
// where, and how. So the verdict comes first, then each layer in a line, then where on the chip, then one card for each kind of
// thing to mend. page_card.go words a card, page_picture.go and page_map.go draw.

//go:embed page/page.html
var pageText string // never written to

//go:embed page/page.css
var pageStyle string

//go:embed page/page.js
var pageScript string

const (
	// PageCards is how many kinds of unresolved components have a card; the others are listed.
	PageCards = 200
	// mapsShown is how many maps the page has, over all layers and tops.
	mapsShown = 12
	// pictureBytes is how much drawings may take altogether, so that the page stays below 5 MB; cards beyond have none.
	pictureBytes = 3 << 19
)

// WritePage writes the report as a page. Pictures and maps are there as far as the result was asked for drawings.
func WritePage(w io.Writer, r *Report) error {
	t, err := template.New("page").Parse(pageText)
	if err != nil {
		return err
	}
	out := bufio.NewWriterSize(w, 1<<16)
	if err := t.Execute(out, newPage(r)); err != nil {
		return err
	}
	return out.Flush()
}

// page is what the template shows.
type page struct {
	Title, Policy string
	Style, Script template.HTML
	Defs          template.HTML // hatches, for all drawings

	Fits    bool
	Verdict string
	Lead    []string
	Warned  []string // remarks, one line each
	Unit    string
	Layers  []layerRow
	Maps    []mapView
	Cards   []*card
	Rest    []restRow
	RestMax string // how many more kinds are not even listed; "" none
	Lists   []listing
	Input   []fact
	Caution string
}

// fact is a label with what it says.
type fact struct{ Label, Text string }

// layerRow is one layer of the summary.
type layerRow struct {
	Name, Spacing, Figures, Shapes, NearPairs, Components string
	ByFacing                                              bool // spacing by what faces what as well
	Unresolved                                            string
	Bad                                                   bool
	Proof                                                 string
	Remarks                                               []string
	AreaA, AreaB                                          string
	Balance                                               template.HTML
	ShareA                                                string
}

// restRow is a kind of unresolved component that has no card.
type restRow struct{ Layer, What, Times, Pairs, Where string }

// Caution is what every reader of a result must know.
const Caution = "The result is not a sign-off: verify it with the foundry's qualified flow and rules before any mask is made."

// pageMaker makes a page.
type pageMaker struct {
	r     *Report
	p     *page
	drawn int // bytes of drawings so far
}

func newPage(r *Report) *page {
	m := &pageMaker{r: r, p: &page{}}
	p := m.p
	name := r.Input.Name
	if name == "" || name == "-" {
		name = "the layout"
	}
	p.Title = "Masks of " + Text(path.Base(name))
	p.Style = template.HTML("<style>" + pageStyle + "</style>")
	p.Script = template.HTML("<script>" + pageScript + "</script>")
	p.Policy = fmt.Sprintf("default-src 'none'; style-src '%s'; script-src '%s'; base-uri 'none'; form-action 'none'", hashOf(pageStyle), hashOf(pageScript))
	p.Defs = hatches
	p.Unit = r.Rules.Unit
	p.Caution = Caution
	m.verdict(Text(path.Base(name)))
	for i := range r.Result.Layers {
		p.Layers = append(p.Layers, m.layer(&r.Result.Layers[i], &r.Rules.Layers[i]))
	}
	m.cards()
	m.maps()
	m.lists()
	p.Warned = r.Warnings
	m.input()
	return p
}

// hashOf names an inline text in the page's policy.
func hashOf(text string) string {
	sum := sha256.Sum256([]byte(text))
	return "sha256-" + base64.StdEncoding.EncodeToString(sum[:])
}

// verdict answers the question.
func (m *pageMaker) verdict(name string) {
	p := m.p
	pairs, kinds, waived, near, moved := int64(0), 0, int64(0), int64(0), int64(0)
	proved := true
	for i := range m.r.Result.Layers {
		l := &m.r.Result.Layers[i]
		pairs += l.UnresolvedPairs
		for _, g := range l.Groups() {
			if g.Pairs > 0 {
				kinds++
			}
		}
		waived += l.WaivedPairs
		near += l.AnyMaskPairs
		moved += l.MovedShapes
		proved = proved && l.ProvedOptimal
	}
	frozen := m.r.FrozenFaults()
	p.Fits = pairs == 0 && frozen == 0
	say := func(form string, args ...any) { p.Lead = append(p.Lead, fmt.Sprintf(form, args...)) }
	switch {
	case p.Fits:
		p.Verdict = fmt.Sprintf("Yes. All of %s fits on two masks.", name)
		if waived > 0 {
			p.Verdict = fmt.Sprintf("Yes, with what was accepted. All else of %s fits on two masks.", name)
		}
	case pairs == 0:
		p.Verdict = fmt.Sprintf("No. In %s of %s a mask that is already made does not allow what is drawn.", count64(frozen, "place"), name)
	default:
		p.Verdict = fmt.Sprintf("No. %s of near shapes in %s cannot be put on different masks.", count64(pairs, "pair"), name)
		switch {
		case kinds == 1:
			say("There is one kind of place to mend. It has a card below.")
		default:
			say("There are %s kinds of places to mend, each with a card below, worst first.", Count(int64(kinds)))
		}
		if proved {
			say("No choice of masks leaves fewer: that is proved.")
		} else {
			say("Whether some choice of masks leaves fewer is not proved for every layer; the layers say how far it is.")
		}
	}
	if frozen > 0 && pairs > 0 {
		say("In %s a mask that is already made does not allow what is drawn.", count64(frozen, "place"))
	}
	if waived > 0 {
		say("%s accepted by a waiver.", isAre(waived, "pair"))
	}
	if near > 0 {
		say("%s nearer than any two shapes may be, whatever the masks.", isAre(near, "pair"))
	}
	if moved > 0 {
		say("%s changed masks against the baseline.", haveHas(moved, "shape"))
	}
}

func count64(n int64, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return Count(n) + " " + thing + "s"
}

func isAre(n int64, thing string) string {
	if n == 1 {
		return "1 " + thing + " is"
	}
	return Count(n) + " " + thing + "s are"
}

func haveHas(n int64, thing string) string {
	if n == 1 {
		return "1 " + thing + " has"
	}
	return Count(n) + " " + thing + "s have"
}

// layer words a layer for the summary.
func (m *pageMaker) layer(l *decompose.LayerResult, rules *decompose.LayerRules) layerRow {
	row := layerRow{
		Name: Text(l.Name), Spacing: m.length(l.Spacing), ByFacing: rules.ByFacing != nil, Figures: Count(l.Figures), Shapes: Count(l.Shapes), NearPairs: Count(l.NearPairs),
		Components: Count(l.Components), Unresolved: Count(l.UnresolvedPairs), Bad: l.UnresolvedPairs > 0,
		AreaA: m.area(l.AreaA), AreaB: m.area(l.AreaB), Balance: balanceBar(l.AreaA, l.AreaB), ShareA: shareOf(l.AreaA, l.AreaB),
	}
	remark := func(n int64, form string, args ...any) {
		if n > 0 {
			row.Remarks = append(row.Remarks, fmt.Sprintf(form, args...))
		}
	}
	switch {
	case l.UnresolvedPairs+l.WaivedPairs == 0:
	case l.ProvedOptimal:
		row.Proof = "no choice leaves fewer"
	default:
		row.Proof = "at least " + Count(l.LowerBound) + " whatever the choice"
	}
	remark(l.UnresolvedComponents, "%s that two masks cannot do", count64(l.UnresolvedComponents, "component"))
	remark(l.JointClashes, "%s that clash only through ties", count64(l.JointClashes, "group"))
	remark(l.WaivedPairs, "%s accepted", count64(l.WaivedPairs, "pair"))
	remark(l.AnyMaskPairs, "%s too near on any masks", count64(l.AnyMaskPairs, "pair"))
	remark(l.Stitches, "%s", count(int(l.Stitches), "stitch"))
	remark(l.AnchoredShapes, "%s held by anchors", count64(l.AnchoredShapes, "shape"))
	remark(l.BaselineShapes, "%s known from the baseline, %s moved", count64(l.BaselineShapes, "shape"), Count(l.MovedShapes))
	remark(l.Wishes, "%s of %s kept", Count(l.WishesKept), count(int(l.Wishes), "wish"))
	remark(l.AlreadyMaskedFigures, "%s came on a mask already", count64(l.AlreadyMaskedFigures, "figure"))
	remark(l.RoundedFigures, "%s rounded to the grid", count64(l.RoundedFigures, "figure"))
	return row
}

// length words a length in database units.
func (m *pageMaker) length(dbu int64) string { return m.inUnit(m.r.Rules.Number(float64(dbu))) }

// inUnit puts the unit behind a number, so that no line ends between them.
func (m *pageMaker) inUnit(number string) string { return number + noBreak + m.r.Rules.Unit }

// noBreak is a space at which no line ends.
const noBreak = "\u00a0"

// area words an area that is given in square database units.
func (m *pageMaker) area(dbu2 float64) string {
	s := summary{r: m.r}
	return strings.Replace(s.area(dbu2), " um2", noBreak+"µm²", 1)
}

// at words a point: "120, 340".
func (m *pageMaker) at(s decompose.Spot) string {
	return m.r.Rules.Number(float64(s.X)/2) + ", " + m.r.Rules.Number(float64(s.Y)/2)
}

// box words a box by two corners: "120, 340, 200, 380".
func (m *pageMaker) box(b decompose.Box) string {
	return m.at(decompose.Spot{X: b.X1, Y: b.Y1}) + ", " + m.at(decompose.Spot{X: b.X2, Y: b.Y2})
}

// shareOf words how much of two areas the first is.
func shareOf(a, b float64) string {
	if a+b <= 0 {
		return ""
	}
	return fmt.Sprintf("%.1f"+noBreak+"%% on A", 100*a/(a+b))
}

// input tells what was read and by what.
func (m *pageMaker) input() {
	in, run := &m.r.Input, &m.r.Run
	say := func(label, text string) { m.p.Input = append(m.p.Input, fact{label, text}) }
	if in.Name != "" && in.Name != "-" {
		say("Layout", Text(in.Name))
	}
	say("SHA-256", in.SHA256)
	say("Size", Count(in.Bytes)+" bytes")
	say("Database unit", Short(in.DBU*1e9)+" nm")
	var tops []string
	for _, t := range in.Tops[:min(len(in.Tops), 12)] {
		tops = append(tops, Text(t))
	}
	if more := len(in.Tops) - len(tops); more > 0 {
		tops = append(tops, fmt.Sprintf("and %s more", Count(int64(more))))
	}
	say("Tops", strings.Join(tops, ", "))
	if run.Version != "" {
		say("Made by", "maskpair "+run.Version)
	}
}
