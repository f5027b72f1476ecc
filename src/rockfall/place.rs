//! Where a boulder stands: slope, bearing and height from its record, filled from the raster, doubts flagged.

use std::collections::BTreeSet;

use super::terrain::Terrain;
use crate::flag::Flag;
use crate::settings::RockfallSettings;
use crate::site::{Boulder, Position};

/// A boulder's place as the model uses it.
#[derive(Debug, Clone, PartialEq)]
pub struct Placed {
    /// Slope, degrees, when it had to come from the raster.
    pub raster_slope_deg: Option<f64>,
    /// Downslope bearing, degrees.
    pub bearing_deg: Option<f64>,
    /// Height, m.
    pub height_m: Option<f64>,
    /// Standard deviation of the height, m.
    pub height_sd_m: f64,
    /// What was filled, what is in doubt.
    pub flags: BTreeSet<Flag>,
}

/// Places one boulder. A recorded figure wins; a height that differs from the raster by more than the tolerance (the larger
/// of the setting and three recorded standard deviations) is replaced by the raster's and flagged.
pub fn place(boulder: &Boulder, terrain: Option<&Terrain>, settings: &RockfallSettings) -> Placed {
    let Position { lon_deg, lat_deg, height_m } = boulder.position;
    let standing = &boulder.standing;
    let mut placed = Placed {
        raster_slope_deg: None,
        bearing_deg: standing.downslope_azimuth_deg,
        height_m,
        height_sd_m: standing.elevation_sd_m.unwrap_or(settings.height_sd_m),
        flags: BTreeSet::new(),
    };
    match terrain {
        None => {
            placed.flags.insert(Flag::NoTerrain);
        }
        Some(terrain) => {
            let raster_height = terrain.height(lon_deg, lat_deg);
            if raster_height.is_none() {
                placed.flags.insert(Flag::TerrainGap);
            }
            let tolerance_m = settings.height_tolerance_m.max(3.0 * placed.height_sd_m);
            match (height_m, raster_height) {
                (None, Some(h)) => {
                    placed.height_m = Some(h);
                    placed.flags.insert(Flag::HeightFromTerrain);
                }
                (Some(own), Some(h)) if (own - h).abs() > tolerance_m => {
                    placed.height_m = Some(h);
                    placed.flags.extend([Flag::HeightUnusual, Flag::HeightFromTerrain]);
                }
                _ => {}
            }
            if let Some(fall) = terrain.fall(lon_deg, lat_deg) {
                if standing.slope_deg.is_none() {
                    placed.raster_slope_deg = Some(fall.slope_deg);
                    placed.flags.insert(Flag::SlopeFromTerrain);
                }
                if placed.bearing_deg.is_none() && fall.bearing_deg.is_some() {
                    placed.bearing_deg = fall.bearing_deg;
                    placed.flags.insert(Flag::BearingFromTerrain);
                }
            }
        }
    }
    if placed.bearing_deg.is_none() {
        placed.flags.insert(Flag::BearingUnknown);
    }
    placed
}

/// Feet in a metre: a height larger than its neighbours' by about this factor was written in feet.
const FEET_PER_M: f64 = 3.280_84;

/// Which of `heights_m` look wrong beside the others: zero among hills, feet among metres, or 1000 m off. Needs three
/// heights or more; the heights of trails may be passed along. `None` entries are never in doubt.
///
/// ```
/// let doubts = spallcast::rockfall::place::doubtful_heights(&[Some(900.0), Some(0.0), Some(2990.0), Some(910.0), None]);
/// assert_eq!(doubts, [false, true, true, false, false]);
/// ```
pub fn doubtful_heights(heights_m: &[Option<f64>]) -> Vec<bool> {
    let mut known: Vec<f64> = heights_m.iter().flatten().copied().filter(|h| *h != 0.0).collect();
    if known.len() < 3 {
        return vec![false; heights_m.len()];
    }
    known.sort_by(f64::total_cmp);
    // The lower middle: with a few heights in feet among metres the metres are the lower ones.
    let middle = known[(known.len() - 1) / 2];
    let odd = |h: f64| {
        (h == 0.0 && middle > 50.0)
            || (h - middle).abs() > 1000.0
            || (middle > 200.0 && (h / middle / FEET_PER_M - 1.0).abs() < 0.1)
    };
    heights_m.iter().map(|h| h.is_some_and(odd)).collect()
}
