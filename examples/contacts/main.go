// Command contacts puts an invented array of contacts on two masks, asks for two halves of a matched pair to come out alike, which
// the array as drawn does not allow, and edits it so that it does:
//
//	go run ./examples/contacts [DIR]
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

func main() { contacts().Main() }

// rounds are the anchor files of the rounds, and what each of them is about.
var rounds = [3]struct{ anchors, what string }{
	{"", "contacts as drawn, no orders"},
	{"pair.toml", "the halves of the pair alike"},
	{"pair.toml", "a dummy column between the halves"},
}

// contacts is the example.
func contacts() *scenario.Scenario {
	s := &scenario.Scenario{
		Name:  "contacts",
		Files: files,
		Row:   row,
		Roles: map[gds.LayerType]picture.Role{contactA: picture.MaskA, contactB: picture.MaskB, {Layer: 90, Type: 0}: picture.Mark},
		Pictures: []scenario.Picture{
			{Name: "round0.svg", Title: "contacts on two masks: A with slanted lines, B with level ones", Round: 0},
			{Name: "round1.svg", Title: "the halves alike: gaps that stay on one mask in a ring", Round: 1},
			{Name: "round2.svg", Title: "the halves alike, with a dummy column between them", Round: 2},
		},
	}
	for i, r := range rounds {
		s.Rounds = append(s.Rounds, scenario.Round{
			Draw:     func(d *scenario.Drawer) { layout(d, i == 2) },
			Deck:     "deck.toml",
			Anchors:  r.anchors,
			Baseline: i > 0,
		})
	}
	return s
}

// row gives the row of a round in the table of the README.
func row(round int, l *scenario.Layer) string {
	return fmt.Sprintf("| %d | %s | %d | %d | %d | %d | %d | %d |", round, rounds[round].what, l.Shapes, l.Near, l.Anchored, l.Pairs, l.MovedN, l.Status)
}
