// Package session holds the terminal sessions in README to what the program prints: its test runs their commands in a shell and compares
// what comes out, line by line.
package session
