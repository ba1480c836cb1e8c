#!/usr/bin/python3
"""Figures, shapes, near pairs and components of layouts, and what became of them on two masks.

In:  a list of {"Path", "Drawn": [[layer, datatype], ...], "Spacings": [database units, ...],
     "Output": path or "", "MaskA": [layer, datatype], "MaskB": [...]}; Output belongs to the first spacing.
Out: for each a list over the spacings of {"Figures", "Shapes", "NearPairs", "Components", "OddComponents",
     "Pairs": [[shape, shape], ...], "Unresolved", "Lost": figures that are not on exactly one mask in the output,
     "Torn": shapes on both masks, "AreaA", "AreaB": merged}.

All numbers are sums over the tops. Coordinates are whole database units; so the squared distance of Manhattan figures is
whole, and a distance that differs from a whole number s differs by more than 1/(2s+1). Where slanted edges take part, squared
distances are fractions whose denominators are squared lengths of edges: the difference is more than 1/(2s+1) of one such
denominator. NEAR is below that for edges of up to 113 units and spacings of up to 60, and above the errors of floating point.
"""
import collections
import gzip
import json
import os
import sys
import tempfile

import gdspy
import networkx
import numpy
from shapely.geometry import Polygon, box
from shapely.ops import unary_union
from shapely.strtree import STRtree
from shapely.validation import make_valid

NEAR = 1e-7


class Library:
    def __init__(self, path):
        name = path
        if path.endswith(".gz"):
            with gzip.open(path) as packed, tempfile.NamedTemporaryFile(suffix=".gds", delete=False) as plain:
                plain.write(packed.read())
                name = plain.name
        lib = gdspy.GdsLibrary(infile=name, units="import")
        if name != path:
            os.unlink(name)
        self.scale = lib.unit / lib.precision
        self.tops = {c.name: c.get_polygons(by_spec=True) for c in lib.top_level()}

    def rings(self, top, specs):
        out = []
        for spec in specs:
            for ring in self.tops.get(top, {}).get(tuple(spec), []):
                out.append(numpy.rint(ring * self.scale).astype(int))
        return out


def area(ring):
    """What an outline fills by the even-odd rule."""
    p = Polygon(ring)
    if p.is_valid:
        return p
    parts = make_valid(p)
    return unary_union([g for g in getattr(parts, "geoms", [parts]) if g.area > 0])


def canonical(ring):
    """The same tuple for the same outline, wherever it begins and whichever way it runs."""
    pts = [tuple(int(v) for v in p) for p in ring]
    ways = []
    for way in (pts, pts[::-1]):
        k = min(range(len(way)), key=lambda i: way[i:] + way[:i])
        ways.append(way[k:] + way[:k])
    return tuple(min(ways))


class Layout:
    """The figures of one top: shapes, and the distances of those nearer than reach."""

    def __init__(self, rings, reach):
        figures = [(r, area(r)) for r in rings]
        figures = [(r, g) for r, g in figures if g.area > 0]
        self.rings = [r for r, _ in figures]
        self.geoms = [g for _, g in figures]
        order = {id(g): i for i, g in enumerate(self.geoms)}
        touch, near = networkx.Graph(), []
        touch.add_nodes_from(range(len(self.geoms)))
        tree = STRtree(self.geoms) if self.geoms else None
        for i, g in enumerate(self.geoms):
            x1, y1, x2, y2 = g.bounds
            for other in tree.query(box(x1 - reach, y1 - reach, x2 + reach, y2 + reach)):
                j = order[id(other)]
                if j <= i:
                    continue
                d = g.distance(other)
                if d == 0:
                    touch.add_edge(i, j)
                elif d < reach - NEAR:
                    near.append((i, j, d))
        self.shape = {}
        self.shapes = 0
        for members in networkx.connected_components(touch):
            for i in members:
                self.shape[i] = self.shapes
            self.shapes += 1
        self.pairs = {}
        for i, j, d in near:
            key = tuple(sorted((self.shape[i], self.shape[j])))
            if key[0] != key[1]:
                self.pairs[key] = min(d, self.pairs.get(key, d))

    def near(self, spacing):
        return sorted(p for p, d in self.pairs.items() if d < spacing - NEAR)


def masks(layout, on_a, on_b):
    """Counter of lost or doubled figures, and the set of masks of each shape."""
    found = [collections.Counter(canonical(r) for r in on_a), collections.Counter(canonical(r) for r in on_b)]
    where = collections.defaultdict(list)
    for i, ring in enumerate(layout.rings):
        where[canonical(ring)].append(i)
    lost = 0
    sides = [set() for _ in range(layout.shapes)]
    for outline, figures in where.items():
        counts = [f.pop(outline, 0) for f in found]
        lost += abs(sum(counts) - len(figures))
        for mask, n in enumerate(counts):
            if n:
                # Equal outlines lie on each other, so they are one shape, and have one mask.
                sides[layout.shape[figures[0]]].add(mask)
    lost += sum(sum(f.values()) for f in found)
    return lost, sides


def judge(job):
    drawn = Library(job["Path"])
    output = Library(job["Output"]) if job["Output"] else None
    results = [collections.Counter() for _ in job["Spacings"]]
    pairs = [[] for _ in job["Spacings"]]
    base = 0
    for top in drawn.tops:
        layout = Layout(drawn.rings(top, job["Drawn"]), max(job["Spacings"]))
        for k, spacing in enumerate(job["Spacings"]):
            graph = networkx.Graph()
            graph.add_nodes_from(range(layout.shapes))
            graph.add_edges_from(layout.near(spacing))
            parts = [graph.subgraph(c) for c in networkx.connected_components(graph)]
            results[k].update(Figures=len(layout.rings), Shapes=layout.shapes, NearPairs=graph.number_of_edges(), Components=len(parts),
                              OddComponents=sum(not networkx.is_bipartite(c) for c in parts))
            pairs[k].extend([base + a, base + b] for a, b in layout.near(spacing))
        base += layout.shapes
        if output:
            on = [output.rings(top, [job["MaskA"]]), output.rings(top, [job["MaskB"]])]
            lost, sides = masks(layout, *on)
            results[0].update(Lost=lost, Torn=sum(len(s) != 1 for s in sides),
                              Unresolved=sum(bool(sides[a] & sides[b]) for a, b in layout.near(job["Spacings"][0])),
                              AreaA=unary_union([area(r) for r in on[0]]).area, AreaB=unary_union([area(r) for r in on[1]]).area)
    return [dict(r, Pairs=p) for r, p in zip(results, pairs)]


def main():
    json.dump([judge(job) for job in json.load(sys.stdin)], sys.stdout)


main()
