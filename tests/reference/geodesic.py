"""Distances and bearings on WGS 84 by GeographicLib, held against pyproj, for trails and sources of a few kilometres."""

import random

import pyproj
from geographiclib.geodesic import Geodesic

from reference_csv import write_table


def main():
    draw = random.Random(7)
    geod = pyproj.Geod(ellps="WGS84")
    rows = []
    for lat in (-54.8, -33.0, 0.01, 12.0, 39.55, 60.5, 69.9):
        for lon in (-119.5, 179.999, 13.0):
            for distance in (3.0, 60.0, 400.0, 1900.0):
                bearing = draw.uniform(-180, 180)
                there = Geodesic.WGS84.Direct(lat, lon, bearing, distance)
                back = Geodesic.WGS84.Inverse(lat, lon, there["lat2"], there["lon2"])
                az, _, d = geod.inv(lon, lat, there["lon2"], there["lat2"])
                assert abs(d - back["s12"]) < 1e-6 and abs((az - back["azi1"] + 180) % 360 - 180) < 1e-4
                rows.append((lon, lat, f"{there['lon2']:.14f}", f"{there['lat2']:.14f}", f"{back['s12']:.9f}", f"{back['azi1']:.9f}"))
    write_table("geodesic.csv", "Geodesic distances and forward azimuths on WGS 84.", ["geographiclib", "pyproj"],
                ["lon_a", "lat_a", "lon_b", "lat_b", "distance_m", "azimuth_deg"], rows)


if __name__ == "__main__":
    main()
