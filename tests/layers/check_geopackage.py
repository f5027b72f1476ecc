"""Opens the GeoPackage with GDAL (through pyogrio) and SQLite and holds it against the GeoJSON layers beside it."""

import json
import math
import sqlite3
import struct
import sys
from pathlib import Path

import pyogrio
import pyogrio.raw

# The demo's boulders are points and footprints, so their layer is declared without a kind.
GEOMETRY = {"burns": {"MultiPolygon"}, "boulders": {"Unknown", "Unknown Z"}, "trails": {"LineString", "LineString Z"}}


def features(folder, layer):
    return json.loads((folder / f"{layer}.geojson").read_text())["features"]


def corners(coordinates):
    if isinstance(coordinates[0], (int, float)):
        yield coordinates[:2]
    else:
        for part in coordinates:
            yield from corners(part)


def check_layer(folder, package, layer):
    want = features(folder, layer)
    info = pyogrio.read_info(package, layer=layer, force_total_bounds=True)
    assert info["features"] == len(want), (layer, info["features"], len(want))
    assert info["crs"] == "EPSG:4326", info["crs"]
    assert info["geometry_type"] in GEOMETRY[layer], (layer, info["geometry_type"])
    assert info["capabilities"]["fast_spatial_filter"], f"{layer}: GDAL does not see the spatial index"
    meta, _, geometry, columns = pyogrio.raw.read(package, layer=layer)
    table = {name: column for name, column in zip(meta["fields"], columns)}
    numbers = 0
    for i, feature in enumerate(want):
        for name, value in feature["properties"].items():
            found = table[name][i]
            if isinstance(value, bool):
                assert bool(found) == value, (layer, i, name, found, value)
            elif isinstance(value, (int, float)):
                numbers += 1
                assert float(found) == float(value), (layer, i, name, found, value)
            elif isinstance(value, str) and name != "review_on":
                assert found == value, (layer, i, name, found, value)
            elif value is None:
                assert found is None or found != found or str(found) == "NaT", (layer, i, name, found)
        assert (geometry[i] is None) == (feature["geometry"] is None) or layer == "boulders", (layer, i)
    assert numbers > len(want), f"{layer}: only {numbers} numbers were compared"
    # The index finds what stands in a window: that of the first feature with a place.
    first = next(f for f in want if f["geometry"])
    x, y = next(corners(first["geometry"]["coordinates"]))
    near = pyogrio.raw.read(package, layer=layer, bbox=(x - 1e-3, y - 1e-3, x + 1e-3, y + 1e-3), return_fids=True)[1]
    assert 1 in near, (layer, near)
    assert layer == "burns" or len(near) < len(want), f"{layer}: the window holds everything"
    return len(want)


def check_tables(package):
    database = sqlite3.connect(package)
    one = lambda sql: database.execute(sql).fetchone()[0]
    assert one("PRAGMA application_id") == 0x47504B47
    assert one("PRAGMA user_version") == 10400
    assert one("PRAGMA integrity_check") == "ok"
    assert database.execute("PRAGMA foreign_key_check").fetchall() == []
    stamps = database.execute("SELECT DISTINCT last_change FROM gpkg_contents").fetchall()
    assert stamps == [("2026-09-21T00:00:00.000Z",)], stamps
    for layer in GEOMETRY:
        columns = [row[1] for row in database.execute(f"PRAGMA table_info({layer})")]
        described = dict(database.execute(
            "SELECT column_name, description FROM gpkg_data_columns WHERE table_name = ?", (layer,)))
        assert set(described) == set(columns) - {"fid", "geom"}, layer
        assert all(described.values())
        assert database.execute(f"SELECT count(*) FROM rtree_{layer}_geom").fetchone()[0] == one(
            f"SELECT count(*) FROM {layer} WHERE geom IS NOT NULL")
        triggers = one(f"SELECT count(*) FROM sqlite_master WHERE type = 'trigger' AND tbl_name = '{layer}'")
        assert triggers == 7, (layer, triggers)
        box = database.execute("SELECT min_x, min_y, max_x, max_y FROM gpkg_contents WHERE table_name = ?", (layer,)).fetchone()
        tree = database.execute(f"SELECT min(minx), min(miny), max(maxx), max(maxy) FROM rtree_{layer}_geom").fetchone()
        # The index holds single precision.
        assert all(math.isclose(a, b, rel_tol=1e-6) for a, b in zip(box, tree)), (layer, box, tree)
    text = json.loads(one("SELECT metadata FROM gpkg_metadata"))
    assert "licensed professional" in text["dcterms:description"] and text["dcterms:valid"]
    words = {row[0] for row in database.execute(
        "SELECT value FROM gpkg_data_column_constraints WHERE constraint_name = 'proposal'")}
    used = {row[0] for row in database.execute("SELECT DISTINCT proposal FROM trails")}
    assert used and used <= words, (used, words)


def check_edit(package):
    """GDAL adds and moves a feature: the triggers must keep the index true."""
    meta, _, geometry, columns = pyogrio.raw.read(package, layer="boulders", max_features=1)
    pyogrio.raw.write(package, geometry, columns, meta["fields"], layer="boulders", append=True, driver="GPKG",
                      geometry_type=meta["geometry_type"], crs=meta["crs"])
    database = sqlite3.connect(package)
    rows = database.execute("SELECT count(*) FROM boulders WHERE geom IS NOT NULL").fetchone()[0]
    assert database.execute("SELECT count(*) FROM rtree_boulders_geom").fetchone()[0] == rows
    database.close()


def rings_of(shape, kind):
    """Rings of a well-known binary polygon, or its point as a ring of one: byte order, type, then counts and numbers."""
    width = 3 if int.from_bytes(shape[1:5], "little") > 1000 else 2
    numbers = lambda at: list(struct.unpack_from(f"<{width}d", shape, at))
    if kind == "Point":
        return [[numbers(5)]]
    (count,) = struct.unpack_from("<I", shape, 5)
    rings, at = [], 9
    for _ in range(count):
        (corners,) = struct.unpack_from("<I", shape, at)
        rings.append([numbers(at + 4 + 8 * width * k) for k in range(corners)])
        at += 4 + 8 * width * corners
    assert at == len(shape)
    return rings


def check_footprints(folder):
    """Footprints come out as the polygons that went in, beside points."""
    package = folder / "spallcast.gpkg"
    want = features(folder, "boulders")
    info = pyogrio.read_info(package, layer="boulders")
    assert info["geometry_type"] in ("Unknown", "Geometry", None), info["geometry_type"]
    _, _, geometry, _ = pyogrio.raw.read(package, layer="boulders")
    kinds = {"Point": (1, 1001), "Polygon": (3, 1003)}
    seen = set()
    for feature, shape in zip(want, geometry, strict=True):
        kind, shape = feature["geometry"]["type"], bytes(shape)
        code = int.from_bytes(shape[1:5], "little")
        # GDAL may hand on its own code of a type with heights, with the highest bit set.
        code = code - 0x80000000 + 1000 if code >= 0x80000000 else code
        assert code in kinds[kind], (kind, code)
        want_rings = feature["geometry"]["coordinates"] if kind == "Polygon" else [[feature["geometry"]["coordinates"]]]
        assert rings_of(shape, kind) == want_rings, feature["properties"]["boulder_id"]
        seen.add(kind)
    assert seen == set(kinds), seen
    print(f"GeoPackage: {len(want)} boulders, footprints among them, with the corners of the GeoJSON")


def main():
    folder = Path(sys.argv[1])
    if sys.argv[2:] == ["footprints"]:
        return check_footprints(folder)
    package = folder / "spallcast.gpkg"
    counts = {layer: check_layer(folder, package, layer) for layer in GEOMETRY}
    check_tables(package)
    check_edit(package)
    print(f"GeoPackage: {counts} agree with the GeoJSON, GDAL {'.'.join(map(str, pyogrio.__gdal_version__))}")


main()
