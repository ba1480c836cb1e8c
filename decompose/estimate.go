package decompose

import (
	"fmt"
	"unsafe"

	"maskpair/gds"
)

// This file says beforehand how much memory a run will use. All that is large is counted before it is built: the index is there, and
// the flat figures of each layer follow from the hierarchy. What is not known is how many figures are near; a typical number is taken.

// Bytes by flat item and by flat figure at the moment when a layer needs most: while it is swept.
const (
	bytesPerItem   = 2*int64(unsafe.Sizeof(item{})) + 8 // items, as much scratch, and what is found near
	bytesPerFigure = 4                                  // node of each figure
	bytesPerBand   = int64(unsafe.Sizeof(band{}))
	bytesPerNode   = 45       // area, pairs, components, masks, which follow the sweep
	bytesAlways    = 12 << 20 // program, buffers and stacks
)

// indexBytes is what the index of a stream takes.
func indexBytes(lib *gds.Library) int64 {
	return int64(len(lib.Figures))*int64(unsafe.Sizeof(gds.Figure{})) + int64(len(lib.Outlines))*int64(unsafe.Sizeof(gds.Outline{})) +
		int64(len(lib.Points))*int64(unsafe.Sizeof(gds.Point{})) + int64(len(lib.Refs))*int64(unsafe.Sizeof(gds.Ref{})) +
		int64(len(lib.Placements))*int64(unsafe.Sizeof(gds.Placement{})) + int64(len(lib.Structures))*int64(unsafe.Sizeof(gds.Structure{}))
}

// Estimate is the memory in bytes that the layers done so far were expected to need, process and index included.
func (r *Run) Estimate() int64 { return r.opt.most }

// checkMemory refuses a layer that will not fit into the memory that the run may use.
func (l *layout) checkMemory(opt *Options, before int64) error {
	need := before + l.estimate()
	opt.most = max(opt.most, need)
	if opt.Memory > 0 && need > opt.Memory {
		return &LimitError{Msg: fmt.Sprintf("layer %s: %d flat figures will need about %s of memory, more than the %s that this run may use",
			l.rules.Name, l.flat.total, sizeText(need), sizeText(opt.Memory)), Remedy: "allow more with --memory, or " + byBlocks}
	}
	return nil
}

// estimate is what a layer will need at most, in bytes.
func (l *layout) estimate() int64 {
	f := l.flat
	var items, bands, most, mostBands int64
	for _, t := range f.h.tops {
		items += int64(min(f.items[t], maxFlat))
		bands += int64(min(f.bands[t], maxFlat))
		most, mostBands = max(most, int64(min(f.items[t], maxFlat))), max(mostBands, int64(min(f.bands[t], maxFlat)))
	}
	forms := int64(len(f.forms.rects)) * 32
	sweep := most*bytesPerItem + mostBands*bytesPerBand
	graph := min(items, int64(f.total)) * bytesPerNode
	return forms + int64(f.total)*bytesPerFigure + max(sweep, graph)
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
