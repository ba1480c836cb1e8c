// Package verify judges a stream whose figures are on two masks: a second pair of eyes.
//
// The idea: nothing of what made the masks is trusted, and nothing of it is used. The masked stream is read anew, flattened by
// code of this package, and its figures are put together again: figures that touch are a shape, figures of one mask that touch
// are a piece. From these follow the answers: is each shape on one mask or stitched by the rules, are pieces on one mask as far
// apart as the deck wants, are the orders held. With the layout as it was drawn, two things more are proved, each without the
// other: that flat, per top, the two masks cover exactly what was drawn, and that the two streams are the same record by record
// but for what masks need: layers of figures, variants of structures, split arrays, pieces of figures that are cut, marks.
//
// With the rest of the program it shares the records of package gds, the deck and the anchor file as read, and the predicates
// of package geom. Its flattening, its search for neighbours, its shapes and its orders are its own. So a fault in one is
// hardly the same fault in the other.
//
// All coordinates here are half database units of a top, so that the sides of a path of odd width are whole numbers; with a
// 32-bit plane they stay within 2^32. Nothing here is floating point but places of figures under odd angles or fractional
// magnifications before they are rounded, and distances in messages.
//
// What it does not say: whether another choice of masks would leave fewer pairs; a pair that is too near is a fault, needed or
// not. Whether variants are as few as can be, or marks at their places, is not judged either.
package verify
