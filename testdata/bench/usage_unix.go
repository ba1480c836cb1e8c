//go:build unix

package main

import (
	"os"
	"runtime"
	"syscall"
)

// usageOf gives what the system counted. Peaks are in KiB, on Darwin in bytes (from memory: the manual pages of getrusage).
func usageOf(p *os.ProcessState) usage {
	u, ok := p.SysUsage().(*syscall.Rusage)
	if !ok {
		return usage{}
	}
	peak := int64(u.Maxrss)
	if runtime.GOOS != "darwin" {
		peak <<= 10
	}
	return usage{peak: peak, faults: int64(u.Minflt), majors: int64(u.Majflt)}
}
