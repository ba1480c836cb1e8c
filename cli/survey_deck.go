package cli

import (
	"bufio"
	"fmt"

	"maskpair/cli/report"
	"maskpair/decompose/survey"
	"maskpair/gds"
)

// This file prints a deck to start from: the layer that was surveyed, masks and marks on layers that are free, and a spacing
// that the gaps suggest.

// writeDeckStarter prints the deck.
func writeDeckStarter(w *bufio.Writer, found *surveyed) {
	nm := nanometres(found.survey)
	layer := found.layer.Layer
	free := found.survey.FreeLayers(layer)
	spacing, why := suggest(found.gaps)
	fmt.Fprintf(w, "# A rule deck to start from, for layer %s. Put in the spacing of your process: the one below is a guess\n", layerName(layer))
	fmt.Fprintf(w, "# from what is drawn (%s).\n", why)
	fmt.Fprintf(w, "unit = \"nm\"\n\n[[layer]]\nname = \"layer%d\"\n", layer.Layer)
	fmt.Fprintf(w, "drawn = %q\n", layerName(layer))
	fmt.Fprintf(w, "mask_a = %q # mask_a and mask_b: layers that are free in this layout\n", layerName(free[0]))
	fmt.Fprintf(w, "mask_b = %q\n", layerName(free[1]))
	fmt.Fprintf(w, "same_mask_spacing = %s # nearer than this: opposite masks\n#\n# What each spacing comes to:\n", nm.number(spacing))
	report.WriteTable(commenting{w}, stepTable(found.gaps, nm), "rrrrr")
	w.WriteString("\n# Shapes may be cut where two masks cannot do without; put in the lengths of your process.\n")
	width := found.layer.Smallest
	if len(found.layer.Widths) > 0 {
		width = found.layer.Widths[0].Width
	}
	width = max(1, width)
	fmt.Fprintf(w, "# [layer.stitch]\n# min_overlap = %s\n# min_piece = %s\n# apply = false # true: the output is cut\n", nm.number(width), nm.number(2*width))
	marks := freeMarks(found.survey)
	fmt.Fprintf(w, "\n[marks] # what stays unresolved is drawn in the output, on layers that are free in this layout\nunresolved = %q\ncycle = %q\n# stitch = %q # where a cut might help, with [layer.stitch]\n",
		layerName(gds.LayerType{Layer: marks}), layerName(gds.LayerType{Layer: marks, Type: 1}), layerName(gds.LayerType{Layer: marks, Type: 2}))
}

// suggest chooses a spacing and says why: the largest at which two masks do it, else the largest at which only the nearest shapes are near.
func suggest(g *survey.Gaps) (spacing int64, why string) {
	first := int64(0) // end of the first step at which anything is near
	for _, s := range g.Steps {
		if s.NearPairs == 0 {
			spacing, why = s.To, "no two shapes are nearer"
			continue
		}
		if first == 0 {
			first = s.To
		}
		if s.Odd == 0 {
			spacing, why = s.To, "the largest that was tried at which two masks can do it as drawn"
		}
	}
	if first != 0 && spacing < first {
		return first, "the largest at which only the nearest shapes are near; two masks cannot do all of it as drawn"
	}
	return max(spacing, 1), why
}

// freeMarks gives a layer number of which nothing is used.
func freeMarks(s *survey.Survey) uint16 {
	used := map[uint16]bool{}
	for i := range s.Layers {
		used[s.Layers[i].Layer.Layer] = true
	}
	for n := uint16(200); n != 199; n++ { // once around
		if !used[n] {
			return n
		}
	}
	return 200
}

// commenting begins each write, which is a line, as a comment of a deck.
type commenting struct{ w *bufio.Writer }

func (c commenting) Write(p []byte) (int, error) {
	c.w.WriteString("# ")
	return c.w.Write(p)
}
