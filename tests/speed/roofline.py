"""Instructions of the march by kind, per cell and step of eight draws: valgrind counts, objdump names.

    python3 tests/speed/roofline.py            needs cargo, valgrind, objdump

Runs the `column` bench (a median crown fire, batches of eight equal draws) under callgrind and sorts what was executed in the
march by what it does. docs/speed.md says how that compares with what a core can start in a cycle.
"""

import collections
import json
import re
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
TRIES = 200  # as in column.rs
MARCH = re.compile(r"run_wide|run_portable|assess::batch|heat::|spall::watch")
KINDS = [("division", r"v?div[ps]d"), ("square root", r"v?sqrt[ps]d"), ("multiplication", r"v?mul[ps]d"),
         ("addition, subtraction", r"v?(add|sub)[ps]d"), ("comparison, blend, logic", r"v?(cmp|max|min|blend|and|or|xor|ucomi|comi)\w*[ps]d?\w*"),
         ("move, load, store", r"v?mov\w*"), ("shuffle", r"v?(shuf|perm|unpck|insert|extract|broadcast|pack|gather)\w*")]


def main():
    built = subprocess.run(["cargo", "bench", "--bench", "column", "--no-run", "--message-format=json"], cwd=ROOT, check=True,
                           capture_output=True, text=True).stdout
    messages = [json.loads(line) for line in built.splitlines() if line.startswith("{")]
    program = next(m["executable"] for m in messages if m.get("executable") and m["target"]["name"] == "column")
    with tempfile.TemporaryDirectory() as folder:
        profile = Path(folder) / "profile"
        done = subprocess.run(["valgrind", "--tool=callgrind", "--dump-instr=yes", "--compress-pos=no", "--compress-strings=no",
                               f"--callgrind-out-file={profile}", program], check=True, capture_output=True, text=True)
        facts = json.loads(done.stdout.strip().splitlines()[-1])
        counts = collections.Counter()
        inside, call = False, False
        for line in profile.read_text().splitlines():
            if line.startswith("fn="):
                inside = bool(MARCH.search(line))
            elif line.startswith("calls="):
                call = True
            elif line.startswith("0x"):
                if inside and not call:
                    address, *_, cost = line.split()
                    counts[int(address, 16)] += int(cost)
                call = False
    named = {}
    for line in subprocess.run(["objdump", "-d", "--no-show-raw-insn", program], check=True, capture_output=True, text=True).stdout.splitlines():
        found = re.match(r"\s*([0-9a-f]+):\s+(\S+)\s*(.*)", line)
        if found:
            named[int(found[1], 16)] = (found[2], found[3])
    cell_steps = TRIES * facts["nodes"] * facts["steps"]
    kinds = collections.Counter()
    for address, count in counts.items():
        name, operands = named.get(address, ("unknown", ""))
        kind = next((k for k, pattern in KINDS if re.fullmatch(pattern, name)), "other")
        width = "four lanes" if "%ymm" in operands else "two lanes" if name.endswith("pd") else "one lane or none"
        kinds[kind, width] += count
    total = sum(kinds.values())
    print(f"{facts['nodes']} nodes, {facts['steps']} steps, {total / cell_steps:.0f} instructions per cell-step of eight draws")
    for (kind, width), count in kinds.most_common():
        if count / cell_steps >= 0.05:
            print(f"{count / cell_steps:8.2f}  {kind}, {width}")
    return 0


if __name__ == "__main__":
    sys.exit(main())
