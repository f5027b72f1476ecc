//! Small problems with known answers, shared by the conduction tests.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use spallcast::heat::boundary::{Exchange, Leg, Spacing, SurfaceForcing};
use spallcast::heat::column::Column;
use spallcast::heat::grid::Grid;
use spallcast::heat::march::{Account, March, Moment, Observer, Verdict};
use spallcast::heat::material::{HeatCurve, Material, Resistivity};
use spallcast::heat::step::Stepper;
use spallcast::numerics::lanes::Lanes;

/// Exchange that does not change, from time zero to an end.
pub struct Steady {
    pub exchange: Exchange,
    pub end_s: f64,
    pub steps: usize,
}

impl SurfaceForcing for Steady {
    fn legs(&self) -> usize {
        1
    }
    fn leg(&self, _leg: usize) -> Leg {
        Leg { start_s: Lanes::ZERO, end_s: Lanes::splat(self.end_s), steps: self.steps, spacing: Spacing::Squared }
    }
    fn exchange(&self, _leg: usize, _t_s: Lanes, _live: Lanes) -> Exchange {
        self.exchange
    }
}

pub fn nothing() -> Exchange {
    Exchange {
        emissivity: Lanes::ZERO,
        irradiance_w_m2: Lanes::ZERO,
        h_w_m2_k: Lanes::ZERO,
        gas_k: Lanes::ZERO,
        flux_w_m2: Lanes::ZERO,
        rain_cap_w_m2: Lanes::ZERO,
    }
}

pub struct Nobody;
impl Observer for Nobody {
    fn see(&mut self, _column: &mut Column, _moment: &Moment) -> Verdict {
        Verdict::Continue
    }
}

/// Rock of constant properties.
pub fn constant_rock(curve: &HeatCurve, k_w_m_k: f64, capacity_j_m3_k: f64) -> Material<'_> {
    Material {
        capacity_j_m3_k: Lanes::splat(capacity_j_m3_k),
        resistivity: Resistivity::Linear { a: Lanes::splat(1.0 / k_w_m_k), b: Lanes::ZERO },
        curve,
        water: None,
        first_heating_damage: false,
    }
}

/// Runs a forcing on rock at `start_k` and returns the column and its account.
pub fn run(
    material: &Material,
    forcing: &impl SurfaceForcing,
    start_k: f64,
    nodes: usize,
    depth_m: f64,
    stretch: f64,
    curvature_per_m: f64,
) -> (Column, Account) {
    let grid = Grid::new(nodes, Lanes::splat(depth_m), stretch, Lanes::splat(curvature_per_m));
    let mut column = Column::uniform(grid, material, Lanes::splat(start_k));
    let mut stepper = Stepper::new(&column.grid, material);
    let march = March { refine: 1, absorbed_limit_j_m2: Lanes::splat(f64::INFINITY) };
    let account = march.run(&mut column, material, forcing, &mut stepper, &mut Nobody);
    (column, account)
}
