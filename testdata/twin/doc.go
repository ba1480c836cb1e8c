// Package twin decomposes small layouts by brute force, so that tests have something to hold the program against.
//
// The idea: everything is done in the plainest way that the contract allows, with exact fractions, and without a line of
// the program's own geometry or solving. A layout is a value of a few structures. It is flattened element by element,
// every outline is cut at all its crossings, every figure is measured against every other, and every assignment of masks
// is tried. Streams are written with gds.Writer, which the program never uses for its output, and read with a record
// reader of this package.
//
// [Random] makes layouts and decks, [Solve] gives what must come out, [Solution.Check] judges an output stream and
// [Solution.CheckReport] the report about it. A layout whose outcome the contract leaves open (a coordinate that must be
// rounded from the middle between two units, for one) is said to be open in Solution.Open, and is only judged by what
// holds in any case.
//
// What the contract does not say and what is taken from elsewhere: how a slanted path turns a corner and rounds its ends
// (see path.go), and that an array whose span is no multiple of its count places its elements on the nearest unit.
//
// The package is for tests alone.
package twin
