//go:build !unix

package cli

import "runtime"

// peakMemory gives the memory that the process took from the system, in bytes: at least the most that it had in use.
func peakMemory() int64 {
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return int64(m.Sys)
}
