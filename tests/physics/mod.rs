//! The physics from the ground up: arithmetic, transistor, circuit, published circuits.

mod devices;
mod numeric;
mod support;
