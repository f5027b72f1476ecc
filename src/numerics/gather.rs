//! Eight table rows at once: the only code here that is written for one kind of processor.
//!
//! A compiler builds eight looked-up numbers one by one in memory and then waits to read them back as vectors. Where the
//! processor has 256-bit registers, rows are loaded whole and turned into columns in registers. Both ways move the same
//! bits.

use super::lanes::{LANES, Lanes};

/// Rows `rows[place]` of eight lanes as two columns. Places are truncated, and kept within the table.
#[inline(always)]
pub fn pairs(rows: &[[f64; 2]], place: Lanes) -> (Lanes, Lanes) {
    #[cfg(target_arch = "x86_64")]
    if std::arch::is_x86_feature_detected!("avx2") {
        // SAFETY: the processor has the feature, as was just asked.
        #[allow(unsafe_code, reason = "calling a function compiled for a processor feature")]
        return unsafe { wide::pairs(rows, place) };
    }
    pairs_one_by_one(rows, place)
}

/// A place of one lane as an index; not a number counts as 0.
fn index(place: f64, rows: usize) -> usize {
    place.clamp(0.0, (rows - 1) as f64) as usize
}

/// [`pairs`] on any processor.
pub fn pairs_one_by_one(rows: &[[f64; 2]], place: Lanes) -> (Lanes, Lanes) {
    let (mut first, mut second) = (Lanes::ZERO, Lanes::ZERO);
    for l in 0..LANES {
        [first.0[l], second.0[l]] = rows[index(place.0[l], rows.len())];
    }
    (first, second)
}

#[cfg(target_arch = "x86_64")]
#[allow(unsafe_code, reason = "loads through pointers whose range is checked beside them")]
mod wide {
    use super::{LANES, Lanes};
    use std::arch::x86_64::*;

    const HALF: usize = LANES / 2;

    /// Row indices of four lanes, each below `rows`.
    #[inline]
    #[target_feature(enable = "avx2")]
    fn indices(place: &Lanes, from: usize, rows: usize) -> [usize; HALF] {
        assert!(rows > 0 && rows < i32::MAX as usize, "a table has rows");
        // SAFETY: four of the eight lanes from `from`, which is 0 or 4.
        let place = unsafe { _mm256_loadu_pd(place.0[from..from + HALF].as_ptr()) };
        // The larger of zero and not-a-number is the second operand, zero.
        let within = _mm256_min_pd(_mm256_max_pd(place, _mm256_setzero_pd()), _mm256_set1_pd((rows - 1) as f64));
        let whole = _mm256_cvttpd_epi32(within);
        let (low, high) = (_mm_cvtsi128_si64(whole) as u64, _mm_extract_epi64::<1>(whole) as u64);
        [low & 0xffff_ffff, low >> 32, high & 0xffff_ffff, high >> 32].map(|i| i as usize)
    }

    #[inline]
    #[target_feature(enable = "avx2")]
    fn store(lanes: &mut Lanes, from: usize, half: __m256d) {
        // SAFETY: four of the eight lanes from `from`, which is 0 or 4.
        unsafe { _mm256_storeu_pd(lanes.0[from..from + HALF].as_mut_ptr(), half) }
    }

    #[inline]
    #[target_feature(enable = "avx2")]
    pub fn pairs(rows: &[[f64; 2]], place: Lanes) -> (Lanes, Lanes) {
        let (mut first, mut second) = (Lanes::ZERO, Lanes::ZERO);
        for from in [0, HALF] {
            let i = indices(&place, from, rows.len());
            // SAFETY: every index is below the number of rows.
            let row = |j: usize| unsafe { _mm_loadu_pd(rows.get_unchecked(i[j]).as_ptr()) };
            let even = _mm256_set_m128d(row(2), row(0));
            let odd = _mm256_set_m128d(row(3), row(1));
            store(&mut first, from, _mm256_unpacklo_pd(even, odd));
            store(&mut second, from, _mm256_unpackhi_pd(even, odd));
        }
        (first, second)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_ways_give_the_same_rows() {
        let table: Vec<[f64; 2]> = (0..37).map(|i| [f64::from(i), f64::from(100 + i)]).collect();
        let places = Lanes([0.0, 36.99, -5.0, 1e300, f64::NAN, 17.2, 35.999, f64::NEG_INFINITY]);
        let expected = [0.0, 36.0, 0.0, 36.0, 0.0, 17.0, 35.0, 0.0];
        assert_eq!(pairs(&table, places).0.0, expected);
        assert_eq!(pairs(&table, places), pairs_one_by_one(&table, places));
    }
}
