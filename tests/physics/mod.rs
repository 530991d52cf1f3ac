//! The physics from the ground up: arithmetic, transistor, circuit, published circuits.

mod convergence;
mod devices;
mod draft;
mod mirrors;
mod numeric;
mod support;
mod textbook;
