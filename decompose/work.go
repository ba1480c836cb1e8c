package decompose

// This file counts what a run does. Times say little on a shared machine; what is counted is the same every time, so that a test can
// hold its growth against that of the layout, and a reader of a report sees what a stage had to go through.

// The stages of a run, as Options.Stage and Options.Work name them.
const (
	stageFlatten  = "flatten"
	stageSort     = "sort"
	stagePairs    = "pairs"
	stageShapes   = "shapes"
	stageSolve    = "solve"
	stageChoose   = "choose"
	stageReport   = "report"
	stageVariants = "variants"
	stageWrite    = "write"
)

// work tells how much of something a stage did.
func (o *Options) work(stage, things string, n int64) {
	if o.Work != nil && n > 0 {
		o.Work(stage, things, n)
	}
}

// searched is what a search went through.
type searched struct {
	carried  int64 // items that were active at the beginning of a stretch, over all stretches
	buckets  int64 // buckets of active items that were looked at
	compared int64 // pairs of items
	near     int64 // pairs of items found near
	joined   int64 // pairs of items found touching
	links    int64 // of the union-find, followed for them
}

func (s *searched) add(t *searched) {
	s.carried += t.carried
	s.buckets += t.buckets
	s.compared += t.compared
	s.near += t.near
	s.joined += t.joined
	s.links += t.links
}

// built is what building a layout went through.
type built struct {
	items    int64 // flattened, over all windows
	copies   int64 // dropped
	numbered int64 // items gone through to number and measure shapes
	searched
}

func (b *built) tell(o *Options) {
	o.work(stageFlatten, "items", b.items)
	o.work(stageSort, "items", b.items)
	o.work(stageSort, "copies_dropped", b.copies)
	o.work(stagePairs, "carried", b.carried)
	o.work(stagePairs, "buckets", b.buckets)
	o.work(stagePairs, "compared", b.compared)
	o.work(stagePairs, "near", b.near)
	o.work(stagePairs, "touching", b.joined)
	o.work(stagePairs, "links", b.links)
	o.work(stageShapes, "items", b.numbered)
}

// tableEntries is what the solver counted for what it solved.
func (s *solver) tableEntries() int64 {
	n := int64(0)
	for i := range s.groups {
		if s.groups[i].same == i {
			n += s.groups[i].solution.Work
		}
	}
	return n
}
