//go:build unix

package gds

import (
	"bytes"
	"os"
	"path/filepath"
	"syscall"
	"testing"
)

// TestInputPipe reads from a named pipe, which has a path but cannot be read twice.
func TestInputPipe(t *testing.T) {
	path := filepath.Join(t.TempDir(), "pipe")
	if err := syscall.Mkfifo(path, 0o600); err != nil {
		t.Skip("no named pipes here:", err)
	}
	data := quirks(t)
	wrote := make(chan error, 1)
	go func() { wrote <- os.WriteFile(path, data, 0o600) }()
	in, err := Open(path, true, nil)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	lib, err := in.Index(metal(), nil)
	if err != nil {
		t.Fatal(err)
	}
	if err := <-wrote; err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := CopyStream(&out, in.ReaderAt(), lib, metal(), Plan{}, nil); err != nil || !bytes.Equal(out.Bytes(), data) {
		t.Errorf("the copy differs: %v", err)
	}
}
