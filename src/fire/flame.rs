//! Flames: residence of fuels, Byram's intensity, flame length, emissivity, and the view of a standing flame.
//!
//! Every function states its equation and source; all are SI unless a name says otherwise.

use crate::units::STEFAN_BOLTZMANN_W_M2_K4;

/// Low heat content of wildland fuel, J/kg. Byram 1959 gives 18 000 to 18 700 kJ/kg (published).
pub const HEAT_OF_COMBUSTION_J_KG: f64 = 18.0e6;
/// Extinction of flames, 1/m: .3 to .8 (recalled; centre is judgement).
pub const FLAME_EXTINCTION_PER_M: f64 = 0.5;
/// Emissive power of a standing flame, W/m2 (recalled).
pub const FLAME_EMISSIVE_POWER_W_M2: f64 = 76e3;
/// Median flame temperature where the spread rate gives the flame depth, K (recalled), and its geometric scatter (assumption).
pub const FLAME_TEMPERATURE_K: f64 = 1100.0;
/// See [`FLAME_TEMPERATURE_K`].
pub const FLAME_TEMPERATURE_GSD: f64 = 1.08;
/// Largest share of the fuel's heat that one face may absorb (judgement).
pub const ABSORBED_SHARE_OF_FUEL: f64 = 0.3;
/// Caps on irradiance, W/m2, and gas temperature, K (fire rules, step 7).
pub const IRRADIANCE_CAP_W_M2: f64 = 300e3;
/// See [`IRRADIANCE_CAP_W_M2`].
pub const GAS_CAP_K: f64 = 1330.0 + 273.15;
/// Beyond this many flame lengths no exposure is computed (fire rules, step 4).
pub const STANDOFF_FLAME_LENGTHS: f64 = 10.0;
/// Charring of a log, radius lost per second, m/s: 1.1 mm/min (judgement, between EN 1995-1-2 and Albini & Reinhardt 1995).
pub const CHARRING_M_S: f64 = 1.1e-3 / 60.0;

/// Residence of a fuel particle by its diameter, t = 8 d minutes with d in inches (Anderson 1969, published).
///
/// ```
/// let t = spallcast::fire::flame::particle_residence_s(0.006);
/// assert!((t - 113.4).abs() < 0.05);
/// ```
pub fn particle_residence_s(diameter_m: f64) -> f64 {
    8.0 * (diameter_m / 0.0254) * 60.0
}

/// The same by surface-to-volume ratio in 1/ft: 384/S minutes (Anderson 1969, published).
pub fn particle_residence_from_ratio_s(surface_to_volume_per_ft: f64) -> f64 {
    384.0 / surface_to_volume_per_ft * 60.0
}

/// Fireline intensity I = H w R, W/m (Byram 1959, published).
pub fn fireline_intensity_w_m(heat_j_kg: f64, fuel_kg_m2: f64, spread_m_s: f64) -> f64 {
    heat_j_kg * fuel_kg_m2 * spread_m_s
}

/// Flame length L = .0775 I^.46, I in kW/m (Byram 1959, published).
pub fn flame_length_m(intensity_w_m: f64) -> f64 {
    0.0775 * libm::pow(intensity_w_m / 1e3, 0.46)
}

/// Its inverse, I = 259.8 L^2.174 kW/m (derived).
pub fn intensity_of_flame_w_m(flame_length_m: f64) -> f64 {
    259.8e3 * libm::pow(flame_length_m, 2.174)
}

/// Crown-fire flame length L = .0266 I^(2/3), I in kW/m (Thomas 1963, recalled).
pub fn crown_flame_length_m(intensity_w_m: f64) -> f64 {
    0.0266 * libm::pow(intensity_w_m / 1e3, 2.0 / 3.0)
}

/// Flame emissivity 1 - exp(-k D) over a flame depth D (recalled).
pub fn flame_emissivity(depth_m: f64) -> f64 {
    -libm::expm1(-FLAME_EXTINCTION_PER_M * depth_m)
}

/// Emissive power of a flame of a depth and temperature, e_f sigma T^4, W/m2.
pub fn flame_irradiance_w_m2(depth_m: f64, temperature_k: f64) -> f64 {
    let square = temperature_k * temperature_k;
    flame_emissivity(depth_m) * STEFAN_BOLTZMANN_W_M2_K4 * square * square
}

/// Factor on the irradiance of low flames, (L / 1 m)^.5 below 1 m (judgement).
pub fn low_flame_factor(flame_length_m: f64) -> f64 {
    if flame_length_m < 1.0 { flame_length_m.max(0.0).sqrt() } else { 1.0 }
}

/// Time for a log to burn out against rock, t = d / (2 b).
pub fn log_burnout_s(diameter_m: f64) -> f64 {
    diameter_m / (2.0 * CHARRING_M_S)
}

/// View factor from a small face to a rectangle a wide and b high, whose corner is opposite the face at distance s.
///
/// f = (1/2 pi) [ A/sqrt(1+A^2) atan(B/sqrt(1+A^2)) + B/sqrt(1+B^2) atan(A/sqrt(1+B^2)) ],  A = a/s, B = b/s
/// (recalled; any handbook of radiative configuration factors, parallel small element).
pub fn corner_view_factor(a_m: f64, b_m: f64, s_m: f64) -> f64 {
    let (a, b) = (a_m / s_m, b_m / s_m);
    let (ra, rb) = ((1.0 + a * a).sqrt(), (1.0 + b * b).sqrt());
    (a / ra * libm::atan(b / ra) + b / rb * libm::atan(a / rb)) / (2.0 * core::f64::consts::PI)
}

/// View factor to a flame front `width_m` wide and `height_m` high at `distance_m`, from a face at `above_base_m` opposite
/// the middle of the width: corners are summed.
///
/// ```
/// use spallcast::fire::flame::front_view_factor;
/// assert!((front_view_factor(100.0, 10.0, 10.0, 0.0) - 0.3520).abs() < 5e-5);
/// assert!((front_view_factor(100.0, 10.0, 10.0, 5.0) - 0.4456).abs() < 5e-5);
/// ```
pub fn front_view_factor(width_m: f64, height_m: f64, distance_m: f64, above_base_m: f64) -> f64 {
    let half = 0.5 * width_m;
    let below = above_base_m.clamp(0.0, height_m);
    2.0 * (corner_view_factor(half, height_m - below, distance_m) + corner_view_factor(half, below, distance_m))
}

/// Heat that rain of `rain_mm_h` can take from a hot face at most, W/m2: .72 kW/m2 per mm/h (derived).
pub fn rain_cap_w_m2(rain_mm_h: f64) -> f64 {
    720.0 * rain_mm_h
}

/// Temperature of a face that takes no heat: e (G - sigma T^4) + h (Tg - T) = 0, K. Newton's method.
pub fn adiabatic_surface_k(emissivity: f64, irradiance_w_m2: f64, gas_k: f64, h_w_m2_k: f64) -> f64 {
    let mut t = gas_k;
    for _ in 0..50 {
        let cube = t * t * t;
        let q = emissivity * (irradiance_w_m2 - STEFAN_BOLTZMANN_W_M2_K4 * cube * t) + h_w_m2_k * (gas_k - t);
        t += q / (4.0 * emissivity * STEFAN_BOLTZMANN_W_M2_K4 * cube + h_w_m2_k);
    }
    t
}

/// External fire curve of EN 1991-1-2 (3.2.2), gas temperature in C at `minutes`, from 20 C (recalled).
pub fn en_external_fire_c(minutes: f64) -> f64 {
    660.0 * (1.0 - 0.687 * libm::exp(-0.32 * minutes) - 0.313 * libm::exp(-3.8 * minutes)) + 20.0
}

/// Standard fire curve of EN 1991-1-2 (3.2.1), gas temperature in C at `minutes`, from 20 C (recalled).
pub fn en_standard_fire_c(minutes: f64) -> f64 {
    20.0 + 345.0 * libm::log10(8.0 * minutes + 1.0)
}
