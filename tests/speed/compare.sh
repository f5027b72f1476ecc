#!/usr/bin/env bash
# Runs compare.py in an environment of its own; further arguments go to it (`--whole-run`, `--json FILE`).
set -euo pipefail
cd "$(dirname "$0")/../.."
venv=${SPALLCAST_SPEED_VENV:-target/speed-venv}
[ -x "$venv/bin/python" ] || python3 -m venv "$venv"
"$venv/bin/python" -m pip install --quiet --disable-pip-version-check -r tests/speed/requirements.txt
PYTHONDONTWRITEBYTECODE=1 "$venv/bin/python" tests/speed/compare.py "$@"
