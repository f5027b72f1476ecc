"""Compare two folders of reference tables: compare.py COMMITTED FRESH. Exit 1 on any difference.

Text cells must be equal; numbers must agree within RELATIVE of the larger one, plus ABSOLUTE[table] where a table holds
values that are zero but for rounding (differences, percentages, stresses of a stress-free body). Columns whose name starts with `error` hold error estimates, rounding-sized
themselves: they may differ by ERROR_SLACK of their column's largest value. Comment lines (versions, date) are not compared.
"""

import csv
import glob
import json
import os
import sys

RELATIVE = 1e-5
ABSOLUTE = {"sphere_profile.csv": 1e-6, "cap_factor.csv": 1e-4, "patch.csv": 1e-4, "flake_integral.csv": 1e-12, "series_full.csv": 1e-15,
            "conduction_nonlinear.csv": 1e-6, "normal_quantiles.csv": 1e-15}
ERROR_SLACK = 0.5


def table(path):
    with open(path, newline="") as handle:
        rows = list(csv.reader(line for line in handle if not line.startswith("#")))
    return rows[0], rows[1:]


def number(text):
    try:
        return float(text)
    except ValueError:
        return None


def differences(name, old_path, new_path):
    if name.endswith(".json"):
        return [] if json.load(open(old_path)) == json.load(open(new_path)) else [f"{name}: contents differ"]
    (head, old), (new_head, new) = table(old_path), table(new_path)
    if head != new_head or len(old) != len(new):
        return [f"{name}: {len(old)} rows of {head}, fresh run has {len(new)} of {new_head}"]
    found = []
    for j, column in enumerate(head):
        largest = max((abs(number(r[j])) for r in old if number(r[j]) is not None), default=0.0)
        for i, (a, b) in enumerate(zip(old, new)):
            x, y = number(a[j]), number(b[j])
            if x is None or y is None:
                same = a[j] == b[j]
            elif column.startswith("error"):
                same = abs(x - y) <= ERROR_SLACK * largest
            else:
                same = abs(x - y) <= RELATIVE * max(abs(x), abs(y)) + ABSOLUTE.get(name, 0.0)
            if not same:
                found.append(f"{name}: row {i + 1}, {column}: {a[j]} committed, {b[j]} fresh")
    return found


def main():
    committed, fresh = sys.argv[1:3]
    pick = lambda folder: {os.path.basename(p) for e in ("csv", "json") for p in glob.glob(os.path.join(folder, "*." + e))}
    names = pick(committed)
    found = [f"{n}: only in one folder" for n in sorted(names ^ pick(fresh))]
    if not names:
        found.append(f"{committed}: no tables")
    for name in sorted(names & pick(fresh)):
        got = differences(name, os.path.join(committed, name), os.path.join(fresh, name))
        print(f"{name}: {'equal' if not got else f'{len(got)} differences'}")
        found += got[:20]
    print("\n".join(found), file=sys.stderr)
    sys.exit(1 if found else 0)


if __name__ == "__main__":
    main()
