package cli

import (
	"os"
	"strconv"
	"strings"
)

// machineMemory gives how many bytes of memory the process may have: those of the machine, or of the control group that it runs
// in, if that has less; 0 where neither can be read. Sources: the manual page proc(5) on /proc/meminfo, and the kernel's
// documentation of memory.max and of memory.limit_in_bytes. Only a limit of the root group that the process sees counts, as in a
// container.
func machineMemory() int64 {
	least := int64(0)
	take := func(n int64) {
		if n > 0 && (least == 0 || n < least) {
			least = n
		}
	}
	text, _ := os.ReadFile("/proc/meminfo")
	for line := range strings.Lines(string(text)) {
		if rest, ok := strings.CutPrefix(line, "MemTotal:"); ok {
			kib, _ := strconv.ParseInt(strings.TrimSuffix(strings.TrimSpace(rest), " kB"), 10, 50)
			take(kib << 10)
		}
	}
	for _, path := range []string{"/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory/memory.limit_in_bytes"} {
		text, _ := os.ReadFile(path)
		n, _ := strconv.ParseInt(strings.TrimSpace(string(text)), 10, 64) // "max" is no number
		take(n)
	}
	return least
}
