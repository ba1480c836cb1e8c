package decompose

import "runtime"

// Options say how a run is done. They change neither masks nor bytes.
type Options struct {
	Jobs   int               // workers; 0: as many as processors
	Memory int64             // bytes that the run may use; 0: no limit of its own
	Top    string            // take this structure alone; "": all tops
	held   int64             // bytes that layers done before hold
	most   int64             // most bytes that a layer was expected to need, what layers before it hold included
	Stage  func(name string) // told when a stage begins, possibly again; may be nil
	// Work is told how much of something a stage did, possibly again: counts that add up. It may be nil.
	Work func(stage, things string, n int64)
	// Progress is told now and then how much of a stage is done, of how many things; it may be nil, and is called by several workers.
	Progress func(done, of int64, things string)
	// Drawings is for how many groups of a layer the result is to hold pictures, besides its maps; 0: no LayerResult.Drawing.
	Drawings int
}

func (o *Options) jobs() int {
	if o.Jobs > 0 {
		return o.Jobs
	}
	return runtime.GOMAXPROCS(0)
}

// mostPairs is how many near pairs of flat figures a layer may keep.
func (o *Options) mostPairs() int64 {
	const bytesPerPair = 20 // packed, then sorted under nodes
	if o.Memory > 0 {
		return max(o.Memory/bytesPerPair, 1<<16)
	}
	return 1<<32 - 1<<20
}

func (o *Options) stage(name string) {
	if o.Stage != nil {
		o.Stage(name)
	}
}
