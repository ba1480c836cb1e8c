// Package survey tells what a layout holds, before anyone has written a deck for it.
//
// The idea: a user who meets a layout asks two things. Which layers are in it, how much is on each, and how wide is it drawn
// ([Scan]: one pass over the records, counting per structure, multiplied by placements at the end; no figure is kept). And how
// near do the figures of one layer come, so that a spacing can be chosen ([Gaps]: the layer is searched with one candidate
// spacing after the other; pairs can only be gained as the spacing grows, so equal counts on both sides of a stretch settle all
// spacings in it).
//
// Counts of placements are kept in uint64 and stop at [Most]: a bomb of nested arrays is told by a number, not by waiting.
package survey
