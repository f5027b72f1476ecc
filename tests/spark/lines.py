"""A FeatureCollection as newline-delimited features on standard output: one record a line, each name once.

    python lines.py boulders.geojson > boulders.ndjson

A stream refuses the second record of a name, which it can only notice within one piece: repeated names are left out here.
"""

import json
import sys


def main():
    with open(sys.argv[1], encoding="utf-8") as file:
        features = json.load(file)["features"]
    seen = set()
    for feature in features:
        name = feature.get("properties", {}).get("boulder_id")
        if name is not None and name in seen:
            continue
        seen.add(name)
        print(json.dumps(feature, ensure_ascii=False, separators=(",", ":")))


if __name__ == "__main__":
    main()
