"""Moments and quantiles of truncated distributions, by scipy.stats.

Normal: centre = mean, spread = standard deviation of the untruncated law. Lognormal: centre = median, spread = standard
deviation of the natural logarithm. Both conditioned on [lower, upper] (not clipped to it: no mass at the ends).
Triangular: centre = mode. Parameters are rows of the rock catalogue and the exposure classes.
Also standard normal quantiles.
"""

import numpy as np
from scipy import stats
from scipy.integrate import quad

from reference_csv import write_table

CASES = [
    ("granite density", "normal", 2640, 40, 2500, 2760),
    ("granite specific heat", "normal", 775, 40, 690, 870),
    ("granite Poisson ratio", "normal", 0.24, 0.04, 0.10, 0.33),
    ("basalt Young modulus", "normal", 7e10, 1.8e10, 2.5e10, 1.1e11),
    ("light_surface gas", "normal", 350, 120, 120, 700),
    ("crown gas", "normal", 1000, 120, 700, 1330),
    ("smouldering gas", "normal", 450, 120, 260, 650),
    ("granite diffusivity", "lognormal", 1.42e-6, 0.17, 8.5e-7, 2.3e-6),
    ("granite tensile strength", "lognormal", 8e6, 0.3, 3e6, 1.8e7),
    ("granite porosity", "lognormal", 0.008, 0.6, 0.001, 0.04),
    ("basalt porosity", "lognormal", 0.03, 0.9, 0.001, 0.2),
    ("crown residence", "lognormal", 45, float(np.log(1.4)), 20, 120),
    ("log_contact residence", "lognormal", 5400, float(np.log(1.9)), 900, 28800),
    ("smouldering residence", "lognormal", 14400, float(np.log(2.0)), 1800, 172800),
    ("granite Weibull modulus", "triangular", 10, None, 5, 20),
    ("granite emissivity", "triangular", 0.9, None, 0.8, 0.97),
    ("crown heated share, mode near the end", "triangular", 0.8, None, 0.5, 1.0),
    ("log_contact heated share", "triangular", 0.15, None, 0.05, 0.4),
]
LEVELS = [0.001, 0.05, 0.25, 0.5, 0.75, 0.95, 0.999]
UNIFORMS = [1e-12, 1e-9, 1e-6, 1e-4, 0.001, 0.01, 0.025, 0.05, 0.1, 0.15865525393145707, 0.25, 0.4, 0.5, 0.6, 0.75, 0.9, 0.975, 0.99,
            0.999, 0.999999]


def law(shape, centre, spread, lower, upper):
    """Quantile function and the first two moments."""
    if shape == "normal":
        a, b = (lower - centre) / spread, (upper - centre) / spread
        frozen = stats.truncnorm(a, b, loc=centre, scale=spread)
        return frozen.ppf, frozen.mean(), frozen.var()
    if shape == "triangular":
        frozen = stats.triang((centre - lower) / (upper - lower), loc=lower, scale=upper - lower)
        return frozen.ppf, frozen.mean(), frozen.var()
    a, b = np.log(lower / centre) / spread, np.log(upper / centre) / spread
    ratio = lambda n: (np.exp((n * spread) ** 2 / 2) * (stats.norm.cdf(b - n * spread) - stats.norm.cdf(a - n * spread))
                       / (stats.norm.cdf(b) - stats.norm.cdf(a)))
    mean, var = centre * ratio(1), centre**2 * (ratio(2) - ratio(1) ** 2)
    frozen = stats.truncnorm(a, b)
    check = quad(lambda z: np.exp(spread * z) * frozen.pdf(z), a, b, epsabs=0, epsrel=1e-11)[0] * centre
    assert abs(check / mean - 1) < 1e-9
    return (lambda u: centre * np.exp(spread * frozen.ppf(u))), mean, var


def main():
    rows = []
    for name, shape, centre, spread, lower, upper in CASES:
        quantile, mean, var = law(shape, centre, spread, lower, upper)
        rows.append((name, shape, float(centre), spread if spread is None else f"{spread:.17g}", float(lower), float(upper), float(mean), float(var),
                     *(float(quantile(u)) for u in LEVELS)))
    write_table("truncated_moments.csv",
                "Laws conditioned on [lower, upper]; lognormal centre = median, spread = sd of the logarithm; triangular centre = mode.",
                ["numpy", "scipy"], ["name", "distribution", "centre", "spread", "lower", "upper", "mean", "variance", *(f"quantile_{u:g}" for u in LEVELS)], rows)
    write_table("normal_quantiles.csv", "Standard normal quantiles.", ["scipy"], ["u", "z"],
                [(f"{u:.17g}", f"{stats.norm.ppf(u):.15g}") for u in UNIFORMS])


if __name__ == "__main__":
    main()
