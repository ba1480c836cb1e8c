package exact

// Budget bounds what Solve may spend. Neither number is a measure of time, so that the answer does not depend on the machine.
type Budget struct {
	Work   int64 // table entries computed by elimination, and steps of the search beyond it
	Memory int64 // bytes of elimination tables and their back-pointers that may be alive at once
}

// DefaultBudget solves blocks of elimination width up to about 22 exactly, and takes seconds and at most half a GiB of tables where a block is beyond it.
func DefaultBudget() Budget {
	return Budget{Work: 1 << 30, Memory: 1 << 29}
}
