// Package picture draws a small layout for a person: as SVG for a browser, or in letters for a terminal.
//
// The idea: all placements are followed, so a picture is for layouts of some thousand figures, as in examples. Masks are told
// apart by hatching and letters, and by colour only besides. Figures are BOUNDARY elements; a PATH is refused. Only placements by
// quarter turns are followed.
package picture
