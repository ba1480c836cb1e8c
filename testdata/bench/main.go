// Command bench measures the whole program as a process.
//
// The idea: absolute times say little on a machine that does other things as well. So each layout is drawn to a file, the
// program is run on it with one worker and with several, and in the same minutes that file is summed by sha256sum, and copied
// and brought to the disk by cp and sync: what it costs to look at a file at all. Each run is repeated and the best one counts.
// Run it from the top folder of the project:
//
//	go run ./testdata/bench --figures 1e4,1e5,1e6
//	go run ./testdata/bench --layouts hard --figures 1e6
//	go run ./testdata/bench --layouts sparse --figures 3.3e5     # a file of 2 GB
//	go run ./testdata/bench --layouts none --open --slowpath ../shared/check/slowpath.py
//
// What the program counts is held against what the layout counted while it was drawn: a fast wrong answer is an error.
package main

import (
	"flag"
	"fmt"
	"os"
	"runtime"
	"strconv"
	"strings"

	"maskpair/testdata/layouts"
)

// options are what the command line says.
type options struct {
	figures  []int64
	layouts  []string
	jobs     int
	runs     int
	seed     uint64
	open     bool
	again    bool
	slowpath string
	dir      string
}

func main() {
	o, err := parse(os.Args[1:])
	if err == nil {
		err = measure(o)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "bench:", err)
		os.Exit(1)
	}
}

func parse(args []string) (*options, error) {
	o := &options{}
	f := flag.NewFlagSet("bench", flag.ContinueOnError)
	figures := f.String("figures", "1e4,1e5,1e6", "flat figures of each layout; several, with commas, show how cost grows")
	names := f.String("layouts", "flat,cells", "names of layouts, with commas; plain, hard, all and none are groups, -list tells the names")
	list := f.Bool("list", false, "list the layouts and stop")
	f.IntVar(&o.jobs, "jobs", runtime.NumCPU(), "workers to compare one worker with")
	f.IntVar(&o.runs, "runs", 3, "runs of each kind, of which the fastest counts")
	f.Uint64Var(&o.seed, "seed", 1, "seed of the layouts")
	f.BoolVar(&o.open, "open", false, "measure the open layouts too")
	f.BoolVar(&o.again, "again", false, "run once more with the output as baseline")
	f.StringVar(&o.slowpath, "slowpath", "", "a script that does the same job (IN DECK OUT), to be run by /usr/bin/python3 and compared with")
	f.StringVar(&o.dir, "dir", "", "folder for a temporary folder with the files (default: that of the system)")
	if err := f.Parse(args); err != nil {
		return nil, err
	}
	if f.NArg() > 0 {
		return nil, fmt.Errorf("%q is no option", f.Arg(0))
	}
	if *list {
		for _, e := range layouts.Catalogue() {
			fmt.Printf("%-8s %s\n", e.Name, e.Says)
		}
		return o, nil
	}
	for _, word := range strings.Split(*names, ",") {
		o.layouts = append(o.layouts, named(word)...)
	}
	for _, word := range strings.Split(*figures, ",") {
		n, err := strconv.ParseFloat(word, 64)
		if err != nil || !(n >= 1 && n <= 1e9) {
			return nil, fmt.Errorf("-figures %s: give numbers from 1 to 1e9", word)
		}
		o.figures = append(o.figures, int64(n))
	}
	if o.runs < 1 || o.jobs < 1 {
		return nil, fmt.Errorf("-runs and -jobs: give 1 or more")
	}
	return o, nil
}

// named gives the layouts that a word of -layouts stands for.
func named(word string) []string {
	if word == "none" {
		return nil
	}
	var list []string
	for _, e := range layouts.Catalogue() {
		if word == "all" || word == "hard" && e.Hard || word == "plain" && !e.Hard {
			list = append(list, e.Name)
		}
	}
	if list == nil {
		return []string{word}
	}
	return list
}
