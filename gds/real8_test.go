package gds

import (
	"encoding/binary"
	"encoding/hex"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// TestReal8Known holds published reals: 1e-3 and 1e-9 as they stand in UNITS of files everywhere; the others follow from
// the definition in the manual (sign, excess-64 exponent to the base 16, 56-bit mantissa).
func TestReal8Known(t *testing.T) {
	for _, c := range []struct {
		hex   string
		value float64
	}{
		{"3E4189374BC6A7F0", 1e-3},
		{"3944B82FA09B5A54", 1e-9},
		{"0000000000000000", 0},
		{"4110000000000000", 1},
		{"C110000000000000", -1},
		{"4120000000000000", 2},
		{"4080000000000000", 0.5},
		{"425A000000000000", 90},
		{"42B4000000000000", 180},
		{"4310E00000000000", 270},
		{"4120000000000000", 2},
		{"41FFFFFFFFFFFFF8", 16 - math.Ldexp(1, -49)},
	} {
		b, err := hex.DecodeString(c.hex)
		if err != nil {
			t.Fatal(err)
		}
		if got := DecodeReal8(b); got != c.value {
			t.Errorf("%s is read as %v, not %v", c.hex, got, c.value)
		}
		got, ok := EncodeReal8(c.value)
		if !ok || hex.EncodeToString(got[:]) != hex.EncodeToString(b) {
			t.Errorf("%v is written as %X (%v), not %s", c.value, got, ok, c.hex)
		}
	}
}

// bigReal8 reads a real in exact arithmetic.
func bigReal8(v uint64) *big.Float {
	f := new(big.Float).SetPrec(200).SetUint64(v & (1<<56 - 1))
	f.SetMantExp(f, 4*(int(v>>56&0x7F)-64)-56)
	if v>>63 != 0 {
		f.Neg(f)
	}
	return f
}

func TestReal8Random(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 200000 {
		v := r.Uint64()
		if r.IntN(4) == 0 {
			v &^= 0xFF_FFFF << r.IntN(33) // unnormalised and short mantissas as well
		}
		var b [8]byte
		binary.BigEndian.PutUint64(b[:], v)
		want, _ := bigReal8(v).Float64() // rounded to nearest, ties to even
		got := DecodeReal8(b[:])
		if got != want {
			t.Fatalf("%016X is read as %v, not %v", v, got, want)
		}
		// Every value read can be written, and comes back.
		e, ok := EncodeReal8(got)
		if math.Abs(got) >= math.Ldexp(1, 252) { // rounded up past the largest real
			if ok {
				t.Fatalf("%v was written", got)
			}
			continue
		}
		if math.Abs(got) < math.Ldexp(1, -260) { // unnormalised only; becomes zero
			continue
		}
		if back := DecodeReal8(e[:]); !ok || back != got {
			t.Fatalf("%v is written as %X and comes back as %v (%v)", got, e, back, ok)
		}
		if e[1]>>4 == 0 && got != 0 {
			t.Fatalf("%v is written as %X, which is not normalised", got, e)
		}
	}
}

func TestReal8Range(t *testing.T) {
	for _, f := range []float64{math.NaN(), math.Inf(1), math.Inf(-1), math.Ldexp(1, 252), -math.MaxFloat64} {
		if _, ok := EncodeReal8(f); ok {
			t.Errorf("%v was written", f)
		}
	}
	for _, f := range []float64{math.Ldexp(1, -261), math.SmallestNonzeroFloat64, -math.Ldexp(1, -300)} {
		if b, ok := EncodeReal8(f); !ok || b != [8]byte{} {
			t.Errorf("%v is written as %X (%v), not as zero", f, b, ok)
		}
	}
	for _, f := range []float64{math.Ldexp(1, -260), math.Nextafter(math.Ldexp(1, 252), 0)} {
		b, ok := EncodeReal8(f)
		if back := DecodeReal8(b[:]); !ok || back != f {
			t.Errorf("%v comes back as %v (%v)", f, back, ok)
		}
	}
}
