// Package geometry holds distance, touch and area as package decompose/geom sees them against simplefeatures, a library for
// simple feature geometry (github.com/peterstace/simplefeatures v0.50.0, Go, its own algorithms throughout).
//
// The judge computes with float64. So it is asked about figures whose coordinates are within 150 of the origin, where its
// answers leave no doubt, while the package under test gets the same figures moved to the ends of the plane, turned,
// mirrored, or blown up by a power of two: distances do not change by that, or just by that power. In a second test the judge
// gets coordinates of the whole 32-bit plane, and close calls are left out.
package geometry
