//! Cubics through four neighbouring values of an array that is smooth in its index.

use super::lanes::Lanes;

/// A broken index in an array of some length: the four nodes around it and their weights.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place {
    first: usize,
    weights: [f64; 4],
    /// Node at or before the index, with one after it.
    below: usize,
}

impl Place {
    /// A place in arrays of `n`.
    ///
    /// ```
    /// use spallcast::numerics::{cubic::Place, lanes::Lanes};
    /// let cubes: Vec<Lanes> = (0..10).map(|i| Lanes::splat(f64::from(i).powi(3))).collect();
    /// assert!((Place::new(10, 4.25).of(&cubes, 0) - 4.25f64.powi(3)).abs() < 1e-12);
    /// ```
    ///
    /// # Panics
    /// With fewer than four nodes.
    pub fn new(n: usize, index: f64) -> Place {
        assert!(n >= 4, "a cubic needs four nodes");
        let first = (index.max(1.0) as usize - 1).min(n - 4);
        let v = index - first as f64;
        let (a, b, c, d) = (v, v - 1.0, v - 2.0, v - 3.0);
        Place {
            first,
            weights: [-b * c * d / 6.0, a * c * d / 2.0, -a * b * d / 2.0, a * b * c / 6.0],
            below: (index as usize).min(n - 2),
        }
    }

    /// Value of one lane of an array there.
    pub fn of(&self, array: &[Lanes], lane: usize) -> f64 {
        self.weights.iter().zip(&array[self.first..]).map(|(w, v)| w * v.0[lane]).sum()
    }

    /// [`Place::of`], kept between the two nearest nodes, so that a front is not overshot.
    pub fn within(&self, array: &[Lanes], lane: usize) -> f64 {
        let (a, b) = (array[self.below].0[lane], array[self.below + 1].0[lane]);
        self.of(array, lane).clamp(a.min(b), a.max(b))
    }
}

/// Value of one lane of `array` `[n]` at a broken index.
pub fn at(array: &[Lanes], lane: usize, index: f64) -> f64 {
    Place::new(array.len(), index).of(array, lane)
}

/// [`at`], kept between the two nearest nodes.
pub fn at_within(array: &[Lanes], lane: usize, index: f64) -> f64 {
    Place::new(array.len(), index).within(array, lane)
}

/// Index between `from` and `from + 1` at which one lane of `array` reaches `mark`, which it does between these nodes.
pub fn crossing(array: &[Lanes], lane: usize, from: usize, mark: f64) -> f64 {
    const STEPS: usize = 4;
    let first = from.max(1).min(array.len() - 3) - 1;
    let y: [f64; 4] = std::array::from_fn(|j| array[first + j].0[lane] - mark);
    let (d1, d2, d3) = (y[1] - y[0], (y[2] - 2.0 * y[1] + y[0]) / 2.0, (y[3] - 3.0 * y[2] + 3.0 * y[1] - y[0]) / 6.0);
    let low = (from - first) as f64;
    let (below, above) = (array[from].0[lane] - mark, array[from + 1].0[lane] - mark);
    // Newton's steps from the straight line, kept between the nodes.
    let mut v = low + below / (below - above);
    for _ in 0..STEPS {
        let value = y[0] + v * (d1 + (v - 1.0) * (d2 + (v - 2.0) * d3));
        let slope = d1 + d2 * (2.0 * v - 1.0) + d3 * (3.0 * v * v - 6.0 * v + 2.0);
        v = if slope != 0.0 { (v - value / slope).clamp(low, low + 1.0) } else { v };
    }
    first as f64 + v
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_smooth_array_is_met_and_a_front_is_not_overshot() {
        let wave: Vec<Lanes> = (0..30).map(|i| Lanes::splat(libm::sin(0.2 * f64::from(i)))).collect();
        for index in [0.3, 1.0, 7.7, 28.9] {
            assert!((at(&wave, 3, index) - libm::sin(0.2 * index)).abs() < 2e-4);
        }
        assert!((crossing(&wave, 0, 3, libm::sin(0.7)) - 3.5).abs() < 1e-3);
        let front: Vec<Lanes> = (0..8).map(|i| Lanes::splat(f64::from(u8::from(i < 4)))).collect();
        assert!(at(&front, 0, 2.5) > 1.0);
        assert_eq!(at_within(&front, 0, 2.5), 1.0);
    }
}
