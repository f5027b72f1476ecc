"""Writes an invented inventory of lines and a burn over it: inventory.py BOULDERS CASES FOLDER.

CASES distinct thermal cases (rock, size, residence); every boulder stands in its own way, so that only heat can be shared.
"""

import random
import sys
from pathlib import Path

ROCKS = ["granite", "basalt", "sandstone", "limestone", "rhyolite", "gneiss"]


def main():
    boulders, cases, folder = int(sys.argv[1]), int(sys.argv[2]), Path(sys.argv[3])
    pick = random.Random(7)
    kinds = [(ROCKS[i % 6], round(0.4 + 0.05 * (i // 6 % 40), 2), 1 + i // 240) for i in range(cases)]
    with open(folder / "boulders.ndjson", "w", encoding="ascii") as out:
        for i in range(boulders):
            rock, diameter, minutes = kinds[i % cases]
            standing = f',"slope_deg":{pick.uniform(15, 45):.1f}'
            if i % 2:
                standing += (f',"contact":"coarse_soil","support":"none","seat_depth_m":{pick.uniform(0, 0.2):.2f}'
                             f',"centroid_setback_m":{diameter * 0.5:.2f},"centroid_height_m":{diameter * 0.45:.2f}')
            place = f"[{-119.5 + pick.uniform(-0.02, 0.02):.6f},{37.7 + pick.uniform(-0.02, 0.02):.6f}]"
            out.write(f'{{"type":"Feature","geometry":{{"type":"Point","coordinates":{place}}},"properties":{{"boulder_id":"B-{i:07d}"'
                      f',"rock":"{rock}","diameter_m":{diameter},"residence_min":{minutes}{standing}}}}}\n')
    ring = "[[-119.55,37.65],[-119.45,37.65],[-119.45,37.75],[-119.55,37.75],[-119.55,37.65]]"
    (folder / "burn.geojson").write_text(
        '{"type":"FeatureCollection","features":[{"type":"Feature","geometry":{"type":"Polygon","coordinates":[' + ring + ']},'
        '"properties":{"burn_id":"b","exposure":"crown","residence_min":3}}]}\n')


if __name__ == "__main__":
    main()
