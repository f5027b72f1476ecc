//! One described rock through one history, in detail: temperature, stress and spall through time and depth.
//!
//! A probe runs the medians of the catalogue and the class on chosen branches: residual stiffness, flaw coefficient 10,
//! volume-scaled strength with size exponent 10, the middle flakable share. A property that the caller sets stays
//! constant with temperature. The grid and the steps are ten times finer than a run's.

use super::batch::{self, Constant, Resolution, WatchInputs};
use super::draws::{BLANK, Body, Draw, FlameLevel, fire_part};
use super::fires::Fire;
use super::tables::RockTable;
use crate::fire::exposure::ExposureClass;
use crate::fire::flame;
use crate::fire::pulse::Series;
use crate::heat::boundary::SurfaceForcing;
use crate::heat::column::Column;
use crate::heat::march::{Account, Moment, Observer, Verdict};
use crate::heat::material::{HeatCurve, Material};
use crate::numerics::lanes::{LANES, Lanes};
use crate::rock::Property;
use crate::settings::SpallSettings;
use crate::spall::outcome::{Event, Outcome};
use crate::spall::slab::{self, SIZE_MODULUS_MIDDLE, StrengthLaw};
use crate::spall::watch::Watch;
use crate::stress::skin::SkinLaw;

/// Flaw coefficient of the medians.
const FLAW_COEFFICIENT_MIDDLE: f64 = 10.0;
/// Initial temperature of the medians, K: the middle of the ensemble's range.
pub const INITIAL_K: f64 = 37.5 + crate::units::ICE_POINT_K;
/// The branches of the medians, in words.
pub const BRANCHES: &str = "medians; residual stiffness, flaw coefficient 10, volume-scaled strength with size exponent 10, \
                            middle flakable share, plates stay";

/// Quantities that a probe may fix besides catalogue properties. SI.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Fixed {
    /// Catalogue properties, SI.
    pub properties: Vec<(Property, f64)>,
    /// Initial and ambient temperature, K.
    pub initial_k: Option<f64>,
    /// Heated share of the boulder.
    pub heated_share: Option<f64>,
    /// Plateau irradiance, W/m2.
    pub irradiance_w_m2: Option<f64>,
    /// Plateau gas temperature, K.
    pub gas_k: Option<f64>,
    /// Plateau convective coefficient, W/m2K.
    pub h_w_m2_k: Option<f64>,
    /// Decay time, s.
    pub decay_s: Option<f64>,
}

/// What drives the face.
#[derive(Debug, Clone, PartialEq)]
pub enum History {
    /// The pulse of a fire.
    Fire(Fire),
    /// A measured series; emissivity 0 rows take no radiation.
    Series(Series),
}

/// Set properties that contradict each other.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error(
    "conductivity {conductivity} W/mK, density {density} kg/m3, specific heat {specific_heat} J/kgK and diffusivity \
     {diffusivity_mm2_s} mm2/s contradict each other; leave one of them out"
)]
pub struct Contradiction {
    conductivity: f64,
    density: f64,
    specific_heat: f64,
    diffusivity_mm2_s: f64,
}

/// The one draw of a probe, and which laws are constant.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct MedianDraw {
    /// The draw.
    pub draw: Draw,
    /// Which laws stay constant.
    pub constant: Constant,
}

/// The median draw of a rock and body in a fire; for a series the fire's part is blank.
///
/// # Errors
/// When conductivity, density, specific heat and diffusivity are all set and disagree by more than 0.1 %.
pub fn median_draw(
    table: &RockTable,
    body: &Body,
    history: &History,
    fixed: &Fixed,
    log_diameter_m: Option<f64>,
    flame_front_width_m: f64,
) -> Result<MedianDraw, Contradiction> {
    let set = |p: Property| fixed.properties.iter().rev().find(|(q, _)| *q == p).map(|(_, v)| *v);
    let median = |p: Property| set(p).unwrap_or_else(|| table.rock.figure(p).distribution.median());
    let (strength_factor, stiffness_factor) = slab::weathering_factors(body.weathering);
    let (set_k, set_kappa, set_rho, set_c) =
        (set(Property::Conductivity), set(Property::Diffusivity), set(Property::Density), set(Property::SpecificHeat));
    let mut density = median(Property::Density);
    let mut specific_heat = median(Property::SpecificHeat);
    let diffusivity = match (set_k, set_kappa) {
        (Some(k), None) => k / (density * specific_heat),
        (Some(k), Some(kappa)) => {
            match (set_rho, set_c) {
                (_, None) => specific_heat = k / (kappa * density),
                (None, Some(c)) => density = k / (kappa * c),
                (Some(rho), Some(c)) if (k / (rho * c) / kappa - 1.0).abs() > 1e-3 => {
                    return Err(Contradiction {
                        conductivity: k,
                        density: rho,
                        specific_heat: c,
                        diffusivity_mm2_s: kappa / crate::units::M2_S_PER_MM2_S,
                    });
                }
                (Some(_), Some(_)) => {}
            }
            kappa
        }
        (None, kappa) => kappa.unwrap_or_else(|| median(Property::Diffusivity)),
    };
    let ambient_k = fixed.initial_k.unwrap_or(INITIAL_K);
    let (class, base) = match history {
        History::Series(_) => (ExposureClass::Crown, Draw { ambient_k, ..BLANK }),
        History::Fire(fire) => {
            let class = fire.classes[0];
            let figures = class.figures();
            let irradiance = match &figures.irradiance_w_m2 {
                Some(d) => d.median(),
                None => ExposureClass::black_body_w_m2(fixed.gas_k.unwrap_or(figures.gas_k.median())),
            };
            let level = FlameLevel {
                irradiance_w_m2: irradiance,
                irradiance_share: 1.0,
                gas_k: figures.gas_k.median(),
                h_w_m2_k: figures.h_w_m2_k.median(),
            };
            let decay = fixed.decay_s.unwrap_or(figures.decay_s.median());
            let mut draw = fire_part(
                fire,
                &level,
                fire.median_residence_s(),
                figures.residence_s.upper,
                decay,
                ambient_k,
                flame::FLAME_TEMPERATURE_K,
                flame_front_width_m,
            );
            draw.irradiance_w_m2 = fixed.irradiance_w_m2.unwrap_or(draw.irradiance_w_m2);
            draw.gas_k = fixed.gas_k.unwrap_or(draw.gas_k);
            draw.h_w_m2_k = fixed.h_w_m2_k.unwrap_or(draw.h_w_m2_k);
            (class, draw)
        }
    };
    let tensile = median(Property::TensileStrength) * strength_factor;
    let heated_share = fixed.heated_share.unwrap_or_else(|| class.figures().heated_fraction.median());
    let log_width = log_diameter_m.map(|d| 0.75 * d);
    let (plan, patch_m) = body.patch(heated_share, class.is_contact(), log_width);
    let toughness = median(Property::FractureToughness);
    let (slab_strength_pa, toughness_limited) =
        body.slab_strength_pa(tensile, toughness, heated_share, Some(SIZE_MODULUS_MIDDLE));
    let draw = Draw {
        diffusivity_m2_s: diffusivity,
        density_kg_m3: density,
        specific_heat_j_kg_k: specific_heat,
        expansion_per_k: median(Property::Expansion),
        youngs_modulus_pa: median(Property::YoungsModulus) * stiffness_factor,
        poissons_ratio: median(Property::PoissonsRatio),
        compressive_strength_pa: median(Property::CompressiveStrength) * strength_factor,
        tensile_strength_pa: tensile,
        fracture_toughness: toughness,
        porosity: median(Property::Porosity),
        emissivity: median(Property::Emissivity),
        heated_share,
        plan,
        patch_m,
        residual_stiffness: true,
        flaw_coefficient: FLAW_COEFFICIENT_MIDDLE,
        flakable_share: table.rock.spall.flakable_share[1],
        slab_strength_pa,
        toughness_limited,
        slab_share: 0.35,
        plate_breadth: 10.0,
        rind_slenderness: 15.0,
        rind_plane: 0.35,
        ..base
    };
    let constant = Constant {
        conductivity: set_k.is_some(),
        specific_heat: set_c.is_some() || (set_k.is_some() && set_kappa.is_some()),
        diffusivity: set_kappa.is_some() && set_k.is_none(),
        expansion: set(Property::Expansion).is_some(),
        youngs_modulus: set(Property::YoungsModulus).is_some(),
        tensile_strength: set(Property::TensileStrength).is_some(),
        fracture_toughness: set(Property::FractureToughness).is_some(),
    };
    Ok(MedianDraw { draw, constant })
}

/// A probe's account. Outer index of tables is time, inner is depth, face first.
#[derive(Debug, Clone, PartialEq)]
pub struct Probe {
    /// Asked depths, m.
    pub depth_m: Vec<f64>,
    /// Asked times, s.
    pub time_s: Vec<f64>,
    /// Temperature, K, `[time][depth]`.
    pub temperature_k: Vec<Vec<f64>>,
    /// Face temperature, K, `[time]`.
    pub surface_k: Vec<f64>,
    /// Net flux into the face, W/m2, `[time]`.
    pub flux_w_m2: Vec<f64>,
    /// Heat absorbed so far, J/m2, `[time]`.
    pub absorbed_at_j_m2: Vec<f64>,
    /// Skin stress, Pa, `[time][depth]`.
    pub skin_stress_pa: Vec<Vec<f64>>,
    /// Membrane force, N/m, `[time]`.
    pub membrane_force_n_m: Vec<f64>,
    /// Largest normal tension, Pa, `[time]`.
    pub normal_tension_pa: Vec<f64>,
    /// Events in order.
    pub events: Vec<Event>,
    /// Peaks, doses and the rest.
    pub outcome: Outcome,
    /// Largest heat absorbed so far, J/m2.
    pub absorbed_j_m2: f64,
    /// Heat of the column less heat absorbed, over the heat exchanged.
    pub energy_balance_error: f64,
    /// Steps taken.
    pub steps: usize,
    /// Conducted in a sphere.
    pub sphere: bool,
    /// The draw.
    pub draw: Draw,
}

/// Runs a probe. `depth_m` ascending from 0; `time_s` ascending, or empty for the probe's own choice.
pub fn run(
    table: &RockTable,
    body: &Body,
    history: &History,
    median: &MedianDraw,
    depth_m: &[f64],
    time_s: &[f64],
    settings: &SpallSettings,
) -> Probe {
    match history {
        History::Fire(_) => {
            let lanes = [median.draw; LANES];
            let pulse = batch::pulse(&lanes, settings);
            let heating = pulse.residence_s;
            let whole = (pulse.residence_s + pulse.decay_s * batch::DECAY_LENGTHS)
                .max(Lanes::splat(time_s.last().copied().unwrap_or(0.0)));
            run_forcing(table, body, &pulse, heating, whole, median, depth_m, time_s, settings, false)
        }
        History::Series(series) => {
            let end = Lanes::splat(series.time_s[series.time_s.len() - 1]);
            run_forcing(table, body, series, end, end, median, depth_m, time_s, settings, true)
        }
    }
}

#[allow(clippy::too_many_arguments, reason = "the parts of one problem")]
fn run_forcing(
    table: &RockTable,
    body: &Body,
    forcing: &impl SurfaceForcing,
    heating_s: Lanes,
    whole_s: Lanes,
    median: &MedianDraw,
    depth_m: &[f64],
    time_s: &[f64],
    settings: &SpallSettings,
    to_the_end: bool,
) -> Probe {
    let resolution = Resolution::PROBE;
    let lanes = [median.draw; LANES];
    let constant = median.constant;
    let constant_curve = HeatCurve::constant();
    let curve = if constant.specific_heat { &constant_curve } else { &table.curve };
    let rock = &table.rock;
    let skin_law = SkinLaw::new(
        |t| if constant.expansion { t - crate::heat::material::REFERENCE_K } else { rock.strain_over_expansion(t) },
        |t| if constant.youngs_modulus { 1.0 } else { rock.residual.youngs_modulus.factor(t) },
    );
    let strength_law = StrengthLaw::new(
        |t| if constant.tensile_strength { 1.0 } else { rock.residual.tensile_strength.factor(t) },
        |t| if constant.fracture_toughness { 1.0 } else { rock.residual.fracture_toughness.factor(t) },
    );
    let material = batch::material(&lanes, body, table, curve, constant);
    let inputs = WatchInputs::new(&lanes, body, table, &skin_law, &strength_law, settings);
    let grid = batch::grid(&lanes, body, heating_s, whole_s, &resolution);
    let sphere = grid.curvature_per_m.0[0] > 0.0;
    let start = Lanes::splat(median.draw.ambient_k);
    let mut recorder = Recorder {
        watch: inputs.watch(&material, &grid),
        depth_m,
        wanted_s: time_s.to_vec(),
        every: if time_s.is_empty() { resolution.refine } else { 0 },
        to_the_end,
        seen: 0,
        next: 0,
        before: Row::cold(0.0, median.draw.ambient_k, depth_m.len()),
        rows: Vec::new(),
    };
    recorder.start(forcing);
    let limit = Lanes::splat(median.draw.absorbed_limit_j_m2);
    let (column, account) = batch::march(&material, forcing, grid, start, limit, &resolution, &mut recorder);
    assemble(recorder, &column, &account, &material, median.draw, sphere)
}

fn assemble(
    recorder: Recorder,
    column: &Column,
    account: &Account,
    material: &Material,
    draw: Draw,
    sphere: bool,
) -> Probe {
    let balance = column.heat_j_m2(material) + column.removed_j_m2 - account.absorbed_j_m2;
    let depth_m = recorder.depth_m.to_vec();
    let rows = recorder.rows;
    let outcome = recorder.watch.outcomes(account)[0];
    Probe {
        time_s: rows.iter().map(|r| r.time_s).collect(),
        temperature_k: rows.iter().map(|r| r.temperature_k.clone()).collect(),
        surface_k: rows.iter().map(|r| r.surface_k).collect(),
        flux_w_m2: rows.iter().map(|r| r.flux_w_m2).collect(),
        absorbed_at_j_m2: rows.iter().map(|r| r.absorbed_j_m2).collect(),
        skin_stress_pa: rows.iter().map(|r| r.stress_pa.clone()).collect(),
        membrane_force_n_m: rows.iter().map(|r| r.force_n_m).collect(),
        normal_tension_pa: rows.iter().map(|r| r.tension_pa).collect(),
        depth_m,
        events: outcome.events.iter().collect(),
        outcome,
        absorbed_j_m2: outcome.absorbed_j_m2,
        energy_balance_error: balance.0[0] / account.exchanged_j_m2.0[0].max(f64::MIN_POSITIVE),
        steps: account.steps,
        sphere,
        draw,
    }
}

/// What is kept of one moment.
#[derive(Debug, Clone, PartialEq)]
struct Row {
    time_s: f64,
    surface_k: f64,
    flux_w_m2: f64,
    absorbed_j_m2: f64,
    force_n_m: f64,
    tension_pa: f64,
    temperature_k: Vec<f64>,
    stress_pa: Vec<f64>,
}

impl Row {
    fn cold(time_s: f64, ambient_k: f64, depths: usize) -> Row {
        Row {
            time_s,
            surface_k: ambient_k,
            flux_w_m2: 0.0,
            absorbed_j_m2: 0.0,
            force_n_m: 0.0,
            tension_pa: 0.0,
            temperature_k: vec![ambient_k; depths],
            stress_pa: vec![0.0; depths],
        }
    }

    /// Between two rows, at a share of the way.
    fn between(a: &Row, b: &Row, share: f64) -> Row {
        let mid = |x: f64, y: f64| x + share * (y - x);
        let all = |x: &[f64], y: &[f64]| x.iter().zip(y).map(|(x, y)| mid(*x, *y)).collect();
        Row {
            time_s: mid(a.time_s, b.time_s),
            surface_k: mid(a.surface_k, b.surface_k),
            flux_w_m2: mid(a.flux_w_m2, b.flux_w_m2),
            absorbed_j_m2: mid(a.absorbed_j_m2, b.absorbed_j_m2),
            force_n_m: mid(a.force_n_m, b.force_n_m),
            tension_pa: mid(a.tension_pa, b.tension_pa),
            temperature_k: all(&a.temperature_k, &b.temperature_k),
            stress_pa: all(&a.stress_pa, &b.stress_pa),
        }
    }
}

/// Keeps rows at the wanted times (linear between steps), or every so many steps.
struct Recorder<'a> {
    watch: Watch<'a>,
    depth_m: &'a [f64],
    wanted_s: Vec<f64>,
    every: usize,
    to_the_end: bool,
    seen: usize,
    next: usize,
    before: Row,
    rows: Vec<Row>,
}

impl Recorder<'_> {
    fn start(&mut self, forcing: &impl SurfaceForcing) {
        let first = forcing.exchange(0, forcing.leg(0).start_s, Lanes::ONE);
        self.before.flux_w_m2 = first.flux_into(Lanes::splat(self.before.surface_k)).0[0];
        if self.every > 0 {
            self.rows.push(self.before.clone());
        }
        while self.next < self.wanted_s.len() && self.wanted_s[self.next] <= 0.0 {
            self.rows.push(self.before.clone());
            self.next += 1;
        }
    }
}

fn at_depths(depth_m: &[f64], column: &Column, array: &[Lanes]) -> Vec<f64> {
    let nodes: Vec<(f64, f64)> = column.grid.depth_m.iter().zip(array).map(|(z, v)| (z.0[0], v.0[0])).collect();
    let end = nodes[nodes.len() - 1].0;
    depth_m.iter().map(|z| crate::numerics::table::interpolate(&nodes, z.min(end))).collect()
}

impl Observer for Recorder<'_> {
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict {
        let verdict = self.watch.see(column, moment);
        let (force, drive) = self.watch.force_and_drive();
        let now = Row {
            time_s: moment.time_s.0[0],
            surface_k: column.temperature_k[0].0[0],
            flux_w_m2: moment.flux_w_m2.0[0],
            absorbed_j_m2: moment.absorbed_j_m2.0[0],
            force_n_m: force.0[0],
            tension_pa: drive.largest_pa.0[0],
            temperature_k: at_depths(self.depth_m, column, &column.temperature_k),
            stress_pa: at_depths(self.depth_m, column, self.watch.stress_pa()),
        };
        self.seen += 1;
        if self.every > 0 && self.seen.is_multiple_of(self.every) && now.time_s > self.before.time_s {
            self.rows.push(now.clone());
        }
        while self.next < self.wanted_s.len() && self.wanted_s[self.next] <= now.time_s * (1.0 + 1e-12) {
            let span = now.time_s - self.before.time_s;
            let share =
                if span > 0.0 { ((self.wanted_s[self.next] - self.before.time_s) / span).min(1.0) } else { 1.0 };
            let mut row = Row::between(&self.before, &now, share);
            row.time_s = self.wanted_s[self.next];
            self.rows.push(row);
            self.next += 1;
        }
        self.before = now;
        if self.to_the_end || self.next < self.wanted_s.len() { Verdict::Continue } else { verdict }
    }

    fn finish(&mut self, moment: &Moment) {
        self.watch.finish(moment);
    }
}
