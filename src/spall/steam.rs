//! Saturation pressure of water, for the pore pressure of wet rock.
//!
//! ln(p/pc) = (Tc/T) ( a1 s + a2 s^1.5 + a3 s^3 + a4 s^3.5 + a5 s^4 + a6 s^7.5 ),  s = 1 - T/Tc
//!
//! Wagner & Pruss 1993, J. Phys. Chem. Ref. Data 22, 783, equation 1 (recalled; checked in the tests against an
//! independent steam library). Valid from 273.16 K to the critical point; above it the critical pressure is returned.

/// Critical temperature of water, K, and pressure, Pa.
const CRITICAL_K: f64 = 647.096;
const CRITICAL_PA: f64 = 22.064e6;
/// a1 to a6.
const A: [f64; 6] = [-7.859_517_83, 1.844_082_59, -11.786_649_7, 22.680_741_1, -15.961_871_9, 1.801_225_02];

/// Saturation pressure at `t_k`, Pa.
///
/// ```
/// let p = spallcast::spall::steam::saturation_pressure_pa(373.15);
/// assert!((p - 101_418.0).abs() < 50.0);
/// ```
pub fn saturation_pressure_pa(t_k: f64) -> f64 {
    if t_k >= CRITICAL_K {
        return CRITICAL_PA;
    }
    let s = 1.0 - t_k / CRITICAL_K;
    let root = s.sqrt();
    let (s3, s4) = (s * s * s, s * s * s * s);
    let sum = A[0] * s + A[1] * s * root + A[2] * s3 + A[3] * s3 * root + A[4] * s4 + A[5] * s4 * s3 * root;
    CRITICAL_PA * libm::exp(CRITICAL_K / t_k * sum)
}
