//! One time step: a two-stage linearly implicit Rosenbrock method on the enthalpy form.
//!
//! Semi-discrete equation of node i, per unit area of face, with heat content v_i:
//!
//! C (M dv/dt)_i = F_i = g_{i-1} (T_{i-1} - T_i) - g_i (T_i - T_{i+1}) + [i = 0] q(t, T_0)
//!
//! C = rho c20;  M the storage rows of [`Grid`];  g_i = (A/dz)_i times the mean of 1/w between the nodes;  T_i = T(v_i),
//! b_i = dT/dv.
//!
//! Stages of the ROS2 method (Verwer, Spee, Blom & Hundsdorfer 1999, recalled), J = dF/dv with frozen g:
//!
//! (C M - y dt J) k1 = F(t, v) + y dt F_t
//! (C M - y dt J) k2 = F(t + dt, v + dt k1) - 2 C M k1 - y dt F_t
//! v(t + dt) = v + dt (3/2 k1 + 1/2 k2),   y = 1 - 1/sqrt 2
//!
//! It is of second order for any J, so freezing the conductances in J costs no order, and L-stable for an exact one.
//! The matrix is tridiagonal and the same in both stages; it is eliminated from the deep end to the face. Interior fluxes
//! cancel in pairs in every stage, so the heat that enters through the face, returned by [`Stepper::step`], equals the
//! gain of the column to rounding.

use super::boundary::Exchange;
use super::column::Column;
use super::grid::{Grid, Storage};
use super::material::Material;
use crate::numerics::lanes::Lanes;

/// y = 1 - 1/sqrt 2.
const GAMMA: f64 = 1.0 - core::f64::consts::FRAC_1_SQRT_2;

/// Largest change of a node within a stage up to which radiation and resistivity are followed exactly, K.
const STAGE_CHANGE_K: f64 = 150.0;

/// Work arrays of the step, reused from step to step; all `[n]`, one entry a node.
#[derive(Debug, Clone)]
pub struct Stepper {
    /// Rows of C M, J/m2K.
    storage: Vec<Storage>,
    /// Solution of each row for a neighbour towards the face that stays as it is, after elimination.
    alone: Vec<Lanes>,
    /// k_i = alone_i + follow_i k_{i-1}.
    follow: Vec<Lanes>,
    /// Reciprocal pivot of each row.
    pivot: Vec<Lanes>,
    /// Matrix entry of the neighbour away from the face.
    below: Vec<Lanes>,
    /// First stage.
    k1: Vec<Lanes>,
    stage: Vec<Node>,
}

/// What conduction needs of a node.
#[derive(Debug, Clone, Copy)]
struct Node {
    temperature_k: Lanes,
    resistivity: Lanes,
    /// Factor on the conductivity from history.
    factor: Lanes,
}

impl Node {
    #[inline(always)]
    fn at<const REMEMBERS: bool>(
        material: &Material,
        temperature_k: &[Lanes],
        slope: &[Lanes],
        history: &[Lanes],
        i: usize,
    ) -> Node {
        Node {
            temperature_k: temperature_k[i],
            resistivity: material.resistivity(temperature_k[i], slope[i]),
            factor: if REMEMBERS { history[i] } else { Lanes::ONE },
        }
    }
}

impl Stepper {
    /// Work arrays for a column of `material` on `grid`.
    pub fn new(grid: &Grid, material: &Material) -> Stepper {
        let n = grid.len();
        let c = material.capacity_j_m3_k;
        let storage = |row: &Storage| Storage { above: c * row.above, here: c * row.here, below: c * row.below };
        let zero = vec![Lanes::ZERO; n];
        Stepper {
            storage: grid.storage_m.iter().map(storage).collect(),
            alone: zero.clone(),
            follow: zero.clone(),
            pivot: zero.clone(),
            below: zero.clone(),
            k1: zero,
            stage: vec![Node { temperature_k: Lanes::ZERO, resistivity: Lanes::ONE, factor: Lanes::ONE }; n],
        }
    }

    /// Advances the column by `dt_s` from exchange `now` to exchange `then`. Returns the heat absorbed through the face,
    /// J/m2 of face.
    #[inline(always)]
    pub fn step(
        &mut self,
        column: &mut Column,
        material: &Material,
        now: &Exchange,
        then: &Exchange,
        dt_s: Lanes,
    ) -> Lanes {
        if material.remembers() {
            self.step_of::<true>(column, material, now, then, dt_s)
        } else {
            self.step_of::<false>(column, material, now, then, dt_s)
        }
    }

    /// [`Stepper::step`] for rock whose conductivity has a history (`REMEMBERS`), or has none.
    #[inline(always)]
    fn step_of<const REMEMBERS: bool>(
        &mut self,
        column: &mut Column,
        material: &Material,
        now: &Exchange,
        then: &Exchange,
        dt_s: Lanes,
    ) -> Lanes {
        let n = column.content_k.len();
        let gdt = dt_s * GAMMA;
        let spread = &column.grid.area_over_distance_per_m[..n - 1];
        let (content, slope) = (&mut column.content_k[..n], &column.slope[..n]);
        let (temperature, hottest) = (&column.temperature_k[..n], &column.hottest_k[..n]);
        let history = &column.conductivity_factor[..n];
        let (alone, follow, pivot, below) =
            (&mut self.alone[..n], &mut self.follow[..n], &mut self.pivot[..n], &mut self.below[..n]);
        let (storage, k1, stage) = (&self.storage[..n], &mut self.k1[..n], &mut self.stage[..n]);
        let last = n - 1;

        // First stage, and elimination from the deep end to the face.
        let flux_now = now.flux_into(temperature[0]);
        let flux_drift = (then.flux_into(temperature[0]) - flux_now) * GAMMA;
        let face_link = gdt * now.stiffness_w_m2_k(temperature[0]);
        let mut lower = Node::at::<REMEMBERS>(material, temperature, slope, history, last);
        let (mut flow_below, mut link_below) = (Lanes::ZERO, Lanes::ZERO);
        for i in (0..n).rev() {
            let (mut flow, mut link) = (flux_now + flux_drift, face_link);
            let mut upper = lower;
            if i > 0 {
                upper = Node::at::<REMEMBERS>(material, temperature, slope, history, i - 1);
                let g = conductance::<REMEMBERS>(spread[i - 1], &upper, &lower);
                flow = g * (upper.temperature_k - lower.temperature_k);
                link = gdt * g;
            }
            let mut diagonal = storage[i].here + (link + link_below) * slope[i];
            let mut right = flow - flow_below;
            if i < last {
                let entry = storage[i].below - link_below * slope[i + 1];
                below[i] = entry;
                diagonal += entry * follow[i + 1];
                right -= entry * alone[i + 1];
            }
            let reciprocal = Lanes::ONE / diagonal;
            pivot[i] = reciprocal;
            alone[i] = right * reciprocal;
            if i > 0 {
                follow[i] = (link * slope[i - 1] - storage[i].above) * reciprocal;
            }
            (lower, flow_below, link_below) = (upper, flow, link);
        }
        k1[0] = alone[0];
        let entered_1 = flux_now + flux_drift - face_link * slope[0] * k1[0];
        for i in 0..n {
            if i > 0 {
                k1[i] = alone[i] + follow[i] * k1[i - 1];
            }
            let (t, s) = material.temperature(content[i] + dt_s * k1[i], hottest[i]);
            let near = within_a_stage(temperature[i], t);
            stage[i] = Node {
                temperature_k: t,
                resistivity: material.resistivity(near, s),
                // The factor of this stage's own temperature: the one from the start of the step would cost an order.
                factor: if REMEMBERS { material.conductivity_factor(near, hottest[i].max(near)) } else { Lanes::ONE },
            };
        }

        // Second stage, same matrix.
        let flux_then = stage_flux(then, temperature[0], stage[0].temperature_k);
        let mut flow_below = Lanes::ZERO;
        for i in (0..n).rev() {
            let mut right = storage[i].here * k1[i];
            let mut flow = flux_then - flux_drift;
            if i > 0 {
                let g = conductance::<REMEMBERS>(spread[i - 1], &stage[i - 1], &stage[i]);
                flow = g * (stage[i - 1].temperature_k - stage[i].temperature_k);
                right += storage[i].above * k1[i - 1];
            }
            if i < last {
                right += storage[i].below * k1[i + 1];
            }
            right = flow - flow_below - right * 2.0;
            if i < last {
                right -= below[i] * alone[i + 1];
            }
            alone[i] = right * pivot[i];
            flow_below = flow;
        }
        let mut k2 = alone[0];
        let entered_2 = flux_then - flux_drift - face_link * slope[0] * k2;
        let (first, second) = (dt_s * 1.5, dt_s * 0.5);
        content[0] += first * k1[0] + second * k2;
        for i in 1..n {
            k2 = alone[i] + follow[i] * k2;
            content[i] += first * k1[i] + second * k2;
        }
        column.refresh(material);
        dt_s * (entered_1 + entered_2) * 0.5
    }
}

/// Conductance between neighbours, W/m2K: area over distance times the mean conductivity between their temperatures.
///
/// The mean of 1/w over a w that is linear in T is ln(w1/w0)/(w1 - w0) = 2/(w0 + w1) (1 + y^2/3 + ..), y = (w1 - w0)/(w0 + w1).
#[inline(always)]
fn conductance<const REMEMBERS: bool>(area_over_distance: Lanes, a: &Node, b: &Node) -> Lanes {
    let (mut wa, mut wb, mut spread) = (a.resistivity, b.resistivity, area_over_distance);
    if REMEMBERS {
        // w/f of each, brought to one denominator: a division less.
        (wa, wb, spread) = (wa * b.factor, wb * a.factor, spread * (a.factor * b.factor));
    }
    let reciprocal = Lanes::ONE / (wa + wb);
    let y = (wb - wa) * reciprocal;
    spread * reciprocal * (y * y * (2.0 / 3.0) + 2.0)
}

/// `stage_k`, or as near to it as [`STAGE_CHANGE_K`] from `start_k` allows.
///
/// Where the exchange has just jumped, the inner stage of a long step overshoots by up to 1/y - 1 times the whole change.
/// The linear part of that cancels in the result. What is not linear would not: T^4 at the face, and a resistivity so far
/// from the one of the matrix that the method were no longer stable. Ordinary steps change less and are not touched.
#[inline(always)]
fn within_a_stage(start_k: Lanes, stage_k: Lanes) -> Lanes {
    let limit = Lanes::splat(STAGE_CHANGE_K);
    stage_k.min(start_k + limit).max(start_k - limit)
}

/// Flux into a face at `stage_k`, from `start_k` at the start of the step.
#[inline(always)]
fn stage_flux(then: &Exchange, start_k: Lanes, stage_k: Lanes) -> Lanes {
    let near = within_a_stage(start_k, stage_k);
    then.flux_into(near) - then.stiffness_w_m2_k(near) * (stage_k - near)
}
