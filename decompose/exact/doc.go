// Package exact finds the cheapest assignment of two masks to the nodes of one weighted graph.
//
// An edge asks that its two nodes be on opposite masks, or on the same one, and costs its weight when it is broken; nodes may be held on a mask or cost something on
// one. The package knows nothing of layouts: several aims in order are packed into the weights by the caller.
//
// # Idea
//
// A graph whose wishes do not contradict each other round any cycle is settled in linear time (König 1936 for edges of the opposite kind alone: two masks suffice
// exactly when no cycle is odd). What remains is made smaller by steps that lose no optimum, cut into biconnected blocks (Hopcroft and Tarjan, Efficient algorithms for
// graph manipulation, 1973), and each block is solved by variable elimination (Dechter, Bucket elimination, 1999) in min-fill order. That is exact, and takes time and
// memory exponential in the elimination width alone, so a block is eliminated only when its tables, counted beforehand, fit the budget.
//
// A block beyond the budget gets the best assignment that a search finds, and a lower bound, which is the sum of the exact optima of parts of the graph among which the
// weights are shared out. Where the two numbers meet, the assignment is proved after all; where not, Solution.Proved is false.
//
// # Promises
//
// The budget counts work and bytes, never time, and nothing depends on chance: one problem with one budget always gets the same Solution. Solve runs in the calling
// goroutine, keeps nothing between calls, and may run in several goroutines at once.
package exact
