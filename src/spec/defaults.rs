//! What a spec means by what it leaves out, in one place.

use super::Effort;
use crate::units::Kelvin;

/// Nominal temperature, 27 degC, clamped into the spec's range.
pub const NOMINAL_TEMPERATURE: Kelvin = Kelvin(300.15);

/// Copies of the reference current.
pub const COPIES: u32 = 1;

/// Accuracy of the reference current itself: exact.
pub const TOLERANCE: f64 = 0.0;

/// How many equal currents an output stands for.
pub const COUNT: u32 = 1;

/// Standard deviations of mismatch that count against an accuracy.
pub const SIGMA: f64 = 3.0;

/// Figures that span the front.
pub const TRADE: [&str; 2] = ["area", "overhead_current"];

/// Search effort.
pub const EFFORT: Effort = Effort::Normal;

/// Seed of the search.
pub const SEED: u64 = 1;
