//! Cubics through four neighbouring values of an array that is smooth in its index.

use super::lanes::Lanes;

/// First of the four nodes around `index` in an array of `n`, and their weights there.
///
/// ```
/// use spallcast::numerics::cubic::weights;
/// let (first, w) = weights(10, 4.25);
/// let cube = |i: usize| (i as f64).powi(3);
/// let value: f64 = (0..4).map(|j| w[j] * cube(first + j)).sum();
/// assert!((value - 4.25f64.powi(3)).abs() < 1e-12);
/// ```
///
/// # Panics
/// With fewer than four nodes.
pub fn weights(n: usize, index: f64) -> (usize, [f64; 4]) {
    assert!(n >= 4, "a cubic needs four nodes");
    let first = (index.max(1.0) as usize - 1).min(n - 4);
    let v = index - first as f64;
    let (a, b, c, d) = (v, v - 1.0, v - 2.0, v - 3.0);
    (first, [-b * c * d / 6.0, a * c * d / 2.0, -a * b * d / 2.0, a * b * c / 6.0])
}

/// Value of one lane of `array` `[n]` at a broken index.
pub fn at(array: &[Lanes], lane: usize, index: f64) -> f64 {
    let (first, w) = weights(array.len(), index);
    w.iter().zip(&array[first..]).map(|(w, v)| w * v.0[lane]).sum()
}

/// [`at`], kept between the two nearest nodes, so that a front is not overshot.
pub fn at_within(array: &[Lanes], lane: usize, index: f64) -> f64 {
    let below = (index as usize).min(array.len() - 2);
    let (a, b) = (array[below].0[lane], array[below + 1].0[lane]);
    at(array, lane, index).clamp(a.min(b), a.max(b))
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
