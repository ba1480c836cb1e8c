package decompose

import "sync/atomic"

// This file tells the caller how far a stage is, in what the stage goes through: figures, components.

// progress tells that so much of a stage is done.
func (o *Options) progress(done, of int64, things string) {
	if o.Progress != nil {
		o.Progress(done, of, things)
	}
}

// counted gives a function that adds up what several workers have done of a whole, and tells.
func (o *Options) counted(of int64, things string) func(more int64) {
	var done atomic.Int64
	return func(more int64) { o.progress(done.Add(more), of, things) }
}
