// Package stream holds package gds against outside sources on the stream format.
//
//   - the GDSII Stream Format Manual, release 6.0 (Calma, documentation B97E060, February 1987): its tables and rules, typed
//     in here. No copy with page numbers could be consulted, so places are named by section: 2 record description, 3 data
//     types, 4 record types, 5 stream syntax. What is marked "from memory" was recalled, not read.
//   - gdspy 1.4.2 (python3-gdspy of Debian 12): a general reader and writer of the format.
//   - libGDSII 0.2 (libgdsii-dev of Debian 12): a C++ reader of the format; libgdsii/dump.cc prints what it reads.
package stream
