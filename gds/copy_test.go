package gds

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"runtime"
	"strings"
	"testing"
	"testing/iotest"
)

// copied runs a plan over a stream in memory, through a window of the given size.
func copied(data []byte, lib *Library, want Interest, plan Plan, window int) ([]byte, error) {
	var out bytes.Buffer
	err := newCopier(&out, bytes.NewReader(data), lib, want, plan, nil, window).run()
	return out.Bytes(), err
}

// randomPlan makes a plan that does a bit of everything.
func randomPlan(r *rand.Rand, lib *Library) Plan {
	plan := Plan{Actions: []Action{{}, {Op: Drop}, {Op: Relayer, Layer: LayerType{19, 1}}, {Op: Relayer, Layer: LayerType{65535, 65535}},
		{Op: KeepAndCopy, Layer: LayerType{300, 2}}, {Op: Replace}, {Op: KeepAndReplace}}}
	copies := make([][]Copy, len(lib.Structures))
	mostly := uint8(r.IntN(len(plan.Actions)))
	for i := range copies {
		st := &lib.Structures[i]
		for k := range r.IntN(4) {
			cp := Copy{}
			if k > 0 {
				cp.Name = fmt.Sprintf("%s$%d", st.Name, k+1)
			}
			if n := st.EndFigure - st.FirstFigure; r.IntN(3) > 0 {
				cp.Figures = make([]uint8, n)
				cp.Pieces = map[uint32][]Piece{}
				for f := range cp.Figures {
					cp.Figures[f] = mostly
					if r.IntN(4) == 0 {
						cp.Figures[f] = uint8(r.IntN(len(plan.Actions)))
					}
					if op := plan.Actions[cp.Figures[f]].Op; op == Replace || op == KeepAndReplace {
						cp.Pieces[uint32(f)] = []Piece{}
						for p := range r.IntN(3) {
							cp.Pieces[uint32(f)] = append(cp.Pieces[uint32(f)], Piece{LayerType{19, uint16(p)}, staircase(3 + r.IntN(5))})
						}
					}
				}
			}
			for ref := range int32(st.EndRef - st.FirstRef) {
				if r.IntN(3) > 0 {
					continue
				}
				c := RefChange{Index: ref}
				if r.IntN(2) == 0 {
					c.Name = []string{"odd", "even"}[r.IntN(2)]
				}
				if r.IntN(2) == 0 {
					c.Split = []Part{}
					for range r.IntN(4) {
						p := Part{At: Point{int32(r.Uint32()), 5}, Columns: 1, Rows: 1, ColumnEnd: Point{7, int32(r.Uint32())}, RowEnd: Point{9, 9}}
						if r.IntN(2) == 0 {
							p.Columns, p.Rows = 1+r.Int32N(65535), 2+r.Int32N(9)
						}
						if r.IntN(2) == 0 {
							p.Name = "part"
						}
						c.Split = append(c.Split, p)
					}
				}
				cp.Refs = append(cp.Refs, c)
			}
			if r.IntN(3) == 0 {
				cp.Tail = AppendRectangle(nil, LayerType{230, 0}, Rect{1, 2, 3, 4})
				cp.Tail = AppendBoundary(cp.Tail, LayerType{230, 1}, []Point{{0, 0}, {5, 0}, {0, 5}})
			}
			copies[i] = append(copies[i], cp)
		}
	}
	plan.Copies = func(i int) []Copy { return copies[i] }
	return plan
}

// TestCopyNothing is the promise that a copy in which nothing is to be changed equals its input.
func TestCopyNothing(t *testing.T) {
	layouts := openLayouts(t)
	layouts["quirks"] = quirks(t)
	layouts["empty"] = stream(t, func(*Writer) {})
	for name, data := range layouts {
		want := allLayers(t, data)
		if name == "quirks" {
			want = metal()
		}
		lib := mustIndex(t, data, want)
		for kind, plan := range map[string]Plan{
			"no plan":     {},
			"no copies":   {Copies: func(int) []Copy { return nil }},
			"a zero copy": {Copies: func(int) []Copy { return []Copy{{}} }},
			"all figures kept": {Actions: []Action{{Op: Keep}}, Copies: func(i int) []Copy {
				st := &lib.Structures[i]
				return []Copy{{Figures: make([]uint8, st.EndFigure-st.FirstFigure)}}
			}},
		} {
			var out bytes.Buffer
			var told int64
			err := CopyStream(&out, bytes.NewReader(data), lib, want, plan, func(n int64) { told = n })
			if err != nil || !bytes.Equal(out.Bytes(), data) {
				t.Errorf("%s, %s: the copy differs from its input: %v", name, kind, err)
			}
			if told != int64(len(data)) {
				t.Errorf("%s, %s: %d of %d bytes were told", name, kind, told, len(data))
			}
		}
	}
}

// TestCopyRandomPlans holds random plans against the slow twin, through windows that are smaller and larger than elements
// and structures.
func TestCopyRandomPlans(t *testing.T) {
	layouts := openLayouts(t)
	layouts["quirks"] = quirks(t)
	r := rand.New(rand.NewPCG(11, 12))
	for name, data := range layouts {
		want := allLayers(t, data)
		if name == "quirks" {
			want = metal()
		}
		lib := mustIndex(t, data, want)
		plans := 4
		if testing.Short() {
			plans = 1
		}
		for range plans {
			plan := randomPlan(r, lib)
			expected := slowCopy(t, data, want, plan)
			for _, window := range []int{32, 1000, 1 << 16, bufferSize} {
				if window == 32 && name != "quirks" {
					continue
				}
				got, err := copied(data, lib, want, plan, window)
				if err != nil {
					t.Fatalf("%s, window of %d: %v", name, window, err)
				}
				if !bytes.Equal(got, expected) {
					t.Fatalf("%s, window of %d: the copy is not that of the slow twin", name, window)
				}
			}
		}
	}
}

// TestCopyElements spells a few changes out, byte by byte as the writer writes them.
func TestCopyElements(t *testing.T) {
	box := Rect{0, 0, 10, 20}
	data := stream(t, func(w *Writer) {
		w.BeginStructure("CELL")
		w.Rectangle(LayerType{19, 0}, box)
		w.Flags(3)
		w.Plex(77)
		w.Property(1, "a")
		w.Property(2, "bb")
		w.Path(LayerType{19, 0}, PathStyle{Width: 4}, []Point{{0, 0}, {50, 0}})
		w.Text(LayerType{19, 0}, Point{1, 1}, "not a figure")
		w.Rectangle(LayerType{19, 5}, box)
		w.EndStructure()
		w.BeginStructure("TOP")
		w.Flags(1)
		w.Property(9, "array")
		w.ARef("CELL", Strans{Mirror: true, Angle: 90, Magnification: 2}, 4, 1, Point{0, 0}, Point{400, 0}, Point{0, 100})
		w.SRef("CELL", Strans{}, Point{7, 7})
		w.EndStructure()
	})
	lib := mustIndex(t, data, metal())
	left, right := []Point{{0, 0}, {30, 0}, {30, 4}, {0, 4}}, []Point{{20, 0}, {50, 0}, {50, 4}, {20, 4}}
	plan := Plan{
		Actions: []Action{{Op: Relayer, Layer: LayerType{19, 1}}, {Op: KeepAndCopy, Layer: LayerType{19, 2}}, {Op: Replace}, {Op: Drop}},
		Copies: func(i int) []Copy {
			if i == 0 {
				return []Copy{
					{Figures: []uint8{0, 2, 3}, Pieces: map[uint32][]Piece{1: {{LayerType{19, 1}, left}, {LayerType{19, 2}, right}}}},
					{Name: "CELL$2", Figures: []uint8{1, 1, 0}},
				}
			}
			return []Copy{{Refs: []RefChange{
				{Index: 0, Split: []Part{{At: Point{0, 0}, Columns: 2, Rows: 1, ColumnEnd: Point{400, 0}, RowEnd: Point{0, 100}},
					{Name: "CELL$2", At: Point{100, 0}, Columns: 1, Rows: 1}}},
				{Index: 1, Name: "CELL$2"},
			}, Tail: AppendBoundary(nil, LayerType{230, 0}, left)}}
		},
	}
	want := stream(t, func(w *Writer) {
		flags := func() {
			w.Flags(3)
			w.Plex(77)
			w.Property(1, "a")
			w.Property(2, "bb")
		}
		w.BeginStructure("CELL")
		w.Rectangle(LayerType{19, 1}, box)
		flags()
		w.Boundary(LayerType{19, 1}, left)
		flags()
		w.Boundary(LayerType{19, 2}, right)
		w.Text(LayerType{19, 0}, Point{1, 1}, "not a figure")
		w.EndStructure()
		w.BeginStructure("CELL$2")
		w.Rectangle(LayerType{19, 0}, box)
		w.Rectangle(LayerType{19, 2}, box)
		for _, layer := range []LayerType{{19, 0}, {19, 2}} {
			flags()
			w.Path(layer, PathStyle{Width: 4}, []Point{{0, 0}, {50, 0}})
		}
		w.Text(LayerType{19, 0}, Point{1, 1}, "not a figure")
		w.Rectangle(LayerType{19, 1}, box)
		w.EndStructure()
		w.BeginStructure("TOP")
		strans := Strans{Mirror: true, Angle: 90, Magnification: 2}
		w.Flags(1)
		w.Property(9, "array")
		w.ARef("CELL", strans, 2, 1, Point{0, 0}, Point{400, 0}, Point{0, 100})
		w.Flags(1)
		w.Property(9, "array")
		w.SRef("CELL$2", strans, Point{100, 0})
		w.SRef("CELL$2", Strans{}, Point{7, 7})
		w.Boundary(LayerType{230, 0}, left)
		w.EndStructure()
	})
	got, err := copied(data, lib, metal(), plan, bufferSize)
	if err != nil || !bytes.Equal(got, want) {
		t.Fatalf("the copy is not what was written by hand: %v", err)
	}
	// What was split from an array can be split again into arrays.
	again := mustIndex(t, got, metal())
	if len(again.Refs) != 3 || again.Structures[2].Name != "TOP" || again.Refs[1].Target != 1 {
		t.Fatalf("the copy has the references %+v", again.Refs)
	}
}

// TestCopyLongPieces holds that a piece of many points takes several XY records, and comes back as it was.
func TestCopyLongPieces(t *testing.T) {
	data := top(t, func(w *Writer) { w.Rectangle(LayerType{19, 0}, Rect{0, 0, 1, 1}) })
	lib := mustIndex(t, data, metal())
	for _, n := range []int{3, 8189, 8190, 8191, 8192, 16382, 20001} {
		plan := Plan{Actions: []Action{{Op: Replace}}, Copies: func(int) []Copy {
			return []Copy{{Figures: []uint8{0}, Pieces: map[uint32][]Piece{0: {{LayerType{19, 5}, staircase(n)}}}}}
		}}
		out, err := copied(data, lib, metal(), plan, bufferSize)
		if err != nil {
			t.Fatal(err)
		}
		again := mustIndex(t, out, metal())
		f := figuresOf(again)
		if len(f) != 1 || len(f[0].Points) != n || f[0].Points[n-1] != staircase(n)[n-1] || f[0].Class != 2 {
			t.Errorf("a piece of %d points came back as %d points", n, len(again.Points))
		}
	}
}

// TestCopyChanged changes every byte of a stream behind the index, cuts the stream, lengthens it, and swaps structures: a
// copy says of each that the stream has changed, with or without a plan.
func TestCopyChanged(t *testing.T) {
	data := stream(t, func(w *Writer) {
		for _, name := range []string{"A", "B"} {
			w.BeginStructure(name)
			w.Rectangle(LayerType{19, 0}, Rect{0, 0, 10, 10})
			w.Path(LayerType{19, 0}, PathStyle{Width: 4}, []Point{{0, 0}, {50, 0}})
			w.SRef("C", Strans{}, Point{1, 1})
			w.EndStructure()
		}
	})
	data = append(data, make([]byte, 20)...)
	lib := mustIndex(t, data, metal())
	relayer := Plan{Actions: []Action{{Op: Relayer, Layer: LayerType{19, 1}}}, Copies: func(i int) []Copy {
		return []Copy{{Figures: []uint8{0, 0}}, {Name: "X", Figures: []uint8{0, 0}, Refs: []RefChange{{Index: 0, Name: "Y"}}}}
	}}
	for kind, plan := range map[string]Plan{"raw": {}, "relayered": relayer} {
		if _, err := copied(data, lib, metal(), plan, bufferSize); err != nil {
			t.Fatal(err)
		}
		for i := range data {
			for _, flip := range []byte{1, 0xFF} {
				changed := bytes.Clone(data)
				changed[i] ^= flip
				if _, err := copied(changed, lib, metal(), plan, bufferSize); !errors.Is(err, ErrChanged) {
					t.Fatalf("%s: byte %d is changed by %x, and the error is %v", kind, i, flip, err)
				}
			}
			if _, err := copied(data[:i], lib, metal(), plan, 64); !errors.Is(err, ErrChanged) {
				t.Fatalf("%s: cut at %d, the error is %v", kind, i, err)
			}
		}
		if _, err := copied(append(bytes.Clone(data), 0), lib, metal(), plan, bufferSize); !errors.Is(err, ErrChanged) {
			t.Fatalf("%s: a byte more, and the error is %v", kind, err)
		}
	}
	_, err := copied(data[:200], lib, metal(), Plan{}, bufferSize)
	if err == nil || err.Error() != "structure A: changed while it was read" && !strings.HasPrefix(err.Error(), "head of the library") {
		t.Errorf("the error reads %q", err)
	}
}

// TestCopyBadPlan holds that a plan that does not fit its library is an error, never a panic.
func TestCopyBadPlan(t *testing.T) {
	data := top(t, func(w *Writer) {
		w.Rectangle(LayerType{19, 0}, Rect{0, 0, 10, 10})
		w.SRef("C", Strans{}, Point{1, 1})
	})
	lib := mustIndex(t, data, metal())
	long := strings.Repeat("x", 70000)
	for says, c := range map[string]Copy{
		"plan for structure TOP: actions for 2 figures; the structure has 1":           {Figures: []uint8{0, 0}},
		"plan for structure TOP: actions for 0 figures; the structure has 1":           {Figures: []uint8{}},
		"plan for structure TOP: figure 0: there is no action 9":                       {Figures: []uint8{9}},
		"plan for structure TOP: figure 0 has no pieces":                               {Figures: []uint8{1}},
		"plan for structure TOP: figure 0 has a piece without points":                  {Figures: []uint8{1}, Pieces: map[uint32][]Piece{0: {{}}}},
		"plan for structure TOP: figure 0: there is no such thing as 99 to be done":    {Figures: []uint8{2}},
		"plan for structure TOP: change of reference 1 is out of order, or there is":   {Refs: []RefChange{{Index: 1}}},
		"plan for structure TOP: change of reference -1 is out of order, or there is":  {Refs: []RefChange{{Index: -1}}},
		"plan for structure TOP: change of reference 0 is out of order, or there is n": {Refs: []RefChange{{Index: 0}, {Index: 0}}},
		"plan for structure TOP: a part of reference 0 has 0 columns and 1 rows":       {Refs: []RefChange{{Split: []Part{{Rows: 1}}}}},
		"plan for structure TOP: a part of reference 0 has 65536 columns and 1 rows":   {Refs: []RefChange{{Split: []Part{{Rows: 1, Columns: 65536}}}}},
		"plan for structure TOP: a name of 70000 bytes; a record holds at most 65530":  {Name: long},
		"plan for structure TOP: a name of 70000 bytes; a record holds at most":        {Refs: []RefChange{{Name: long}}},
	} {
		plan := Plan{Actions: []Action{{}, {Op: Replace}, {Op: 99}}, Copies: func(int) []Copy { return []Copy{c} }}
		if _, err := copied(data, lib, metal(), plan, bufferSize); err == nil || !strings.HasPrefix(err.Error(), says) {
			t.Errorf("the error is %q, not %q", err, says)
		}
	}
}

// limited is a writer that fails once it has taken n bytes.
type limited struct{ n int }

var errFull = errors.New("the disk is full")

func (l *limited) Write(b []byte) (int, error) {
	if l.n -= len(b); l.n < 0 {
		return 0, errFull
	}
	return len(b), nil
}

func TestCopyFailingEnds(t *testing.T) {
	data := flatStream(t, 40000, 2)
	lib := mustIndex(t, data, nineteen())
	plan := Plan{Actions: []Action{{Op: Relayer}}, Copies: func(int) []Copy { return []Copy{{Figures: make([]uint8, len(lib.Figures))}} }}
	for _, p := range []Plan{{}, plan} {
		for _, n := range []int{0, 100, 1 << 20, 2 << 20, len(data) - 1} {
			if err := CopyStream(&limited{n}, bytes.NewReader(data), lib, nineteen(), p, nil); !errors.Is(err, errFull) {
				t.Errorf("a disk of %d bytes: %v", n, err)
			}
		}
	}
	broken := errors.New("the cable is out")
	src := iotest.ErrReader(broken)
	if err := CopyStream(io.Discard, readerAt{src}, lib, nineteen(), plan, nil); !errors.Is(err, broken) {
		t.Errorf("a source that fails: %v", err)
	}
}

// readerAt makes a failing reader an io.ReaderAt.
type readerAt struct{ r io.Reader }

func (r readerAt) ReadAt(b []byte, _ int64) (int, error) { return r.r.Read(b) }

// TestCopyMemory holds that a copy takes no more memory for a longer stream.
func TestCopyMemory(t *testing.T) {
	allocated := func(n, share int) uint64 {
		data := flatStream(t, n, share)
		lib := mustIndex(t, data, nineteen())
		figures := make([]uint8, len(lib.Figures))
		plan := Plan{Actions: []Action{{Op: Relayer, Layer: LayerType{19, 1}}}, Copies: func(int) []Copy { return []Copy{{Figures: figures}} }}
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		if err := CopyStream(io.Discard, bytes.NewReader(data), lib, nineteen(), plan, nil); err != nil {
			t.Fatal(err)
		}
		runtime.ReadMemStats(&after)
		return after.TotalAlloc - before.TotalAlloc
	}
	for _, share := range []int{1, 100} {
		if a, b := allocated(100000, share), allocated(300000, share); b > a+1<<18 {
			t.Errorf("%d bytes for 6 MB, %d for 19 MB", a, b)
		}
	}
}

// TestCopyFile copies through real files.
func TestCopyFile(t *testing.T) {
	data := quirks(t)
	path := t.TempDir() + "/in.gds"
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lib, err := Index(f, int64(len(data)), metal(), nil)
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := CopyStream(&out, f, lib, metal(), Plan{}, nil); err != nil || !bytes.Equal(out.Bytes(), data) {
		t.Fatalf("the copy differs: %v", err)
	}
}
