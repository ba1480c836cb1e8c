#!/usr/bin/python3
"""Optima of two-mask problems as integer programmes, by HiGHS through scipy.optimize.milp.

In:  a list of {"Nodes", "Edges": [{"U", "V", "Weight", "Same"}], "Fixed": null or list, "Cost": null or [[a, b]]}.
Out: the least cost of each.

A node is a binary variable, 1 on mask B. An edge has a variable that is 1 where it is broken, bounded from below by two rows;
of a triangle of edges that ask for opposite masks at least one is broken, of four nodes all joined at least two: rows that
cut off fractions only.
"""
import itertools
import json
import sys

import numpy as np
from scipy.optimize import Bounds, LinearConstraint, milp
from scipy.sparse import csr_matrix


def optimum(problem):
    n = problem["Nodes"]
    base, apart, alike = 0, {}, {}
    for e in problem["Edges"] or []:
        u, v = sorted((e["U"], e["V"]))
        if u == v:
            base += 0 if e["Same"] else e["Weight"]
            continue
        kind = alike if e["Same"] else apart
        kind[u, v] = kind.get((u, v), 0) + e["Weight"]
    edges = [(u, v, w, False) for (u, v), w in apart.items()] + [(u, v, w, True) for (u, v), w in alike.items()]
    low, high, cost = np.zeros(n + len(edges)), np.ones(n + len(edges)), np.zeros(n + len(edges))
    for i, f in enumerate(problem["Fixed"] or []):
        if f >= 0:
            low[i] = high[i] = f
    for i, (a, b) in enumerate(problem["Cost"] or []):
        base += a
        cost[i] = b - a
    rows, least = [], []

    def row(terms, bound):
        rows.append(terms)
        least.append(bound)

    where = {}
    for k, (u, v, w, same) in enumerate(edges):
        z = n + k
        cost[z] = w
        if same:
            row([(z, 1), (u, -1), (v, 1)], 0)
            row([(z, 1), (u, 1), (v, -1)], 0)
        else:
            where[u, v] = z
            row([(z, 1), (u, 1), (v, 1)], 1)
            row([(z, 1), (u, -1), (v, -1)], -1)
    after = {}
    for u, v in where:
        after.setdefault(u, set()).add(v)
    for u, v in where:
        both = after.get(u, set()) & after.get(v, set())
        for w in both:
            row([(where[u, v], 1), (where[u, w], 1), (where[v, w], 1)], 1)
        for w, x in itertools.combinations(sorted(both), 2):
            if (w, x) in where:
                row([(where[p], 1) for p in itertools.combinations((u, v, w, x), 2)], 2)
    if not edges:  # then each node takes the cheaper of what it may
        return base + sum(min(c * l, c * h) for c, l, h in zip(cost, low, high))
    data = [(i, j, a) for i, terms in enumerate(rows) for j, a in terms]
    matrix = csr_matrix(([d[2] for d in data], ([d[0] for d in data], [d[1] for d in data])), shape=(len(rows), len(cost)))
    kind = np.zeros(len(cost))
    kind[:n] = 1
    r = milp(cost, constraints=LinearConstraint(matrix, least, np.inf), integrality=kind, bounds=Bounds(low, high), options={"mip_rel_gap": 0})
    if r.status != 0:
        sys.exit("no optimum: " + r.message)
    value = base + r.fun
    if abs(value - round(value)) > 1e-4:
        sys.exit("no whole number: %r" % value)
    return round(value)


def main():
    json.dump([int(optimum(p)) for p in json.load(sys.stdin)], sys.stdout)


main()
