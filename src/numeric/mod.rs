//! Numerical building blocks; each file names its source. No electricity in here.

pub mod dispatch;
pub mod lanes;
pub mod scalar;
pub mod sparse;
