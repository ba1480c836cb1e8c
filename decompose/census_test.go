package decompose

import (
	"context"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// The counts are those of the independent checkers that cases.tsv names.
func TestCensusOfOpenLayouts(t *testing.T) {
	table, err := os.ReadFile(filepath.Join("..", "testdata", "open", "cases.tsv"))
	if err != nil {
		t.Fatal(err)
	}
	cases := 0
	for line := range strings.Lines(string(table)) {
		if strings.HasPrefix(line, "#") || strings.TrimSpace(line) == "" {
			continue
		}
		f := strings.Split(strings.TrimSpace(line), "\t")
		layer, err := strconv.Atoi(strings.TrimSuffix(f[1], "/0"))
		if err != nil {
			t.Fatal(err)
		}
		spacing, err := strconv.ParseFloat(f[2], 64)
		if err != nil {
			t.Fatal(err)
		}
		cases++
		run := runOf(t, openLayout(t, f[0]), oneLayer(layer, spacing), Options{Jobs: 2})
		for range 2 { // a run may count more than once
			c, err := run.Census(context.Background(), 0)
			if err != nil {
				t.Fatal(err)
			}
			for i, got := range []int64{c.Figures, c.Shapes, c.NearPairs, c.Components, c.Odd} {
				if strconv.FormatInt(got, 10) != f[3+i] {
					t.Errorf("%s: column %d is %d", strings.TrimSpace(line), 4+i, got)
				}
			}
			if c.Largest < 1 || c.Largest > c.Shapes-c.Components+1 {
				t.Errorf("%s: largest component %d", strings.TrimSpace(line), c.Largest)
			}
		}
	}
	if cases < 10 {
		t.Errorf("%d cases were read", cases)
	}
}
