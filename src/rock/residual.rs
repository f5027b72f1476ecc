//! What heating leaves of stiffness, strength and toughness.
//!
//! R(T) = r + (1 - r) (1 + exp((20 - T50)/w)) / (1 + exp((T - T50)/w))
//!
//! with T the temperature reached (C), T50 and w the middle and width of the fall (C, K), r the floor (-). R(20 C) is 1
//! exactly and R falls steadily to r. Constants per rock class in `tables/rock_residual_strength.csv`.
//!
//! Valid range: 20 to about 900 C; below 20 C the factor is held at 1.
//! Source: form is ours (derived); nodes recalled from heated-specimen literature, measured after cooling.
//! Does not do: strength while hot, time at temperature, cooling rate.

use crate::units::ICE_POINT_K;

/// Temperature at which every law is 1: room temperature, K.
pub const REFERENCE_K: f64 = ICE_POINT_K + 20.0;

/// Where the constants come from.
pub const SOURCE: &str = "residual-property nodes by rock class, recalled; anchors read: limestone at 600 C tension .16, \
                          compression .38; basalt at 450 C stiffness .78, compression .80";

/// Constants of one residual law.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ResidualLaw {
    /// Middle of the fall, K.
    pub t50_k: f64,
    /// Width of the fall, K.
    pub width_k: f64,
    /// Share left at the end, 0 to 1.
    pub floor: f64,
}

impl ResidualLaw {
    /// Share left after the rock has reached `reached_k` (K); 1 at 20 C and below.
    ///
    /// ```
    /// use spallcast::rock::ResidualLaw;
    /// let law = ResidualLaw { t50_k: 293.15, width_k: 100.0, floor: 0.2 };
    /// assert_eq!(law.factor(293.15), 1.0);
    /// // by hand, 100 K higher: .2 + .8 x 2/(1 + e) = .63031
    /// assert!((law.factor(393.15) - 0.630_306).abs() < 1e-6);
    /// ```
    pub fn factor(&self, reached_k: f64) -> f64 {
        if reached_k <= REFERENCE_K {
            return 1.0;
        }
        let at_reference = 1.0 + libm::exp((REFERENCE_K - self.t50_k) / self.width_k);
        let at_reached = 1.0 + libm::exp((reached_k - self.t50_k) / self.width_k);
        (self.floor + (1.0 - self.floor) * at_reference / at_reached).min(1.0)
    }
}

/// The four laws of a rock class.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ResidualLaws {
    /// Young's modulus.
    pub youngs_modulus: ResidualLaw,
    /// Compressive strength.
    pub compressive_strength: ResidualLaw,
    /// Tensile strength.
    pub tensile_strength: ResidualLaw,
    /// Fracture toughness.
    pub fracture_toughness: ResidualLaw,
}
