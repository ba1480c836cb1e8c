#!/usr/bin/python3
"""What gdspy reads of streams, element by element, in database units.

In:  a list of paths.
Out: for each a list of structures {"Name", "Boundaries", "Paths", "Texts", "Refs"}.
"""
import json
import math
import sys
import warnings

import gdspy

warnings.simplefilter("ignore")  # gdspy tells of records that it passes over
ENDS = {"flush": 0, "round": 1, "extended": 2}


def vector(degrees, x, y):
    q, rest = divmod(degrees, 90)
    if rest == 0:
        c, s = [(1, 0), (0, 1), (-1, 0), (0, -1)][int(q) % 4]
    else:
        c, s = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
    return [c * x - s * y, s * x + c * y]


def structure(cell, scale):
    def whole(v):
        return int(round(v * scale))

    def points(array):
        return [[whole(x), whole(y)] for x, y in array]

    out = {"Name": cell.name, "Boundaries": [], "Paths": [], "Texts": [], "Refs": []}
    for p in cell.polygons:
        for ring, layer, kind in zip(p.polygons, p.layers, p.datatypes):
            out["Boundaries"].append({"Layer": int(layer), "Type": int(kind), "Points": points(ring)})
    for p in cell.paths:
        end = p.ends[0]
        begin, finish = (0, 0) if isinstance(end, str) else end
        sign = 1 if p.width_transform else -1
        out["Paths"].append({"Layer": int(p.layers[0]), "Type": int(p.datatypes[0]), "PathType": ENDS.get(end, 4) if isinstance(end, str) else 4,
                             "Width": sign * whole(p.widths[0, 0]), "Begin": whole(begin), "Finish": whole(finish), "Points": points(p.points)})
    for l in cell.labels:
        out["Texts"].append({"Layer": int(l.layer), "Type": int(l.texttype), "At": points([l.position])[0], "Text": l.text})
    for r in cell.references:
        name = r.ref_cell if isinstance(r.ref_cell, str) else r.ref_cell.name
        ref = {"Name": name, "At": points([r.origin])[0], "Mirror": bool(r.x_reflection), "Angle": r.rotation or 0,
               "Magnification": 1 if r.magnification is None else r.magnification}
        if isinstance(r, gdspy.CellArray):
            dx, dy = r.spacing[0] * scale, r.spacing[1] * scale
            ref.update(Columns=int(r.columns), Rows=int(r.rows), Column=vector(ref["Angle"], dx, 0),
                       Row=vector(ref["Angle"], 0, -dy if ref["Mirror"] else dy))
        out["Refs"].append(ref)
    return out


def main():
    answers = []
    for path in json.load(sys.stdin):
        lib = gdspy.GdsLibrary(infile=path, units="import")
        answers.append([structure(c, lib.unit / lib.precision) for c in lib.cell_dict.values()])
    json.dump(answers, sys.stdout)


main()
