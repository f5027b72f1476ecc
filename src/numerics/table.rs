//! Piecewise-linear functions: sorted knots for the catalogue's laws, uniform knots for the march.

use super::gather;
use super::lanes::Lanes;

/// Value at `x` of the piecewise-linear function through `knots` (x ascending); both end segments are extended.
///
/// # Panics
/// With fewer than two knots.
///
/// ```
/// use spallcast::numerics::table::interpolate;
/// let knots = [(0.0, 1.0), (2.0, 5.0), (4.0, 5.0)];
/// assert_eq!(interpolate(&knots, 1.0), 3.0);
/// assert_eq!(interpolate(&knots, -1.0), -1.0);
/// ```
pub fn interpolate(knots: &[(f64, f64)], x: f64) -> f64 {
    assert!(knots.len() >= 2, "a piecewise-linear function needs two knots");
    let upper = knots.partition_point(|k| k.0 <= x).clamp(1, knots.len() - 1);
    let ((x0, y0), (x1, y1)) = (knots[upper - 1], knots[upper]);
    y0 + (y1 - y0) * ((x - x0) / (x1 - x0))
}

/// A function of one variable tabulated at uniform spacing, linear in between, its end segments extended.
///
/// Stored as intercept and slope of each segment, so that value and derivative agree.
#[derive(Debug, Clone, PartialEq)]
pub struct UniformTable {
    start: f64,
    per_unit: f64,
    last: f64,
    /// `(intercept, slope)` of each segment.
    segments: Vec<[f64; 2]>,
}

impl UniformTable {
    /// Tabulates `f` on `n` segments between `start` and `end`.
    pub fn new(start: f64, end: f64, n: usize, f: impl Fn(f64) -> f64) -> UniformTable {
        let step = (end - start) / n as f64;
        let knot = |i: usize| start + step * i as f64;
        let segments = (0..n)
            .map(|i| {
                let (x0, x1) = (knot(i), knot(i + 1));
                let slope = (f(x1) - f(x0)) / (x1 - x0);
                [f(x0) - slope * x0, slope]
            })
            .collect();
        UniformTable { start, per_unit: 1.0 / step, last: (n - 1) as f64, segments }
    }

    /// Value and slope at `x`.
    #[inline(always)]
    pub fn at(&self, x: f64) -> (f64, f64) {
        let place = ((x - self.start) * self.per_unit).clamp(0.0, self.last);
        let [intercept, slope] = self.segments[place as usize];
        (intercept + slope * x, slope)
    }

    /// Value and slope in each lane.
    #[inline(always)]
    pub fn at_lanes(&self, x: Lanes) -> (Lanes, Lanes) {
        let place = (x - Lanes::splat(self.start)) * self.per_unit;
        let (intercept, slope) = gather::pairs(&self.segments, place);
        (intercept + slope * x, slope)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn uniform_table_is_exact_for_straight_lines_and_close_for_curves() {
        let line = UniformTable::new(0.0, 10.0, 4, |x| 3.0 * x + 1.0);
        for x in [-5.0, 0.0, 2.5, 9.9, 20.0] {
            assert!((line.at(x).0 - (3.0 * x + 1.0)).abs() < 1e-12);
        }
        let square = UniformTable::new(0.0, 10.0, 100, |x| x * x);
        assert!((square.at(3.33).0 - 3.33 * 3.33).abs() <= 0.1 * 0.1 / 4.0);
        assert_eq!(square.at_lanes(Lanes::splat(3.33)).0.0[5], square.at(3.33).0);
    }
}
