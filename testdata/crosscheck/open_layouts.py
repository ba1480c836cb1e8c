#!/usr/bin/env python3
"""open_layouts.py --program MASKPAIR --checkers DIR [--cases FILE] [--jobs N] [--only NAME]: the program on open layouts, judged.

For each case of testdata/open/cases.tsv it runs the program with output and report, lets audit.py judge the output, and holds
the report against what colourable.py counts and against the table. It prints a line for each case and "N passed, N failed"
at the end; the exit status is 0 when none failed. --table prints the rows of the table as colourable.py counts them.
"""
import argparse
import concurrent.futures
import json
import os
import subprocess
import sys
import tempfile
import time

HERE = os.path.dirname(os.path.abspath(__file__))
OPEN = os.path.join(HERE, os.pardir, "open")
TABLE = ["figures", "shapes", "near_pairs", "components", "odd_components"]
COMPARED = ["figures", "already_masked_figures", "shapes", "near_pairs", "components", "unresolved_components",
            "joint_clashes", "any_mask_pairs", "anchored_shapes", "wishes"]
DECK = """unit = "nm"
[[layer]]
name = "wire"
drawn = "%(layer)d/0"
mask_a = "%(layer)d/101"
mask_b = "%(layer)d/102"
same_mask_spacing = %(nm)s
"""


class Wrong(Exception):
    pass


def read_cases(path):
    cases = []
    for line in open(path):
        if line.strip() and not line.startswith("#"):
            f = line.split("\t")
            cases.append({"file": f[0], "layer": int(f[1].split("/")[0]), "nm": f[2].strip(), "want": [int(v) for v in f[3:]]})
    return cases


def run(args, allowed=(0,)):
    r = subprocess.run(args, capture_output=True, text=True)
    if r.returncode not in allowed:
        said = " ".join((r.stdout[-1500:] + " " + r.stderr[-500:]).split())
        raise Wrong("%s ends with %d: %s" % (os.path.basename([a for a in args if a.endswith(".py") or a == args[0]][-1]), r.returncode, said))
    return r.stdout


def judge(case, a):
    started = time.time()
    with tempfile.TemporaryDirectory(prefix="maskpair-open-") as tmp:
        source = os.path.join(OPEN, case["file"] + ".gds.gz")
        deck, out, report = (os.path.join(tmp, n) for n in ("deck.toml", "out.gds", "report.json"))
        with open(deck, "w") as f:
            f.write(DECK % case)
        check = lambda tool, *args: json.loads(run([sys.executable, "-B", os.path.join(a.checkers, tool), *args]))
        truth = check("colourable.py", source, deck)["layers"][0]
        counted = [truth[k] for k in TABLE]
        if a.table:
            return "\t".join([case["file"], "%d/0" % case["layer"], case["nm"]] + [str(v) for v in counted])
        run([a.program, "decompose", source, "--deck", deck, "--output", out, "--report", report, "--quiet"], (0, 1))
        said = json.load(open(report))["layers"][0]
        for k in COMPARED:
            if said[k] != truth[k]:
                raise Wrong("the report says %s %s, colourable.py %s" % (k, said[k], truth[k]))
        if case["want"] and counted != case["want"]:
            raise Wrong("colourable.py counts %s, the table has %s" % (counted, case["want"]))
        check("audit.py", out, deck, "--drawn", source, "--report", report)
    return "%d figures, %d near pairs, %d unresolved components; %.0f s" % (
        truth["figures"], truth["near_pairs"], truth["unresolved_components"], time.time() - started)


def main():
    p = argparse.ArgumentParser()
    p.add_argument("--program", default="maskpair")
    p.add_argument("--checkers", required=True)
    p.add_argument("--cases", default=os.path.join(OPEN, "cases.tsv"))
    p.add_argument("--jobs", type=int, default=2)
    p.add_argument("--only", default="", help="cases whose file has this in its name")
    p.add_argument("--except", dest="leave", help="cases whose file has not")
    p.add_argument("--table", action="store_true")
    a = p.parse_args()
    cases = [c for c in read_cases(a.cases) if a.only in c["file"] and not (a.leave and a.leave in c["file"])]
    failed = 0
    with concurrent.futures.ThreadPoolExecutor(a.jobs) as pool:
        for case, f in [(c, pool.submit(judge, c, a)) for c in cases]:
            name = "%s %d/0 at %s nm" % (case["file"], case["layer"], case["nm"])
            try:
                line = f.result()
                print(line if a.table else "ok      %s: %s" % (name, line), flush=True)
            except (Wrong, OSError, ValueError, KeyError) as e:
                failed += 1
                print("FAILED  %s: %s" % (name, e), flush=True)
    if not a.table:
        print("%d passed, %d failed" % (len(cases) - failed, failed))
    return 1 if failed or not cases else 0


if __name__ == "__main__":
    sys.exit(main())
