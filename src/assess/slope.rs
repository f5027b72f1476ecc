//! From what the fire did to a boulder to what it does on its slope: thermal draws handed to the statics, draw by draw.

use super::Model;
use super::summary::DrawSummary;
use crate::ensemble::distribution::{normal_cdf, normal_score};
use crate::ensemble::points::{Dimension, PointSet};
use crate::rockfall::SpallDraw;
use crate::rockfall::place::Placed;
use crate::rockfall::release::{StaticsInputs, assess_source};
use crate::rockfall::source::SourceSummary;
use crate::site::Boulder;

/// The fire coordinate of every draw, in (0, 1): how long and hot the fire was, the same for every boulder of the run.
pub fn fire_coordinates(points: &PointSet) -> Vec<f64> {
    let half = core::f64::consts::FRAC_1_SQRT_2;
    points
        .of(Dimension::Residence)
        .iter()
        .zip(points.of(Dimension::Irradiance))
        .map(|(a, b)| normal_cdf(half * (normal_score(*a) + normal_score(*b))))
        .collect()
}

/// What one draw means for the statics. The chance that the base lies in what came off is the heated share, times the
/// slabbed share of it where a slab or rind came off.
pub(super) fn spall_draw(draw: &DrawSummary, fire_severity_u: f64) -> SpallDraw {
    let plates = draw.slabs_sum_m.max(draw.rind_m);
    let (base_retreat_m, share) = if plates > 0.0 { (plates, draw.slab_share) } else { (draw.flake_m, 1.0) };
    let split = draw.split_m > 0.0;
    SpallDraw {
        base_retreat_m,
        slab_or_split: split || draw.slab_m > 0.0,
        fragment_depth_m: draw.slab_m.max(draw.split_m),
        patch_breadth_limit_m: 2.0 * draw.patch_m,
        // A split part has no plate breadth.
        slab_breadth_m: if split { 0.0 } else { draw.plate_breadth * draw.slab_m },
        fire_severity_u,
        heated_fraction: draw.heated_share * share,
    }
}

impl Model {
    /// What the statics needs of the thermal draws of a boulder, in their order.
    pub fn spall_draws(&self, draws: &[DrawSummary]) -> Vec<SpallDraw> {
        draws.iter().zip(&self.fire_coordinates).map(|(draw, fire)| spall_draw(draw, *fire)).collect()
    }

    /// The source likelihood of an assessed boulder from its place and its thermal draws.
    pub fn source(&self, boulder: &Boulder, placed: &Placed, draws: &[DrawSummary]) -> SourceSummary {
        self.source_of(boulder, placed, &self.spall_draws(draws))
    }

    /// The same from what [`Model::spall_draws`] made of them.
    pub fn source_of(&self, boulder: &Boulder, placed: &Placed, spalls: &[SpallDraw]) -> SourceSummary {
        let inputs = StaticsInputs::of(boulder, placed.raster_slope_deg);
        assess_source(&inputs, spalls, &self.static_points, &self.settings.rockfall, self.settings.horizon_days)
    }
}
