//! The conditional ensemble: how likely a boulder that stands today moves within the horizon.
//!
//! p_release = (draws that stand today and fail after the changes) / (draws that stand today)
//!
//! In each draw: readings with their errors; today's dry state without shaking; draws that fail it are rejected, for
//! the boulder stands. A support that is there holds whatever is needed, so with a support no draw is rejected. Then, in
//! order, the changes of the horizon: support loss, seat loss, base retreat, wet spell, shaking. Released when any mode
//! has FS < 1 without a support. The cause of a released draw is the first change after which it fails.
//!
//! Errors (assumptions): slope normal about the reading, sd 2 deg; setback and centroid height sd 15 %; seat sd the
//! larger of 2 cm and 20 %, except that a recorded zero stays zero (no seat is something one sees). Base retreat comes
//! from the boulder's own spall draws where the base lies in the heated face, which has the draw's heated share as its
//! probability (assumption), or from a scar measured at the base, which replaces it.
//!
//! Chances within the horizon are not scaled with its length: they are set for a first season. No rate multiplier.

use std::collections::BTreeSet;

use super::SpallDraw;
use super::fragment::{fragment_m3, plate_breadth_m};
use super::friction::{UNKNOWN_CONTACT, UNKNOWN_SUPPORT, contact_index, pick, support_index};
use super::points::StaticPoints;
use super::source::{Cause, FIRE_BINS, STRATA, SourceBasis, SourceOutcome, SourceSummary, TriggerStrata, wilson_95};
use super::statics::{Demand, Mode, Stance, undercut_to_overturn_m};
use crate::flag::Flag;
use crate::settings::RockfallSettings;
use crate::site::{Boulder, Kind, StandingRecord, Support};

/// Where a figure comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Origin {
    /// The record.
    Recorded,
    /// The elevation raster.
    Raster,
}

/// What the statics of one boulder starts from.
#[derive(Debug, Clone, Copy)]
pub struct StaticsInputs<'a> {
    /// Boulder or outcrop.
    pub kind: Kind,
    /// Radius of the sphere of equal volume, m.
    pub radius_m: Option<f64>,
    /// Full axes, longest first, m.
    pub axes_m: Option<[f64; 3]>,
    /// Slope along the fall line, degrees.
    pub slope_deg: Option<f64>,
    /// Where the slope comes from.
    pub slope_origin: Origin,
    /// The record.
    pub standing: &'a StandingRecord,
}

impl<'a> StaticsInputs<'a> {
    /// The inputs of a boulder; `raster_slope_deg` fills a slope that was not recorded.
    pub fn of(boulder: &'a Boulder, raster_slope_deg: Option<f64>) -> Self {
        let recorded = boulder.standing.slope_deg;
        StaticsInputs {
            kind: boulder.kind,
            radius_m: boulder.radius_m,
            axes_m: boulder.axes_m,
            slope_deg: recorded.or(raster_slope_deg),
            slope_origin: if recorded.is_some() { Origin::Recorded } else { Origin::Raster },
            standing: &boulder.standing,
        }
    }

    /// What the likelihood will rest on.
    pub fn basis(&self) -> SourceBasis {
        let s = self.standing;
        if self.slope_deg.is_none() || (self.radius_m.is_none() && self.kind == Kind::Boulder) {
            return SourceBasis::None;
        }
        let complete = self.kind == Kind::Boulder
            && self.slope_origin == Origin::Recorded
            && s.contact.is_some()
            && s.seat_depth_m.is_some()
            && s.centroid_setback_m.is_some()
            && s.centroid_height_m.is_some()
            && s.support.is_some();
        if complete { SourceBasis::Measured } else { SourceBasis::Partial }
    }

    fn missing(&self) -> Vec<&'static str> {
        let mut missing = Vec::new();
        if self.slope_deg.is_none() {
            missing.push("slope_deg");
        }
        if self.radius_m.is_none() && self.kind == Kind::Boulder {
            missing.push("diameter_m");
        }
        missing
    }
}

/// Running sums over the static draws.
#[derive(Default)]
struct Tally {
    kept: usize,
    released: usize,
    by_mode: [usize; 3],
    by_cause: [usize; 5],
    fragment: f64,
    either: f64,
    stratum_kept: [usize; STRATA],
    stratum_either: [f64; STRATA],
}

impl Tally {
    fn add(&mut self, stratum: usize, release: Option<(Mode, Cause)>, fragment: f64) {
        self.kept += 1;
        self.stratum_kept[stratum] += 1;
        let mut either = fragment;
        if let Some((mode, cause)) = release {
            self.released += 1;
            self.by_mode[mode as usize] += 1;
            self.by_cause[cause as usize] += 1;
            either = 1.0;
        }
        self.fragment += fragment;
        self.either += either;
        self.stratum_either[stratum] += either;
    }
}

/// Assesses one boulder: `draws` is what its thermal ensemble did, `[points.thermal_draws()]`, in order.
///
/// # Panics
/// When `draws` has another length than the points were built for.
pub fn assess_source(
    inputs: &StaticsInputs<'_>,
    draws: &[SpallDraw],
    points: &StaticPoints,
    settings: &RockfallSettings,
    horizon_days: f64,
) -> SourceSummary {
    assert_eq!(draws.len(), points.thermal_draws(), "static points were built for another number of thermal draws");
    let mut flags = flags_of(inputs, settings);
    let basis = inputs.basis();
    if basis == SourceBasis::None {
        flags.insert(Flag::SourceNotRecorded);
        let outcome = SourceOutcome::NotRecorded { missing: inputs.missing() };
        return SourceSummary::without_numbers(basis, outcome, horizon_days, flags);
    }
    if basis == SourceBasis::Partial {
        flags.insert(Flag::SourcePartial);
    }

    let tally = match inputs.kind {
        Kind::Boulder => tally_boulder(inputs, draws, points, settings),
        Kind::Outcrop => tally_outcrop(draws, points),
    };
    let kept_share = tally.kept as f64 / (points.thermal_draws() * points.per_thermal()) as f64;
    if kept_share < settings.kept_share_min {
        flags.insert(Flag::CheckMeasurements);
        let outcome = SourceOutcome::CheckMeasurements { kept_share };
        let mut summary = SourceSummary::without_numbers(basis, outcome, horizon_days, flags);
        summary.kept_share = Some(kept_share);
        return summary;
    }
    summarise(inputs, draws, points, settings, &tally, kept_share, basis, horizon_days, flags)
}

fn flags_of(inputs: &StaticsInputs<'_>, settings: &RockfallSettings) -> BTreeSet<Flag> {
    let mut flags = BTreeSet::new();
    if inputs.slope_origin == Origin::Raster && inputs.slope_deg.is_some() {
        flags.insert(Flag::SlopeFromTerrain);
    }
    if inputs.standing.support == Some(Support::BurntThrough) {
        flags.insert(Flag::BurntThroughSupport);
    }
    if inputs.standing.base_scar_m.is_some() {
        flags.insert(Flag::BaseScarMeasured);
    }
    if settings.shaking_k > 0.0 {
        flags.insert(Flag::ShakingConsidered);
    }
    flags
}

/// Half the shortest axis and half the mean of the other two, m: what an unrecorded centroid is guessed from.
pub(crate) fn half_sizes(inputs: &StaticsInputs<'_>, radius_m: f64) -> (f64, f64) {
    match inputs.axes_m {
        Some([a, b, c]) => {
            let shortest = a.min(b).min(c);
            (0.5 * shortest, 0.25 * (a + b + c - shortest))
        }
        None => (radius_m, radius_m),
    }
}

fn stratum_of(draw: &SpallDraw, wet: bool) -> usize {
    let bin = ((draw.fire_severity_u * FIRE_BINS as f64) as usize).min(FIRE_BINS - 1);
    2 * bin + usize::from(wet)
}

fn tally_outcrop(draws: &[SpallDraw], points: &StaticPoints) -> Tally {
    let mut tally = Tally::default();
    for (d, draw) in draws.iter().enumerate() {
        for i in d * points.per_thermal()..(d + 1) * points.per_thermal() {
            let fragment = if draw.slab_or_split { points.outcrop_face_share[i] } else { 0.0 };
            tally.add(stratum_of(draw, points.wet[i]), None, fragment);
        }
    }
    tally
}

#[expect(clippy::needless_range_loop, reason = "one index into a dozen columns of the points")]
fn tally_boulder(
    inputs: &StaticsInputs<'_>,
    draws: &[SpallDraw],
    points: &StaticPoints,
    settings: &RockfallSettings,
) -> Tally {
    let radius_m = inputs.radius_m.expect("basis is none without a size");
    let slope_deg = inputs.slope_deg.expect("basis is none without a slope");
    let (half_short_m, half_others_m) = half_sizes(inputs, radius_m);
    let record = inputs.standing;
    let tan_reading = libm::tan(slope_deg.to_radians());
    let slope_error = match inputs.slope_origin {
        Origin::Recorded => &points.slope_error_tan,
        Origin::Raster => &points.raster_slope_error_tan,
    };
    let rel_sd = settings.geometry_rel_sd;
    let seat_sd_m = record.seat_depth_m.map_or(0.0, |t| settings.seat_sd_m.max(settings.seat_rel_sd * t));
    let burnt_duff = contact_index(crate::site::Contact::BurntDuff);
    let contact = record.contact.map(contact_index);
    let support = record.support.map(support_index);
    let no_support = support_index(Support::None);
    let wet_demand = |i: usize| Demand { shaking_k: 0.0, uplift_share: points.uplift_share[i] };

    let mut tally = Tally::default();
    for (d, draw) in draws.iter().enumerate() {
        for i in d * points.per_thermal()..(d + 1) * points.per_thermal() {
            let error = slope_error[i];
            let below = 1.0 - tan_reading * error;
            let contact = contact.unwrap_or_else(|| pick(&UNKNOWN_CONTACT, points.contact_u[i]));
            let support = support.unwrap_or_else(|| pick(&UNKNOWN_SUPPORT, points.support_u[i]));
            let today = Stance {
                tan_slope: if below > 0.0 { (tan_reading + error) / below } else { f64::INFINITY },
                tan_friction: points.friction_tan[contact][i],
                setback_m: match record.centroid_setback_m {
                    Some(x) => x * (1.0 + rel_sd * points.setback_z[i]),
                    None => half_others_m * (0.4 + 0.5 * points.setback_u[i]),
                },
                centroid_height_m: match record.centroid_height_m {
                    Some(h) => (h * (1.0 + rel_sd * points.height_z[i])).max(0.0),
                    None => half_short_m * (0.8 + 0.3 * points.height_u[i]),
                },
                radius_m,
                seat_m: match record.seat_depth_m {
                    Some(t) if t <= 0.0 => 0.0,
                    Some(t) => (t + seat_sd_m * points.seat_z[i]).max(0.0),
                    None => 0.3 * radius_m * points.seat_u[i],
                },
            };
            let held = support != no_support;
            if !held && today.fails(Demand::default()) {
                continue;
            }
            let fragment = if draw.slab_or_split { points.boulder_face_share[i] } else { 0.0 };
            let stratum = stratum_of(draw, points.wet[i]);

            if held && points.support_loss_u[i] >= settings.support_loss[support] {
                tally.add(stratum, None, fragment);
                continue;
            }
            let mut later = today;
            if contact == burnt_duff {
                later.seat_m -= points.seat_loss_u[i] * today.seat_m;
            }
            let retreat_m = match record.base_scar_m {
                Some(scar) => scar,
                None if points.base_heated_u[i] < draw.heated_fraction => draw.base_retreat_m,
                None => 0.0,
            };
            later.setback_m -= retreat_m;
            let last = Demand { shaking_k: settings.shaking_k, uplift_share: points.uplift_share[i] };
            if !later.fails(last) {
                tally.add(stratum, None, fragment);
                continue;
            }
            let unscarred = Stance { setback_m: today.setback_m, ..later };
            let cause = if held && today.fails(Demand::default()) {
                Cause::SupportLoss
            } else if unscarred.fails(Demand::default()) {
                Cause::SeatLoss
            } else if later.fails(Demand::default()) {
                Cause::BaseRetreat
            } else if later.fails(wet_demand(i)) {
                Cause::WetSpell
            } else {
                Cause::Shaking
            };
            tally.add(stratum, Some((later.weakest(last), cause)), fragment);
        }
    }
    tally
}

#[expect(clippy::too_many_arguments, reason = "one step of one computation, split only for length")]
fn summarise(
    inputs: &StaticsInputs<'_>,
    draws: &[SpallDraw],
    points: &StaticPoints,
    settings: &RockfallSettings,
    tally: &Tally,
    kept_share: f64,
    basis: SourceBasis,
    horizon_days: f64,
    flags: BTreeSet<Flag>,
) -> SourceSummary {
    let kept = tally.kept as f64;
    let p_source = tally.either / kept;
    let p_release = tally.released as f64 / kept;
    let (low, high) = wilson_95(p_source, kept / points.per_thermal() as f64);
    let mut mode_share = [0.0; 4];
    if tally.either > 0.0 {
        for mode in [Mode::Slide, Mode::Overturn, Mode::Roll] {
            mode_share[mode as usize] = tally.by_mode[mode as usize] as f64 / tally.either;
        }
        mode_share[Mode::Fragment as usize] = (tally.either - tally.released as f64) / tally.either;
    }
    let mut cause_share = [0.0; 5];
    if tally.released > 0 {
        cause_share = tally.by_cause.map(|n| n as f64 / tally.released as f64);
    }
    let loose = || draws.iter().filter(|d| d.slab_or_split);
    let undercut = match (inputs.standing.centroid_setback_m, inputs.standing.centroid_height_m, inputs.slope_deg) {
        (Some(x), Some(h), Some(b)) => Some(undercut_to_overturn_m(x, h, b.to_radians(), 0.0)),
        _ => None,
    };
    SourceSummary {
        basis,
        outcome: SourceOutcome::Assessed,
        kept_share: Some(kept_share),
        p_source: Some(p_source),
        p_source_low: Some(low),
        p_source_high: Some(high),
        p_release: (inputs.kind == Kind::Boulder).then_some(p_release),
        p_fragment: Some(tally.fragment / kept),
        mode_share,
        cause_share,
        fragment_m3_p50: median(loose().map(|d| fragment_m3(d, inputs.radius_m)).collect()),
        fragment_breadth_m_p50: median(loose().map(plate_breadth_m).collect()),
        undercut_to_overturn_m: undercut,
        strata: Some(strata_of(tally, p_source, settings.wet_spell_probability)),
        horizon_days,
        flags,
    }
}

/// Kept draws from which a stratum speaks for itself; below, the figure of its wet or dry half stands in.
const STRATUM_DRAWS_MIN: usize = 16;

fn strata_of(tally: &Tally, p_source: f64, wet_probability: f64) -> TriggerStrata {
    let half = |wet: usize| {
        let kept: usize = (0..FIRE_BINS).map(|b| tally.stratum_kept[2 * b + wet]).sum();
        let either: f64 = (0..FIRE_BINS).map(|b| tally.stratum_either[2 * b + wet]).sum();
        if kept < STRATUM_DRAWS_MIN { p_source } else { either / kept as f64 }
    };
    let halves = [half(0), half(1)];
    let mut strata = TriggerStrata { p: [0.0; STRATA] };
    for (s, p) in strata.p.iter_mut().enumerate() {
        *p = match tally.stratum_kept[s] {
            n if n < STRATUM_DRAWS_MIN => halves[s % 2],
            n => tally.stratum_either[s] / n as f64,
        };
    }
    // Strata differ a little in how many of their draws stand; the mean is held at p_source, so that a trail with one
    // boulder gets exactly that boulder's figure. Raising cannot always be done by a factor: the room to 1 is shrunk.
    let mean = strata.mean(wet_probability);
    if mean > 0.0 && mean < 1.0 {
        for p in &mut strata.p {
            *p = if p_source <= mean {
                *p * (p_source / mean)
            } else {
                1.0 - (1.0 - *p) * ((1.0 - p_source) / (1.0 - mean))
            };
        }
    }
    strata
}

/// Middle of a list; the mean of the two middle ones of an even list.
fn median(mut values: Vec<f64>) -> Option<f64> {
    if values.is_empty() {
        return None;
    }
    values.sort_by(f64::total_cmp);
    let n = values.len();
    Some(0.5 * (values[(n - 1) / 2] + values[n / 2]))
}
