package decompose

import "fmt"

// LimitError says that a layout is larger than the program, or --memory, allows.
type LimitError struct {
	Msg    string
	Remedy string // what to do; a caller whose options are others may word its own
}

func (e *LimitError) Error() string { return e.Msg + "; " + e.Remedy }

// byBlocks is the remedy where a layout is too large as a whole.
const byBlocks = "decompose the blocks one by one with --top"

// InputError says that the layout cannot be processed as it is: a loop of references, coordinates that leave the plane.
type InputError struct {
	Structure string // "" where none is to blame
	Msg       string
}

func (e *InputError) Error() string {
	if e.Structure == "" {
		return e.Msg
	}
	return fmt.Sprintf("structure %s: %s", e.Structure, e.Msg)
}

// OrderError says that the orders of the user contradict each other or the layout, or that one hits no shape.
type OrderError struct{ Msg string }

func (e *OrderError) Error() string { return e.Msg }
