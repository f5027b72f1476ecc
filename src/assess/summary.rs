//! From draws to the figures of one boulder, as defined on the physics page, 4.5.

use super::draws::Draw;
use super::{HeatSummary, Quantiles, SpallSummary};
use crate::ensemble::points::PointSet;
use crate::numerics::quantile::{mean, quantile_sorted, replicate_error, sorted};
use crate::spall::outcome::{Family, Outcome};

/// One draw over all its fires.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct DrawSummary {
    /// Hottest face, K.
    pub peak_surface_k: f64,
    /// Largest dose of one fire, J/m2.
    pub absorbed_j_m2: f64,
    /// sqrt(kappa t) of the longest fire, m.
    pub heated_depth_m: f64,
    /// Largest skin stress, Pa.
    pub peak_stress_pa: f64,
    /// Thickest flake, m; 0 without one.
    pub flake_m: f64,
    /// Thickest slab plate, m; 0 without one.
    pub slab_m: f64,
    /// All slab plates of the worst fire together, m.
    pub slabs_sum_m: f64,
    /// Thickness of a split, m; 0 without one.
    pub split_m: f64,
    /// Rind, m; 0 unless it let go.
    pub rind_m: f64,
    /// Loss averaged over the heated face, m.
    pub loss_m: f64,
    /// Slabbed share of the heated face.
    pub slab_share: f64,
    /// Plate breadth over depth.
    pub plate_breadth: f64,
    /// Heated share of the boulder.
    pub heated_share: f64,
    /// Half-width of the heated patch, m.
    pub patch_m: f64,
}

impl DrawSummary {
    /// Adds what one fire did to this draw.
    pub fn add(&mut self, draw: &Draw, outcome: &Outcome) {
        self.peak_surface_k = self.peak_surface_k.max(outcome.peak_surface_k);
        self.absorbed_j_m2 = self.absorbed_j_m2.max(outcome.absorbed_j_m2);
        self.heated_depth_m = self.heated_depth_m.max((draw.diffusivity_m2_s * draw.residence_s).sqrt());
        self.peak_stress_pa = self.peak_stress_pa.max(outcome.peak_stress_pa);
        self.slab_share = draw.slab_share;
        self.plate_breadth = draw.plate_breadth;
        let mut loss = 0.0;
        let mut slabs = 0.0;
        for event in outcome.events.iter() {
            match event.family {
                Family::Flake => {
                    self.flake_m = self.flake_m.max(event.depth_m);
                    loss += draw.flakable_share * outcome.flaked_sites * event.depth_m;
                }
                Family::Slab => {
                    self.slab_m = self.slab_m.max(event.depth_m);
                    slabs += event.depth_m;
                    loss += draw.slab_share * event.depth_m;
                }
                // A split parts the boulder and takes nothing off its face.
                Family::Split => self.split_m = self.split_m.max(event.depth_m),
                Family::Rind => {
                    self.rind_m = event.depth_m;
                    loss += draw.slab_share * event.depth_m;
                }
            }
        }
        self.slabs_sum_m = self.slabs_sum_m.max(slabs);
        // A later, smaller patch (a log) counts by its share of the first face.
        let weight = if self.heated_share > 0.0 { (draw.heated_share / self.heated_share).min(1.0) } else { 1.0 };
        self.heated_share = self.heated_share.max(draw.heated_share);
        self.patch_m = self.patch_m.max(draw.patch_m);
        self.loss_m += loss * weight;
    }

    /// Thickest event of the draw, m; 0 when it did not spall.
    pub fn thickness_m(&self) -> f64 {
        self.flake_m.max(self.slab_m).max(self.split_m).max(self.rind_m)
    }
}

fn quantiles(values: Vec<f64>) -> Option<Quantiles> {
    let values = sorted(values);
    (!values.is_empty()).then(|| Quantiles {
        p05: quantile_sorted(&values, 0.05),
        p50: quantile_sorted(&values, 0.5),
        p95: quantile_sorted(&values, 0.95),
    })
}

/// Heating figures.
///
/// # Panics
/// Without draws.
pub fn heat(draws: &[DrawSummary]) -> HeatSummary {
    let all = |f: fn(&DrawSummary) -> f64| quantiles(draws.iter().map(f).collect()).expect("an ensemble has draws");
    HeatSummary {
        peak_surface_k: all(|d| d.peak_surface_k),
        absorbed_j_m2_p50: all(|d| d.absorbed_j_m2).p50,
        heated_depth_m: all(|d| d.heated_depth_m).p50,
        peak_skin_stress_pa_p50: all(|d| d.peak_stress_pa).p50,
    }
}

/// Spall figures, `draws` in the order of the points.
pub fn spall(draws: &[DrawSummary], points: &PointSet, rind_recorded: bool) -> SpallSummary {
    let share = |f: fn(&DrawSummary) -> f64| draws.iter().filter(|d| f(d) > 0.0).count() as f64 / draws.len() as f64;
    let positive = |f: fn(&DrawSummary) -> f64| draws.iter().map(f).filter(|x| *x > 0.0).collect::<Vec<_>>();
    let spalled: Vec<f64> = draws.iter().map(|d| f64::from(u8::from(d.thickness_m() > 0.0))).collect();
    let thickness: Vec<f64> = draws.iter().map(DrawSummary::thickness_m).collect();
    let p_means = points.replicate_means(&spalled);
    let t_means: Vec<f64> = points
        .replicate_means(&thickness)
        .iter()
        .zip(&p_means)
        .filter(|(_, p)| **p > 0.0)
        .map(|(t, p)| t / p)
        .collect();
    SpallSummary {
        p_spall: share(DrawSummary::thickness_m),
        p_flake: share(|d| d.flake_m),
        p_slab: share(|d| d.slab_m),
        p_split: share(|d| d.split_m),
        p_rind: rind_recorded.then(|| share(|d| d.rind_m)),
        thickness_m: mean(&positive(DrawSummary::thickness_m)),
        thickness_quantiles_m: quantiles(positive(DrawSummary::thickness_m)),
        flake_thickness_m: mean(&positive(|d| d.flake_m)),
        slab_thickness_m: mean(&positive(|d| d.slab_m)),
        loss_m: mean(&draws.iter().map(|d| d.loss_m).collect::<Vec<_>>()).unwrap_or(0.0),
        p_spall_se: replicate_error(&p_means).unwrap_or(0.0),
        thickness_se_m: replicate_error(&t_means),
    }
}
