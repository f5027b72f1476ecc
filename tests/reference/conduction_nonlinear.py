"""Transient conduction into rock with radiation, convection and temperature-dependent k and c, by SciPy.

    rho c(T) dT/dt = (1/r^n) d/dr ( r^n k(T) dT/dr ),  n = 0 half-space, 2 sphere
    q = eps (G - sigma Ts^4) + h (Tg - Ts)             surface flux, kelvin

Method of lines: vertex-centred finite volumes on a sinh-graded grid (first node on the face), LSODA (stiff part:
backward differentiation up to order 5) with a banded Jacobian, restarted at every kink of the forcing. Each case runs on
N and 2N cells; the table holds the Richardson-extrapolated value and its distance from the 2N value as error estimate.
The absorbed heat is integrated as one more unknown. Inputs: `conduction_cases.json`, written from CASES below, so that
another program can set up the same problems.

Property laws as published: Vosteen & Schellschmidt 2003 and Sekiguchi 1984 for k, mixture ratios for c (linear between
rows, constant beyond the ends). The 20 C conductivity is k20 = kappa rho c20; Vosteen's k25 is solved for so that the law gives k20 at 20 C.
"""

import json
import sys

import numpy as np
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq
from scipy.special import erfc

from reference_csv import output_path, write_table

SIGMA = 5.670374419e-8
ICE = 273.15
AMBIENT_C = 26.85
CELLS = 240
DEPTHS_MM = [0, 1, 2, 5, 10, 20, 50, 100, 200]

RATIO_T = [20, 100, 200, 300, 400, 500, 550, 600, 700, 800, 900]
RATIO_C = {
    "granite": [1, 1.1623, 1.2961, 1.3922, 1.4699, 1.5462, 1.6123, 1.5458, 1.5888, 1.6092, 1.5920],
    "basalt": [1, 1.1521, 1.2718, 1.3546, 1.4194, 1.4788, 1.5220, 1.4940, 1.5312, 1.5536, 1.5518],
    "andesite": [1, 1.1590, 1.2860, 1.3758, 1.4481, 1.5184, 1.5761, 1.5250, 1.5681, 1.5888, 1.5709],
    "sandstone": [1, 1.1809, 1.3261, 1.4305, 1.5202, 1.6297, 1.7716, 1.5309, 1.5644, 1.5911, 1.6122],
    "limestone": [1, 1.1324, 1.2394, 1.3158, 1.3768, 1.4304, 1.4577, 1.4766, 1.5278, 1.5910, 1.7119],
    "chalk": [1, 1.1314, 1.2370, 1.3121, 1.3720, 1.4244, 1.4502, 1.4717, 1.5228, 1.5865, 1.7098],
}
# median diffusivity m2/s, mean density kg/m3, mean specific heat at 20 C J/kgK
ROCK = {
    "granite": (1.42e-6, 2640.0, 775.0),
    "basalt": (8.22e-7, 2850.0, 790.0),
    "andesite": (8.71e-7, 2560.0, 785.0),
    "sandstone": (1.39e-6, 2300.0, 780.0),
    "limestone": (1.12e-6, 2550.0, 840.0),
    "chalk": (6.39e-7, 1750.0, 850.0),
}


# ---- property laws -------------------------------------------------------------------------------------------------

VOSTEEN = {"crystalline": (0.0030, 0.0042, 0.53, 0.5, 1.13, 0.42), "sedimentary": (0.0034, 0.0039, 0.54, 0.5, 1.16, 0.39)}


def vosteen_k0(law, k25):
    _, _, p, s, u, v = VOSTEEN[law]
    return p * k25 + s * np.sqrt(max(u * k25 * k25 - v * k25, 0.0))


def vosteen(law, k25, t_c):
    a, b = VOSTEEN[law][:2]
    k0 = vosteen_k0(law, k25)
    return k0 / (0.99 + t_c * max(a - b / k0, 0.0))


def vosteen_k25(law, k20):
    return brentq(lambda k: vosteen(law, k, 20.0) - k20, 0.5 * k20, 1.5 * k20, xtol=1e-14, rtol=1e-14)


def conductivity(material):
    """k(T), T in kelvin."""
    law, k20 = material["conductivity_law"], material["k20_w_m_k"]
    if law == "constant":
        return lambda t: np.full_like(t, k20)
    if law == "sekiguchi":
        return lambda t: 1.84 + 358.0 * (1.0227 * k20 - 1.882) * (1.0 / t - 0.00068)
    k25 = material["k25_w_m_k"]
    k0 = vosteen_k0(law, k25)
    a, b = VOSTEEN[law][:2]
    slope = max(a - b / k0, 0.0)
    scale = material.get("scale", 1.0)
    return lambda t: scale * k0 / (0.99 + (t - ICE) * slope)


def heat_capacity(material):
    """rho c(T), T in kelvin."""
    base = material["density_kg_m3"] * material["c20_j_kg_k"]
    if not material["specific_heat_ratio"]:
        return lambda t: np.full_like(t, base)
    rows = np.array(material["specific_heat_ratio"])
    return lambda t: base * np.interp(t - ICE, rows[:, 0], rows[:, 1])


def constant(k, rho, c):
    return {"conductivity_law": "constant", "k20_w_m_k": k, "k25_w_m_k": None, "density_kg_m3": rho, "c20_j_kg_k": c,
            "specific_heat_ratio": []}


def rock(name, law):
    kappa, rho, c20 = ROCK[name]
    k20 = kappa * rho * c20
    k25 = vosteen_k25(law, k20) if law in VOSTEEN else None
    return {"conductivity_law": law, "k20_w_m_k": k20, "k25_w_m_k": k25, "density_kg_m3": rho, "c20_j_kg_k": c20,
            "specific_heat_ratio": [list(r) for r in zip(RATIO_T, RATIO_C[name])], "rock": name}


def granite_constant():
    kappa, rho, c20 = ROCK["granite"]
    return constant(kappa * rho * c20, rho, c20)


# ---- forcings ------------------------------------------------------------------------------------------------------


def series(knots, emissivity=0.9):
    """Knots [time_s, irradiance_w_m2, gas_c, h_w_m2_k], linear between, the last value held."""
    return {"kind": "irradiance_gas_series", "emissivity": emissivity, "knots": knots}


def pulse(g, gas_c, h, t_r, tau, emissivity=0.9, ambient_c=AMBIENT_C, h_after=None):
    """Plateau values; `h_after` is the coefficient once the residence is over (the same unless given)."""
    return {"kind": "pulse", "emissivity": emissivity, "irradiance_w_m2": g, "gas_c": gas_c, "h_w_m2_k": h,
            "h_after_w_m2_k": h if h_after is None else h_after, "residence_s": t_r, "growth_s": min(0.25 * t_r, 60.0), "decay_s": tau,
            "ambient_c": ambient_c}


def segments(forcing, end):
    """Smooth stretches of the forcing: (start, stop, function(t) -> (irradiance, gas K, h)) or a scalar function."""
    kind = forcing["kind"]
    if kind == "pulse":
        amb = forcing["ambient_c"] + ICE
        tg, tr, tau = forcing["growth_s"], forcing["residence_s"], forcing["decay_s"]
        rise_g = forcing["irradiance_w_m2"] - SIGMA * amb**4
        rise_t = forcing["gas_c"] + ICE - amb

        def level(shape, h):
            def at(t):
                s = shape(t)
                return SIGMA * amb**4 + s * rise_g, amb + s * rise_t, h
            return at

        h, after = forcing["h_w_m2_k"], forcing["h_after_w_m2_k"]
        return [(0.0, tg, level(lambda t: (t / tg) ** 2, h)), (tg, tr, level(lambda t: 1.0, h)),
                (tr, end, level(lambda t: np.exp(-(t - tr) / tau), after))]
    knots = np.array(forcing["knots"], dtype=float)
    out = []
    for i in range(len(knots)):
        start = knots[i, 0]
        stop = knots[i + 1, 0] if i + 1 < len(knots) else end
        if stop <= start or start >= end:
            continue
        low = knots[i, 1:].copy()
        slope = (knots[i + 1, 1:] - low) / (stop - start) if i + 1 < len(knots) else np.zeros_like(low)
        if kind == "irradiance_gas_series":
            low[1] += ICE
            out.append((start, min(stop, end), lambda t, a=low, b=slope, s=start: a + b * (t - s)))
        elif kind == "surface_temperature_series":
            out.append((start, min(stop, end), lambda t, a=low[0], b=slope[0], s=start: (a + ICE + b * (t - s), b)))
        else:
            out.append((start, min(stop, end), lambda t, a=low[0], b=slope[0], s=start: a + b * (t - s)))
    return out


# ---- solver --------------------------------------------------------------------------------------------------------


def solve(case, cells):
    """Rows (time, temperatures at the depths, surface flux, absorbed J/m2 of surface)."""
    material, forcing = case["material"], case["forcing"]
    k_of, rc_of = conductivity(material), heat_capacity(material)
    times = np.array(case["times_s"], dtype=float)
    end = times[-1]
    radius = case["radius_m"]
    kappa = material["k20_w_m_k"] / (material["density_kg_m3"] * material["c20_j_kg_k"])
    xi = np.linspace(0.0, 1.0, cells + 1)
    mid = 0.5 * (xi[1:] + xi[:-1])
    if radius is None:
        length, grade = 10.0 * np.sqrt(kappa * end), 6.5
    else:
        length, grade = radius, 3.5
    place = lambda s: length * np.sinh(grade * s) / np.sinh(grade)
    x, face = place(xi), place(mid)
    edges = np.concatenate([[0.0], face, [length]])
    if radius is None:
        area, volume = np.ones_like(face), np.diff(edges)
    else:
        area = ((radius - face) / radius) ** 2
        volume = -np.diff((radius - edges) ** 3) / (3.0 * radius**2)
    gap = np.diff(x)
    given_surface = forcing["kind"] == "surface_temperature_series"
    eps = forcing.get("emissivity", 0.0)

    def surface_flux(at, t, ts, inner, rc0):
        if forcing["kind"] == "flux_series":
            return at(t)
        if given_surface:  # what enters is what leaves inwards plus what the half cell takes up
            return inner + rc0 * volume[0] * at(t)[1]
        g, gas, h = at(t)
        return eps * (g - SIGMA * ts**4) + h * (gas - ts)

    def rate(at, t, y):
        temp = y[1:]
        flow = area * k_of(0.5 * (temp[1:] + temp[:-1])) * (temp[:-1] - temp[1:]) / gap
        rc = rc_of(temp)
        q = surface_flux(at, t, temp[0], flow[0], rc[0])
        out = np.empty_like(y)
        out[0] = q
        out[2:-1] = (flow[:-1] - flow[1:]) / (rc[1:-1] * volume[1:-1])
        out[-1] = flow[-1] / (rc[-1] * volume[-1])
        out[1] = at(t)[1] if given_surface else (q - flow[0]) / (rc[0] * volume[0])
        return out

    y = np.concatenate([[0.0], np.full(cells + 1, case["initial_c"] + ICE)])
    atol = np.concatenate([[1e-2], np.full(cells + 1, 1e-7)])
    rows = {}
    for start, stop, at in segments(forcing, end):
        if given_surface:
            y[1] = at(start)[0]
        wanted = np.unique(np.append(times[(times > start) & (times <= stop)], stop))
        got = solve_ivp(lambda t, v: rate(at, t, v), (start, stop), y, method="LSODA", t_eval=wanted, rtol=1e-9, atol=atol,
                        lband=2 if given_surface else 1, uband=2)
        assert got.success, got.message
        y = got.y[:, -1]
        for i, t in enumerate(wanted):
            if t in times:
                v = got.y[:, i]
                temp = v[1:]
                at_depth = CubicSpline(x, temp - ICE)(np.array(case["depths_mm"]) * 1e-3)
                rows[t] = (at_depth, rate(at, t, v)[0], v[0])
    return [rows[t] for t in times]


# ---- cases ---------------------------------------------------------------------------------------------------------

SERIES = [[0, 500, 25, 12], [20, 8e3, 200, 15], [30, 140e3, 1050, 35], [75, 120e3, 950, 35], [80, 30e3, 500, 25],
          [200, 45e3, 650, 20], [420, 25e3, 400, 15], [430, 1.2e3, 60, 12], [900, 450, 25, 12]]
SERIES_T = [5, 15, 25, 30, 40, 60, 75, 80, 100, 200, 300, 420, 430, 500, 700, 900, 1200]
PULSE_T = [5, 10, 20, 30, 45, 60, 75, 90, 120, 180, 300, 600, 900]
LONG_T = [30, 60, 120, 300, 600, 900, 1800, 3600, 5400, 7200, 10800, 14400, 21600]
DEAD_T = [10, 30, 60, 120, 200, 300, 450, 600, 900, 1800, 3600, 7200]
STEADY_T = [1, 5, 10, 30, 60, 120, 300, 600]
MEASURED_SURFACE = [[0, 20], [30, 60], [60, 310], [90, 420], [150, 380], [300, 220], [600, 110], [1200, 60]]
MEASURED_FLUX = [[0, 0], [10, 5e3], [20, 60e3], [50, 45e3], [60, 10e3], [180, 12e3], [200, -3e3], [600, -1e3], [900, 0]]


def cases():
    crystalline, andesite = rock("granite", "crystalline"), rock("andesite", "constant")
    steady = series([[0, 50e3, 800, 20]])
    sphere = series([[0, 25e3, 600, 25]])
    crown = pulse(120e3, 1000, 35, 45, 60)
    listed = [
        ("steady_constant_properties", constant(2.5, 2650.0, 800.0), steady, 20, None, STEADY_T),
        ("steady_granite", crystalline, steady, 20, None, STEADY_T),
        ("changing_constant_properties", constant(2.5, 2650.0, 800.0), series(SERIES), 25, None, SERIES_T),
        ("changing_granite", crystalline, series(SERIES), 25, None, SERIES_T),
        ("crown_granite", crystalline, crown, AMBIENT_C, None, PULSE_T),
        ("crown_granite_calm_after", crystalline, pulse(120e3, 1000, 35, 45, 60, h_after=12.0), AMBIENT_C, None, PULSE_T),
        ("log_contact_granite", crystalline, pulse(40e3, 700, 12, 5400, 3600), AMBIENT_C, None, LONG_T),
        ("heavy_dead_wood_sandstone", rock("sandstone", "sedimentary"), pulse(60e3, 850, 20, 600, 1500), AMBIENT_C, None, DEAD_T),
        ("crown_limestone", rock("limestone", "sedimentary"), crown, AMBIENT_C, None, PULSE_T),
        ("log_contact_basalt", rock("basalt", "crystalline"), pulse(40e3, 700, 12, 5400, 3600), AMBIENT_C, None, LONG_T),
        ("shrub_chalk", rock("chalk", "sekiguchi"), pulse(70e3, 900, 30, 35, 45), AMBIENT_C, None, PULSE_T),
        ("shrub_andesite_constant_k", andesite, pulse(70e3, 900, 30, 35, 45), AMBIENT_C, None, PULSE_T),
        ("surface_series_constant_properties", granite_constant(), {"kind": "surface_temperature_series", "knots": MEASURED_SURFACE},
         20, None, [15, 30, 60, 90, 150, 300, 600, 1200]),
        ("surface_series_granite", crystalline, {"kind": "surface_temperature_series", "knots": MEASURED_SURFACE},
         20, None, [15, 30, 60, 90, 150, 300, 600, 1200]),
        ("flux_series_constant_properties", granite_constant(), {"kind": "flux_series", "knots": MEASURED_FLUX}, 20, None,
         [10, 20, 35, 50, 60, 180, 200, 400, 600, 900]),
        ("flux_series_granite", crystalline, {"kind": "flux_series", "knots": MEASURED_FLUX}, 20, None,
         [10, 20, 35, 50, 60, 180, 200, 400, 600, 900]),
        ("sphere_25mm_constant_properties", granite_constant(), sphere, 20, 0.025, [10, 30, 60, 120, 300, 600, 1200]),
        ("sphere_25mm_granite", crystalline, sphere, 20, 0.025, [10, 30, 60, 120, 300, 600, 1200]),
        ("sphere_100mm_constant_properties", granite_constant(), sphere, 20, 0.10, [10, 60, 300, 600, 1200, 3600, 7200]),
        ("sphere_100mm_granite", crystalline, sphere, 20, 0.10, [10, 60, 300, 600, 1200, 3600, 7200]),
        ("sphere_150mm_sandstone_dead_wood", rock("sandstone", "sedimentary"), pulse(60e3, 850, 20, 600, 1500), AMBIENT_C, 0.15, DEAD_T),
        ("grass_granite", crystalline, pulse(40e3, 850, 30, 12, 8), AMBIENT_C, None, [3, 6, 12, 15, 20, 30, 60, 120]),
    ]
    out = []
    for name, material, forcing, initial, radius, times in listed:
        depths = [d for d in DEPTHS_MM if radius is None or d <= radius * 1e3]
        if radius is not None and depths[-1] != radius * 1e3:
            depths.append(radius * 1e3)  # the centre
        out.append({"case": name, "material": material, "forcing": forcing, "initial_c": initial, "radius_m": radius,
                    "depths_mm": depths, "times_s": times})
    return out


def closed_form_check():
    """The same solver on two linear problems with closed forms (Carslaw & Jaeger); largest error in percent of the rise."""
    k, rho, c = 2.5, 2650.0, 800.0
    times, depths = np.array([5.0, 60.0, 600.0]), [0, 1, 5, 20]
    worst = 0.0
    for forcing in ({"kind": "flux_series", "knots": [[0, 5e4]]}, series([[0, 0.0, 900, 100]], emissivity=0.0)):
        case = {"material": constant(k, rho, c), "forcing": forcing, "initial_c": 20.0, "radius_m": None, "depths_mm": depths, "times_s": times}
        coarse, fine = solve(case, CELLS), solve(case, 2 * CELLS)
        got = np.array([b[0] + (b[0] - a[0]) / 3.0 for a, b in zip(coarse, fine)]) - 20.0
        x, root = np.array(depths) * 1e-3, np.sqrt(k / (rho * c) * times)[:, None]
        s = x / (2.0 * root)
        if forcing["kind"] == "flux_series":
            exact = 2.0 * 5e4 / k * root * (np.exp(-s * s) / np.sqrt(np.pi) - s * erfc(s))
        else:
            b = 100.0 / k
            exact = 880.0 * (erfc(s) - np.exp(b * x + (b * root) ** 2) * erfc(s + b * root))
        worst = max(worst, 100.0 * np.max(np.abs(got - exact)) / np.max(exact))
    print(f"closed forms: largest error {worst:.6f} % of the rise", file=sys.stderr)
    assert worst < 0.002


def main():
    closed_form_check()
    listed = cases()
    with open(output_path("conduction_cases.json"), "w") as out:
        json.dump({"about": "Inputs of conduction_nonlinear.csv; units in the names, temperatures in degrees Celsius; "
                            "radius null = half-space; flux into the rock positive", "cases": listed}, out, indent=1)
        out.write("\n")
    rows, worst = [], 0.0
    for case in listed:
        coarse, fine = solve(case, CELLS), solve(case, 2 * CELLS)
        best = [tuple(f + (f - c) / 3.0 for c, f in zip(a, b)) for a, b in zip(coarse, fine)]
        rise = max(np.max(np.abs(b[0] - case["initial_c"])) for b in best)
        for t, b, f in zip(case["times_s"], best, fine):
            for d, value, other in zip(case["depths_mm"], b[0], f[0]):
                share = 100.0 * abs(value - other) / rise
                worst = max(worst, share)
                rows.append((case["case"], float(t), float(d), value, b[1], b[2] * 1e-6, share))
        print(f"{case['case']:40s} peak rise {rise:8.3f} K  error {max(r[6] for r in rows if r[0] == case['case']):.5f} %", file=sys.stderr)
    assert worst <= 0.02, f"grid not converged: {worst} % of the rise"
    write_table("conduction_nonlinear.csv",
                "Transient conduction, inputs in conduction_cases.json; flux and absorbed heat per area of surface.\n"
                "error_pct_of_rise: distance of the extrapolated value from the finer grid's, in percent of the case's largest rise.",
                ["numpy", "scipy"],
                ["case", "time_s", "depth_mm", "temperature_c", "surface_flux_w_m2", "absorbed_mj_m2", "error_pct_of_rise"], rows)
    crown_check()


READINGS = [
    # name, properties, h after the residence (None: class value), start = ambient C, exposure
    ("constant_class_h_25", "constant", None, 25.0, "crown"),
    ("constant_class_h", "constant", None, AMBIENT_C, "crown"),
    ("constant_calm_after_25", "constant", 12.0, 25.0, "crown"),
    ("constant_calm_after", "constant", 12.0, AMBIENT_C, "crown"),
    ("granite_class_h", "law", None, AMBIENT_C, "grass"),
    ("granite_calm_after", "law", 12.0, AMBIENT_C, "grass"),
    ("granite_class_h", "law", None, AMBIENT_C, "shrub"),
    ("granite_calm_after", "law", 12.0, AMBIENT_C, "shrub"),
    ("granite_class_h", "law", None, AMBIENT_C, "crown"),
    ("granite_class_h_k25_equal_k20", "law_k25_equal_k20", None, AMBIENT_C, "crown"),
    ("granite_calm_after", "law", 12.0, AMBIENT_C, "crown"),
    ("granite_class_h", "law", None, AMBIENT_C, "heavy_dead_wood"),
    ("granite_class_h_k25_equal_k20", "law_k25_equal_k20", None, AMBIENT_C, "heavy_dead_wood"),
    ("granite_calm_after", "law", 12.0, AMBIENT_C, "heavy_dead_wood"),
    ("granite_class_h", "law", None, AMBIENT_C, "log_contact"),
]
CLASS = {"grass": (40e3, 850, 30, 12, 8), "shrub": (70e3, 900, 30, 35, 45), "crown": (120e3, 1000, 35, 45, 60),
         "heavy_dead_wood": (60e3, 850, 20, 600, 1500), "log_contact": (40e3, 700, 12, 5400, 3600)}


def crown_check():
    """Peaks at 0, 10, 20 mm of class medians under the two readings of h in the decay and of k25."""
    rows = []
    for name, properties, h_after, start, exposure in READINGS:
        material = constant(2.5, 2650.0, 800.0) if properties == "constant" else rock("granite", "crystalline")
        if properties == "law_k25_equal_k20":  # the law's shape at k25 = k20, scaled to k20
            material["k25_w_m_k"] = material["k20_w_m_k"]
            material["scale"] = material["k20_w_m_k"] / vosteen("crystalline", material["k20_w_m_k"], 20.0)
        g, gas, h, t_r, tau = CLASS[exposure]
        end = t_r + max(6.0 * tau, 900.0)
        times = np.union1d(np.geomspace(0.1 * t_r, end, 1500), [t_r])
        case = {"material": material, "initial_c": start, "radius_m": None, "depths_mm": [0, 10, 20],
                "forcing": pulse(g, gas, h, t_r, tau, 0.9, start, h_after), "times_s": list(times)}
        got = solve(case, CELLS)
        table = np.array([r[0] for r in got])
        peaks = table.max(axis=0)
        rows.append((name, exposure, h if h_after is None else h_after, start, *peaks, max(r[2] for r in got) * 1e-6))
    write_table("pulse_peaks.csv",
                "Peak temperatures of class-median pulses in a half-space, emissivity .9, start = ambient, growth min(t_r/4, 60 s).\n"
                "constant: k 2.5, rho c 2.12e6. granite: medians with k(T), c(T). class_h: h keeps the class value in the decay;\n"
                "calm_after: h = 12 from the end of the residence. k25_equal_k20: law's shape at k25 = k20, scaled to k20 at 20 C.",
                ["numpy", "scipy"],
                ["reading", "exposure", "h_after_w_m2_k", "initial_and_ambient_c", "peak_0mm_c", "peak_10mm_c", "peak_20mm_c",
                 "absorbed_max_mj_m2"], rows)


if __name__ == "__main__":
    main()
