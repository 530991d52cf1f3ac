//! Families into networks: what every pool shape could do for the spec, which families pay their
//! way (column generation), which of them to build (MILP), and whether a change of one family
//! makes the whole cheaper.

pub mod alone;
pub mod build;
pub mod candidates;
pub mod columns;
pub(crate) mod desk;
pub mod improve;
pub mod master;
pub mod milp;
pub mod plan;
pub mod polish;
pub mod resize;
pub mod resolve;
mod slp;
pub mod workshop;
