#!/usr/bin/python3
"""Writes layouts with gdspy.

In:  a list of {"Path", "Unit", "Precision", "Cells"}; lengths of cells in database units, the others in metres.
Out: the paths.
"""
import json
import math
import sys
import warnings

import gdspy

warnings.simplefilter("ignore")  # gdspy tells of polygons of more points than the manual allows
ENDS = {0: "flush", 1: "round", 2: "extended"}


def write(job):
    lib = gdspy.GdsLibrary("LIB", unit=job["Unit"], precision=job["Precision"])
    one = job["Precision"] / job["Unit"]  # a database unit

    def points(list):
        return [(x * one, y * one) for x, y in list or []]

    cells = {}
    for structure in job["Cells"]:
        cell = cells[structure["Name"]] = gdspy.Cell(structure["Name"], exclude_from_current=True)
        lib.add(cell)
        for b in structure["Boundaries"] or []:
            cell.add(gdspy.Polygon(points(b["Points"]), b["Layer"], b["Type"]))
        for p in structure["Paths"] or []:
            ends = ENDS.get(p["PathType"], (p["Begin"] * one, p["Finish"] * one))
            cell.add(gdspy.FlexPath(points(p["Points"]), abs(p["Width"]) * one, ends=ends, gdsii_path=True, width_transform=p["Width"] > 0,
                                    layer=p["Layer"], datatype=p["Type"]))
        for t in structure["Texts"] or []:
            cell.add(gdspy.Label(t["Text"], points([t["At"]])[0], layer=t["Layer"], texttype=t["Type"]))
        for r in structure["Refs"] or []:
            how = {"rotation": r["Angle"] or None, "magnification": None if r["Magnification"] == 1 else r["Magnification"], "x_reflection": r["Mirror"]}
            at = points([r["At"]])[0]
            if r["Columns"] == 0:
                cell.add(gdspy.CellReference(cells[r["Name"]], at, **how))
                continue
            # gdspy counts steps along the axes before the turn, and the mirror takes part in it.
            dx, dy = ((v[0] ** 2 + v[1] ** 2) ** 0.5 for v in (r["Column"], r["Row"]))
            c, s = math.cos(math.radians(r["Angle"])), math.sin(math.radians(r["Angle"]))
            if r["Column"][0] * c + r["Column"][1] * s < 0:
                dx = -dx
            if -r["Row"][0] * s + r["Row"][1] * c < 0:
                dy = -dy
            if r["Mirror"]:
                dy = -dy
            cell.add(gdspy.CellArray(cells[r["Name"]], r["Columns"], r["Rows"], (dx * one, dy * one), at, **how))
    lib.write_gds(job["Path"])
    return job["Path"]


json.dump([write(job) for job in json.load(sys.stdin)], sys.stdout)
