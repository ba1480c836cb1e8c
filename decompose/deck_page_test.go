package decompose

import (
	"errors"
	"maps"
	"os"
	"regexp"
	"slices"
	"strings"
	"testing"
)

// This file holds DECK.md against the decoder. Which keys the decoder knows it says itself, where a deck has a key that it does not know.

// deckPage is a section of DECK.md: the examples of its table by key.
type deckPage struct {
	keys     []string
	examples map[string]string
	defaults map[string]string
}

func readDeckPage(t *testing.T) (sections map[string]*deckPage, text string) {
	t.Helper()
	kept, err := os.ReadFile("DECK.md")
	if err != nil {
		t.Fatal(err)
	}
	sections = map[string]*deckPage{}
	row := regexp.MustCompile("^\\| `(\\w+)` \\| (.+) \\| (.+) \\| (.*) ?\\| `(.+)` \\|$")
	var s *deckPage
	for line := range strings.Lines(string(kept)) {
		line = strings.TrimSpace(line)
		if title, ok := strings.CutPrefix(line, "## "); ok {
			s = &deckPage{examples: map[string]string{}, defaults: map[string]string{}}
			sections[strings.Trim(title, "`")] = s
		} else if m := row.FindStringSubmatch(line); m != nil {
			s.keys = append(s.keys, m[1])
			s.examples[m[1]], s.defaults[m[1]] = m[5], strings.TrimSpace(m[4])
		} else if strings.HasPrefix(line, "| `") {
			t.Errorf("no row of key, meaning, value, default and example: %s", line)
		}
	}
	return sections, string(kept)
}

// The decks have a key in one table that nobody knows.
func TestDeckPageHasTheKeysOfTheDecoder(t *testing.T) {
	sections, _ := readDeckPage(t)
	probes := map[string]string{
		"At the top":      "qqqqqqqqqqqqqqqqqq = 1\n" + minimalDeck,
		"[[layer]]":       minimalDeck + "qqqqqqqqqqqqqqqqqq = 1\n",
		"[layer.spacing]": minimalDeck + "[layer.spacing]\nqqqqqqqqqqqqqqqqqq = 1\n",
		"wide":            minimalDeck + "[layer.spacing]\nwide = [{ width = 1, spacing = 1, qqqqqqqqqqqqqqqqqq = 1 }]\n",
		"[layer.stitch]":  minimalDeck + "[layer.stitch]\nmin_overlap = 1\nqqqqqqqqqqqqqqqqqq = 1\n",
		"[marks]":         minimalDeck + "[marks]\nqqqqqqqqqqqqqqqqqq = 1\n",
	}
	if len(sections) != len(probes) {
		t.Errorf("the page has the tables %v", slices.Sorted(maps.Keys(sections)))
	}
	for title, deck := range probes {
		_, err := ParseDeck("deck.toml", []byte(deck))
		var fault *DeckError
		if !errors.As(err, &fault) {
			t.Fatalf("%s: %v", title, err)
		}
		_, list, ok := strings.Cut(fault.Msg, "the keys here are ")
		if !ok || sections[title] == nil {
			t.Fatalf("%s: %v", title, err)
		}
		want, got := strings.Split(list, ", "), slices.Clone(sections[title].keys)
		slices.Sort(want)
		slices.Sort(got)
		if !slices.Equal(want, got) {
			t.Errorf("%s: the page has %v, the decoder %v", title, got, want)
		}
	}
}

// All examples together are a deck without doubts, and one without any of them that has a default is a deck as well; without one that
// has none it is none.
func TestDeckPageExamples(t *testing.T) {
	sections, text := readDeckPage(t)
	// write puts the examples together, but for one.
	write := func(without string) string {
		var b strings.Builder
		for _, title := range []string{"At the top", "[[layer]]", "[layer.spacing]", "[layer.stitch]", "[marks]"} {
			if strings.HasPrefix(title, "[") {
				b.WriteString(title + "\n")
			}
			s := sections[title]
			for _, key := range s.keys {
				if example := s.examples[key]; title+" "+key != without && !strings.HasPrefix(example, "[") {
					b.WriteString(example + "\n")
				}
			}
		}
		return b.String()
	}
	deck, err := ParseDeck("deck.toml", []byte(write("")))
	if err != nil {
		t.Fatalf("%v in\n%s", err, write(""))
	}
	if _, err := deck.Resolve(1e-9); err != nil {
		t.Error(err)
	}
	for _, r := range deck.Remarks() {
		t.Errorf("%s: %s", r.Key, r.Text)
	}
	for title, s := range sections {
		for _, key := range s.keys {
			if title == "wide" || strings.HasPrefix(s.examples[key], "[") || key == "tip_width" { // the tip rules need it
				continue
			}
			_, err := ParseDeck("deck.toml", []byte(write(title+" "+key)))
			if optional := s.defaults[key] != ""; optional != (err == nil) {
				t.Errorf("%s: the default of %s is %q, but without it: %v", title, key, s.defaults[key], err)
			}
		}
	}
	_, example, _ := strings.Cut(text, "```toml\n")
	example, _, _ = strings.Cut(example, "```")
	if _, err := ParseDeck("deck.toml", []byte(example)); err != nil {
		t.Errorf("the deck at the head of the page: %v", err)
	}
	wide := sections["wide"]
	if whole := "wide = [{ " + wide.examples["width"] + ", " + wide.examples["spacing"] + " }]"; sections["[layer.spacing]"].examples["wide"] != whole {
		t.Errorf("the examples of wide are not those of its entries: %s", whole)
	}
}
