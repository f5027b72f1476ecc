//! Physical constants with their sources, and the conversions that `input`, `output` and `report` use.
//!
//! Inside the program everything is SI. Celsius, minutes, millimetres and megapascals exist only at the edges.

/// Stefan-Boltzmann constant, W/m2K4. CODATA 2018 (published).
pub const STEFAN_BOLTZMANN_W_M2_K4: f64 = 5.670374419e-8;
/// Ice point, K. International Temperature Scale of 1990 (published).
pub const ICE_POINT_K: f64 = 273.15;
/// Standard acceleration of gravity, m/s2. CGPM 1901 (published).
pub const GRAVITY_M_S2: f64 = 9.80665;
/// Volumetric heat capacity of water near 20 C, J/m3K. The default of the moisture rule (recalled).
pub const WATER_HEAT_CAPACITY_J_M3_K: f64 = 4.186e6;
/// Latent heat of vaporisation of water at 100 C, J/kg (recalled).
pub const WATER_LATENT_HEAT_J_KG: f64 = 2.257e6;
/// Density of water, kg/m3 (recalled, rounded).
pub const WATER_DENSITY_KG_M3: f64 = 1000.0;

/// Kelvin from Celsius.
pub fn kelvin(celsius: f64) -> f64 {
    celsius + ICE_POINT_K
}
/// Celsius from kelvin.
pub fn celsius(kelvin: f64) -> f64 {
    kelvin - ICE_POINT_K
}
/// Seconds in a minute.
pub const SECONDS_PER_MINUTE: f64 = 60.0;
/// Millimetres in a metre.
pub const MM_PER_M: f64 = 1e3;
/// Pascals in a megapascal.
pub const PA_PER_MPA: f64 = 1e6;
/// Joules in a megajoule.
pub const J_PER_MJ: f64 = 1e6;
/// Watts in a kilowatt.
pub const W_PER_KW: f64 = 1e3;
/// Square metres per second in a square millimetre per second.
pub const M2_S_PER_MM2_S: f64 = 1e-6;
