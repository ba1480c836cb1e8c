// Package open holds open layouts, compressed, each with its licence, and a test that the program counts in them what independent
// checkers counted (cases.tsv). Where they come from is told in testdata/README.md.
package open
