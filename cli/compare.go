package cli

import (
	"context"
	"encoding/hex"
	"fmt"

	"github.com/urfave/cli/v2"

	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/gds"
)

// This file is the command compare: it opens two results, and tells what moved, is gone, new or reshaped.

const compareHelp = `Compares two layouts with masks, shape by shape and by place, whatever their cells are called: which shapes moved to the
other mask, have another extent, are new, or are gone. Two shapes count as one where they lie over each other.

EARLIER.gds and LATER.gds may be compressed with gzip; one of them may be -, standard input.

Example:
   maskpair compare monday-masks.gds friday-masks.gds --deck chip-deck.toml --report week.json

Exit status:
   0  the same
   1  different
   2  the command line or the deck is wrong, or the two are not results of one layout
   3  a layout cannot be processed
   4  the report could not be written, or the command was interrupted`

// compareOptions are the checked options of compare.
type compareOptions struct {
	limits
	earlier, later string
	deckPath       string
	deck           *decompose.Deck
	report         string
	quiet, force   bool
}

func compareCommand(con *console, status *int) *cli.Command {
	return &cli.Command{
		Name:            "compare",
		Usage:           "tell which shapes moved to the other mask between two results, or are new, gone or reshaped",
		UsageText:       "maskpair compare EARLIER.gds LATER.gds --deck DECK.toml [options]",
		Description:     compareHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "deck", Usage: "layers and masks are in `DECK.toml`; needed"},
			&cli.StringFlag{Name: "report", Usage: "write the full list to `R.json`"},
			&cli.BoolFlag{Name: "quiet", DisableDefaultText: true, Usage: "print nothing but errors"},
			&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace a report that exists"},
		}, limitFlags()...),
		Action: func(c *cli.Context) error {
			o, err := parseCompareOptions(c)
			if err != nil {
				return err
			}
			r, err := compareTo(c.Context, o, con)
			if err == nil && !r.Result.Same() {
				*status = statusUnresolved
			}
			return err
		},
	}
}

func parseCompareOptions(c *cli.Context) (*compareOptions, error) {
	o := &compareOptions{deckPath: c.String("deck"), report: c.String("report"), quiet: c.Bool("quiet"), force: c.Bool("force")}
	if err := noneEmpty(c); err != nil {
		return nil, err
	}
	switch n := c.Args().Len(); {
	case n < 2:
		return nil, usagef("two layouts are needed; write %s compare EARLIER.gds LATER.gds --deck DECK.toml", program)
	case n > 2:
		return nil, usagef("%q is one layout too many; give two", c.Args().Get(2))
	}
	o.earlier, o.later = c.Args().Get(0), c.Args().Get(1)
	switch {
	case o.earlier == "" || o.later == "":
		return nil, usagef("the name of a layout is empty; give a file, or - for standard input")
	case o.earlier == "-" && o.later == "-":
		return nil, usagef("only one of the two layouts can come from standard input")
	case o.deckPath == "":
		return nil, usagef("no rule deck given; add --deck DECK.toml")
	}
	var err error
	if o.limits, err = parseLimits(c); err != nil {
		return nil, err
	}
	text, err := readText("deck", o.deckPath)
	if err != nil {
		return nil, err
	}
	o.deck, err = decompose.ParseDeck(o.deckPath, text)
	return o, err
}

// compareTo compares, and puts the report in place.
func compareTo(ctx context.Context, o *compareOptions, con *console) (*report.Comparison, error) {
	clock := newClock(con.err, o.quiet)
	defer clock.stop()
	inputs := []named{{"--deck", o.deckPath}}
	for _, in := range []named{{"the earlier layout", o.earlier}, {"the later layout", o.later}} {
		if in.path != "-" {
			inputs = append(inputs, in)
		}
	}
	var files outputs
	account, err := files.add("--report", o.report, o.force, inputs, con.out)
	if err != nil {
		return nil, err
	}
	defer files.discard()
	if err := files.begin(ctx); err != nil {
		return nil, err
	}
	var r *report.Comparison
	err = await(ctx, func() (err error) {
		r, err = runCompare(ctx, o, con, clock)
		return err
	})
	if err != nil {
		return nil, err
	}
	r.Run.Version, r.Run.Jobs, r.Run.Peak = version(), o.Jobs, peakMemory()
	r.Run.Stages, r.Run.Seconds = clock.stop()
	if account != nil {
		if err := await(ctx, func() error { return report.WriteComparisonJSON(account, r) }); err != nil {
			return nil, err
		}
	}
	if err := files.settle(ctx); err != nil {
		return nil, err
	}
	if !o.quiet {
		for _, line := range r.Result.Warnings {
			fmt.Fprintf(con.err, "%s: warning: %s\n", program, oneLine(line))
		}
		report.WriteComparisonSummary(con.err, r) // the report is in place: a closed terminal does not undo it
	}
	return r, nil
}

// runCompare reads the two layouts, the earlier one beside the later one, and compares them.
func runCompare(ctx context.Context, o *compareOptions, con *console, clock *Clock) (*report.Comparison, error) {
	want, err := o.deck.Interest()
	if err != nil {
		return nil, err
	}
	clock.Stage("read")
	type read struct {
		lib  *gds.Library
		file report.Input
	}
	open := func(path string) (read, error) {
		in, err := gds.Open(path, false, con.in)
		if err != nil {
			return read{}, err
		}
		defer in.Close()
		lib, err := in.Index(want, nil)
		if err != nil {
			return read{}, err
		}
		sum, bytes := in.Sum()
		return read{lib, report.Input{Name: path, SHA256: hex.EncodeToString(sum[:]), Bytes: bytes, DBU: lib.DBU}}, nil
	}
	first := beside(func() (read, error) { return open(o.earlier) })
	later, err := open(o.later)
	if err != nil {
		return nil, err
	}
	earlier, err := first()
	if err != nil {
		return nil, err
	}
	rules, err := o.deck.Resolve(later.lib.DBU)
	if err != nil {
		return nil, err
	}
	opt := decompose.Options{Jobs: o.Jobs, Memory: o.Memory, Stage: clock.Stage}
	res, err := decompose.Compare(ctx, earlier.lib, later.lib, o.earlier, o.later, rules, opt)
	if err != nil {
		return nil, err
	}
	earlier.file.Tops, later.file.Tops = res.EarlierTops, res.Tops
	return &report.Comparison{Earlier: earlier.file, Later: later.file, Rules: rules, Result: res}, nil
}
