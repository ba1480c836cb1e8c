// Package gds reads, indexes and copies layouts in the GDSII stream format.
//
// The idea: a stream is gone through twice and never held. The first pass ([Index], over [Scanner]) checks the grammar of
// the whole file and keeps only what the caller is interested in: the figures of a few layers, every reference, a checksum
// and the place of each structure. The second pass ([CopyStream]) copies the stream in large blocks and changes what a
// [Plan] says: layers of figures, names of references, structures written several times over. What a plan does not touch
// comes out byte for byte.
//
// The format is that of the GDSII Stream Format Manual, release 6.0 (Calma, 1987). Real files stray from it, and where the
// meaning is certain so does this package:
//
//   - zero padding after ENDLIB, of any length; any version in HEADER;
//   - layers, datatypes and texttypes to 65535, read as unsigned; columns and rows of an array likewise;
//   - XY as one record of up to 65535 bytes, or as several in a row, for BOUNDARY, PATH and NODE;
//   - strings padded with any number of NULs; names of any bytes;
//   - a BOUNDARY that is not closed: its last point is joined to its first;
//   - the records between the start of an element and its XY in any order; MAG and ANGLE without STRANS;
//   - references to structures that are not in the file; several structures that nothing places;
//   - records that the manual calls unreleased or no longer used: carried, not understood.
//
// Refused, with a [SyntaxError] that names the place: a cut off file, a record that is no part of the grammar or stands
// where it must not, a data type or length against the table of records, data behind ENDLIB that is not zero, a structure
// defined twice, a magnification that is not above zero, an array without columns or rows.
//
// Package gds knows nothing of masks or spacings. It prints nothing.
package gds
