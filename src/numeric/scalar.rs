//! One number at a time, by the same polynomials as the lanes: the platform's own `exp` and `ln`
//! differ in the last digit from machine to machine, and a result recorded on one must hold on
//! all.

use super::lanes::Lanes;

/// Exponential; see [`Lanes::exp`].
pub fn exp(x: f64) -> f64 {
    Lanes::splat(x).exp().0[0]
}

/// Natural logarithm of a positive, normal number; see [`Lanes::ln`].
pub fn ln(x: f64) -> f64 {
    Lanes::splat(x).ln().0[0]
}

/// `x` to a power, for positive, normal `x`.
pub fn powf(x: f64, exponent: f64) -> f64 {
    exp(exponent * ln(x))
}
