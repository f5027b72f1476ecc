//! The state of eight columns of rock below a face.

use super::grid::Grid;
use super::material::Material;
use crate::numerics::cubic;
use crate::numerics::lanes::{LANES, Lanes};

/// State of a batch. Arrays are `[n]`, face first.
#[derive(Debug, Clone)]
pub struct Column {
    /// Where the nodes are.
    pub grid: Grid,
    /// Heat content as an equivalent temperature, K.
    pub content_k: Vec<Lanes>,
    /// Temperature, K.
    pub temperature_k: Vec<Lanes>,
    /// dT/dv.
    pub slope: Vec<Lanes>,
    /// Hottest temperature so far, K.
    pub hottest_k: Vec<Lanes>,
    /// Factor on the conductivity from history.
    pub conductivity_factor: Vec<Lanes>,
    /// Heat content above the start per unit area of face that left with plates, J/m2.
    pub removed_j_m2: Lanes,
    start_content_k: Lanes,
}

impl Column {
    /// Rock at one temperature.
    pub fn uniform(grid: Grid, material: &Material, start_k: Lanes) -> Column {
        let n = grid.len();
        let content = material.content(start_k);
        let (temperature, slope) = material.temperature(content, start_k);
        Column {
            grid,
            content_k: vec![content; n],
            temperature_k: vec![temperature; n],
            slope: vec![slope; n],
            hottest_k: vec![temperature; n],
            conductivity_factor: vec![material.conductivity_factor(temperature, temperature); n],
            removed_j_m2: Lanes::ZERO,
            start_content_k: content,
        }
    }

    /// Heat in the column above its start, per unit area of face, J/m2.
    pub fn heat_j_m2(&self, material: &Material) -> Lanes {
        let sum = self
            .content_k
            .iter()
            .zip(&self.grid.volume_m)
            .fold(Lanes::ZERO, |sum, (v, volume)| sum + (*v - self.start_content_k) * *volume);
        sum * material.capacity_j_m3_k
    }

    /// Brings temperature, slope, peak and history factor in line with the heat content.
    #[inline(always)]
    pub(super) fn refresh(&mut self, material: &Material) {
        for i in 0..self.content_k.len() {
            let (t, slope) = material.temperature(self.content_k[i], self.hottest_k[i]);
            self.temperature_k[i] = t;
            self.slope[i] = slope;
            self.hottest_k[i] = self.hottest_k[i].max(t);
        }
        if material.remembers() {
            for i in 0..self.content_k.len() {
                self.conductivity_factor[i] = material.conductivity_factor(self.temperature_k[i], self.hottest_k[i]);
            }
        }
    }

    /// Takes the outer `thickness_m` off one lane: the rock below becomes the face, on the same grid.
    ///
    /// Heat content and peak are interpolated by cubics that overshoot no node; below the old end of the grid the rock is as it was there.
    /// What left is booked in [`Column::removed_j_m2`].
    pub fn strip(&mut self, material: &Material, lane: usize, thickness_m: f64) {
        let n = self.content_k.len();
        let before = self.heat_j_m2(material).0[lane];
        let (content_k, hottest_k) = (self.content_k.clone(), self.hottest_k.clone());
        for i in 0..n {
            let index = self.grid.index_at(lane, self.grid.depth_m[i].0[lane] + thickness_m);
            let place = cubic::Place::new(n, index);
            self.content_k[i].0[lane] = place.within(&content_k, lane);
            self.hottest_k[i].0[lane] = place.within(&hottest_k, lane);
        }
        self.refresh(material);
        self.removed_j_m2.0[lane] += before - self.heat_j_m2(material).0[lane];
    }

    /// Temperature profile of one lane: `(depth m, temperature K)`, face first.
    pub fn profile(&self, lane: usize) -> Vec<(f64, f64)> {
        assert!(lane < LANES, "a batch has {LANES} lanes");
        self.grid.depth_m.iter().zip(&self.temperature_k).map(|(z, t)| (z.0[lane], t.0[lane])).collect()
    }
}
