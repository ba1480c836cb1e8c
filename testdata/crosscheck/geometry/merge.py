#!/usr/bin/python3
"""Merged area and corners of sets of polygons, by GEOS through shapely.

In:  a list of sets; a set is a list of polygons, a polygon a list of rings [[x, y], ...], the first the outer one.
Out: for each set {"area": number, "corners": [[x, y], ...]}; corners are the points where the merged outline turns.
"""
import json
import sys

from shapely.geometry import Polygon
from shapely.ops import unary_union


def corners(ring):
    pts = list(ring.coords)[:-1]
    n = len(pts)
    for i in range(n):
        (ax, ay), (bx, by), (cx, cy) = pts[i - 1], pts[i], pts[(i + 1) % n]
        if (bx - ax) * (cy - by) != (by - ay) * (cx - bx):
            yield pts[i]


def main():
    out = []
    for figures in json.load(sys.stdin):
        u = unary_union([Polygon(rings[0], rings[1:]) for rings in figures])
        found = set()
        for part in getattr(u, "geoms", [u]):
            for ring in [part.exterior, *part.interiors]:
                found.update(corners(ring))
        out.append({"area": u.area, "corners": sorted(found)})
    json.dump(out, sys.stdout)


main()
