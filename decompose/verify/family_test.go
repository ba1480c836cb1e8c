package verify

import "testing"

// The rule is that of the interface: NAME$2, NAME$3, ..., and variants of variants.
func TestFamily(t *testing.T) {
	for _, c := range []struct {
		name, cell string
		want       bool
	}{
		{"amp", "amp", true}, {"amp$2", "amp", true}, {"amp$10", "amp", true}, {"amp$2$3", "amp", true}, {"amp$2$3", "amp$2", true},
		{"amp$2", "amp$2", true}, {"a$b$2", "a$b", true},
		{"amp$1", "amp", false}, {"amp$02", "amp", false}, {"amp$", "amp", false}, {"amp$x", "amp", false}, {"amp$2x", "amp", false},
		{"amps", "amp", false}, {"amp", "amp$2", false}, {"$2", "", false}, {"amp$-2", "amp", false}, {"amp$99999999999999999999", "amp", false},
	} {
		if got := inFamily(c.name, c.cell); got != c.want {
			t.Errorf("%q in the family of %q: %v, want %v", c.name, c.cell, got, c.want)
		}
	}
}
