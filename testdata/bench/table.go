package main

import (
	"fmt"
	"io"
	"strings"
)

// This file prints what was measured: the stages of each subject, then a line for each, then how cost grows.

// printStages prints the stages of a subject.
func printStages(w io.Writer, f *finding, jobs int) {
	n := float64(f.counts.Figures)
	fmt.Fprintf(w, "\n%s: %s figures, %s near pairs, %s in, %s out\n", f.name, count(f.counts.Figures), count(f.many.counts.nearPairs), size(f.counts.Bytes), size(f.output))
	table := [][]string{{"stage", "1 worker", "ns/figure", fmt.Sprintf("%d workers", jobs), "ns/figure", "speed-up"}}
	line := func(name string, one, many float64) {
		table = append(table, []string{name, seconds(one), fmt.Sprintf("%.1f", one/n*1e9), seconds(many), fmt.Sprintf("%.1f", many/n*1e9), ratio(one, many)})
	}
	var sum, sumMany float64
	for _, s := range f.one.stages {
		many := 0.0
		for _, m := range f.many.stages {
			if m.Name == s.Name {
				many = m.Seconds
			}
		}
		line(s.Name, s.Seconds, many)
		sum += s.Seconds
		sumMany += many
	}
	line("the rest", f.one.seconds-sum, f.many.seconds-sumMany)
	line("process", f.one.seconds, f.many.seconds)
	print(w, table)
	fmt.Fprintf(w, "  peak %s (1 worker %s; expected %s), %.0f B a figure; %s page faults, %s of them from disk\n",
		size(f.many.peak), size(f.one.peak), size(f.many.estimate), float64(f.many.peak)/n, count(f.many.faults), count(f.many.majors))
	fmt.Fprintf(w, "  sha256sum %s, cp and sync %s\n", seconds(f.sha256sum), seconds(f.copying))
	if f.again.seconds > 0 {
		fmt.Fprintf(w, "  with its output as baseline %s, %s times\n", seconds(f.again.seconds), ratio(f.again.seconds, f.many.seconds))
	}
	if f.slowpath > 0 {
		fmt.Fprintf(w, "  the script %s, %s times\n", seconds(f.slowpath), ratio(f.slowpath, f.many.seconds))
	}
}

// printOverview prints a line for each subject.
func printOverview(w io.Writer, all []finding, jobs int) {
	plain := map[int64]float64{} // processor time of a figure of the flat layout, by the size that was asked for
	for i := range all {
		if f := &all[i]; f.name == "flat" {
			plain[magnitude(f.counts.Figures)] = f.many.cpu / float64(f.counts.Figures)
		}
	}
	table := [][]string{{"layout", "figures", "in", "1 worker", fmt.Sprintf("%d workers", jobs), "speed-up", "CPU ns/figure", "of flat", "peak", "B/figure", "of sha256sum", "of cp, sync"}}
	for i := range all {
		f := &all[i]
		n := float64(f.counts.Figures)
		of := "-"
		if p := plain[magnitude(f.counts.Figures)]; p > 0 {
			of = ratio(f.many.cpu/n, p)
		}
		table = append(table, []string{f.name, count(f.counts.Figures), size(f.counts.Bytes), seconds(f.one.seconds), seconds(f.many.seconds),
			ratio(f.one.seconds, f.many.seconds), fmt.Sprintf("%.0f", f.many.cpu/n*1e9), of, size(f.many.peak),
			fmt.Sprintf("%.0f", float64(f.many.peak)/n), ratio(f.many.seconds, f.sha256sum), ratio(f.many.seconds, f.copying)})
	}
	fmt.Fprintln(w)
	print(w, table)
}

// magnitude tells sizes apart that were asked for, though layouts meet them only about.
func magnitude(n int64) int64 {
	var m int64
	for ; n >= 4; n /= 10 {
		m++
	}
	return m
}

// printGrowth prints how cost grows with the figures, for layouts that were measured in several sizes.
func printGrowth(w io.Writer, all []finding) {
	table := [][]string{{"growth as figures to the power of", "CPU time", "peak", "page faults"}}
	for from := 0; from < len(all); {
		to := from + 1
		for to < len(all) && all[to].name == all[from].name {
			to++
		}
		if to-from > 1 {
			var n, time, peak, faults []float64
			for i := range all[from:to] {
				f := &all[from+i]
				n = append(n, float64(f.counts.Figures))
				time = append(time, f.many.cpu)
				peak = append(peak, float64(f.many.peak))
				faults = append(faults, float64(f.many.faults))
			}
			table = append(table, []string{all[from].name, power(n, time), power(n, peak), power(n, faults)})
		}
		from = to
	}
	if len(table) > 1 {
		fmt.Fprintln(w)
		print(w, table)
	}
}

func power(x, y []float64) string {
	e, ok := exponent(x, y)
	if !ok {
		return "-"
	}
	return fmt.Sprintf("%.2f", e)
}

// print prints a table, the first column to the left, the others to the right.
func print(w io.Writer, table [][]string) {
	widths := make([]int, len(table[0]))
	for _, line := range table {
		for i, c := range line {
			widths[i] = max(widths[i], len(c))
		}
	}
	for _, line := range table {
		var b strings.Builder
		for i, c := range line {
			if i == 0 {
				fmt.Fprintf(&b, "  %-*s", widths[i], c)
			} else {
				fmt.Fprintf(&b, "  %*s", widths[i], c)
			}
		}
		fmt.Fprintln(w, b.String())
	}
}

func seconds(s float64) string {
	if s < 1 && s > -1 {
		return fmt.Sprintf("%.1f ms", s*1e3)
	}
	return fmt.Sprintf("%.2f s", s)
}

func ratio(a, b float64) string {
	if b <= 0 {
		return "-"
	}
	return fmt.Sprintf("%.2f", a/b)
}

func size(n int64) string {
	switch {
	case n >= 1e9:
		return fmt.Sprintf("%.2f GB", float64(n)/1e9)
	case n >= 1e6:
		return fmt.Sprintf("%.1f MB", float64(n)/1e6)
	}
	return fmt.Sprintf("%.0f kB", float64(n)/1e3)
}

// count prints a number with commas.
func count(n int64) string {
	s := fmt.Sprint(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}
