// Package facing judges how near two shapes are by what faces what: side by side, tip against side, tip against tip, corner against
// corner, and wide parts apart from narrow ones.
//
// The idea: a rule that looks at edges must look at those that are there when all figures of a shape have been joined. A Shape is such
// an outline, in pieces that say what they are; two shapes are then compared place by place where they come near to each other, and
// each place is judged by its own rule. There are three sorts of places:
//
//   - Two axis-parallel edges face each other: each lies on the outer side of the other, and their projections overlap by more than 0.
//     They are apart by the gap between them. An edge of at most Rules.TipWidth between two convex corners is a tip, any other a side.
//   - Two convex corners of right angles face each other: each lies in the outer quarter of the other, so that no projections overlap.
//     They are apart by their Euclidean distance.
//   - Any other place where the outlines come nearest, in that each point there is the nearest one to the other among its neighbours on
//     its own outline. A slanted edge takes part in it, by a point within it or by a corner. The distance is Euclidean.
//
// Nothing shields: what lies between the two places, of whatever shape, does not count. The shapes are near if any place is nearer
// than its rule asks for.
//
// All decisions are made on whole numbers and exact fractions; floating point appears in distances that are reported. Coordinates
// are at most geom.Limit, spacings and widths below 2^32, and shapes do not touch each other.
package facing
