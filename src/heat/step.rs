//! One time step: a two-stage linearly implicit Rosenbrock method on the enthalpy form.
//!
//! Semi-discrete equation of node i, per unit area of face, with heat content v_i:
//!
//! C_i dv_i/dt = F_i = g_{i-1} (T_{i-1} - T_i) - g_i (T_i - T_{i+1}) + [i = 0] q(t, T_0)
//!
//! C_i = rho c20 V_i;  g_i = (A/dz)_i / ( (w_i + w_{i+1})/2 );  T_i = T(v_i), b_i = dT/dv.
//!
//! Stages of the ROS2 method (Verwer, Spee, Blom & Hundsdorfer 1999, recalled), J = dF/dv with frozen g:
//!
//! (C - y dt J) k1 = F(t, v) + y dt F_t
//! (C - y dt J) k2 = F(t + dt, v + dt k1) - 2 C k1 - y dt F_t
//! v(t + dt) = v + dt (3/2 k1 + 1/2 k2),   y = 1 - 1/sqrt 2
//!
//! It is of second order for any J, so freezing the conductances in J costs no order, and L-stable for an exact one.
//! The matrix is tridiagonal and the same in both stages; it is eliminated from the deep end to the face. Interior fluxes
//! cancel in pairs in every stage, so the heat that enters through the face, returned by [`Stepper::step`], equals the
//! gain of the column to rounding.

use super::boundary::Exchange;
use super::column::Column;
use super::material::Material;
use crate::numerics::lanes::Lanes;

/// y = 1 - 1/sqrt 2.
const GAMMA: f64 = 1.0 - core::f64::consts::FRAC_1_SQRT_2;

/// Largest change of the face within a stage up to which its radiation is followed exactly, K.
const STAGE_CHANGE_K: f64 = 150.0;
/// Range in which the resistivity of an inner stage is taken, K.
const COLDEST_K: f64 = 200.0;
const HOTTEST_K: f64 = 2000.0;

/// Work arrays of the step, reused from step to step.
#[derive(Debug, Clone)]
pub struct Stepper {
    /// Reciprocal pivot of each row, after elimination.
    pivot: Vec<Lanes>,
    /// k_{i} = rhs_i pivot_i + follow_i k_{i-1}.
    follow: Vec<Lanes>,
    /// y dt g_i.
    link: Vec<Lanes>,
    rhs: Vec<Lanes>,
    k1: Vec<Lanes>,
    stage_temperature: Vec<Lanes>,
    stage_resistivity: Vec<Lanes>,
}

impl Stepper {
    /// Work arrays for `n` nodes.
    pub fn new(n: usize) -> Stepper {
        let zero = vec![Lanes::ZERO; n];
        Stepper {
            pivot: zero.clone(),
            follow: zero.clone(),
            link: zero.clone(),
            rhs: zero.clone(),
            k1: zero.clone(),
            stage_temperature: zero.clone(),
            stage_resistivity: zero,
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
        let n = column.content_k.len();
        let gdt = dt_s * GAMMA;
        let (volume, spread) = (&column.grid.volume_m[..n], &column.grid.area_over_distance_per_m[..n - 1]);
        let (content, slope) = (&mut column.content_k[..n], &column.slope[..n]);
        let (temperature, hottest) = (&column.temperature_k[..n], &column.hottest_k[..n]);
        let factor = &column.conductivity_factor[..n];
        let (pivot, follow, link) = (&mut self.pivot[..n], &mut self.follow[..n], &mut self.link[..n]);
        let (rhs, k1) = (&mut self.rhs[..n], &mut self.k1[..n]);
        let (stage_t, stage_w) = (&mut self.stage_temperature[..n], &mut self.stage_resistivity[..n]);
        let capacity = material.capacity_j_m3_k;
        let remembers = material.remembers();

        for i in 0..n {
            let w = material.resistivity(temperature[i], slope[i]);
            stage_w[i] = if remembers { w / factor[i] } else { w };
        }
        let flux_now = now.flux_into(temperature[0]);
        let flux_drift = (then.flux_into(temperature[0]) - flux_now) * GAMMA;
        net_power(spread, temperature, stage_w, flux_now, rhs, |i, g| link[i] = gdt * g);
        rhs[0] += flux_drift;

        // Eliminate from the deep end to the face.
        let face_link = gdt * now.stiffness_w_m2_k(temperature[0]);
        for i in (0..n).rev() {
            let mut diagonal = capacity * volume[i];
            let above = if i > 0 { link[i - 1] } else { face_link };
            if i + 1 < n {
                // Row i: -link_i b_{i+1} k_{i+1}, with k_{i+1} = rhs pivot + follow k_i.
                let carry = link[i] * slope[i + 1];
                diagonal += (above + link[i]) * slope[i] - carry * follow[i + 1];
                rhs[i] += carry * (rhs[i + 1] * pivot[i + 1]);
            } else {
                diagonal += above * slope[i];
            }
            pivot[i] = Lanes::ONE / diagonal;
            if i > 0 {
                follow[i] = link[i - 1] * slope[i - 1] * pivot[i];
            }
        }
        k1[0] = rhs[0] * pivot[0];
        for i in 1..n {
            k1[i] = rhs[i] * pivot[i] + follow[i] * k1[i - 1];
        }
        let entered_1 = flux_now + flux_drift - face_link * slope[0] * k1[0];

        // Second stage, same matrix.
        for i in 0..n {
            let (t, s) = material.temperature(content[i] + dt_s * k1[i], hottest[i]);
            stage_t[i] = t;
            let t = t.max(Lanes::splat(COLDEST_K)).min(Lanes::splat(HOTTEST_K));
            let w = material.resistivity(t, s);
            // The factor of this stage's own temperature: the one from the start of the step would cost an order.
            stage_w[i] = if remembers { w / material.conductivity_factor(t, hottest[i].max(t)) } else { w };
        }
        let flux_then = stage_flux(then, temperature[0], stage_t[0]);
        net_power(spread, stage_t, stage_w, flux_then, rhs, |_, _| {});
        rhs[0] -= flux_drift;
        for i in (0..n).rev() {
            rhs[i] -= capacity * volume[i] * k1[i] * 2.0;
            if i + 1 < n {
                rhs[i] += link[i] * slope[i + 1] * (rhs[i + 1] * pivot[i + 1]);
            }
        }
        let mut k2 = rhs[0] * pivot[0];
        let entered_2 = flux_then - flux_drift - face_link * slope[0] * k2;
        content[0] += dt_s * (k1[0] * 1.5 + k2 * 0.5);
        for i in 1..n {
            k2 = rhs[i] * pivot[i] + follow[i] * k2;
            content[i] += dt_s * (k1[i] * 1.5 + k2 * 0.5);
        }
        column.refresh(material);
        dt_s * (entered_1 + entered_2) * 0.5
    }
}

/// Flux into a face at `stage_k`, from `start_k` at the start of the step.
///
/// A face whose exchange has just jumped overshoots in the inner stage of a long step by up to 1/y - 1 times the whole
/// change. The linear part of that cancels in the result; the curvature of T^4 would not, so it is taken at most
/// [`STAGE_CHANGE_K`] away. Ordinary steps change less and are not touched.
#[inline(always)]
fn stage_flux(then: &Exchange, start_k: Lanes, stage_k: Lanes) -> Lanes {
    let limit = Lanes::splat(STAGE_CHANGE_K);
    let near = stage_k.min(start_k + limit).max(start_k - limit);
    then.flux_into(near) - then.stiffness_w_m2_k(near) * (stage_k - near)
}

/// F of every node, W/m2 of face, from temperatures and resistivities; shows each conductance to `keep`.
#[inline(always)]
fn net_power(
    spread: &[Lanes],
    t: &[Lanes],
    w: &[Lanes],
    face_flux: Lanes,
    power: &mut [Lanes],
    mut keep: impl FnMut(usize, Lanes),
) {
    let n = power.len();
    let mut from_above = face_flux;
    for i in 0..n - 1 {
        let g = spread[i] * 2.0 / (w[i] + w[i + 1]);
        keep(i, g);
        let down = g * (t[i] - t[i + 1]);
        power[i] = from_above - down;
        from_above = down;
    }
    power[n - 1] = from_above;
}
