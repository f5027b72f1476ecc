//! The static half of the ensemble: one point set per run, the same for every boulder.
//!
//! u(dimension, index), an Owen-scrambled Sobol sequence (Burley 2020, by `sobol_burley`), turned once per run into
//! what the statics needs, as arrays of one value per static draw: tangents, normal scores, uplift shares. Two boulders
//! with equal records get equal numbers, whatever their place in the file.
//!
//! Each thermal draw d is paired with m consecutive static draws d m .. d m + m, so that a cool boulder is integrated
//! over about [`STATIC_DRAWS`] points however few thermal draws there are. Dimensions have their own seed, apart from
//! the thermal set; within the m points that share a thermal draw each dimension is stratified, so no static dimension
//! is tied to a thermal one.
//!
//! Valid for any number of draws: past 65,536 points the sequence starts again under another seed.

use super::friction::{UNKNOWN_CONTACT, UNKNOWN_SUPPORT, contact_index, pick, support_index};
use crate::ensemble::distribution::normal_score;
use crate::settings::RockfallSettings;
use crate::site::{Contact, Support};

/// Static draws aimed at; a multiple of the thermal draws.
pub const STATIC_DRAWS: usize = 8192;
/// Points of one sequence of `sobol_burley`.
const SEQUENCE_POINTS: usize = 1 << 16;
/// Keeps this set's scrambles apart from those of the thermal set; an arbitrary constant.
const SEED_MARK: u32 = 0x51A7_1C5E;
/// Where what is guessed for an unrecorded support stands, after the supports.
const NOT_RECORDED: usize = 5;

/// What each coordinate of a static draw stands for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[repr(u32)]
pub enum StaticDim {
    /// Slope about its reading.
    Slope = 0,
    /// Friction of the contact.
    Friction = 1,
    /// Setback of the centroid.
    Setback = 2,
    /// Height of the centroid.
    CentroidHeight = 3,
    /// Seat depth.
    Seat = 4,
    /// Share of the seat lost.
    SeatLoss = 5,
    /// Whether the support goes.
    SupportLoss = 6,
    /// Whether the base lies in the heated face.
    BaseHeated = 7,
    /// Whether a wet spell comes.
    WetSpell = 8,
    /// Uplift in the wet spell.
    Uplift = 9,
    /// Share of faces steeper than the friction of a fresh split.
    FaceShare = 10,
    /// Contact, where none is recorded.
    UnknownContact = 11,
    /// Support, where none is recorded.
    UnknownSupport = 12,
}

impl StaticDim {
    /// Every dimension, in order.
    pub const ALL: [StaticDim; 13] = [
        StaticDim::Slope,
        StaticDim::Friction,
        StaticDim::Setback,
        StaticDim::CentroidHeight,
        StaticDim::Seat,
        StaticDim::SeatLoss,
        StaticDim::SupportLoss,
        StaticDim::BaseHeated,
        StaticDim::WetSpell,
        StaticDim::Uplift,
        StaticDim::FaceShare,
        StaticDim::UnknownContact,
        StaticDim::UnknownSupport,
    ];

    /// What the dimension is, in words for a list of influences.
    pub fn label(self) -> &'static str {
        match self {
            StaticDim::Slope => "slope",
            StaticDim::Friction => "contact friction",
            StaticDim::Setback => "setback of the centroid",
            StaticDim::CentroidHeight => "height of the centroid",
            StaticDim::Seat => "seat depth",
            StaticDim::SeatLoss => "share of the seat lost",
            StaticDim::SupportLoss => "whether the support goes",
            StaticDim::BaseHeated => "whether the base was heated",
            StaticDim::WetSpell => "whether a wet spell comes",
            StaticDim::Uplift => "uplift in a wet spell",
            StaticDim::FaceShare => "share of steep faces",
            StaticDim::UnknownContact => "contact (not recorded)",
            StaticDim::UnknownSupport => "support (not recorded)",
        }
    }
}

/// The static draws of a run, `[n_static]` each, in the order of the draws. Built once, shared by every boulder.
#[derive(Debug, Clone)]
pub struct StaticPoints {
    thermal_draws: usize,
    per_thermal: usize,
    /// tan of the slope's error, for a slope read on the ground.
    pub(crate) slope_error_tan: Vec<f64>,
    /// tan of the slope's error, for a slope taken from the raster.
    pub(crate) raster_slope_error_tan: Vec<f64>,
    /// tan of the friction angle, by contact.
    friction_tan: [Vec<f64>; 5],
    /// Normal scores and shares of the geometry.
    pub(crate) setback_z: Vec<f64>,
    pub(crate) setback_u: Vec<f64>,
    pub(crate) height_z: Vec<f64>,
    pub(crate) height_u: Vec<f64>,
    pub(crate) seat_z: Vec<f64>,
    pub(crate) seat_u: Vec<f64>,
    seat_loss_u: Vec<f64>,
    pub(crate) base_heated_u: Vec<f64>,
    /// 1 in a wet spell, else 0.
    pub(crate) wet: Vec<f64>,
    /// Uplift share in a wet spell; 0 when dry.
    pub(crate) uplift_share: Vec<f64>,
    pub(crate) boulder_face_share: Vec<f64>,
    pub(crate) outcrop_face_share: Vec<f64>,
    /// tan of the friction angle where no contact is recorded.
    unknown_friction_tan: Vec<f64>,
    /// Share of the seat lost where no contact is recorded: none off burnt duff.
    unknown_seat_loss: Vec<f64>,
    zeros: Vec<f64>,
    /// By support, the last where none is recorded: 1 where there is one, 1 where it outlasts the horizon, else 0.
    held: [Vec<f64>; 6],
    support_stays: [Vec<f64>; 6],
}

/// The share in (0, 1) of one coordinate of one draw.
fn share(seed: u64, dim: StaticDim, index: usize) -> f64 {
    let block = (index / SEQUENCE_POINTS) as u32;
    let folded = (seed as u32) ^ ((seed >> 32) as u32).rotate_left(16) ^ SEED_MARK;
    let scramble = folded.wrapping_add(block.wrapping_mul(0x9E37_79B9));
    let u = sobol_burley::sample((index % SEQUENCE_POINTS) as u32, dim as u32, scramble);
    // The sequence yields multiples of 2^-24 from 0; the middle of each step is neither 0 nor 1.
    f64::from(u) + 0.5 / f64::from(1u32 << 24)
}

impl StaticPoints {
    /// The points of a run of `thermal_draws` (1 or more) under `seed`.
    pub fn new(thermal_draws: usize, seed: u64, settings: &RockfallSettings) -> Self {
        let thermal_draws = thermal_draws.max(1);
        let per_thermal = STATIC_DRAWS.div_ceil(thermal_draws).max(1);
        Self::build(thermal_draws, per_thermal, settings, |dim, index| share(seed, dim, index))
    }

    /// The same points with one coordinate held at the share `u` in every draw: what the answer would be if that input
    /// were known to lie there.
    pub fn pinned(&self, dim: StaticDim, u: f64, seed: u64, settings: &RockfallSettings) -> Self {
        Self::build(
            self.thermal_draws,
            self.per_thermal,
            settings,
            |d, index| if d == dim { u } else { share(seed, d, index) },
        )
    }

    fn build(
        thermal_draws: usize,
        per_thermal: usize,
        settings: &RockfallSettings,
        u: impl Fn(StaticDim, usize) -> f64,
    ) -> Self {
        let n = thermal_draws * per_thermal;
        let column = |dim: StaticDim, f: &dyn Fn(f64) -> f64| -> Vec<f64> { (0..n).map(|i| f(u(dim, i))).collect() };
        let slope = |sd_deg: f64| column(StaticDim::Slope, &|s| libm::tan((sd_deg * normal_score(s)).to_radians()));
        let wet = column(StaticDim::WetSpell, &|s| f64::from(u8::from(s < settings.wet_spell_probability)));
        let mut uplift_share = column(StaticDim::Uplift, &|s| settings.uplift_share.quantile(s));
        for (share, wet) in uplift_share.iter_mut().zip(&wet) {
            if *wet == 0.0 {
                *share = 0.0;
            }
        }
        let friction_tan =
            settings.friction_deg.map(|d| column(StaticDim::Friction, &|s| libm::tan(d.quantile(s).to_radians())));
        let seat_loss_u = column(StaticDim::SeatLoss, &|s| s);
        let guess = |weights, dim| -> Vec<usize> { (0..n).map(|i| pick(weights, u(dim, i))).collect() };
        let contacts = guess(&UNKNOWN_CONTACT, StaticDim::UnknownContact);
        let supports = guess(&UNKNOWN_SUPPORT, StaticDim::UnknownSupport);
        let (duff, no_support) = (contact_index(Contact::BurntDuff), support_index(Support::None));
        let support_of = |which: usize, i: usize| if which < NOT_RECORDED { which } else { supports[i] };
        let by_support = |f: &dyn Fn(usize, usize) -> bool| -> [Vec<f64>; 6] {
            std::array::from_fn(|which| (0..n).map(|i| f64::from(u8::from(f(support_of(which, i), i)))).collect())
        };
        StaticPoints {
            thermal_draws,
            per_thermal,
            unknown_friction_tan: (0..n).map(|i| friction_tan[contacts[i]][i]).collect(),
            unknown_seat_loss: (0..n).map(|i| if contacts[i] == duff { seat_loss_u[i] } else { 0.0 }).collect(),
            zeros: vec![0.0; n],
            held: by_support(&|support, _| support != no_support),
            support_stays: by_support(&|support, i| {
                support != no_support && u(StaticDim::SupportLoss, i) >= settings.support_loss[support]
            }),
            friction_tan,
            seat_loss_u,
            slope_error_tan: slope(settings.slope_sd_deg),
            raster_slope_error_tan: slope(settings.raster_slope_sd_deg),
            setback_z: column(StaticDim::Setback, &normal_score),
            setback_u: column(StaticDim::Setback, &|s| s),
            height_z: column(StaticDim::CentroidHeight, &normal_score),
            height_u: column(StaticDim::CentroidHeight, &|s| s),
            seat_z: column(StaticDim::Seat, &normal_score),
            seat_u: column(StaticDim::Seat, &|s| s),
            base_heated_u: column(StaticDim::BaseHeated, &|s| s),
            wet,
            uplift_share,
            boulder_face_share: column(StaticDim::FaceShare, &|s| settings.boulder_face_share.quantile(s)),
            outcrop_face_share: column(StaticDim::FaceShare, &|s| settings.outcrop_face_share.quantile(s)),
        }
    }

    /// tan of the friction angle under a contact, or under what is guessed where none is recorded.
    pub(crate) fn friction_tan(&self, contact: Option<Contact>) -> &[f64] {
        contact.map_or(&self.unknown_friction_tan, |c| &self.friction_tan[contact_index(c)])
    }

    /// Share of the seat lost within the horizon under a contact: none off burnt duff.
    pub(crate) fn seat_loss(&self, contact: Option<Contact>) -> &[f64] {
        match contact {
            None => &self.unknown_seat_loss,
            Some(Contact::BurntDuff) => &self.seat_loss_u,
            Some(_) => &self.zeros,
        }
    }

    /// A column of `n` zeros, no longer than the others.
    pub(crate) fn none(&self, n: usize) -> &[f64] {
        &self.zeros[..n]
    }

    /// 1 where something holds the boulder from below, and 1 where that outlasts the horizon, else 0.
    pub(crate) fn support(&self, support: Option<Support>) -> (&[f64], &[f64]) {
        let which = support.map_or(NOT_RECORDED, support_index);
        (&self.held[which], &self.support_stays[which])
    }

    /// Thermal draws that the points pair with.
    pub fn thermal_draws(&self) -> usize {
        self.thermal_draws
    }

    /// Static draws per thermal draw.
    pub fn per_thermal(&self) -> usize {
        self.per_thermal
    }
}
