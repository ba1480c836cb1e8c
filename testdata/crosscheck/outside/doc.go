// Package outside lets tests ask judges that this project did not write and that are not written in Go: Python scripts over
// Debian's packages, and small C++ programs over Debian's libraries.
//
// A question goes in as JSON on standard input, an answer comes out as JSON on standard output. Packages that are not there
// are installed with apt-get, so that no check has to be skipped.
package outside
