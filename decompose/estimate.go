package decompose

import (
	"fmt"
	"unsafe"

	"maskpair/decompose/geom"
	"maskpair/gds"
)

// This file says beforehand how much memory a run will use. All that is large is counted before it is built: the index is there, and
// the flat figures of each layer follow from the hierarchy. What is not known is how many figures are near; a typical number is taken.
// What odd components need is said later (see odd_memory.go).

// Bytes that a layer takes, as measured on generated and open layouts; go run ./testdata/bench prints what came of them.
const (
	bytesPerItem   = int64(unsafe.Sizeof(item{})) // in each of the two arrays between which items are sorted
	bytesPerFigure = 4                            // node of each flat figure
	bytesPerArea   = 8                            // of each node
	bytesPerMask   = 1
	bytesPerBand   = int64(unsafe.Sizeof(band{}))
	bytesPerProbe  = 24 // what a marker touches
	// What is found: near pairs, areas, pairs by shape. Where cells are placed often, much of what they share lies on itself and is found
	// once.
	foundPerDrawn   = 36                               // by flat figure of a structure that is placed once
	foundPerPlaced  = 14                               // by flat figure of others
	judgedPerFigure = 16                               // more, where pairs are judged by what faces what
	bytesPerForm    = int64(unsafe.Sizeof(form{})) + 5 // by outline
	bytesPerRect    = int64(unsafe.Sizeof(geom.Rect{}))
	bytesPerCell    = 1200     // by structure: its name, its tables, its ways
	bytesAlways     = 14 << 20 // program, buffers and stacks
)

// indexBytes is what the index of a stream takes.
func indexBytes(lib *gds.Library) int64 {
	figures := int64(len(lib.Figures))
	grown := min(figures, 1<<18) // the first room for figures is given back late
	return (figures+grown)*int64(unsafe.Sizeof(gds.Figure{})) + int64(len(lib.Outlines))*int64(unsafe.Sizeof(gds.Outline{})) +
		int64(len(lib.Points))*int64(unsafe.Sizeof(gds.Point{})) + int64(len(lib.Refs))*int64(unsafe.Sizeof(gds.Ref{})) +
		int64(len(lib.Placements))*int64(unsafe.Sizeof(gds.Placement{})) + int64(len(lib.Structures))*bytesPerCell
}

// Estimate is the most memory in bytes that the layers done so far were expected to need, process and index included.
func (r *Run) Estimate() int64 { return r.opt.most }

// checkMemory refuses a layer that will not fit into the memory that the run may use.
func (l *layout) checkMemory(opt *Options, before int64) error {
	return opt.allow(before+l.estimate(), func() string {
		return fmt.Sprintf("layer %s: %d flat figures", l.rules.Name, l.flat.total)
	})
}

// allow refuses to use so many bytes for something if that is more than the run may use.
func (o *Options) allow(need int64, something func() string) error {
	o.most = max(o.most, need)
	if o.Memory == 0 || need <= o.Memory {
		return nil
	}
	return &LimitError{Msg: fmt.Sprintf("%s will need about %s of memory, more than the %s that this run may use", something(), sizeText(need), sizeText(o.Memory)),
		Remedy: "allow more with --memory, or " + byBlocks}
}

// estimate is what a layer will need at most, in bytes, above the index: while its largest top is searched.
func (l *layout) estimate() int64 {
	f := l.flat
	var most, mostBands, mostSeekers, probes int64
	for i, t := range f.h.tops {
		items, bands := int64(min(f.items[t], maxFlat)), int64(min(f.bands[t], maxFlat))
		more, moreBands := l.look.size(i)
		probes += int64(more)
		most, mostBands, mostSeekers = max(most, items), max(mostBands, bands+int64(moreBands)), max(mostSeekers, int64(more))
	}
	// Seekers take the array that the sorted items leave.
	items := (most + max(most, mostSeekers)) * bytesPerItem
	found := l.found(foundPerDrawn, foundPerPlaced)
	if l.judgedRules() != nil {
		found += int64(f.total) * judgedPerFigure
	}
	return l.formBytes() + int64(f.total)*bytesPerFigure + items + mostBands*bytesPerBand + probes*bytesPerProbe + found
}

// kept is what a layer and its result hold once it is done, in bytes.
func (l *layout) kept(res *LayerResult) int64 {
	return l.formBytes() + int64(l.flat.total)*bytesPerFigure + int64(l.nodes)*(bytesPerArea+bytesPerMask) +
		res.UnresolvedPairs*int64(unsafe.Sizeof(Pair{}))
}

// formBytes is what the forms of drawn figures take.
func (l *layout) formBytes() int64 {
	return int64(len(l.flat.forms.rects))*bytesPerRect + int64(len(l.flat.forms.of))*bytesPerForm
}

// found weighs the flat figures by whether their structure is placed once or more often.
func (l *layout) found(perDrawn, perPlaced int64) int64 {
	f := l.flat
	drawn := int64(0)
	for _, s := range f.h.bottom {
		if f.h.placed[s] == 1 {
			drawn += int64(f.own[s])
		}
	}
	return drawn*perDrawn + (int64(f.total)-drawn)*perPlaced
}

// sizeText words a number of bytes.
func sizeText(n int64) string {
	switch {
	case n >= 10<<30:
		return fmt.Sprintf("%.0f GiB", float64(n)/(1<<30))
	case n >= 1<<30:
		return fmt.Sprintf("%.1f GiB", float64(n)/(1<<30))
	}
	return fmt.Sprintf("%.0f MiB", float64(n)/(1<<20))
}
