//! One boulder, from its record to its numbers. Pure: the only place where fire, heat, stress, spall and rockfall meet.

use std::collections::BTreeSet;

use crate::flag::Flag;

/// 5 %, 50 % and 95 % quantiles.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Quantiles {
    /// 5 % quantile.
    pub p05: f64,
    /// Median.
    pub p50: f64,
    /// 95 % quantile.
    pub p95: f64,
}

/// Whether a boulder has numbers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Status {
    /// The model ran.
    Assessed,
    /// It did not; the reason says why.
    NotAssessed,
}

impl Status {
    /// The word in the `status` column.
    pub fn word(self) -> &'static str {
        match self {
            Status::Assessed => "assessed",
            Status::NotAssessed => "not_assessed",
        }
    }
}

/// How it heated. SI.
#[derive(Debug, Clone, PartialEq)]
pub struct HeatSummary {
    /// Peak surface temperature, K.
    pub peak_surface_k: Quantiles,
    /// Median absorbed heat, J/m2.
    pub absorbed_j_m2_p50: f64,
    /// Median of sqrt(diffusivity x residence), m.
    pub heated_depth_m: f64,
    /// Median over draws of the peak skin stress, Pa, compression positive.
    pub peak_skin_stress_pa_p50: f64,
}

/// Whether and how it spalled. Thickness fields are `None` when no draw spalled that way.
#[derive(Debug, Clone, PartialEq)]
pub struct SpallSummary {
    /// Share of draws with any family.
    pub p_spall: f64,
    /// Share of draws counted as flaked.
    pub p_flake: f64,
    /// Share of draws with a slab.
    pub p_slab: f64,
    /// Share of draws with a split.
    pub p_split: f64,
    /// Share of draws that let go at the rind; `None` where no rind was recorded.
    pub p_rind: Option<f64>,
    /// Mean thickness of the thickest event over the draws that spalled, m.
    pub thickness_m: Option<f64>,
    /// Its quantiles, m.
    pub thickness_quantiles_m: Option<Quantiles>,
    /// Mean flake thickness over the draws that flaked, m.
    pub flake_thickness_m: Option<f64>,
    /// Mean thickness of one plate over the draws that slabbed, m.
    pub slab_thickness_m: Option<f64>,
    /// Expected loss averaged over the heated surface, unconditional, m.
    pub loss_m: f64,
    /// Sampling error of `p_spall`.
    pub p_spall_se: f64,
    /// Sampling error of `thickness_m`.
    pub thickness_se_m: Option<f64>,
}

/// Everything said about one boulder.
#[derive(Debug, Clone, PartialEq)]
pub struct Assessment {
    /// Whether the model ran.
    pub status: Status,
    /// Why not, or the main reason for the numbers.
    pub reason: String,
    /// The burn that governs.
    pub burn_id: Option<String>,
    /// The exposure class used, or `shrub+forest_surface` for an inferred mix.
    pub exposure_used: Option<String>,
    /// Whether the class was inferred.
    pub exposure_inferred: Option<bool>,
    /// Heating.
    pub heat: Option<HeatSummary>,
    /// Spalling.
    pub spall: Option<SpallSummary>,
    /// Remarks.
    pub flags: BTreeSet<Flag>,
}

impl Assessment {
    /// A boulder that was not assessed, with its reason.
    pub fn not_assessed(reason: impl Into<String>) -> Self {
        Assessment {
            status: Status::NotAssessed,
            reason: reason.into(),
            burn_id: None,
            exposure_used: None,
            exposure_inferred: None,
            heat: None,
            spall: None,
            flags: BTreeSet::new(),
        }
    }
}
