// Package scenario runs the examples that are told in rounds: an invented layout is drawn, decomposed, edited or judged by another
// deck, and decomposed again. The rounds of an example are data, so that each of them is run, tabulated, drawn and tested in one way.
package scenario

import (
	"bytes"
	"context"
	"embed"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"maskpair/cli"
	"maskpair/cli/picture"
	"maskpair/gds"
)

// Scenario is an example in rounds.
type Scenario struct {
	Name     string   // of its folder in examples
	Files    embed.FS // decks and anchor files
	Rounds   []Round
	Row      func(round int, l *Layer) string // what a round came to, as a row of the table in the README
	Roles    map[gds.LayerType]picture.Role   // of the layers in the pictures
	Pictures []Picture
}

// Round is one run of the program.
type Round struct {
	Draw     func(*Drawer)
	Deck     string // name in Files
	Anchors  string // name in Files; "": none
	Baseline bool   // the masks of the round before are the baseline
}

// Picture shows the masks of a round.
type Picture struct {
	Name, Title string
	Round       int
}

// Layer is what a round came to: the part of the report of its first layer that examples speak of.
type Layer struct {
	Status       int    // of the program
	Summary      string // what it said
	Figures      int    `json:"figures"`
	Shapes       int    `json:"shapes"`
	Near         int    `json:"near_pairs"`
	Components   int    `json:"components"`
	Anchored     int    `json:"anchored_shapes"`
	Known        int    `json:"baseline_shapes"`
	MovedN       int    `json:"moved_shapes"`
	Pairs        int    `json:"unresolved_pairs"`
	Stitches     int    `json:"stitches"`
	Wishes       int    `json:"wishes"`
	Kept         int    `json:"wishes_kept"`
	ProvedLowest bool   `json:"proved_optimal"`
	Unresolved   []struct {
		Cause string           `json:"cause"`
		Cycle []struct{}       `json:"cycle"`
		Cell  string           `json:"cell"`
		Pairs []UnresolvedPair `json:"pairs"`
	} `json:"unresolved"`
	Moved []struct {
		Box [4]float64 `json:"box"`
		Why string     `json:"why"`
	} `json:"moved"`
}

// UnresolvedPair is a pair that stays on one mask.
type UnresolvedPair struct {
	Rule  string `json:"rule"`
	Widen int    `json:"widen_dbu"`
}

// Main is the command of an example: it runs the rounds in a folder (the first argument, or one named like the example) and prints the
// table. With -update, run in the top folder of the project, it also draws the pictures of the example anew.
func (s *Scenario) Main() {
	update := flag.Bool("update", false, "draw the pictures beside the example anew")
	flag.Parse()
	dir := flag.Arg(0)
	if dir == "" {
		dir = s.Name
	}
	if err := s.walk(os.Stdout, dir, *update); err != nil {
		fmt.Fprintf(os.Stderr, "%s: %v\n", s.Name, err)
		os.Exit(1)
	}
}

func (s *Scenario) walk(out io.Writer, dir string, update bool) error {
	list, err := s.Run(dir)
	if err != nil {
		return err
	}
	for i := range list {
		fmt.Fprintln(out, s.Row(i, &list[i]))
	}
	if !update {
		return nil
	}
	pictures, err := s.draw(dir)
	for name, text := range pictures {
		if err == nil {
			err = os.WriteFile(filepath.Join("examples", s.Name, name), text, 0o666)
		}
	}
	return err
}

// Run draws and decomposes all rounds in a folder: layouts roundN.gds, results masksN.gds, reports reportN.json and reportN.html.
func (s *Scenario) Run(dir string) ([]Layer, error) {
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return nil, err
	}
	file := func(name string) string { return filepath.Join(dir, name) }
	entries, err := s.Files.ReadDir(".")
	if err != nil {
		return nil, err
	}
	for _, e := range entries {
		text, err := s.Files.ReadFile(e.Name())
		if err == nil {
			err = os.WriteFile(file(e.Name()), text, 0o666)
		}
		if err != nil {
			return nil, err
		}
	}
	var list []Layer
	for i := range s.Rounds {
		r := &s.Rounds[i]
		numbered := func(name, extension string) string { return file(fmt.Sprintf("%s%d.%s", name, i, extension)) }
		drawn, err := draw(s.Name, r.Draw)
		if err == nil {
			err = os.WriteFile(numbered("round", "gds"), drawn, 0o666)
		}
		if err != nil {
			return nil, err
		}
		args := []string{"decompose", numbered("round", "gds"), "--deck", file(r.Deck), "--force", "--output", numbered("masks", "gds"),
			"--report", numbered("report", "json"), "--html", numbered("report", "html")}
		if r.Anchors != "" {
			args = append(args, "--anchors", file(r.Anchors))
		}
		if r.Baseline {
			args = append(args, "--baseline", file(fmt.Sprintf("masks%d.gds", i-1)))
		}
		status, said := Program(args...)
		if status > 1 {
			return nil, fmt.Errorf("round %d ends with status %d: %s", i, status, said)
		}
		l, err := readLayer(numbered("report", "json"))
		if err != nil {
			return nil, err
		}
		l.Status, l.Summary = status, said
		list = append(list, *l)
	}
	return list, nil
}

// Program runs the program, and gives its exit status and what it said on standard error.
func Program(args ...string) (status int, said string) {
	var errw bytes.Buffer
	status = cli.Run(context.Background(), args, bytes.NewReader(nil), io.Discard, &errw)
	return status, errw.String()
}

func readLayer(report string) (*Layer, error) {
	text, err := os.ReadFile(report)
	if err != nil {
		return nil, err
	}
	var r struct {
		Layers []Layer `json:"layers"`
	}
	if err := json.Unmarshal(text, &r); err != nil {
		return nil, err
	}
	return &r.Layers[0], nil
}

// draw gives the pictures of the rounds in a folder, by file name.
func (s *Scenario) draw(dir string) (map[string][]byte, error) {
	pictures := map[string][]byte{}
	for _, p := range s.Pictures {
		stream, err := os.ReadFile(filepath.Join(dir, fmt.Sprintf("masks%d.gds", p.Round)))
		if err != nil {
			return nil, err
		}
		scene, err := picture.Read(bytes.NewReader(stream), picture.Layers{Figures: s.Roles})
		if err != nil {
			return nil, err
		}
		var text bytes.Buffer
		if err := scene.WriteSVG(&text, picture.SVG{Title: p.Title, Unit: 20, Scale: 0.6}); err != nil {
			return nil, err
		}
		pictures[p.Name] = text.Bytes()
	}
	return pictures, nil
}

// Stale compares what is kept in the folder of an example with what the program says and draws now. It gives an error that names all
// that differs: rows that a README lacks (the one beside the example, and those named besides), and pictures that are drawn otherwise.
func (s *Scenario) Stale(folder, dir string, list []Layer, alsoIn ...string) error {
	var faults []error
	readmes := append([]string{filepath.Join(folder, "README.md")}, alsoIn...)
	for _, path := range readmes {
		text, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		for i := range list {
			if row := s.Row(i, &list[i]); !strings.Contains(string(text), row+"\n") {
				faults = append(faults, fmt.Errorf("%s lacks the row\n%s", path, row))
			}
		}
		for _, p := range s.Pictures {
			if path == readmes[0] && !strings.Contains(string(text), "("+p.Name+")") {
				faults = append(faults, fmt.Errorf("%s does not show %s", path, p.Name))
			}
		}
	}
	pictures, err := s.draw(dir)
	if err != nil {
		return err
	}
	kept, err := filepath.Glob(filepath.Join(folder, "*.svg"))
	if err != nil {
		return err
	}
	for _, path := range kept {
		if pictures[filepath.Base(path)] == nil {
			faults = append(faults, fmt.Errorf("%s is drawn by nothing", path))
		}
	}
	for _, p := range s.Pictures {
		path := filepath.Join(folder, p.Name)
		if text, err := os.ReadFile(path); err != nil || !slices.Equal(text, pictures[p.Name]) {
			faults = append(faults, fmt.Errorf("%s is not what the program draws; run  go run ./examples/%s -update  and look at the change", path, s.Name))
		}
	}
	return errors.Join(faults...)
}
