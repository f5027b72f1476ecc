//! Eight draws side by side.
//!
//! A [`Lanes`] holds one quantity for eight draws of the ensemble. Every operation acts on the eight alike and is a plain
//! IEEE multiplication, addition, division, square root or comparison, never a fused one, so a result has the same bits
//! whatever instruction set the compiler chose.

use std::ops::{Add, AddAssign, Div, Mul, MulAssign, Neg, Sub, SubAssign};

/// Draws that are marched together.
pub const LANES: usize = 8;

/// One quantity for [`LANES`] draws.
#[derive(Debug, Clone, Copy, PartialEq)]
#[repr(align(64))]
pub struct Lanes(pub [f64; LANES]);

impl Lanes {
    /// Zero in every lane.
    pub const ZERO: Lanes = Lanes([0.0; LANES]);
    /// One in every lane.
    pub const ONE: Lanes = Lanes([1.0; LANES]);

    /// The same value in every lane.
    #[inline(always)]
    pub const fn splat(x: f64) -> Lanes {
        Lanes([x; LANES])
    }

    /// A value computed per lane.
    #[inline(always)]
    pub fn from_fn(f: impl FnMut(usize) -> f64) -> Lanes {
        Lanes(std::array::from_fn(f))
    }

    /// A function applied to each lane.
    #[inline(always)]
    pub fn map(self, mut f: impl FnMut(f64) -> f64) -> Lanes {
        Lanes::from_fn(|l| f(self.0[l]))
    }

    /// Lane by lane, the larger.
    #[inline(always)]
    pub fn max(self, other: Lanes) -> Lanes {
        Lanes::from_fn(|l| if self.0[l] > other.0[l] { self.0[l] } else { other.0[l] })
    }

    /// Lane by lane, the smaller.
    #[inline(always)]
    pub fn min(self, other: Lanes) -> Lanes {
        Lanes::from_fn(|l| if self.0[l] < other.0[l] { self.0[l] } else { other.0[l] })
    }

    /// Square root of each lane.
    #[inline(always)]
    pub fn sqrt(self) -> Lanes {
        self.map(f64::sqrt)
    }

    /// Absolute value of each lane.
    #[inline(always)]
    pub fn abs(self) -> Lanes {
        self.map(f64::abs)
    }

    /// Each lane to the fourth power.
    #[inline(always)]
    pub fn fourth(self) -> Lanes {
        let square = self * self;
        square * square
    }

    /// e to each lane, within 1e-15 of itself; lanes outside -700 to 700 are taken at the bound.
    ///
    /// e^x = 2^k e^r with k the nearest whole number to x/ln 2, and a Taylor polynomial of degree 13 in |r| below .35.
    ///
    /// ```
    /// use spallcast::numerics::lanes::Lanes;
    /// assert!((Lanes::splat(-1.3).exp().0[2] / libm::exp(-1.3) - 1.0).abs() < 1e-15);
    /// ```
    #[inline(always)]
    pub fn exp(self) -> Lanes {
        /// Added to a number below 2^51 it leaves the nearest whole number in the low bits.
        const ROUND: f64 = 6_755_399_441_055_744.0;
        const LN_2_HIGH: f64 = 0.693_147_180_369_123_8;
        const LN_2_LOW: f64 = 1.908_214_929_270_587_7e-10;
        let x = self.max(Lanes::splat(-700.0)).min(Lanes::splat(700.0));
        let rounded = x * core::f64::consts::LOG2_E + Lanes::splat(ROUND);
        let k = rounded - Lanes::splat(ROUND);
        let r = x - k * LN_2_HIGH - k * LN_2_LOW;
        let mut sum = Lanes::splat(INVERSE_FACTORIALS[13]);
        for f in INVERSE_FACTORIALS[..13].iter().rev() {
            sum = sum * r + Lanes::splat(*f);
        }
        Lanes::from_fn(|l| sum.0[l] * f64::from_bits(rounded.0[l].to_bits().wrapping_add(1023) << 52))
    }

    /// Per lane: `yes` where `left` exceeds `right`, else `no`.
    #[inline(always)]
    pub fn where_greater(left: Lanes, right: Lanes, yes: Lanes, no: Lanes) -> Lanes {
        Lanes::from_fn(|l| if left.0[l] > right.0[l] { yes.0[l] } else { no.0[l] })
    }

    /// Largest lane; halves are compared with halves, which registers do side by side. No lane may be not-a-number.
    #[inline(always)]
    pub fn largest(self) -> f64 {
        let larger = |a: f64, b: f64| if a > b { a } else { b };
        let four: [f64; LANES / 2] = std::array::from_fn(|l| larger(self.0[l], self.0[l + LANES / 2]));
        let two: [f64; LANES / 4] = std::array::from_fn(|l| larger(four[l], four[l + LANES / 4]));
        larger(two[0], two[1])
    }

    /// Whether any lane has other bits than the other's.
    #[inline(always)]
    pub fn differs(self, other: Lanes) -> bool {
        let bits: [u64; LANES] = std::array::from_fn(|l| self.0[l].to_bits() ^ other.0[l].to_bits());
        let four: [u64; LANES / 2] = std::array::from_fn(|l| bits[l] | bits[l + LANES / 2]);
        let two: [u64; LANES / 4] = std::array::from_fn(|l| four[l] | four[l + LANES / 4]);
        (two[0] | two[1]) != 0
    }
}

/// 1/n! for n up to 13.
const INVERSE_FACTORIALS: [f64; 14] = {
    let mut list = [1.0; 14];
    let mut n = 1;
    while n < 14 {
        list[n] = list[n - 1] / n as f64;
        n += 1;
    }
    list
};

macro_rules! lanewise {
    ($($trait:ident $method:ident $op:tt;)+) => {$(
        impl $trait for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: Lanes) -> Lanes {
                Lanes::from_fn(|l| self.0[l] $op other.0[l])
            }
        }
        impl $trait<f64> for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: f64) -> Lanes {
                Lanes::from_fn(|l| self.0[l] $op other)
            }
        }
    )+};
}
lanewise! { Add add +; Sub sub -; Mul mul *; Div div /; }

impl Neg for Lanes {
    type Output = Lanes;
    #[inline(always)]
    fn neg(self) -> Lanes {
        Lanes::from_fn(|l| -self.0[l])
    }
}
impl AddAssign for Lanes {
    #[inline(always)]
    fn add_assign(&mut self, other: Lanes) {
        *self = *self + other;
    }
}
impl SubAssign for Lanes {
    #[inline(always)]
    fn sub_assign(&mut self, other: Lanes) {
        *self = *self - other;
    }
}
impl MulAssign for Lanes {
    #[inline(always)]
    fn mul_assign(&mut self, other: Lanes) {
        *self = *self * other;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exponentials_agree_with_the_library() {
        for i in -7000..7000 {
            let x = f64::from(i) * 0.1;
            assert!((Lanes::splat(x).exp().0[5] / libm::exp(x) - 1.0).abs() < 1e-15, "{x}");
        }
        assert_eq!(Lanes::splat(-1e9).exp().0[0], Lanes::splat(-700.0).exp().0[0]);
    }

    #[test]
    fn arithmetic_acts_on_each_lane() {
        let a = Lanes::from_fn(|l| l as f64 + 1.0);
        let b = Lanes::splat(2.0);
        assert_eq!(((a + b) * b - a / b).0[3], (4.0 + 2.0) * 2.0 - 2.0);
        assert_eq!(a.fourth().0[1], 16.0);
        assert_eq!(a.largest(), 8.0);
        assert_eq!(
            Lanes::where_greater(a, Lanes::splat(4.0), Lanes::ONE, Lanes::ZERO).0,
            [0., 0., 0., 0., 1., 1., 1., 1.]
        );
    }
}
