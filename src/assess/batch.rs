//! Eight draws through fire, heat, stress and spall.

use super::draws::{Body, Draw, saturation};
use super::tables::RockTable;
use crate::fire::flame::rain_cap_w_m2;
use crate::fire::pulse::{Level, Pulse, RESIDUAL_GAS_K, RESIDUAL_H_W_M2_K, RESIDUAL_IRRADIANCE_W_M2};
use crate::heat::boundary::SurfaceForcing;
use crate::heat::column::Column;
use crate::heat::grid::Grid;
use crate::heat::march::{Account, March, Observer};
use crate::heat::material::{Material, PoreWater, Resistivity};
use crate::heat::step::Stepper;
use crate::numerics::lanes::{LANES, Lanes};
use crate::rock::laws;
use crate::settings::SpallSettings;
use crate::site::Moisture;
use crate::spall::flake::{FlakeDraws, scale_stress};
use crate::spall::outcome::Outcome;
use crate::spall::rind::buckling_stress_pa;
use crate::spall::slab::Face;
use crate::spall::watch::{RindDraw, SlabDraw, Watch, WatchDraws, WetDraw};
use crate::stress::skin::SkinDraws;

/// Fourier number kappa t / R^2 above which a draw conducts in a sphere instead of a half-space.
pub const SPHERE_FOURIER: f64 = 0.05;

/// How finely a batch is marched.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Resolution {
    /// Nodes of the grid.
    pub nodes: usize,
    /// Stretch of the grid: the ratio of last to first spacing is about cosh of it.
    pub stretch: f64,
    /// Depth of a half-space in diffusion lengths of the heating time.
    pub lengths: f64,
    /// Steps per planned step.
    pub refine: usize,
}

impl Resolution {
    /// The ensemble's resolution; `tests/step_plan.rs` shows the error it leaves on every class.
    pub const RUN: Resolution = Resolution { nodes: 20, stretch: 7.0, lengths: 4.5, refine: 1 };
    /// A probe's resolution: errors of a hundredth of the run's.
    pub const PROBE: Resolution = Resolution { nodes: 360, stretch: 7.0, lengths: 7.0, refine: 10 };
}

/// Which laws stay constant with temperature because the user set the property.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Constant {
    /// Conductivity.
    pub conductivity: bool,
    /// Specific heat.
    pub specific_heat: bool,
    /// Diffusivity: conductivity follows the specific heat.
    pub diffusivity: bool,
    /// Expansion: strain grows evenly.
    pub expansion: bool,
    /// Young's modulus.
    pub youngs_modulus: bool,
    /// Tensile strength.
    pub tensile_strength: bool,
    /// Toughness.
    pub fracture_toughness: bool,
}

fn lanes(draws: &[Draw; LANES], value: impl Fn(&Draw) -> f64) -> Lanes {
    Lanes::from_fn(|l| value(&draws[l]))
}

/// The pulse of eight draws.
pub fn pulse(draws: &[Draw; LANES], spall: &SpallSettings) -> Pulse {
    Pulse {
        growth_s: lanes(draws, |d| d.growth_s),
        flaming_s: lanes(draws, |d| d.flaming_s),
        residence_s: lanes(draws, |d| d.residence_s),
        decay_s: lanes(draws, |d| d.decay_s),
        flaming: Level {
            irradiance_w_m2: lanes(draws, |d| d.irradiance_w_m2),
            gas_k: lanes(draws, |d| d.gas_k),
            h_w_m2_k: lanes(draws, |d| d.h_w_m2_k),
        },
        // Residual burning is not hotter than the flames before it.
        residual: Level {
            irradiance_w_m2: lanes(draws, |d| RESIDUAL_IRRADIANCE_W_M2.min(d.irradiance_w_m2)),
            gas_k: lanes(draws, |d| RESIDUAL_GAS_K.min(d.gas_k)),
            h_w_m2_k: Lanes::splat(RESIDUAL_H_W_M2_K),
        },
        ambient_k: lanes(draws, |d| d.ambient_k),
        emissivity: lanes(draws, |d| d.emissivity),
        rain_cap_w_m2: rain_cap_w_m2(spall.rain_mm_h),
    }
}

/// The laws of eight draws of one rock.
pub fn material<'a>(
    draws: &[Draw; LANES],
    body: &Body,
    table: &'a RockTable,
    curve: &'a crate::heat::material::HeatCurve,
    constant: Constant,
) -> Material<'a> {
    let capacity_j_m3_k = lanes(draws, |d| d.density_kg_m3 * d.specific_heat_j_kg_k);
    let k20 = lanes(draws, |d| d.diffusivity_m2_s * d.density_kg_m3 * d.specific_heat_j_kg_k);
    let resistivity = if constant.diffusivity {
        Resistivity::WithCapacity { at_reference: Lanes::ONE / k20 }
    } else if constant.conductivity {
        Resistivity::Linear { a: Lanes::ONE / k20, b: Lanes::ZERO }
    } else {
        resistivity(k20, table)
    };
    let water = (body.moisture != Moisture::Dry)
        .then(|| PoreWater::new(curve, lanes(draws, |d| d.porosity), saturation(body.moisture), capacity_j_m3_k));
    Material {
        capacity_j_m3_k,
        resistivity,
        curve,
        water,
        first_heating_damage: table.rock.loses_diffusivity && !(constant.conductivity || constant.diffusivity),
    }
}

fn resistivity(k20: Lanes, table: &RockTable) -> Resistivity {
    let (mut first, mut second) = (Lanes::ZERO, Lanes::ZERO);
    let mut reciprocal = false;
    for l in 0..LANES {
        (first.0[l], second.0[l]) = match laws::resistivity(table.rock.law, k20.0[l]) {
            laws::Resistivity::Linear { w0, w1_per_k } => (w0 - w1_per_k * crate::units::ICE_POINT_K, w1_per_k),
            laws::Resistivity::Sekiguchi { a, b } => {
                reciprocal = true;
                (a, b)
            }
        };
    }
    if reciprocal {
        Resistivity::Reciprocal { a: first, b: second }
    } else {
        Resistivity::Linear { a: first, b: second }
    }
}

/// The grid of eight draws for a history that heats for `heating_s`; spherical draws reach to their centre.
pub fn grid(draws: &[Draw; LANES], body: &Body, heating_s: Lanes, whole_s: Lanes, resolution: &Resolution) -> Grid {
    let mut curvature = Lanes::ZERO;
    let mut depth = Lanes::ZERO;
    for l in 0..LANES {
        let kappa = draws[l].diffusivity_m2_s;
        depth.0[l] = resolution.lengths * (kappa * whole_s.0[l]).sqrt();
        if let Some(radius) = body.convex_radius_m()
            && kappa * heating_s.0[l] > SPHERE_FOURIER * radius * radius
        {
            curvature.0[l] = 1.0 / radius;
            depth.0[l] = depth.0[l].min(radius);
        }
    }
    Grid::new(resolution.nodes, depth, resolution.stretch, curvature)
}

/// Everything that a watch needs of eight draws, owned so that the watch can borrow it.
pub struct WatchInputs<'a> {
    draws: WatchDraws<'a>,
}

impl<'a> WatchInputs<'a> {
    /// Inputs for draws of one rock on one body.
    pub fn new(
        draws: &[Draw; LANES],
        body: &Body,
        table: &'a RockTable,
        skin_law: &'a crate::stress::skin::SkinLaw,
        strength_law: &'a crate::spall::slab::StrengthLaw,
        settings: &SpallSettings,
    ) -> WatchInputs<'a> {
        let parameters = &table.rock.spall;
        let m = parameters.weibull_modulus_compression;
        let curvature = body.convex_radius_m().map_or(0.0, |r| 1.0 / r);
        WatchInputs {
            draws: WatchDraws {
                skin_law,
                skin: SkinDraws {
                    restraint_pa_per_k: lanes(draws, |d| {
                        d.expansion_per_k * d.youngs_modulus_pa / (1.0 - d.poissons_ratio)
                    }),
                    start_k: lanes(draws, |d| d.ambient_k),
                    start_strain_k: lanes(draws, |d| skin_law.strain_over_expansion_k(d.ambient_k)),
                    residual_branch: lanes(draws, |d| f64::from(u8::from(d.residual_stiffness))),
                },
                flake: FlakeDraws {
                    modulus: m,
                    per_scale: lanes(draws, |d| {
                        1.0 / scale_stress(parameters.spalling_to_laboratory_strength, d.compressive_strength_pa, m)
                    }),
                    site_area: lanes(draws, |d| core::f64::consts::PI * d.flaw_coefficient * d.flaw_coefficient),
                    grain_m: parameters.grain_m,
                    energy_floor_pa2_m: lanes(draws, |d| {
                        d.fracture_toughness * d.fracture_toughness * (1.0 + d.poissons_ratio)
                    }),
                    deepest_m: lanes(draws, |d| d.patch_m / d.flaw_coefficient),
                    counted_risk: lanes(draws, |d| {
                        let share = settings.flake_share_counted / d.flakable_share;
                        if share < 1.0 { -libm::log1p(-share) } else { f64::INFINITY }
                    }),
                },
                face: Face {
                    curvature_per_m: Lanes::splat(curvature),
                    heated_share: lanes(draws, |d| d.heated_share),
                    plan: draws[0].plan,
                    patch_m: lanes(draws, |d| d.patch_m),
                },
                slab: std::array::from_fn(|l| SlabDraw {
                    strength_pa: draws[l].slab_strength_pa,
                    toughness_limited: draws[l].toughness_limited,
                    depth_factor: draws[l].slab_depth_factor,
                    patch_depth: draws[l].patch_depth,
                    leaves_u: draws[l].leaves_u,
                    radius_m: body.convex_radius_m(),
                }),
                rind: body.rind_m.map(|depth_m| {
                    std::array::from_fn(|l| RindDraw {
                        depth_m,
                        buckling_pa: buckling_stress_pa(
                            draws[l].youngs_modulus_pa,
                            draws[l].poissons_ratio,
                            draws[l].rind_slenderness,
                        ),
                        plane_share: draws[l].rind_plane,
                    })
                }),
                wet: (body.moisture == Moisture::Wet)
                    .then(|| std::array::from_fn(|l| WetDraw { porosity: draws[l].porosity })),
                strength_law,
                leaves_probability: settings.slab_leaves_probability,
                generations_max: settings.slab_generations_max,
            },
        }
    }

    /// A watch over them.
    pub fn watch(&'a self, material: &'a Material<'a>, grid: &Grid) -> Watch<'a> {
        Watch::new(&self.draws, material, grid)
    }
}

/// What a batch gave.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct BatchResult {
    /// One outcome a draw.
    pub outcomes: [Outcome; LANES],
    /// Whether each draw conducted in a sphere.
    pub sphere: [bool; LANES],
    /// The march's account.
    pub account: Account,
}

/// Marches eight draws of one rock through their pulses.
///
/// The same code is compiled twice, for the processor every machine has and for one with 256-bit registers, and the wider
/// one is taken where it is there. Neither fuses a multiplication with an addition, so both give the same bits.
pub fn run(
    draws: &[Draw; LANES],
    body: &Body,
    table: &RockTable,
    settings: &SpallSettings,
    resolution: &Resolution,
) -> BatchResult {
    #[cfg(target_arch = "x86_64")]
    if std::arch::is_x86_feature_detected!("avx2") {
        // SAFETY: the processor has the feature, as was just asked.
        #[allow(unsafe_code, reason = "calling a function compiled for a processor feature")]
        return unsafe { run_wide(draws, body, table, settings, resolution) };
    }
    run_portable(draws, body, table, settings, resolution)
}

/// [`run_portable`], compiled for 256-bit registers.
#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2")]
fn run_wide(
    draws: &[Draw; LANES],
    body: &Body,
    table: &RockTable,
    settings: &SpallSettings,
    resolution: &Resolution,
) -> BatchResult {
    run_portable(draws, body, table, settings, resolution)
}

/// [`run`] for the processor that the program was built for.
#[inline(always)]
pub fn run_portable(
    draws: &[Draw; LANES],
    body: &Body,
    table: &RockTable,
    settings: &SpallSettings,
    resolution: &Resolution,
) -> BatchResult {
    let material = material(draws, body, table, &table.curve, Constant::default());
    let pulse = pulse(draws, settings);
    let inputs = WatchInputs::new(draws, body, table, &table.skin, &table.strength, settings);
    let whole_s = pulse.residence_s + pulse.decay_s * DECAY_LENGTHS;
    let grid = grid(draws, body, pulse.residence_s, whole_s, resolution);
    let sphere = std::array::from_fn(|l| grid.curvature_per_m.0[l] > 0.0);
    let limit = lanes(draws, |d| d.absorbed_limit_j_m2);
    let mut watch = inputs.watch(&material, &grid);
    let (_, account) = march(&material, &pulse, grid, lanes(draws, |d| d.ambient_k), limit, resolution, &mut watch);
    BatchResult { outcomes: watch.outcomes(&account), sphere, account }
}

/// Decay times that count as heating when the depth of the grid is chosen.
pub const DECAY_LENGTHS: f64 = 10.0;

/// Marches a column from a uniform start.
#[inline(always)]
pub fn march(
    material: &Material,
    forcing: &impl SurfaceForcing,
    grid: Grid,
    start_k: Lanes,
    absorbed_limit_j_m2: Lanes,
    resolution: &Resolution,
    observer: &mut impl Observer,
) -> (Column, Account) {
    let mut stepper = Stepper::new(&grid, material);
    let mut column = Column::uniform(grid, material, start_k);
    let march = March { refine: resolution.refine, absorbed_limit_j_m2 };
    let account = march.run(&mut column, material, forcing, &mut stepper, observer);
    (column, account)
}
