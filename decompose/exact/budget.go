package exact

// Budget bounds what Solve may spend. Neither number is a measure of time, so that the answer does not depend on the machine.
type Budget struct {
	Work   int64 // table entries computed by elimination, and steps of the search beyond it
	Memory int64 // bytes of elimination tables and their back-pointers that may be alive at once; what is linear in the graph comes on top
}

// DefaultBudget solves blocks of some hundred nodes up to an elimination width of about 20 exactly, and takes seconds and at most half a GiB of tables where a block is beyond it. It holds for one
// call of Solve: who solves many wide graphs may want to give each less.
func DefaultBudget() Budget {
	return Budget{Work: 1 << 30, Memory: 1 << 29}
}
