//! Tension normal to a flat face below a heated patch, from the point solutions of Flamant and Cerruti (derived).
//!
//! strip of half-width a:  D(z) = (4 N/pi) a z^2 / (a^2 + z^2)^2,      maximum N/(pi a) at z = a
//! disc of radius a:       D(z) = 3 N a^2 z^2 / (a^2 + z^2)^(5/2),     maximum .558 N/a at z = .82 a
//!
//! N membrane force of the heated skin N/m, z depth m.

/// Plan of a heated patch.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Plan {
    /// Long and narrow, such as along a log.
    Strip,
    /// About as long as wide.
    Disc,
}

impl Plan {
    /// Tension at depth `z_m` for a unit membrane force, 1/m.
    ///
    /// ```
    /// use spallcast::stress::patch::Plan;
    /// assert!((Plan::Strip.tension_per_force(0.2, 0.2) - 1.0 / (std::f64::consts::PI * 0.2)).abs() < 1e-12);
    /// ```
    #[inline(always)]
    pub fn tension_per_force(self, half_width_m: f64, z_m: f64) -> f64 {
        let (a, z2) = (half_width_m, z_m * z_m);
        let q = a * a + z2;
        match self {
            Plan::Strip => 4.0 / core::f64::consts::PI * a * z2 / (q * q),
            Plan::Disc => 3.0 * a * a * z2 / (q * q * q.sqrt()),
        }
    }

    /// Depth of the largest tension over the half-width: 1 for a strip, sqrt(2/3) for a disc.
    pub fn peak_depth(self) -> f64 {
        match self {
            Plan::Strip => 1.0,
            Plan::Disc => 0.816_496_580_927_726,
        }
    }

    /// Largest tension for a unit force and half-width.
    pub fn peak_tension_per_force(self, half_width_m: f64) -> f64 {
        self.tension_per_force(half_width_m, self.peak_depth() * half_width_m)
    }
}
