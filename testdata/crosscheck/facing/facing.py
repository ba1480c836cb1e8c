#!/usr/bin/python3
"""Near pairs by what faces what, on outlines merged by GEOS through shapely.

In:  a list of layouts {"figures": [[[x, y], ...], ...], "other", "side", "tip_side", "tip", "corner", "tip_width", "wide": [[width, spacing]]}.
Out: for each {"shapes": number, "pairs": number, "open": true where floating point cannot tell}.
"""
import json
import sys
from itertools import combinations
from math import hypot

from shapely.geometry import Polygon, box
from shapely.geometry.polygon import orient
from shapely.ops import unary_union
from shapely.strtree import STRtree

DOUBT = 1e-6


class Open(Exception):
    """A number is so near to a limit that its rounding may decide."""


def sign(v):
    if 1e-12 < abs(v) < DOUBT:
        raise Open
    return (v > 1e-12) - (v < -1e-12)


def below(a, b):
    return sign(a - b) < 0


def minus(p, q):
    return (p[0] - q[0], p[1] - q[1])


def cross(u, v):
    return u[0] * v[1] - u[1] * v[0]


def dot(u, v):
    return u[0] * v[0] + u[1] * v[1]


def level(u):
    """1: runs along x, 2: along y, 0: slanted."""
    return 1 if abs(u[1]) < 1e-9 else 2 if abs(u[0]) < 1e-9 else 0


class Corner:
    def __init__(self, at, before, after):
        self.at, self.into, self.out = at, minus(at, before), minus(after, at)
        self.turn = cross(self.into, self.out)
        self.convex = self.turn > 0
        self.square = self.convex and level(self.into) > 0 and level(self.out) > 0

    def looks(self, v):
        return self.convex and sign(dot(v, self.out)) <= 0 and sign(dot(v, self.into)) >= 0


class Edge:
    def __init__(self, p, q):
        self.p, self.q = p, q
        self.way = minus(q.at, p.at)
        self.level = level(self.way)
        self.length = hypot(*self.way)
        self.outward = (self.way[1], -self.way[0])

    def span(self, axis):
        a, b = self.p.at[axis], self.q.at[axis]
        return min(a, b), max(a, b)


class Shape:
    def __init__(self, geometry):
        self.geometry, self.edges, self.corners = geometry, [], []
        for part in getattr(geometry, "geoms", [geometry]):
            part = orient(part)
            for ring in [part.exterior, *part.interiors]:
                pts = list(ring.coords)[:-1]
                while True:
                    n = len(pts)
                    kept = [pts[i] for i in range(n)
                            if abs(cross(minus(pts[i], pts[i - 1]), minus(pts[(i + 1) % n], pts[i]))) > 1e-7]
                    if len(kept) == n:
                        break
                    pts = kept
                around = [Corner(pts[i], pts[i - 1], pts[(i + 1) % n]) for i in range(n)]
                self.corners += around
                self.edges += [Edge(around[i], around[(i + 1) % n]) for i in range(n)]


def square_fits(shape, edge, low, high, width):
    axis = edge.level - 1
    line = edge.p.at[1 - axis]
    deep = line - width if edge.outward[1 - axis] > 0 else line + width
    stops = {low, high} | {c.at[axis] for c in shape.corners}
    tries = sorted({s for v in stops for s in (v, v - width)})
    tries += [(a + b) / 2 for a, b in zip(tries, tries[1:])]
    for u in tries:
        if u < high and low < u + width:
            b = box(u, min(line, deep), u + width, max(line, deep)) if axis == 0 else box(min(line, deep), u, max(line, deep), u + width)
            if shape.geometry.covers(b):
                return True
    return False


def near(a, b, r):
    faces = []
    for e in a.edges:
        for f in b.edges:
            if not e.level or e.level != f.level or dot(e.way, f.way) > 0:
                continue
            axis = e.level - 1
            gap = (f.p.at[1 - axis] - e.p.at[1 - axis]) * (1 if e.outward[1 - axis] > 0 else -1)
            if gap <= 0:
                continue
            (l1, h1), (l2, h2) = e.span(axis), f.span(axis)
            low, high = max(l1, l2), min(h1, h2)
            if not below(low, high):
                continue
            faces.append((e, f, axis))
            tips = sum(x.p.convex and x.q.convex and x.length <= r["tip_width"] for x in (e, f))
            limit = (r["side"], r["tip_side"], r["tip"])[tips]
            for width, spacing in r["wide"]:
                if spacing > limit and (square_fits(a, e, low, high, width) or square_fits(b, f, low, high, width)):
                    limit = spacing
            if gap < limit:
                return True

    def shared(p, q):
        def on(p, e):
            axis = e.level - 1
            low, high = e.span(axis)
            return abs(p[1 - axis] - e.p.at[1 - axis]) < 1e-9 and low - 1e-9 <= p[axis] <= high + 1e-9
        return any(on(p, e) and on(q, f) and abs(p[axis] - q[axis]) < 1e-9 for e, f, axis in faces)

    def too_near(p, q, limit):
        return below(hypot(*minus(p, q)), limit)

    for c in a.corners:
        for d in b.corners:
            v = minus(d.at, c.at)
            if hypot(*v) < max(r["corner"], r["other"]) + 1 and c.looks(v) and d.looks((-v[0], -v[1])) and not shared(c.at, d.at):
                if too_near(c.at, d.at, r["corner"] if c.square and d.square else r["other"]):
                    return True
    for s, t, turned in ((a, b, False), (b, a, True)):
        for c in s.corners:
            if not c.convex:
                continue
            for f in t.edges:
                if c.square and f.level:
                    continue
                part = dot(minus(c.at, f.p.at), f.way) / dot(f.way, f.way)
                if sign(part) <= 0 or sign(1 - part) <= 0 or cross(f.way, minus(c.at, f.p.at)) >= 0:
                    continue
                foot = (f.p.at[0] + part * f.way[0], f.p.at[1] + part * f.way[1])
                if not c.looks((-f.outward[0], -f.outward[1])) or (shared(foot, c.at) if turned else shared(c.at, foot)):
                    continue
                if too_near(c.at, foot, r["other"]):
                    return True
    return False


def judge(layout):
    figures = [Polygon(f) for f in layout["figures"]]
    group = list(range(len(figures)))

    def find(i):
        while group[i] != i:
            group[i] = group[group[i]]
            i = group[i]
        return i

    tree = STRtree(figures)
    number = {id(f): i for i, f in enumerate(figures)}
    for i, f in enumerate(figures):
        for g in tree.query(f):
            if f.intersects(g):
                group[find(i)] = find(number[id(g)])
    members = {}
    for i, f in enumerate(figures):
        members.setdefault(find(i), []).append(f)
    shapes = [Shape(unary_union(m)) for m in members.values()]
    reach = max(layout[k] for k in ("other", "side", "tip_side", "tip", "corner")) + sum(s for _, s in layout["wide"])
    pairs, doubt = 0, False
    for a, b in combinations(shapes, 2):
        if a.geometry.distance(b.geometry) < reach:
            try:
                pairs += near(a, b, layout)
            except Open:
                doubt = True
    return {"shapes": len(shapes), "pairs": pairs, "open": doubt}


def main():
    json.dump([judge(layout) for layout in json.load(sys.stdin)], sys.stdout)


main()
