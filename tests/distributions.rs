//! Moments of the truncated distributions against closed forms, on a fine stratified grid of shares.

use approx::assert_relative_eq;
use spallcast::ensemble::distribution::{Distribution, Shape, normal_cdf};

/// Midpoints of equal shares.
const STRATA: usize = 200_000;
/// Midpoint rule on bounded quantiles with STRATA shares, and an inverse normal good to about 1e-9 (relative).
const MOMENT: f64 = 1e-6;
/// Untruncated tails: the last share holds the rest of the tail (relative).
const TAIL: f64 = 1e-4;
/// A variance feels the same errors about ten times as much as a mean.
const VARIANCE: f64 = 10.0;

/// Mean and variance over the grid.
fn moments(d: &Distribution) -> (f64, f64) {
    let draw = |i: usize| d.quantile((i as f64 + 0.5) / STRATA as f64);
    let mean = (0..STRATA).map(draw).sum::<f64>() / STRATA as f64;
    let variance = (0..STRATA).map(|i| (draw(i) - mean) * (draw(i) - mean)).sum::<f64>() / STRATA as f64;
    (mean, variance)
}

fn density(z: f64) -> f64 {
    (-0.5 * z * z).exp() / (2.0 * std::f64::consts::PI).sqrt()
}

fn close(found: f64, expected: f64, tolerance: f64) {
    assert_relative_eq!(found, expected, epsilon = 0.0, max_relative = tolerance);
}

/// Truncated normal (Johnson, Kotz & Balakrishnan 1994, recalled): with a, b the scores of the ends and Z = Phi(b) -
/// Phi(a), mean = mu + s (phi(a) - phi(b))/Z, variance = s^2 [1 + (a phi(a) - b phi(b))/Z - ((phi(a) - phi(b))/Z)^2].
#[test]
fn truncated_normal() {
    let rows = [(2640.0, 40.0, 2500.0, 2760.0), (0.35, 0.07, 0.15, 0.48), (5.8, 0.9, 3.8, 8.5), (0.0, 1.0, 0.5, 3.0)];
    for (mu, s, lower, upper) in rows {
        let (a, b) = ((lower - mu) / s, (upper - mu) / s);
        let z = normal_cdf(b) - normal_cdf(a);
        let shift = (density(a) - density(b)) / z;
        let variance = s * s * (1.0 + (a * density(a) - b * density(b)) / z - shift * shift);
        let found = moments(&Distribution { shape: Shape::Normal, centre: mu, spread: s, lower, upper });
        close(found.0, mu + s * shift, MOMENT);
        close(found.1, variance, VARIANCE * MOMENT);
    }
}

/// Truncated lognormal: E[x^n] = median^n exp(n^2 s^2/2) [Phi(b - n s) - Phi(a - n s)]/Z (completing the square).
#[test]
fn truncated_lognormal() {
    let rows: [(f64, f64, f64, f64); 4] =
        [(1.42, 0.17, 0.85, 2.3), (0.03, 0.9, 0.001, 0.2), (18.0, 0.5, 3.0, 60.0), (1.0, 0.3, 1.2, 4.0)];
    for (median, s, lower, upper) in rows {
        let (a, b) = ((lower / median).ln() / s, (upper / median).ln() / s);
        let z = normal_cdf(b) - normal_cdf(a);
        let raw =
            |n: f64| median.powf(n) * (n * n * s * s / 2.0).exp() * (normal_cdf(b - n * s) - normal_cdf(a - n * s)) / z;
        let found = moments(&Distribution { shape: Shape::Lognormal, centre: median, spread: s, lower, upper });
        close(found.0, raw(1.0), MOMENT);
        close(found.1, raw(2.0) - raw(1.0) * raw(1.0), VARIANCE * MOMENT);
    }
}

/// Triangular over [a, b] with mode m: mean (a + b + m)/3, variance (a^2 + b^2 + m^2 - ab - am - bm)/18.
#[test]
fn triangular() {
    let rows: [(f64, f64, f64); 5] =
        [(5.0, 10.0, 20.0), (0.8, 0.9, 0.97), (0.0, 0.0, 1.0), (0.0, 1.0, 1.0), (-2.0, 1.0, 3.0)];
    for (a, m, b) in rows {
        let found = moments(&Distribution::triangular(a, m, b));
        close(found.0, (a + b + m) / 3.0, MOMENT);
        close(found.1, (a * a + b * b + m * m - a * b - a * m - b * m) / 18.0, VARIANCE * MOMENT);
    }
}

/// Untruncated: lognormal mean median exp(s^2/2), variance (exp(s^2) - 1) mean^2; normal mean and variance.
#[test]
fn untruncated() {
    let s = 1.5_f64.ln();
    let (mean, variance) = moments(&Distribution::lognormal(2.0, 1.5));
    let expected = 2.0 * (s * s / 2.0).exp();
    close(mean, expected, TAIL);
    close(variance, ((s * s).exp() - 1.0) * expected * expected, VARIANCE * TAIL);
    let (mean, variance) = moments(&Distribution::normal(3.0, 0.5));
    close(mean, 3.0, TAIL);
    close(variance, 0.25, VARIANCE * TAIL);
}

#[test]
fn quantiles_rise_and_stay_inside() {
    let rows = [
        Distribution { shape: Shape::Lognormal, centre: 8e-6, spread: 0.18, lower: 4.5e-6, upper: 1.3e-5 },
        Distribution { shape: Shape::Normal, centre: 0.14, spread: 0.07, lower: 0.01, upper: 0.3 },
        Distribution::triangular(3.0, 7.0, 15.0),
    ];
    for d in rows {
        let path: Vec<f64> = (0..=1000).map(|i| d.quantile(f64::from(i) / 1000.0)).collect();
        assert!(path.windows(2).all(|p| p[1] > p[0]), "{d:?} does not rise");
        assert!(path[0] >= d.lower && path[1000] <= d.upper, "{d:?} leaves its truncation");
        assert!((path[1000] - path[0]) / (d.upper - d.lower) > 0.99, "{d:?} does not reach its ends");
    }
}

#[test]
fn points_are_points() {
    for d in [
        Distribution::point(3.0),
        Distribution { shape: Shape::Normal, centre: 3.0, spread: 0.0, lower: 0.0, upper: 9.0 },
        Distribution { shape: Shape::Lognormal, centre: 3.0, spread: 0.0, lower: 0.0, upper: f64::INFINITY },
    ] {
        assert_eq!([0.0, 0.3, 1.0].map(|u| d.quantile(u)), [3.0; 3]);
    }
}
