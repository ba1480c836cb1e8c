package stream

import (
	"bytes"
	"encoding/binary"
	"encoding/hex"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"maskpair/gds"
	"maskpair/testdata/crosscheck/outside"
)

// This file is what the manual says, typed in.

// manualRecords are the records of section 4, each with the number the manual prints behind its name: kind and data type in
// hexadecimal. The numbers are from memory; they agree with the public list of tags of python-gdsii (documentation of
// gdsii.tags), and the names with the table in gdspy 1.4.2, which TestRecordNamesAgainstGdspy reads. bytes is the length of
// the data where section 4 fixes it by words, else -1.
var manualRecords = []struct {
	name   string
	number uint16
	bytes  int
}{
	{"HEADER", 0x0002, 2},       // two-byte integer: the version
	{"BGNLIB", 0x0102, 24},      // last modification and last access, six two-byte integers each
	{"LIBNAME", 0x0206, -1},     //
	{"UNITS", 0x0305, 16},       // two eight-byte reals
	{"ENDLIB", 0x0400, 0},       //
	{"BGNSTR", 0x0502, 24},      // creation and last modification
	{"STRNAME", 0x0606, -1},     // up to 32 characters
	{"ENDSTR", 0x0700, 0},       //
	{"BOUNDARY", 0x0800, 0},     //
	{"PATH", 0x0900, 0},         //
	{"SREF", 0x0A00, 0},         //
	{"AREF", 0x0B00, 0},         //
	{"TEXT", 0x0C00, 0},         //
	{"LAYER", 0x0D02, 2},        //
	{"DATATYPE", 0x0E02, 2},     //
	{"WIDTH", 0x0F03, 4},        // negative: absolute
	{"XY", 0x1003, -1},          // pairs of four-byte integers
	{"ENDEL", 0x1100, 0},        //
	{"SNAME", 0x1206, -1},       //
	{"COLROW", 0x1302, 4},       // columns, then rows
	{"NODE", 0x1500, 0},         //
	{"TEXTTYPE", 0x1602, 2},     //
	{"PRESENTATION", 0x1701, 2}, //
	{"STRING", 0x1906, -1},      // up to 512 characters
	{"STRANS", 0x1A01, 2},       //
	{"MAG", 0x1B05, 8},          //
	{"ANGLE", 0x1C05, 8},        //
	{"REFLIBS", 0x1F06, -1},     // names of 44 bytes each
	{"FONTS", 0x2006, -1},       // four names of 44 bytes
	{"PATHTYPE", 0x2102, 2},     //
	{"GENERATIONS", 0x2202, 2},  //
	{"ATTRTABLE", 0x2306, -1},   // up to 44 bytes
	{"ELFLAGS", 0x2601, 2},      //
	{"NODETYPE", 0x2A02, 2},     //
	{"PROPATTR", 0x2B02, 2},     //
	{"PROPVALUE", 0x2C06, -1},   // up to 126 characters
	{"BOX", 0x2D00, 0},          //
	{"BOXTYPE", 0x2E02, 2},      //
	{"PLEX", 0x2F03, 4},         //
	{"BGNEXTN", 0x3003, 4},      // path type 4
	{"ENDEXTN", 0x3103, 4},      //
	{"TAPENUM", 0x3202, 2},      //
	{"TAPECODE", 0x3302, 12},    // six two-byte integers
	{"STRCLASS", 0x3401, 2},     //
	{"FORMAT", 0x3602, 2},       //
	{"MASK", 0x3706, -1},        //
	{"ENDMASKS", 0x3800, 0},     //
	{"LIBDIRSIZE", 0x3902, 2},   //
	{"SRFNAME", 0x3A06, -1},     //
	{"LIBSECUR", 0x3B02, -1},    // up to 32 entries of three two-byte integers
	{"TEXTNODE", 0x1400, 0},     // not used
	{"STYPTABLE", 0x2406, -1},   // unreleased
	{"STRTYPE", 0x2502, -1},     // unreleased
	{"ELKEY", 0x2703, -1},       // unreleased
}

func TestRecordTableAgainstManual(t *testing.T) {
	for _, r := range manualRecords {
		k := gds.Kind(r.number >> 8)
		if k.String() != r.name {
			t.Errorf("record %02X is called %v, in the manual %s", r.number>>8, k, r.name)
		}
		if got := k.Type(); got != gds.DataType(r.number&0xFF) {
			t.Errorf("%s has data type %d (%v), in the manual %d", r.name, got, got, r.number&0xFF)
		}
		switch length, fixed := k.Length(); {
		case r.bytes >= 0 && (!fixed || length != r.bytes):
			t.Errorf("%s has %d bytes of data (fixed: %v), in the manual %d", r.name, length, fixed, r.bytes)
		case r.bytes < 0 && fixed:
			t.Errorf("%s has a fixed length of %d bytes; in the manual it varies", r.name, length)
		}
	}
	if gds.NoData != 0 || gds.BitArray != 1 || gds.Int2 != 2 || gds.Int4 != 3 || gds.Real4 != 4 || gds.Real8 != 5 || gds.ASCII != 6 {
		t.Error("the data types are not numbered as in table 3-1")
	}
}

func TestRecordNamesAgainstGdspy(t *testing.T) {
	outside.Packages(t, "python3-gdspy")
	names := outside.Ask[string, []string](t, "gdspy_names.py", "")
	if len(names) != 0x3C {
		t.Fatalf("gdspy knows %d records, not 0x3C", len(names))
	}
	for i, name := range names {
		if name == "ENDTEXTN" {
			name = "ENDEXTN" // a slip of gdspy; the manual has ENDEXTN
		}
		if got := gds.Kind(i).String(); got != name {
			t.Errorf("record %02X is called %s, by gdspy %s", i, got, name)
		}
	}
}

// TestRealsAgainstManual has values of eight-byte reals: the first rows are the examples of section 3 (printed there for
// four-byte reals, whose mantissa is the upper half; from memory), those of UNITS are in every file with nanometres.
func TestRealsAgainstManual(t *testing.T) {
	for _, r := range []struct {
		bits  uint64
		value float64
	}{
		{0x4110000000000000, 1},
		{0x4120000000000000, 2},
		{0x4130000000000000, 3},
		{0xC110000000000000, -1},
		{0xC120000000000000, -2},
		{0xC130000000000000, -3},
		{0x4080000000000000, 0.5},
		{0x4118000000000000, 1.5},
		{0x0000000000000000, 0},
		{0x41A0000000000000, 10},
		{0x4264000000000000, 100},
		{0x433E800000000000, 1000},
		{0x4427100000000000, 10000},
		{0x45186A0000000000, 100000},
		{0x425A000000000000, 90},  // ANGLE of a quarter turn: 0x5A = 90
		{0x42B4000000000000, 180}, // 0xB4 = 180
		{0x4310E00000000000, 270}, // 0x10E = 270
		{0x3E4189374BC6A7F0, 1e-3},
		{0x3944B82FA09B5A54, 1e-9},
	} {
		var b [8]byte
		binary.BigEndian.PutUint64(b[:], r.bits)
		if got := gds.DecodeReal8(b[:]); got != r.value {
			t.Errorf("%016X is read as %.17g, not %.17g", r.bits, got, r.value)
		}
		if got, ok := gds.EncodeReal8(r.value); !ok || got != b {
			t.Errorf("%.17g is written as %X, not %016X", r.value, got, r.bits)
		}
	}
}

// realBits is a random real of the format: any sign, exponent and mantissa, zeros at the top of the mantissa included.
func realBits(rng *rand.Rand) uint64 {
	v := rng.Uint64()
	switch rng.IntN(4) {
	case 0: // an unnormalised mantissa
		v &^= (1<<rng.IntN(56) - 1) << 8 & (1<<56 - 1)
	case 1: // a short one
		v = v >> 60 << 60 & v >> rng.IntN(50) << rng.IntN(50)
	case 2: // the exponents of layouts
		v = v&^(0x7F<<56) | uint64(56+rng.IntN(16))<<56
	}
	return v
}

func TestRealsAgainstGdspy(t *testing.T) {
	type answer struct {
		Values  []float64 // of the reals asked for
		Written []string  // the floats asked for, as reals, in hexadecimal
	}
	type question struct {
		Reals  []string
		Floats []float64
	}
	rng := rand.New(rand.NewPCG(31, 1))
	var q question
	for range 20000 {
		var b [8]byte
		binary.BigEndian.PutUint64(b[:], realBits(rng))
		q.Reals = append(q.Reals, hex.EncodeToString(b[:]))
		f := math.Ldexp(rng.Float64(), rng.IntN(120)-60)
		if rng.IntN(2) == 0 {
			f = -f
		}
		if rng.IntN(3) == 0 { // short decimal numbers, as in real files
			f = math.Round(f*1000) / 1000
		}
		q.Floats = append(q.Floats, f)
	}
	outside.Packages(t, "python3-gdspy")
	a := outside.Ask[question, answer](t, "gdspy_reals.py", q)
	for i, text := range q.Reals {
		b, _ := hex.DecodeString(text)
		// gdspy divides the mantissa by 2^56 and multiplies by a power of 16, which are exact after the one rounding to a float.
		if got := gds.DecodeReal8(b); got != a.Values[i] {
			t.Fatalf("%s is read as %.17g, by gdspy as %.17g", text, got, a.Values[i])
		}
	}
	for i, f := range q.Floats {
		b, ok := gds.EncodeReal8(f)
		if got := hex.EncodeToString(b[:]); !ok || got != a.Written[i] {
			// Just below a power of 16 gdspy's logarithm rounds up, and the mantissa has one zero digit more: the same value.
			judge, _ := hex.DecodeString(a.Written[i])
			if gds.DecodeReal8(judge) != f {
				t.Fatalf("%.17g is written as %s, by gdspy as %s", f, got, a.Written[i])
			}
		}
		if got := gds.DecodeReal8(b[:]); got != f {
			t.Fatalf("%.17g is written as %X, which is %.17g", f, b, got)
		}
	}
}

// TestStringsAgainstManual: a string of odd length is padded with a NUL, which counts in the length of the record and does
// not belong to the string (sections 3 and 4).
func TestStringsAgainstManual(t *testing.T) {
	for _, r := range []struct{ name, record string }{
		{"A", "0006 0606 4100"},
		{"AB", "0006 0606 4142"},
		{"ABC", "0008 0606 41424300"},
		{"a_b$c?9", "000C 0606 615F6224633F3900"},
		{strings.Repeat("x", 32), "0024 0606 " + strings.Repeat("78", 32)}, // the manual's longest name
	} {
		want := unhex(t, r.record)
		var buf bytes.Buffer
		w := gds.NewWriter(&buf, gds.WriterOptions{})
		w.BeginStructure(r.name)
		w.EndStructure()
		if err := w.Close(); err != nil {
			t.Fatal(err)
		}
		if !bytes.Contains(buf.Bytes(), want) {
			t.Errorf("the name %q is not written as %X", r.name, want)
		}
		lib, err := gds.Index(&buf, -1, gds.Interest{}, nil)
		if err != nil || len(lib.Structures) != 1 || lib.Structures[0].Name != r.name {
			t.Errorf("the name %q is read as %+v (%v)", r.name, lib, err)
		}
	}
}

func unhex(t testing.TB, text string) []byte {
	t.Helper()
	b, err := hex.DecodeString(strings.Join(strings.Fields(text), ""))
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// handStream is a stream typed byte by byte after the syntax of section 5: every kind of element, with the optional records.
const handStream = `
	0006 0002 0258                                             HEADER 600
	001C 0102 07C3 0001 0002 0003 0004 0005 07C3 0001 0002 0003 0004 0005   BGNLIB
	0008 0206 4C494200                                         LIBNAME "LIB"
	0014 0305 3E4189374BC6A7F0 3944B82FA09B5A54                UNITS 0.001 1e-9
	001C 0502 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000   BGNSTR
	0008 0606 43454C4C                                         STRNAME "CELL"
	0004 0800                                                  BOUNDARY
	0006 2601 0001                                             ELFLAGS template data
	0008 2F03 00000007                                         PLEX 7
	0006 0D02 0013                                             LAYER 19
	0006 0E02 0000                                             DATATYPE 0
	0024 1003 00000000 00000000 FFFFFF9C 00000000 00000000 00000064 00000000 00000000   XY triangle
	0006 2B02 0001                                             PROPATTR 1
	0008 2C06 6162 6300                                        PROPVALUE "abc"
	0004 1100                                                  ENDEL
	0004 0900                                                  PATH
	0006 0D02 0013                                             LAYER 19
	0006 0E02 0000                                             DATATYPE 0
	0006 2102 0004                                             PATHTYPE 4
	0008 0F03 FFFFFFEC                                         WIDTH -20, absolute
	0008 3003 0000000A                                         BGNEXTN 10
	0008 3103 FFFFFFFB                                         ENDEXTN -5
	0014 1003 00000000 00000000 000000C8 00000000              XY
	0004 1100                                                  ENDEL
	0004 0C00                                                  TEXT
	0006 0D02 0013                                             LAYER 19
	0006 1602 000A                                             TEXTTYPE 10
	0006 1701 0005                                             PRESENTATION
	0006 1A01 8000                                             STRANS reflected
	000C 1B05 4120000000000000                                 MAG 2
	000C 1C05 425A000000000000                                 ANGLE 90
	000C 1003 00000005 00000006                                XY
	0006 1906 4100                                             STRING "A"
	0004 1100                                                  ENDEL
	0004 1500                                                  NODE
	0006 0D02 0013                                             LAYER 19
	0006 2A02 0000                                             NODETYPE 0
	000C 1003 00000001 00000001                                XY
	0004 1100                                                  ENDEL
	0004 2D00                                                  BOX
	0006 0D02 0013                                             LAYER 19
	0006 2E02 0000                                             BOXTYPE 0
	002C 1003 00000000 00000000 0000000A 00000000 0000000A 0000000A 00000000 0000000A 00000000 00000000   XY
	0004 1100                                                  ENDEL
	0004 0700                                                  ENDSTR
	001C 0502 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000 0000   BGNSTR
	0008 0606 544F5000                                         STRNAME "TOP"
	0004 0A00                                                  SREF
	0008 1206 43454C4C                                         SNAME "CELL"
	0006 1A01 8006                                             STRANS reflected, absolute magnification and angle
	000C 1B05 4080000000000000                                 MAG 0.5
	000C 1C05 4310E00000000000                                 ANGLE 270
	000C 1003 FFFFFFFF 00000002                                XY
	0004 1100                                                  ENDEL
	0004 0B00                                                  AREF
	0008 1206 43454C4C                                         SNAME "CELL"
	0006 1A01 0000                                             STRANS
	000C 1C05 425A000000000000                                 ANGLE 90
	0008 1302 0003 0002                                        COLROW 3 columns, 2 rows
	001C 1003 0000000A 00000014 0000000A 00000140 FFFFFF42 00000014   XY origin, end of columns, end of rows
	0004 1100                                                  ENDEL
	0004 0700                                                  ENDSTR
	0004 0400                                                  ENDLIB
`

// typed gives the bytes of handStream: the groups of hexadecimal digits at the start of each line.
func typed(t testing.TB) []byte {
	t.Helper()
	var out []byte
	for line := range strings.Lines(handStream) {
		data, _, _ := strings.Cut(strings.TrimSpace(line), "   ")
		out = append(out, unhex(t, data)...)
	}
	return out
}

func TestHandStream(t *testing.T) {
	stream := typed(t)
	want := gds.Interest{Figures: map[gds.LayerType]uint8{{Layer: 19}: 1}, Labels: map[gds.LayerType]uint8{{Layer: 19, Type: 10}: 1}}
	lib, err := gds.Index(bytes.NewReader(stream), -1, want, nil)
	if err != nil {
		t.Fatal(err)
	}
	if lib.UserUnit != 1e-3 || lib.DBU != 1e-9 || len(lib.Structures) != 2 || lib.Structures[0].Name != "CELL" || lib.Structures[1].Name != "TOP" {
		t.Errorf("library %g %g, structures %+v", lib.UserUnit, lib.DBU, lib.Structures)
	}
	if len(lib.Figures) != 2 || len(lib.Outlines) != 2 {
		t.Fatalf("figures %+v, outlines %+v", lib.Figures, lib.Outlines)
	}
	if o := lib.Outlines[0]; o.Path || o.Count != 3 || lib.Points[o.First+1] != (gds.Point{X: -100}) {
		t.Errorf("boundary %+v %v", o, lib.Points)
	}
	if o := lib.Outlines[1]; !o.Path || o.PathType != 4 || o.Width != -20 || o.Begin != 10 || o.Finish != -5 || o.Count != 2 {
		t.Errorf("path %+v", o)
	}
	if len(lib.Labels) != 1 || lib.Labels[0].Text != "A" || lib.Labels[0].At != (gds.Point{X: 5, Y: 6}) {
		t.Errorf("labels %+v", lib.Labels)
	}
	if lib.Boxes[gds.LayerType{Layer: 19}] != 1 {
		t.Errorf("boxes %v", lib.Boxes)
	}
	// STRANS (section 4): bit 0, the leftmost, is reflection, bit 13 absolute magnification, bit 14 absolute angle; reflection
	// about the x axis comes before the turn, which is counter-clockwise and in degrees.
	p := lib.PlacementOf(&lib.Refs[0])
	if p == nil || !p.Mirror || p.Magnification != 0.5 || p.Angle != 270 || !p.AbsoluteMagnification || !p.AbsoluteAngle || lib.Refs[0].At != (gds.Point{X: -1, Y: 2}) {
		t.Fatalf("SREF %+v %+v", lib.Refs[0], p)
	}
	// COLROW and XY of an AREF (section 4): the second point is the origin displaced by columns times the column spacing, the
	// third by rows times the row spacing.
	a := &lib.Refs[1]
	p = lib.PlacementOf(a)
	if p == nil || !a.Array || p.Columns != 3 || p.Rows != 2 || p.Angle != 90 || p.Mirror {
		t.Fatalf("AREF %+v %+v", a, p)
	}
	if l := lib.Lattice(a); l.ColumnX != 0 || l.ColumnY != 100 || l.RowX != -100 || l.RowY != 0 {
		t.Errorf("lattice %+v", l)
	}
	x, y := gds.Compose(gds.Identity(), a, p, 2, 1).Apply(7, 0) // a quarter turn takes (7, 0) to (0, 7)
	if x != 10-100 || y != 20+200+7 {
		t.Errorf("element (2, 1) places (7, 0) at (%d, %d)", x, y)
	}
	var out bytes.Buffer
	if err := gds.CopyStream(&out, bytes.NewReader(stream), lib, want, gds.Plan{}, nil); err != nil || !bytes.Equal(out.Bytes(), stream) {
		t.Errorf("the copy differs (%v)", err)
	}
	for cut := range len(stream) {
		var fault *gds.SyntaxError
		if _, err := gds.Index(bytes.NewReader(stream[:cut]), -1, want, nil); !errors.As(err, &fault) {
			t.Fatalf("cut off after %d bytes: %v", cut, err)
		}
	}
}
