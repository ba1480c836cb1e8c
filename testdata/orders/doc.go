// Package orders makes anchor files, markers and edits at random, for tests.
//
// The idea: what is ordered must not contradict itself, or there would be no result to look at. So every order is checked against those
// before it, on shapes that are a little coarser than the real ones (boxes that touch are one), by a union-find with parity. Orders may
// well clash over near pairs; that is what the tests are about. One seed gives the same orders again.
//
// [Generate] makes an anchor file for a stream, [Edit] changes a layout as an engineer would in a week: it moves, deletes, adds and
// swaps. The command in generate writes both to files.
//
// The package is for tests alone.
package orders
