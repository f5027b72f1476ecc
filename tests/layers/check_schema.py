"""Holds the schema against the JSON Schema 2020-12 dialect, the demo's inputs against it, and the layers against its fields."""

import json
import sys
import tomllib
from pathlib import Path

from jsonschema import Draft202012Validator


def main():
    schema = json.loads(Path(sys.argv[1]).read_text())
    folder = Path(sys.argv[2])
    Draft202012Validator.check_schema(schema)
    part = lambda name: Draft202012Validator({"$schema": schema["$schema"], **schema["$defs"][name]})
    demo = Path("fixtures/demo")
    for name in ("burns", "trails"):
        part(name).validate(json.loads((demo / f"{name}.geojson").read_text()))
    settings = tomllib.loads((demo / "settings.toml").read_text())
    part("settings").validate(settings)
    # What must be refused is refused.
    assert not part("settings").is_valid({"draws": 0})
    assert not part("settings").is_valid({"drawz": 512})
    feature = {"type": "Feature", "geometry": {"type": "Point", "coordinates": [0, 0]}, "properties": {"diffusivity_mm2_s": -2.1}}
    layer = {"type": "FeatureCollection", "features": [feature]}
    assert not part("boulders").is_valid(layer)
    feature["properties"] = {"diffusivity_mm2_s": 1.2, "support": "charred", "colour": "red"}
    part("boulders").validate(layer)
    counts = {}
    for file, fields in schema["x-outputs"].items():
        if not file.endswith(".geojson"):
            header = (folder / file).read_text().splitlines()[0].split(",")
            assert header == [f["name"] for f in fields], file
            continue
        for feature in json.loads((folder / file).read_text())["features"]:
            for field in fields:
                Draft202012Validator({"type": field["type"]}).validate(feature["properties"][field["name"]])
        counts[file] = len(fields)
    print(f"schema: demo inputs hold, fields {counts} as listed")


main()
