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
use super::points::StaticPoints;
use super::source::{Cause, FIRE_BINS, STRATA, SourceBasis, SourceOutcome, SourceSummary, TriggerStrata, wilson_95};
use super::statics::{Demand, Mode, Stance, tan_with_shaking, undercut_to_overturn_m};
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

/// Sums in strands, added up at the end: vector registers then need not wait for one another.
type Strands = [f64; STRANDS];
const STRANDS: usize = 4;

fn total(strands: &Strands) -> f64 {
    (strands[0] + strands[1]) + (strands[2] + strands[3])
}

/// Running sums over the static draws of one band of fire severity.
#[derive(Clone, Copy, Default)]
struct BinTally {
    kept: Strands,
    kept_wet: Strands,
    released: Strands,
    released_wet: Strands,
    /// Shares of loose parts where the boulder moves too, and where it stays, in a dry and in a wet season.
    fragment_moving: Strands,
    fragment_dry: Strands,
    fragment_wet: Strands,
}

impl BinTally {
    /// Adds some static draws: `stands`, `moves` and `wet` hold 1 or 0 for each.
    fn count(&mut self, stands: &[f64], moves: &[f64], wet: &[f64]) {
        let mut sums = *self;
        let mut add = |lane: usize, stands: f64, moves: f64, wet: f64| {
            sums.kept[lane] += stands;
            sums.kept_wet[lane] += stands * wet;
            sums.released[lane] += moves;
            sums.released_wet[lane] += moves * wet;
        };
        let (groups, rest) = stands.as_chunks::<STRANDS>();
        let (moves, rest_moves) = moves.as_chunks::<STRANDS>();
        let (wet, rest_wet) = wet.as_chunks::<STRANDS>();
        for ((stands, moves), wet) in groups.iter().zip(moves).zip(wet) {
            (0..STRANDS).for_each(|lane| add(lane, stands[lane], moves[lane], wet[lane]));
        }
        for (lane, ((stands, moves), wet)) in rest.iter().zip(rest_moves).zip(rest_wet).enumerate() {
            add(lane, *stands, *moves, *wet);
        }
        *self = sums;
    }

    /// Adds the loose parts of the same draws: `share` is the share of faces that one slides off.
    fn loosen(&mut self, stands: &[f64], moves: &[f64], wet: &[f64], share: &[f64]) {
        let mut sums = *self;
        let mut add = |lane: usize, stands: f64, moves: f64, wet: f64, share: f64| {
            let stays = share * (stands - moves);
            sums.fragment_moving[lane] += share * moves;
            sums.fragment_dry[lane] += stays * (1.0 - wet);
            sums.fragment_wet[lane] += stays * wet;
        };
        let (groups, rest) = stands.as_chunks::<STRANDS>();
        let (moves, rest_moves) = moves.as_chunks::<STRANDS>();
        let (wet, rest_wet) = wet.as_chunks::<STRANDS>();
        let (share, rest_share) = share.as_chunks::<STRANDS>();
        for ((stands, moves), (wet, share)) in groups.iter().zip(moves).zip(wet.iter().zip(share)) {
            (0..STRANDS).for_each(|lane| add(lane, stands[lane], moves[lane], wet[lane], share[lane]));
        }
        let rest = rest.iter().zip(rest_moves).zip(rest_wet.iter().zip(rest_share));
        for (lane, ((stands, moves), (wet, share))) in rest.enumerate() {
            add(lane, *stands, *moves, *wet, *share);
        }
        *self = sums;
    }
}

/// Sums over all static draws. Counts are whole numbers, exact as they stand.
#[derive(Default)]
struct Tally {
    kept: f64,
    released: f64,
    by_mode: [usize; 3],
    by_cause: [usize; 5],
    fragment: f64,
    /// The same where the boulder itself stays.
    fragment_alone: f64,
    stratum_kept: [f64; STRATA],
    stratum_either: [f64; STRATA],
}

impl Tally {
    fn of(bins: &[BinTally; FIRE_BINS]) -> Self {
        let mut tally = Tally::default();
        for (bin, sums) in bins.iter().enumerate() {
            let (kept, released) = (total(&sums.kept), total(&sums.released));
            let (kept_wet, released_wet) = (total(&sums.kept_wet), total(&sums.released_wet));
            let (dry, wet) = (total(&sums.fragment_dry), total(&sums.fragment_wet));
            tally.kept += kept;
            tally.released += released;
            tally.fragment_alone += dry + wet;
            tally.fragment += total(&sums.fragment_moving) + (dry + wet);
            tally.stratum_kept[2 * bin] = kept - kept_wet;
            tally.stratum_kept[2 * bin + 1] = kept_wet;
            tally.stratum_either[2 * bin] = released - released_wet + dry;
            tally.stratum_either[2 * bin + 1] = released_wet + wet;
        }
        tally
    }

    /// Draws in which the boulder or a part of it moves.
    fn either(&self) -> f64 {
        self.released + self.fragment_alone
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
    let kept_share = tally.kept / (points.thermal_draws() * points.per_thermal()) as f64;
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

/// Which band of fire severity a thermal draw belongs to.
fn severity_bin(draw: &SpallDraw) -> usize {
    ((draw.fire_severity_u * FIRE_BINS as f64) as usize).min(FIRE_BINS - 1)
}

fn tally_outcrop(draws: &[SpallDraw], points: &StaticPoints) -> Tally {
    let mut bins = [BinTally::default(); FIRE_BINS];
    let n = points.per_thermal();
    let (stands, moves) = (vec![1.0; n], vec![0.0; n]);
    for (d, draw) in draws.iter().enumerate() {
        let of = d * n..(d + 1) * n;
        let (bin, wet) = (&mut bins[severity_bin(draw)], &points.wet[of.clone()]);
        bin.count(&stands, &moves, wet);
        if draw.slab_or_split {
            bin.loosen(&stands, &moves, wet, &points.outcrop_face_share[of]);
        }
    }
    Tally::of(&bins)
}

/// Static draws that are worked through at a time: their columns stay in the first cache.
const BLOCK: usize = 256;

/// Some static draws of one boulder side by side, so that plain loops over them run in vector registers.
#[derive(Default)]
struct Block {
    tan_slope: Vec<f64>,
    /// The same, tilted by shaking where the settings ask for it.
    tan_shaken: Vec<f64>,
    setback_m: Vec<f64>,
    height_m: Vec<f64>,
    seat_m: Vec<f64>,
    /// Setback and seat after the changes of the horizon.
    setback_later_m: Vec<f64>,
    seat_later_m: Vec<f64>,
    /// 1 where a factor of safety is under 1 today or after the changes, were there no support, else 0.
    fails_today: Vec<f64>,
    fails_later: Vec<f64>,
    /// 1 where the boulder stands today, else 0.
    stands: Vec<f64>,
    /// 1 where it stands today and moves within the horizon, else 0.
    moves: Vec<f64>,
}

/// Columns of the points that a block is judged with, cut to the block.
struct Given<'a> {
    tan_friction: &'a [f64],
    uplift_share: &'a [f64],
    held: &'a [f64],
    support_stays: &'a [f64],
    none: &'a [f64],
}

/// Fills a column from a column of the points.
#[inline(always)]
fn fill(column: &mut Vec<f64>, from: &[f64], f: impl Fn(f64) -> f64) {
    column.clear();
    column.extend(from.iter().map(|x| f(*x)));
}

impl Block {
    /// Judges the block: which draws stand today, and which of those move within the horizon.
    fn judge(&mut self, given: &Given<'_>, radius_m: f64, shaking_k: f64) {
        let n = self.tan_slope.len();
        for column in [&mut self.fails_today, &mut self.fails_later, &mut self.stands, &mut self.moves] {
            column.resize(n, 0.0);
        }
        let today = [&self.tan_slope, &self.tan_slope, &self.setback_m, &self.height_m, &self.seat_m];
        let later = [&self.tan_slope, &self.tan_shaken, &self.setback_later_m, &self.height_m, &self.seat_later_m];
        let friction = given.tan_friction;
        fails(today.map(|c| &c[..]), friction, given.none, radius_m, 0.0, &mut self.fails_today);
        fails(later.map(|c| &c[..]), friction, given.uplift_share, radius_m, shaking_k, &mut self.fails_later);
        let seasons = [&self.fails_today[..], &self.fails_later, given.held, given.support_stays];
        weigh(seasons, &mut self.stands, &mut self.moves);
    }

    /// The stance of a draw after the changes.
    fn later(&self, i: usize, given: &Given<'_>, radius_m: f64) -> Stance {
        Stance {
            tan_slope: self.tan_slope[i],
            tan_friction: given.tan_friction[i],
            setback_m: self.setback_later_m[i],
            centroid_height_m: self.height_m[i],
            radius_m,
            seat_m: self.seat_later_m[i],
        }
    }
}

/// From failing today and later, being held and staying held, 1 or 0 each, to standing today and to moving later.
#[inline(never)]
fn weigh(given: [&[f64]; 4], stands: &mut [f64], moves: &mut [f64]) {
    let n = stands.len();
    let moves = &mut moves[..n];
    let [fails_today, fails_later, held, support_stays] = given.map(|column| &column[..n]);
    for i in 0..n {
        stands[i] = 1.0 - fails_today[i] * (1.0 - held[i]);
        moves[i] = stands[i] * (1.0 - support_stays[i]) * fails_later[i];
    }
}

/// 1 for each draw with a factor of safety under 1, else 0. `stance` is slope (tan), the same under shaking, setback, height
/// and seat. Out of line, with its columns as arguments: so the compiler knows that they do not overlap, and uses vector
/// registers.
#[inline(never)]
fn fails(
    stance: [&[f64]; 5],
    tan_friction: &[f64],
    uplift_share: &[f64],
    radius_m: f64,
    shaking_k: f64,
    fails: &mut [f64],
) {
    let n = fails.len();
    let [tan_slope, tan_shaken, setback_m, height_m, seat_m] = stance.map(|column| &column[..n]);
    let (tan_friction, uplift_share) = (&tan_friction[..n], &uplift_share[..n]);
    for i in 0..n {
        let stance = Stance {
            tan_slope: tan_slope[i],
            tan_friction: tan_friction[i],
            setback_m: setback_m[i],
            centroid_height_m: height_m[i],
            radius_m,
            seat_m: seat_m[i],
        };
        let demand = Demand { shaking_k, uplift_share: uplift_share[i] };
        fails[i] = if stance.fails_under(tan_shaken[i], demand) { 1.0 } else { 0.0 };
    }
}

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
    let (rel_sd, shaking_k) = (settings.geometry_rel_sd, settings.shaking_k);
    let seat_sd_m = record.seat_depth_m.map_or(0.0, |t| settings.seat_sd_m.max(settings.seat_rel_sd * t));
    let (friction_tan, seat_loss) = (points.friction_tan(record.contact), points.seat_loss(record.contact));
    let (held, support_stays) = points.support(record.support);
    let per_thermal = points.per_thermal();
    let draws_at_once = (BLOCK / per_thermal).max(1);

    let mut bins = [BinTally::default(); FIRE_BINS];
    let (mut by_mode, mut by_cause) = ([0; 3], [0; 5]);
    let mut block = Block::default();
    for (number, draws) in draws.chunks(draws_at_once).enumerate() {
        let start = number * draws_at_once * per_thermal;
        let of = start..start + draws.len() * per_thermal;
        fill(&mut block.tan_slope, &slope_error[of.clone()], |error| {
            let below = 1.0 - tan_reading * error;
            let tan = (tan_reading + error) / below;
            if below > 0.0 { tan } else { f64::INFINITY }
        });
        match shaking_k > 0.0 {
            true => fill(&mut block.tan_shaken, &block.tan_slope, |tan| tan_with_shaking(tan, shaking_k)),
            false => block.tan_shaken.clone_from(&block.tan_slope),
        }
        match record.centroid_setback_m {
            Some(x) => fill(&mut block.setback_m, &points.setback_z[of.clone()], |z| x * (1.0 + rel_sd * z)),
            None => fill(&mut block.setback_m, &points.setback_u[of.clone()], |u| half_others_m * (0.4 + 0.5 * u)),
        }
        match record.centroid_height_m {
            Some(h) => fill(&mut block.height_m, &points.height_z[of.clone()], |z| (h * (1.0 + rel_sd * z)).max(0.0)),
            None => fill(&mut block.height_m, &points.height_u[of.clone()], |u| half_short_m * (0.8 + 0.3 * u)),
        }
        match record.seat_depth_m {
            Some(t) if t <= 0.0 => fill(&mut block.seat_m, &points.seat_u[of.clone()], |_| 0.0),
            Some(t) => fill(&mut block.seat_m, &points.seat_z[of.clone()], |z| (t + seat_sd_m * z).max(0.0)),
            None => fill(&mut block.seat_m, &points.seat_u[of.clone()], |u| 0.3 * radius_m * u),
        }
        block.setback_later_m.clear();
        let heated = points.base_heated_u[of.clone()].chunks(per_thermal);
        for (draw, (setback_m, heated)) in draws.iter().zip(block.setback_m.chunks(per_thermal).zip(heated)) {
            let later = setback_m.iter().zip(heated);
            let (share, retreat_m) = (draw.heated_fraction, draw.base_retreat_m);
            match record.base_scar_m {
                Some(scar_m) => block.setback_later_m.extend(later.map(|(x, _)| x - scar_m)),
                None => block.setback_later_m.extend(later.map(|(x, u)| x - if *u < share { retreat_m } else { 0.0 })),
            }
        }
        block.seat_later_m.clear();
        block.seat_later_m.extend(block.seat_m.iter().zip(&seat_loss[of.clone()]).map(|(t, loss)| t - loss * t));
        let given = Given {
            tan_friction: &friction_tan[of.clone()],
            uplift_share: &points.uplift_share[of.clone()],
            held: &held[of.clone()],
            support_stays: &support_stays[of.clone()],
            none: points.none(of.len()),
        };
        block.judge(&given, radius_m, shaking_k);
        for (d, draw) in draws.iter().enumerate() {
            let here = d * per_thermal..(d + 1) * per_thermal;
            let from = start + here.start..start + here.end;
            let (stands, moves) = (&block.stands[here.clone()], &block.moves[here]);
            let (bin, wet) = (&mut bins[severity_bin(draw)], &points.wet[from.clone()]);
            bin.count(stands, moves, wet);
            if draw.slab_or_split {
                bin.loosen(stands, moves, wet, &points.boulder_face_share[from]);
            }
        }
        for i in (0..block.moves.len()).filter(|i| block.moves[*i] > 0.0) {
            let later = block.later(i, &given, radius_m);
            let last = Demand { shaking_k, uplift_share: given.uplift_share[i] };
            let unscarred = Stance { setback_m: block.setback_m[i], ..later };
            let cause = if given.held[i] > 0.0 && block.fails_today[i] > 0.0 {
                Cause::SupportLoss
            } else if unscarred.fails(Demand::default()) {
                Cause::SeatLoss
            } else if later.fails(Demand::default()) {
                Cause::BaseRetreat
            } else if later.fails(Demand { shaking_k: 0.0, ..last }) {
                Cause::WetSpell
            } else {
                Cause::Shaking
            };
            by_mode[later.weakest(last) as usize] += 1;
            by_cause[cause as usize] += 1;
        }
    }
    Tally { by_mode, by_cause, ..Tally::of(&bins) }
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
    let kept = tally.kept;
    let p_source = tally.either() / kept;
    let p_release = tally.released / kept;
    let (low, high) = wilson_95(p_source, kept / points.per_thermal() as f64);
    let mut mode_share = [0.0; 4];
    let either = tally.either();
    if either > 0.0 {
        for mode in [Mode::Slide, Mode::Overturn, Mode::Roll] {
            mode_share[mode as usize] = tally.by_mode[mode as usize] as f64 / either;
        }
        mode_share[Mode::Fragment as usize] = tally.fragment_alone / either;
    }
    let mut cause_share = [0.0; 5];
    if tally.released > 0.0 {
        cause_share = tally.by_cause.map(|n| n as f64 / tally.released);
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
const STRATUM_DRAWS_MIN: f64 = 16.0;

fn strata_of(tally: &Tally, p_source: f64, wet_probability: f64) -> TriggerStrata {
    let half = |wet: usize| {
        let kept: f64 = (0..FIRE_BINS).map(|b| tally.stratum_kept[2 * b + wet]).sum();
        let either: f64 = (0..FIRE_BINS).map(|b| tally.stratum_either[2 * b + wet]).sum();
        if kept < STRATUM_DRAWS_MIN { p_source } else { either / kept }
    };
    let halves = [half(0), half(1)];
    let mut strata = TriggerStrata { p: [0.0; STRATA] };
    for (s, p) in strata.p.iter_mut().enumerate() {
        *p = match tally.stratum_kept[s] {
            n if n < STRATUM_DRAWS_MIN => halves[s % 2],
            n => tally.stratum_either[s] / n,
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
    let n = values.len();
    let (below, middle, _) = values.select_nth_unstable_by(n / 2, f64::total_cmp);
    let middle = *middle;
    let lower = if n % 2 == 1 { middle } else { below.iter().copied().max_by(f64::total_cmp).unwrap_or(middle) };
    Some(0.5 * (lower + middle))
}
