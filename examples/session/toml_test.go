package session

import (
	"bytes"
	"context"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"maskpair/anchor"
	"maskpair/cli"
	"maskpair/decompose"
)

// bare gives a TOML text without comments and empty lines.
func bare(text string) string {
	var lines []string
	for line := range strings.Lines(text) {
		line, _, _ = strings.Cut(line, "#") // no string of these texts has one
		if line = strings.TrimSpace(line); line != "" {
			lines = append(lines, line)
		}
	}
	return strings.Join(lines, "\n") + "\n"
}

// README shows deck and anchors of the demo as they are, and the other examples are what the program reads.
func TestReadmeFiles(t *testing.T) {
	readme, err := os.ReadFile(filepath.Join("..", "..", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	var blocks []string
	for _, m := range regexp.MustCompile("(?s)```toml\n(.*?)```").FindAllStringSubmatch(string(readme), -1) {
		blocks = append(blocks, m[1])
	}
	if len(blocks) != 4 {
		t.Fatalf("%d TOML texts, want the demo's deck and anchors, spacings, and orders", len(blocks))
	}
	demo := filepath.Join(t.TempDir(), "demo")
	var said bytes.Buffer
	if status := cli.Run(context.Background(), []string{"demo", demo}, nil, io.Discard, &said); status != 0 {
		t.Fatal(said.String())
	}
	for i, name := range []string{"deck.toml", "anchors.toml"} {
		text, err := os.ReadFile(filepath.Join(demo, name))
		if err != nil {
			t.Fatal(err)
		}
		if bare(blocks[i]) != bare(string(text)) {
			t.Errorf("README shows %s of the demo as\n%sbut it is\n%s", name, blocks[i], text)
		}
	}
	deck, err := decompose.ParseDeck("deck.toml", []byte("unit = \"nm\"\n[[layer]]\nname = \"metal1\"\ndrawn = \"19/0\"\nmask_a = \"19/1\"\nmask_b = \"19/2\"\nsame_mask_spacing = 36\n"+blocks[2]))
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range deck.Remarks() {
		t.Errorf("the spacings: %s: %s", r.Key, r.Text)
	}
	rules, err := deck.Resolve(1e-9)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := anchor.ParseFile("anchors.toml", []byte(blocks[3]), rules); err != nil {
		t.Error(err)
	}
}
