"""One conduction problem at equal error: ours beside SciPy (LSODA, banded), numba, and a plain C solve.

The problem: granite half-space with k(T) and c(T), the median crown fire at its face, to 195 s. Each solver is judged by its
face temperature at its own steps against a fine reference (LSODA on 800 cells, tight tolerances), largest difference as a share of
the rise. Ours is the ensemble's own resolution. SciPy and numba are tuned: of all grids and tolerances tried, the cheapest whose
error is no larger than ours counts. The C solve is what it is: 64 graded cells, 150 implicit steps, `cc -O2`.

Our time is the longer job: march on past the cooling, stress and every spall family (see `column.rs`).

    python3 -m venv target/speed-venv && target/speed-venv/bin/pip install -r tests/speed/requirements.txt
    target/speed-venv/bin/python tests/speed/compare.py [--whole-run] [--json FILE]

`--whole-run` adds the CPU time of `spallcast assess` on boulders of which no two are alike, reading to writing, per boulder-draw.
"""

import argparse
import datetime
import json
import os
import platform
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numba
import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.interpolate import CubicSpline

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]
SIGMA, ICE, END_S = 5.670374419e-8, 273.15, 195.0
# Ratios of the specific heat of granite to 20 C: src/rock/tables/rock_temperature_ratios.csv, held equal below.
RATIO_C = np.array([20, 100, 200, 300, 400, 500, 550, 600, 700, 800, 900], dtype=float)
RATIO = np.array([1, 1.1623, 1.2961, 1.3922, 1.4699, 1.5462, 1.6123, 1.5458, 1.5888, 1.6092, 1.5920])
WHOLE_BOULDERS, WHOLE_DRAWS = 64, 512


def k0_and_slope(k20):
    """Vosteen & Schellschmidt 2003, crystalline: k0 at 0 C and the slope of 0.99 + T slope, so that k(20 C) = k20."""
    def law(k25):
        k0 = 0.53 * k25 + 0.5 * np.sqrt(max(1.13 * k25 * k25 - 0.42 * k25, 0.0))
        return k0, max(0.0030 - 0.0042 / k0, 0.0)
    low, high = 0.5 * k20, 1.5 * k20
    for _ in range(100):
        mid = 0.5 * (low + high)
        k0, slope = law(mid)
        low, high = (mid, high) if k0 / (0.99 + 20.0 * slope) < k20 else (low, mid)
    return law(low)


def problem(ours):
    k20 = ours["diffusivity_m2_s"] * ours["density_kg_m3"] * ours["specific_heat_j_kg_k"]
    k0, slope = k0_and_slope(k20)
    depth = 4.5 * np.sqrt(ours["diffusivity_m2_s"] * (ours["residence_s"] + 10.0 * ours["decay_s"]))
    rho_c = ours["density_kg_m3"] * ours["specific_heat_j_kg_k"]
    return dict(eps=ours["emissivity"], g=ours["irradiance_w_m2"], gas=ours["gas_k"], h=ours["h_w_m2_k"],
                growth=ours["growth_s"], residence=ours["residence_s"], decay=ours["decay_s"], ambient=ours["ambient_k"],
                rho_c=rho_c, k0=k0, slope=slope, depth=depth)


def grid(cells, depth, stretch):
    """Nodes (first on the face) and their control volumes, graded by a hyperbolic sine."""
    nodes = depth * np.sinh(stretch * np.linspace(0, 1, cells + 1)) / np.sinh(stretch)
    edges = np.concatenate([[0.0], 0.5 * (nodes[1:] + nodes[:-1]), [depth]])
    return nodes, np.diff(edges)


def legs(p):
    ambient4 = SIGMA * p["ambient"] ** 4
    def level(shape):
        return lambda t: (ambient4 + shape(t) * (p["g"] - ambient4), p["ambient"] + shape(t) * (p["gas"] - p["ambient"]))
    return [(0.0, p["growth"], level(lambda t: (t / p["growth"]) ** 2)), (p["growth"], p["residence"], level(lambda t: 1.0)),
            (p["residence"], END_S, level(lambda t: np.exp(-(t - p["residence"]) / p["decay"])))]


def lsoda(p, cells, stretch, rtol, times=None, atol=None):
    """Face temperatures at `times`, or at the solver's own steps."""
    nodes, volume = grid(cells, p["depth"], stretch)
    gap, heat = np.diff(nodes), p["rho_c"] * volume
    k0, slope, eps, h = p["k0"], p["slope"], p["eps"], p["h"]
    table_k, table_r = RATIO_C + ICE, RATIO
    def rate(at, t, y):
        flow = k0 / (0.99 + slope * (0.5 * (y[1:] + y[:-1]) - ICE)) * (y[:-1] - y[1:]) / gap
        g, gas = at(t)
        net = np.empty_like(y)
        net[0] = eps * (g - SIGMA * y[0] ** 4) + h * (gas - y[0]) - flow[0]
        net[1:-1] = flow[:-1] - flow[1:]
        net[-1] = flow[-1]
        return net / (heat * np.interp(y, table_k, table_r))
    y = np.full(cells + 1, p["ambient"])
    out_t, out_y = [], []
    for start, stop, at in legs(p):
        wanted = None if times is None else np.unique(np.append(times[(times > start) & (times <= stop)], stop))
        got = solve_ivp(lambda t, v: rate(at, t, v), (start, stop), y, method="LSODA", rtol=rtol,
                        atol=atol or rtol * 100.0, t_eval=wanted, lband=1, uband=1)
        assert got.success, got.message
        y = got.y[:, -1]
        out_t.append(got.t if times is not None else got.t[1:])
        out_y.append(got.y[0] if times is not None else got.y[0][1:])
    return np.concatenate(out_t), np.concatenate(out_y)


@numba.njit(cache=False, fastmath=False)
def conduct(times, growth, residence, decay, eps, g, gas, h, ambient, rho_c, k0, slope, gap, volume, table_k, table_r, face):
    """Scalar two-stage Rosenbrock (ROS2) with frozen coefficients, Thomas elimination: second order in time."""
    gamma = 1.0 - 0.7071067811865476
    n = volume.size
    t, f, k1, k2 = np.full(n, ambient), np.empty(n), np.empty(n), np.empty(n)
    stage, link, cap, follow, pivot = np.empty(n), np.empty(n - 1), np.empty(n), np.empty(n), np.empty(n)
    ambient4 = SIGMA * ambient**4
    row = np.zeros(n, np.int64)
    for step in range(times.size - 1):
        dt = times[step + 1] - times[step]
        gdt = gamma * dt
        for s in range(2):
            at = times[step] if s == 0 else times[step + 1]
            # A step belongs to the leg that holds its middle.
            middle = 0.5 * (times[step] + times[step + 1])
            if middle < growth:
                level = (at / growth) ** 2
            elif middle < residence:
                level = 1.0
            else:
                level = np.exp(-(at - residence) / decay)
            if s == 0:
                g0, gas0 = ambient4 + level * (g - ambient4), ambient + level * (gas - ambient)
            else:
                g1, gas1 = ambient4 + level * (g - ambient4), ambient + level * (gas - ambient)
        for i in range(n):
            r = row[i]
            while r + 2 < table_k.size and t[i] > table_k[r + 1]:
                r += 1
            while r > 0 and t[i] < table_k[r]:
                r -= 1
            row[i] = r
            share = min(max((t[i] - table_k[r]) / (table_k[r + 1] - table_k[r]), 0.0), 1.0)
            cap[i] = rho_c * volume[i] * (table_r[r] + share * (table_r[r + 1] - table_r[r]))
        for i in range(n - 1):
            link[i] = k0 / (0.99 + slope * (0.5 * (t[i] + t[i + 1]) - 273.15)) / gap[i]
        drift = gdt / dt * (eps * (g1 - g0) + h * (gas1 - gas0))
        flux = eps * (g0 - SIGMA * t[0] ** 4) + h * (gas0 - t[0])
        up = flux + drift
        for i in range(n):
            down = link[i] * (t[i] - t[i + 1]) if i + 1 < n else 0.0
            f[i] = up - down
            up = down
        # (cap - gdt J) k = f, eliminated from the face down.
        above = 4.0 * eps * SIGMA * t[0] ** 3 + h
        for i in range(n):
            below = link[i] if i + 1 < n else 0.0
            d = cap[i] + gdt * (above + below)
            if i > 0:
                d -= gdt * above * follow[i - 1]
            pivot[i] = 1.0 / d
            follow[i] = gdt * below * pivot[i]
            k1[i] = (f[i] + (gdt * above * k1[i - 1] if i > 0 else 0.0)) * pivot[i]
            above = below
        for i in range(n - 2, -1, -1):
            k1[i] += follow[i] * k1[i + 1]
        for i in range(n):
            stage[i] = t[i] + dt * k1[i]
        up = eps * (g1 - SIGMA * stage[0] ** 4) + h * (gas1 - stage[0]) - drift
        above = 0.0
        for i in range(n):
            r = row[i]
            while r + 2 < table_k.size and stage[i] > table_k[r + 1]:
                r += 1
            while r > 0 and stage[i] < table_k[r]:
                r -= 1
            share = min(max((stage[i] - table_k[r]) / (table_k[r + 1] - table_k[r]), 0.0), 1.0)
            new = rho_c * volume[i] * (table_r[r] + share * (table_r[r + 1] - table_r[r]))
            down = 0.0
            if i + 1 < n:
                down = k0 / (0.99 + slope * (0.5 * (stage[i] + stage[i + 1]) - 273.15)) / gap[i] * (stage[i] - stage[i + 1])
            # The rate is flux over capacity: brought to the capacity of the matrix.
            right = (up - down) * cap[i] / new - 2.0 * cap[i] * k1[i]
            k2[i] = (right + (gdt * above * k2[i - 1] if i > 0 else 0.0)) * pivot[i]
            up = down
            above = link[i] if i + 1 < n else 0.0
        for i in range(n - 2, -1, -1):
            k2[i] += follow[i] * k2[i + 1]
        for i in range(n):
            t[i] += dt * (1.5 * k1[i] + 0.5 * k2[i])
        face[step] = t[0]


def plan(p, refine):
    """Steps as ours are laid: even in the growth, lengthening on the plateau and in the decay; `refine` multiplies them."""
    count = lambda n: max(2, round(n * refine))
    growth = np.linspace(0, p["growth"], count(10) + 1)
    lead, whole = 0.4 * p["growth"], p["residence"] - p["growth"]
    n = count(24)
    plateau = p["growth"] - lead + lead * ((whole + lead) / lead) ** (np.arange(1, n + 1) / n)
    n = count(17)
    first = 0.04 * p["decay"] / refine
    low, high = 1.0000001, 3.0
    for _ in range(200):
        mid = 0.5 * (low + high)
        low, high = (mid, high) if first * (mid**n - 1) / (mid - 1) < END_S - p["residence"] else (low, mid)
    decay = p["residence"] + first * (low ** np.arange(1, n + 1) - 1) / (low - 1)
    decay[-1] = END_S
    return np.concatenate([growth, plateau, decay])


def numba_solve(p, cells, stretch, refine):
    nodes, volume = grid(cells, p["depth"], stretch)
    times = plan(p, refine)
    face = np.empty(times.size - 1)
    arguments = (times, p["growth"], p["residence"], p["decay"], p["eps"], p["g"], p["gas"], p["h"], p["ambient"], p["rho_c"],
                 p["k0"], p["slope"], np.diff(nodes), volume, RATIO_C + ICE, RATIO, face)
    return times[1:], face, arguments


def best_us(run, tries):
    best = np.inf
    for _ in range(tries):
        start = time.perf_counter()
        run()
        best = min(best, time.perf_counter() - start)
    return best * 1e6


def our_column():
    done = subprocess.run(["cargo", "bench", "--quiet", "--bench", "column"], cwd=ROOT, check=True, capture_output=True, text=True)
    return json.loads(done.stdout.strip().splitlines()[-1])


def c_solve(p, folder):
    program = Path(folder) / "column"
    subprocess.run(["cc", "-O2", "-o", program, HERE / "column.c", "-lm"], check=True)
    figures = [p["eps"], p["g"], p["gas"], p["h"], p["growth"], p["residence"], p["decay"], p["ambient"], p["rho_c"], 1.0, p["k0"],
               p["slope"], p["depth"], END_S, len(RATIO)]
    line = " ".join(map(repr, map(float, figures[:-1]))) + f" {len(RATIO)} " + " ".join(f"{c} {r}" for c, r in zip(RATIO_C, RATIO))
    done = subprocess.run([program, "2000"], input=line, check=True, capture_output=True, text=True)
    first, *rows = done.stdout.splitlines()
    table = np.array([[float(x) for x in row.split()] for row in rows])
    return float(first), table[:, 0], table[:, 1]


def whole_run(folder):
    """CPU time per boulder-draw of a run on distinct boulders, reading to writing."""
    folder = Path(folder)
    rocks = ["granite", "basalt", "sandstone", "limestone"]
    features = [json.dumps({"type": "Feature", "geometry": {"type": "Point", "coordinates": [-119.5, 37.7]}, "properties": {
        "boulder_id": f"B-{i}", "rock": rocks[i % 4], "diameter_m": round(0.6 + 0.03 * i, 2), "slope_deg": 20 + i % 20}})
        for i in range(WHOLE_BOULDERS)]
    (folder / "boulders.geojson").write_text('{"type":"FeatureCollection","features":[' + ",\n".join(features) + "]}")
    ring = [[-119.6, 37.6], [-119.4, 37.6], [-119.4, 37.8], [-119.6, 37.8], [-119.6, 37.6]]
    (folder / "burn.geojson").write_text(json.dumps({"type": "FeatureCollection", "features": [{
        "type": "Feature", "geometry": {"type": "Polygon", "coordinates": [ring]}, "properties": {"burn_id": "b", "exposure": "crown"}}]}))
    subprocess.run(["cargo", "build", "--release", "--quiet"], cwd=ROOT, check=True)
    program = Path(os.environ.get("CARGO_TARGET_DIR", ROOT / "target")) / "release" / "spallcast"
    best = np.inf
    for _ in range(3):
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        subprocess.run([program, "assess", "--burn", folder / "burn.geojson", "--boulders", folder / "boulders.geojson", "--out",
                        folder / "out", "--draws", str(WHOLE_DRAWS), "--quiet", "--threads", "1"], check=True)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
        best = min(best, after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime)
    return best * 1e6 / (WHOLE_BOULDERS * WHOLE_DRAWS)


def processor():
    for line in Path("/proc/cpuinfo").read_text().splitlines() if Path("/proc/cpuinfo").exists() else []:
        if line.startswith("model name"):
            return line.split(":", 1)[1].strip()
    return platform.processor() or platform.machine()


def commit():
    done = subprocess.run(["git", "describe", "--always", "--dirty"], cwd=ROOT, capture_output=True, text=True)
    return done.stdout.strip() or "unknown"


def main():
    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    parser.add_argument("--whole-run", action="store_true")
    parser.add_argument("--json", type=Path)
    arguments = parser.parse_args()

    ours = our_column()
    p = problem(ours)
    face = np.array(ours["face"])
    rows = []

    # Every leg of the pulse is smooth: a spline through many points of the reference stands for it at any time.
    splines = []
    for start, stop, _ in legs(p):
        dense = np.linspace(start, stop, 1500)[1:]
        splines.append((start, stop, dense))
    got_t, got = lsoda(p, 800, 7.0, 1e-9, np.concatenate([dense for _, _, dense in splines]), 1e-7)
    before = p["ambient"]
    curves = []
    for start, stop, dense in splines:
        inside = (got_t > start) & (got_t <= stop)
        curves.append((start, stop, CubicSpline(np.append(start, got_t[inside]), np.append(before, got[inside]))))
        before = got[inside][-1]

    def reference(times):
        out = np.empty(len(times))
        for start, stop, curve in curves:
            inside = (times > start) & (times <= stop + 1e-9)
            out[inside] = curve(times[inside])
        return out

    # A second grid shows what the reference itself is worth.
    check_t, check = lsoda(p, 400, 7.0, 1e-9, face[:, 0], 1e-7)
    best = reference(face[:, 0])
    rise = best.max() - p["ambient"]
    own = np.max(np.abs(np.interp(face[:, 0], check_t, check) - best)) / 3.0 / rise

    def error(times, temperature):
        return float(np.max(np.abs(temperature - reference(times))) / rise)

    target = error(face[:, 0], face[:, 1])
    rows.append(("spallcast, per draw, with stress and spall", ours["us_per_draw"], target, f"{ours['nodes']} nodes, {ours['steps']} steps"))

    with tempfile.TemporaryDirectory() as folder:
        c_us, c_t, c_face = c_solve(p, folder)
        rows.append(("plain C, -O2", c_us, error(c_t, c_face), "64 cells, 150 steps"))
        whole = whole_run(folder) if arguments.whole_run else None

    # Every solver is compared at our times or its own steps, both dense over the pulse.
    found = []
    for cells in (16, 20, 24, 32, 40, 48, 64, 96):
        for stretch in (3.5, 4.5, 5.5, 6.5):
            for refine in (0.5, 0.75, 1.0, 1.5, 2.0, 3.0, 4.0):
                times, temperature, call = numba_solve(p, cells, stretch, refine)
                conduct(*call)
                found.append((cells * times.size, cells, stretch, refine, times, temperature.copy(), call))
    found.sort(key=lambda f: f[0])
    chosen = next((f for f in found if error(f[4], f[5]) <= target), None)
    if chosen:
        us = best_us(lambda: conduct(*chosen[6]), 500)
        rows.append(("numba, scalar loop, tuned", us, error(chosen[4], chosen[5]),
                     f"{chosen[1] + 1} nodes, stretch {chosen[2]}, {chosen[4].size} steps"))
    else:
        rows.append(("numba, scalar loop", float("nan"), float("nan"), "no grid tried reaches the error"))

    scored = []
    for cells in (16, 24, 32, 48, 64):
        for stretch in (4.5, 5.5, 6.5):
            for rtol in (1e-2, 3e-3, 1e-3, 3e-4, 1e-4):
                times, temperature = lsoda(p, cells, stretch, rtol)
                if error(times, temperature) <= target:
                    scored.append((best_us(lambda: lsoda(p, cells, stretch, rtol), 3), cells, stretch, rtol, error(times, temperature)))
    if scored:
        us, cells, stretch, rtol, of = min(scored)
        rows.append(("SciPy solve_ivp, LSODA, banded, tuned", us, of, f"{cells + 1} nodes, stretch {stretch}, rtol {rtol:g}"))
    else:
        rows.append(("SciPy solve_ivp, LSODA, banded", float("nan"), float("nan"), "no grid tried reaches the error"))

    print(f"{processor()}, {datetime.date.today()}, commit {commit()}, Python {platform.python_version()}, SciPy {scipy.__version__}, "
          f"numba {numba.__version__}")
    print(f"reference: good to {own:.1e} of the rise of {rise:.0f} K")
    print(f"{'solver':45s} {'us':>9s} {'error':>9s} {'to ours':>8s}")
    for name, us, of, how in rows:
        print(f"{name:45s} {us:9.2f} {of:9.1e} {us / rows[0][1]:8.2f}  {how}")
    if whole is not None:
        print(f"{'whole run, CPU per boulder-draw':45s} {whole:9.2f} {'':9s} {whole / rows[0][1]:8.2f}  "
              f"{WHOLE_BOULDERS} distinct boulders, {WHOLE_DRAWS} draws; {whole / c_us:.3f} of the plain C solve")
    if arguments.json:
        arguments.json.write_text(json.dumps({"machine": processor(), "date": str(datetime.date.today()), "commit": commit(),
                                              "rows": rows, "whole_run_us": whole}, indent=1) + "\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
