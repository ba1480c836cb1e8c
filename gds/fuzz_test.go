package gds

import (
	"bytes"
	"errors"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
	"testing/iotest"
)

// seeds gives the streams in testdata/fuzz/<name>: what is kept there by the go tool, and every crash.
func seeds(tb testing.TB, name string) [][]byte {
	tb.Helper()
	paths, err := filepath.Glob(filepath.Join("testdata", "fuzz", name, "*"))
	if err != nil {
		tb.Fatal(err)
	}
	var out [][]byte
	for _, path := range paths {
		text, err := os.ReadFile(path)
		if err != nil {
			tb.Fatal(err)
		}
		// The go tool's own form: a line with its version, then []byte("...").
		_, literal, found := strings.Cut(string(text), "[]byte(")
		data, err := strconv.Unquote(strings.TrimSuffix(strings.TrimSpace(literal), ")"))
		if !found || err != nil {
			tb.Fatalf("%s is no seed: %v", path, err)
		}
		out = append(out, []byte(data))
	}
	return out
}

// TestSeeds holds that the seeds are there and are what they are for: at least these many, streams and broken ones.
func TestSeeds(t *testing.T) {
	for _, name := range []string{"FuzzScanner", "FuzzIndex"} {
		good, bad := 0, 0
		for _, data := range seeds(t, name) {
			if _, err := Index(bytes.NewReader(data), -1, metal(), nil); err == nil {
				good++
			} else {
				bad++
			}
		}
		if good < 4 || bad < 4 {
			t.Errorf("%s has %d streams without fault and %d with one", name, good, bad)
		}
	}
}

// fuzzLimit is the longest stream that is tried, in bytes.
const fuzzLimit = 1 << 20

// FuzzScanner holds that records, written one after the other, are the stream again up to the end of the library; that it
// does not matter how the stream comes; and that each fault is a SyntaxError on one line.
func FuzzScanner(f *testing.F) {
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > fuzzLimit {
			return
		}
		records, err := scanAll(bytes.NewReader(data))
		checkFault(t, data, err)
		var out []byte
		for _, r := range records {
			if r.Offset != int64(len(out)) {
				t.Fatalf("%v lies at byte %d, not %d", r.Kind, r.Offset, len(out))
			}
			out = slowRecord(out, r)
		}
		if !bytes.HasPrefix(data, out) {
			t.Fatal("the records are not the stream")
		}
		if err == nil && (len(records) == 0 || records[len(records)-1].Kind != ENDLIB || len(bytes.Trim(data[len(out):], "\x00")) > 0) {
			t.Fatal("something behind the records was passed over")
		}
		again, slowly := scanAll(iotest.OneByteReader(bytes.NewReader(data)))
		if len(again) != len(records) || !sameError(err, slowly) {
			t.Fatalf("byte by byte there are %d records and %v, otherwise %d and %v", len(again), slowly, len(records), err)
		}
	})
}

// FuzzIndex holds that what the index accepts is copied byte for byte, element by element or raw, through any window; that
// its parts add up; and that each fault is a SyntaxError on one line.
func FuzzIndex(f *testing.F) {
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > fuzzLimit {
			return
		}
		checkIndex(t, data)
	})
}

// checkIndex is the verdict of FuzzIndex. It says whether the stream was accepted.
func checkIndex(t *testing.T, data []byte) bool {
	t.Helper()
	lib, err := Index(bytes.NewReader(data), int64(len(data)), metal(), nil)
	checkFault(t, data, err)
	if _, slowly := Index(iotest.OneByteReader(bytes.NewReader(data)), -1, metal(), nil); !sameError(err, slowly) {
		t.Fatalf("byte by byte the error is %v, otherwise %v", slowly, err)
	}
	if err != nil {
		return false
	}
	if slow := slowFigures(t, data, metal()); len(slow) != len(lib.Figures) {
		t.Fatalf("%d figures, not %d", len(lib.Figures), len(slow))
	}
	for _, r := range lib.Refs {
		if int(r.Target) >= len(lib.Structures) || -1-int(r.Target) >= len(lib.Missing) {
			t.Fatalf("a reference goes to %d", r.Target)
		}
		Compose(NewTransform(5, 1, 2), &r, lib.PlacementOf(&r), 0, 0).Apply(3, 4)
	}
	keep := Plan{Actions: []Action{{Op: Keep}}, Copies: func(i int) []Copy {
		st := &lib.Structures[i]
		return []Copy{{Figures: make([]uint8, st.EndFigure-st.FirstFigure)}}
	}}
	for _, plan := range []Plan{{}, keep} {
		for _, window := range []int{16, 4096} {
			out, err := copied(data, lib, metal(), plan, window)
			if err != nil || !bytes.Equal(out, data) {
				t.Fatalf("the copy differs: %v", err)
			}
		}
	}
	relayer := Plan{Actions: []Action{{Op: Relayer, Layer: LayerType{19, 5}}}, Copies: keep.Copies}
	out, err := copied(data, lib, metal(), relayer, 64)
	if err != nil || !bytes.Equal(out, slowCopy(t, data, metal(), relayer)) {
		t.Fatalf("the re-layered copy is not that of the slow twin: %v", err)
	}
	return true
}

// TestIndexMutated is FuzzIndex with changes that know of records: taken out, doubled, swapped, cut, of another kind, or with
// a byte that is another.
func TestIndexMutated(t *testing.T) {
	var streams [][]byte
	for _, data := range seeds(t, "FuzzIndex") {
		if _, err := Index(bytes.NewReader(data), -1, metal(), nil); err == nil {
			streams = append(streams, data)
		}
	}
	r := rand.New(rand.NewPCG(13, 14))
	accepted := 0
	rounds := 4000
	if testing.Short() {
		rounds = 400
	}
	for range rounds {
		records := slowRecords(t, streams[r.IntN(len(streams))])
		for range 1 + r.IntN(3) {
			i := r.IntN(len(records))
			switch rec := records[i]; r.IntN(7) {
			case 0:
				records = slices.Delete(records, i, i+1)
			case 1:
				records = slices.Insert(records, i, rec)
			case 2:
				j := r.IntN(len(records))
				records[i], records[j] = records[j], records[i]
			case 3:
				records[i].Data = rec.Data[:len(rec.Data)/4*2]
			case 4:
				records[i].Kind = Kind(r.IntN(kinds + 2))
				records[i].Type = records[i].Kind.Type()
			case 5:
				if len(rec.Data) > 0 {
					records[i].Data = bytes.Clone(rec.Data)
					records[i].Data[r.IntN(len(rec.Data))] ^= 1 << r.IntN(8)
				}
			case 6:
				records[i].Data = append(bytes.Clone(rec.Data), rec.Data...)
			}
			if len(records) == 0 {
				break
			}
		}
		var data []byte
		for _, rec := range records {
			data = slowRecord(data, rec)
		}
		if checkIndex(t, data) {
			accepted++
		}
	}
	if accepted < rounds/20 || accepted > rounds*19/20 {
		t.Errorf("%d of %d streams were accepted", accepted, rounds)
	}
}

// checkFault holds what every fault has in common.
func checkFault(t *testing.T, data []byte, err error) {
	if err == nil {
		return
	}
	var syntax *SyntaxError
	if !errors.As(err, &syntax) || strings.ContainsAny(err.Error(), "\n\r") {
		t.Fatalf("the error is %q", err)
	}
	if syntax.Offset < 0 || syntax.Offset > int64(len(data)) {
		t.Fatalf("the error is at byte %d of %d", syntax.Offset, len(data))
	}
	causes := []error{ErrNotStream, ErrLength, ErrType, ErrKind, ErrOrder, ErrMissing, ErrValue, ErrTrailing, ErrTwice, ErrTooMany,
		io.ErrUnexpectedEOF}
	for _, c := range causes {
		if errors.Is(err, c) {
			return
		}
	}
	t.Fatalf("the error %q has no cause", err)
}

// sameError says whether two errors read the same.
func sameError(a, b error) bool {
	if a == nil || b == nil {
		return a == b
	}
	return a.Error() == b.Error()
}
