package main

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"
)

// The pictures beside the example must be those of the program as it is.
func TestPicturesAreUpToDate(t *testing.T) {
	pictures, err := draw()
	if err != nil {
		t.Fatal(err)
	}
	if len(pictures) != 5 {
		t.Errorf("%d pictures, want 5", len(pictures))
	}
	for name, text := range pictures {
		kept, err := os.ReadFile(filepath.Join("..", "demo", name))
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(kept, text) {
			t.Errorf("examples/demo/%s is not what the program draws; run  go run ./examples/draw  and look at the change", name)
		}
	}
}
