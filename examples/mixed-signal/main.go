// Command mixed-signal walks through an invented mixed-signal block that is edited three times. It draws the layout of each round into a
// folder, decomposes it with the anchor file and the round before as baseline, and prints what moved:
//
//	go run ./examples/mixed-signal [DIR]
//
// With -update, run in the top folder of the project, it also draws the pictures beside it anew.
package main

import (
	"embed"
	"fmt"

	"maskpair/cli/picture"
	"maskpair/examples/scenario"
	"maskpair/gds"
)

//go:embed *.toml
var files embed.FS

func main() { block().Main() }

// edits say what each round changed.
var edits = [4]string{
	"the block as first drawn",
	"two lanes more close the gap between the buses",
	"a guard beside the first mirror; the second mirror 4 nm to the right",
	"lanes renamed, a bus and the clock flattened",
}

// block is the example.
func block() *scenario.Scenario {
	s := &scenario.Scenario{
		Name:  "mixed-signal",
		Files: files,
		Row:   row,
		Roles: map[gds.LayerType]picture.Role{wireA: picture.MaskA, wireB: picture.MaskB, {Layer: 90, Type: 3}: picture.Mark},
		Pictures: []scenario.Picture{
			{Name: "round0.svg", Title: "the block on two masks: A with slanted lines, B with level ones", Round: 0},
			{Name: "round1.svg", Title: "after the first edit: what moved has a ring", Round: 1},
			{Name: "round2.svg", Title: "after the second edit: what moved has a ring", Round: 2},
		},
	}
	for round := range edits {
		s.Rounds = append(s.Rounds, scenario.Round{
			Draw:     func(d *scenario.Drawer) { layout(d, round) },
			Deck:     "deck.toml",
			Anchors:  "anchors.toml",
			Baseline: round > 0,
		})
	}
	return s
}

// row gives the row of a round in the table of the README.
func row(round int, l *scenario.Layer) string {
	why := "-"
	if len(l.Moved) > 0 {
		why = l.Moved[0].Why
	}
	return fmt.Sprintf("| %d | %s | %d | %d | %d | %d of %d | %s |", round, edits[round], l.Shapes, l.Known, l.MovedN, l.Kept, l.Wishes, why)
}
