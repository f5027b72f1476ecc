//! How rock conducts at temperature, and the published forms the catalogue is checked against.
//!
//! Vosteen & Schellschmidt 2003, T in C:  k(T) = k0 / (0.99 + T (a - b/k0)),
//!   crystalline a .0030 b .0042, k0 = .53 k25 + .5 sqrt(1.13 k25^2 - .42 k25);
//!   sedimentary a .0034 b .0039, k0 = .54 k25 + .5 sqrt(1.16 k25^2 - .39 k25).
//! Its resistivity 1/k is exactly linear in T, so the solver carries resistivity.
//! Sekiguchi 1984, T in K:  k = 1.84 + 358 (1.0227 k20 - 1.882)(1/T - .00068) = a + b/T.
//!
//! Symbols: k conductivity (W/mK), k0, k20, k25 its value at 0, 20, 25 C, w resistivity (mK/W).
//! The published laws are anchored at 25 C or 0 C; here k25 is solved so that the law passes through the sampled k20 at
//! 20 C, and what the clamps leave over is scaled away, so that k(20 C) = k20 exactly.
//! Clamps: slope a - b/k0 and the root's argument at 0 or above. Sekiguchi below about k20 .56 would make rock
//! conduct almost nothing in frost; b is held so that k(-50 C) keeps a tenth of k20 (judgement).
//! Valid range: Vosteen & Schellschmidt to 500 C, Sekiguchi to 300 C; beyond, the same line is carried on.
//! Does not do: radiation across pores, moisture, cracking (see `Rock::loses_diffusivity`).

use crate::units::ICE_POINT_K;

/// Which law a rock's conductivity follows. It belongs to the rock, not to the draw.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum ConductivityLaw {
    /// Vosteen & Schellschmidt 2003, crystalline.
    Crystalline,
    /// Vosteen & Schellschmidt 2003, sedimentary.
    Sedimentary,
    /// Constant.
    Constant,
    /// Sekiguchi 1984, for very low conductivity.
    LowConductivity,
}

impl ConductivityLaw {
    /// Every law.
    pub const ALL: [ConductivityLaw; 4] = [
        ConductivityLaw::Crystalline,
        ConductivityLaw::Sedimentary,
        ConductivityLaw::Constant,
        ConductivityLaw::LowConductivity,
    ];

    /// The word in the tables.
    pub const fn word(self) -> &'static str {
        match self {
            ConductivityLaw::Crystalline => "crystalline",
            ConductivityLaw::Sedimentary => "sedimentary",
            ConductivityLaw::Constant => "constant",
            ConductivityLaw::LowConductivity => "low_conductivity",
        }
    }

    /// The law of that word.
    pub fn parse(word: &str) -> Option<ConductivityLaw> {
        ConductivityLaw::ALL.into_iter().find(|l| l.word() == word)
    }

    /// Its equation, for people.
    pub const fn equation(self) -> &'static str {
        match self {
            ConductivityLaw::Crystalline => "k0/(0.99 + T(0.0030 - 0.0042/k0)), T in C, scaled to the 20 C value",
            ConductivityLaw::Sedimentary => "k0/(0.99 + T(0.0034 - 0.0039/k0)), T in C, scaled to the 20 C value",
            ConductivityLaw::Constant => "the 20 C value at every temperature",
            ConductivityLaw::LowConductivity => {
                "1.84 + 358(1.0227 k20 - 1.882)(1/T - 0.00068), T in K, scaled to the 20 C value"
            }
        }
    }
}

/// Slope constants a (1/K) and b (W/mK per K) of Vosteen & Schellschmidt 2003 and the constants of its k0.
struct Vosteen {
    a: f64,
    b: f64,
    linear: f64,
    square: f64,
    first: f64,
}

const VOSTEEN_CRYSTALLINE: Vosteen = Vosteen { a: 0.0030, b: 0.0042, linear: 0.53, square: 1.13, first: 0.42 };
const VOSTEEN_SEDIMENTARY: Vosteen = Vosteen { a: 0.0034, b: 0.0039, linear: 0.54, square: 1.16, first: 0.39 };
/// Constant term of the Vosteen-Schellschmidt denominator.
const VOSTEEN_OFFSET: f64 = 0.99;

/// The temperature of the sampled value, C and K.
const SAMPLED_C: f64 = 20.0;
const SAMPLED_K: f64 = ICE_POINT_K + SAMPLED_C;

/// Coldest temperature at which the Sekiguchi form must still conduct, K, and the share of k20 it keeps (judgement).
const FROST_K: f64 = ICE_POINT_K - 50.0;
const FROST_SHARE: f64 = 0.1;

/// Which of the two Vosteen-Schellschmidt forms.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum VosteenForm {
    /// Crystalline rock.
    Crystalline,
    /// Sedimentary rock.
    Sedimentary,
}

impl VosteenForm {
    const fn constants(self) -> Vosteen {
        match self {
            VosteenForm::Crystalline => VOSTEEN_CRYSTALLINE,
            VosteenForm::Sedimentary => VOSTEEN_SEDIMENTARY,
        }
    }
}

/// Conductivity at 0 C (W/mK) from that at 25 C (W/mK). Vosteen & Schellschmidt 2003.
pub fn vosteen_k0(k25: f64, form: VosteenForm) -> f64 {
    let c = form.constants();
    c.linear * k25 + 0.5 * (c.square * k25 * k25 - c.first * k25).max(0.0).sqrt()
}

/// Conductivity (W/mK) at `t_c` (C) as published, unscaled. Vosteen & Schellschmidt 2003.
pub fn vosteen(k25: f64, t_c: f64, form: VosteenForm) -> f64 {
    let k0 = vosteen_k0(k25, form);
    k0 / vosteen_denominator(k0, t_c, form)
}

fn vosteen_slope(k0: f64, form: VosteenForm) -> f64 {
    let c = form.constants();
    if k0 > 0.0 { (c.a - c.b / k0).max(0.0) } else { 0.0 }
}

fn vosteen_denominator(k0: f64, t_c: f64, form: VosteenForm) -> f64 {
    VOSTEEN_OFFSET + t_c * vosteen_slope(k0, form)
}

/// Thermal resistivity of one draw as the solver carries it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Resistivity {
    /// w(T) = w0 + w1 (T - 273.15), T in K.
    Linear {
        /// Resistivity at 0 C, mK/W.
        w0: f64,
        /// Its slope, m/W.
        w1_per_k: f64,
    },
    /// k(T) = a + b/T, T in K.
    Sekiguchi {
        /// Conductivity towards infinite temperature, W/mK.
        a: f64,
        /// Slope against 1/T, W/m.
        b: f64,
    },
}

/// The resistivity law of a rock whose conductivity at 20 C is `k20` (W/mK): k(20 C) = k20 exactly.
///
/// ```
/// use spallcast::rock::{ConductivityLaw, laws};
/// let law = laws::resistivity(ConductivityLaw::Crystalline, 2.9);
/// assert!((laws::conductivity(&law, 293.15) - 2.9).abs() < 1e-12);
/// assert!(laws::conductivity(&law, 773.15) < 2.0);
/// ```
pub fn resistivity(law: ConductivityLaw, k20: f64) -> Resistivity {
    let form = match law {
        ConductivityLaw::Constant => return Resistivity::Linear { w0: 1.0 / k20, w1_per_k: 0.0 },
        ConductivityLaw::LowConductivity => return sekiguchi_through(k20),
        ConductivityLaw::Crystalline => VosteenForm::Crystalline,
        ConductivityLaw::Sedimentary => VosteenForm::Sedimentary,
    };
    // The published anchor is k25: the one whose law passes through k20. Each turn gains two digits.
    let mut k25 = k20;
    for _ in 0..4 {
        k25 *= k20 / vosteen(k25, SAMPLED_C, form);
    }
    let k0 = vosteen_k0(k25, form);
    // What rounding in k0 and the clamps leave over.
    let scale = 1.0 / (k20 * vosteen_denominator(k0, SAMPLED_C, form));
    Resistivity::Linear { w0: VOSTEEN_OFFSET * scale, w1_per_k: vosteen_slope(k0, form) * scale }
}

/// Sekiguchi's form through k20, its slope held where frost would stop conduction.
fn sekiguchi_through(k20: f64) -> Resistivity {
    let published = SEKIGUCHI_SLOPE * (SEKIGUCHI_PRODUCT * k20 - SEKIGUCHI_OFFSET);
    let scaled = published * k20 / sekiguchi(k20, SAMPLED_K);
    let steepest = -(1.0 - FROST_SHARE) * k20 / (1.0 / FROST_K - 1.0 / SAMPLED_K);
    let b = scaled.max(steepest);
    Resistivity::Sekiguchi { a: k20 - b / SAMPLED_K, b }
}

/// Conductivity (W/mK) at `t_k` (K).
pub fn conductivity(resistivity: &Resistivity, t_k: f64) -> f64 {
    match *resistivity {
        Resistivity::Linear { w0, w1_per_k } => 1.0 / (w0 + w1_per_k * (t_k - ICE_POINT_K)),
        Resistivity::Sekiguchi { a, b } => a + b / t_k,
    }
}

const SEKIGUCHI_LIMIT: f64 = 1.84;
const SEKIGUCHI_SLOPE: f64 = 358.0;
const SEKIGUCHI_PRODUCT: f64 = 1.0227;
const SEKIGUCHI_OFFSET: f64 = 1.882;
const SEKIGUCHI_INVERSE_K: f64 = 0.00068;

/// Conductivity (W/mK) at `t_k` (K) as published, unscaled. Sekiguchi 1984.
pub fn sekiguchi(k20: f64, t_k: f64) -> f64 {
    SEKIGUCHI_LIMIT + SEKIGUCHI_SLOPE * (SEKIGUCHI_PRODUCT * k20 - SEKIGUCHI_OFFSET) * (1.0 / t_k - SEKIGUCHI_INVERSE_K)
}

/// Conductivity of felsic rock (W/mK) at `t_c` (C): A + B/(350 + T), A .64, B 807. Zoth & Haenel 1988.
pub fn zoth_haenel_felsic(t_c: f64) -> f64 {
    0.64 + 807.0 / (350.0 + t_c)
}

/// Conductivity of granite (W/mK) at `t_c` (C): 3.2/(1 + 1.3e-3 T). Seipold 1998.
pub fn seipold_granite(t_c: f64) -> f64 {
    3.2 / (1.0 + 1.3e-3 * t_c)
}

/// Specific heat at `t_c` (C) over that at 20 C, any rock. Waples & Waples 2004, 0 to about 1200 C.
pub fn waples_ratio(t_c: f64) -> f64 {
    let f = |t: f64| ((8.95e-10 * t - 2.13e-6) * t + 1.72e-3) * t + 0.716;
    f(t_c) / f(SAMPLED_C)
}

/// Temperature of the quartz transition in Whittington's fits, K.
const WHITTINGTON_SPLIT_K: f64 = 846.0;

/// Diffusivity of average crust (m2/s) at `t_k` (K). Whittington, Hofmeister & Nabelek 2009.
pub fn whittington_diffusivity(t_k: f64) -> f64 {
    let mm2_s = if t_k < WHITTINGTON_SPLIT_K { 567.3 / t_k - 0.062 } else { 0.732 - 0.000135 * t_k };
    mm2_s * crate::units::M2_S_PER_MM2_S
}

/// Specific heat of average crust (J/kgK) at `t_k` (K); .22178 kg/mol. Whittington, Hofmeister & Nabelek 2009.
///
/// The coefficient 47.9e-6 above the transition is as printed: the term is negligible. Used as a cross-check only.
pub fn whittington_specific_heat(t_k: f64) -> f64 {
    const KG_PER_MOL: f64 = 0.22178;
    if t_k < WHITTINGTON_SPLIT_K {
        (199.5 + 0.0857 * t_k - 5.0e6 / (t_k * t_k)) / KG_PER_MOL
    } else {
        (229.32 + 0.0323 * t_k - 47.9e-6 / (t_k * t_k)) / KG_PER_MOL
    }
}

/// Mean linear strain of a quartz aggregate (-) from `from_k` to `to_k` (K), free of cracks.
///
/// Volume with the transition's order parameter Q^4 = 1 - T/Tc, no expansion of its own: V = V0 + Vmax (Q0^2 - Q^2), linear strain the cube
/// root. Tc 847 K, Vmax .1188, V0 2.269 J/bar: recalled from Holland & Powell 2011; they reproduce the strains derived
/// from that publication to 1e-3.
pub fn quartz_linear_strain(from_k: f64, to_k: f64) -> f64 {
    const TRANSITION_K: f64 = 847.0;
    const VOLUME_J_BAR: f64 = 2.269;
    const EXCESS_J_BAR: f64 = 0.1188;
    const TABULATED_K: f64 = 298.15;
    let order_squared = |t_k: f64| (1.0 - t_k / TRANSITION_K).max(0.0).sqrt();
    let volume = |t_k: f64| VOLUME_J_BAR + EXCESS_J_BAR * (order_squared(TABULATED_K) - order_squared(t_k));
    libm::cbrt(volume(to_k) / volume(from_k)) - 1.0
}

/// Diffusivity (m2/s) from conductivity (W/mK), density (kg/m3) and specific heat (J/kgK): k/(rho c).
pub fn diffusivity(k_w_m_k: f64, density_kg_m3: f64, specific_heat_j_kg_k: f64) -> f64 {
    k_w_m_k / (density_kg_m3 * specific_heat_j_kg_k)
}

/// Weibull modulus from mean and standard deviation of strength: 1.10 mean/sd (modified Robinson relation; derived).
pub fn weibull_modulus_from_scatter(mean: f64, sd: f64) -> f64 {
    1.10 * mean / sd
}
