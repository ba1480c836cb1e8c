package cli

import (
	"bufio"
	"compress/gzip"
	"context"
	"errors"
	"fmt"
	"io"
	"os"

	"github.com/urfave/cli/v2"

	"maskpair/decompose"
	"maskpair/decompose/survey"
	"maskpair/gds"
)

// This file is the command survey: it opens the layout, counts, looks for gaps where a layer is named, and prints.

const surveyHelp = `Tells what is in a layout: database unit, structures, tops, depth and placements, and for each layer how many figures it
has, drawn and flat, how many of them are Manhattan, and how wide they are. Nothing is flattened, so this takes as long as
reading the file.

With --layer, tells also how near the shapes of that layer come: the gaps that occur, and what each spacing would make of
the layer (near pairs, components, those with an odd cycle, the largest one). Use it to choose same_mask_spacing.

IN.gds may be compressed with gzip; - is standard input.

Example:
   maskpair survey chip.gds
   maskpair survey chip.gds --layer 19/0
   maskpair survey chip.gds --layer 19/0 --deck-starter > deck.toml

Exit status:
   0  done
   2  the command line is wrong, or the layer holds no figure
   3  the layout cannot be processed
   4  it could not write, or was interrupted`

func surveyCommand(con *console) *cli.Command {
	return &cli.Command{
		Name:            "survey",
		Usage:           "tell what is in a layout, and how near the shapes of a layer come",
		UsageText:       "maskpair survey IN.gds [--layer L/D [--deck-starter]] [options]",
		Description:     surveyHelp,
		HideHelpCommand: true,
		OnUsageError:    asUsageError,
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "layer", Usage: "look for the gaps between the shapes of layer/datatype `L/D`"},
			&cli.BoolFlag{Name: "deck-starter", DisableDefaultText: true, Usage: "print a rule deck for that layer to start from, and nothing else"},
			&cli.BoolFlag{Name: "json", DisableDefaultText: true, Usage: "print JSON"},
		}, limitFlags()...),
		Action: func(c *cli.Context) error {
			o, err := parseSurveyOptions(c)
			if err != nil {
				return err
			}
			return runSurvey(c.Context, o, con)
		},
	}
}

// surveyOptions are the checked options of survey.
type surveyOptions struct {
	limits
	input       string
	layer       *gds.LayerType // nil: not given
	deckStarter bool
	json        bool
}

func parseSurveyOptions(c *cli.Context) (*surveyOptions, error) {
	o := &surveyOptions{deckStarter: c.Bool("deck-starter"), json: c.Bool("json")}
	switch n := c.Args().Len(); {
	case n == 0:
		return nil, usagef("no layout given; write %s survey IN.gds", program)
	case n > 1:
		return nil, usagef("%q is one layout too many; give one", c.Args().Get(1))
	}
	if o.input = c.Args().First(); o.input == "" {
		return nil, usagef("the name of the layout is empty; give a file, or - for standard input")
	}
	if c.IsSet("layer") {
		l, ok := decompose.ParseLayerType(c.String("layer"))
		if !ok {
			return nil, usagef("--layer %s: is no layer; write layer/datatype, two numbers from 0 to 65535", c.String("layer"))
		}
		o.layer = &l
		if o.input == "-" {
			return nil, usagef("--layer reads the layout twice, which standard input does not allow; give a file")
		}
	}
	if o.deckStarter && o.layer == nil {
		return nil, usagef("--deck-starter needs --layer L/D: the layer that the deck is for; survey without options lists them")
	}
	if o.deckStarter && o.json {
		return nil, usagef("--deck-starter prints a deck and --json prints JSON; give one of them")
	}
	var err error
	if o.limits, err = parseLimits(c); err != nil {
		return nil, err
	}
	return o, nil
}

// surveyed is what the command found out.
type surveyed struct {
	name   string // of the layout, as on the command line
	survey *survey.Survey
	layer  *survey.Layer // that was named; nil: none
	gaps   *survey.Gaps  // of it
}

func runSurvey(ctx context.Context, o *surveyOptions, con *console) error {
	clock := newClock(con.err, false)
	defer clock.stop()
	var found *surveyed
	err := await(ctx, func() (err error) {
		found, err = lookAt(ctx, o, con.in, clock)
		return err
	})
	if err != nil {
		return err
	}
	clock.stop()
	w := bufio.NewWriter(con.out)
	switch {
	case o.deckStarter:
		writeDeckStarter(w, found)
	case o.json:
		err = writeSurveyJSON(w, found)
	default:
		writeSurvey(w, found)
	}
	if err == nil {
		err = w.Flush()
	}
	if err != nil {
		return &writeError{"standard output", err}
	}
	return nil
}

// lookAt reads the layout.
func lookAt(ctx context.Context, o *surveyOptions, stdin io.Reader, clock *Clock) (*surveyed, error) {
	clock.Stage("read")
	found := &surveyed{name: o.input}
	if o.input == "-" {
		found.name = "standard input"
	}
	in, err := openStream(o.input, stdin)
	if err != nil {
		return nil, err
	}
	defer in.close()
	found.survey, err = survey.Scan(ctx, in, func(int64) { clock.Progress(in.taken, in.size) })
	if err != nil {
		return nil, fmt.Errorf("%s: %w", found.name, err)
	}
	if o.layer == nil {
		return found, nil
	}
	if found.layer = found.survey.Find(*o.layer); found.layer == nil || found.layer.Figures() == 0 {
		return nil, usagef("--layer %d/%d: %s has no figure there; %s survey without --layer lists what is where", o.layer.Layer, o.layer.Type, found.name, program)
	}
	found.gaps, err = lookForGaps(ctx, o, found, clock)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", found.name, err)
	}
	return found, nil
}

// lookForGaps indexes the layer that was named and searches it.
func lookForGaps(ctx context.Context, o *surveyOptions, found *surveyed, clock *Clock) (*survey.Gaps, error) {
	free := found.survey.FreeLayers(*o.layer)
	want, err := survey.Want(*o.layer, free)
	if err != nil {
		return nil, err
	}
	clock.Stage("index")
	in, err := openStream(o.input, nil)
	if err != nil {
		return nil, err
	}
	defer in.close()
	size := int64(-1)
	if !in.packed {
		size = in.size
	}
	lib, err := gds.Index(in, size, want, func(int64) { clock.Progress(in.taken, in.size) })
	if err != nil {
		return nil, err
	}
	clock.Stage("search")
	width := found.layer.Smallest
	if len(found.layer.Widths) > 0 {
		width = found.layer.Widths[0].Width
	}
	gaps, err := survey.FindGaps(ctx, lib, *o.layer, free, width, survey.Limits{Jobs: o.Jobs, Memory: o.Memory}, nil)
	var limit *decompose.LimitError
	if errors.As(err, &limit) {
		return nil, &decompose.LimitError{Msg: limit.Msg, Remedy: "allow more with --memory, or survey without --layer"}
	}
	return gaps, err
}

// stream is an opened layout, unpacked as it is read.
type stream struct {
	io.Reader
	file   *os.File // nil: standard input
	taken  int64    // bytes of the file as given that were read
	size   int64    // of the file as given; 0: not known
	packed bool
}

// openStream opens a layout, or standard input for "-"; gzip is recognised by its content.
func openStream(path string, stdin io.Reader) (*stream, error) {
	s := &stream{}
	src := stdin
	if path != "-" {
		f, err := os.Open(path)
		if err != nil {
			return nil, fmt.Errorf("%s: %w; give a layout that can be read", path, reason(err))
		}
		info, err := f.Stat()
		switch {
		case err != nil:
		case info.IsDir():
			err = errors.New("is a folder, not a file")
		case info.Mode().IsRegular():
			s.size = info.Size()
		}
		if err != nil {
			f.Close()
			return nil, fmt.Errorf("%s: %w", path, reason(err))
		}
		s.file, src = f, f
	}
	if src == nil {
		return nil, errors.New("standard input is closed")
	}
	buffered := bufio.NewReaderSize(&taking{s, src}, 1<<12) // large reads go past it
	s.Reader = buffered
	if head, _ := buffered.Peek(3); len(head) == 3 && head[0] == 0x1F && head[1] == 0x8B && head[2] == 8 { // RFC 1952: magic, deflate
		z, err := gzip.NewReader(buffered)
		if err != nil {
			s.close()
			return nil, fmt.Errorf("%s: the compressed file is damaged: %w", path, err)
		}
		s.Reader, s.packed = z, true
	}
	return s, nil
}

func (s *stream) close() {
	if s.file != nil {
		s.file.Close()
	}
}

// taking counts what is read of the file as given.
type taking struct {
	s *stream
	r io.Reader
}

func (t *taking) Read(p []byte) (int, error) {
	n, err := t.r.Read(p)
	t.s.taken += int64(n)
	return n, err
}
