package cli

import (
	"bytes"
	"io"
	"os"
	"strings"

	"github.com/urfave/cli/v2"

	"maskpair/anchor"
	"maskpair/decompose"
	"maskpair/gds/arena"
)

// This file turns the options of decompose into checked values. Files that the user writes (deck, anchors) are read here;
// layouts are not.

// Freeze tells which masks are already made.
type Freeze uint8

// A mask that is frozen must come out as in the baseline.
const (
	FreezeA Freeze = 1 << iota
	FreezeB
)

// Options are the checked options of decompose.
type Options struct {
	limits
	Input    string // "-" is standard input
	DeckPath string
	Deck     *decompose.Deck
	Output   string // "" none, "-" standard output
	Anchors  string // path; "" none
	Baseline string // path; "" none
	Report   string // path; "" none
	Page     string // path; "" none
	Freeze   Freeze // 0 none
	Top      string // structure to decompose; "" every top
	Quiet    bool
	Force    bool

	anchors []byte // content of the anchor file
}

// ParseAnchors reads the anchor file with the rules that its layers and unit refer to; nil where none was given.
func (o *Options) ParseAnchors(rules *decompose.Rules) (*anchor.File, error) {
	if o.Anchors == "" {
		return nil, nil
	}
	return anchor.ParseFile(o.Anchors, o.anchors, rules)
}

func decomposeFlags() []cli.Flag {
	return append([]cli.Flag{
		&cli.StringFlag{Name: "deck", Usage: "layers, masks and spacings are in `DECK.toml`; needed"},
		&cli.StringFlag{Name: "output", Usage: "write the layout with its masks to `OUT.gds`; - is standard output; without it, only answer and report"},
		&cli.StringFlag{Name: "anchors", Usage: "which shapes go on which mask, which alike, and what is accepted, is in `ANCHORS.toml`"},
		&cli.StringFlag{Name: "baseline", Usage: "as few shapes as possible leave the mask that they have in `EARLIER.gds`, an earlier result"},
		&cli.StringFlag{Name: "report", Usage: "write the full account to `REPORT.json`"},
		&cli.StringFlag{Name: "html", Usage: "write a page for a person, with drawings of what is to be mended, to `REPORT.html`"},
		&cli.StringFlag{Name: "freeze", Usage: "mask `A|B|both` is already made and must come out as in the baseline"},
		&cli.StringFlag{Name: "top", Usage: "decompose the structure `CELL` alone"},
		&cli.BoolFlag{Name: "quiet", DisableDefaultText: true, Usage: "print nothing but errors"},
		&cli.BoolFlag{Name: "force", DisableDefaultText: true, Usage: "replace outputs that exist"},
	}, limitFlags()...)
}

// parseOptions checks the options of decompose and reads deck and anchor file.
func parseOptions(c *cli.Context) (*Options, error) {
	o := &Options{
		DeckPath: c.String("deck"),
		Output:   c.String("output"),
		Anchors:  c.String("anchors"),
		Baseline: c.String("baseline"),
		Report:   c.String("report"),
		Page:     c.String("html"),
		Top:      c.String("top"),
		Quiet:    c.Bool("quiet"),
		Force:    c.Bool("force"),
	}
	if err := noneEmpty(c); err != nil {
		return nil, err
	}
	switch n := c.Args().Len(); {
	case n == 0:
		return nil, usagef("no layout given; write %s decompose IN.gds --deck DECK.toml --output OUT.gds", program)
	case n > 1:
		return nil, usagef("%q is one layout too many; give one", c.Args().Get(1))
	}
	if o.Input = c.Args().First(); o.Input == "" {
		return nil, usagef("the name of the layout is empty; give a file, or - for standard input")
	}
	if o.DeckPath == "" {
		return nil, usagef("no rule deck given; add --deck DECK.toml")
	}
	if o.Baseline == "-" {
		return nil, usagef("--baseline: only the layout can come from standard input; give a file")
	}
	toOutput := []string{}
	for _, out := range []named{{"--output", o.Output}, {"--report", o.Report}, {"--html", o.Page}} {
		if out.path == "-" {
			toOutput = append(toOutput, out.role)
		}
	}
	if len(toOutput) > 1 {
		return nil, usagef("%s both go to standard output; give one of them a file", strings.Join(toOutput, " and "))
	}
	switch f := c.String("freeze"); f {
	case "":
	case "A":
		o.Freeze = FreezeA
	case "B":
		o.Freeze = FreezeB
	case "both":
		o.Freeze = FreezeA | FreezeB
	default:
		return nil, usagef("--freeze %s: give A, B or both", f)
	}
	if o.Freeze != 0 && o.Baseline == "" {
		return nil, usagef("--freeze needs --baseline: the layout that holds the masks as they were made")
	}
	var err error
	if o.limits, err = parseLimits(c); err != nil {
		return nil, err
	}
	return o, o.readFiles()
}

// readFiles reads deck and anchor file.
func (o *Options) readFiles() error {
	text, err := readText("deck", o.DeckPath)
	if err != nil {
		return err
	}
	if o.Deck, err = decompose.ParseDeck(o.DeckPath, text); err != nil {
		return err
	}
	if o.Anchors != "" {
		o.anchors, err = readText("anchors", o.Anchors)
	}
	return err
}

// longestText bounds what is read as a deck or anchor file: far above any that a person or script writes, far below a layout
// given by mistake.
const longestText = 256 << 20

// readText reads a file that an option names.
func readText(option, path string) ([]byte, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, usagef("--%s %s: %v; give a file that can be read", option, path, reason(err))
	}
	defer f.Close()
	var room int64 // for the whole text, where its length is known: a list of anchors may have megabytes
	if info, err := f.Stat(); err == nil && info.Mode().IsRegular() {
		room = min(info.Size(), longestText) + bytes.MinRead
	}
	text := bytes.NewBuffer(arena.Make[byte](0, int(room)))
	if _, err := text.ReadFrom(io.LimitReader(f, longestText+1)); err != nil {
		return nil, usagef("--%s %s: %v; give a file that can be read", option, path, reason(err))
	}
	if text.Len() > longestText {
		return nil, usagef("--%s %s: larger than %d MiB; is it the right file?", option, path, longestText>>20)
	}
	return text.Bytes(), nil
}

// String words the choice as the option does.
func (f Freeze) String() string {
	switch f {
	case FreezeA:
		return "A"
	case FreezeB:
		return "B"
	case FreezeA | FreezeB:
		return "both"
	}
	return "none"
}
