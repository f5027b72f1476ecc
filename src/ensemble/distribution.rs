//! Truncated one-dimensional distributions and their inverse distribution functions.
//!
//! x = F^-1( F(a) + u (F(b) - F(a)) ),  u in (0, 1)
//!
//! with F the untruncated distribution function and [a, b] the truncation. Lognormal: `centre` is the median and
//! `spread` the standard deviation of ln x. Normal: mean and standard deviation. Triangular: mode, with its corners at
//! the truncation. A spread of zero, or a = b, is a point. Inverse functions come from `statrs`.

use statrs::distribution::{ContinuousCDF, Normal, Triangular};

/// Family of a distribution.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Shape {
    /// ln x is normal.
    Lognormal,
    /// x is normal.
    Normal,
    /// Straight sides up to the mode and down.
    Triangular,
}

/// A truncated distribution. Units are the quantity's own.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Distribution {
    /// Family.
    pub shape: Shape,
    /// Median, mean or mode.
    pub centre: f64,
    /// Standard deviation of ln x, or of x; unused by the triangular family.
    pub spread: f64,
    /// Lower truncation.
    pub lower: f64,
    /// Upper truncation.
    pub upper: f64,
}

/// Lower and upper edges of the unit interval that the inverse functions are asked for, so that no draw is infinite.
const UNIT_EDGE: f64 = 1e-12;

impl Distribution {
    /// A triangular distribution over [lower, upper] with its mode.
    pub const fn triangular(lower: f64, mode: f64, upper: f64) -> Self {
        Distribution { shape: Shape::Triangular, centre: mode, spread: 0.0, lower, upper }
    }

    /// A single value.
    pub const fn point(value: f64) -> Self {
        Distribution { shape: Shape::Normal, centre: value, spread: 0.0, lower: value, upper: value }
    }

    /// An untruncated lognormal by median and geometric standard deviation.
    pub fn lognormal(median: f64, gsd: f64) -> Self {
        Distribution {
            shape: Shape::Lognormal,
            centre: median,
            spread: libm::log(gsd),
            lower: 0.0,
            upper: f64::INFINITY,
        }
    }

    /// An untruncated normal.
    pub const fn normal(mean: f64, sd: f64) -> Self {
        Distribution { shape: Shape::Normal, centre: mean, spread: sd, lower: f64::NEG_INFINITY, upper: f64::INFINITY }
    }

    /// The value below which a share `u` of the distribution lies; `u` in [0, 1].
    ///
    /// ```
    /// use spallcast::ensemble::distribution::Distribution;
    /// assert_eq!(Distribution::point(3.0).quantile(0.7), 3.0);
    /// let x = Distribution::lognormal(2.0, 1.5).quantile(0.5);
    /// assert!((x - 2.0).abs() < 1e-12);
    /// ```
    pub fn quantile(&self, u: f64) -> f64 {
        if self.lower >= self.upper {
            return self.lower;
        }
        let u = u.clamp(UNIT_EDGE, 1.0 - UNIT_EDGE);
        match self.shape {
            Shape::Normal => {
                if self.spread <= 0.0 {
                    return self.centre.clamp(self.lower, self.upper);
                }
                let z = truncated_score(
                    u,
                    (self.lower - self.centre) / self.spread,
                    (self.upper - self.centre) / self.spread,
                );
                (self.centre + self.spread * z).clamp(self.lower, self.upper)
            }
            Shape::Lognormal => {
                if self.spread <= 0.0 {
                    return self.centre.clamp(self.lower, self.upper);
                }
                let score = |x: f64| (libm::log(x) - libm::log(self.centre)) / self.spread;
                let z = truncated_score(u, score(self.lower), score(self.upper));
                (self.centre * libm::exp(self.spread * z)).clamp(self.lower, self.upper)
            }
            Shape::Triangular => Triangular::new(self.lower, self.upper, self.centre)
                .expect("a triangular distribution has lower <= mode <= upper")
                .inverse_cdf(u),
        }
    }

    /// The middle of the distribution: its median.
    pub fn median(&self) -> f64 {
        self.quantile(0.5)
    }
}

/// Standard normal score of the share `u` of the part of the bell between scores `a` and `b`.
fn truncated_score(u: f64, a: f64, b: f64) -> f64 {
    let bell = Normal::standard();
    let (fa, fb) = (bell.cdf(a), bell.cdf(b));
    bell.inverse_cdf((fa + u * (fb - fa)).clamp(UNIT_EDGE, 1.0 - UNIT_EDGE))
}

/// Standard normal distribution function.
pub fn normal_cdf(z: f64) -> f64 {
    0.5 * libm::erfc(-z / core::f64::consts::SQRT_2)
}

/// Standard normal score of a share `u` in (0, 1).
pub fn normal_score(u: f64) -> f64 {
    Normal::standard().inverse_cdf(u.clamp(UNIT_EDGE, 1.0 - UNIT_EDGE))
}
