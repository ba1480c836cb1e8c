#!/usr/bin/python3
"""Outlines of paths against those of gdspy, compared by GEOS through shapely.

In:  {"Path": a stream with one structure and a user unit of one database unit, "Outlines": for each of its paths the outline
     [[x, y], ...] in database units}.
Out: for each path {"Area": of what only one of the two covers, "Distance": greatest distance of a corner
     of one outline from the other outline,
     "Valid": whether neither outline meets itself}.
"""
import json
import sys

import gdspy
from shapely.geometry import LineString, Point, Polygon
from shapely.ops import unary_union


def off(a, b):
    line = LineString(b.exterior.coords)
    return max(line.distance(Point(p)) for p in a.exterior.coords)


def main():
    q = json.load(sys.stdin)
    lib = gdspy.GdsLibrary(infile=q["Path"], units="import")
    (top,) = lib.top_level()
    scale = lib.unit / lib.precision
    out = []
    for path, outline in zip(top.paths, q["Outlines"]):
        parts = [Polygon([(round(x * scale, 9), round(y * scale, 9)) for x, y in ring]) for ring in path.get_polygons()]
        mine = Polygon(outline)
        if not mine.is_valid or not all(p.is_valid for p in parts):
            out.append({"Valid": False})
            continue
        judge = unary_union(parts)
        out.append({"Valid": True, "Area": judge.symmetric_difference(mine).area, "Distance": max(off(judge, mine), off(mine, judge))})
    json.dump(out, sys.stdout)


main()
