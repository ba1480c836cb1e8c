// Package session holds README to what it shows: its test runs the commands of the terminal sessions in a shell and compares what they
// print, line by line, and follows the links of all pages.
package session
