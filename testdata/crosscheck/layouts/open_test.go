package layouts

import (
	"fmt"
	"path/filepath"
	"testing"

	"maskpair/testdata/crosscheck/outside"
)

// This file is about the open layouts.

func TestOpenLayouts(t *testing.T) {
	program := outside.Maskpair(t)
	type run struct {
		name string
		layer
	}
	var questions []question
	var runs [][]run
	for _, c := range []struct {
		layout   string
		layer    int
		dbuPerNM float64
		nm       []float64
	}{
		{"asap7_cells_R", 19, 4, []float64{36, 30, 25, 20}},
		{"asap7_cells_R", 18, 4, []float64{40, 54}},
		{"asap7_cells_R", 17, 4, []float64{60, 40}},
		{"ihp_stdcell", 6, 1, []float64{300, 200}},
		{"ihp_stdcell", 8, 1, []float64{240, 200}},
	} {
		path, err := filepath.Abs(filepath.Join("../../open", c.layout+".gds.gz"))
		if err != nil {
			t.Fatal(err)
		}
		q := question{Path: path, Drawn: [][2]int{{c.layer, 0}}, MaskA: [2]int{c.layer, maskA}, MaskB: [2]int{c.layer, maskB}}
		var of []run
		for i, nm := range c.nm {
			r, output := decompose(t, program, path, q.Drawn, nm, "nm")
			of = append(of, run{fmt.Sprintf("%s_%d_%gnm", c.layout, c.layer, nm), r})
			q.Spacings = append(q.Spacings, int64(nm*c.dbuPerNM))
			if r.Spacing != q.Spacings[i] {
				t.Errorf("%s: the spacing is reported as %d, not %d", of[i].name, r.Spacing, q.Spacings[i])
			}
			if i == 0 {
				q.Output = output
			}
		}
		questions, runs = append(questions, q), append(runs, of)
	}
	outside.Packages(t, "python3-numpy", "python3-scipy")
	for i, found := range judge(t, questions) {
		for k, f := range found {
			r := runs[i][k]
			t.Run(r.name, func(t *testing.T) {
				hold(t, r.layer, f, k == 0)
				components, odd, of := double(f.Shapes, f.Pairs)
				if r.Components != components || r.Odd != odd {
					t.Errorf("%d components reported, %d of them odd; gonum finds %d and %d", r.Components, r.Odd, components, odd)
				}
				best := optimum(t, problems(components, of, f.Pairs))
				if !r.Proved || int64(r.Unresolved) != best || int64(r.LowerBound) != best {
					t.Errorf("%d unresolved pairs, lower bound %d, proved: %v; HiGHS finds %d", r.Unresolved, r.LowerBound, r.Proved, best)
				}
				t.Logf("%d figures, %d shapes, %d near pairs, %d components, %d odd, %d pairs stay", f.Figures, f.Shapes, f.NearPairs, components, odd, best)
			})
		}
	}
}
