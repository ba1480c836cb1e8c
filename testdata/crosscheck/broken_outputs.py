#!/usr/bin/python3
"""Lets an independent checker judge the outputs that the tests of decompose/verify break on purpose.

    broken_outputs.py --checkers DIR

The test TestBrokenOutputsAreFound writes every right and every broken output with its input, deck and anchor file; verify finds
each broken one there. Here audit.py, a script over gdspy, shapely and networkx that shares no code with the program, judges the same
files: it must pass the right ones and none of the broken ones (it fails them, or cannot read them), but for those that it cannot
see, which are named below with the reason.
"""
import argparse
import collections
import contextlib
import io
import json
import multiprocessing
import os
import subprocess
import sys
import tempfile

# What audit.py cannot see, by the words with which the test names the change, and why.
BLIND = {
    "other bytes behind the library": "it reads streams through gdspy, which stops at ENDLIB",
    "a piece without its property": "it does not compare the properties of the pieces of a figure that is cut",
}


def judge(folder):
    """What is in a folder, the exit status of audit.py on it, and the checks that failed or the line it refused with."""
    with open(os.path.join(folder, "what.txt")) as f:
        what = f.read().strip()
    import audit  # found where --checkers says
    arguments = ["audit.py", os.path.join(folder, "out.gds"), os.path.join(folder, "deck.toml"), "--drawn", os.path.join(folder, "in.gds")]
    if os.path.exists(os.path.join(folder, "anchors.toml")):
        arguments += ["--anchors", os.path.join(folder, "anchors.toml")]
    said, refused = io.StringIO(), io.StringIO()
    sys.argv = arguments
    with contextlib.redirect_stdout(said), contextlib.redirect_stderr(refused):
        try:
            status = audit.mc.guarded(audit.main)
        except SystemExit as e:
            status = e.code if isinstance(e.code, int) else 2
    try:
        return what, status, json.loads(said.getvalue())["failure_counts"]
    except ValueError:
        return what, status, (said.getvalue() + refused.getvalue()).strip()


def main():
    p = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    p.add_argument("--checkers", required=True, help="folder that holds audit.py")
    args = p.parse_args()
    with tempfile.TemporaryDirectory(prefix="maskpair-broken-") as folder:
        return judge_all(args.checkers, folder)


def judge_all(checkers, folder):
    root = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..")
    subprocess.run(["go", "test", "./decompose/verify", "-count=1", "-run", "TestBrokenOutputsAreFound", "-keep-broken", folder], cwd=root, check=True)

    sys.dont_write_bytecode = True
    sys.path.insert(0, checkers)
    names = sorted(os.listdir(folder))
    with multiprocessing.get_context("fork").Pool() as pool:
        verdicts = pool.map(judge, [os.path.join(folder, name) for name in names], chunksize=8)
    wrong, counts = [], collections.Counter()
    for name, (what, status, found) in zip(names, verdicts):
        layout, change = what.split(": ", 1)
        if change == "right":
            kind = "right, passed" if status == 0 else None
        elif status == 0:
            kind = "broken, not seen: %s (%s)" % (change, BLIND[change]) if change in BLIND else None
        else:
            kind = "broken, failed" if status == 1 else "broken, unreadable"
        if kind is None:
            wrong.append("%s: %s: %s: status %s: %s" % (name, layout, change, status, found))
        counts[kind or "wrongly judged"] += 1
    for line in wrong + ["%5d %s" % (n, kind) for kind, n in sorted(counts.items())]:
        print(line)
    if counts["broken, failed"] < 300:
        wrong.append("")
        print("only %d broken outputs were failed" % counts["broken, failed"])
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
