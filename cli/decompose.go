package cli

import (
	"context"
	"fmt"
	"strings"

	"github.com/urfave/cli/v2"

	"maskpair/cli/report"
	"maskpair/decompose"
)

// This file is the command decompose around its stages: outputs planned and begun, the stages run, report and layout put in
// place, the summary printed.

const decomposeHelp = `Puts every drawn figure of the layers that DECK.toml names on mask A or mask B, so that no two shapes on one mask
are nearer than their same-mask spacing. The hierarchy of the layout is kept. What two masks cannot do is named: the
smallest odd cycle or the orders that clash, the pairs that stay, and the cheapest way out.

Without --output nothing is written: the command only answers, and reports. With --deck and nothing else it says in words
what the deck means, and warns of rules that contradict each other.
IN.gds may be compressed with gzip; - is standard input.

Example:
   maskpair decompose chip.gds --deck chip-deck.toml --anchors analog.toml --output chip-masks.gds --report chip-report.json

Exit status:
   0  done, nothing is unresolved but what is waived
   1  done and written, but something is unresolved
   2  the command line, the deck or the anchor file is wrong
   3  the layout cannot be processed
   4  it could not write, or was interrupted
With 2, 3 and 4 nothing new is left at the place of an output.

` + report.Caution

func decomposeCommand(con *console, s steps, status *int) *cli.Command {
	return &cli.Command{
		Name:            "decompose",
		Usage:           "put each drawn figure on mask A or B, or say why it cannot be done",
		UsageText:       "maskpair decompose IN.gds --deck DECK.toml [--output OUT.gds] [options]",
		Description:     decomposeHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Flags:           decomposeFlags(),
		Action: func(c *cli.Context) error {
			if onlyDeck(c) {
				return runDeckCheck(c.String("deck"), con)
			}
			o, err := parseOptions(c)
			if err != nil {
				return err
			}
			r, err := decomposeTo(c.Context, o, con, s)
			if err == nil && r.UnresolvedPairs()+r.FrozenFaults() > 0 {
				*status = statusUnresolved
			}
			return err
		},
	}
}

// decomposeTo runs the stages with checked options and puts the outputs in place.
func decomposeTo(ctx context.Context, o *Options, con *console, s steps) (*report.Report, error) {
	clock := newClock(con.err, o.Quiet)
	defer clock.stop()
	clock.Head(o.Input + ": " + layersOf(o.Deck))
	inputs := []named{{"--deck", o.DeckPath}}
	if o.Input != "-" {
		inputs = append(inputs, named{"the layout", o.Input})
	}
	if o.Anchors != "" {
		inputs = append(inputs, named{"--anchors", o.Anchors})
	}
	reportInputs := inputs
	if o.Baseline != "" { // a layout may follow its own earlier result, a report may not
		reportInputs = append(reportInputs[:len(inputs):len(inputs)], named{"--baseline", o.Baseline})
	}
	var files outputs
	account, err := files.add("--report", o.Report, o.Force, reportInputs, con.out)
	if err != nil {
		return nil, err
	}
	page, err := files.add("--html", o.Page, o.Force, reportInputs, con.out)
	if err != nil {
		return nil, err
	}
	layout, err := files.add("--output", o.Output, o.Force, inputs, con.out)
	if err != nil {
		return nil, err
	}
	defer files.discard()
	if err := files.begin(ctx); err != nil {
		return nil, err
	}

	w := &work{in: con.in, clock: clock}
	if layout != nil {
		w.out = layout
	}
	var r *report.Report
	err = await(ctx, func() (err error) {
		r, err = s.decompose(ctx, o, w)
		return err
	})
	if err != nil {
		if failed := files.failure(); failed != nil && ctx.Err() == nil {
			return nil, failed
		}
		return nil, err
	}
	r.Input.Name = o.Input
	r.Run.Version, r.Run.Jobs, r.Run.Peak = version(), o.Jobs, peakMemory()
	r.Run.Stages, r.Run.Seconds = clock.stop()
	if account != nil {
		if err := await(ctx, func() error { return report.WriteJSON(account, r) }); err != nil {
			return nil, err
		}
	}
	if page != nil {
		if err := await(ctx, func() error { return report.WritePage(page, r) }); err != nil {
			return nil, err
		}
	}
	if err := files.settle(ctx); err != nil {
		return nil, err
	}
	if !o.Quiet {
		for _, line := range r.Warnings {
			fmt.Fprintf(con.err, "%s: %s %s\n", program, painterFor(con.err).paint(inkNote, "warning:"), oneLine(line))
		}
		ink := inkGood
		if r.UnresolvedPairs() > 0 || r.FrozenFaults() > 0 {
			ink = inkBad
		}
		report.WriteSummary(&firstLine{w: con.err, ink: ink, p: painterFor(con.err)}, r) // the work is done and in place: a closed terminal does not undo it
	}
	return r, nil
}

// layersOf words which layers a deck puts on masks: "metal1 (19/0), contact (18/0, 18/5)".
func layersOf(d *decompose.Deck) string {
	var list []string
	for i := range d.Layers {
		list = append(list, fmt.Sprintf("%s (%s)", report.Text(d.Layers[i].Name), layerNames(d.Layers[i].Drawn...)))
	}
	return strings.Join(list, ", ")
}
