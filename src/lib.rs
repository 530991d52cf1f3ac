//! biasloom: from a table of bias-current requirements to verified networks of MOS mirrors.

pub mod assembly;
pub mod cells;
pub mod circuit;
pub mod cli;
pub mod device;
pub mod diag;
pub mod explore;
pub mod figures;
pub mod front;
pub mod network;
pub mod numeric;
pub mod process;
pub mod report;
pub mod search;
pub mod spec;
pub mod units;
pub mod yaml;
