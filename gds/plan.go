package gds

// This file is what a caller of CopyStream says: what is to become of each structure, figure and reference.

// Op says what becomes of a figure.
type Op uint8

// What can become of a figure.
const (
	Keep           Op = iota // the element stays as it is
	Drop                     // the element is left out
	Relayer                  // the data of its LAYER and DATATYPE become Action.Layer, nothing else changes
	KeepAndCopy              // the element stays, followed by its copy on Action.Layer, properties included
	Replace                  // the element becomes its Pieces
	KeepAndReplace           // the element stays, followed by its Pieces
)

// Action is one thing that can become of figures.
type Action struct {
	Op    Op
	Layer LayerType // for Relayer and KeepAndCopy
}

// Plan says how a stream is to be copied.
type Plan struct {
	Actions []Action // what Copy.Figures counts in

	// Copies gives what is written for a structure (an index into Library.Structures): one or more copies, in order. Nil,
	// or a single zero Copy, is the structure byte for byte. It is called once for each structure, in file order, and what
	// it returns is not used after its next call. A nil function copies the whole stream as it is.
	Copies func(structure int) []Copy
}

// Copy is one copy of a structure.
type Copy struct {
	Name    string             // written in STRNAME; "" keeps the record as it is
	Figures []uint8            // for each figure of the structure an index into Plan.Actions; nil: all are kept
	Refs    []RefChange        // ascending by Index; references that are not named stay as they are
	Pieces  map[uint32][]Piece // for Replace and KeepAndReplace: by ordinal of the figure in the structure, from 0
	Tail    []byte             // complete elements to be put before ENDSTR; see AppendBoundary
}

// RefChange changes a reference of a structure.
type RefChange struct {
	Index int32  // ordinal of the reference in its structure, from 0
	Name  string // written in SNAME, the array as it is; "" keeps the name
	Split []Part // not nil: what is written in place of the reference; each part has all records of the reference
}

// Part is a piece of a reference that is split: an array, or where it is 1 by 1, a single reference.
type Part struct {
	Name              string // "": RefChange.Name, or where that is empty too, the name that stands there
	At                Point
	Columns, Rows     int32 // 1 to 65535
	ColumnEnd, RowEnd Point // as in Placement; not looked at for 1 by 1
}

// Piece is a polygon that takes the place of a figure. It is written as a BOUNDARY with the ELFLAGS, PLEX and properties of
// the figure.
type Piece struct {
	Layer  LayerType
	Points []Point // without the closing one
}

// untouched says whether the copy is the structure as it stands.
func (c *Copy) untouched() bool {
	return c.Name == "" && c.Figures == nil && len(c.Refs) == 0 && len(c.Pieces) == 0 && len(c.Tail) == 0
}
