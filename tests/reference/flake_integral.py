"""Integrals over the flaw depth x of the Weibull flake model, by mpmath quadrature:

    I2 = int x^2 s(x)^m dx,  I3 = int x^3 s(x)^m dx,  mean depth I3/I2,  s(0) = 1, x in units of L.

exponential exp(-x/L): I2 = 2 (L/m)^3, I3 = 6 (L/m)^4, mean 3 L/m. ramp (1 - x/L)+: I2 = B(3, m+1), I3 = B(4, m+1), mean 3 L/(m+4).
constant_flux: temperature under constant flux, s = exp(-u^2) - sqrt(pi) u erfc(u), u = x/L with L = 2 sqrt(kappa t);
slope at the face sqrt(pi)/L, so k dTs/q = L/sqrt(pi) and the Gamma estimate of the mean depth is 3 L/(m sqrt(pi)).
constant_surface: s = erfc(x/L), L = 2 sqrt(kappa t), slope 2/(L sqrt(pi)), Gamma estimate 3 L sqrt(pi)/(2 m).
First-median check (half-space, constant flux): temperature rise at which B = ln 2, by root finding with the full profile, beside the
check form dTs^(1+3/m) = [(1-nu) s0/(alpha E)] [ln 2/(2 pi C^2)]^(1/m) [m q/k]^(3/m).
"""

from mpmath import beta, erfc, exp, gamma, inf, log, mp, mpf, pi, quad, sqrt

from reference_csv import write_table

mp.dps = 25
MODULI = ["8", "10", "12", "12.5", "14", "16", "18", "20"]

SHAPES = {
    "exponential": (lambda x: exp(-x), inf, mpf(1)),
    "ramp": (lambda x: 1 - x, mpf(1), mpf(1)),
    "constant_flux": (lambda x: exp(-x * x) - sqrt(pi) * x * erfc(x), mpf(6), sqrt(pi)),
    "constant_surface": (lambda x: erfc(x), mpf(6), 2 / sqrt(pi)),
}
# E Pa, nu, alpha 1/K, k W/mK, UCS Pa, chi, C_L, m, q W/m2: illustrative inputs, the first two rocks near the catalogue centres
FIRST = [
    ("granite", "5e10", "0.24", "8e-6", "2.9055", "1.65e8", "0.55", "10", "20", "20000"),
    ("granite", "5e10", "0.24", "8e-6", "2.9055", "1.65e8", "0.55", "10", "20", "50000"),
    ("granite", "5e10", "0.24", "8e-6", "2.9055", "1.65e8", "0.55", "5", "20", "100000"),
    ("basalt", "7e10", "0.25", "5.8e-6", "1.8508", "2.3e8", "0.65", "10", "16", "50000"),
    ("sandstone", "1.5e10", "0.2", "1.1e-5", "2.4937", "8e7", "0.5", "15", "10", "50000"),
]
LAB_VOLUME_M3 = mpf("2.5e-4")


def integral(shape, m, power):
    p, end, _ = SHAPES[shape]
    points = [mpf(0), 4 / m, 10 / m, 30 / m, end]
    points = sorted({v for v in points if v <= end})
    return quad(lambda x: x**power * p(x) ** m, points)


def main():
    rows = []
    for shape, (_, _, slope) in SHAPES.items():
        for text in MODULI:
            m = mpf(text)
            i2, i3 = integral(shape, m, 2), integral(shape, m, 3)
            exact = {"exponential": (2 / m**3, 6 / m**4), "ramp": (beta(3, m + 1), beta(4, m + 1))}.get(shape)
            if exact:
                assert abs(i2 / exact[0] - 1) < 1e-15 and abs(i3 / exact[1] - 1) < 1e-15
            rows.append((shape, float(m), float(i2), float(i3), float(i3 / i2), float(3 / (m * slope)), float(100 * ((3 / (m * slope)) / (i3 / i2) - 1))))
    write_table("flake_integral.csv", "s(0) = 1, lengths in L; gamma_mean_depth = 3/(m |s'(0)|).", ["mpmath"],
                ["profile", "weibull_modulus", "i2", "i3", "mean_depth", "gamma_mean_depth", "deviation_gamma_pct"], rows)

    rows = []
    for rock, *texts in FIRST:
        young, nu, alpha, k, ucs, chi, c, m, q = map(mpf, texts)
        s0 = chi * ucs * LAB_VOLUME_M3 ** (1 / m) / gamma(1 + 1 / m)
        unit = integral("constant_flux", m, 2)  # times L^3, L = sqrt(pi) k dTs/q
        stiff = young * alpha / (1 - nu)
        # B = pi C^2/s0^m (stiff dTs)^m (sqrt(pi) k dTs/q)^3 unit = ln 2
        rise = (log(2) * s0**m / (pi * c**2 * unit * stiff**m * (sqrt(pi) * k / q) ** 3)) ** (1 / (m + 3))
        check = ((s0 / stiff) * (log(2) / (2 * pi * c**2)) ** (1 / m) * (m * q / k) ** (3 / m)) ** (1 / (1 + 3 / m))
        length = sqrt(pi) * k * rise / q
        depth = length * integral("constant_flux", m, 3) / unit
        rows.append((rock, *map(float, (young, nu, alpha, k, ucs, chi, c, m, q, s0, rise, check, 1000 * depth, 3000 * k * check / (m * q)))))
    write_table("flake_first_median.csv",
                "Surface temperature rise at which half the sites have let go under constant flux (constant properties): full profile and check form.",
                ["mpmath"], ["rock", "youngs_modulus_pa", "poissons_ratio", "expansion_per_k", "conductivity_w_m_k", "compressive_strength_pa",
                             "spalling_to_laboratory_strength", "flaw_radius_over_depth", "weibull_modulus", "flux_w_m2", "scale_s0_pa_m3_1_m",
                             "rise_full_k", "rise_check_form_k", "mean_depth_full_mm", "mean_depth_check_form_mm"], rows)
    for row in rows:
        print(row[0], row[-4:])


if __name__ == "__main__":
    main()
