package cli

import (
	"math"
	"strconv"
	"strings"
)

// This file reads amounts of memory as a person writes them.

// sizeUnits are the suffixes of an amount of memory. A letter alone is binary, as for the shell's own limits.
var sizeUnits = []struct {
	suffix string
	bytes  float64
}{
	{"KiB", 1 << 10}, {"MiB", 1 << 20}, {"GiB", 1 << 30}, {"TiB", 1 << 40},
	{"kB", 1e3}, {"KB", 1e3}, {"MB", 1e6}, {"GB", 1e9}, {"TB", 1e12},
	{"K", 1 << 10}, {"M", 1 << 20}, {"G", 1 << 30}, {"T", 1 << 40},
	{"B", 1}, {"", 1},
}

// parseSize reads an amount of memory in bytes: "4GiB", "500MB", "1.5G", "4096".
func parseSize(s string) (int64, bool) {
	for _, u := range sizeUnits {
		digits, found := strings.CutSuffix(s, u.suffix)
		if !found {
			continue
		}
		digits = strings.TrimSpace(digits)
		if strings.Trim(digits, "0123456789.") != "" {
			return 0, false
		}
		v, err := strconv.ParseFloat(digits, 64)
		bytes := v * u.bytes
		return int64(bytes), err == nil && bytes >= 1 && bytes < math.MaxInt64
	}
	return 0, false
}
