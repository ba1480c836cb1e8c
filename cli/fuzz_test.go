package cli_test

import (
	"math/rand/v2"
	"testing"

	"maskpair/testdata/twin"
)

// FuzzDecompose gives any bytes to the whole program. What it takes must be right by the twin, and be the input again once
// masks, variants and split arrays are put back; what it refuses must be refused in one line, and leave nothing.
func FuzzDecompose(f *testing.F) {
	seeds := 0
	for _, stream := range smallStreams() {
		f.Add(stream)
		seeds++
	}
	for seed := range uint64(60) {
		r := rand.New(rand.NewPCG(seed, 6))
		taste := twin.RandomTaste(r)
		taste.Layers, taste.Flat = 1, 12
		l, d := taste.Layout(r)
		l.DBU = 1e-9
		relayer(l, d)
		if stream := l.Bytes(); len(stream) <= longestFuzz {
			f.Add(stream)
			seeds++
		}
	}
	if seeds < 40 {
		f.Fatalf("only %d seeds", seeds)
	}
	bench := faultBench(f)
	f.Fuzz(func(t *testing.T, stream []byte) {
		if len(stream) > longestFuzz {
			t.Skip("longer than the twin has time for")
		}
		bench := folder{t, bench.dir}
		if status, err := judgeStream(bench, stream); err != nil {
			t.Fatalf("status %d, %v", status, err)
		}
	})
}

// longestFuzz is the length in bytes of the longest stream that is tried.
const longestFuzz = 4096

// relayer puts the figures of a random layout on the layers of the deck of the fault tests.
func relayer(l *twin.Layout, d *twin.Deck) {
	for i := range l.Cells {
		for k := range l.Cells[i].Elements {
			e := &l.Cells[i].Elements[k]
			switch e.Layer {
			case d.Layers[0].Masks[0]:
				e.Layer = faultDeck.Layers[0].Masks[0]
			case d.Layers[0].Masks[1]:
				e.Layer = faultDeck.Layers[0].Masks[1]
			default:
				if e.Layer.Layer != 1000 {
					e.Layer = faultDrawn
				}
			}
		}
	}
}
