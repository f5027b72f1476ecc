"""Writing and reading of the reference tables: comment lines first (what, versions, date), then plain CSV."""

import csv
import datetime
import importlib.metadata
import os
import platform
import sys


def output_path(name):
    """Where a script writes: the folder given as its first argument, else its own folder."""
    folder = sys.argv[1] if len(sys.argv) > 1 else os.path.dirname(os.path.abspath(__file__))
    os.makedirs(folder, exist_ok=True)
    return os.path.join(folder, name)


def write_table(name, title, packages, header, rows):
    """Write rows under `header`; floats with nine significant digits."""
    versions = ", ".join(f"{p} {importlib.metadata.version(p)}" for p in packages)
    with open(output_path(name), "w", newline="") as out:
        for line in title.strip().splitlines():
            out.write(f"# {line.strip()}\n")
        out.write(f"# computed {datetime.date.today().isoformat()} with Python {platform.python_version()}, {versions}\n")
        table = csv.writer(out, lineterminator="\n")
        table.writerow(header)
        for row in rows:
            table.writerow([f"{v:.9g}" if isinstance(v, float) else v for v in map(plain, row)])


def plain(value):
    """NumPy scalars to Python's own; booleans as true/false; None as an empty cell."""
    if value is None:
        return ""
    if hasattr(value, "item"):
        value = value.item()
    if isinstance(value, bool):
        return "true" if value else "false"
    return value
