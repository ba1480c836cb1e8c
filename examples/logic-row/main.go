// Command logic-row judges three rows of invented logic cells by one spacing, mends what two masks cannot do by stitches, asks for more
// room between the ends of wires, and edits the cell that lacks it:
//
//	go run ./examples/logic-row [DIR]
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
var decks embed.FS

func main() { logicRow().Main() }

// rounds are the decks of the rounds, and what each of them is about.
var rounds = [4]struct{ deck, what string }{
	{"plain.toml", "one spacing for everything"},
	{"stitch.toml", "wires may be cut"},
	{"tips.toml", "ends of wires keep 60 nm"},
	{"tips.toml", "the latch edited: its two ends trimmed by 4 nm each"},
}

// logicRow is the example.
func logicRow() *scenario.Scenario {
	s := &scenario.Scenario{
		Name:  "logic-row",
		Files: decks,
		Row:   row,
		Roles: map[gds.LayerType]picture.Role{metalA: picture.MaskA, metalB: picture.MaskB, {Layer: 90, Type: 0}: picture.Mark},
		Pictures: []scenario.Picture{
			{Name: "round0.svg", Title: "three rows on two masks, A with slanted lines, B with level ones; gaps that stay in a ring", Round: 0},
			{Name: "round2.svg", Title: "with stitches, and ends of wires judged by their own rule; gaps that stay in a ring", Round: 2},
		},
	}
	for i, r := range rounds {
		s.Rounds = append(s.Rounds, scenario.Round{
			Draw:     func(d *scenario.Drawer) { layout(d, i == 3) },
			Deck:     r.deck,
			Baseline: i > 0,
		})
	}
	return s
}

// row gives the row of a round in the table of the README.
func row(round int, l *scenario.Layer) string {
	return fmt.Sprintf("| %d | %s | `%s` | %d | %d | %d | %d | %d |", round, rounds[round].what, rounds[round].deck, l.Near, l.Pairs, l.Stitches, l.MovedN, l.Status)
}
