//! The ground along a ray: the least reach angle on the way.
//!
//! A block that comes to rest under the reach angle a gets past a point at distance d' only while its energy line
//! z_s - d' tan a is above the ground there, so it gets to d when a <= min over d' <= d of theta(d'): the ray stops where
//! the ground rises above the line, and a ridge or a bench drops what lies behind it.
//!
//! The ground is sampled at half a cell from one cell away on; nearer, the raster's own smoothing outweighs the ground.
//! Samples without data are passed over and reported.

use super::reach::reach_angle_deg;
use super::terrain::{LocalGrid, Terrain};

/// Rays from one source over a raster.
#[derive(Debug, Clone, Copy)]
pub struct RayCaster<'a> {
    terrain: &'a Terrain,
    grid: LocalGrid,
    source_height_m: f64,
    step_m: f64,
}

/// What a ray met.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Way {
    /// Least reach angle on the way, degrees; 90 when nothing was sampled.
    pub least_deg: f64,
    /// Whether some samples had no data.
    pub gap: bool,
}

impl<'a> RayCaster<'a> {
    /// Rays from a source at a place and height.
    pub fn new(terrain: &'a Terrain, lon_deg: f64, lat_deg: f64, source_height_m: f64) -> Option<Self> {
        let grid = terrain.local(lon_deg, lat_deg)?;
        Some(RayCaster { terrain, grid, source_height_m, step_m: 0.5 * terrain.cell_m() })
    }

    /// Least angle along the ray of bearing (sin, cos) short of `distance_m`.
    pub fn least_angle(&self, sin: f64, cos: f64, distance_m: f64) -> Way {
        let (mut least_slope, mut gap) = (f64::INFINITY, false);
        let mut d = 2.0 * self.step_m;
        while d < distance_m {
            let (column, row) = self.grid.cell(d * sin, d * cos);
            match self.terrain.height_at_cell(column, row) {
                Some(ground_m) => least_slope = least_slope.min((self.source_height_m - ground_m) / d),
                None => gap = true,
            }
            d += self.step_m;
        }
        let least_deg = if least_slope.is_finite() { reach_angle_deg(least_slope, 1.0) } else { 90.0 };
        Way { least_deg, gap }
    }
}
