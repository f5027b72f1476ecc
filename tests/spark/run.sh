#!/usr/bin/env bash
# Holds the recipes of docs/many-machines.md: the demo's boulders in one run, over Spark and as a job array give the same
# bytes. Uses the given program, else the release build. Needs Java (17 or later) and fetches pyspark from PyPI.
set -euo pipefail
cd "$(dirname "$0")/../.."
program=$(realpath "${1:-target/release/spallcast}")
venv=${SPALLCAST_SPARK_VENV:-target/spark-venv}
[ -x "$venv/bin/python" ] || python3 -m venv "$venv"
"$venv/bin/python" -m pip install --quiet --disable-pip-version-check -r tests/spark/requirements.txt
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
export PYTHONDONTWRITEBYTECODE=1 PYSPARK_PYTHON="$PWD/$venv/bin/python"
demo=fixtures/demo
# Bytes are compared, not figures looked at: few draws do.
sed 's/^draws = .*/draws = 64/' "$demo/settings.toml" > "$folder/settings.toml"
inputs=(--burn "$demo/burns.geojson" --terrain "$demo/terrain.tif" --settings "$folder/settings.toml")

python3 tests/spark/lines.py "$demo/boulders.geojson" > "$folder/boulders.ndjson"
records=$(wc -l < "$folder/boulders.ndjson")
[ "$records" -ge 450 ] || { echo "only $records records" >&2; exit 1; }

echo "one run"
status=0
"$program" assess "${inputs[@]}" --boulders - --out - --quiet < "$folder/boulders.ndjson" > "$folder/one.ndjson" || status=$?
[ "$status" -eq 3 ] || { echo "exit code $status, expected 3: the demo holds records that are refused" >&2; exit 1; }
[ "$(wc -l < "$folder/one.ndjson")" -eq "$records" ]

echo "Spark"
"$venv/bin/python" tests/spark/pieces.py --program "$program" "${inputs[@]}" \
  --boulders "$folder/boulders.ndjson" --out "$folder/spark.ndjson" --pieces 5 2> "$folder/spark.log" ||
  { tail -n 30 "$folder/spark.log" >&2; exit 1; }
cmp "$folder/one.ndjson" "$folder/spark.ndjson"

echo "Spark tells of a piece that fails"
if "$venv/bin/python" tests/spark/pieces.py --program "$program" --burn "$folder/boulders.ndjson" \
  --boulders "$folder/boulders.ndjson" --out "$folder/none.ndjson" --pieces 2 > "$folder/failed.log" 2>&1; then
  echo "a burn file that cannot be used did not fail the job" >&2
  exit 1
fi

echo "job array"
mkdir "$folder/pieces" "$folder/done"
split --number=l/7 --numeric-suffixes=1 --suffix-length=4 "$folder/boulders.ndjson" "$folder/pieces/"
# Any number of tasks, in any order, on any machine that sees the folder: here two at a time, last first.
seq 7 -1 1 | xargs -P 2 -I{} bash tests/spark/array_task.sh {} "$program" "$folder" "${inputs[@]}"
cat "$folder"/done/*.ndjson > "$folder/array.ndjson"
cmp "$folder/one.ndjson" "$folder/array.ndjson"
echo "same bytes: one run, Spark in 5 pieces, job array in 7 ($records boulders)"
