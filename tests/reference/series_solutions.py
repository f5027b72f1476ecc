"""Closed forms and eigenvalue series of linear conduction, to 30 digits by mpmath.

Half-space (Carslaw & Jaeger 1959, recalled): constant surface temperature (T-T0)/(Ts-T0) = erfc(x/2sqrt(kt)); constant flux
T-T0 = (2q/K) sqrt(kt) ierfc(x/2sqrt(kt)); convection (T-T0)/(Tg-T0) = erfc(X) - exp(hx/K + h^2 kt/K^2) erfc(X + (h/K) sqrt(kt)).
Slab of half-width L, zeta tan zeta = Bi, C = 4 sin z/(2z + sin 2z), theta = sum C exp(-z^2 Fo) cos(z x/L);
sphere of radius R, 1 - zeta cot zeta = Bi, C = 4 (sin z - z cos z)/(2z - sin 2z), theta = sum C exp(-z^2 Fo) sin(z r/R)/(z r/R);
theta = (T - Tg)/(T0 - Tg); Bi = h L/K or h R/K. Handbook columns: one-term coefficients of Incropera & DeWitt, table 5.1,
*recalled* from memory to its four digits, empty where not recalled with certainty.
"""

from mpmath import cos, cot, erfc, exp, findroot, mp, mpf, pi, sin, sqrt, tan

from reference_csv import write_table

mp.dps = 30
# Bi: plane wall zeta1, C1; sphere zeta1, C1 (recalled)
HANDBOOK = {
    "0.01": ("0.0998", "1.0017", "0.1730", "1.0030"),
    "0.1": ("0.3111", "1.0161", "0.5423", "1.0298"),
    "0.5": (None, None, None, None),
    "1": ("0.8603", "1.1191", "1.5708", "1.2732"),
    "5": (None, None, None, None),
    "10": ("1.4289", "1.2620", "2.8363", "1.9249"),
    "100": ("1.5552", "1.2731", "3.1102", "1.9990"),
}
FOURIER = ["0.005", "0.02", "0.05", "0.1", "0.2", "0.5", "1"]
PLACES = ["0", "0.25", "0.5", "0.75", "0.9", "1"]
TERMS = 60


def bracketed(function, low, high):
    """Root by bisection, then polished."""
    low, high = mpf(low), mpf(high)
    sign = function(low) > 0
    for _ in range(60):
        middle = (low + high) / 2
        if (function(middle) > 0) == sign:
            low = middle
        else:
            high = middle
    return findroot(function, (low + high) / 2)


def roots(shape, bi, count=TERMS):
    tiny = mpf(10) ** -25
    if shape == "slab":  # zeta sin zeta = Bi cos zeta
        return [bracketed(lambda z: z * sin(z) - bi * cos(z), n * pi + tiny, n * pi + pi / 2) for n in range(count)]
    return [bracketed(lambda z: (1 - bi) * sin(z) - z * cos(z), n * pi + (tiny if n else mpf(10) ** -6), (n + 1) * pi) for n in range(count)]


def coefficient(shape, z):
    if shape == "slab":
        return 4 * sin(z) / (2 * z + sin(2 * z))
    return 4 * (sin(z) - z * cos(z)) / (2 * z - sin(2 * z))


def mode(shape, z, x):
    if shape == "slab":
        return cos(z * x)
    return sin(z * x) / (z * x) if x != 0 else mpf(1)


def half_space():
    rows = []
    k, rho_c, t0 = mpf("2.9055"), mpf(2640) * 775, mpf(20)
    kappa = k / rho_c
    flux, surface, gas, h = mpf(20000), mpf(400), mpf(900), mpf(100)
    for t in ("1", "10", "60", "300", "600", "3600"):
        for mm in ("0", "1", "5", "10", "20", "50", "100"):
            x, root = mpf(mm) / 1000, sqrt(kappa * mpf(t))
            s = x / (2 * root)
            ierfc = exp(-s * s) / sqrt(pi) - s * erfc(s)
            b = h / k
            convection = erfc(s) - exp(b * x + (b * root) ** 2) * erfc(s + b * root)
            for name, value, drive in (("surface_temperature", t0 + (surface - t0) * erfc(s), surface),
                                       ("flux", t0 + 2 * flux / k * root * ierfc, flux),
                                       ("convection", t0 + (gas - t0) * convection, gas)):
                rows.append((name, float(drive), float(h) if name == "convection" else None, float(k), float(rho_c), float(t0),
                             float(t), float(mm), float(value)))
    write_table("half_space.csv",
                "Half-space from 20 C: constant surface temperature 400 C; constant flux 20 kW/m2; convection to 900 C with h 100.",
                ["mpmath"], ["boundary", "drive_c_or_w_m2", "h_w_m2_k", "conductivity_w_m_k", "heat_capacity_j_m3_k", "initial_c",
                             "time_s", "depth_mm", "temperature_c"], rows)


def main():
    half_space()
    first, full = [], []
    for shape in ("slab", "sphere"):
        for text, recalled in HANDBOOK.items():
            bi = mpf(text)
            zetas = roots(shape, bi)
            residual = max(abs(z * tan(z) - bi) if shape == "slab" else abs(1 - z * cot(z) - bi) for z in zetas[:3])
            assert residual < mpf(10) ** -18
            constants = [coefficient(shape, z) for z in zetas]
            zeta_book, c_book = recalled[:2] if shape == "slab" else recalled[2:]
            first.append((shape, float(bi), float(zetas[0]), float(constants[0]), zeta_book, c_book))
            for fo in FOURIER:
                for place in PLACES:
                    terms = [c * exp(-z * z * mpf(fo)) * mode(shape, z, mpf(place)) for z, c in zip(zetas, constants)]
                    assert abs(terms[-1]) < mpf(10) ** -20
                    full.append((shape, float(bi), float(fo), float(place), float(sum(terms))))
    write_table("series_first_term.csv",
                "First eigenvalue and coefficient; handbook columns recalled from Incropera & DeWitt table 5.1, empty where not certain.",
                ["mpmath"], ["shape", "biot", "zeta1", "c1", "zeta1_handbook_recalled", "c1_handbook_recalled"], first)
    write_table("series_full.csv", f"theta = (T - Tgas)/(T0 - Tgas) by {TERMS} terms; place = x/L or r/R, 1 = surface.",
                ["mpmath"], ["shape", "biot", "fourier", "place", "theta"], full)
    for row in first:
        print(row)


if __name__ == "__main__":
    main()
