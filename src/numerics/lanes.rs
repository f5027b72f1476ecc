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

    /// Per lane: `yes` where `left` exceeds `right`, else `no`.
    #[inline(always)]
    pub fn where_greater(left: Lanes, right: Lanes, yes: Lanes, no: Lanes) -> Lanes {
        Lanes::from_fn(|l| if left.0[l] > right.0[l] { yes.0[l] } else { no.0[l] })
    }

    /// Largest lane.
    #[inline(always)]
    pub fn largest(self) -> f64 {
        self.0.iter().copied().fold(f64::NEG_INFINITY, f64::max)
    }
}

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
