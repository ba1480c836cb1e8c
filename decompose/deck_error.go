package decompose

import (
	"strconv"
	"strings"
)

// This file words what is wrong in a file that the user writes: one line that names file, line and key, and says what to do.

// DeckError is a fault in a file that the user writes: the rule deck, or the anchor file that goes with it.
type DeckError struct {
	File string
	Key  string // where in the file, as a person would say it: "layer metal1: mask_a"; may be empty
	Line int    // 1 is the first line; 0: no line is to blame
	Msg  string // what is wrong, and what to do
}

// Error gives one line: file, line, key and message.
func (e *DeckError) Error() string {
	var b strings.Builder
	b.WriteString(e.File)
	if e.Line > 0 {
		b.WriteString(":" + strconv.Itoa(e.Line))
	}
	if e.Key != "" {
		b.WriteString(": " + e.Key)
	}
	b.WriteString(": " + e.Msg)
	return strings.Join(strings.Fields(b.String()), " ")
}

// closestWord gives the known word that a mistyped one was probably meant to be, or "" where none is near.
func closestWord(word string, known []string) string {
	best, least := "", 1+max(1, len(word)/3)
	for _, k := range known {
		if d := editDistance(word, k); d < least {
			best, least = k, d
		}
	}
	return best
}

// editDistance counts the single-byte insertions, deletions and replacements between two words (Levenshtein, 1965).
func editDistance(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diagonal
			if a[i] != b[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
