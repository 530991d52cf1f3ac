//! Eight `f64` side by side, with our own exponential, logarithm and square root.
//!
//! The loops below compile to vector instructions; see [`super::dispatch`] for the choice among
//! them. The transcendental functions are polynomials of basic operations, so every machine
//! gives the same digits. Accuracy: at most 2 units in the last place over the stated range.

#![expect(
    clippy::needless_range_loop,
    reason = "a loop over a fixed range of indices is what compiles to one vector instruction"
)]

use std::ops::{Add, AddAssign, Div, Mul, Neg, Sub, SubAssign};

/// Number of lanes.
pub const WIDTH: usize = 8;

/// Eight numbers handled together.
#[derive(Debug, Clone, Copy, PartialEq)]
#[repr(align(64))]
pub struct Lanes(pub [f64; WIDTH]);

/// Eight truth values.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Mask(pub [bool; WIDTH]);

#[inline(always)]
fn map(a: Lanes, f: impl Fn(f64) -> f64) -> Lanes {
    let mut out = [0.0; WIDTH];
    for i in 0..WIDTH {
        out[i] = f(a.0[i]);
    }
    Lanes(out)
}

#[inline(always)]
fn zip(a: Lanes, b: Lanes, f: impl Fn(f64, f64) -> f64) -> Lanes {
    let mut out = [0.0; WIDTH];
    for i in 0..WIDTH {
        out[i] = f(a.0[i], b.0[i]);
    }
    Lanes(out)
}

macro_rules! operator {
    ($trait:ident, $method:ident, $op:tt) => {
        impl $trait for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: Lanes) -> Lanes {
                zip(self, other, |a, b| a $op b)
            }
        }
        impl $trait<f64> for Lanes {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: f64) -> Lanes {
                map(self, |a| a $op other)
            }
        }
        impl $trait<Lanes> for f64 {
            type Output = Lanes;
            #[inline(always)]
            fn $method(self, other: Lanes) -> Lanes {
                map(other, |b| self $op b)
            }
        }
    };
}
operator!(Add, add, +);
operator!(Sub, sub, -);
operator!(Mul, mul, *);
operator!(Div, div, /);

impl Neg for Lanes {
    type Output = Lanes;
    #[inline(always)]
    fn neg(self) -> Lanes {
        map(self, |a| -a)
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

impl Mask {
    /// All lanes false.
    pub const NONE: Mask = Mask([false; WIDTH]);
    /// True where either is.
    #[inline(always)]
    pub fn or(self, other: Mask) -> Mask {
        let mut out = [false; WIDTH];
        for i in 0..WIDTH {
            out[i] = self.0[i] | other.0[i];
        }
        Mask(out)
    }
    /// True where both are.
    #[inline(always)]
    pub fn and(self, other: Mask) -> Mask {
        let mut out = [false; WIDTH];
        for i in 0..WIDTH {
            out[i] = self.0[i] & other.0[i];
        }
        Mask(out)
    }
    /// True where this is false.
    #[inline(always)]
    #[expect(clippy::should_implement_trait, reason = "reads like its siblings")]
    pub fn not(self) -> Mask {
        Mask(self.0.map(|b| !b))
    }
    /// Whether every lane is true.
    #[inline(always)]
    pub fn all(self) -> bool {
        self.0.iter().all(|&b| b)
    }
    /// Whether any lane is true.
    #[inline(always)]
    pub fn any(self) -> bool {
        self.0.iter().any(|&b| b)
    }
}

impl Default for Lanes {
    fn default() -> Self {
        Lanes::ZERO
    }
}

impl Lanes {
    /// Zero in every lane.
    pub const ZERO: Lanes = Lanes([0.0; WIDTH]);
    /// One in every lane.
    pub const ONE: Lanes = Lanes([1.0; WIDTH]);

    /// The same number in every lane.
    #[inline(always)]
    pub fn splat(value: f64) -> Lanes {
        Lanes([value; WIDTH])
    }
    /// Lane by lane from a function of the index.
    #[inline(always)]
    pub fn from_fn(f: impl FnMut(usize) -> f64) -> Lanes {
        Lanes(std::array::from_fn(f))
    }
    /// Larger of two, lane by lane; the second where the first is not a number.
    #[inline(always)]
    pub fn max(self, other: Lanes) -> Lanes {
        zip(self, other, |a, b| if a > b { a } else { b })
    }
    /// Smaller of two, lane by lane; the second where the first is not a number.
    #[inline(always)]
    pub fn min(self, other: Lanes) -> Lanes {
        zip(self, other, |a, b| if a < b { a } else { b })
    }
    /// Magnitude.
    #[inline(always)]
    pub fn abs(self) -> Lanes {
        map(self, f64::abs)
    }
    /// Square root (exact to half a unit in the last place, by IEEE 754).
    #[inline(always)]
    pub fn sqrt(self) -> Lanes {
        map(self, f64::sqrt)
    }
    /// `self < other`.
    #[inline(always)]
    pub fn lt(self, other: Lanes) -> Mask {
        let mut out = [false; WIDTH];
        for i in 0..WIDTH {
            out[i] = self.0[i] < other.0[i];
        }
        Mask(out)
    }
    /// `self` where the mask is true, `other` elsewhere.
    #[inline(always)]
    pub fn select(mask: Mask, yes: Lanes, no: Lanes) -> Lanes {
        let mut out = [0.0; WIDTH];
        for i in 0..WIDTH {
            out[i] = if mask.0[i] { yes.0[i] } else { no.0[i] };
        }
        Lanes(out)
    }
    /// Largest lane.
    pub fn largest(self) -> f64 {
        self.0.iter().copied().fold(f64::NEG_INFINITY, f64::max)
    }
    /// Smallest lane.
    pub fn smallest(self) -> f64 {
        self.0.iter().copied().fold(f64::INFINITY, f64::min)
    }

    /// Exponential. Arguments are clamped to -700..700.
    ///
    /// Reduction to `|r| <= ln 2 / 2` with a two-part ln 2 (Cody & Waite, *Software Manual for
    /// the Elementary Functions*, 1980), then the Taylor polynomial of degree 13, whose first
    /// omitted term is below 5e-18.
    #[inline(always)]
    pub fn exp(self) -> Lanes {
        map(self, |x| {
            const SHIFT: f64 = 6755399441055744.0; // 1.5 * 2^52: rounds to an integer in the low bits
            const LN2_HI: f64 = 6.931_471_803_691_238e-1; // 33 bits: k * LN2_HI is exact
            const LN2_LO: f64 = 1.908_214_929_270_587_7e-10;
            let x = if x > -700.0 { x } else { -700.0 };
            let x = if x < 700.0 { x } else { 700.0 };
            let shifted = x * std::f64::consts::LOG2_E + SHIFT;
            let k = shifted - SHIFT;
            let r = (x - k * LN2_HI) - k * LN2_LO;
            let r2 = r * r;
            let r4 = r2 * r2;
            let r8 = r4 * r4;
            // Estrin's scheme: short chains of dependent operations.
            let a = (1.0 / 2.0 + r * (1.0 / 6.0)) + r2 * (1.0 / 24.0 + r * (1.0 / 120.0));
            let b =
                (1.0 / 720.0 + r * (1.0 / 5040.0)) + r2 * (1.0 / 40320.0 + r * (1.0 / 362880.0));
            let c = (1.0 / 3628800.0 + r * (1.0 / 39916800.0))
                + r2 * (1.0 / 479001600.0 + r * (1.0 / 6227020800.0));
            let p = 1.0 + (r + r2 * (a + (r4 * b + r8 * c)));
            f64::from_bits(p.to_bits().wrapping_add(shifted.to_bits() << 52))
        })
    }

    /// Natural logarithm of a positive, normal number.
    ///
    /// `x = 2^k m` with m in [sqrt(1/2), sqrt(2)), then the odd series in s = (m-1)/(m+1) with
    /// the minimax coefficients of Sun's fdlibm `e_log.c` (1993).
    #[inline(always)]
    #[expect(clippy::excessive_precision, reason = "the digits of the source")]
    pub fn ln(self) -> Lanes {
        map(self, |x| {
            const LN2_HI: f64 = 6.931_471_803_691_238e-1;
            const LN2_LO: f64 = 1.908_214_929_270_587_7e-10;
            // Adding this moves the exponent's step from 1 to sqrt(1/2).
            const OFFSET: u64 = 0x3ff0_0000_0000_0000 - 0x3fe6_a09e_667f_3bcd;
            let bits = x.to_bits().wrapping_add(OFFSET);
            let k = f64::from_bits((bits >> 52) | 0x4330_0000_0000_0000)
                - (4503599627370496.0 + 1023.0);
            let m =
                f64::from_bits((bits & 0x000f_ffff_ffff_ffff).wrapping_add(0x3fe6_a09e_667f_3bcd));
            let f = m - 1.0;
            let s = f / (2.0 + f);
            let z = s * s;
            let w = z * z;
            let t1 = w
                * (3.999999999940941908e-01
                    + w * (2.222219843214978396e-01 + w * 1.531383769920937332e-01));
            let t2 = z
                * (6.666666666666735130e-01
                    + w * (2.857142874366239149e-01
                        + w * (1.818357216161805012e-01 + w * 1.479819860511658591e-01)));
            let half = 0.5 * f * f;
            let r = t1 + t2;
            k * LN2_HI - ((half - (s * (half + r) + k * LN2_LO)) - f)
        })
    }

    /// `self` to a power, for positive, normal `self`.
    #[inline(always)]
    pub fn powf(self, exponent: Lanes) -> Lanes {
        (self.ln() * exponent).exp()
    }
}
