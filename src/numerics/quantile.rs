//! Quantiles of a sample, mean, and the spread of replicate means.

/// Quantile `p` of sorted values, linear between order statistics (Hyndman & Fan 1996, type 7; recalled).
///
/// # Panics
/// On an empty sample.
///
/// ```
/// use spallcast::numerics::quantile::quantile_sorted;
/// assert_eq!(quantile_sorted(&[1.0, 2.0, 3.0, 4.0], 0.5), 2.5);
/// ```
pub fn quantile_sorted(sorted: &[f64], p: f64) -> f64 {
    assert!(!sorted.is_empty(), "a quantile needs a sample");
    let place = p * (sorted.len() - 1) as f64;
    let low = place.floor() as usize;
    let high = (low + 1).min(sorted.len() - 1);
    sorted[low] + (sorted[high] - sorted[low]) * (place - low as f64)
}

/// Sorts finite values ascending.
pub fn sorted(mut values: Vec<f64>) -> Vec<f64> {
    values.sort_by(f64::total_cmp);
    values
}

/// Arithmetic mean; `None` for no values.
pub fn mean(values: &[f64]) -> Option<f64> {
    (!values.is_empty()).then(|| values.iter().sum::<f64>() / values.len() as f64)
}

/// Standard error of the mean of replicates, from their scatter: sd / sqrt(n). `None` for fewer than two.
///
/// ```
/// let se = spallcast::numerics::quantile::replicate_error(&[1.0, 3.0]).unwrap();
/// assert!((se - 1.0).abs() < 1e-15);
/// ```
pub fn replicate_error(replicate_means: &[f64]) -> Option<f64> {
    let n = replicate_means.len();
    if n < 2 {
        return None;
    }
    let centre = mean(replicate_means)?;
    let sum: f64 = replicate_means.iter().map(|x| (x - centre) * (x - centre)).sum();
    Some((sum / (n - 1) as f64 / n as f64).sqrt())
}
