// Package report prints what a decomposition came to: as JSON for programs, and as a short summary for a person.
//
// The idea: one Report value holds everything, and each printer only chooses and words. All that may differ from run to run
// (time, memory, workers) is in Report.Run, and in the JSON under "run" alone.
package report

import "maskpair/decompose"

// Report is what a run of decompose came to.
type Report struct {
	Input    Input
	Run      Run
	Rules    *decompose.Rules  // the deck, in database units of the input
	Result   *decompose.Result // layers in deck order, as in Rules
	Warnings []string          // one line each
}

// Input tells which layout was read.
type Input struct {
	Name   string   // as on the command line; for the summary alone
	SHA256 string   // of the file as given, in hexadecimal
	Bytes  int64    // of the file as given
	DBU    float64  // database unit in metres
	Tops   []string // names of the structures that were decomposed, in file order
}

// Run is what may differ from run to run.
type Run struct {
	Version string
	Jobs    int // worker threads
	Seconds float64
	Stages  []Stage // in order
	Peak    int64   // most memory in use at a time, bytes; 0: not known
	// Estimate is the most memory in bytes that the run was expected to use, each time before it was used: what --memory is held against.
	Estimate int64
}

// Stage is one step of a run.
type Stage struct {
	Name    string
	Seconds float64
	Peak    int64  // most memory in use at a time from the start of the run to the end of the stage, bytes; 0: not known
	Work    []Work // what it did
}

// Work is how much of something a stage did.
type Work struct {
	Things string // "compared"
	Count  int64
}

// FrozenFaults counts the places where a frozen mask does not come out as it was made.
func (r *Report) FrozenFaults() int64 {
	var n int64
	for i := range r.Result.Layers {
		n += int64(len(r.Result.Layers[i].Frozen))
	}
	return n
}

// UnresolvedPairs counts the near pairs of all layers that are left on one mask and not waived.
func (r *Report) UnresolvedPairs() int64 {
	var n int64
	for i := range r.Result.Layers {
		n += r.Result.Layers[i].UnresolvedPairs
	}
	return n
}
