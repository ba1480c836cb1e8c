package main

import (
	"math"
	"strings"
	"testing"
)

func TestExponent(t *testing.T) {
	for _, e := range []float64{0, 1, 1.15, 2} {
		var x, y []float64
		for _, n := range []float64{10, 1000, 30000} {
			x, y = append(x, n), append(y, 7*math.Pow(n, e))
		}
		if got, ok := exponent(x, y); !ok || math.Abs(got-e) > 1e-12 {
			t.Errorf("7 n^%g is fitted as n^%g, %v", e, got, ok)
		}
	}
	if _, ok := exponent([]float64{5, 5}, []float64{1, 2}); ok {
		t.Errorf("a fit through one size")
	}
	if _, ok := exponent([]float64{5, 6}, []float64{0, 2}); ok {
		t.Errorf("a fit through nothing")
	}
}

func TestReadHeadStopsEarly(t *testing.T) {
	head := `{"input": {"figures": 9}, "run": {"jobs": 2, "stages": [{"name": "read", "seconds": 0.5, "peak_bytes": 4096, "work": []}], "estimated_bytes": 8192},
		"layers": [{"name": "shapes", "figures": 7, "shapes": 5, "near_pairs": 3, "unresolved": [`
	a, err := readHead(strings.NewReader(head))
	if err != nil {
		t.Fatal(err)
	}
	if len(a.stages) != 1 || a.stages[0] != (stage{"read", 0.5, 4096}) || a.estimate != 8192 || a.counts != (reportCounts{7, 5, 3}) {
		t.Errorf("read %+v", a)
	}
	if _, err := readHead(strings.NewReader(`{"run": {}}`)); err == nil {
		t.Errorf("a report without layers was read")
	}
}

func TestParse(t *testing.T) {
	o, err := parse([]string{"--figures", "1e3,2000", "--layouts", "flat,hard"})
	if err != nil {
		t.Fatal(err)
	}
	if len(o.figures) != 2 || o.figures[1] != 2000 || len(o.layouts) < 6 || o.layouts[0] != "flat" {
		t.Errorf("parsed %+v", o)
	}
	for _, args := range [][]string{{"--figures", "many"}, {"--runs", "0"}, {"flat"}} {
		if _, err := parse(args); err == nil {
			t.Errorf("%v was taken", args)
		}
	}
}

func TestCount(t *testing.T) {
	for n, want := range map[int64]string{0: "0", 999: "999", 1000: "1,000", 1234567: "1,234,567"} {
		if got := count(n); got != want {
			t.Errorf("%d is printed as %s", n, got)
		}
	}
}
