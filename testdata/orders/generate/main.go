// Command generate writes a random anchor file for a stream, or an edited stream, for checks by hand:
//
//	go run ./testdata/orders/generate -layer metal1=19/0,19/1,19/2 -spacing 36 -seed 1 -entries 300 IN.gds > anchors.toml
//	go run ./testdata/orders/generate -layer metal1=19/0,19/1,19/2 -spacing 36 -seed 1 -edits 30 IN.gds > edited.gds
package main

import (
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"strings"

	"maskpair/gds"
	"maskpair/testdata/orders"
	"maskpair/testdata/twin"
)

func main() {
	var (
		layer   = flag.String("layer", "", "NAME=drawn,mask_a,mask_b of the deck layer")
		spacing = flag.Int64("spacing", 36, "its spacing, database units")
		seed    = flag.Uint64("seed", 1, "of the random numbers")
		entries = flag.Int("entries", 0, "entries of the anchor file to try")
		edits   = flag.Int("edits", 0, "edits to make")
		follow  = flag.Int("follow", 90, "chance in percent that an order asks for the mask in -masks")
		masks   = flag.String("masks", "", "a stream with masks")
		alike   = flag.Bool("alike", true, "also alike entries")
	)
	flag.Parse()
	if err := run(*layer, *spacing, *seed, *entries, *edits, *follow, *masks, *alike); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func run(layer string, spacing int64, seed uint64, entries, edits, follow int, masks string, alike bool) error {
	stream, err := os.ReadFile(flag.Arg(0))
	if err != nil {
		return err
	}
	name, numbers, _ := strings.Cut(layer, "=")
	l := orders.Layer{Name: name, Spacing: spacing}
	for i, part := range strings.Split(numbers, ",") {
		var k gds.LayerType
		if _, err := fmt.Sscanf(part, "%d/%d", &k.Layer, &k.Type); err != nil || i > 2 {
			return fmt.Errorf("-layer %s: write NAME=1/0,1/1,1/2", layer)
		}
		if i == 0 {
			l.Drawn = append(l.Drawn, k)
		} else {
			l.Masks[i-1] = k
		}
	}
	r := rand.New(rand.NewPCG(seed, 5))
	if edits > 0 {
		layout, err := twin.Read(stream)
		if err != nil {
			return err
		}
		n := orders.Edit(layout, []orders.Layer{l}, edits, r)
		fmt.Fprintf(os.Stderr, "%d edits\n", n)
		_, err = os.Stdout.Write(layout.Bytes())
		return err
	}
	t := orders.Taste{Entries: entries, Follow: follow, Unit: "nm", NoAlike: !alike}
	if masks != "" {
		if t.Masks, err = os.ReadFile(masks); err != nil {
			return err
		}
	}
	text, n, err := orders.Generate(stream, []orders.Layer{l}, t, r)
	if err != nil {
		return err
	}
	fmt.Fprintf(os.Stderr, "%d entries\n", n)
	_, err = os.Stdout.WriteString(text)
	return err
}
