package geom

import (
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

func (x int128) big() *big.Int {
	v := new(big.Int).Lsh(big.NewInt(x.hi), 64)
	return v.Add(v, new(big.Int).SetUint64(x.lo))
}

func (x uint256) big() *big.Int {
	v := new(big.Int)
	for i := 3; i >= 0; i-- {
		v.Lsh(v, 64).Add(v, new(big.Int).SetUint64(x[i]))
	}
	return v
}

func TestWideArithmeticAgainstBig(t *testing.T) {
	rng := rand.New(rand.NewPCG(19, 20))
	word := func() int64 { return int64(rng.Uint64()) >> rng.IntN(64) }
	same := func(what string, got, want *big.Int) {
		t.Helper()
		if got.Cmp(want) != 0 {
			t.Fatalf("%s: %v, want %v", what, got, want)
		}
	}
	for range 20000 {
		a, b, c, d := word(), word(), word(), word()
		x, y := mul(a, b), mul(c, d)
		bx := new(big.Int).Mul(big.NewInt(a), big.NewInt(b))
		same("product", x.big(), bx)
		if x.sign() != bx.Sign() {
			t.Fatalf("sign of %v is %d", bx, x.sign())
		}
		same("absolute value", x.abs().big(), new(big.Int).Abs(bx))
		if f, _ := new(big.Float).SetInt(bx).Float64(); math.Abs(x.float()-f) > math.Abs(f)*0x1p-51 {
			t.Fatalf("float of %v is %v", bx, x.float())
		}
		x.hi, y.hi = x.hi>>1, y.hi>>1 // room for the sum
		same("sum", x.add(y).big(), new(big.Int).Add(x.big(), y.big()))
		same("difference", x.sub(y).big(), new(big.Int).Sub(x.big(), y.big()))
		x, y = x.abs(), y.abs()
		p, q := mulWide(x, y), mulWide(y, x.add(int128{lo: 1}))
		same("wide product", p.big(), new(big.Int).Mul(x.big(), y.big()))
		if p.less(q) != (p.big().Cmp(q.big()) < 0) || q.less(p) {
			t.Fatalf("%v < %v is %v", p.big(), q.big(), p.less(q))
		}
	}
}
