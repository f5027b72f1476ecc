//! What a probe says about a boulder of an inventory as a rockfall source: its standing, its reach along the trails, and
//! what would change the answer; as parts of the probe's JSON document and as sections of its text.

use serde::Serialize;

use crate::assess::sensitivity::{HELD_AT, Influence, Sensitivity, TOLD};
use crate::assess::standing::{Factors, Statics, Stretch};
use crate::flag::Flag;
use crate::rockfall::place::Placed;
use crate::rockfall::reach::{EnergyLine, SHADOW_ANGLE_DEG};
use crate::rockfall::source::{Cause, SourceOutcome, SourceSummary};
use crate::rockfall::statics::Mode;
use crate::units::MM_PER_M;

/// Joules in a kilojoule.
const J_PER_KJ: f64 = 1e3;
/// Stretches that the text lists; JSON lists all.
const LISTED: usize = 12;

/// Everything of a boulder's standing that a probe found.
#[derive(Debug, Clone)]
pub struct Standing {
    /// Its place.
    pub placed: Placed,
    /// As a source.
    pub source: SourceSummary,
    /// Factors of safety, where slope and size are known and it is no outcrop.
    pub statics: Option<Statics>,
    /// Stretches in reach; `None` without trails.
    pub stretches: Option<Vec<Stretch>>,
    /// Whether rays followed the ground.
    pub with_terrain: bool,
    /// What would change the answer.
    pub sensitivity: Option<Sensitivity>,
}

#[derive(Serialize)]
struct FactorsDoc {
    slide: Option<f64>,
    overturn: Option<f64>,
    roll: Option<f64>,
    undercut_left_m: Option<f64>,
}

#[derive(Serialize)]
struct FactorsOfSafety {
    today: FactorsDoc,
    after_changes: FactorsDoc,
    base_retreat_mm: f64,
}

#[derive(Serialize)]
struct ModeShare {
    slide: f64,
    overturn: f64,
    roll: f64,
    fragment: f64,
}

#[derive(Serialize)]
struct CauseShare {
    support_loss: f64,
    seat_loss: f64,
    base_retreat: f64,
    wet_spell: f64,
    shaking: f64,
}

/// The `source` member of a probe's document.
#[derive(Serialize)]
pub(super) struct SourceDoc {
    basis: &'static str,
    outcome: &'static str,
    why: String,
    horizon_days: f64,
    p_source: Option<f64>,
    p_source_low: Option<f64>,
    p_source_high: Option<f64>,
    p_release: Option<f64>,
    p_fragment: Option<f64>,
    kept_share: Option<f64>,
    source_mode: Option<&'static str>,
    mode_share: Option<ModeShare>,
    cause_share: Option<CauseShare>,
    fragment_m3_p50: Option<f64>,
    slope_deg: Option<f64>,
    downslope_azimuth_deg: Option<f64>,
    elevation_m: Option<f64>,
    factor_of_safety: Option<FactorsOfSafety>,
    flags: Vec<&'static str>,
}

#[derive(Serialize)]
struct EnergyDoc {
    angle_deg: f64,
    speed_m_s: Option<f64>,
    energy_kj: Option<f64>,
}

/// One entry of the `reach` member.
#[derive(Serialize)]
pub(super) struct ReachDoc {
    trail_id: String,
    segment: usize,
    from_m: f64,
    to_m: f64,
    nearest_m: f64,
    judged: bool,
    p_segment: Option<f64>,
    angle_deg: Option<f64>,
    distance_m: Option<f64>,
    drop_m: Option<f64>,
    at_mean_angle: Option<EnergyDoc>,
    at_shadow_angle: Option<EnergyDoc>,
    shielded: Option<bool>,
    terrain_gap: Option<bool>,
    terrain_checked: bool,
}

#[derive(Serialize)]
struct HeldDoc {
    percentile: u32,
    value: Option<f64>,
    answer: Option<f64>,
}

/// One entry of the `sensitivity` member.
#[derive(Serialize)]
pub(super) struct InfluenceDoc {
    input: &'static str,
    unit: &'static str,
    answer_column: &'static str,
    answer: f64,
    held: Vec<HeldDoc>,
    effect: f64,
}

/// The three members of the document; null where nothing was computed.
#[derive(Serialize, Default)]
pub(super) struct StandingDoc {
    source: Option<SourceDoc>,
    reach: Option<Vec<ReachDoc>>,
    sensitivity: Option<Vec<InfluenceDoc>>,
}

/// A factor of safety on level ground is infinite; JSON has no word for it.
fn finite(x: Option<f64>) -> Option<f64> {
    x.filter(|x| x.is_finite())
}

fn factors(f: &Factors) -> FactorsDoc {
    FactorsDoc {
        slide: finite(f.slide),
        overturn: finite(f.overturn),
        roll: finite(f.roll),
        undercut_left_m: finite(f.undercut_left_m),
    }
}

fn source_doc(standing: &Standing) -> SourceDoc {
    let (s, placed) = (&standing.source, &standing.placed);
    let computed = s.p_source.is_some();
    let mut flags = s.flags.clone();
    flags.extend(placed.flags.iter().copied());
    SourceDoc {
        basis: s.basis.word(),
        outcome: match s.outcome {
            SourceOutcome::Assessed => "assessed",
            SourceOutcome::CheckMeasurements { .. } => "check_measurements",
            SourceOutcome::NotRecorded { .. } => "not_recorded",
        },
        why: s.sentence(),
        horizon_days: s.horizon_days,
        p_source: s.p_source,
        p_source_low: s.p_source_low,
        p_source_high: s.p_source_high,
        p_release: s.p_release,
        p_fragment: s.p_fragment,
        kept_share: s.kept_share,
        source_mode: s.main_mode().map(Mode::word),
        mode_share: computed.then(|| ModeShare {
            slide: s.mode_share[Mode::Slide as usize],
            overturn: s.mode_share[Mode::Overturn as usize],
            roll: s.mode_share[Mode::Roll as usize],
            fragment: s.mode_share[Mode::Fragment as usize],
        }),
        cause_share: computed.then(|| CauseShare {
            support_loss: s.cause_share[Cause::SupportLoss as usize],
            seat_loss: s.cause_share[Cause::SeatLoss as usize],
            base_retreat: s.cause_share[Cause::BaseRetreat as usize],
            wet_spell: s.cause_share[Cause::WetSpell as usize],
            shaking: s.cause_share[Cause::Shaking as usize],
        }),
        fragment_m3_p50: s.fragment_m3_p50,
        slope_deg: standing.statics.map(|s| s.slope_deg),
        downslope_azimuth_deg: placed.bearing_deg,
        elevation_m: placed.height_m,
        factor_of_safety: standing.statics.map(|s| FactorsOfSafety {
            today: factors(&s.today),
            after_changes: factors(&s.after),
            base_retreat_mm: s.base_retreat_m * MM_PER_M,
        }),
        flags: flags.into_iter().map(Flag::code).collect(),
    }
}

fn energy(angle_deg: f64, line: Option<EnergyLine>) -> EnergyDoc {
    EnergyDoc {
        angle_deg,
        speed_m_s: line.map(|l| l.speed_m_s),
        energy_kj: finite(line.map(|l| l.energy_j / J_PER_KJ)),
    }
}

fn reach_doc(stretch: &Stretch, with_terrain: bool) -> ReachDoc {
    let r = stretch.reach;
    let met = r.filter(|r| r.angle_deg.is_some());
    ReachDoc {
        trail_id: stretch.trail_id.clone(),
        segment: stretch.segment,
        from_m: stretch.from_m,
        to_m: stretch.to_m,
        nearest_m: stretch.nearest_m,
        judged: r.is_some(),
        p_segment: r.map(|r| r.p_segment),
        angle_deg: r.and_then(|r| r.angle_deg),
        distance_m: met.map(|r| r.distance_m),
        drop_m: met.map(|r| r.drop_m),
        at_mean_angle: met.map(|r| energy(r.mean_angle_deg, r.at_mean)),
        at_shadow_angle: met.map(|r| energy(SHADOW_ANGLE_DEG, r.at_shadow)),
        shielded: r.map(|r| r.shielded),
        terrain_gap: r.map(|r| r.terrain_gap),
        terrain_checked: with_terrain,
    }
}

fn influence_doc(sensitivity: &Sensitivity, influence: &Influence) -> InfluenceDoc {
    let held = HELD_AT.iter().enumerate().map(|(i, u)| HeldDoc {
        percentile: (100.0 * u).round() as u32,
        value: influence.held.map(|h| h[i]),
        answer: influence.answer[i],
    });
    InfluenceDoc {
        input: influence.input,
        unit: influence.unit,
        answer_column: sensitivity.answer.column(),
        answer: sensitivity.value,
        held: held.collect(),
        effect: influence.effect,
    }
}

/// The document's members for a boulder of an inventory; nulls for a described rock.
pub(super) fn document(standing: Option<&Standing>) -> StandingDoc {
    let Some(standing) = standing else { return StandingDoc::default() };
    StandingDoc {
        source: Some(source_doc(standing)),
        reach: standing
            .stretches
            .as_ref()
            .map(|list| list.iter().map(|s| reach_doc(s, standing.with_terrain)).collect()),
        sensitivity: standing.sensitivity.as_ref().map(|s| s.told().map(|i| influence_doc(s, i)).collect()),
    }
}

fn factor(x: Option<f64>) -> String {
    match x {
        None => "not possible".to_owned(),
        Some(x) if x.is_infinite() => "no drive".to_owned(),
        Some(x) => format!("{x:.2}"),
    }
}

/// The sections of the text.
pub(super) fn text(standing: &Standing) -> String {
    let s = &standing.source;
    let mut out = format!("\nas a rockfall source, within {:.0} days\n  {}\n", s.horizon_days, s.sentence());
    if let (Some(p), Some(low), Some(high)) = (s.p_source, s.p_source_low, s.p_source_high) {
        let share = |x: Option<f64>| x.map_or_else(|| "not computed".to_owned(), |x| format!("{x:.3}"));
        out.push_str(&format!(
            "  likelihood {p:.3} (95 % interval {low:.3} to {high:.3}), {}: whole boulder {}, loose part {}; {} of the draws \
             stand today\n",
            s.basis.word(),
            share(s.p_release),
            share(s.p_fragment),
            share(s.kept_share),
        ));
        let shares = |words: Vec<(&'static str, f64)>| {
            let list: Vec<String> =
                words.into_iter().filter(|w| w.1 > 0.0).map(|(w, x)| format!("{w} {x:.2}")).collect();
            if list.is_empty() { "none".to_owned() } else { list.join(", ") }
        };
        let modes = Mode::ALL.iter().map(|m| (m.word(), s.mode_share[*m as usize])).collect();
        let causes = Cause::ALL.iter().map(|c| (c.word(), s.cause_share[*c as usize])).collect();
        out.push_str(&format!("  by mode: {}\n  by cause: {}\n", shares(modes), shares(causes)));
    }
    if let Some(statics) = &standing.statics {
        let row = |name: &str, f: &Factors| {
            format!(
                "  {name:<14}slide {}, overturn {}, roll {}; undercut left {}\n",
                factor(f.slide),
                factor(f.overturn),
                factor(f.roll),
                f.undercut_left_m.map_or_else(|| "not known".to_owned(), |u| format!("{u:.2} m")),
            )
        };
        out.push_str(&format!("  factors of safety at the middle of the inputs, slope {:.0} deg\n", statics.slope_deg));
        out.push_str(&row("today", &statics.today));
        out.push_str(&row("after changes", &statics.after));
        let today = &statics.today;
        if [today.slide, today.overturn, today.roll].into_iter().flatten().any(|f| f < 1.0) {
            out.push_str(
                "  below 1 today although it stands: a support is not counted here, and without one the draws that would \
                 not stand were rejected\n",
            );
        }
    }
    if let Some(stretches) = &standing.stretches {
        out.push_str(&reach_text(stretches, standing.with_terrain));
    }
    if let Some(sensitivity) = &standing.sensitivity {
        out.push_str(&sensitivity_text(sensitivity));
    }
    out
}

fn reach_text(stretches: &[Stretch], with_terrain: bool) -> String {
    let mut out = String::from("\nstretches of trail in reach\n");
    if !with_terrain {
        out.push_str("  judged along straight lines; ridges and valleys between were not checked\n");
    }
    if stretches.is_empty() {
        out.push_str("  none\n");
        return out;
    }
    let mut order: Vec<&Stretch> = stretches.iter().collect();
    let share = |s: &Stretch| s.reach.map_or(f64::INFINITY, |r| r.p_segment);
    order.sort_by(|a, b| share(b).total_cmp(&share(a)));
    for stretch in order.iter().take(LISTED) {
        let place = format!("  {} {:.0} to {:.0} m: ", stretch.trail_id, stretch.from_m, stretch.to_m);
        out.push_str(&place);
        match stretch.reach {
            None => out.push_str(&format!(
                "{:.0} m away; a height is missing, so its reach cannot be judged\n",
                stretch.nearest_m
            )),
            Some(r) => {
                let line = |l: Option<EnergyLine>| {
                    l.map_or_else(
                        || "stops short".to_owned(),
                        |l| format!("{:.0} m/s, {:.0} kJ", l.speed_m_s, l.energy_j / J_PER_KJ),
                    )
                };
                out.push_str(&format!(
                    "reached by a share of {:.4}; angle {}, {:.0} m out, {:.0} m down; at {:.1} deg {}, at {:.1} deg {}{}\n",
                    r.p_segment,
                    r.angle_deg.map_or_else(|| "none".to_owned(), |a| format!("{a:.1} deg")),
                    r.distance_m,
                    r.drop_m,
                    r.mean_angle_deg,
                    line(r.at_mean),
                    SHADOW_ANGLE_DEG,
                    line(r.at_shadow),
                    if r.shielded { "; rising ground keeps it away" } else { "" },
                ));
            }
        }
    }
    if order.len() > LISTED {
        out.push_str(&format!("  and {} more; --json lists all\n", order.len() - LISTED));
    }
    out
}

fn sensitivity_text(sensitivity: &Sensitivity) -> String {
    let mut out = format!(
        "\nwhat would change the answer ({} {:.3}): the {TOLD} inputs with the largest effect, each held at its 10th and 90th \
         percentile\n",
        sensitivity.answer.column(),
        sensitivity.value
    );
    let mut any = false;
    for i in sensitivity.told() {
        any = true;
        let answer = |x: Option<f64>| x.map_or_else(|| "too few draws stand".to_owned(), |x| format!("{x:.3}"));
        let held = i.held.map_or_else(String::new, |[a, b]| format!(" ({a:.2} and {b:.2} {})", i.unit));
        out.push_str(&format!("  {}{held}: {} and {}\n", i.input, answer(i.answer[0]), answer(i.answer[1])));
    }
    if !any {
        out.push_str("  none of them changes it\n");
    }
    out
}
