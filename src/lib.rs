//! biasloom: from a table of bias-current requirements to verified networks of MOS mirrors.

pub mod circuit;
pub mod explore;
pub mod process;
pub mod report;
pub mod spec;
pub mod units;
