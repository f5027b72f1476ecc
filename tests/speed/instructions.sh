#!/usr/bin/env bash
# Counts the instructions of three small runs under valgrind and holds them against instructions.txt: a guard for speed that
# does not depend on how busy the machine is. Fails when a count differs by more than the allowance, either way: a gain is
# written down like a loss is explained.
#
#   bash tests/speed/instructions.sh [PROGRAM]         compare (release build unless a program is given)
#   bash tests/speed/instructions.sh --set [PROGRAM]   write the counts anew
set -euo pipefail
cd "$(dirname "$0")/../.."
set_anew=no
if [ "${1:-}" = "--set" ]; then set_anew=yes; shift; fi
program=${1:-target/release/spallcast}
kept=tests/speed/instructions.txt
# Counts move by tenths of a per cent with hash seeds and by a few with the compiler.
allowance_percent=3
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT

cat > "$folder/burn.geojson" <<'JSON'
{"type":"FeatureCollection","features":[{"type":"Feature","geometry":{"type":"Polygon","coordinates":[[[-119.6,37.6],[-119.4,37.6],[-119.4,37.8],[-119.6,37.8],[-119.6,37.6]]]},"properties":{"burn_id":"b","exposure":"crown","residence_min":1}}]}
JSON
# COUNT records in CASES thermal cases.
records() {
  awk -v n="$1" -v cases="$2" 'BEGIN { for (i = 0; i < n; i++) printf "{\"type\":\"Feature\",\"geometry\":{\"type\":\"Point\",\"coordinates\":[-119.5,37.7]},\"properties\":{\"boulder_id\":\"B-%d\",\"rock\":\"granite\",\"diameter_m\":%.2f,\"slope_deg\":%d,\"contact\":\"coarse_soil\"}}\n", i, 0.6 + 0.1 * (i % cases), 20 + i % 20 }'
}
# Instructions of a stream of COUNT records in CASES cases.
count() {
  records "$1" "$2" > "$folder/in.ndjson"
  valgrind --tool=callgrind --callgrind-out-file="$folder/profile" \
    "$program" assess --burn "$folder/burn.geojson" --boulders - --out - --threads 1 --quiet --draws 128 \
    < "$folder/in.ndjson" > "$folder/out.ndjson" 2> "$folder/log" || { cat "$folder/log" >&2; exit 1; }
  [ "$(wc -l < "$folder/out.ndjson")" -eq "$1" ] || { echo "not every record came out" >&2; exit 1; }
  awk '/Collected *:/ { print $NF }' "$folder/log"
}
start=$(count 0 1)
one=$(count 1 1)
five=$(count 5 5)
many=$(count 201 1)
{
  echo "start $start"
  echo "boulder_draw $(((five - one) / (4 * 128)))"
  echo "shared_boulder $(((many - one) / 200))"
} > "$folder/counts"
if [ "$set_anew" = yes ]; then
  { echo "# Instructions, by tests/speed/instructions.sh --set: a start without boulders, one draw of a boulder, one boulder that"
    echo "# shares its thermal case. $(rustc --version | cut -d' ' -f1,2), $(uname -m)"
    cat "$folder/counts"; } > "$kept"
  cat "$kept"
  exit 0
fi
status=0
while read -r name now; do
  was=$(awk -v name="$name" '$1 == name { print $2 }' "$kept")
  [ -n "$was" ] || { echo "$name is not in $kept" >&2; exit 1; }
  change=$(awk -v a="$now" -v b="$was" 'BEGIN { printf "%.2f", 100 * (a - b) / b }')
  echo "$name: $now instructions, $was kept, $change %"
  if awk -v c="$change" -v limit="$allowance_percent" 'BEGIN { exit !(c > limit || c < -limit) }'; then
    echo "  more than $allowance_percent % from what is kept: explain a loss, or write a gain down with --set" >&2
    status=1
  fi
done < "$folder/counts"
exit $status
