//go:build unix

package cli

import (
	"runtime"
	"syscall"
)

// peakMemory gives the most memory that the process had in use at a time, in bytes. getrusage gives it in KiB, on Darwin in
// bytes (from memory: the manual pages of both).
func peakMemory() int64 {
	var u syscall.Rusage
	if syscall.Getrusage(syscall.RUSAGE_SELF, &u) != nil {
		return 0
	}
	if runtime.GOOS == "darwin" || runtime.GOOS == "ios" {
		return int64(u.Maxrss)
	}
	return int64(u.Maxrss) << 10
}
