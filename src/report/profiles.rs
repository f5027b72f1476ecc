//! Temperature and stress through depth of the boulders that come first, for the page's charts: a probe on their medians.

use super::{ProfileEvent, ProfileOfBoulder};
use crate::assess::Model;
use crate::assess::draws::Body;
use crate::assess::fires::fires_at;
use crate::assess::probe::{self, Fixed, History};
use crate::rock::Property;
use crate::site::{Boulder, Burn};
use crate::units::{MM_PER_M, PA_PER_MPA, celsius};

/// Depths of the profiles, mm.
const DEPTHS_MM: [f64; 15] = [0.0, 1.0, 2.0, 3.0, 5.0, 7.0, 10.0, 15.0, 20.0, 30.0, 40.0, 60.0, 80.0, 110.0, 150.0];
/// Moments of the profiles, as shares of the median residence.
const MOMENTS: [f64; 5] = [0.25, 0.5, 1.0, 2.0, 4.0];

/// Profile of one boulder in the first of its fires; `None` where none reaches it. A mixture shows its first rock.
pub fn profile(model: &Model, boulder: &Boulder, burns: &[&Burn]) -> Option<ProfileOfBoulder> {
    let fire = fires_at(boulder, burns, &mut Default::default()).ok()?.into_iter().next()?;
    let (rock, _) = *model.rocks_of(&boulder.rock).first()?;
    let table = &model.tables.rocks[rock];
    let body = Body::of(boulder);
    let mut properties = boulder.heating.properties.clone();
    properties.extend(boulder.heating.diffusivity_m2_s.map(|kappa| (Property::Diffusivity, kappa)));
    let fixed = Fixed { properties, heated_share: boulder.heating.heated_fraction, ..Fixed::default() };
    let residence_s = fire.median_residence_s();
    let history = History::Fire(fire);
    let settings = &model.settings.spall;
    let log_m = boulder.heating.log_diameter_m;
    let median = probe::median_draw(table, &body, &history, &fixed, log_m, settings.flame_front_width_m).ok()?;
    let depth_m = DEPTHS_MM.map(|z| z / MM_PER_M);
    let times_s = MOMENTS.map(|share| share * residence_s);
    // One history is followed: plates stay.
    let still = crate::settings::SpallSettings { slab_leaves_probability: 0.0, ..settings.clone() };
    let probe = probe::run(table, &body, &history, &median, &depth_m, &times_s, &still);
    let rounded = |x: f64, digit: f64| (x * digit).round() / digit;
    Some(ProfileOfBoulder {
        id: boulder.id.clone(),
        depth_mm: DEPTHS_MM.to_vec(),
        times_s: probe.time_s.iter().map(|t| rounded(*t, 10.0)).collect(),
        temperature_c: each(&probe.temperature_k, |t| rounded(celsius(t), 10.0)),
        skin_stress_mpa: each(&probe.skin_stress_pa, |s| rounded(s / PA_PER_MPA, 100.0)),
        events: probe
            .events
            .iter()
            .map(|e| ProfileEvent {
                family: e.family.word().to_owned(),
                time_s: rounded(e.time_s, 10.0),
                depth_mm: rounded(e.depth_m * MM_PER_M, 100.0),
            })
            .collect(),
    })
}

fn each(table: &[Vec<f64>], unit: impl Fn(f64) -> f64) -> Vec<Vec<f64>> {
    table.iter().map(|row| row.iter().map(|x| unit(*x)).collect()).collect()
}
