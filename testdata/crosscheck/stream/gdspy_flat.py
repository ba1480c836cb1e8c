#!/usr/bin/python3
"""Layouts flattened by gdspy.

In:  a list of paths of streams with one top each.
Out: for each {"layer/type": [polygon, ...]} in gdspy's order: own polygons, then references in turn, arrays column by
     column; a polygon is a list of points in database units, unrounded.
"""
import json
import sys

import gdspy


def main():
    answers = []
    for path in json.load(sys.stdin):
        lib = gdspy.GdsLibrary(infile=path, units="import")
        (top,) = lib.top_level()
        scale = lib.unit / lib.precision
        answers.append({"%d/%d" % key: [(ring * scale).tolist() for ring in rings] for key, rings in top.get_polygons(by_spec=True).items()})
    json.dump(answers, sys.stdout)


main()
