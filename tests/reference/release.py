"""Release of a standing boulder within the horizon by plain random draws, written apart from the program.

Slope N(reading, 2 deg); setback and centroid height 15 % sd; seat sd max(2 cm, 20 %), a recorded zero stays zero;
friction triangular; draws that fail today's dry state are rejected unless a support is there.
"""

import numpy as np

from reference_csv import write_table

DRAWS = 4_000_000
FRICTION = dict(rock=(37, 43, 50), coarse_soil=(30, 35, 40), fine_soil=(25, 30, 35), burnt_duff=(20, 27, 34), wood=(17, 24, 31))
LOSS = dict(sound=.01, scorched=.1, charred=.5, burnt_through=.9)
# slope, contact, support, radius, seat, setback, height
ROWS = [
    (33, "burnt_duff", "burnt_through", .75, .15, .5, .6), (33, "burnt_duff", "charred", .75, .15, .5, .6),
    (26, "burnt_duff", "none", .75, .15, .8, .6), (34, "burnt_duff", "none", .75, .15, .8, .6),
    (30, "coarse_soil", "none", .75, 0, .6, .6), (36, "rock", "scorched", .6, .05, .45, .5),
    (27, "wood", "sound", .5, 0, .4, .5), (24, "fine_soil", "none", .9, 0, .7, .8), (29, "fine_soil", "charred", .9, .2, .5, .8),
]


def release(rng, slope, contact, support, r, t0, x0, h0):
    b = np.radians(slope + 2 * rng.standard_normal(DRAWS))
    phi = np.radians(rng.triangular(*FRICTION[contact], DRAWS))
    x, h = (v * (1 + .15 * rng.standard_normal(DRAWS)) for v in (x0, h0))
    t = np.zeros(DRAWS) if t0 == 0 else np.maximum(0, t0 + max(.02, .2 * t0) * rng.standard_normal(DRAWS))

    def fails(t, uplift):
        seat_angle = np.arccos(np.clip((r - t) / r, -1, 1))
        slides = (t < .01) & (np.tan(phi) * (1 - uplift) < np.tan(b))
        rolls = (t >= .01) & (b > seat_angle)
        return slides | rolls | (x < h * np.tan(b))

    kept = np.ones(DRAWS, bool) if support in LOSS else ~fails(t, 0.0)
    gone = rng.random(DRAWS) < LOSS[support] if support in LOSS else np.ones(DRAWS, bool)
    later = t - rng.random(DRAWS) * t if contact == "burnt_duff" else t
    uplift = np.where(rng.random(DRAWS) < .9, rng.triangular(0, .05, .15, DRAWS), 0)
    return kept.mean(), (kept & gone & fails(later, uplift)).sum() / kept.sum()


def main():
    rng = np.random.default_rng(11)
    rows = [(*row, *(float(v) for v in release(rng, *row))) for row in ROWS]
    write_table("release.csv", "Share of draws that stand today and likelihood of release, four million draws a row.", ["numpy"],
                ["slope_deg", "contact", "support", "radius_m", "seat_m", "setback_m", "height_m", "kept_share", "p_release"], rows)


if __name__ == "__main__":
    main()
