//! What would change the answer: each input held at its 10th and 90th percentile in turn, everything else as before.
//!
//! effect = |p(input at 90 %) - p(input at 10 %)|
//!
//! The answer is the source likelihood; where there is none (slope or size not recorded) it is the likelihood of a spall.
//! Inputs of the statics are held in the static points, inputs of the heating in the thermal points, after which the
//! whole ensemble runs again with common points, so that differences are the input's and not the sampling's. An input
//! that is one of two states (a support goes or stays) is held in the state that its 10th and its 90th percentile lie in.
//! When one end leaves too few draws standing there is no likelihood there, and the effect is that of the other end
//! against the answer itself.
//!
//! One input at a time: what two do together is not seen.

use super::Model;
use crate::ensemble::distribution::normal_score;
use crate::ensemble::points::Dimension;
use crate::rockfall::friction::contact_index;
use crate::rockfall::place::Placed;
use crate::rockfall::points::StaticDim;
use crate::rockfall::release::StaticsInputs;
use crate::rockfall::source::SourceBasis;
use crate::site::{Boulder, Burn, Contact, Kind, RockChoice, Support};

/// The percentiles at which inputs are held, as shares.
pub const HELD_AT: [f64; 2] = [0.1, 0.9];
/// How many inputs are told.
pub const TOLD: usize = 3;

/// Which likelihood the inputs are judged by.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Answer {
    /// The source likelihood.
    Source,
    /// The likelihood of a spall, where there is no source likelihood.
    Spall,
}

impl Answer {
    /// The column that holds it.
    pub fn column(self) -> &'static str {
        match self {
            Answer::Source => "p_source",
            Answer::Spall => "p_spall",
        }
    }
}

/// What one input does to the answer.
#[derive(Debug, Clone, PartialEq)]
pub struct Influence {
    /// The input in words.
    pub input: &'static str,
    /// Its value at the 10th and the 90th percentile, in `unit`, where it is a figure.
    pub held: Option<[f64; 2]>,
    /// Unit of `held`; empty for none.
    pub unit: &'static str,
    /// The answer with the input held there; `None` where too few draws stand.
    pub answer: [Option<f64>; 2],
    /// Size of the change.
    pub effect: f64,
}

/// Every influence, the largest first.
#[derive(Debug, Clone, PartialEq)]
pub struct Sensitivity {
    /// Which likelihood.
    pub answer: Answer,
    /// Its value with nothing held.
    pub value: f64,
    /// Inputs, largest effect first, equal effects in a fixed order.
    pub influences: Vec<Influence>,
}

impl Sensitivity {
    /// The inputs that are told: the first few that change anything.
    pub fn told(&self) -> impl Iterator<Item = &Influence> {
        self.influences.iter().filter(|i| i.effect > 0.0).take(TOLD)
    }
}

/// Inputs of the heating that are tried, in words.
const HEATING: [(Dimension, &str); 8] = [
    (Dimension::Residence, "residence time of the fire"),
    (Dimension::Irradiance, "irradiance of the fire"),
    (Dimension::HeatedShare, "heated share of the surface"),
    (Dimension::TensileStrength, "tensile strength of the rock"),
    (Dimension::Diffusivity, "diffusivity of the rock"),
    (Dimension::Expansion, "expansion of the rock"),
    (Dimension::YoungsModulus, "stiffness of the rock"),
    (Dimension::Rock, "rock (not recorded)"),
];

/// Inputs of the statics that matter to this record at all.
fn applies(dim: StaticDim, inputs: &StaticsInputs<'_>) -> bool {
    let s = inputs.standing;
    match dim {
        StaticDim::FaceShare | StaticDim::WetSpell | StaticDim::Uplift => true,
        _ if inputs.kind == Kind::Outcrop => false,
        StaticDim::UnknownContact => s.contact.is_none(),
        StaticDim::UnknownSupport => s.support.is_none(),
        StaticDim::SupportLoss => s.support != Some(Support::None),
        StaticDim::SeatLoss => s.contact == Some(Contact::BurntDuff) && s.seat_depth_m != Some(0.0),
        StaticDim::Seat => s.seat_depth_m != Some(0.0),
        StaticDim::BaseHeated => s.base_scar_m.is_none(),
        StaticDim::Slope | StaticDim::Friction | StaticDim::Setback | StaticDim::CentroidHeight => true,
    }
}

impl Model {
    /// Holds every input in turn. `placed` is the boulder's place; costs two ensembles per input of the heating.
    ///
    /// `None` when the boulder was not assessed, or its recorded geometry contradicts its standing: then the measurements
    /// are the answer.
    pub fn sensitivity(&self, boulder: &Boulder, placed: &Placed, burns: &[&Burn]) -> Option<Sensitivity> {
        let (assessment, draws) = self.assess_with_draws(boulder, burns);
        let spall = assessment.spall?;
        let source = self.source(boulder, placed, &draws);
        let (answer, value) = match (source.p_source, source.basis) {
            (Some(p), _) => (Answer::Source, p),
            (None, SourceBasis::None) => (Answer::Spall, spall.p_spall),
            (None, _) => return None,
        };
        let inputs = StaticsInputs::of(boulder, placed.raster_slope_deg);
        let mut influences = Vec::new();
        if answer == Answer::Source {
            for dim in StaticDim::ALL.into_iter().filter(|d| applies(*d, &inputs)) {
                let at = HELD_AT.map(|u| {
                    let mut held = self.clone();
                    held.static_points = self.static_points.pinned(dim, u, self.settings.seed, &self.settings.rockfall);
                    held.source(boulder, placed, &draws).p_source
                });
                let (figures, unit) = self.figures(dim, &inputs);
                influences.push(influence(dim.label(), figures, unit, at, value));
            }
        }
        for (dimension, label) in HEATING {
            if dimension == Dimension::Rock && boulder.rock != RockChoice::Mixture {
                continue;
            }
            let at = HELD_AT.map(|u| {
                let held = self.pinned(dimension, u);
                let (assessment, draws) = held.assess_with_draws(boulder, burns);
                match answer {
                    Answer::Source => held.source(boulder, placed, &draws).p_source,
                    Answer::Spall => assessment.spall.map(|s| s.p_spall),
                }
            });
            influences.push(influence(label, None, "", at, value));
        }
        // A stable sort: equal effects stay in the order above.
        influences.sort_by(|a, b| b.effect.total_cmp(&a.effect));
        Some(Sensitivity { answer, value, influences })
    }

    /// The model with one coordinate of the thermal points held in every draw.
    pub fn pinned(&self, dimension: Dimension, u: f64) -> Model {
        let points = self.points.pinned(dimension, u);
        Model { tables: super::tables::Tables::new(&self.catalogue, &points), points, ..self.clone() }
    }

    /// The values at which a static input is held, and their unit.
    fn figures(&self, dim: StaticDim, inputs: &StaticsInputs<'_>) -> (Option<[f64; 2]>, &'static str) {
        let (settings, s) = (&self.settings.rockfall, inputs.standing);
        let normal = |centre: f64, sd: f64| HELD_AT.map(|u| centre + sd * normal_score(u));
        match dim {
            StaticDim::Slope => {
                let sd = match s.slope_deg {
                    Some(_) => settings.slope_sd_deg,
                    None => settings.raster_slope_sd_deg,
                };
                (inputs.slope_deg.map(|b| normal(b, sd)), "deg")
            }
            StaticDim::Friction => {
                (s.contact.map(|c| HELD_AT.map(|u| settings.friction_deg[contact_index(c)].quantile(u))), "deg")
            }
            StaticDim::Setback => (s.centroid_setback_m.map(|x| normal(x, settings.geometry_rel_sd * x)), "m"),
            StaticDim::CentroidHeight => (s.centroid_height_m.map(|h| normal(h, settings.geometry_rel_sd * h)), "m"),
            StaticDim::Seat => {
                let sd = |t: f64| settings.seat_sd_m.max(settings.seat_rel_sd * t);
                (s.seat_depth_m.map(|t| normal(t, sd(t)).map(|t| t.max(0.0))), "m")
            }
            StaticDim::SeatLoss => (Some(HELD_AT), "of the seat"),
            StaticDim::Uplift => (Some(HELD_AT.map(|u| settings.uplift_share.quantile(u))), "of the normal weight"),
            StaticDim::FaceShare => {
                let faces = match inputs.kind {
                    Kind::Boulder => settings.boulder_face_share,
                    Kind::Outcrop => settings.outcrop_face_share,
                };
                (Some(HELD_AT.map(|u| faces.quantile(u))), "of the faces")
            }
            StaticDim::SupportLoss
            | StaticDim::BaseHeated
            | StaticDim::WetSpell
            | StaticDim::UnknownContact
            | StaticDim::UnknownSupport => (None, ""),
        }
    }
}

fn influence(
    input: &'static str,
    held: Option<[f64; 2]>,
    unit: &'static str,
    answer: [Option<f64>; 2],
    value: f64,
) -> Influence {
    let effect = match answer {
        [Some(a), Some(b)] => (b - a).abs(),
        [Some(p), None] | [None, Some(p)] => (p - value).abs(),
        [None, None] => 0.0,
    };
    Influence { input, held, unit, answer, effect }
}
