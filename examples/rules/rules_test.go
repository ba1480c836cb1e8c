package main

import (
	"bytes"
	"os"
	"testing"
)

// The pictures beside this program are what it draws: if not, run go run ./examples/rules, and look at what changed.
func TestPicturesAreWhatIsDrawn(t *testing.T) {
	pictures, err := draw()
	if err != nil {
		t.Fatal(err)
	}
	for name, want := range pictures {
		got, err := os.ReadFile(name)
		if err != nil {
			t.Error(err)
		} else if !bytes.Equal(got, want) {
			t.Errorf("%s is not what is drawn now", name)
		}
	}
}
