//! Pore pressure of boiling water in wet, tight rock.
//!
//! adds b p_sat(T) to the normal tension where the leak-off time z^2 phi mu / (K p) exceeds the heating time (derived).
//!
//! Symbols: b share of the pressure that acts on the skeleton, p saturation pressure Pa, z depth m, phi porosity, mu
//! viscosity Pa s, K permeability m2. The permeability of intact rock is taken from its porosity, K = 1e-19 m2
//! (phi/.01)^3 (assumption). Dry and damp rock, and rock that leaks faster than it heats, are left alone.

use crate::spall::steam::saturation_pressure_pa;

/// Share of the pore pressure that acts on the skeleton (assumption).
const PRESSURE_SHARE: f64 = 0.6;
/// Viscosity of water near 200 C, Pa s (recalled, rounded).
const VISCOSITY_PA_S: f64 = 1.5e-4;
/// Permeability at a reference porosity, m2 (assumption).
const PERMEABILITY_M2: f64 = 1e-19;
const REFERENCE_POROSITY: f64 = 0.01;
/// Below this the pressure is under one atmosphere and is left out, K.
const BOILING_K: f64 = 373.15;

/// Tension that pore pressure adds at depth `z_m` and temperature `t_k` after `time_s` of heating, Pa.
pub fn tension_pa(porosity: f64, z_m: f64, t_k: f64, time_s: f64) -> f64 {
    if t_k < BOILING_K {
        return 0.0;
    }
    let p = saturation_pressure_pa(t_k);
    let ratio = porosity / REFERENCE_POROSITY;
    let permeability = PERMEABILITY_M2 * (ratio * ratio * ratio);
    let leak_off_s = z_m * z_m * porosity * VISCOSITY_PA_S / (permeability * p);
    if leak_off_s > time_s { PRESSURE_SHARE * p } else { 0.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_tight_rock_holds_pressure() {
        assert!(tension_pa(0.005, 0.01, 473.15, 60.0) > 0.5e6);
        assert_eq!(tension_pa(0.15, 0.01, 473.15, 60.0), 0.0);
    }
}
