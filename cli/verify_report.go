package cli

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"

	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
)

// This file prints what verify found: JSON for programs, a few lines for a person.

// The JSON report. Coordinates are database units of the top, as in the report of decompose.
type (
	verifyJSON struct {
		OK       bool              `json:"ok"`
		Faults   int64             `json:"faults"`
		Masked   fileJSON          `json:"masked"`
		Drawn    *fileJSON         `json:"drawn"`
		Tops     []string          `json:"top"`
		Layers   []verifyLayerJSON `json:"layers"`
		Checks   []checkJSON       `json:"checks"`
		Warnings []string          `json:"warnings"`
		Caution  string            `json:"caution"`
	}
	fileJSON struct {
		SHA256 string `json:"sha256"`
		Bytes  int64  `json:"bytes"`
	}
	verifyLayerJSON struct {
		Name     string      `json:"name"`
		FiguresA int64       `json:"figures_a"`
		FiguresB int64       `json:"figures_b"`
		Left     int64       `json:"figures_drawn"`
		Shapes   int64       `json:"shapes"`
		Stitched int64       `json:"stitched_shapes"`
		Overlaps int64       `json:"stitches"`
		Anchored int64       `json:"anchored_shapes"`
		Wishes   int64       `json:"wishes"`
		Kept     int64       `json:"wishes_kept"`
		Waived   int64       `json:"waived_pairs"`
		Accepted []faultJSON `json:"waived"`
	}
	checkJSON struct {
		Check  string      `json:"check"`
		Layer  string      `json:"layer,omitempty"`
		OK     bool        `json:"ok"`
		Faults int64       `json:"faults"`
		Places []faultJSON `json:"places"`
	}
	faultJSON struct {
		Top       string      `json:"top,omitempty"`
		Structure string      `json:"structure,omitempty"`
		Box       *[4]float64 `json:"box,omitempty"`
		Other     *[4]float64 `json:"other,omitempty"`
		What      string      `json:"what"`
	}
)

// writeVerifyReport writes the JSON report.
func writeVerifyReport(w io.Writer, v *verification) error {
	res := v.result
	out := verifyJSON{OK: res.OK(), Faults: res.Faults(), Masked: fileJSON{v.masked.sha256, v.masked.bytes}, Tops: names(res.Tops),
		Warnings: names(res.Warnings), Caution: report.Caution, Layers: []verifyLayerJSON{}, Checks: []checkJSON{}}
	if v.drawn != nil {
		out.Drawn = &fileJSON{v.drawn.sha256, v.drawn.bytes}
	}
	for i := range res.Layers {
		l := &res.Layers[i]
		out.Layers = append(out.Layers, verifyLayerJSON{l.Name, l.FiguresA, l.FiguresB, l.Left, l.Shapes, l.Stitched, l.Overlaps, l.Anchored,
			l.Wishes, l.WishesKept, l.Waived, faultsJSON(l.WaivedPlaces)})
	}
	for _, c := range res.Checks {
		out.Checks = append(out.Checks, checkJSON{string(c.Kind), report.Text(c.Layer), c.Faults == 0, c.Faults, faultsJSON(c.Places)})
	}
	buffered := bufio.NewWriter(w)
	e := json.NewEncoder(buffered)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	if err := e.Encode(out); err != nil {
		return err
	}
	return buffered.Flush()
}

func faultsJSON(places []verify.Place) []faultJSON {
	out := []faultJSON{}
	for i := range places {
		p := &places[i]
		out = append(out, faultJSON{report.Text(p.Top), report.Text(p.Structure), boxJSON(p.Box), boxJSON(p.Other), report.Text(p.Text)})
	}
	return out
}

// boxJSON gives a box in database units.
func boxJSON(b *decompose.Box) *[4]float64 {
	if b == nil {
		return nil
	}
	return &[4]float64{float64(b.X1) / 2, float64(b.Y1) / 2, float64(b.X2) / 2, float64(b.Y2) / 2}
}

func names(list []string) []string {
	out := []string{}
	for _, s := range list {
		out = append(out, report.Text(s))
	}
	return out
}

// checkWords says what holds where a check finds nothing.
func checkWords(k verify.Kind, r *decompose.LayerRules, rules *decompose.Rules) string {
	switch k {
	case verify.OnMasks:
		return "each shape on one mask, or stitched"
	case verify.DrawnLayer:
		if r.KeepDrawn {
			return "drawn figures kept, and on a mask too"
		}
		return "nothing left on the drawn layer"
	case verify.Stitches:
		return "stitches by the rules"
	case verify.SameMask:
		if r.ByFacing != nil {
			return "same-mask spacing by what faces what"
		}
		return "same-mask spacing " + rules.Length(float64(r.Spacing))
	case verify.AnyMask:
		return "any-mask spacing " + rules.Length(float64(r.AnyMask))
	case verify.Orders:
		return "anchors, ties, markers and labels held"
	case verify.SameArea:
		return "both masks together are what was drawn"
	case verify.Library:
		return "head and end of the library unchanged"
	case verify.Structures:
		return "structures and variants in order"
	case verify.Elements:
		return "elements and their records unchanged"
	case verify.References:
		return "references and arrays place the same"
	case verify.Marks:
		return "marks only at the end of tops"
	}
	return string(k)
}

// placesShown is how many faults of a check the summary shows; the JSON report has more.
const placesShown = 3

// writeVerifySummary writes one line for each check, the first faults below those that do not hold, and the verdict last.
func writeVerifySummary(w io.Writer, v *verification) {
	b := bufio.NewWriter(w)
	defer b.Flush()
	res := v.result
	for _, line := range res.Warnings {
		fmt.Fprintf(b, "%s: warning: %s\n", program, oneLine(line))
	}
	layers := map[string]*decompose.LayerRules{}
	rows := make([][2]string, len(res.Checks))
	var widths [2]int
	for i := range res.Rules.Layers {
		layers[res.Rules.Layers[i].Name] = &res.Rules.Layers[i]
	}
	for i, c := range res.Checks {
		name := report.Text(c.Layer)
		if c.Layer == "" {
			name = "stream"
		}
		rows[i] = [2]string{name, checkWords(c.Kind, layers[c.Layer], res.Rules)}
		for k := range rows[i] {
			widths[k] = max(widths[k], utf8.RuneCountInString(rows[i][k]))
		}
	}
	for i, c := range res.Checks {
		verdict := "ok"
		if c.Faults > 0 {
			verdict = faultCount(c.Faults)
		}
		fmt.Fprintf(b, "  %-*s  %-*s  %s\n", widths[0], rows[i][0], widths[1], rows[i][1], verdict)
		for k := range c.Places {
			if k == placesShown {
				fmt.Fprintf(b, "      and %d more\n", c.Faults-placesShown)
				break
			}
			fmt.Fprintf(b, "      %s\n", oneLine(placeLine(&c.Places[k], res.Rules)))
		}
	}
	for i := range res.Layers {
		l := &res.Layers[i]
		var more []string
		if l.Stitched > 0 {
			more = append(more, fmt.Sprintf("%d stitched (%d overlaps)", l.Stitched, l.Overlaps))
		}
		if l.Waived > 0 {
			more = append(more, fmt.Sprintf("%d waived pairs", l.Waived))
		}
		if l.Wishes > 0 {
			more = append(more, fmt.Sprintf("%d of %d wishes kept", l.WishesKept, l.Wishes))
		}
		line := fmt.Sprintf("%s: %d shapes, %d figures on A, %d on B", report.Text(l.Name), l.Shapes, l.FiguresA, l.FiguresB)
		fmt.Fprintf(b, "  %s\n", strings.Join(append([]string{line}, more...), ", "))
	}
	if v.drawn == nil {
		fmt.Fprintf(b, "  not compared with what was drawn; --drawn does that\n")
	}
	if res.OK() {
		fmt.Fprintf(b, "%s: all holds.\n", v.masked.name)
	} else {
		fmt.Fprintf(b, "%s: does not hold, %s.\n", v.masked.name, faultCount(res.Faults()))
	}
	fmt.Fprintln(b, report.Caution)
}

func faultCount(n int64) string {
	if n == 1 {
		return "1 fault"
	}
	return fmt.Sprintf("%d faults", n)
}

// placeLine words a fault with its place, in the deck's unit.
func placeLine(p *verify.Place, r *decompose.Rules) string {
	var where []string
	box := func(b *decompose.Box) string {
		return fmt.Sprintf("(%s, %s) to (%s, %s) %s", r.Number(float64(b.X1)/2), r.Number(float64(b.Y1)/2), r.Number(float64(b.X2)/2), r.Number(float64(b.Y2)/2), r.Unit)
	}
	if p.Structure != "" {
		where = append(where, "structure "+gds.Printable(p.Structure))
	}
	if p.Box != nil {
		where = append(where, box(p.Box))
	}
	if p.Other != nil {
		where = append(where, "and "+box(p.Other))
	}
	if p.Top != "" {
		where = append(where, "in "+gds.Printable(p.Top))
	}
	if where == nil {
		return p.Text
	}
	return strings.Join(where, " ") + ": " + p.Text
}
