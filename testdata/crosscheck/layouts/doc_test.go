// Package layouts holds what the program reports and writes against scripts over gdspy 1.4.2 (reading and flattening),
// shapely 1.8.5 over GEOS (touch and distance) and networkx 2.8.8 (shapes, components, bipartite), all of Debian 12; the
// near-pair graph that they find is judged again by gonum v0.17.0, and its optimum by HiGHS through scipy 1.10.1.
//
// The layouts are open ones (see ../../open and the licences there) and random ones. The program runs as a user runs it; the
// scripts share no code with it.
package layouts
