package cli

import (
	"io"
	"os"
)

// This file knows what a terminal is, and when it may be coloured. Colour only underlines what the words say.

// isTerminal tells whether a writer is a terminal.
func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	if !ok {
		return false
	}
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}

// The colours: what went well, what did not, and what to look at. They are bold, so that they are seen on any ground.
const (
	inkGood = "\x1b[1;32m"
	inkBad  = "\x1b[1;35m"
	inkNote = "\x1b[1;33m"
	inkOff  = "\x1b[0m"
)

// paints tells whether text for w may be coloured: on a terminal, unless the user forbids it (NO_COLOR, see no-color.org) or the
// terminal cannot.
func paints(w io.Writer, env func(string) string) bool {
	return isTerminal(w) && env("NO_COLOR") == "" && env("TERM") != "dumb"
}

// painter colours text, or leaves it as it is.
type painter bool

// painterFor gives the painter for w.
func painterFor(w io.Writer) painter { return painter(paints(w, os.Getenv)) }

func (p painter) paint(ink, text string) string {
	if !p {
		return text
	}
	return ink + text + inkOff
}

// firstLine colours the first line of what is written through it.
type firstLine struct {
	w   io.Writer
	ink string
	p   painter
	end bool // the first line is over
}

func (f *firstLine) Write(b []byte) (int, error) {
	if f.end || !bool(f.p) {
		return f.w.Write(b)
	}
	for i, c := range b {
		if c != '\n' {
			continue
		}
		f.end = true
		if _, err := io.WriteString(f.w, f.p.paint(f.ink, string(b[:i]))); err != nil {
			return 0, err
		}
		n, err := f.w.Write(b[i:])
		return i + n, err
	}
	_, err := io.WriteString(f.w, f.p.paint(f.ink, string(b)))
	return len(b), err
}
