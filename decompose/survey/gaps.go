package survey

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strconv"

	"maskpair/decompose"
	"maskpair/gds"
)

// This file finds out how near the shapes of a layer come, by searching it with one spacing after the other. A pair of shapes is
// near where it is nearer than the spacing, so the number of pairs never falls as the spacing grows: where it is the same at both
// ends of a stretch of spacings, it is the same (and so is everything else) on all of it. Stretches with most new pairs are
// halved first, until the gaps that occur are known one by one or the work allowed is done.

// Gaps is how near the shapes of a layer come.
type Gaps struct {
	Layer   gds.LayerType
	Figures int64 // with area, flat
	Shapes  int64
	Looked  int64  // largest spacing that was looked at, database units
	Steps   []Step // by spacing, without a stretch left out but those in Open
	Open    []Stretch
	Limited string // why larger spacings were not looked at, "" where nothing forbade it
}

// Step is a stretch of spacings that all come to the same.
type Step struct {
	From, To  int64 // database units, both included; the first step begins at 1
	NearPairs int64
	// Components, those with an odd cycle, and the shapes in the largest; a shape without near pairs is a component too.
	Components, Odd, Largest int64
}

// Stretch is a stretch of spacings within which pairs come up, at places that were not looked for.
type Stretch struct{ After, Before int64 } // spacings of the steps on both sides

// Gap is a kind of gap: so many pairs of shapes are at least From and less than Below apart, in database units.
type Gap struct {
	From, Below int64
	Pairs       int64
}

// Gaps gives the kinds of gaps that occur, smallest first, below the largest spacing that was looked at.
func (g *Gaps) Gaps() []Gap {
	var out []Gap
	for i := 1; i < len(g.Steps); i++ {
		a, b := &g.Steps[i-1], &g.Steps[i]
		if b.NearPairs > a.NearPairs {
			out = append(out, Gap{a.To, b.From, b.NearPairs - a.NearPairs})
		}
	}
	return out
}

// Limits say how much work FindGaps may do.
type Limits struct {
	Jobs     int
	Memory   int64 // as in decompose.Options
	Searches int   // of the layer; 0: as many as usual for its size
}

const (
	usualSearches = 30
	fewSearches   = 14
	// Above so many flat figures a search takes seconds, and fewer are made.
	largeLayer = 4 << 20
	// Spacings up to so many times the smallest gap, or a usual width, are looked at: where two masks are needed, gaps and
	// widths are drawn alike, and more than a few times that is no spacing of two masks.
	timesUsual = 4
	// No search has to be made with a spacing above this, in database units.
	largestSpacing = 1 << 24
	// With more near pairs than this per shape, everything is near everything.
	mostPairsPerShape = 64
)

// FindGaps looks for the gaps of one layer. width is a usual width of what is drawn there, to begin with; free are two layers that
// hold nothing. told, where not nil, is told before each search which it is. The library must have been indexed with Want.
func FindGaps(ctx context.Context, lib *gds.Library, layer gds.LayerType, free [2]gds.LayerType, width int64, limits Limits,
	told func(search int, spacing int64)) (*Gaps, error) {
	f := &gapFinder{ctx: ctx, lib: lib, layer: layer, free: free, limits: limits, told: told,
		gaps: &Gaps{Layer: layer}, known: map[int64]decompose.Census{}}
	if err := f.find(max(1, width)); err != nil {
		return nil, err
	}
	return f.gaps, nil
}

// Want gives what the index of a stream must keep for FindGaps.
func Want(layer gds.LayerType, free [2]gds.LayerType) (gds.Interest, error) {
	deck, err := parse(deckText(layer, free, "1"))
	if err != nil {
		return gds.Interest{}, err
	}
	return deck.Interest()
}

// deckText is the deck of one search.
func deckText(layer gds.LayerType, free [2]gds.LayerType, spacing string) string {
	name := func(l gds.LayerType) string { return fmt.Sprintf("%d/%d", l.Layer, l.Type) }
	return fmt.Sprintf("unit = \"nm\"\n[[layer]]\nname = %q\ndrawn = %q\nmask_a = %q\nmask_b = %q\nsame_mask_spacing = %s\n",
		name(layer), name(layer), name(free[0]), name(free[1]), spacing)
}

func parse(text string) (*decompose.Deck, error) {
	return decompose.ParseDeck("the deck of the search", []byte(text))
}

// FreeLayers gives two layers that hold nothing, as near above the layer as can be, for its masks.
func (s *Survey) FreeLayers(layer gds.LayerType) [2]gds.LayerType {
	var out [2]gds.LayerType
	found := 0
	at := layer
	for found < len(out) {
		if at.Type++; at.Type == 0 { // all datatypes of the layer are taken
			at.Layer++
		}
		if s.Find(at) == nil {
			out[found] = at
			found++
		}
	}
	return out
}

// Find gives what the stream holds on a layer, or nil.
func (s *Survey) Find(layer gds.LayerType) *Layer {
	i, ok := slices.BinarySearchFunc(s.Layers, layer, func(l Layer, t gds.LayerType) int {
		return (int(l.Layer.Layer)-int(t.Layer))<<17 + int(l.Layer.Type) - int(t.Type)
	})
	if !ok {
		return nil
	}
	return &s.Layers[i]
}

// gapFinder is the state of FindGaps.
type gapFinder struct {
	ctx      context.Context
	lib      *gds.Library
	layer    gds.LayerType
	free     [2]gds.LayerType
	limits   Limits
	told     func(int, int64)
	gaps     *Gaps
	known    map[int64]decompose.Census // by spacing
	searches int
	ceiling  int64 // spacings from here on cannot be searched; 0: none
}

// find chooses the spacings.
func (f *gapFinder) find(width int64) error {
	// The first spacing with a near pair: doubling up, then halving down.
	none, some := int64(0), width
	for {
		ok, err := f.search(some)
		if err != nil {
			return err
		}
		if ok && f.known[some].NearPairs > 0 {
			break
		}
		if ok {
			none = some
		}
		if (!ok && f.ceiling-none <= 1) || none >= largestSpacing || f.alone() {
			f.sum()
			return nil
		}
		some = 2 * some
		if f.ceiling > 0 {
			some = min(some, none+(f.ceiling-none)/2)
		}
	}
	for some-none > 1 {
		mid := none + (some-none)/2
		if _, err := f.search(mid); err != nil {
			return err
		}
		if f.known[mid].NearPairs > 0 {
			some = mid
		} else {
			none = mid
		}
	}
	if _, err := f.search(max(2, max(some, width)*timesUsual)); err != nil {
		return err
	}
	if err := f.refine(f.budget()); err != nil {
		return err
	}
	f.sum()
	return nil
}

// alone tells whether there are no two shapes that could be near.
func (f *gapFinder) alone() bool {
	for _, c := range f.known {
		return c.Shapes < 2
	}
	return false
}

// budget is how many searches are left for refining.
func (f *gapFinder) budget() int {
	n := f.limits.Searches
	if n == 0 {
		n = usualSearches
		for _, c := range f.known {
			if c.Figures > largeLayer {
				n = fewSearches
			}
		}
	}
	return n - f.searches
}

// search counts the layer with a spacing, unless that is known. It is false where the pairs do not fit.
func (f *gapFinder) search(spacing int64) (bool, error) {
	if f.ceiling > 0 && spacing >= f.ceiling {
		return false, nil
	}
	if _, ok := f.known[spacing]; ok {
		return true, nil
	}
	if f.told != nil {
		f.told(len(f.known)+1, spacing)
	}
	f.searches++
	c, err := f.census(spacing)
	var limit *decompose.LimitError
	if errors.As(err, &limit) && len(f.known) > 0 {
		f.stop(spacing, "its near pairs do not fit the memory allowed")
		return false, nil
	}
	if err != nil {
		return false, err
	}
	f.known[spacing] = *c
	if c.NearPairs > mostPairsPerShape*c.Shapes {
		f.stop(spacing+1, fmt.Sprintf("a shape has more than %d others so near, on average", mostPairsPerShape))
	}
	return true, nil
}

// stop keeps the search below a spacing.
func (f *gapFinder) stop(spacing int64, why string) {
	f.ceiling, f.gaps.Limited = spacing, why
}

// census is one search.
func (f *gapFinder) census(spacing int64) (*decompose.Census, error) {
	nm := float64(spacing) * f.lib.DBU * 1e9
	deck, err := parse(deckText(f.layer, f.free, strconv.FormatFloat(nm, 'f', -1, 64)))
	if err != nil {
		return nil, err
	}
	rules, err := deck.Resolve(f.lib.DBU)
	if err != nil {
		return nil, err
	}
	run, err := decompose.New(f.lib, rules, decompose.Options{Jobs: f.limits.Jobs, Memory: f.limits.Memory})
	if err != nil {
		return nil, err
	}
	defer run.Close()
	return run.Census(f.ctx, 0)
}

// spacings gives those that are known, ascending.
func (f *gapFinder) spacings() []int64 {
	var out []int64
	for s := range f.known {
		out = append(out, s)
	}
	slices.Sort(out)
	return out
}

// refine halves the stretch within which most pairs come up, as often as allowed.
func (f *gapFinder) refine(times int) error {
	for range times {
		at := f.spacings()
		best, most := -1, int64(0)
		for i := 1; i < len(at); i++ {
			n := f.known[at[i]].NearPairs - f.known[at[i-1]].NearPairs
			if at[i]-at[i-1] > 1 && n > most {
				best, most = i, n
			}
		}
		if best < 0 {
			return nil
		}
		if _, err := f.search(at[best-1] + (at[best]-at[best-1])/2); err != nil {
			return err
		}
	}
	return nil
}

// sum turns what is known into steps.
func (f *gapFinder) sum() {
	g := f.gaps
	for _, s := range f.spacings() {
		c := f.known[s]
		g.Figures, g.Shapes, g.Looked = c.Figures, c.Shapes, s
		if n := len(g.Steps); n > 0 && g.Steps[n-1].NearPairs == c.NearPairs {
			g.Steps[n-1].To = s
			continue
		}
		step := Step{From: s, To: s, NearPairs: c.NearPairs, Components: c.Components, Odd: c.Odd, Largest: c.Largest}
		if c.NearPairs == 0 {
			step.From = 1 // a smaller spacing cannot find more
		}
		if n := len(g.Steps); n > 0 && s-g.Steps[n-1].To > 1 {
			g.Open = append(g.Open, Stretch{g.Steps[n-1].To, s})
		}
		g.Steps = append(g.Steps, step)
	}
}
