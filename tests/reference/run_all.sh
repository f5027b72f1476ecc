#!/usr/bin/env bash
# Re-run every reference script with pinned libraries and compare with the committed tables. Exit 1 on a difference.
set -euo pipefail
here="$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)"
base="${TMPDIR:-/tmp}"
venv="$base/reference-venv-$(sha256sum "$here/requirements.txt" | cut -c1-12)"
fresh="$(mktemp -d "$base/reference-fresh.XXXXXX")"
trap 'rm -rf "$fresh"' EXIT

if [ ! -e "$venv/complete" ]; then
    rm -rf "$venv"
    "${PYTHON:-python3}" -m venv "$venv"
    "$venv/bin/pip" install --quiet --disable-pip-version-check -r "$here/requirements.txt"
    touch "$venv/complete"
fi

export OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1 PYTHONDONTWRITEBYTECODE=1
scripts=(conduction_nonlinear series_solutions stress_sphere_fem truncated_moments steam flake_integral geodesic raster release)
printf '%s\n' "${scripts[@]}" | xargs -P 2 -I{} "$venv/bin/python" "$here/{}.py" "$fresh"
"$venv/bin/python" "$here/compare.py" "$here" "$fresh"
