package report

import (
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"
)

// This file words what all printers need: names, counts, lengths, and tables in aligned columns.

// Text gives a name of a stream as UTF-8. Bytes that are no UTF-8 come out as the characters of the same number, so that
// different names stay different.
func Text(s string) string {
	if utf8.ValidString(s) {
		return s
	}
	var b strings.Builder
	for i := range len(s) {
		b.WriteRune(rune(s[i]))
	}
	return b.String()
}

// Count words a count, with commas between thousands.
func Count(n int64) string {
	digits := strconv.FormatInt(n, 10)
	from := len(digits) % 3
	parts := []string{}
	if from > 0 {
		parts = append(parts, digits[:from])
	}
	for i := from; i < len(digits); i += 3 {
		parts = append(parts, digits[i:i+3])
	}
	return strings.Join(parts, ",")
}

// Short words a number that went through a few products, in the twelve digits that are certain.
func Short(v float64) string {
	short, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 12, 64), 64)
	if err != nil || short == 0 {
		short = 0 // also for a negative zero
	}
	return strconv.FormatFloat(short, 'f', -1, 64)
}

// WriteTable prints a table in aligned columns, line by line; align has an l or r for each column. Lines begin with two spaces
// and end without any.
func WriteTable(w io.Writer, table [][]string, align string) error {
	widths := make([]int, len(align))
	for _, line := range table {
		for i, c := range line {
			widths[i] = max(widths[i], utf8.RuneCountInString(c))
		}
	}
	for _, line := range table {
		var b strings.Builder
		for i, c := range line {
			width := widths[i]
			if align[i] == 'l' {
				width = -width
			}
			fmt.Fprintf(&b, "  %*s", width, c)
		}
		if _, err := io.WriteString(w, strings.TrimRight(b.String(), " ")+"\n"); err != nil {
			return err
		}
	}
	return nil
}
