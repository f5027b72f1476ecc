"""Small GeoTIFFs of invented ground and heights sampled from them by rasterio (GDAL), bilinear between cell centres.

`python raster.py OUTDIR` writes raster_samples.csv into OUTDIR; `python raster.py OUTDIR RASTERDIR` also writes the
rasters themselves. Without RASTERDIR they are read from fixtures/terrain.
"""

import math
import os
import sys

import numpy as np
import pyproj
import rasterio
from rasterio.transform import from_origin
from rasterio.enums import Resampling
from rasterio.windows import Window

from reference_csv import write_table

HERE = os.path.dirname(os.path.abspath(__file__))
NODATA_16 = -32768

# name, EPSG, west, north, cell, dtype, options, nodata, point cells
RASTERS = [
    ("utm11n_strips_float32", 32611, 300000, 4180000, 10, "float32", {}, None, False),
    ("utm11n_tiles_deflate_float32", 26911, 300000, 4180000, 10, "float32",
     dict(tiled=True, blockxsize=16, blockysize=16, compress="deflate", predictor=3), -9999.0, False),
    ("utm19s_tiles_lzw_int16", 32719, 400000, 6200000, 5, "int16",
     dict(tiled=True, blockxsize=32, blockysize=16, compress="lzw", predictor=2), NODATA_16, False),
    ("degrees_strips_deflate_float64", 4326, -119.52, 37.72, 1 / 10800, "float64", dict(compress="deflate"), None, False),
    ("degrees_nad83_lzw_int32", 4269, -119.52, 37.72, 1 / 10800, "int32", dict(compress="lzw"), -1, False),
    ("utm19s_tiles_lzw_float32_big", 32719, 400000, 6200000, 5, "float32",
     dict(tiled=True, blockxsize=32, blockysize=32, compress="lzw", predictor=3, BIGTIFF="YES", ENDIANNESS="BIG"), -9999.0, False),
    ("utm11n_strips_lzw_int16_big", 32611, 300000, 4180000, 10, "int16",
     dict(compress="lzw", predictor=2, ENDIANNESS="BIG"), -9999, False),
    ("utm33n_point_uint16", 32633, 500000, 5200000, 10, "uint16", {}, 0, True),
]
COLUMNS, ROWS = 60, 48


def ground(columns, rows):
    """A hillside with a ridge and a hollow, metres."""
    c, r = np.meshgrid(np.arange(columns), np.arange(rows))
    return 1500 + 4.0 * r - 1.5 * c + 30 * np.exp(-((c - 30) ** 2) / 40.0) + 12 * np.sin(r / 5.0)


def write(folder):
    os.makedirs(folder, exist_ok=True)
    for name, epsg, west, north, cell, dtype, options, nodata, point in RASTERS:
        z = ground(COLUMNS, ROWS)
        z = np.rint(z) if np.issubdtype(np.dtype(dtype), np.integer) else z
        z = z.astype(dtype)
        if nodata is not None:
            z[10:13, 20:24] = nodata
        with rasterio.open(os.path.join(folder, name + ".tif"), "w", driver="GTiff", width=COLUMNS, height=ROWS, count=1,
                           dtype=dtype, crs=f"EPSG:{epsg}", transform=from_origin(west, north, cell, cell), nodata=nodata,
                           **options) as out:
            out.write(z, 1)
            if point:
                out.update_tags(AREA_OR_POINT="Point")
    refused(folder)


def refused(folder):
    """Rasters that must be refused: a web projection, two bands, a rotated one, feet."""
    z = ground(8, 8).astype("float32")
    def put(name, count=1, epsg=32611, transform=from_origin(300000, 4180000, 10, 10), feet=False):
        with rasterio.open(os.path.join(folder, name + ".tif"), "w", driver="GTiff", width=8, height=8, count=count,
                           dtype="float32", crs=f"EPSG:{epsg}" if epsg else None, transform=transform) as out:
            for band in range(1, count + 1):
                out.write(z, band)
            if feet:
                out.units = ("ft",)
    put("refused_web_mercator", epsg=3857)
    put("refused_two_bands", count=2)
    put("refused_rotated", transform=from_origin(300000, 4180000, 10, 10) @ rasterio.Affine.rotation(20)
        if hasattr(rasterio.Affine, "__matmul__") else from_origin(300000, 4180000, 10, 10) * rasterio.Affine.rotation(20))
    put("refused_feet", feet=True)
    put("refused_no_crs", epsg=None)


def bilinear(band, nodata, column, row):
    """Bilinear between centres from the cells that rasterio read; None beside no data and outside."""
    c0, r0 = math.floor(column), math.floor(row)
    total = 0.0
    for r, wr in ((r0, 1 - (row - r0)), (r0 + 1, row - r0)):
        for c, wc in ((c0, 1 - (column - c0)), (c0 + 1, column - c0)):
            if wr * wc == 0:
                continue
            v = float(band[r, c])
            if nodata is not None and v == nodata:
                return None
            total += wr * wc * v
    return total


def main():
    folder = sys.argv[2] if len(sys.argv) > 2 else os.path.join(HERE, "..", "..", "fixtures", "terrain")
    if len(sys.argv) > 2:
        write(folder)
    rng = np.random.default_rng(20)
    rows = []
    for name, epsg, *_ in RASTERS:
        with rasterio.open(os.path.join(folder, name + ".tif")) as src:
            band = src.read(1)
            to_lonlat = pyproj.Transformer.from_crs(src.crs, f"EPSG:{4269 if epsg in (26911, 4269) else 4326}", always_xy=True)
            points = [(c, r) for c, r in zip(rng.uniform(1, COLUMNS - 2, 12), rng.uniform(1, ROWS - 2, 12))]
            points += [(21.5, 11.5), (19.5, 11.0), (30.0, 20.0), (0.25, 0.25)]
            for column, row in points:
                x, y = src.transform * (column + 0.5, row + 0.5)
                lon, lat = to_lonlat.transform(x, y)
                height = bilinear(band, src.nodata, column, row)
                if height is not None and column > 1:
                    # GDAL's own bilinear reader must agree with the formula where it is not near an edge or a gap.
                    window = Window(column, row, 1, 1)
                    gdal = float(src.read(1, window=window, out_shape=(1, 1), resampling=Resampling.bilinear)[0, 0])
                    tolerance = 0.51 if np.issubdtype(band.dtype, np.integer) else 2e-3
                    assert abs(gdal - height) <= tolerance, (name, column, row, gdal, height)
                rows.append((name, f"{lon:.12f}", f"{lat:.12f}", None if height is None else float(height)))
    write_table("raster_samples.csv", "Heights sampled bilinearly from the rasters of fixtures/terrain.",
                ["rasterio", "pyproj", "numpy"], ["raster", "longitude", "latitude", "height_m"], rows)


if __name__ == "__main__":
    main()
