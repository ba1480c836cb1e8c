package gds

import "strconv"

// This file is the one table of the format: every kind of record of the GDSII Stream Format Manual, release 6.0 (Calma,
// 1987), with its data type and, where it has one, its fixed length. All other files ask this table.

// Kind is the third byte of a record: what the record says.
type Kind uint8

// The kinds of records, named as in the manual.
const (
	HEADER       Kind = 0x00
	BGNLIB       Kind = 0x01
	LIBNAME      Kind = 0x02
	UNITS        Kind = 0x03
	ENDLIB       Kind = 0x04
	BGNSTR       Kind = 0x05
	STRNAME      Kind = 0x06
	ENDSTR       Kind = 0x07
	BOUNDARY     Kind = 0x08
	PATH         Kind = 0x09
	SREF         Kind = 0x0A
	AREF         Kind = 0x0B
	TEXT         Kind = 0x0C
	LAYER        Kind = 0x0D
	DATATYPE     Kind = 0x0E
	WIDTH        Kind = 0x0F
	XY           Kind = 0x10
	ENDEL        Kind = 0x11
	SNAME        Kind = 0x12
	COLROW       Kind = 0x13
	TEXTNODE     Kind = 0x14 // not used by the manual's release
	NODE         Kind = 0x15
	TEXTTYPE     Kind = 0x16
	PRESENTATION Kind = 0x17
	SPACING      Kind = 0x18 // discontinued
	STRING       Kind = 0x19
	STRANS       Kind = 0x1A
	MAG          Kind = 0x1B
	ANGLE        Kind = 0x1C
	UINTEGER     Kind = 0x1D // no longer used
	USTRING      Kind = 0x1E // no longer used
	REFLIBS      Kind = 0x1F
	FONTS        Kind = 0x20
	PATHTYPE     Kind = 0x21
	GENERATIONS  Kind = 0x22
	ATTRTABLE    Kind = 0x23
	STYPTABLE    Kind = 0x24 // unreleased
	STRTYPE      Kind = 0x25 // unreleased
	ELFLAGS      Kind = 0x26
	ELKEY        Kind = 0x27 // unreleased
	LINKTYPE     Kind = 0x28 // unreleased
	LINKKEYS     Kind = 0x29 // unreleased
	NODETYPE     Kind = 0x2A
	PROPATTR     Kind = 0x2B
	PROPVALUE    Kind = 0x2C
	BOX          Kind = 0x2D
	BOXTYPE      Kind = 0x2E
	PLEX         Kind = 0x2F
	BGNEXTN      Kind = 0x30
	ENDEXTN      Kind = 0x31
	TAPENUM      Kind = 0x32
	TAPECODE     Kind = 0x33
	STRCLASS     Kind = 0x34
	RESERVED     Kind = 0x35
	FORMAT       Kind = 0x36
	MASK         Kind = 0x37
	ENDMASKS     Kind = 0x38
	LIBDIRSIZE   Kind = 0x39
	SRFNAME      Kind = 0x3A
	LIBSECUR     Kind = 0x3B

	kinds = 0x3C // number of kinds; all fit the bits of a uint64
)

// DataType is the fourth byte of a record: how its data is to be read.
type DataType uint8

// The data types of the manual.
const (
	NoData   DataType = 0
	BitArray DataType = 1 // 16 bits
	Int2     DataType = 2 // two-byte integers
	Int4     DataType = 3 // four-byte integers
	Real4    DataType = 4 // not used by the manual's release
	Real8    DataType = 5 // excess-64 base-16 reals, see DecodeReal8
	ASCII    DataType = 6 // text, padded with NUL to an even length
)

// variable is the length of a record whose length the manual does not fix.
const variable = -1

// format is a row of the table.
type format struct {
	name   string
	data   DataType
	length int  // of the data, in bytes; variable where the manual fixes none
	old    bool // unreleased or no longer used: carried with any data type and length
}

// formats is the table; it is never written to.
var formats = [kinds]format{
	HEADER:       {"HEADER", Int2, 2, false},
	BGNLIB:       {"BGNLIB", Int2, 24, false},
	LIBNAME:      {"LIBNAME", ASCII, variable, false},
	UNITS:        {"UNITS", Real8, 16, false},
	ENDLIB:       {"ENDLIB", NoData, 0, false},
	BGNSTR:       {"BGNSTR", Int2, 24, false},
	STRNAME:      {"STRNAME", ASCII, variable, false},
	ENDSTR:       {"ENDSTR", NoData, 0, false},
	BOUNDARY:     {"BOUNDARY", NoData, 0, false},
	PATH:         {"PATH", NoData, 0, false},
	SREF:         {"SREF", NoData, 0, false},
	AREF:         {"AREF", NoData, 0, false},
	TEXT:         {"TEXT", NoData, 0, false},
	LAYER:        {"LAYER", Int2, 2, false},
	DATATYPE:     {"DATATYPE", Int2, 2, false},
	WIDTH:        {"WIDTH", Int4, 4, false},
	XY:           {"XY", Int4, variable, false},
	ENDEL:        {"ENDEL", NoData, 0, false},
	SNAME:        {"SNAME", ASCII, variable, false},
	COLROW:       {"COLROW", Int2, 4, false},
	TEXTNODE:     {"TEXTNODE", NoData, 0, true},
	NODE:         {"NODE", NoData, 0, false},
	TEXTTYPE:     {"TEXTTYPE", Int2, 2, false},
	PRESENTATION: {"PRESENTATION", BitArray, 2, false},
	SPACING:      {"SPACING", NoData, variable, true},
	STRING:       {"STRING", ASCII, variable, false},
	STRANS:       {"STRANS", BitArray, 2, false},
	MAG:          {"MAG", Real8, 8, false},
	ANGLE:        {"ANGLE", Real8, 8, false},
	UINTEGER:     {"UINTEGER", Int4, variable, true},
	USTRING:      {"USTRING", ASCII, variable, true},
	REFLIBS:      {"REFLIBS", ASCII, variable, false},
	FONTS:        {"FONTS", ASCII, variable, false},
	PATHTYPE:     {"PATHTYPE", Int2, 2, false},
	GENERATIONS:  {"GENERATIONS", Int2, 2, false},
	ATTRTABLE:    {"ATTRTABLE", ASCII, variable, false},
	STYPTABLE:    {"STYPTABLE", ASCII, variable, true},
	STRTYPE:      {"STRTYPE", Int2, variable, true},
	ELFLAGS:      {"ELFLAGS", BitArray, 2, false},
	ELKEY:        {"ELKEY", Int4, variable, true},
	LINKTYPE:     {"LINKTYPE", Int2, variable, true},
	LINKKEYS:     {"LINKKEYS", Int4, variable, true},
	NODETYPE:     {"NODETYPE", Int2, 2, false},
	PROPATTR:     {"PROPATTR", Int2, 2, false},
	PROPVALUE:    {"PROPVALUE", ASCII, variable, false},
	BOX:          {"BOX", NoData, 0, false},
	BOXTYPE:      {"BOXTYPE", Int2, 2, false},
	PLEX:         {"PLEX", Int4, 4, false},
	BGNEXTN:      {"BGNEXTN", Int4, 4, false},
	ENDEXTN:      {"ENDEXTN", Int4, 4, false},
	TAPENUM:      {"TAPENUM", Int2, 2, false},
	TAPECODE:     {"TAPECODE", Int2, 12, false},
	STRCLASS:     {"STRCLASS", BitArray, 2, false},
	RESERVED:     {"RESERVED", Int4, variable, true},
	FORMAT:       {"FORMAT", Int2, 2, false},
	MASK:         {"MASK", ASCII, variable, false},
	ENDMASKS:     {"ENDMASKS", NoData, 0, false},
	LIBDIRSIZE:   {"LIBDIRSIZE", Int2, 2, false},
	SRFNAME:      {"SRFNAME", ASCII, variable, false},
	LIBSECUR:     {"LIBSECUR", Int2, variable, false},
}

// String gives the name that the manual uses ("BGNLIB"), or the number of a kind that the manual does not know.
func (k Kind) String() string {
	if k < kinds {
		return formats[k].name
	}
	return "record 0x" + strconv.FormatUint(uint64(k), 16)
}

// Type gives the data type that the manual fixes for the kind.
func (k Kind) Type() DataType {
	if k < kinds {
		return formats[k].data
	}
	return NoData
}

// Length gives the number of data bytes that the manual fixes for the kind, and false where it fixes none.
func (k Kind) Length() (bytes int, fixed bool) {
	if k < kinds && formats[k].length != variable {
		return formats[k].length, true
	}
	return 0, false
}

// String gives the data type in words.
func (d DataType) String() string {
	switch d {
	case NoData:
		return "no data"
	case BitArray:
		return "bit array"
	case Int2:
		return "two-byte integer"
	case Int4:
		return "four-byte integer"
	case Real4:
		return "four-byte real"
	case Real8:
		return "eight-byte real"
	case ASCII:
		return "text"
	}
	return "data type " + strconv.Itoa(int(d))
}

// bit is the bit of the kind in a set of kinds.
func (k Kind) bit() uint64 { return 1 << (k & 63) }
