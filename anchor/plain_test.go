package anchor

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// agree holds the fast reader against the one that reads any TOML: what the first takes, the second reads alike.
func agree(t *testing.T, text string) (plain bool) {
	t.Helper()
	got, ok := readPlain("orders.toml", []byte(text), rules())
	if !ok {
		return false
	}
	want, err := readAny("orders.toml", []byte(text), rules())
	if err != nil {
		t.Fatalf("taken as plain, but %v:\n%s", err, text)
	}
	if d := cmp.Diff(want, got); d != "" {
		t.Fatalf("plain reading differs (-want +got):\n%s\n%s", d, text)
	}
	return true
}

func TestPlainTakesWhatScriptsWrite(t *testing.T) {
	for _, text := range []string{
		"", "\n", "# nothing\n", "# nothing",
		"[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [120, 340.25]\n",
		"[[anchor]] # one\r\n  layer=\"metal2\"\r\n\tmask = \"B\" # B\r\nbox=[ -1.5e1 ,2E+1, 0.0,-0 ]\r\nwish = true\r\nname = \"bias\"\r\ncell = \"amp\"",
		"[[anchor]]\ncell = \"amp\"\nalike = true\nname = \"pair\"\n[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [1, 2]\nalike = false\n",
		"[[tie]]\nlayer = \"metal1\"\nmasks = \"opposite\"\nat = [[1, 2], [3, 4]]\ncell = \"amp\"\nname = \"t\"\n",
		"[[waiver]]\nreason = \"measured, accepted\"\nat = [ [1, 2] , [3, 4] ]\nlayer = \"metal1\"\n",
	} {
		if !agree(t, text) {
			t.Errorf("not taken as plain: %q", text)
		}
	}
}

// TestPlainAgrees changes plain files at random places and looks whether the two readers still say the same.
func TestPlainAgrees(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	pieces := strings.Split("[[anchor]]\n|[[tie]]\n|[[waiver]]\n|layer = \"metal1\"\n|layer = \"metal2\"\n|mask = \"A\"\n|mask = \"B\"\n|masks = \"same\"\n|masks = \"opposite\"\n|"+
		"at = [1, 2]\n|at = [[1, 2.5], [-3, 4]]\n|box = [1, 2, 3.25, 4]\n|cell = \"amp\"\n|name = \"n\"\n|reason = \"r\"\n|wish = true\n|wish = false\n|alike = true\n|alike = false\n|"+
		"# words\n|\n|at = [01, 2]\n|at = [1_0, 2]\n|at = [1., 2]\n|at = [1e2, 2e-1]\n|at = [1, 0.1]\n|name = \"\"\n|name = 'n'\n|name = \"\\n\"\n|box = [1,2,3,4,]\n|at = [\n1, 2]\n|at = [900000000000000, 1]\n|at = [0x1, 2]\n", "|")
	const odd = " \n\r\t[]=\"#,.-0123456789eE_\\a\x00\x7f\x80"
	plain := 0
	for range 40000 {
		var b strings.Builder
		kinds := [][]int{{0, 3 + r.IntN(2), 5 + r.IntN(2), []int{9, 11}[r.IntN(2)]}, {1, 3, 7 + r.IntN(2), 10}, {2, 4, 10, 14}, {0, 12, 17}}
		for range 1 + r.IntN(3) {
			for _, i := range kinds[r.IntN(len(kinds))] {
				b.WriteString(pieces[i])
				if r.IntN(12) == 0 {
					b.WriteString(pieces[r.IntN(len(pieces))])
				}
			}
		}
		text := []byte(b.String())
		if r.IntN(3) == 0 {
			text[r.IntN(len(text))] = odd[r.IntN(len(odd))]
		}
		if agree(t, string(text)) {
			plain++
		}
	}
	if t.Logf("%d plain files", plain); plain < 8000 {
		t.Errorf("only %d files were plain", plain)
	}
}

func TestPlainNumbers(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for range 20000 {
		v := fmt.Sprintf("%.*f", r.IntN(5), (r.Float64()-0.5)*1e6)
		agree(t, "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = ["+v+", 0.25]\n")
	}
}

func FuzzPlain(f *testing.F) {
	f.Add("[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [120, 340.25]\n")
	f.Add("[[tie]]\nlayer = \"metal1\"\nmasks = \"opposite\"\nat = [[1, 2], [3, 4]]\n# end\r\n")
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) < 1<<12 {
			agree(t, text)
		}
	})
}

func BenchmarkParseFile(b *testing.B) {
	var text strings.Builder
	for i := range 1000 {
		fmt.Fprintf(&text, "[[anchor]]\nlayer = \"metal1\"\nmask = \"A\"\nat = [%d, %d.5]\n", i, -i)
	}
	data := []byte(text.String())
	for _, c := range []struct {
		name string
		read func() (*File, error)
	}{
		{"plain", func() (*File, error) { return ParseFile("orders.toml", data, rules()) }},
		{"any", func() (*File, error) { return readAny("orders.toml", data, rules()) }},
	} {
		b.Run(c.name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if _, err := c.read(); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
