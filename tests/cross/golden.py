#!/usr/bin/env python3
"""Holds the golden files against the script that made them: parameters, rest points, and the first 0.7 ms integrated again.

    python3 tests/cross/golden.py

The whole takes `make_golden.py` minutes; here one method (LSODA, rtol 1e-11) goes a quarter of the way, past the end of the smooth start.
The files say how far apart its methods are: 1e-7 of a column's swing at the worst, so 1e-6 is asked for. Exit code 1 where a file differs.
"""

import csv
import importlib.util
import pathlib
import sys

import numpy as np

GOLDEN = pathlib.Path(__file__).resolve().parents[1] / "golden"
ROWS = 270
TOLERANCE = 1e-6


def main():
    spec = importlib.util.spec_from_file_location("make_golden", GOLDEN / "make_golden.py")
    maker = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = maker
    spec.loader.exec_module(maker)
    maker.ROWS = ROWS
    bad = 0
    cases = maker.cases()
    for case in cases:
        text = (GOLDEN / f"{case.name}.csv").read_text(encoding="ascii").splitlines()
        head = [line[2:] for line in text if line.startswith("# ")]
        table = list(csv.reader(line for line in text if not line.startswith("#")))
        stored = np.array([[float(x) for x in row] for row in table[1:]])
        same_head = all(line in head for line in case.head) and table[0] == case.columns
        times, now = maker.rows(case, "LSODA", 1e-11)
        sent = np.array([case.drive(t) for t in times])
        swing = np.max(np.abs(stored[:, 2:] - stored[0, 2:]), axis=0)
        apart = np.max(np.abs(now - stored[:ROWS, 2:]) / swing)
        same_drive = np.allclose(sent, stored[:ROWS, 1], rtol=1e-12, atol=1e-18) and np.allclose(times, stored[:ROWS, 0], rtol=1e-14)
        good = same_head and same_drive and apart < TOLERANCE
        bad += not good
        print(f"{'ok  ' if good else 'FAIL'} {case.name}: head {same_head}, input {same_drive}, apart {apart:.1e} of the swing")
    listed = {case.name for case in cases}
    # Every other file names the script beside it that made it.
    stray = []
    for path in sorted(GOLDEN.glob("*.csv")):
        source = path.read_text(encoding="ascii").splitlines()[0].removeprefix("# Source: ").split()[0]
        made = path.stem in listed if source == "make_golden.py" else (GOLDEN / source).is_file()
        if not made:
            stray.append(path.stem)
    if stray:
        print(f"FAIL no script makes {', '.join(stray)}")
    return 1 if bad or stray else 0


if __name__ == "__main__":
    sys.exit(main())
