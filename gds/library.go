package gds

// Point is a position in whole database units of its structure.
type Point struct{ X, Y int32 }

// Rect is a closed axis-parallel rectangle; X1 <= X2 and Y1 <= Y2.
type Rect struct{ X1, Y1, X2, Y2 int32 }

// LayerType is a layer number with a datatype (or a texttype), both read as unsigned.
type LayerType struct{ Layer, Type uint16 }

// Interest says what the index is to keep of a stream. Classes are small numbers that the caller deals, from 1.
type Interest struct {
	Figures map[LayerType]uint8 // BOUNDARY and PATH elements of these layers, with their class
	Labels  map[LayerType]uint8 // TEXT elements of these layer/texttypes, with their class
}

// Library is the index of a stream: what pass 1 keeps of it. It grows with the layers of interest and the hierarchy, never
// with the file.
type Library struct {
	UserUnit   float64 // size of a database unit in user units (first number of UNITS)
	DBU        float64 // size of a database unit in metres (second number of UNITS)
	Bytes      int64   // length of the unpacked stream, padding after ENDLIB included
	End        int64   // offset of the ENDLIB record
	Structures []Structure
	Figures    []Figure    // of all structures, in file order
	Outlines   []Outline   // of the figures that are no plain rectangle
	Points     []Point     // of the outlines
	Refs       []Ref       // of all structures, in file order
	Placements []Placement // what some references say beyond a turn and a place
	Labels     []Label
	Missing    []string          // names of structures that are placed but not in the file
	Boxes      map[LayerType]int // BOX elements seen on layers of interest, by layer and boxtype (for a warning)

	headSum uint32 // CRC-32C of the bytes before the first structure
	tailSum uint32 // and of those from ENDLIB on
}

// Structure is one BGNSTR to ENDSTR. Its figures are Library.Figures[FirstFigure:EndFigure], its references
// Library.Refs[FirstRef:EndRef], its labels Library.Labels[FirstLabel:EndLabel].
type Structure struct {
	Name                   string // without padding; any bytes
	Begin, End             int64  // offsets of the first byte of BGNSTR and of the byte behind ENDSTR
	Sum                    uint32 // CRC-32C of the bytes [Begin, End)
	Elements               int32
	FirstFigure, EndFigure uint32
	FirstRef, EndRef       uint32
	FirstLabel, EndLabel   uint32
}

// Figure is a BOUNDARY or PATH element of a layer of interest, in the coordinates of its structure.
type Figure struct {
	Box     Rect   // of a boundary: bounding box of its points; of a path: of its points, without width
	Outline uint32 // 0: the figure is a BOUNDARY that is exactly the rectangle Box, with area; else 1 + index into Library.Outlines
	Class   uint8  // as in Interest.Figures
}

// Outline is the figure as drawn: the points of a boundary (without the closing one) or of the centre line of a path.
type Outline struct {
	First    uint64 // Library.Points[First : First+Count]
	Count    uint32
	Path     bool
	PathType uint8 // 0, 1, 2 or 4
	Width    int32 // database units; negative: absolute, not scaled by magnification
	Begin    int32 // BGNEXTN and ENDEXTN of path type 4
	Finish   int32
}

// Ref is an SREF or AREF.
type Ref struct {
	Target int32 // index into Library.Structures; below 0: -1-i with Library.Missing[i]
	At     Point // origin
	Turn   uint8 // see Orientation; meaningful where Extra is 0 or the placement is Exact
	Array  bool
	Extra  uint32 // 0: a single placement by Turn and At; else 1 + index into Library.Placements
}

// Placement is what an AREF, or a reference with magnification or an odd angle, says beyond Ref.
type Placement struct {
	Columns, Rows                        int32 // 1 x 1 for an SREF
	ColumnEnd, RowEnd                    Point // second and third point of an AREF: origin + Columns (Rows) times the step
	Mirror                               bool  // reflection about the x axis before the turn
	Magnification                        float64
	Angle                                float64 // degrees, counter-clockwise
	AbsoluteMagnification, AbsoluteAngle bool
	Exact                                bool // magnification is 1 and the angle a multiple of 90 degrees: Ref.Turn says all
}

// Label is a TEXT element of a layer of interest.
type Label struct {
	At    Point
	Class uint8
	Text  string
}
