// Package anchor turns what the user, the layout itself and an earlier result say into orders: this shape is on A, these two alike,
// this one was on B. It solves nothing; package decompose keeps the orders.
package anchor
