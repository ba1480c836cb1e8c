package gds

import (
	"errors"
	"io"
	"time"
)

var errPending = errors.New("gds: not yet written")

type Record struct {
	Kind   Kind
	Type   DataType
	Offset int64
	Data   []byte
}
type Scanner struct{}

func NewScanner(r io.Reader) *Scanner { return &Scanner{} }
func (s *Scanner) Scan() bool         { return false }
func (s *Scanner) Record() Record     { return Record{} }
func (s *Scanner) Err() error         { return errPending }

func Index(r io.Reader, size int64, want Interest, progress func(bytes int64)) (*Library, error) {
	return nil, errPending
}

func CopyStream(dst io.Writer, src io.ReaderAt, lib *Library, want Interest, plan Plan, progress func(bytes int64)) error {
	return errPending
}

// AppendBoundary appends a BOUNDARY element to dst. Points come without the closing one.
func AppendBoundary(dst []byte, layer LayerType, points []Point) []byte { return dst }

// AppendRectangle appends a BOUNDARY element that is a rectangle.
func AppendRectangle(dst []byte, layer LayerType, r Rect) []byte { return dst }

type Input struct{}

// Open opens an input: "-" is stdin. With spool, what cannot be read twice (stdin, gzip) is spooled for the second pass.
func Open(path string, spool bool, stdin io.Reader) (*Input, error) { return nil, errPending }

// Index runs pass 1 over the input and takes its SHA-256 at the same time.
func (in *Input) Index(want Interest, progress func(bytes int64)) (*Library, error) {
	return nil, errPending
}

// Given is the size in bytes of the file as given (compressed, if it is); -1 where it is not known beforehand.
func (in *Input) Given() int64 { return -1 }

// Sum gives SHA-256 and length of the file as given; valid after Index.
func (in *Input) Sum() (sha256 [32]byte, bytes int64) { return }

// ReaderAt gives the unpacked stream for pass 2; nil where nothing was spooled.
func (in *Input) ReaderAt() io.ReaderAt { return nil }

// Changed gives ErrChanged where size or time of the file are no longer what they were when it was opened.
func (in *Input) Changed() error { return nil }
func (in *Input) Close() error   { return nil }

// WriterOptions: DBU is the database unit in metres, UserUnit its size in user units.
type WriterOptions struct {
	LibName       string
	UserUnit, DBU float64
	Time          time.Time
}
type Strans struct {
	Mirror                               bool
	Magnification                        float64 // 0 and 1: no MAG record
	Angle                                float64
	AbsoluteMagnification, AbsoluteAngle bool
}
type PathStyle struct {
	Type          int16
	Width         int32
	Begin, Finish int32 // path type 4
}
type Writer struct{}

func NewWriter(w io.Writer, o WriterOptions) *Writer                                            { return &Writer{} }
func (w *Writer) BeginStructure(name string)                                                    {}
func (w *Writer) EndStructure()                                                                 {}
func (w *Writer) Flags(elflags uint16)                                                          {} // next element
func (w *Writer) Plex(plex int32)                                                               {} // next element
func (w *Writer) Property(attr int16, value string)                                             {} // next element
func (w *Writer) Boundary(layer LayerType, points []Point)                                      {} // without the closing point
func (w *Writer) Rectangle(layer LayerType, r Rect)                                             {}
func (w *Writer) Path(layer LayerType, style PathStyle, points []Point)                         {}
func (w *Writer) Box(layer LayerType, r Rect)                                                   {}
func (w *Writer) Node(layer LayerType, points []Point)                                          {}
func (w *Writer) Text(layer LayerType, at Point, text string)                                   {}
func (w *Writer) SRef(name string, s Strans, at Point)                                          {}
func (w *Writer) ARef(name string, s Strans, columns, rows uint16, at, columnEnd, rowEnd Point) {}
func (w *Writer) Record(kind Kind, data []byte)                                                 {}
func (w *Writer) Err() error                                                                    { return nil }
func (w *Writer) Close() error                                                                  { return errPending }
