//! One boulder, from its record to its numbers. Pure: the only place where fire, heat, stress, spall and rockfall meet.
//!
//! [`Model`] holds what is the same for every boulder of a run; [`Model::assess`] takes one boulder and the burns that
//! cover it. A boulder's numbers depend on its own record, those burns, the settings and the seed, and on nothing else.

pub mod bands;
pub mod batch;
pub mod cases;
pub mod cover;
pub mod draws;
pub mod fires;
pub mod probe;
pub mod sensitivity;
pub mod slope;
pub mod standing;
pub mod summary;
pub mod tables;

use std::collections::BTreeSet;

use crate::ensemble::points::PointSet;
use crate::flag::Flag;
use crate::numerics::lanes::LANES;
use crate::rock::catalogue::Catalogue;
use crate::rockfall::points::StaticPoints;
use crate::settings::Settings;
use crate::site::{Boulder, Burn, Kind, Moisture, RockChoice};
use crate::stress::sphere::{CAP_FACTOR_SHARE, CAP_FACTOR_SKIN};
use batch::Resolution;
use draws::{Body, Draw, Sampler};
use fires::Fire;
use summary::DrawSummary;
use tables::Tables;

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

/// What is the same for every boulder of a run.
#[derive(Debug, Clone)]
pub struct Model {
    /// The run's settings.
    pub settings: Settings,
    /// The catalogue, the user's rocks included.
    pub catalogue: Catalogue,
    /// The run's points.
    pub points: PointSet,
    /// Rocks and classes at those points.
    pub tables: Tables,
    mixture: Vec<(usize, f64)>,
    resolution: Resolution,
    static_points: StaticPoints,
    fire_coordinates: Vec<f64>,
}

/// A mixture that names a rock which the catalogue does not have.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("the mixture for unknown rock names {0:?}, which is not in the catalogue; run `spallcast rocks` for its names")]
pub struct UnknownMixtureRock(pub String);

impl Model {
    /// Samples everything that boulders share.
    ///
    /// # Errors
    /// When the mixture for unknown rock names a rock that the catalogue does not have.
    pub fn new(settings: Settings, catalogue: Catalogue) -> Result<Model, UnknownMixtureRock> {
        let points = PointSet::new(settings.draws, settings.seed);
        let tables = Tables::new(&catalogue, &points);
        let mixture = settings
            .unknown_rock
            .iter()
            .map(|(key, share)| {
                tables.rock_index(key).map(|i| (i, *share)).ok_or_else(|| UnknownMixtureRock(key.clone()))
            })
            .collect::<Result<_, _>>()?;
        Ok(Model {
            static_points: StaticPoints::new(points.draws(), settings.seed, &settings.rockfall),
            fire_coordinates: slope::fire_coordinates(&points),
            settings,
            catalogue,
            points,
            tables,
            mixture,
            resolution: Resolution::RUN,
        })
    }

    /// Rocks and shares of a record.
    pub fn rocks_of(&self, choice: &RockChoice) -> Vec<(usize, f64)> {
        match choice {
            RockChoice::Named(key) => self.tables.rock_index(key).map(|i| vec![(i, 1.0)]).unwrap_or_default(),
            RockChoice::Mixture => self.mixture.clone(),
        }
    }

    /// One boulder under the burns that cover it.
    pub fn assess(&self, boulder: &Boulder, burns: &[&Burn]) -> Assessment {
        self.assess_with_draws(boulder, burns).0
    }

    /// The same, with what every draw did; no draws when it was not assessed.
    pub fn assess_with_draws(&self, boulder: &Boulder, burns: &[&Burn]) -> (Assessment, Vec<DrawSummary>) {
        let mut flags = BTreeSet::new();
        let fires = match fires::fires_at(boulder, burns, &mut flags) {
            Ok(fires) => fires,
            Err(reason) => return (Assessment { flags, ..Assessment::not_assessed(reason) }, Vec::new()),
        };
        let rocks = self.rocks_of(&boulder.rock);
        if rocks.is_empty() {
            let reason = format!("rock {:?} is not in the catalogue", boulder.rock);
            return (Assessment { flags, ..Assessment::not_assessed(reason) }, Vec::new());
        }
        let body = Body::of(boulder);
        self.note_defaults(boulder, &mut flags);
        let mut summaries = vec![DrawSummary::default(); self.points.draws()];
        for fire in &fires {
            self.run_fire(boulder, &body, fire, &rocks, &mut summaries, &mut flags);
        }
        let main = &fires[0];
        let heat = summary::heat(&summaries);
        let spall = summary::spall(&summaries, &self.points, body.rind_m.is_some());
        let reason = reason(boulder, &fires, &heat, &spall);
        let assessment = Assessment {
            status: Status::Assessed,
            reason,
            burn_id: main.burn_id.clone(),
            exposure_used: Some(main.exposure_word()),
            exposure_inferred: Some(main.inferred),
            heat: Some(heat),
            spall: Some(spall),
            flags,
        };
        (assessment, summaries)
    }

    fn note_defaults(&self, boulder: &Boulder, flags: &mut BTreeSet<Flag>) {
        let heating = &boulder.heating;
        let mut note = |condition: bool, flag: Flag| {
            if condition {
                flags.insert(flag);
            }
        };
        note(boulder.rock == RockChoice::Mixture, Flag::RockUnknown);
        note(heating.weathering.is_none(), Flag::WeatheringAssumed);
        note(heating.heated_fraction.is_none(), Flag::HeatedShareAssumed);
        note(heating.moisture.is_none(), Flag::MoistureAssumed);
        note(heating.moisture == Some(Moisture::Wet), Flag::VapourConsidered);
        note(boulder.kind == Kind::Outcrop && boulder.radius_m.is_none(), Flag::SizeAssumed);
    }

    /// Runs the draws of one fire and adds them to `summaries`.
    fn run_fire(
        &self,
        boulder: &Boulder,
        body: &Body,
        fire: &Fire,
        rocks: &[(usize, f64)],
        summaries: &mut [DrawSummary],
        flags: &mut BTreeSet<Flag>,
    ) {
        self.each_group(boulder, body, fire, rocks, |rock, draws, numbers| {
            let result = batch::run(draws, body, &self.tables.rocks[rock], &self.settings.spall, &self.resolution);
            for (l, j) in numbers.iter().enumerate() {
                let (draw, outcome) = (&draws[l], &result.outcomes[l]);
                summaries[*j].add(draw, outcome);
                note_draw(fire, draw, outcome, result.sphere[l], flags);
            }
        });
    }

    /// Shows the draws of a boulder in a fire, eight of one rock at a time, to `see`: the rock's index, the draws, and their
    /// numbers. A short last group repeats its first draw to fill the lanes.
    pub fn each_group(
        &self,
        boulder: &Boulder,
        body: &Body,
        fire: &Fire,
        rocks: &[(usize, f64)],
        mut see: impl FnMut(usize, &[Draw; LANES], &[usize]),
    ) {
        let sampler = Sampler {
            points: &self.points,
            tables: &self.tables,
            rocks,
            flame_front_width_m: self.settings.spall.flame_front_width_m,
        };
        let drawn: Vec<Draw> = (0..self.points.draws()).map(|j| sampler.draw(j, boulder, body, fire)).collect();
        for (rock, _) in rocks {
            let members: Vec<usize> = (0..drawn.len()).filter(|j| drawn[*j].rock == *rock).collect();
            for group in members.chunks(LANES) {
                see(*rock, &std::array::from_fn(|l| drawn[*group.get(l).unwrap_or(&group[0])]), group);
            }
        }
    }
}

fn note_draw(
    fire: &Fire,
    draw: &Draw,
    outcome: &crate::spall::outcome::Outcome,
    sphere: bool,
    flags: &mut BTreeSet<Flag>,
) {
    let mut note = |condition: bool, flag: Flag| {
        if condition {
            flags.insert(flag);
        }
    };
    note(sphere, Flag::ConductionSphere);
    note(outcome.fuel_spent, Flag::EnergyCapped);
    note(draw.residence_s > draw.flaming_s, Flag::ResidualStage);
    if let Some(standoff) = fire.standoff_m {
        note(true, Flag::StandoffUsed);
        let reach = crate::fire::flame::STANDOFF_FLAME_LENGTHS * fire.flame_length_or_default_m();
        note(standoff > reach, Flag::BeyondFlames);
    }
    let skin = outcome.skin_over_radius;
    let outside = skin > 0.0 && (!CAP_FACTOR_SKIN.contains(&skin) || !CAP_FACTOR_SHARE.contains(&draw.heated_share));
    note(outside, Flag::ConvexFactorOutside);
}

/// Shares of draws below which a likelihood is called small, and above which it is called large, in the reason.
const SMALL: f64 = 0.1;
const LARGE: f64 = 0.6;

/// The main reason for the numbers, in one or two sentences.
fn reason(boulder: &Boulder, fires: &[Fire], heat: &HeatSummary, spall: &SpallSummary) -> String {
    let rock = match &boulder.rock {
        RockChoice::Named(name) => name.as_str(),
        RockChoice::Mixture => "unrecorded rock",
    };
    let told = |fire: &Fire| {
        let exposure = fire.exposure_word().replace('_', " ").replace('+', " or ");
        let minutes = fire.median_residence_s() / crate::units::SECONDS_PER_MINUTE;
        let fire_word = if fire.classes[0].is_contact() { "" } else { " fire" };
        format!("{exposure}{fire_word} of {minutes:.1} min")
    };
    let history = fires.iter().map(told).collect::<Vec<_>>().join(", then ");
    let peak = crate::units::celsius(heat.peak_surface_k.p50);
    let dose = heat.absorbed_j_m2_p50 / crate::units::J_PER_MJ;
    let spalled = if spall.p_spall < SMALL {
        "too little for most draws to spall".to_owned()
    } else {
        let families = [("flakes", spall.p_flake), ("slabs", spall.p_slab), ("splits", spall.p_split)];
        let mut led: Vec<_> = families.into_iter().chain(spall.p_rind.map(|p| ("the rind", p))).collect();
        led.sort_by(|a, b| b.1.total_cmp(&a.1));
        let weight = if spall.p_spall >= LARGE { "most draws" } else { "some draws" };
        let thickness = spall.thickness_m.unwrap_or(0.0) * crate::units::MM_PER_M;
        format!("{weight} spall, led by {}, about {thickness:.1} mm where they do", led[0].0)
    };
    format!("{rock} in {history}: face to about {peak:.0} C, {dose:.1} MJ/m2 absorbed, {spalled}")
}
