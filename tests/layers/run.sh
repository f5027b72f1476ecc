#!/usr/bin/env bash
# Opens what the program writes with general-purpose libraries from PyPI (GDAL through pyogrio, jsonschema, lxml) and holds
# it against the GeoJSON beside it. Uses the given program, else the release build.
set -euo pipefail
cd "$(dirname "$0")/../.."
program=${1:-target/release/spallcast}
venv=${SPALLCAST_LAYERS_VENV:-target/layers-venv}
[ -x "$venv/bin/python" ] || python3 -m venv "$venv"
"$venv/bin/python" -m pip install --quiet --disable-pip-version-check -r tests/layers/requirements.txt
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
assess() {
  local status=0
  "$program" assess --burn fixtures/demo/burns.geojson --boulders fixtures/demo/boulders.geojson \
    --trails fixtures/demo/trails.geojson --terrain fixtures/demo/terrain.tif --settings fixtures/demo/settings.toml \
    --draws 16 --format geojson,gpkg --quiet --out "$1" "${@:2}" || status=$?
  # 3: finished, some not assessed; the demo holds records without a fire.
  [ "$status" -eq 0 ] || [ "$status" -eq 3 ]
}
assess "$folder/one"
assess "$folder/two" --threads 1
cmp "$folder/one/spallcast.gpkg" "$folder/two/spallcast.gpkg"
export PYTHONDONTWRITEBYTECODE=1
"$program" schema > "$folder/schema.json"
"$venv/bin/python" tests/layers/check_geopackage.py "$folder/one"
# Footprints: with heights, without, with a hole, and a point beside them.
cat >"$folder/footprints.geojson" <<'END'
{"type":"FeatureCollection","features":[
{"type":"Feature","properties":{"boulder_id":"P1","rock":"granite","diameter_m":2,"exposure":"crown"},"geometry":{"type":"Point","coordinates":[-113.1898,44.5991,1722.0]}},
{"type":"Feature","properties":{"boulder_id":"F1","rock":"granite","diameter_m":2,"exposure":"crown"},"geometry":{"type":"Polygon","coordinates":[[[-113.1898,44.6001,10],[-113.1897,44.6001,11],[-113.1897,44.6002,12],[-113.1898,44.6001,10]]]}},
{"type":"Feature","properties":{"boulder_id":"F2","rock":"granite","diameter_m":2,"exposure":"crown"},"geometry":{"type":"Polygon","coordinates":[[[-113.19,44.61],[-113.1897,44.61],[-113.1897,44.6103],[-113.19,44.6103],[-113.19,44.61]],[[-113.1899,44.6101],[-113.1899,44.6102],[-113.1898,44.6102],[-113.1898,44.6101],[-113.1899,44.6101]]]}}
]}
END
"$program" assess --burn fixtures/demo/burns.geojson --boulders "$folder/footprints.geojson" --draws 16 --format gpkg \
  --settings fixtures/demo/settings.toml --quiet --out "$folder/footprints"
"$venv/bin/python" tests/layers/check_geopackage.py "$folder/footprints" footprints
"$venv/bin/python" tests/layers/check_schema.py "$folder/schema.json" "$folder/one"
"$venv/bin/python" tests/layers/check_styles.py "$folder/one"
