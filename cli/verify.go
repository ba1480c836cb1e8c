package cli

import (
	"context"
	"encoding/hex"
	"errors"
	"fmt"
	"io"

	"github.com/urfave/cli/v2"

	"maskpair/cli/report"
	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
)

// This file is the command verify: it opens the streams, has package verify judge them, and puts the report in place.

const verifyHelp = `Judges a layout whose figures are on two masks, whoever made it: is each shape on exactly one mask or stitched by the
rules, are shapes on one mask as far apart as the deck wants, are anchors and ties held. With --drawn it also proves that
the two masks together are exactly what was drawn, and that everything else in the stream is unchanged, record by record.

OUT.gds and IN.gds may be compressed with gzip; - is standard input.

Example:
   maskpair verify chip-masks.gds --deck chip-deck.toml --anchors analog.toml --drawn chip.gds

Exit status:
   0  all holds
   1  something does not hold
   2  the command line, the deck or the anchor file is wrong
   3  a layout cannot be processed
   4  the report could not be written, or the command was interrupted

` + report.Caution

// verifyOptions are the checked options of verify.
type verifyOptions struct {
	masked, drawn string // "-" is standard input; drawn may be ""
	deckPath      string
	deck          *decompose.Deck
	anchorsPath   string
	anchors       []byte
	report        string
	quiet, force  bool
}

func verifyCommand(con *console, status *int) *cli.Command {
	return &cli.Command{
		Name:            "verify",
		Usage:           "judge a layout on two masks: masks, spacings, orders, and what else may have changed",
		UsageText:       "maskpair verify OUT.gds --deck DECK.toml [--drawn IN.gds] [options]",
		Description:     verifyHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "deck", Usage: "layers, masks and spacings are in `DECK.toml`; needed"},
			&cli.StringFlag{Name: "drawn", Usage: "hold the layout against `IN.gds`, from which it was made"},
			&cli.StringFlag{Name: "anchors", Usage: "which shapes are to be on which mask, which alike, and what is accepted, is in `ANCHORS.toml`"},
			&cli.StringFlag{Name: "report", Usage: "write what was found to `R.json`"},
			&cli.BoolFlag{Name: "quiet", DisableDefaultText: true, Usage: "print nothing but errors"},
			&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace a report that exists"},
		},
		Action: func(c *cli.Context) error {
			o, err := parseVerifyOptions(c)
			if err != nil {
				return err
			}
			res, err := verifyTo(c.Context, o, con)
			if err == nil && !res.OK() {
				*status = statusUnresolved
			}
			return err
		},
	}
}

func parseVerifyOptions(c *cli.Context) (*verifyOptions, error) {
	o := &verifyOptions{
		drawn:       c.String("drawn"),
		deckPath:    c.String("deck"),
		anchorsPath: c.String("anchors"),
		report:      c.String("report"),
		quiet:       c.Bool("quiet"),
		force:       c.Bool("force"),
	}
	if err := noneEmpty(c); err != nil {
		return nil, err
	}
	switch n := c.Args().Len(); {
	case n == 0:
		return nil, usagef("no layout given; write %s verify OUT.gds --deck DECK.toml", program)
	case n > 1:
		return nil, usagef("%q is one layout too many; give one, and the drawn one with --drawn", c.Args().Get(1))
	}
	if o.masked = c.Args().First(); o.masked == "" {
		return nil, usagef("the name of the layout is empty; give a file, or - for standard input")
	}
	if o.deckPath == "" {
		return nil, usagef("no rule deck given; add --deck DECK.toml")
	}
	if o.masked == "-" && o.drawn == "-" {
		return nil, usagef("--drawn: the layout that is judged comes from standard input already; give a file")
	}
	text, err := readText("deck", o.deckPath)
	if err != nil {
		return nil, err
	}
	if o.deck, err = decompose.ParseDeck(o.deckPath, text); err != nil {
		return nil, err
	}
	if o.anchorsPath != "" {
		if o.anchors, err = readText("anchors", o.anchorsPath); err != nil {
			return nil, err
		}
		if o.anchors == nil {
			o.anchors = []byte{}
		}
	}
	return o, nil
}

// verifyTo judges, and puts the report in place.
func verifyTo(ctx context.Context, o *verifyOptions, con *console) (*verify.Result, error) {
	clock := newClock(con.err, o.quiet)
	defer clock.stop()
	inputs := []named{{"--deck", o.deckPath}}
	for _, in := range []named{{"the layout", o.masked}, {"--drawn", o.drawn}, {"--anchors", o.anchorsPath}} {
		if in.path != "" && in.path != "-" {
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
	var v *verification
	err = await(ctx, func() (err error) {
		v, err = judge(ctx, o, con.in, clock)
		return err
	})
	if err != nil {
		return nil, asVerifyError(err)
	}
	clock.stop()
	if account != nil {
		if err := await(ctx, func() error { return writeVerifyReport(account, v) }); err != nil {
			return nil, err
		}
	}
	if err := files.settle(ctx); err != nil {
		return nil, err
	}
	if !o.quiet {
		writeVerifySummary(con.err, v)
	}
	return v.result, nil
}

// asVerifyError takes orders that cannot be judged for what they are to the user: faults of the files that were given.
func asVerifyError(err error) error {
	var order *verify.OrderError
	if errors.As(err, &order) {
		return usagef("%s", order.Msg)
	}
	return err
}

// verification is what a run of verify came to.
type verification struct {
	result        *verify.Result
	masked, drawn *judged // drawn is nil where it was not given
}

// judged is a layout that was read.
type judged struct {
	name   string
	sha256 string
	bytes  int64
}

// judge opens the streams and judges them.
func judge(ctx context.Context, o *verifyOptions, stdin io.Reader, clock *Clock) (*verification, error) {
	in := verify.Input{Deck: o.deck, AnchorsName: o.anchorsPath, Anchors: o.anchors, Stage: clock.Stage, Progress: clock.Progress}
	masked, err := gds.Open(o.masked, true, stdin)
	if err != nil {
		return nil, err
	}
	defer masked.Close()
	in.Masked = masked
	opened := []*gds.Input{masked}
	if o.drawn != "" {
		drawn, err := gds.Open(o.drawn, true, stdin)
		if err != nil {
			return nil, err
		}
		defer drawn.Close()
		in.Drawn = drawn
		opened = append(opened, drawn)
	}
	res, err := verify.Verify(ctx, in)
	if err != nil {
		return nil, err
	}
	out := &verification{result: res}
	for i, s := range opened {
		if err := s.Changed(); err != nil {
			return nil, fmt.Errorf("%s: %w", s.Name(), err)
		}
		sum, bytes := s.Sum()
		j := &judged{s.Name(), hex.EncodeToString(sum[:]), bytes}
		if i == 0 {
			out.masked = j
		} else {
			out.drawn = j
		}
	}
	return out, nil
}
