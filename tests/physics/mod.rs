//! The physics from the ground up: arithmetic, transistor, circuit, published circuits.

mod convergence;
mod devices;
mod draft;
mod golden;
pub(crate) mod mirrors;
mod networks;
mod numeric;
mod support;
mod textbook;
