package gds

import "testing"

// manual is the record table of the GDSII Stream Format Manual, release 6.0 (Calma, 1987): number, name, data type. Typed
// from memory, apart from the table in record.go.
var manual = []struct {
	kind uint8
	name string
	data uint8
}{
	{0x00, "HEADER", 2}, {0x01, "BGNLIB", 2}, {0x02, "LIBNAME", 6}, {0x03, "UNITS", 5}, {0x04, "ENDLIB", 0},
	{0x05, "BGNSTR", 2}, {0x06, "STRNAME", 6}, {0x07, "ENDSTR", 0}, {0x08, "BOUNDARY", 0}, {0x09, "PATH", 0},
	{0x0A, "SREF", 0}, {0x0B, "AREF", 0}, {0x0C, "TEXT", 0}, {0x0D, "LAYER", 2}, {0x0E, "DATATYPE", 2},
	{0x0F, "WIDTH", 3}, {0x10, "XY", 3}, {0x11, "ENDEL", 0}, {0x12, "SNAME", 6}, {0x13, "COLROW", 2},
	{0x14, "TEXTNODE", 0}, {0x15, "NODE", 0}, {0x16, "TEXTTYPE", 2}, {0x17, "PRESENTATION", 1}, {0x18, "SPACING", 0},
	{0x19, "STRING", 6}, {0x1A, "STRANS", 1}, {0x1B, "MAG", 5}, {0x1C, "ANGLE", 5}, {0x1D, "UINTEGER", 3},
	{0x1E, "USTRING", 6}, {0x1F, "REFLIBS", 6}, {0x20, "FONTS", 6}, {0x21, "PATHTYPE", 2}, {0x22, "GENERATIONS", 2},
	{0x23, "ATTRTABLE", 6}, {0x24, "STYPTABLE", 6}, {0x25, "STRTYPE", 2}, {0x26, "ELFLAGS", 1}, {0x27, "ELKEY", 3},
	{0x28, "LINKTYPE", 2}, {0x29, "LINKKEYS", 3}, {0x2A, "NODETYPE", 2}, {0x2B, "PROPATTR", 2}, {0x2C, "PROPVALUE", 6},
	{0x2D, "BOX", 0}, {0x2E, "BOXTYPE", 2}, {0x2F, "PLEX", 3}, {0x30, "BGNEXTN", 3}, {0x31, "ENDEXTN", 3},
	{0x32, "TAPENUM", 2}, {0x33, "TAPECODE", 2}, {0x34, "STRCLASS", 1}, {0x35, "RESERVED", 3}, {0x36, "FORMAT", 2},
	{0x37, "MASK", 6}, {0x38, "ENDMASKS", 0}, {0x39, "LIBDIRSIZE", 2}, {0x3A, "SRFNAME", 6}, {0x3B, "LIBSECUR", 2},
}

func TestRecordTable(t *testing.T) {
	if len(manual) != kinds {
		t.Fatalf("the manual has %d records, the table %d", len(manual), kinds)
	}
	for _, m := range manual {
		k := Kind(m.kind)
		if k.String() != m.name || k.Type() != DataType(m.data) {
			t.Errorf("record 0x%02X is %v with data type %d, not %s with %d", m.kind, k, k.Type(), m.name, m.data)
		}
	}
	// Fixed lengths, in bytes of data; from memory as well.
	lengths := map[Kind]int{HEADER: 2, BGNLIB: 24, UNITS: 16, BGNSTR: 24, LAYER: 2, DATATYPE: 2, WIDTH: 4, COLROW: 4,
		TEXTTYPE: 2, PRESENTATION: 2, STRANS: 2, MAG: 8, ANGLE: 8, PATHTYPE: 2, GENERATIONS: 2, ELFLAGS: 2, NODETYPE: 2,
		PROPATTR: 2, BOXTYPE: 2, PLEX: 4, BGNEXTN: 4, ENDEXTN: 4, TAPENUM: 2, TAPECODE: 12, STRCLASS: 2, FORMAT: 2,
		LIBDIRSIZE: 2}
	for k := range Kind(kinds) {
		want, fixed := lengths[k]
		if k.Type() == NoData && k != SPACING {
			want, fixed = 0, true
		}
		if got, ok := k.Length(); got != want || ok != fixed {
			t.Errorf("%v has length %d (fixed: %v), not %d (%v)", k, got, ok, want, fixed)
		}
	}
	if got := Kind(0x3C).String(); got != "record 0x3c" {
		t.Errorf("a kind that the manual does not know is called %q", got)
	}
	if _, fixed := Kind(200).Length(); fixed || Kind(200).Type() != NoData {
		t.Error("a kind that the manual does not know has a length or a data type")
	}
}
