//! One draw of everything: rock, fire, face, strength branches.
//!
//! The same structure serves the ensemble (values at the run's points) and a probe on medians (one draw, chosen branches).

use super::fires::Fire;
use super::tables::Tables;
use crate::ensemble::distribution::{Distribution, normal_score};
use crate::ensemble::points::{Dimension, PointSet, pick};
use crate::fire::exposure::{ExposureClass, default_patch_radius_m};
use crate::fire::{flame, pulse::Pulse};
use crate::rock::Property;
use crate::site::{Boulder, Kind, Moisture, Weathering};
use crate::spall::{flake, slab};
use crate::stress::patch::Plan;
use crate::stress::sphere;
use crate::units::ICE_POINT_K;

/// Weights of the cold and the residual branch of stiffness (judgement).
const STIFFNESS_BRANCHES: [f64; 2] = [0.4, 0.6];
/// Weights of volume-scaled and flaw-limited strength (judgement).
const STRENGTH_BRANCHES: [f64; 2] = [0.5, 0.5];
/// Ambient and initial temperature, 25 to 50 C (judgement).
const AMBIENT_K: (f64, f64) = (25.0 + ICE_POINT_K, 50.0 + ICE_POINT_K);
/// Slabbed share of the heated face and plate breadth over depth (assumption).
const SLAB_SHARE: Distribution = Distribution::triangular(0.1, 0.35, 0.8);
const PLATE_BREADTH: Distribution = Distribution::triangular(5.0, 10.0, 15.0);
/// Width of the patch along a log over the log's diameter (fire rules, step 5), and the largest share of a boulder it covers.
const LOG_PATCH_WIDTH: (f64, f64) = (0.5, 1.0);
const LOG_PATCH_SHARE_MAX: f64 = 0.4;
/// Debonded radius over rind thickness (assumption) and strength of its plane over fresh strength (judgement).
const RIND_SLENDERNESS: Distribution = Distribution::triangular(8.0, 15.0, 30.0);
const RIND_PLANE: (f64, f64) = (0.2, 0.5);
/// Slab depth over patch radius where a patch governs.
const PATCH_DEPTH: (f64, f64) = (0.8, 1.0);
/// Share of the pores that holds water (assumption).
pub fn saturation(moisture: Moisture) -> f64 {
    match moisture {
        Moisture::Dry => 0.0,
        Moisture::Damp => 0.5,
        Moisture::Wet => 1.0,
    }
}

/// One draw. SI.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Draw {
    /// Index of the rock in [`Tables::rocks`].
    pub rock: usize,
    /// Diffusivity at 20 C.
    pub diffusivity_m2_s: f64,
    /// Density.
    pub density_kg_m3: f64,
    /// Specific heat at 20 C.
    pub specific_heat_j_kg_k: f64,
    /// Expansion at 20 C.
    pub expansion_per_k: f64,
    /// Young's modulus, weathering included.
    pub youngs_modulus_pa: f64,
    /// Poisson's ratio.
    pub poissons_ratio: f64,
    /// Compressive strength, weathering included.
    pub compressive_strength_pa: f64,
    /// Tensile strength, weathering included.
    pub tensile_strength_pa: f64,
    /// Fracture toughness.
    pub fracture_toughness: f64,
    /// Porosity.
    pub porosity: f64,
    /// Emissivity.
    pub emissivity: f64,
    /// Ambient and initial temperature.
    pub ambient_k: f64,
    /// End of growth, end of flaming, end of residence, decay time.
    pub growth_s: f64,
    /// See `growth_s`.
    pub flaming_s: f64,
    /// See `growth_s`.
    pub residence_s: f64,
    /// See `growth_s`.
    pub decay_s: f64,
    /// Plateau irradiance.
    pub irradiance_w_m2: f64,
    /// Plateau gas temperature.
    pub gas_k: f64,
    /// Plateau convective coefficient.
    pub h_w_m2_k: f64,
    /// Most heat that the fuel can give; infinity where unknown.
    pub absorbed_limit_j_m2: f64,
    /// Heated share of the boulder.
    pub heated_share: f64,
    /// Plan and half-width of the heated patch.
    pub plan: Plan,
    /// See `plan`.
    pub patch_m: f64,
    /// Stiffness takes its residual value.
    pub residual_stiffness: bool,
    /// Flaw coefficient of flakes.
    pub flaw_coefficient: f64,
    /// Share of the surface that can flake.
    pub flakable_share: f64,
    /// Cold strength against slabs.
    pub slab_strength_pa: f64,
    /// That strength is limited by toughness.
    pub toughness_limited: bool,
    /// Factor on slab depth.
    pub slab_depth_factor: f64,
    /// Slab depth over patch radius where the patch governs.
    pub patch_depth: f64,
    /// Slabbed share of the heated face.
    pub slab_share: f64,
    /// Plate breadth over depth.
    pub plate_breadth: f64,
    /// Decides whether plates leave.
    pub leaves_u: f64,
    /// Debonded radius over rind thickness.
    pub rind_slenderness: f64,
    /// Strength of the rind's plane over fresh strength.
    pub rind_plane: f64,
}

/// The face of a boulder, the same in every draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Body {
    /// Boulder or outcrop.
    pub kind: Kind,
    /// Equivalent radius; `None` for an outcrop without a size.
    pub radius_m: Option<f64>,
    /// Weathering.
    pub weathering: Weathering,
    /// Moisture.
    pub moisture: Moisture,
    /// Recorded rind.
    pub rind_m: Option<f64>,
}

impl Body {
    /// The body of a record; silent fields take the stated defaults: fresh, dry.
    pub fn of(boulder: &Boulder) -> Body {
        Body {
            kind: boulder.kind,
            radius_m: boulder.radius_m,
            weathering: boulder.heating.weathering.unwrap_or(Weathering::Fresh),
            moisture: boulder.heating.moisture.unwrap_or(Moisture::Dry),
            rind_m: boulder.heating.rind_m,
        }
    }

    /// Radius of the convex face; `None` on a flat one.
    pub fn convex_radius_m(&self) -> Option<f64> {
        match self.kind {
            Kind::Boulder => self.radius_m,
            Kind::Outcrop => None,
        }
    }

    /// Plan and half-width of the patch heated on the share `f`.
    pub fn patch(&self, heated_share: f64, contact: bool, log_width_m: Option<f64>) -> (Plan, f64) {
        match (self.kind, self.radius_m, log_width_m) {
            (Kind::Boulder, Some(radius), _) => (Plan::Disc, sphere::cap_radius(heated_share, radius)),
            (_, _, Some(width)) => (Plan::Strip, 0.5 * width),
            (_, radius, None) => {
                let a = radius.map_or(default_patch_radius_m(self.kind), |r| sphere::cap_radius(heated_share, r));
                (if contact { Plan::Strip } else { Plan::Disc }, if contact { a.min(DEFAULT_STRIP_M) } else { a })
            }
        }
    }

    /// Cold strength against slabs and whether toughness limits it.
    pub fn slab_strength_pa(
        &self,
        tensile_pa: f64,
        toughness: f64,
        heated_share: f64,
        modulus: Option<f64>,
    ) -> (f64, bool) {
        match modulus {
            Some(modulus) => {
                // A flat face has no radius: the volume of its heated disc.
                let radius = self.radius_m.unwrap_or(default_patch_radius_m(self.kind));
                (slab::volume_scaled_pa(tensile_pa, heated_share, radius, modulus), false)
            }
            None => {
                let strength = slab::flaw_limited_pa(tensile_pa, toughness, slab::flaw_radius_m(self.weathering));
                (strength, strength < tensile_pa)
            }
        }
    }
}

/// Half-width of the strip along an unmeasured log on a flat face, m (assumption: a log of .3 m).
const DEFAULT_STRIP_M: f64 = 0.11;

/// Draws of one boulder in one fire.
pub struct Sampler<'a> {
    /// The run's points.
    pub points: &'a PointSet,
    /// The run's samples.
    pub tables: &'a Tables,
    /// Rocks by index and share.
    pub rocks: &'a [(usize, f64)],
    /// Flame front width for the stand-off, m.
    pub flame_front_width_m: f64,
}

impl Sampler<'_> {
    /// Draw `j` of a boulder in a fire.
    pub fn draw(&self, j: usize, boulder: &Boulder, body: &Body, fire: &Fire) -> Draw {
        let u = |d: Dimension| self.points.of(d)[j];
        let uniform = |d: Dimension, range: (f64, f64)| range.0 + u(d) * (range.1 - range.0);
        let rock_index = match self.rocks {
            [(only, _)] => *only,
            several => several[pick(u(Dimension::Rock), several.iter().map(|r| r.1))].0,
        };
        let table = &self.tables.rocks[rock_index];
        let heating = &boulder.heating;
        let measured = |p: Property| heating.properties.iter().find(|(q, _)| *q == p).map(|(_, v)| *v);
        let property = |p: Property| measured(p).unwrap_or_else(|| table.samples(p)[j]);
        let (strength_factor, stiffness_factor) = slab::weathering_factors(body.weathering);
        let density = property(Property::Density);
        let specific_heat = property(Property::SpecificHeat);
        let diffusivity = match (heating.diffusivity_m2_s, measured(Property::Conductivity)) {
            (Some(median), _) => {
                let figure = table.rock.figure(Property::Diffusivity).distribution;
                let spread = heating.diffusivity_gsd.map_or(figure.spread, libm::log);
                median * libm::exp(spread * normal_score(u(Dimension::Diffusivity)))
            }
            (None, Some(conductivity)) => conductivity / (density * specific_heat),
            (None, None) => property(Property::Diffusivity),
        };
        let tensile = property(Property::TensileStrength) * strength_factor;
        let toughness = property(Property::FractureToughness);
        let class =
            fire.classes[((u(Dimension::Class) * fire.classes.len() as f64) as usize).min(fire.classes.len() - 1)];
        let flame = self.flame(j, fire, class, u(Dimension::Ambient));

        let log_width = fire
            .log_diameter_m
            .or(heating.log_diameter_m.filter(|_| class.is_contact()))
            .map(|d| d * uniform(Dimension::PatchWidth, LOG_PATCH_WIDTH));
        let heated_share = match (log_width, body.convex_radius_m(), heating.heated_fraction) {
            // A log as long as the boulder is wide.
            (Some(width), Some(radius), _) if fire.log_diameter_m.is_some() => {
                (width / (2.0 * core::f64::consts::PI * radius)).min(LOG_PATCH_SHARE_MAX)
            }
            (_, _, Some(recorded)) => recorded,
            _ => self.tables.class(class).heated_share[j],
        };
        let (plan, patch_m) = body.patch(heated_share, class.is_contact(), log_width);
        let volume_scaled = pick(u(Dimension::StrengthBranch), STRENGTH_BRANCHES) == 0;
        let modulus = volume_scaled.then(|| slab::SIZE_MODULI[pick(u(Dimension::SizeModulus), [0.5, 0.5])]);
        let (slab_strength_pa, toughness_limited) = body.slab_strength_pa(tensile, toughness, heated_share, modulus);
        Draw {
            rock: rock_index,
            diffusivity_m2_s: diffusivity,
            density_kg_m3: density,
            specific_heat_j_kg_k: specific_heat,
            expansion_per_k: property(Property::Expansion),
            youngs_modulus_pa: property(Property::YoungsModulus) * stiffness_factor,
            poissons_ratio: property(Property::PoissonsRatio),
            compressive_strength_pa: property(Property::CompressiveStrength) * strength_factor,
            tensile_strength_pa: tensile,
            fracture_toughness: toughness,
            porosity: property(Property::Porosity),
            emissivity: property(Property::Emissivity),
            heated_share,
            plan,
            patch_m,
            residual_stiffness: pick(u(Dimension::StiffnessBranch), STIFFNESS_BRANCHES) == 1,
            flaw_coefficient: {
                let i = pick(u(Dimension::FlawCoefficient), flake::FLAW_COEFFICIENTS.map(|c| c.1));
                flake::FLAW_COEFFICIENTS[i].0
            },
            flakable_share: table.rock.spall.flakable_share[pick(u(Dimension::FlakableShare), flake::FLAKABLE_WEIGHTS)],
            slab_strength_pa,
            toughness_limited,
            slab_depth_factor: libm::exp(libm::log(slab::DEPTH_GSD) * normal_score(u(Dimension::SlabDepth))),
            patch_depth: uniform(Dimension::PatchDepth, PATCH_DEPTH),
            slab_share: SLAB_SHARE.quantile(u(Dimension::SlabShare)),
            plate_breadth: PLATE_BREADTH.quantile(u(Dimension::PlateBreadth)),
            leaves_u: u(Dimension::PlateLeaves),
            rind_slenderness: RIND_SLENDERNESS.quantile(u(Dimension::RindSlenderness)),
            rind_plane: uniform(Dimension::RindPlane, RIND_PLANE),
            ..flame
        }
    }

    /// The fire's part of a draw; the rest is left blank for [`Sampler::draw`].
    fn flame(&self, j: usize, fire: &Fire, class: ExposureClass, ambient_u: f64) -> Draw {
        let table = self.tables.class(class);
        let residence_dimension =
            if fire.log_diameter_m.is_some() { Dimension::LogResidence } else { Dimension::Residence };
        let residence_s = match fire.residence {
            Some((median, gsd)) => {
                median * libm::exp(libm::log(gsd) * normal_score(self.points.of(residence_dimension)[j]))
            }
            None => table.residence_s[j],
        };
        let flame_temperature = flame::FLAME_TEMPERATURE_K
            * libm::exp(
                libm::log(flame::FLAME_TEMPERATURE_GSD) * normal_score(self.points.of(Dimension::FlameTemperature)[j]),
            );
        let level = FlameLevel {
            irradiance_w_m2: table.irradiance_w_m2[j],
            irradiance_share: table.irradiance_share[j],
            gas_k: table.gas_k[j],
            h_w_m2_k: table.h_w_m2_k[j],
        };
        let ambient_k = AMBIENT_K.0 + ambient_u * (AMBIENT_K.1 - AMBIENT_K.0);
        fire_part(
            fire,
            &level,
            residence_s,
            table.flaming_max_s,
            table.decay_s[j],
            ambient_k,
            flame_temperature,
            self.flame_front_width_m,
        )
    }
}

/// Plateau of a class before the rules of the fire act on it.
#[derive(Debug, Clone, Copy)]
pub struct FlameLevel {
    /// Irradiance.
    pub irradiance_w_m2: f64,
    /// Irradiance over its median.
    pub irradiance_share: f64,
    /// Gas temperature.
    pub gas_k: f64,
    /// Convective coefficient.
    pub h_w_m2_k: f64,
}

/// Applies the rules of the fire page to a class's plateau: low flames, flame depth, stand-off, caps, residual stage, guard.
#[allow(clippy::too_many_arguments, reason = "one value each, all of one draw")]
pub fn fire_part(
    fire: &Fire,
    level: &FlameLevel,
    residence_s: f64,
    flaming_max_s: f64,
    decay_s: f64,
    ambient_k: f64,
    flame_temperature_k: f64,
    front_width_m: f64,
) -> Draw {
    let mut irradiance = level.irradiance_w_m2;
    if let Some(length) = fire.flame_length_m {
        irradiance *= flame::low_flame_factor(length);
    }
    let flaming_s = residence_s.min(flaming_max_s);
    if let Some(spread) = fire.spread_rate_m_s {
        irradiance = flame::flame_irradiance_w_m2(spread * flaming_s, flame_temperature_k);
    }
    let mut h = level.h_w_m2_k;
    let mut gas_k = level.gas_k.min(flame::GAS_CAP_K);
    if let Some(standoff) = fire.standoff_m {
        let length = fire.flame_length_or_default_m();
        let ambient = ExposureClass::black_body_w_m2(ambient_k);
        let view = if standoff > flame::STANDOFF_FLAME_LENGTHS * length {
            0.0
        } else {
            flame::front_view_factor(front_width_m, length, standoff, 0.0)
        };
        let power = flame::FLAME_EMISSIVE_POWER_W_M2 * level.irradiance_share;
        irradiance = view * power + (1.0 - view) * ambient;
        h = crate::fire::pulse::H_AFTER_W_M2_K;
        gas_k = ambient_k;
    }
    let growth_s = match (fire.flame_length_m, fire.spread_rate_m_s) {
        (Some(length), Some(spread)) => (length / spread).min(flaming_s),
        // Of the flaming part: what burns on as residual must not slow the flames, or a longer fire could do less.
        _ => Pulse::growth_time_s(flaming_s),
    };
    Draw {
        ambient_k,
        growth_s,
        flaming_s,
        residence_s,
        decay_s,
        irradiance_w_m2: irradiance.min(flame::IRRADIANCE_CAP_W_M2),
        gas_k,
        h_w_m2_k: h,
        absorbed_limit_j_m2: fire
            .fuel_load_kg_m2
            .map_or(f64::INFINITY, |w| flame::ABSORBED_SHARE_OF_FUEL * flame::HEAT_OF_COMBUSTION_J_KG * w),
        ..BLANK
    }
}

/// A draw with nothing in it, for building up.
pub const BLANK: Draw = Draw {
    rock: 0,
    diffusivity_m2_s: f64::NAN,
    density_kg_m3: f64::NAN,
    specific_heat_j_kg_k: f64::NAN,
    expansion_per_k: f64::NAN,
    youngs_modulus_pa: f64::NAN,
    poissons_ratio: f64::NAN,
    compressive_strength_pa: f64::NAN,
    tensile_strength_pa: f64::NAN,
    fracture_toughness: f64::NAN,
    porosity: f64::NAN,
    emissivity: f64::NAN,
    ambient_k: f64::NAN,
    growth_s: f64::NAN,
    flaming_s: f64::NAN,
    residence_s: f64::NAN,
    decay_s: f64::NAN,
    irradiance_w_m2: f64::NAN,
    gas_k: f64::NAN,
    h_w_m2_k: f64::NAN,
    absorbed_limit_j_m2: f64::INFINITY,
    heated_share: f64::NAN,
    plan: Plan::Disc,
    patch_m: f64::NAN,
    residual_stiffness: true,
    flaw_coefficient: f64::NAN,
    flakable_share: f64::NAN,
    slab_strength_pa: f64::NAN,
    toughness_limited: false,
    slab_depth_factor: 1.0,
    patch_depth: 0.9,
    slab_share: f64::NAN,
    plate_breadth: f64::NAN,
    leaves_u: 1.0,
    rind_slenderness: f64::NAN,
    rind_plane: f64::NAN,
};
