// Package stitch finds where a shape can be cut into overlapping pieces on opposite masks. It knows one shape, what is near to it, and
// the rules of stitches; which cuts are worth making is decided elsewhere.
//
// A wire is a stretch of the shape with one cross-section: within it the shape is a rectangle with nothing else of the shape beside
// it. Each neighbour, grown by the spacing, covers a part of the wire; what is left uncovered, and clear of keep-out figures, can hold
// the overlap of two pieces, because no neighbour then is near to it on either mask (projection of neighbours, as in Kahng, Park, Xu
// and Yao, ICCAD 2008). The cut lies centred in each such part. It must part the shape in two: a cut of a ring, which hangs together
// the other way round, is no candidate.
package stitch
