// Command mixed-signal walks through an invented mixed-signal block that is edited three times. It draws the layout of each round into a
// folder, decomposes it with the anchor file and the round before as baseline, and prints what moved:
//
//	go run ./examples/mixed-signal [DIR]
//
// With -update, run in the top folder of the project, it also draws the pictures beside it anew.
package main

import (
	"bytes"
	"context"
	_ "embed"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"maskpair/cli"
	"maskpair/cli/picture"
	"maskpair/gds"
)

//go:embed deck.toml
var deck []byte

//go:embed anchors.toml
var anchors []byte

func main() {
	update := flag.Bool("update", false, "draw the pictures beside the example anew")
	flag.Parse()
	dir := flag.Arg(0)
	if dir == "" {
		dir = "mixed-signal"
	}
	if err := walk(dir, *update); err != nil {
		fmt.Fprintln(os.Stderr, "mixed-signal:", err)
		os.Exit(1)
	}
}

func walk(dir string, update bool) error {
	list, err := run(dir)
	if err != nil {
		return err
	}
	for i := range list {
		fmt.Println(list[i].row(i))
	}
	if !update {
		return nil
	}
	pictures, err := draw(dir)
	for name, text := range pictures {
		if err == nil {
			err = os.WriteFile(filepath.Join("examples", "mixed-signal", name), text, 0o666)
		}
	}
	return err
}

// outcome is what a round came to.
type outcome struct {
	Shapes   int `json:"shapes"`
	Anchored int `json:"anchored_shapes"`
	Known    int `json:"baseline_shapes"`
	MovedN   int `json:"moved_shapes"`
	Pairs    int `json:"unresolved_pairs"`
	Wishes   int `json:"wishes"`
	Kept     int `json:"wishes_kept"`
	Moved    []struct {
		Box [4]float64 `json:"box"`
		Was string     `json:"was"`
		Now string     `json:"now"`
		Why string     `json:"why"`
	} `json:"moved"`
}

// edits say what each round changed.
var edits = [rounds]string{
	"the block as first drawn",
	"two lanes more close the gap between the buses",
	"a guard beside the first mirror; the second mirror 4 nm to the right",
	"lanes renamed, a bus and the clock flattened",
}

// row gives the row of a round in the table of the README.
func (o *outcome) row(round int) string {
	why := "-"
	if len(o.Moved) > 0 {
		why = o.Moved[0].Why
	}
	return fmt.Sprintf("| %d | %s | %d | %d | %d | %d of %d | %s |", round, edits[round], o.Shapes, o.Known, o.MovedN, o.Kept, o.Wishes, why)
}

// run draws and decomposes all rounds in a folder.
func run(dir string) ([]outcome, error) {
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return nil, err
	}
	file := func(name string) string { return filepath.Join(dir, name) }
	for name, text := range map[string][]byte{"deck.toml": deck, "anchors.toml": anchors} {
		if err := os.WriteFile(file(name), text, 0o666); err != nil {
			return nil, err
		}
	}
	var out []outcome
	for round := range rounds {
		drawn, err := layout(round)
		if err != nil {
			return nil, err
		}
		in := file(fmt.Sprintf("round%d.gds", round))
		if err := os.WriteFile(in, drawn, 0o666); err != nil {
			return nil, err
		}
		args := []string{"decompose", in, "--deck", file("deck.toml"), "--anchors", file("anchors.toml"), "--force",
			"--output", file(fmt.Sprintf("masks%d.gds", round)), "--report", file(fmt.Sprintf("report%d.json", round))}
		if round > 0 {
			args = append(args, "--baseline", file(fmt.Sprintf("masks%d.gds", round-1)))
		}
		var said bytes.Buffer
		if status := cli.Run(context.Background(), args, bytes.NewReader(nil), io.Discard, &said); status != 0 {
			return nil, fmt.Errorf("round %d ends with status %d: %s", round, status, said.Bytes())
		}
		text, err := os.ReadFile(file(fmt.Sprintf("report%d.json", round)))
		if err != nil {
			return nil, err
		}
		var r struct {
			Layers []outcome `json:"layers"`
		}
		if err := json.Unmarshal(text, &r); err != nil {
			return nil, err
		}
		out = append(out, r.Layers[0])
	}
	return out, nil
}

// draw gives a picture of the masks of each round that moved something, and of the first one, by file name.
func draw(dir string) (map[string][]byte, error) {
	pictures := map[string][]byte{}
	for round, title := range []string{
		"the block on two masks: A hatched, B dotted",
		"after the first edit: what moved has a ring",
		"after the second edit: what moved has a ring",
	} {
		stream, err := os.ReadFile(filepath.Join(dir, fmt.Sprintf("masks%d.gds", round)))
		if err != nil {
			return nil, err
		}
		scene, err := picture.Read(bytes.NewReader(stream), picture.Layers{
			Figures: map[gds.LayerType]picture.Role{wireA: picture.MaskA, wireB: picture.MaskB, {Layer: 90, Type: 3}: picture.Mark},
		})
		if err != nil {
			return nil, err
		}
		var text bytes.Buffer
		if err := scene.WriteSVG(&text, picture.SVG{Title: title, Unit: 20, Scale: 0.6}); err != nil {
			return nil, err
		}
		pictures[fmt.Sprintf("round%d.svg", round)] = text.Bytes()
	}
	return pictures, nil
}
