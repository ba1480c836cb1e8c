package gds

import (
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"
	"time"
)

// packed compresses data with gzip.
func packed(t testing.TB, data []byte) []byte {
	t.Helper()
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	if _, err := z.Write(data); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// fileOf writes data to a file of its own.
func fileOf(t testing.TB, data []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "in.gds")
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// TestInputWays runs both passes over a stream that comes in every way there is, and holds that they see the same, and
// that the sum is that of the file as given.
func TestInputWays(t *testing.T) {
	t.Setenv("TMPDIR", t.TempDir())
	for size, data := range map[string][]byte{"small": quirks(t), "large": flatStream(t, 40000, 3)} {
		want := metal()
		expected := mustIndex(t, data, want)
		z := packed(t, data)
		half := len(data) / 2
		members := append(packed(t, data[:half]), packed(t, data[half:])...)
		for _, c := range []struct {
			name  string
			path  string
			stdin io.Reader
			given []byte
		}{
			{"file", fileOf(t, data), nil, data},
			{"packed file", fileOf(t, z), nil, z},
			{"packed in two members", fileOf(t, members), nil, members},
			{"standard input", "-", bytes.NewReader(data), data},
			{"standard input in bits", "-", iotest.HalfReader(iotest.DataErrReader(bytes.NewReader(data))), data},
			{"packed standard input", "-", bytes.NewReader(z), z},
		} {
			for _, spool := range []bool{true, false} {
				in, err := Open(c.path, spool, c.stdin)
				if err != nil {
					t.Fatalf("%s, %s: %v", size, c.name, err)
				}
				if isFile := c.path != "-"; isFile && in.Given() != int64(len(c.given)) || !isFile && in.Given() != -1 {
					t.Errorf("%s, %s: the size is given as %d", size, c.name, in.Given())
				}
				told := int64(0)
				lib, err := in.Index(want, func(n int64) { told = n })
				if err != nil {
					t.Fatalf("%s, %s: %v", size, c.name, err)
				}
				if lib.Bytes != expected.Bytes || len(lib.Figures) != len(expected.Figures) || lib.Structures[0].Sum != expected.Structures[0].Sum {
					t.Errorf("%s, %s: the index is another", size, c.name)
				}
				sum, length := in.Sum()
				if sum != sha256.Sum256(c.given) || length != int64(len(c.given)) || told > length || told == 0 {
					t.Errorf("%s, %s: sum %x over %d bytes, %d told", size, c.name, sum, length, told)
				}
				src := in.ReaderAt()
				if plain := c.name == "file"; (src != nil) != (plain || spool) {
					t.Errorf("%s, %s: it can be read again: %v", size, c.name, src != nil)
				}
				if src != nil {
					var out bytes.Buffer
					if err := CopyStream(&out, src, lib, want, Plan{}, nil); err != nil || !bytes.Equal(out.Bytes(), data) {
						t.Errorf("%s, %s: the copy differs: %v", size, c.name, err)
					}
				}
				if err := in.Close(); err != nil {
					t.Errorf("%s, %s: %v", size, c.name, err)
				}
				if s, ok := c.stdin.(io.Seeker); ok {
					s.Seek(0, io.SeekStart)
				} else if c.stdin != nil {
					break
				}
			}
		}
	}
	left, err := os.ReadDir(os.TempDir())
	if err != nil || len(left) != 0 {
		t.Errorf("temporary files are left: %v, %v", left, err)
	}
}

func TestInputFaults(t *testing.T) {
	t.Setenv("TMPDIR", t.TempDir())
	data := flatStream(t, 18000, 3)
	z := packed(t, data)
	damaged := bytes.Clone(z)
	damaged[len(damaged)-8] ^= 1 // the checksum at the end
	torn := bytes.Clone(z)
	for i := range 100 {
		torn[len(torn)/2+i] ^= 0x55
	}
	for _, c := range []struct {
		name  string
		given []byte
		cause error
		says  string
	}{
		{"empty", nil, io.ErrUnexpectedEOF, "byte 0: the file is empty"},
		{"cut off", data[:len(data)-3], io.ErrUnexpectedEOF, "the file is cut off"},
		{"trailing", append(bytes.Clone(data), 0, 0, 7), ErrTrailing, "something that is not zero follows"},
		{"text", []byte("a letter"), ErrNotStream, "this is no GDSII stream"},
		{"packed, cut off", z[:len(z)/2], io.ErrUnexpectedEOF, "the compressed file is cut off"},
		{"packed, cut off in its last bytes", z[:len(z)-1], io.ErrUnexpectedEOF, "the compressed file is cut off"},
		{"packed, cut off in its head", z[:5], io.ErrUnexpectedEOF, "the compressed file is cut off"},
		{"packed, damaged sum", damaged, gzip.ErrChecksum, "the compressed file is damaged"},
		{"packed, torn", torn, nil, ""}, // what is wrong first depends on the damage
		{"packed, followed by one byte", append(bytes.Clone(z), 'x'), ErrTrailing, "the compressed data is followed by something else"},
		{"packed, followed by zeros", append(bytes.Clone(z), make([]byte, 512)...), ErrTrailing, "the compressed data is followed by something else"},
		{"packed, followed by half a member", append(bytes.Clone(z), z[:7]...), io.ErrUnexpectedEOF, "the compressed file is cut off"},
		{"packed text", packed(t, []byte("a letter")), ErrNotStream, "this is no GDSII stream"},
		{"packed nothing", packed(t, nil), io.ErrUnexpectedEOF, "the file is empty"},
		{"packed twice", packed(t, z), ErrNotStream, "this is no GDSII stream"},
	} {
		path := fileOf(t, c.given)
		for _, way := range []string{path, "-"} {
			in, err := Open(way, true, bytes.NewReader(c.given))
			if err != nil {
				t.Fatalf("%s: %v", c.name, err)
			}
			_, err = in.Index(metal(), nil)
			name := path
			if way == "-" {
				name = "standard input"
			}
			if err == nil || c.cause != nil && !errors.Is(err, c.cause) || !strings.HasPrefix(err.Error(), name+": ") ||
				!strings.Contains(err.Error(), c.says) || strings.Contains(err.Error(), "\n") {
				t.Errorf("%s, %s: the error is %v", c.name, way, err)
			}
			if err := in.Close(); err != nil {
				t.Errorf("%s: %v", c.name, err)
			}
		}
	}
	left, err := os.ReadDir(os.TempDir())
	if err != nil || len(left) != 0 {
		t.Errorf("temporary files are left: %v, %v", left, err)
	}
}

func TestOpenFaults(t *testing.T) {
	if _, err := Open(filepath.Join(t.TempDir(), "absent.gds"), true, nil); !errors.Is(err, os.ErrNotExist) || !strings.Contains(err.Error(), "absent.gds") {
		t.Errorf("a file that is not there: %v", err)
	}
	if _, err := Open(t.TempDir(), true, nil); err == nil || !strings.Contains(err.Error(), "is a folder") {
		t.Errorf("a folder: %v", err)
	}
	if _, err := Open("-", true, nil); err == nil {
		t.Error("no standard input, and no error")
	}
	broken := errors.New("the line is dead")
	if _, err := Open("-", true, iotest.ErrReader(broken)); !errors.Is(err, broken) || !strings.HasPrefix(err.Error(), "standard input: ") {
		t.Errorf("a standard input that fails: %v", err)
	}
	t.Setenv("TMPDIR", filepath.Join(t.TempDir(), "absent"))
	if _, err := Open("-", true, bytes.NewReader(quirks(t))); !errors.Is(err, ErrSpool) {
		t.Errorf("no folder for the spool file: %v", err)
	}
}

// TestInputFullDisk holds that a spool file that cannot be written ends the first pass.
func TestInputFullDisk(t *testing.T) {
	in, err := Open("-", true, bytes.NewReader(flatStream(t, 40000, 1)))
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	in.spool.Close() // writes fail from now on, or from the next block
	if _, err := in.Index(metal(), nil); !errors.Is(err, ErrSpool) {
		t.Errorf("the error is %v", err)
	}
}

func TestInputChanged(t *testing.T) {
	data := quirks(t)
	for name, change := range map[string]func(path string) error{
		"longer": func(path string) error { return os.WriteFile(path, append(data, 0), 0o600) },
		"newer":  func(path string) error { return os.Chtimes(path, time.Time{}, time.Unix(1, 0)) },
		"same":   nil,
	} {
		path := fileOf(t, data)
		in, err := Open(path, true, nil)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := in.Index(metal(), nil); err != nil {
			t.Fatal(err)
		}
		if err := in.Changed(); err != nil {
			t.Errorf("%s: %v", name, err)
		}
		if change != nil {
			if err := change(path); err != nil {
				t.Fatal(err)
			}
			if err := in.Changed(); !errors.Is(err, ErrChanged) {
				t.Errorf("%s: %v", name, err)
			}
		}
		in.Close()
	}
	// A change before the first pass is through is one of it.
	path := fileOf(t, data)
	in, err := Open(path, true, nil)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	if err := os.Chtimes(path, time.Time{}, time.Unix(1, 0)); err != nil {
		t.Fatal(err)
	}
	if _, err := in.Index(metal(), nil); !errors.Is(err, ErrChanged) {
		t.Errorf("the error is %v", err)
	}
}

// TestInputClosedEarly holds that an input can be closed at any time, also while its source hangs.
func TestInputClosedEarly(t *testing.T) {
	data := flatStream(t, 40000, 1)
	for _, given := range [][]byte{data, packed(t, data)} {
		for _, path := range []string{fileOf(t, given), "-"} {
			in, err := Open(path, true, bytes.NewReader(given))
			if err != nil {
				t.Fatal(err)
			}
			if err := in.Close(); err != nil {
				t.Error(err)
			}
		}
		r, w := io.Pipe()
		go w.Write(given[:5000]) // and then nothing, for ever
		in, err := Open("-", true, r)
		if err != nil {
			t.Fatal(err)
		}
		closed := make(chan error, 1)
		go func() { closed <- in.Close() }()
		select {
		case err := <-closed:
			if err != nil {
				t.Error(err)
			}
		case <-time.After(20 * time.Second):
			t.Fatal("Close waits for a source that hangs")
		}
		r.Close()
	}
}
