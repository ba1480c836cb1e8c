package verify_test

import (
	"bytes"
	"context"
	"math/rand/v2"
	"strings"
	"testing"

	"maskpair/decompose"
	"maskpair/decompose/verify"
	"maskpair/gds"
)

// Whatever the streams hold, verify gives a result or an error of one line, and never says that a stream which is not the right
// one is.

// A right output of which any bit is turned over does not hold, wherever the bit is: with the drawn layout at hand every byte
// counts. Marks are left alone; where they stand is judged, what they show is not.
func TestEveryBitCounts(t *testing.T) {
	m := byHand(t, false)
	marks := bytes.Index(m.out, []byte{0, 6, byte(gds.LAYER), byte(gds.Int2), 0, 230})
	if marks < 0 {
		t.Fatal("the output has no marks")
	}
	end := marks + bytes.Index(m.out[marks:], []byte{0, 4, byte(gds.ENDEL), 0})
	rng := rand.New(rand.NewPCG(61, 62))
	// A number of bits at random; with a tenfold number of layouts or more, all.
	for n, all := range rng.Perm(8 * len(m.out)) {
		i, bit := all/8, all%8
		if n >= layouts(1500) && layouts(1) < 10 {
			break
		}
		if i >= marks && i < end {
			continue
		}
		now := bytes.Clone(m.out)
		now[i] ^= 1 << bit
		res, err := judge(&m, now, true)
		if err == nil && res.OK() {
			t.Errorf("byte %d, bit %d turned over: holds", i, bit)
		}
		if err != nil && strings.Contains(err.Error(), "\n") {
			t.Errorf("byte %d, bit %d turned over: an error of several lines: %v", i, bit, err)
		}
	}
}

// A right output that is cut off anywhere is refused, but for the zeros at its end: these are only missed with the drawn
// layout at hand.
func TestEveryCutIsFound(t *testing.T) {
	m := byHand(t, false)
	step := 5
	if layouts(1) >= 10 {
		step = 1
	}
	for n := 0; n < len(m.out); n += step {
		if res, err := judge(&m, m.out[:n], true); err == nil && res.OK() {
			t.Errorf("cut off at byte %d: holds", n)
		}
		if n >= len(m.out)-4 {
			continue
		}
		if res, err := judge(&m, m.out[:n], false); err == nil && res.OK() {
			t.Errorf("cut off at byte %d, without the drawn layout: holds", n)
		}
	}
}

func FuzzVerify(f *testing.F) {
	var t testing.T
	for _, m := range []masked{byHand(&t, false), byHand(&t, true)} {
		f.Add(m.out, m.drawn, []byte(m.deck), []byte(m.anchors))
		f.Add(m.drawn, m.out, []byte(m.deck), []byte(m.anchors))
		f.Add(m.out, m.out, []byte(m.deck+"[layer.spacing]\ntip_to_tip = 60\ntip_width = 25\nwide = [{ width = 20, spacing = 50 }]\n"), []byte(nil))
	}
	f.Fuzz(func(t *testing.T, out, drawn, text, anchors []byte) {
		if len(out)+len(drawn) > 1<<16 {
			return
		}
		deck, err := decompose.ParseDeck("deck.toml", text)
		if err != nil {
			return
		}
		in := verify.Input{Masked: verify.InMemory("out.gds", out), Drawn: verify.InMemory("in.gds", drawn), Deck: deck, AnchorsName: "anchors.toml", Anchors: anchors}
		if tooMuch(out) || tooMuch(drawn) {
			return
		}
		res, err := verify.Verify(context.Background(), in)
		if err != nil {
			if msg := err.Error(); msg == "" || strings.Contains(msg, "\n") {
				t.Errorf("an error of no or several lines: %q", msg)
			}
			return
		}
		// What holds with the drawn layout was made of it: taken for drawn itself, it must still be a stream that can be judged.
		if res.OK() && len(res.Tops) > 0 && !bytes.Equal(out, drawn) {
			in.Drawn = nil
			if alone, err := verify.Verify(context.Background(), in); err == nil && !alone.OK() {
				for _, c := range alone.Checks {
					// Alone it is not known what arrived stitched.
					if c.Faults > 0 && c.Kind != verify.OnMasks && c.Kind != verify.Stitches && c.Kind != verify.Orders {
						t.Errorf("%s holds with the drawn layout and not alone", c.Kind)
					}
				}
			}
		}
	})
}

// tooMuch says whether a stream places more than a fuzz run has time for. Arrays are the only way to much in few bytes.
func tooMuch(stream []byte) bool {
	for i := 0; i+8 <= len(stream); i++ {
		if stream[i] == 0 && stream[i+1] == 8 && stream[i+2] == byte(gds.COLROW) {
			columns, rows := int(stream[i+4])<<8|int(stream[i+5]), int(stream[i+6])<<8|int(stream[i+7])
			if columns*rows > 5000 {
				return true
			}
		}
	}
	return false
}
