// Package geom is plane geometry on whole numbers: what figures cover, whether two of them touch or are nearer than a
// spacing, and how much area a set of them covers.
//
// The idea: a figure takes one of three forms, and the cheapest that is exact wins. Outlines with axis-parallel edges
// become rectangles (Rectangles), and from there on all questions are comparisons of boxes. Paths become outlines
// (PathOutline). What has slanted edges keeps them (Polygon), cut into bands: small boxes that cover the filled area, each
// with the edges that cross it, so that a search by boxes finds the neighbours and a few exact tests on edges decide
// (BandRelation, BandRectRelation). Merged areas and merged outlines of whole shapes come from scan lines (AreaScratch,
// UnionAreaPolygons, Merge).
//
// Units are the caller's. A coordinate may be as large as Limit in either direction, which leaves room for half database
// units of a 32-bit plane after a shift. Floating point decides nothing: predicates use integers of 64, 128 or 256 bits
// (math/bits), with the bounds argued beside the code. Floats appear where a result is no whole number anyway: vertices of
// slanted paths before they are rounded, areas of slanted figures, distances for a report.
//
// A figure is a closed set: the closure of what its fill rule fills. Parts of an outline that enclose nothing (a line
// drawn there and back) are no part of the figure.
package geom
