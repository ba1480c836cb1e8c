// Package cli is the command line of maskpair: options, outputs, progress, messages and exit statuses.
//
// The idea: a command first checks all that can be checked without the layout (options, deck, paths), then runs the stages
// of the packages below with a context that a signal ends, then puts its files in place, whole or not at all. Only this
// package prints, and only here an error becomes an exit status (status.go).
package cli
