#!/usr/bin/env python3
"""edited_layouts.py --program MASKPAIR --checkers DIR [--only NAME] [--except NAME] [--jobs N]: orders and edits on open layouts, judged.

For each layout of CASES:
1. an anchor file of some hundred entries is made (testdata/orders, fixed seed); audit.py and the program's own verify judge the result;
2. the layout is edited some dozen times (figures moved, deleted, added, cells swapped), gets orders of its own, and follows the first
   result as its baseline; audit.py and verify judge that, optimum.py works out the least number of moved shapes where it can;
3. its result, given as baseline once more, gives the same bytes, and given as input too;
4. the first result, masked as it is, is edited and decomposed without orders, with already_masked = "redo", since edits put figures
   on both masks into one shape.

It prints a line for each case and "N passed, N failed"; the exit status is 0 when none failed.
"""
import argparse
import concurrent.futures
import gzip
import json
import os
import subprocess
import sys
import tempfile
import time

from open_layouts import DECK, HERE, OPEN, Wrong, run

# file, layer, spacing in nm, entries tried (those that contradict earlier ones are left out), edits, whether optimum.py is asked
CASES = [
    ("asap7_cells_R", 19, "20", 900, 40, True),
    ("asap7_cells_R", 19, "36", 900, 40, True),
    ("asap7_cells_R", 18, "40", 900, 60, True),
    ("asap7_cells_R", 17, "60", 900, 40, True),
    ("ihp_stdcell", 8, "200", 900, 30, True),
    ("ihp_stdcell", 6, "280", 900, 40, True),
    ("asap7_srambank_32b", 18, "54", 900, 40, False),
]
DBU_NM = {"asap7": 0.25, "ihp": 1}


def same_bytes(a, b, what):
    with open(a, "rb") as f, open(b, "rb") as g:
        if f.read() != g.read():
            raise Wrong("%s: other bytes" % what)


def judge(case, a):
    name, layer, nm, entries, edits, optimum = case
    started = time.time()
    with tempfile.TemporaryDirectory(prefix="maskpair-edited-") as tmp:
        at = lambda n: os.path.join(tmp, n)
        source, deck = at("in.gds"), at("deck.toml")
        with gzip.open(os.path.join(OPEN, name + ".gds.gz")) as f, open(source, "wb") as g:
            g.write(f.read())
        with open(deck, "w") as f:
            f.write(DECK % {"layer": layer, "nm": nm})
        spacing = round(float(nm) / DBU_NM[name.split("_")[0]])

        def generate(to, stream, *args):
            numbers = "wire=%d/0,%d/101,%d/102" % (layer, layer, layer)
            r = subprocess.run([a.generate, "-layer", numbers, "-spacing", str(spacing), *args, stream], capture_output=True)
            if r.returncode:
                raise Wrong("generate: " + r.stderr.decode()[-300:])
            with open(to, "wb") as f:
                f.write(r.stdout)
            return to

        def checker(tool, *args, allowed=(0,)):
            return json.loads(run([sys.executable, "-B", os.path.join(a.checkers, tool), *args], allowed))

        def decompose(stream, out, *args):
            run([a.program, "decompose", stream, "--deck", deck, "--output", out, "--report", at("report.json"), "--force", "--quiet", *args], (0, 1))
            return json.load(open(at("report.json")))["layers"][0]

        def judged(stream, out, anchors, *baseline):
            orders = ("--anchors", anchors) if anchors else ()
            checker("audit.py", out, deck, "--drawn", stream, "--report", at("report.json"), *orders, *baseline)
            run([a.program, "verify", out, "--deck", deck, "--drawn", stream, *orders, "--report", at("verify.json"), "--force", "--quiet"], (0, 1))
            for check in json.load(open(at("verify.json")))["checks"]:
                if not check["ok"] and check["check"] != "same_mask":
                    raise Wrong("verify: %s" % check)

        first = generate(at("first.toml"), source, "-seed", "1", "-entries", str(entries))
        decompose(source, at("first.gds"), "--anchors", first)
        judged(source, at("first.gds"), first)

        edited = generate(at("edited.gds"), source, "-seed", "2", "-edits", str(edits))
        second = generate(at("second.toml"), edited, "-seed", "3", "-entries", str(entries), "-masks", at("first.gds"))
        follow = ("--anchors", second, "--baseline", at("first.gds"))
        said = decompose(edited, at("second.gds"), *follow)
        judged(edited, at("second.gds"), second, "--baseline", at("first.gds"))
        least = "not asked"
        if optimum:
            row = checker("optimum.py", edited, deck, *follow, "--report", at("report.json"), allowed=(0, 2))
            row = row["layers"][0]
            least = row["min_moved_shapes"]
            if row["exact"] and said["moved_shapes"] != least:
                raise Wrong("%d shapes moved, the least is %d" % (said["moved_shapes"], least))
            if not row["exact"]:
                least = "%s, not all solved" % least

        decompose(edited, at("again.gds"), "--anchors", second, "--baseline", at("second.gds"))
        same_bytes(at("second.gds"), at("again.gds"), "its own result as baseline")
        decompose(at("second.gds"), at("again.gds"), "--anchors", second, "--baseline", at("second.gds"))
        same_bytes(at("second.gds"), at("again.gds"), "its own result as input")

        generate(at("masked.gds"), at("first.gds"), "-seed", "4", "-edits", str(edits))
        with open(deck, "a") as f:
            f.write('already_masked = "redo"\n')
        decompose(at("masked.gds"), at("third.gds"))
        judged(at("masked.gds"), at("third.gds"), None)
    return "%d anchored, %d remembered, %d moved (least: %s), %d unresolved pairs; %.0f s" % (
        said["anchored_shapes"], said["baseline_shapes"], said["moved_shapes"], least, said["unresolved_pairs"], time.time() - started)


def main():
    p = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    p.add_argument("--program", default="maskpair")
    p.add_argument("--checkers", required=True)
    p.add_argument("--jobs", type=int, default=2)
    p.add_argument("--only", default="")
    p.add_argument("--except", dest="leave")
    a = p.parse_args()
    failed, cases = 0, [c for c in CASES if a.only in c[0] and not (a.leave and a.leave in c[0])]
    with tempfile.TemporaryDirectory() as tmp, concurrent.futures.ThreadPoolExecutor(a.jobs) as pool:
        a.generate = os.path.join(tmp, "generate")
        subprocess.run(["go", "build", "-o", a.generate, "./testdata/orders/generate"], cwd=os.path.join(HERE, os.pardir, os.pardir), check=True)
        for case, f in [(c, pool.submit(judge, c, a)) for c in cases]:
            title = "%s %d/0 at %s nm" % case[:3]
            try:
                print("ok      %s: %s" % (title, f.result()), flush=True)
            except (Wrong, OSError, ValueError, KeyError) as e:
                failed += 1
                print("FAILED  %s: %s" % (title, e), flush=True)
    print("%d passed, %d failed" % (len(cases) - failed, failed))
    return 1 if failed or not cases else 0


if __name__ == "__main__":
    sys.exit(main())
