package gds

import (
	"errors"
	"fmt"
	"strconv"
	"strings"
)

// This file says how faults of a stream are told: one type with the place, and a few causes to test for with errors.Is.

// Causes of a SyntaxError, for errors.Is. A stream that ends too early has the cause io.ErrUnexpectedEOF instead.
var (
	ErrNotStream = errors.New("not a GDSII stream")
	ErrLength    = errors.New("wrong record length")
	ErrType      = errors.New("wrong data type")
	ErrKind      = errors.New("unknown record")
	ErrOrder     = errors.New("record out of place")
	ErrMissing   = errors.New("record missing")
	ErrValue     = errors.New("value out of range")
	ErrTrailing  = errors.New("data after ENDLIB")
	ErrTwice     = errors.New("structure defined twice")
	ErrTooMany   = errors.New("more than the index can hold")
)

// ErrChanged says that a stream is no longer what it was when it was indexed.
var ErrChanged = errors.New("changed while it was read")

// SyntaxError is a fault of a stream, with its place. It reads as one line.
type SyntaxError struct {
	Offset    int64  // of the faulty record, or of the place where a record is missing; bytes of the unpacked stream
	Structure string // "" outside a structure
	Element   int64  // ordinal of the element in its structure, from 1; 0 outside an element
	Kind      Kind   // of the element; meaningful where Element is not 0
	Record    Kind   // kind of the faulty record
	Err       error  // what is wrong, with one of the causes above
}

// Error tells the place and what is wrong there.
func (e *SyntaxError) Error() string {
	var b strings.Builder
	if e.Structure != "" {
		b.WriteString("structure ")
		b.WriteString(Printable(e.Structure))
		b.WriteString(", ")
	}
	if e.Element > 0 {
		fmt.Fprintf(&b, "element %d (%v), ", e.Element, e.Kind)
	}
	fmt.Fprintf(&b, "byte %d: %v", e.Offset, e.Err)
	return b.String()
}

// Unwrap gives what is wrong.
func (e *SyntaxError) Unwrap() error { return e.Err }

// Printable gives a name of a stream as it can stand in a line of text: as it is where all its bytes are printable ASCII or
// UTF-8 without quotes, quoted in Go's manner otherwise.
func Printable(name string) string {
	quoted := strconv.Quote(name)
	if quoted[1:len(quoted)-1] == name && name != "" && !strings.ContainsAny(name, " ,") {
		return name
	}
	return quoted
}

// fault is a cause in particular words.
type fault struct {
	cause error
	text  string
}

func (f *fault) Error() string { return f.text }
func (f *fault) Unwrap() error { return f.cause }

// faultf makes a fault.
func faultf(cause error, form string, args ...any) error {
	return &fault{cause, fmt.Sprintf(form, args...)}
}
