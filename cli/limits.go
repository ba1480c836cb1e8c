package cli

import (
	"runtime"
	"strconv"

	"github.com/urfave/cli/v2"
)

// This file reads what several commands have in common: how many threads and how much memory they may use.

// limits is what a command may use.
type limits struct {
	Jobs   int   // worker threads, at least 1
	Memory int64 // bytes; 0: no limit
}

// limitFlags are the options --jobs and --memory.
func limitFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "jobs", Usage: "use `N` threads (default: as many as there are processors); the result is the same for any"},
		&cli.StringFlag{Name: "memory", Usage: "use at most `SIZE` of memory: 4GiB, 500MB, 4096 (bytes); K, M, G and T alone are binary (default: nine tenths of what the machine has)"},
	}
}

// parseLimits reads --jobs and --memory. Where --memory is not given, a layout that cannot fit is refused all the same, instead of
// taking the machine down.
func parseLimits(c *cli.Context) (limits, error) {
	l := limits{Jobs: runtime.GOMAXPROCS(0), Memory: machineMemory() / 10 * 9}
	if s := c.String("jobs"); s != "" {
		n, err := strconv.Atoi(s)
		if err != nil || n < 1 {
			return l, usagef("--jobs %s: give a number of threads, 1 or more", s)
		}
		l.Jobs = n
	}
	if s := c.String("memory"); s != "" {
		n, ok := parseSize(s)
		if !ok {
			return l, usagef("--memory %s: give an amount like 4GiB, 500MB or 4096", s)
		}
		l.Memory = n
	}
	return l, nil
}

// noneEmpty refuses options that were given without a value.
func noneEmpty(c *cli.Context) error {
	for _, f := range c.Command.Flags {
		if s, ok := f.(*cli.StringFlag); ok && c.IsSet(s.Name) && c.String(s.Name) == "" {
			return usagef("--%s is empty; give it a value or leave it out", s.Name)
		}
	}
	return nil
}
