package gds

import (
	"bytes"
	"errors"
	"io"
	"slices"
	"strings"
	"testing"
	"testing/iotest"
)

// scanAll reads a stream through Scanner; data is copied.
func scanAll(r io.Reader) ([]Record, error) {
	var records []Record
	s := NewScanner(r)
	for s.Scan() {
		r := s.Record()
		r.Data = append([]byte{}, r.Data...)
		records = append(records, r)
	}
	return records, s.Err()
}

// payloads is a stream of records with no data, short data, and the most data that a record holds.
func payloads() []byte {
	b := appendInt2(nil, HEADER, 600)
	for _, n := range []int{0, 2, 4, 65530, 0, 65528, 1022, 65530, 65530} {
		data := make([]byte, n)
		for i := range data {
			data[i] = byte(i*7 + n)
		}
		b = appendRecord(b, XY, data)
	}
	b = append(b, 0, 4, 0xEE, 0x77) // a kind that nobody knows passes through
	return appendHead(b, ENDLIB, 0)
}

func TestScannerPayloads(t *testing.T) {
	data := payloads()
	// Enough to go round the buffer a few times.
	var long []byte
	for range 9 {
		long = append(long, data[:len(data)-4]...)
	}
	long = appendHead(long, ENDLIB, 0)
	for name, stream := range map[string][]byte{"short": data, "long": long} {
		want := slowRecords(t, stream)
		for reader, r := range map[string]io.Reader{
			"whole":     bytes.NewReader(stream),
			"one byte":  iotest.OneByteReader(bytes.NewReader(stream)),
			"half":      iotest.HalfReader(bytes.NewReader(stream)),
			"data, EOF": iotest.DataErrReader(bytes.NewReader(stream)),
		} {
			got, err := scanAll(r)
			if err != nil {
				t.Fatalf("%s, %s: %v", name, reader, err)
			}
			same := func(a, b Record) bool {
				return a.Kind == b.Kind && a.Type == b.Type && a.Offset == b.Offset && bytes.Equal(a.Data, b.Data)
			}
			if !slices.EqualFunc(want, got, same) {
				t.Fatalf("%s, %s: the records are not those of the stream", name, reader)
			}
		}
	}
}

// TestScannerLongest holds the longest record against a bound: a length of 65535 is odd, and no record has it.
func TestScannerLongest(t *testing.T) {
	data := appendInt2(nil, HEADER, 600)
	data = append(data, 0xFF, 0xFF, byte(XY), byte(Int4))
	data = append(data, make([]byte, 70000)...)
	_, err := scanAll(bytes.NewReader(data))
	if !errors.Is(err, ErrLength) || !strings.Contains(err.Error(), "byte 6: record length 65535 is odd") {
		t.Fatalf("the error is %v", err)
	}
}

func TestScannerFaults(t *testing.T) {
	header := appendInt2(nil, HEADER, 600)
	end := appendHead(nil, ENDLIB, 0)
	join := func(parts ...[]byte) []byte { return bytes.Join(parts, nil) }
	for _, c := range []struct {
		name  string
		data  []byte
		cause error
		says  string
	}{
		{"empty", nil, io.ErrUnexpectedEOF, "byte 0: the file is empty"},
		{"no ENDLIB", header, io.ErrUnexpectedEOF, "byte 6: the file is cut off: it ends here, without ENDLIB"},
		{"half a head", join(header, []byte{0, 8}), io.ErrUnexpectedEOF, "byte 6: the file is cut off: 2 of the 4 bytes of a record's head are there"},
		{"half a record", join(header, []byte{0, 8, 0x10, 3, 1}), io.ErrUnexpectedEOF, "byte 6: the file is cut off: 5 of the 8 bytes of XY are there"},
		{"length 0", join(header, make([]byte, 8)), ErrLength, "byte 6: record length 0 is less than 4"},
		{"length 2", join(header, []byte{0, 2, 4, 0}), ErrLength, "byte 6: record length 2 is less than 4"},
		{"length 7", join(header, []byte{0, 7, 0x10, 3, 1, 2, 3}, end), ErrLength, "byte 6: record length 7 is odd"},
		{"text", []byte("gds version 7"), ErrLength, "byte 0: record length 26468 is"},
		{"behind the end", join(header, end, []byte{0, 0, 1, 0}), ErrTrailing, "byte 12: something that is not zero follows"},
		{"second library", join(header, end, header, end), ErrTrailing, "byte 11: something that is not zero follows"},
	} {
		for _, one := range []bool{false, true} {
			var r io.Reader = bytes.NewReader(c.data)
			if one {
				r = iotest.OneByteReader(r)
			}
			_, err := scanAll(r)
			var syntax *SyntaxError
			if c.name == "text" { // 26468 is even: the record is merely cut off
				if !errors.Is(err, io.ErrUnexpectedEOF) {
					t.Errorf("%s: %v", c.name, err)
				}
				continue
			}
			if !errors.Is(err, c.cause) || !errors.As(err, &syntax) || !strings.HasPrefix(err.Error(), c.says) {
				t.Errorf("%s (one byte: %v): the error is %q, not %q", c.name, one, err, c.says)
			}
		}
	}
}

func TestScannerPadding(t *testing.T) {
	data := payloads()
	for _, n := range []int{0, 1, 2, 2044, 2048, bufferSize, 3*bufferSize + 5} {
		padded := append(append([]byte{}, data...), make([]byte, n)...)
		got, err := scanAll(bytes.NewReader(padded))
		if err != nil || len(got) != len(slowRecords(t, data)) {
			t.Errorf("%d bytes of padding: %d records, %v", n, len(got), err)
		}
		if n > 0 {
			padded[len(padded)-1] = 1
			_, err = scanAll(bytes.NewReader(padded))
			var syntax *SyntaxError
			if !errors.Is(err, ErrTrailing) || !errors.As(err, &syntax) || syntax.Offset != int64(len(padded)-1) {
				t.Errorf("a one at the end of %d bytes of padding: %v", n, err)
			}
		}
	}
}

// TestScannerSticks holds that the first fault stays, and that Scan stays false.
func TestScannerSticks(t *testing.T) {
	broken := errors.New("the disk is gone")
	s := NewScanner(io.MultiReader(bytes.NewReader(appendInt2(nil, HEADER, 600)), iotest.ErrReader(broken)))
	if !s.Scan() || s.Record().Kind != HEADER {
		t.Fatal("HEADER is not read")
	}
	for range 3 {
		if s.Scan() || !errors.Is(s.Err(), broken) {
			t.Fatalf("Scan goes on behind a fault, or loses it: %v", s.Err())
		}
		if r := s.Record(); r.Kind != 0 || r.Data != nil {
			t.Fatalf("behind a fault stands the record %v", r)
		}
	}

	s = NewScanner(bytes.NewReader(appendHead(appendInt2(nil, HEADER, 600), ENDLIB, 0)))
	for range 2 {
		s.Scan()
	}
	for range 3 {
		if s.Scan() || s.Err() != nil {
			t.Fatalf("Scan goes on behind the end: %v", s.Err())
		}
	}

	s = NewScanner(stuck{})
	if s.Scan() || !errors.Is(s.Err(), io.ErrNoProgress) {
		t.Fatalf("a reader that gives nothing is waited for: %v", s.Err())
	}
}

// stuck is a reader that never gives anything.
type stuck struct{}

func (stuck) Read([]byte) (int, error) { return 0, nil }

func TestDataTypeString(t *testing.T) {
	for d, want := range map[DataType]string{Real8: "eight-byte real", ASCII: "text", 9: "data type 9"} {
		if d.String() != want {
			t.Errorf("data type %d is called %q, not %q", uint8(d), d, want)
		}
	}
}

func TestPrintable(t *testing.T) {
	for name, want := range map[string]string{
		"TOP": "TOP", "amp$2": "amp$2", "": `""`, "a b": `"a b"`, "a\nb": `"a\nb"`, "\xff": `"\xff"`, `q"`: `"q\""`, "größe": "größe",
	} {
		if got := Printable(name); got != want {
			t.Errorf("the name %q is printed as %s, not %s", name, got, want)
		}
	}
	long := &SyntaxError{Offset: 48210, Structure: "A\nB", Element: 12, Kind: BOUNDARY, Record: XY, Err: faultf(ErrLength, "XY length 20 is not a multiple of 8")}
	want := `structure "A\nB", element 12 (BOUNDARY), byte 48210: XY length 20 is not a multiple of 8`
	if long.Error() != want {
		t.Errorf("the error reads %q", long)
	}
}
