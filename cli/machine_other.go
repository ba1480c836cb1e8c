//go:build !linux

package cli

// machineMemory gives 0: how much memory the machine has is not known here, so only --memory limits a run.
func machineMemory() int64 { return 0 }
