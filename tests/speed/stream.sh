#!/usr/bin/env bash
# Time and peak memory of a stream: stream.sh BOULDERS [CASES] [OPTION...]. CASES is the number of distinct thermal cases
# (24 unless given); further options go to `assess`. Uses the release build.
set -euo pipefail
cd "$(dirname "$0")/../.."
boulders=${1:?how many boulders}
cases=${2:-24}
shift; [ $# -gt 0 ] && shift
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
python3 tests/speed/inventory.py "$boulders" "$cases" "$folder"
python3 - "$folder" target/release/spallcast "$@" <<'PY'
import os, resource, subprocess, sys, time
folder, program, options = sys.argv[1], sys.argv[2], sys.argv[3:]
start = time.perf_counter()
with open(f"{folder}/boulders.ndjson", "rb") as source, open(f"{folder}/out.ndjson", "wb") as out:
    code = subprocess.run([program, "assess", "--burn", f"{folder}/burn.geojson", "--boulders", "-", "--out", "-", *options],
                          stdin=source, stdout=out).returncode
used = resource.getrusage(resource.RUSAGE_CHILDREN)
with open(f"{folder}/out.ndjson", "rb") as out:
    lines = sum(chunk.count(b"\n") for chunk in iter(lambda: out.read(1 << 20), b""))
print(f"{lines} lines, exit code {code}: {time.perf_counter() - start:.1f} s, CPU {used.ru_utime + used.ru_stime:.1f} s, "
      f"peak {used.ru_maxrss / 1024:.1f} MB")
sys.exit(code)
PY
